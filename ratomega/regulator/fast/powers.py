"""Logarithms of products of linear factors on the path eps1 - t, eps2 + t, modulo many primes (prime axis last).

A factor (c + s t)^e with c != 0 is c^e exp(sum_j p_j t^j / j!) with p_j = -e (j - 1)! (-s/c)^j. These power
sums are those of the roots up to (j - 1)!, which keeps divisions out of the exponential. Those of a
weight are sums over boxes and over pairs of boxes, so tables per box and per pair of boxes determine them all. Every
factor is root + p eps1 + q eps2; its slope is q - p.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from ratomega.exact.residues import Floats, Moduli
from ratomega.regulator.fast.factors import Parameters, forms
from ratomega.regulator.fast.setup import FastSetup, Whole, less
from ratomega.regulator.fast.tables import Integers

__all__ = ["Shift", "box_shifts", "hook_shifts", "pair_shifts", "power_sums"]

# root + p eps1 + q eps2
_Form = tuple[Whole, int, int]


@dataclass(frozen=True, slots=True)
class Shift:
    """The factor (root + sign * (p eps1 + q eps2) + dp eps1 + dq eps2)^exponent at a point (p, q)."""

    root: Whole
    sign: int
    dp: int
    dq: int
    exponent: int


def pair_shifts(setup: FastSetup, root: Whole) -> list[Shift]:
    """The factors of S at y = root + p eps1 + q eps2."""
    shifts = [Shift(root, 1, 0, 0, 2), Shift(root, 1, 1, 1, 1), Shift(root, 1, -1, -1, 1)]
    shifts += [Shift(root, 1, dp, dq, -1) for dp, dq in ((1, 0), (-1, 0), (0, 1), (0, -1))]
    for m in setup.adjoints:
        for sign in (1, -1):
            r = less(root, m if sign == 1 else -m)
            shifts += [Shift(r, 1, sign, 0, 1), Shift(r, 1, 0, sign, 1)]
            shifts += [Shift(r, 1, 0, 0, -1), Shift(r, 1, sign, sign, -1)]
    return shifts


def box_shifts(setup: FastSetup, colour: int) -> list[Shift]:
    """The factors of one box of a colour: V against the other colours, and the flavours (up to constants)."""
    shifts = [Shift(root, 1, 0, 0, 1) for root in setup.flavours[colour]]
    for other, b in enumerate(setup.coulomb):
        if other == colour:
            continue
        root = less(setup.coulomb[colour], b)
        shifts += [Shift(root, 1, 0, 0, -1), Shift(root, 1, 1, 1, -1)]
        for m in setup.adjoints:
            shifts += [Shift(less(root, m), 1, 1, 1, 1), Shift(less(root, -m), 1, 0, 0, 1)]
    return shifts


def hook_shifts(setup: FastSetup) -> list[Shift]:
    """The factors of D at E = p eps1 + q eps2."""
    shifts = [Shift(0, 1, 0, 0, -1), Shift(0, -1, 1, 1, -1)]
    for m in setup.adjoints:
        shifts += [Shift(-m, 1, 0, 0, 1), Shift(-m, -1, 1, 1, 1)]
    return shifts


def power_sums(
    shifts: Sequence[Shift],
    i: Integers,
    j: Integers,
    depth: int,
    setup: FastSetup,
    parameters: Parameters,
    moduli: Moduli,
) -> list[Floats]:
    """p_1 ... p_depth at every point (i, j): arrays (points, primes), reduced.

    Factors that vanish at t = 0 contribute nothing here; their slopes belong to the constant. Raises ``BadPrimes``
    when a factor vanishes modulo a prime only. Cost: one inverse and ``depth`` products per distinct factor.
    """
    sums = [np.zeros((len(i), len(moduli))) for _ in range(depth)]
    keys: dict[_Form, int] = {}
    where: list[Integers] = []
    for shift in shifts:
        p, q = shift.sign * i + shift.dp, shift.sign * j + shift.dq
        points = zip(p.tolist(), q.tolist(), strict=True)
        where.append(np.array([keys.setdefault((shift.root, a, b), len(keys)) for a, b in points], dtype=np.int64))
    ratios = _ratios(list(keys), setup, parameters, moduli)
    power = np.ones_like(ratios)
    for n in range(depth):
        power = moduli.multiply(power, -max(n, 1) * ratios)
        for shift, places in zip(shifts, where, strict=True):
            sums[n] -= shift.exponent * power[places]
        sums[n] = moduli.reduce(sums[n])
    return sums


def _ratios(
    keys: list[_Form], setup: FastSetup, parameters: Parameters, moduli: Moduli
) -> Floats:
    """slope / constant of every factor (root, p, q), zero where the constant is exactly zero."""
    p = np.array([key[1] for key in keys], dtype=np.int64)
    q = np.array([key[2] for key in keys], dtype=np.int64)
    constants = np.empty((len(keys), len(moduli)))
    places: dict[Whole, list[int]] = {}
    for place, (root, _, _) in enumerate(keys):
        places.setdefault(root, []).append(place)
    for root, chosen in places.items():
        constants[chosen] = forms(root, p[chosen], q[chosen], parameters, moduli)
    vanishing = np.array([r + a * setup.eps1 + b * setup.eps2 == 0 for r, a, b in keys], dtype=bool)
    constants[vanishing] = 1.0
    slopes = np.where(vanishing, 0, q - p).astype(np.float64)
    return moduli.reduce(moduli.inverses(constants) * slopes[:, None])
