"""Exact coefficients of Z for the case, for an edited case, at an offset from the limit point, or with terms left out.

A source sums the weights of one charge when it is asked. At an offset delta the path parameter is the number delta:
nothing is singular there, and the same weights are evaluated.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from ratomega.case.setting import NodeSetting, Setting
from ratomega.diagrams.tuples import Charge, Configuration, configurations
from ratomega.errors import RatomegaError
from ratomega.exact.laurent import Laurent, total
from ratomega.exact.path import Linear
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import Rational
from ratomega.regulator.direct import direct_total
from ratomega.weights import Weight, Weights

__all__ = ["NoLimitError", "Source", "moved"]


class NoLimitError(RatomegaError):
    """A coefficient of an edited case has no finite limit; such an edit explains nothing."""


Left = Callable[[Weight, Configuration], bool]
"""Is this configuration left out of the sum?"""


class Source:
    """Z of one setting, charge by charge; ``left_out`` says which configurations are not summed."""

    def __init__(self, setting: Setting, *, left_out: Left | None = None) -> None:
        self.setting = setting
        self._left_out = left_out
        self._weights: Weights | None = None
        self._known: dict[Charge, Number] = {}

    @property
    def weights(self) -> Weights:
        if self._weights is None:
            self._weights = Weights(self.setting)
        return self._weights

    def z(self, charge: Charge) -> Number:
        """The coefficient. Raises ``NoLimitError`` where a pole stays."""
        if charge not in self._known:
            series = self._sum(charge)
            if series.valuation < 0:
                raise NoLimitError(f"a pole survives at charge {charge}")
            self._known[charge] = series.coefficient(0)
        return self._known[charge]

    def _sum(self, charge: Charge) -> Laurent:
        if self._left_out is None:
            return direct_total(self.weights, charge)
        kept = []
        for configuration in configurations(self.setting.ranks, charge):
            weight = self.weights.weight(configuration)
            if not self._left_out(weight, configuration):
                kept.append(weight.laurent(0))
        return total(kept, precision=1)


def moved(setting: Setting, delta: Rational) -> Setting:
    """The setting with t replaced by delta + t."""

    def move(value: Linear) -> Linear:
        return Linear(value.constant + value.slope * delta, value.slope)

    def all_of(values: tuple[Linear, ...]) -> tuple[Linear, ...]:
        return tuple(move(x) for x in values)

    nodes = tuple(
        NodeSetting(n.name, all_of(n.coulomb), all_of(n.antifundamental), all_of(n.fundamental), all_of(n.adjoint))
        for n in setting.nodes
    )
    edges = tuple((a, b, move(m)) for a, b, m in setting.edges)
    return replace(setting, eps1=move(setting.eps1), eps2=move(setting.eps2), nodes=nodes, edges=edges)
