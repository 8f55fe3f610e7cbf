"""Proof of coefficients found from residues: a common denominator of all weights and a bound on their sum.

Take the factors as linear forms in t on the path of the fast sums, with integer coefficients. Let L(t) be the product
of all forms that occur in denominators at charge k, each as often as it can occur in one weight. Then L(t) Z_k(t) is a
polynomial with integer coefficients. Where Z_k is regular at t = 0 its coefficient at the power t^V, V the number of
vanishing forms in L, is Lambda Z_k(0) with Lambda the product of the leading coefficients of the forms; its absolute
value is at most the sum over all weights of the product of |constant| + |slope| over the forms that are left. So
Lambda Z_k(0) is an integer of known size: two candidates that agree modulo primes whose product is more than twice the
bound are equal.

Where parameters lie in Z[sqrt(d)], so does Lambda Z_k(0), and the bound holds for it and for its conjugate when the
absolute value of every constant is replaced by |x| + |y| sqrt|d|. If Lambda is not rational it is multiplied by its
conjugate. Both parts of the product are then integers that obey the bound.

How often a form can occur in one weight of charge k:

* E = -eps1 leg + eps2 (arm + 1) and eps - E of a box with itself: at most k/h times, h = arm + leg + 1, because a
  diagram with n boxes has at most n/h hooks of length h (its h-weight; James, Kerber 1981).
* x + p eps1 + q eps2 in N_lm(x), q >= 1: the boxes s = (i, j) of l with arm q - 1 in l and leg -p in m. With i_1 < i_2
  < ... the rows of c such boxes, j falls strictly (equal j means equal i, since i = p + column j of m). Counting the
  rows of l and the columns of m that they force: for p >= 1 there are at least (c + p - 1)(c + q - 1) boxes in l and m
  together, for p <= 0 at least c (c + q - p). For q <= 0 the same holds with l and m exchanged and (1 - p, 1 - q).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import permutations
from math import isqrt

import numpy as np

from ratomega.diagrams.tuples import coloured_partitions
from ratomega.errors import RatomegaError
from ratomega.exact.quadratic import Number, Quadratic, parts_in
from ratomega.exact.rational import ONE, Rational
from ratomega.exact.residues import BadPrimes, Floats, Moduli, residues_of
from ratomega.regulator.fast.setup import FastSetup, Whole, less

__all__ = ["Bound", "check_proof", "multiplicity", "proof_bound"]


@dataclass(frozen=True, slots=True)
class Bound:
    """``multiple`` times the coefficient of the integer parameters is an integer of absolute value at most ``size``."""

    multiple: int
    size: int


def multiplicity(p: int, q: int, charge: int) -> int:
    """How often x + p eps1 + q eps2 can occur in N_lm(x) when l and m have at most ``charge`` boxes together.

    >>> multiplicity(1, 1, 4), multiplicity(1, 1, 3), multiplicity(2, 3, 5), multiplicity(0, 1, 2)
    (2, 1, 0, 1)
    """
    if q <= 0:
        p, q = 1 - p, 1 - q
    count = 0
    while _boxes_forced(count + 1, p, q) <= charge:
        count += 1
    return count


def _boxes_forced(count: int, p: int, q: int) -> int:
    return (count + p - 1) * (count + q - 1) if p >= 1 else count * (count + q - p)


def _denominators(setup: FastSetup, charge: int) -> Iterator[tuple[Whole, int, int, int]]:
    """(root, p, q, multiplicity) of every form that can stand in a denominator."""
    for arm in range(charge):
        for leg in range(charge - arm):
            times = charge // (arm + leg + 1)
            yield 0, -leg, arm + 1, times
            yield 0, leg + 1, -arm, times
    for a, b in permutations(setup.coulomb, 2):
        for p in range(-charge, charge + 1):
            for q in range(-charge, charge + 1):
                times = multiplicity(p, q, charge)
                if times:
                    yield less(a, b), p, q, times


def proof_bound(setup: FastSetup, charge: int, *, moving: bool) -> Bound:
    """The bound for one charge, on the path eps1 - t, eps2 + t (``moving``) or at the limit point itself.

    Assumes that no form vanishes all along the path, and none at the limit point unless ``moving``. Cost: one integer
    power for each of some charge^2 forms.
    """
    step = 1 if moving else 0
    multiple, size, conjugate_size = 1, 1, 1
    beyond: Number = ONE
    for root, p, q, times in _denominators(setup, charge):
        constant, slope = less(root, -p * setup.eps1 - q * setup.eps2), step * (q - p)
        if isinstance(constant, int):
            multiple *= (abs(constant) or abs(slope)) ** times
        else:
            beyond = beyond * constant**times
            conjugate_size *= _house(constant) ** times
        size *= (_house(constant) + abs(slope)) ** times
    if multiple == 0:
        raise ValueError("a denominator vanishes")
    if isinstance(beyond, Quadratic):
        beyond = beyond.norm()
        size *= conjugate_size
    multiple *= abs(int(beyond.p))
    size *= coloured_partitions(setup.rank, charge)[charge]
    return Bound(multiple, size * _numerators(setup, charge, step))


def _house(value: Whole) -> int:
    """A bound on the absolute values of a number and of its conjugate."""
    if isinstance(value, int):
        return abs(value)
    return abs(int(value.x.p)) + abs(int(value.y.p)) * (isqrt(abs(value.d)) + 1)


def _numerators(setup: FastSetup, charge: int, step: int) -> int:
    """A bound on the product of |constant| + |slope| over the numerators of one weight."""
    # |p|, |q| <= charge for the forms of boxes and of pairs, so slopes are at most twice the charge.
    reach = charge * (abs(setup.eps1) + abs(setup.eps2) + 2 * step)
    per_box = 1
    for flavour in range(len(setup.flavours[0])):
        per_box *= max(_house(roots[flavour]) for roots in setup.flavours) + reach
    widest = max(_house(less(a, b)) for a in setup.coulomb for b in setup.coulomb)
    for mass in setup.adjoints:
        # Every box stands in 2 N forms.
        per_box *= (widest + _house(mass) + reach) ** (2 * setup.rank)
    return int(per_box**charge)


def check_proof(
    setup: FastSetup, bound: Bound, charge: int, value: Number, residues: Floats, primes: tuple[int, ...]
) -> None:
    """Raise ``RatomegaError`` unless ``value`` is proved to be Z_charge of the setting.

    ``residues`` are those of the coefficient of the integer parameters modulo ``primes``: of both parts (primes, 2)
    in a quadratic field.
    """
    inner = value / setup.rescaled(Rational(1), charge)
    product = 1
    for p in primes:
        product *= p
    parts = parts_in(inner, setup.radicand)
    wholes = [part * bound.multiple for part in parts]
    if product <= 2 * bound.size:
        raise RatomegaError(f"charge {charge}: the primes do not reach the bound")
    if any(whole.q != 1 or abs(int(whole.p)) > bound.size for whole in wholes):
        raise RatomegaError(f"charge {charge}: the coefficient found from residues contradicts the proved bound")
    moduli = Moduli.make(primes)
    try:
        seen = residues_of(parts, moduli)
    except BadPrimes as bad:
        raise RatomegaError(f"charge {charge}: a prime that was used divides the denominator found") from bad
    if np.any((seen - residues.reshape(seen.shape)) % moduli.p[:, None] != 0):
        raise RatomegaError(f"charge {charge}: the coefficient found from residues is refuted by further primes")
