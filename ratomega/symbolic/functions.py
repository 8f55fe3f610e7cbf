"""One coefficient as a rational function, and its confirmation by limits at points that were not used to find it.

A fixed rule, ``by_poles.pole_way``, says where the pole recursion gives the function; for everything else exact limits
on the grid are interpolated. Every limit comes from an evaluator, by default the direct sum over diagrams, at a point
where every component is compact, so that it is finite and the same on every path by theorem.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from itertools import product

from ratomega.case.case import Case
from ratomega.case.setting import Setting, own_setting, resonances
from ratomega.diagrams.tuples import Charge, count_configurations
from ratomega.errors import InputError
from ratomega.exact.interpolation import grid_polynomial
from ratomega.exact.plane_function import function_of_planes
from ratomega.exact.quadratic import Number, one_field, quadratic, rational_parts
from ratomega.exact.rational import ZERO, Rational
from ratomega.exact.rational_function import RationalFunction
from ratomega.regulator.direct import direct_total
from ratomega.regulator.limits import ChargeLimit
from ratomega.symbolic.by_poles import pole_way
from ratomega.symbolic.grid import WITNESSES, Grid, Point, choose_grid, denominator_value
from ratomega.symbolic.structure import Structure, primes_of, structure
from ratomega.weights import Weights

__all__ = ["Evaluator", "Functions", "SymbolicCharge", "SymbolicLimit", "direct_evaluator"]

Values = Callable[[Charge], Number]
Evaluator = Callable[[Setting, tuple[int, ...]], Values]
"""Takes a setting (one point) and the highest charge of every node, and gives the limit at any charge within.

Charges are asked for one by one; what is common to them may be done at the first.
"""


def direct_evaluator(setting: Setting, highest: tuple[int, ...]) -> Values:
    """The direct sum over diagrams: a charge costs what it costs alone, whatever the highest is."""
    weights = Weights(setting)
    return lambda charge: direct_total(weights, charge).coefficient(0)


@dataclass(frozen=True, slots=True)
class SymbolicCharge:
    """A coefficient as a function, the number of limits it was interpolated from, and the points that confirm it.

    ``points`` is 0 where the pole recursion gave the function; ``primes`` is then the number of primes modulo which it
    ran, 0 for exact series. ``refuted`` are points beside the grid where function and limit differ: there should be
    none.
    """

    charge: Charge
    function: RationalFunction
    points: int
    confirmed: tuple[Point, ...]
    refuted: tuple[Point, ...]
    primes: int = 0


@dataclass(frozen=True, slots=True)
class SymbolicLimit:
    """A coefficient as a function, beside everything that was found at the generic point."""

    sample: ChargeLimit
    found: SymbolicCharge

    @property
    def charge(self) -> Charge:
        return self.found.charge


class Functions:
    """All coefficients of a case with symbols, charge by charge; points are evaluated when a charge needs them.

    ``interpolate`` does so even where the pole recursion gives the functions, to compare the two.
    Raises ``InputError`` when the case has no limit as a function of its symbols, or needs more work than
    ``most_configurations`` weights.
    """

    def __init__(
        self,
        case: Case,
        *,
        most_configurations: int,
        evaluator: Evaluator = direct_evaluator,
        interpolate: bool = False,
    ) -> None:
        self.case = case
        self.evaluator = evaluator
        self.structures: dict[Charge, Structure] = {charge: structure(case, charge) for charge in case.charges}
        self._poles = None if interpolate else pole_way(case)
        work = sum(
            count_configurations(case.theory.ranks, charge)
            * ((WITNESSES if self._poles is not None else math.prod(s.nodes)) + 1)
            for charge, s in self.structures.items()
        )
        if work > most_configurations:
            raise InputError.single(
                f"the functions of {', '.join(case.symbols)} need {work} weights, configurations times points, more "
                f"than the limit of {most_configurations}; lower the charge, give numbers for symbols, or raise the "
                "limit (--most-configurations, most_configurations=)",
                "symbols",
            )
        self.grid: Grid = choose_grid(list(self.structures.values()), primes_of(case))
        self._known: dict[Point, Values] = {}

    @property
    def generic_point(self) -> dict[str, Rational]:
        """The first witness: a point without anything special."""
        return dict(zip(self.case.symbols, self.grid.witnesses[0], strict=True))

    def value(self, charge: Charge, point: Point) -> Number:
        """The exact limit at one point."""
        known = self._known.get(point)
        if known is None:
            setting = own_setting(self.case.at(**dict(zip(self.case.symbols, point, strict=True))))
            if next(resonances(setting, self.case.bounds), None) is not None:
                raise ValueError(f"the point {point} is a pole")
            known = self._known[point] = self.evaluator(setting, self.case.bounds)
        return known(charge)

    def at(self, charge: Charge) -> SymbolicCharge:
        """The function at one charge."""
        if self._poles is not None:
            function, points = self._poles.function(charge[0]), 0
        else:
            function, points = self._interpolated(charge)
        agree: list[Point] = []
        differ: list[Point] = []
        for witness in self.grid.witnesses:
            expected = function.at(**dict(zip(self.case.symbols, witness, strict=True)))
            (agree if self.value(charge, witness) == expected else differ).append(witness)
        primes = 0 if self._poles is None else self._poles.primes
        return SymbolicCharge(charge, function, points, tuple(agree), tuple(differ), primes)

    def _interpolated(self, charge: Charge) -> tuple[RationalFunction, int]:
        """The function from limits on the grid, and their number."""
        shape = self.structures[charge]
        axes = [axis[:size] for axis, size in zip(self.grid.axes, shape.nodes, strict=True)]
        values = {}
        for index in product(*(range(len(axis)) for axis in axes)):
            point = tuple(axis[n] for axis, n in zip(axes, index, strict=True))
            values[index] = self.value(charge, point) * denominator_value(shape.planes, point)
        variables = [
            [x * x for x in axis] if even else list(axis) for axis, even in zip(axes, shape.even, strict=True)
        ]
        coefficients = {
            tuple(2 * e if even else e for e, even in zip(exponents, shape.even, strict=True)): value
            for exponents, value in _interpolated(variables, values).items()
        }
        return function_of_planes(coefficients, shape.planes, self.case.symbols), len(values)


def _interpolated(
    axes: Sequence[Sequence[Rational]], values: Mapping[tuple[int, ...], Number]
) -> dict[tuple[int, ...], Number]:
    """The coefficients of the polynomial with these values, the two parts of every number on their own."""
    d = one_field(values.values())
    parts = {index: (*rational_parts(value), ZERO)[:2] for index, value in values.items()}
    first = grid_polynomial(axes, {index: x for index, (x, _) in parts.items()})
    if not d:
        return dict(first)
    second = grid_polynomial(axes, {index: y for index, (_, y) in parts.items()})
    return {index: quadratic(x, second[index], d) for index, x in first.items()}
