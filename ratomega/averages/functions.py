"""Averages of products of Y's as exact rational functions of x.

On a configuration such a product is prod (x - c - d t)^e, and its expansion in t is one in rational functions of x
whose poles are the limiting roots c (``exact.line_series``): nothing is interpolated and no degree is guessed. A weight
of order p asks for the powers of t up to p, and so poles at c can have p orders more than the product at t = 0 has.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from ratomega.averages.observables import Corners, Term, growth
from ratomega.averages.series import AverageSeries, minus
from ratomega.diagrams.tuples import Charge, configurations
from ratomega.exact.laurent import Laurent
from ratomega.exact.line_series import LineSeries, expand_roots, line_total
from ratomega.exact.rational import Rational
from ratomega.exact.rational_function import RationalFunction
from ratomega.weights import Weights

__all__ = ["SYMBOL", "FunctionSeries", "XAverages"]

SYMBOL = "x"


@dataclass(frozen=True, slots=True)
class FunctionSeries:
    """An average at one charge: its coefficients in t from the lowest power, at most 0, up to t^0.

    ``functions[n]`` belongs to t^(n - order).
    """

    functions: tuple[RationalFunction, ...]

    @property
    def order(self) -> int:
        return len(self.functions) - 1

    @property
    def leading(self) -> RationalFunction:
        """The coefficient of t^-order: the limit itself when the order is 0."""
        return self.functions[0]


class XAverages:
    """The average of a sum of terms, each a sign, a power of the counting parameters and a product of Y's.

    Cost: one pass over the configurations for every term. A configuration whose weight has order p costs about p^2/2
    products of short polynomials in x for every place where Y has a zero or a pole.
    """

    def __init__(self, weights: Weights, terms: Sequence[Term]) -> None:
        self.weights = weights
        self.terms = tuple(terms)
        self._corners = Corners(weights)
        self._averages = AverageSeries(weights, self._sums, _subtract)

    def _sums(self, charge: Charge, last: int) -> list[LineSeries]:
        """The sum of all terms at one charge."""
        found: list[LineSeries] = []
        for term in self.terms:
            rest = minus(charge, term.charge)
            if rest is None:
                continue
            for configuration in configurations(self.weights.setting.ranks, rest):
                weight = self.weights.weight(configuration)
                series = weight.laurent(last)
                if not series.is_zero():
                    roots = self._corners.roots(configuration, term.monomial)
                    product = expand_roots(roots, last=weight.order + last)
                    # The roots are in units of 1/scale: every factor x - root is (X - root)/scale.
                    factor = term.sign * Rational(self.weights.scale) ** -growth(roots)
                    found.append(product.times(series.scaled(factor)))
        return [line_total(found, precision=last + 1).reduced()]

    def at(self, charge: Charge) -> FunctionSeries:
        """The average at one charge, all powers of t up to t^0 as functions of x."""
        (series,) = self._averages.at(charge)
        scale, lowest = self.weights.scale, min(0, series.valuation)
        return FunctionSeries(
            tuple(series.function(power, scale=scale, symbol=SYMBOL) for power in range(lowest, 1))
        )


def _subtract(one: LineSeries, z: Laurent, average: LineSeries) -> LineSeries:
    return (one - average.times(z)).reduced()
