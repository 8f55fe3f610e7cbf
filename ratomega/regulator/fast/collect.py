"""From residues to the coefficients: how many primes, which multiple is an integer, which evidence there is.

Z_k times den(Z_(k-1)) times F_k = k eps1 eps2 prod_(mn = k) prod_(alpha < beta) ((m eps1 + n eps2)^2 - a_alpha,beta^2)
(in integers) is nearly an integer: the poles of Z_k that Z_(k-1) does not have are those of F_k. That was observed
and is not proved, so it only saves primes: the multiple may have a denominator left, rational reconstruction looks for
one, and the bits of the modulus that were not needed are part of the answer. One prime is kept out of the
reconstruction and must agree with every coefficient. In a quadratic field all this holds for both parts of a
coefficient, with norms in place of factors that are not rational.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import combinations
from math import ceil, lgamma, log, log2, prod

import numpy as np

from ratomega.errors import RatomegaError
from ratomega.exact.batches import ResidueStream
from ratomega.exact.quadratic import Number, Quadratic, from_parts, only_rational, rational_parts
from ratomega.exact.rational import ONE, Rational, common_denominator
from ratomega.exact.residues import Floats, Moduli, combine, reconstruct, residues_of
from ratomega.regulator.fast.setup import FastSetup, less

__all__ = [
    "SPARE_BITS",
    "Collected",
    "bits_needed",
    "collect",
    "first_primes",
    "new_poles",
    "primes_beyond",
    "residues_beyond",
]

# A wrong fraction passes with a probability of about 2^-45 per coefficient, and then meets one more prime.
SPARE_BITS = 45
# The primes that are used lie so little below 2^bits: for planning.
LOST_BITS = 0.01
# Rounds of further primes without a further coefficient; they make at least seven times as many primes.
PATIENCE = 16


@dataclass(frozen=True, slots=True)
class Collected:
    """The coefficients, the bits of the modulus that each left unused, and the number of primes, the check included."""

    coefficients: tuple[Number, ...]
    spare_bits: tuple[int, ...]
    primes: int


def new_poles(setup: FastSetup, charge: int) -> Rational:
    """F_charge for the parameters times ``setup.inner``, or its norm where it is not rational.

    >>> new_poles(FastSetup(1, 1, 1, 2, (1, 0), ((), ()), (), 1, 2, 1), 1)     # eps1 eps2 ((eps1 + eps2)^2 - a^2)
    16
    """
    whole = Rational(setup.inner, setup.scale)
    eps1, eps2 = setup.eps1 * whole, setup.eps2 * whole
    value: Number = charge * eps1 * eps2
    for m in range(1, charge + 1):
        if charge % m == 0:
            for a, b in combinations(setup.coulomb, 2):
                value = value * ((m * eps1 + charge // m * eps2) ** 2 - (less(a, b) * whole) ** 2)
    return value.norm() if isinstance(value, Quadratic) else value


def bits_needed(setup: FastSetup, charge: int, known: Sequence[Number]) -> int:
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
    share = log2(_denominator(inner[last])) / poles[last]
    if setup.degree < 0:
        # Entire in q: coefficients fall like a power of k!, with about this exponent where it was tried.
        falling = -0.7 * setup.degree / setup.rank
        size = (_size(inner[last]) + falling * _log2_factorial(last)) / last * charge
        size -= falling * _log2_factorial(charge)
    else:
        size = _size(inner[last]) / last * charge
    return max(32, ceil(share * poles[charge - 1] + poles[charge] - poles[charge - 1] + size + 16))


def _inner(setup: FastSetup, value: Number, charge: int) -> Number:
    """A coefficient for the parameters times ``inner``, where eps1, eps2 and the Coulomb differences are integers."""
    power = Rational(setup.inner) ** abs(setup.degree * charge)
    return value * power if setup.degree > 0 else value / power


def _cleared_masses(setup: FastSetup) -> int:
    """What clears the masses from one box, once the parameters are multiplied by ``setup.inner``."""
    factors = len(setup.flavours[0]) + 2 * setup.rank * len(setup.adjoints)
    return int((setup.scale // setup.inner) ** factors)


def _denominator(value: Number) -> int:
    return common_denominator(rational_parts(value))


def _size(value: Number) -> float:
    return max(_log2(part) for part in rational_parts(value) if part != 0)


def _log2_factorial(n: int) -> float:
    return lgamma(n + 1) / log(2)


def _log2(value: Rational) -> float:
    top, bottom = abs(int(value.p)), int(value.q)
    return _log2_integer(top) - _log2_integer(bottom)


def _log2_integer(n: int) -> float:
    shift = max(0, n.bit_length() - 60)
    return log2(n >> shift) + shift if n else 0.0


def first_primes(estimate: int, bits: int) -> int:
    """How many primes of ``bits`` bits are tried first for coefficients of ``estimate`` bits.

    >>> first_primes(1000, 26)
    42
    """
    return ceil((estimate + SPARE_BITS) / (bits - LOST_BITS)) + 1


def collect(
    setup: FastSetup, charge: int, stream: ResidueStream, *, wanted: int, most_primes: int = 4000
) -> Collected:
    """The coefficients Z_0 ... Z_charge of the setting, from the residues of those of the integer parameters.

    ``wanted`` primes are tried first. Raises ``RatomegaError`` when ``most_primes`` do not suffice, or when more and
    more primes bring no further coefficient: then a residue is wrong.
    """
    found: list[Number] = []
    spare: list[int] = []
    count = stalled = 0
    while len(found) <= charge:
        if count + wanted > most_primes:
            raise RatomegaError(f"{most_primes} primes do not determine the coefficients up to charge {charge}")
        count += wanted
        primes, table = stream.first(count)
        known = len(found)
        if count >= 2:
            _extend(setup, charge, table, primes, found, spare)
        stalled = stalled + 1 if len(found) == known else 0
        if stalled > PATIENCE:
            raise RatomegaError(f"charge {known}: no fraction fits the residues modulo {count} primes")
        wanted = max(2, count // 8)
    return Collected(tuple(found), tuple(spare), count)


def primes_beyond(size: int, bits: int) -> int:
    """About how many primes of ``bits`` bits have a product that exceeds ``size``; hardly ever one too few."""
    return ceil(size.bit_length() / (bits - LOST_BITS)) + 1


def residues_beyond(stream: ResidueStream, size: int, *, bits: int) -> tuple[tuple[int, ...], Floats]:
    """The first primes whose product exceeds ``size``, and the residues modulo them: (primes, coefficients)."""
    count = 0
    product = 1
    while product <= size:
        count += (size.bit_length() - product.bit_length()) // bits + 1
        primes, _ = stream.first(count)
        product = prod(primes)
    return stream.first(count)


def _extend(
    setup: FastSetup, charge: int, table: Floats, primes: Sequence[int], found: list[Number], spare: list[int]
) -> None:
    """Reconstruct coefficients from the first missing one on, as far as the primes reach; the last prime checks.

    ``table`` has shape (primes, coefficients), or (primes, coefficients, 2) with both parts.
    """
    known, each = len(found), 2 if setup.radicand else 1
    totals, modulus = combine(table[:-1, known:].reshape(len(primes) - 1, -1), primes[:-1])
    last = table[-1, known:].reshape(-1, each)
    check = Moduli.make(primes[-1:])
    for k in range(known, charge + 1):
        # The totals belong to the parameters times ``scale``, the multiples to those times ``inner``.
        inner = only_rational(_inner(setup, setup.rescaled(ONE, k), k))
        cleared = ONE
        if k:
            cleared = new_poles(setup, k) * _cleared_masses(setup) * _denominator(_inner(setup, found[-1], k - 1))
        factor = inner * cleared
        ratio = int(factor.p) * pow(int(factor.q), -1, modulus) % modulus
        place = (k - known) * each
        answers = [
            reconstruct(total * ratio % modulus, modulus, spare_bits=SPARE_BITS)
            for total in totals[place : place + each]
        ]
        parts = [answer.value / factor for answer in answers if answer is not None]
        if len(parts) < each:
            return
        seen = residues_of(parts, check)[0]
        if np.any((seen - last[k - known]) % primes[-1] != 0):
            return
        found.append(setup.rescaled(from_parts(parts, setup.radicand), k))
        spare.append(min(answer.spare_bits for answer in answers if answer is not None))
