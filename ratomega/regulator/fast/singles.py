"""The part of a weight that belongs to one diagram, in the limit: its constant and its power sums."""

from __future__ import annotations

from dataclasses import dataclass
from math import factorial

import numpy as np

from ratomega.exact.residues import Floats, Moduli
from ratomega.regulator.fast.factors import (
    Bench,
    Parameters,
    box_factors,
    diagram_factors,
    forms,
    hook_forms,
    hook_numerators,
    tree_products,
    whole,
)
from ratomega.regulator.fast.layout import Layout
from ratomega.regulator.fast.powers import box_shifts, hook_shifts, power_sums
from ratomega.regulator.fast.setup import FastSetup
from ratomega.regulator.fast.tables import Integers, box_arrays

__all__ = ["Single", "inverse_factorials", "singles"]


@dataclass(frozen=True, slots=True, eq=False)
class Single:
    """One colour: the constant and the power sums of every diagram, as many as ``Layout.need`` says (zero beyond).

    The constant is the leading coefficient in t of everything that belongs to the diagram alone.
    """

    constant: Floats
    powers: list[Floats]


def inverse_factorials(last: int, moduli: Moduli) -> Floats:
    """1/n! for n = 0 ... last."""
    return moduli.inverses(np.stack([whole(factorial(n), moduli) for n in range(last + 1)]))


def limit_hooks(setup: FastSetup, charge: int, parameters: Parameters, moduli: Moduli) -> tuple[Floats, Integers]:
    """The factor of one box of D by arm and leg; a denominator that vanishes at t = 0 counts with its slope."""
    p, q, place = hook_forms(charge)
    e = forms(0, p, q, parameters, moduli)
    other = moduli.reduce(parameters.eps - e)
    up = hook_numerators(setup, e, other, moduli)
    for values, i, j in ((e, p, q), (other, 1 - p, 1 - q)):
        zero = i * setup.alpha + j * setup.beta == 0
        values[zero] = moduli.integers((j - i)[zero])
    return moduli.multiply(up, moduli.inverses(moduli.multiply(e, other))), place


def singles(setup: FastSetup, layout: Layout, parameters: Parameters, bench: Bench) -> list[Single]:
    """For every colour what its diagrams contribute on their own. Raises ``BadPrimes``."""
    forest, moduli = layout.forest, bench.moduli
    hooks, place = limit_hooks(setup, forest.charge, parameters, moduli)
    alone = diagram_factors(hooks, place, forest, bench)
    hi, hj, _ = hook_forms(forest.charge)
    i, j = box_arrays(layout.boxes)
    depth = layout.depth
    hook_powers = power_sums(hook_shifts(setup), hi, hj, depth, setup, parameters, moduli)
    alone_sums = []
    for n in range(depth):
        alone_sum = np.zeros_like(alone)
        rows = np.nonzero(layout.need > n)[0]
        alone_sum[rows] = layout.hooks[rows] @ hook_powers[n]
        alone_sums.append(alone_sum)
    constants = tree_products(box_factors(setup, i, j, parameters, moduli), layout.where, forest, bench)
    bench.multiply(constants, alone, constants)
    result = []
    for colour, constant in enumerate(constants):
        box_powers = power_sums(box_shifts(setup, colour), i, j, depth, setup, parameters, moduli)
        powers = [alone_sum.copy() for alone_sum in alone_sums]
        for n, power in enumerate(powers):
            rows = np.nonzero(layout.need > n)[0]
            power[rows] = bench.reduce(power[rows] + layout.inside[rows] @ box_powers[n])
        result.append(Single(constant, powers))
    return result


