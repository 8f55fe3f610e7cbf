"""Exact numbers through many primes at once: residues in float64, and the way back to fractions.

A residue is a float64 integer in the balanced range |x| <= p/2. Products and sums of products are exact while they
stay a little below 2^53, so matrix products of residues may go through ordinary floating-point linear algebra; one
``reduce`` afterwards brings them back. Each prime stands alone along the prime axis, which is the first axis of every
array here (one matrix per prime lies together in memory), or the last one if ``Moduli.make`` was told so.

Primes are taken downwards from 2^PRIME_BITS, always the same ones. A prime that divides a number which must be
inverted is bad; ``BadPrimes`` names it and the caller takes the next (``PrimeSource.take``).

The way back has two steps: ``combine`` (Chinese remainders) gives one residue modulo the product M of all primes, and
``reconstruct`` finds the fraction u/v behind it by Euclid's algorithm on (M, residue). A step with a quotient of 2^s
means that |u| v is about M / 2^s: s bits more than were needed to write the fraction down. A residue that is no small
fraction shows a quotient of that size with a probability of about 2^-s per step. These *spare bits* are evidence,
not proof, so they travel with the answer (M. Monagan, ISSAC 2004, for the maximal quotient).
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace

import numpy as np
from flint import fmpz, fmpz_mat
from numpy.typing import NDArray

from ratomega.errors import RatomegaError
from ratomega.exact.rational import Rational

__all__ = [
    "PRIME_BITS",
    "BadPrimes",
    "Floats",
    "Moduli",
    "PrimeSource",
    "Reconstruction",
    "combine",
    "longest_dot",
    "reconstruct",
    "residues_of",
]

Floats = NDArray[np.float64]

# Balanced residues of 21-bit primes: 8192 products of two residues can be summed before a reduction is due.
PRIME_BITS = 21
# Reduction subtracts a multiple of p that can exceed the number itself by p/2 and must be exact as well.
EXACT_LIMIT = 2**53 - 2**26
LEAST_PRIME = 2**19


class BadPrimes(RatomegaError):
    """Some primes divide a number that has to be inverted. ``primes`` holds them."""

    def __init__(self, primes: Iterable[int]) -> None:
        self.primes: tuple[int, ...] = tuple(primes)
        super().__init__(f"a denominator vanishes modulo {', '.join(map(str, self.primes))}")


class PrimeSource:
    """The primes below 2^bits, downwards, each handed out once; with a ``radicand`` d only those modulo which d is a
    square other than 0: there Q(sqrt(d)) splits, and a number x + y sqrt(d) has two residues.

    Raises ``RatomegaError`` when they run out at 2^19 (there are 110,000 above).

    >>> source = PrimeSource()
    >>> source.take(2), source.take(1)
    ((2097143, 2097133), (2097131,))
    >>> PrimeSource(radicand=-1).take(2)
    (2097133, 2097097)
    """

    def __init__(self, bits: int = PRIME_BITS, radicand: int = 0) -> None:
        self._top = 2**bits
        self._radicand = radicand
        self._ready: list[int] = []

    def take(self, count: int) -> tuple[int, ...]:
        """The next ``count`` primes. Cost: a sieve over 2^15 numbers per 2000 primes or so."""
        while len(self._ready) < count:
            self._sieve(2**15)
        taken, self._ready = self._ready[:count], self._ready[count:]
        return tuple(taken)

    def _sieve(self, width: int) -> None:
        low, high = self._top - width, self._top
        if low < LEAST_PRIME:
            raise RatomegaError("there are no primes left; the answer has too many digits for this route")
        prime = np.ones(width, dtype=bool)
        for divisor in _small_primes(int(high**0.5) + 1):
            prime[-low % divisor :: divisor] = False
        found = [int(n) for n in (np.nonzero(prime)[0] + low)[::-1]]
        if self._radicand:
            found = [p for p in found if fmpz(self._radicand).jacobi(p) == 1]
        self._ready += found
        self._top = low


def _small_primes(limit: int) -> list[int]:
    prime = np.ones(limit + 1, dtype=bool)
    prime[:2] = False
    for n in range(2, int(limit**0.5) + 1):
        if prime[n]:
            prime[n * n :: n] = False
    return [int(n) for n in np.nonzero(prime)[0]]


def longest_dot(left: float, right: float) -> int:
    """How many products of integers with |x| <= left and |y| <= right may be summed in float64 and then reduced.

    >>> longest_dot(2**21, 2**21)
    2047
    """
    return int(EXACT_LIMIT // (left * right))


@dataclass(frozen=True, slots=True, eq=False)
class Moduli:
    """A batch of primes, and arithmetic of arrays of residues modulo all of them.

    >>> batch = Moduli.make([101, 103])
    >>> x = batch.reduce(np.array([[500.0, -51.0], [500.0, -51.0]]))
    >>> x.tolist()
    [[-5.0, 50.0], [-15.0, -51.0]]
    >>> batch.multiply(x, batch.inverses(x)).tolist()
    [[1.0, 1.0], [1.0, 1.0]]
    """

    primes: tuple[int, ...]
    p: Floats
    reciprocal: Floats
    last: bool
    roots: tuple[int, ...] = ()

    @classmethod
    def make(cls, primes: Sequence[int], *, last: bool = False) -> Moduli:
        """A batch with the prime axis first, or last. The primes must be odd and below 2^26."""
        for p in primes:
            if not (2 < p < 2**26 and p % 2):
                raise ValueError(f"{p} is not an odd prime below 2^26")
        vector: Floats = np.array(primes, dtype=np.float64)
        return cls(tuple(primes), vector, 1.0 / vector, last)

    @classmethod
    def split(cls, primes: Sequence[int], radicand: int, *, last: bool = False) -> Moduli:
        """Every prime twice, with one square root of the radicand and with the other: ``roots``.

        Raises ``ValueError`` for a prime modulo which it has none.

        >>> Moduli.split([13, 17], -1).roots
        (5, 8, 4, 13)
        """
        pairs = [(root := int(fmpz(radicand % p).sqrtmod(p)), p - root) for p in primes]
        twice = cls.make([p for p in primes for _ in range(2)], last=last)
        return replace(twice, roots=tuple(root for pair in pairs for root in pair))

    def __len__(self) -> int:
        return len(self.primes)

    def _shaped(self, vector: Floats, ndim: int) -> Floats:
        return vector if self.last else vector.reshape(-1, *(1,) * (ndim - 1))

    def reduce(self, x: Floats, *, out: Floats | None = None, work: Floats | None = None) -> Floats:
        """The balanced residues of integers |x| <= 2^53 - 2^26; ``out=x`` works in place, ``work`` saves an allocation.

        The result obeys |r| <= p/2 + 1: the rounded quotient may fall to the far side of a tie.
        """
        quotient = np.multiply(x, self._shaped(self.reciprocal, x.ndim), out=work)
        np.rint(quotient, out=quotient)
        quotient *= self._shaped(self.p, x.ndim)
        return np.subtract(x, quotient, out=quotient if out is None else out)

    def multiply(self, x: Floats, y: Floats) -> Floats:
        """The residues of x y, with the usual broadcasting."""
        product = x * y
        return self.reduce(product, out=product)

    def integers(self, values: NDArray[np.int64]) -> Floats:
        """The residues of small integers, the same for every prime: adds the prime axis.

        Raises ``ValueError`` for an integer beyond 2^53 - 2^26, where float64 is no longer safe.
        """
        if values.size and max(int(values.max()), -int(values.min())) > EXACT_LIMIT:
            raise ValueError("integers beyond 2^53 - 2^26 cannot be reduced exactly in float64")
        plain = values.astype(np.float64)
        shape = (*values.shape, len(self)) if self.last else (len(self), *values.shape)
        return self.reduce(np.broadcast_to(plain[..., None] if self.last else plain, shape))

    def inverses(self, x: Floats) -> Floats:
        """The inverses of all entries, by one product tree per prime: three multiplications an entry.

        Raises ``BadPrimes`` when an entry vanishes modulo some prime.
        """
        flat = x.reshape(-1, len(self)).T if self.last else x.reshape(len(self), -1)
        first = self if not self.last else Moduli.make(self.primes)
        inverse = first._tree(flat)
        return np.ascontiguousarray(inverse.T).reshape(x.shape) if self.last else inverse.reshape(x.shape)

    def _tree(self, leaves: Floats) -> Floats:
        count = leaves.shape[1]
        if count == 0:
            return leaves.copy()
        levels = [leaves]
        while levels[-1].shape[1] > 1:
            level = levels[-1]
            if level.shape[1] % 2:
                level = np.concatenate([level, np.ones((len(self), 1))], axis=1)
                levels[-1] = level
            levels.append(self.multiply(level[:, 0::2], level[:, 1::2]))
        root = [int(r) % p for r, p in zip(levels[-1][:, 0], self.primes, strict=True)]
        bad = [p for r, p in zip(root, self.primes, strict=True) if r == 0]
        if bad:
            raise BadPrimes(bad)
        inverted = [pow(r, -1, p) for r, p in zip(root, self.primes, strict=True)]
        inverse = self.reduce(np.array(inverted, dtype=np.float64)[:, None])
        for level in reversed(levels[:-1]):
            inverse = inverse[:, : level.shape[1] // 2]
            below = np.empty_like(level)
            below[:, 0::2] = self.multiply(inverse, level[:, 1::2])
            below[:, 1::2] = self.multiply(inverse, level[:, 0::2])
            inverse = below
        return inverse[:, :count]


def residues_of(values: Sequence[Rational], moduli: Moduli) -> Floats:
    """The residues of exact rationals: shape (primes, values), or (values, primes) with the prime axis last.

    Raises ``BadPrimes`` when a denominator vanishes. Cost: one division of long integers per value and prime.

    >>> residues_of([Rational(1, 2), Rational(-7)], Moduli.make([101, 103])).tolist()
    [[-50.0, -7.0], [-51.0, -7.0]]
    """
    tops, bottoms = [x.p for x in values], [x.q for x in values]
    bad = [p for p in moduli.primes if any(q % p == 0 for q in bottoms)]
    if bad:
        raise BadPrimes(bad)
    rows = [[int(t * pow(int(q % p), -1, p) % p) for t, q in zip(tops, bottoms, strict=True)] for p in moduli.primes]
    table = np.array(rows, dtype=np.float64).reshape(len(moduli), len(values))
    return moduli.reduce(np.ascontiguousarray(table.T) if moduli.last else table)


def combine(residues: Floats, primes: Sequence[int]) -> tuple[list[int], int]:
    """Chinese remainders: for every column of ``residues`` (primes first) the number in [0, M), and M itself.

    Cost: (primes) x (columns) products of a long by a short integer.

    >>> combine(np.array([[1.0, -1.0], [2.0, -1.0]]), [3, 5])
    ([7, 14], 15)
    """
    modulus = fmpz(1)
    for p in primes:
        modulus *= p
    weights = []
    for p in primes:
        cofactor = modulus // p
        weights.append(cofactor * pow(int(cofactor % p), -1, p))
    if residues.size == 0:
        return [0] * residues.shape[1], int(modulus)
    table = fmpz_mat(residues.shape[1], len(primes), residues.T.astype(np.int64).ravel().tolist())
    totals = (table * fmpz_mat(len(primes), 1, weights)).entries()
    return [int(total % modulus) for total in totals], int(modulus)


@dataclass(frozen=True, slots=True)
class Reconstruction:
    """A fraction found behind a residue, and by how many bits the modulus exceeded what it takes to write it."""

    value: Rational
    spare_bits: int


def reconstruct(residue: int, modulus: int, *, spare_bits: int) -> Reconstruction | None:
    """The fraction u/v congruent to ``residue`` that leaves at least ``spare_bits`` bits of the modulus unused.

    None when there is no such fraction: more primes are needed. The first quotient of Euclid's algorithm of at least
    2^spare_bits decides; for an integer it is the very first one. Quadratic in the number of digits.

    >>> m = 1000003 * 1000033 * 1000037
    >>> reconstruct(355 * pow(113, -1, m) % m, m, spare_bits=30)
    Reconstruction(value=355/113, spare_bits=44)
    >>> reconstruct(31415926535897932, m, spare_bits=30) is None
    True
    """
    if spare_bits < 1:
        raise ValueError("at least one spare bit is needed")
    whole = fmpz(modulus)
    old, new = whole, fmpz(residue) % whole
    if new == 0:
        return Reconstruction(Rational(0), int(whole.bit_length()) - 1)
    old_factor, factor = fmpz(0), fmpz(1)
    least = fmpz(1) << spare_bits
    # Invariant: new = factor * residue modulo M, and |factor| * old <= M.
    while new != 0:
        quotient, rest = divmod(old, new)
        if quotient >= least:
            if factor.gcd(whole) != 1:
                return None
            return Reconstruction(Rational(new, factor), int(quotient.bit_length()) - 1)
        old, new = new, rest
        old_factor, factor = factor, old_factor - quotient * factor
    return None

