"""From residues to the coefficients: how many primes, which multiple is an integer, which evidence there is.

Z_k times den(Z_(k-1)) times F_k = k eps1 eps2 prod_(mn = k) prod_(alpha < beta) ((m eps1 + n eps2)^2 - a_alpha,beta^2)
(in integers) is nearly an integer: the poles of Z_k that Z_(k-1) does not have are those of F_k. That was observed
and is not proved, so it only saves primes: the multiple may have a denominator left, rational reconstruction looks for
one, and the bits of the modulus that were not needed are part of the answer. One prime is kept out of the
reconstruction and must agree with every coefficient.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import combinations
from math import ceil, lgamma, log, log2, prod

import numpy as np

from ratomega.errors import RatomegaError
from ratomega.exact.rational import ONE, Rational
from ratomega.exact.residues import BadPrimes, Floats, Moduli, PrimeSource, combine, reconstruct, residues_of
from ratomega.regulator.fast.setup import FastSetup

__all__ = ["SPARE_BITS", "Collected", "bits_needed", "collect", "new_poles", "residues_beyond"]

# A wrong fraction passes with a probability of about 2^-45 per coefficient, and then meets one more prime.
SPARE_BITS = 45
# Of some thousand factors about one in 2^22 vanishes modulo a prime by chance.
MOST_BAD_PRIMES = 100


@dataclass(frozen=True, slots=True)
class Collected:
    """The coefficients, the bits of the modulus that each left unused, and the number of primes, the check included."""

    coefficients: tuple[Rational, ...]
    spare_bits: tuple[int, ...]
    primes: int


def new_poles(setup: FastSetup, charge: int) -> Rational:
    """F_charge for the parameters times ``setup.inner``.

    >>> new_poles(FastSetup(1, 1, 1, 2, (1, 0), ((), ()), (), 1, 2, 1), 1)     # eps1 eps2 ((eps1 + eps2)^2 - a^2)
    16
    """
    whole = Rational(setup.inner, setup.scale)
    eps1, eps2 = setup.eps1 * whole, setup.eps2 * whole
    value = charge * eps1 * eps2
    for m in range(1, charge + 1):
        if charge % m == 0:
            for a, b in combinations(setup.coulomb, 2):
                value *= (m * eps1 + charge // m * eps2) ** 2 - ((a - b) * whole) ** 2
    return value


def bits_needed(setup: FastSetup, charge: int, known: Sequence[Rational]) -> int:
    """An estimate of the size in bits of the integer multiple of Z_charge, from Z_0, Z_1, ... as far as ``known``.

    The denominators are taken to be the same share of the expected one throughout. An estimate only: primes that are
    missing come in a second batch.
    """
    poles = [0.0]
    for k in range(1, charge + 1):
        poles.append(poles[-1] + _log2(new_poles(setup, k) * _cleared_masses(setup)))
    last = len(known) - 1
    if last < 1 or known[last] == 0:
        return ceil(poles[charge])
    inner = [_inner(setup, value, k) for k, value in enumerate(known)]
    share = log2(int(inner[last].q)) / poles[last]
    if setup.degree < 0:
        # Entire in q: coefficients fall like a power of k!, with about this exponent where it was tried.
        falling = -0.7 * setup.degree / setup.rank
        size = (_log2(inner[last]) + falling * _log2_factorial(last)) / last * charge
        size -= falling * _log2_factorial(charge)
    else:
        size = _log2(inner[last]) / last * charge
    return max(32, ceil(share * poles[charge - 1] + poles[charge] - poles[charge - 1] + size + 16))


def _inner(setup: FastSetup, value: Rational, charge: int) -> Rational:
    """A coefficient for the parameters times ``inner``, where eps1, eps2 and the Coulomb differences are integers."""
    power = Rational(setup.inner) ** abs(setup.degree * charge)
    return value * power if setup.degree > 0 else value / power


def _cleared_masses(setup: FastSetup) -> int:
    """What clears the masses from one box, once the parameters are multiplied by ``setup.inner``."""
    factors = len(setup.flavours[0]) + 2 * setup.rank * len(setup.adjoints)
    return int((setup.scale // setup.inner) ** factors)


def _log2_factorial(n: int) -> float:
    return lgamma(n + 1) / log(2)


def _log2(value: Rational) -> float:
    top, bottom = abs(int(value.p)), int(value.q)
    return _log2_integer(top) - _log2_integer(bottom)


def _log2_integer(n: int) -> float:
    shift = max(0, n.bit_length() - 60)
    return log2(n >> shift) + shift if n else 0.0


def collect(
    setup: FastSetup,
    charge: int,
    residues: Callable[[Moduli], Floats],
    *,
    bits: int,
    estimate: int,
    batch: int = 64,
    most_primes: int = 4000,
) -> Collected:
    """The coefficients Z_0 ... Z_charge of the setting, from residues modulo primes of ``bits`` bits.

    ``residues`` gives the coefficients of the integer parameters modulo a batch of primes (prime axis last) or raises
    ``BadPrimes``; at most ``batch`` primes are handed over at once. ``estimate`` is the expected size in bits of the
    last one. Raises ``RatomegaError`` when ``most_primes`` do not suffice.
    """
    source = PrimeSource(bits)
    primes: list[int] = []
    columns: list[Floats] = []
    found: list[Rational] = []
    spare: list[int] = []
    wanted = ceil((estimate + SPARE_BITS) / (bits - 0.01)) + 1
    while len(found) <= charge:
        if len(primes) + wanted > most_primes:
            raise RatomegaError(f"{most_primes} primes do not determine the coefficients up to charge {charge}")
        for taken, values in _batches(source, wanted, batch, residues):
            primes.extend(taken)
            columns.append(values)
        table = np.concatenate(columns, axis=1)
        if len(primes) >= 2:
            _extend(setup, charge, table, primes, found, spare)
        wanted = max(2, len(primes) // 8)
    return Collected(tuple(found), tuple(spare), len(primes))


def residues_beyond(
    residues: Callable[[Moduli], Floats], size: int, *, bits: int, batch: int = 64
) -> tuple[tuple[int, ...], Floats]:
    """Primes whose product exceeds ``size``, and the residues of the coefficients: (coefficients, primes)."""
    source = PrimeSource(bits)
    primes: list[int] = []
    columns: list[Floats] = []
    product = 1
    while product <= size:
        missing = (size.bit_length() - product.bit_length()) // bits + 1
        for taken, values in _batches(source, missing, batch, residues):
            primes.extend(taken)
            columns.append(values)
            product *= prod(taken)
    return tuple(primes), np.concatenate(columns, axis=1)


def _batches(
    source: PrimeSource, count: int, largest: int, residues: Callable[[Moduli], Floats]
) -> list[tuple[tuple[int, ...], Floats]]:
    """Residues for ``count`` further primes, bad ones replaced."""
    pieces = -(-count // largest)
    done = []
    replaced = 0
    for n in range(pieces):
        todo = list(source.take(count * (n + 1) // pieces - count * n // pieces))
        while True:
            try:
                done.append((tuple(todo), residues(Moduli.make(todo, last=True))))
                break
            except BadPrimes as bad:
                todo = [p for p in todo if p not in bad.primes]
                todo += source.take(len(bad.primes))
                replaced += len(bad.primes)
                if replaced > count + MOST_BAD_PRIMES:
                    raise RatomegaError("a denominator vanishes modulo every prime, so it is zero") from bad
    return done


def _extend(
    setup: FastSetup, charge: int, table: Floats, primes: list[int], found: list[Rational], spare: list[int]
) -> None:
    """Reconstruct coefficients from the first missing one on, as far as the primes reach; the last prime checks."""
    totals, modulus = combine(np.ascontiguousarray(table[len(found) :, :-1].T), primes[:-1])
    check = Moduli.make(primes[-1:])
    for total in totals:
        k = len(found)
        # ``total`` belongs to the parameters times ``scale``, the multiple to those times ``inner``.
        inner = _inner(setup, setup.rescaled(ONE, k), k)
        cleared = ONE
        if k:
            cleared = new_poles(setup, k) * _cleared_masses(setup) * _inner(setup, found[-1], k - 1).q
        factor = inner * cleared
        multiple = total * int(factor.p) * pow(int(factor.q), -1, modulus) % modulus
        answer = reconstruct(multiple, modulus, spare_bits=SPARE_BITS)
        if answer is None:
            return
        scaled = answer.value / factor
        seen = residues_of([scaled], check)[0, 0]
        if (int(seen) - int(table[k, -1])) % primes[-1]:
            return
        found.append(setup.rescaled(scaled, k))
        spare.append(answer.spare_bits)
