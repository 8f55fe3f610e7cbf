"""The limit of an average at one charge, and whether it is the same on every path.

Y(x), its inverse and the chiral traces are equivariant classes on the instanton moduli space (Y is made of the Chern
classes of the universal sheaf). So for generic x the sum over the cluster of a compact component is finite on its own
and has the same limit on every path, exactly as for Z; Z begins with 1, so the quotient has these properties, too.
Where compactness does not decide, further paths are tried, and the rule of ``regulator.outcome`` judges.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from ratomega.averages.functions import XAverages
from ratomega.averages.observables import Corners, Monomial, Term, power_sums
from ratomega.averages.series import number_averages, sums_of
from ratomega.case.setting import Setting
from ratomega.detector.geometry import compact_by_parameters
from ratomega.diagrams.tuples import Charge, Configuration
from ratomega.exact.laurent import Laurent
from ratomega.exact.path import Linear
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ONE, ZERO
from ratomega.exact.rational_function import RationalFunction
from ratomega.regulator.direct import direct_total
from ratomega.regulator.outcome import PathDependent, PathValue, judge
from ratomega.weights import Weights

__all__ = [
    "FUNCTIONS",
    "KINDS",
    "AverageLimit",
    "AveragePath",
    "AverageValue",
    "Wanted",
    "average_limits",
    "behaviour",
]

FUNCTIONS = ("Y(x)", "1/Y(x)")
KINDS = (*FUNCTIONS, "trace-powers", "size")

AverageValue = Number | RationalFunction


@dataclass(frozen=True, slots=True)
class Wanted:
    """Which observable, of which nodes (by number), and the highest power of the traces."""

    kind: str
    nodes: tuple[int, ...]
    powers: int

    def names(self, setting: Setting) -> tuple[str, ...]:
        """One name for every average, in the order in which they come; with the node where there are several.

        >>> Wanted("trace-powers", (0,), 2)._plain()
        ('Tr phi^1', 'Tr phi^2')
        """
        several = len(setting.nodes) > 1
        return tuple(
            f"{setting.nodes[v].name}: {name}" if several else name for v in self.nodes for name in self._plain()
        )

    def _plain(self) -> tuple[str, ...]:
        if self.kind == "trace-powers":
            return tuple(f"Tr phi^{n}" for n in range(1, self.powers + 1))
        return (self.kind,)


@dataclass(frozen=True, slots=True)
class AveragePath:
    """The leading behaviour of an average on one path: ``value * t^(-order)``; order 0 is a finite limit."""

    path: str
    value: AverageValue
    order: int


@dataclass(frozen=True, slots=True)
class AverageLimit:
    """One average at one charge; the fields are those of ``results.Coefficient``.

    ``status`` is "finite" (then ``value``), "pole" (then ``order`` and ``leading``) or "path-dependent" (then
    ``values``, the case's own path first).
    """

    charge: Charge
    status: str
    value: AverageValue | None
    order: int
    leading: AverageValue | None
    values: tuple[AveragePath, ...]
    independence: str | None


Behaviour = Callable[[Charge], list[AveragePath]]


def behaviour(weights: Weights, wanted: Wanted) -> Behaviour:
    """How every wanted average behaves on the path of the weights, charge by charge."""
    path = weights.setting.text()
    if wanted.kind in FUNCTIONS:
        exponent = 1 if wanted.kind == "Y(x)" else -1
        zero = (0,) * len(weights.setting.nodes)
        terms = [Term(1, zero, Monomial(((v, Linear(ZERO), exponent),))) for v in wanted.nodes]
        averages = [XAverages(weights, [term]) for term in terms]

        def functions(charge: Charge) -> list[AveragePath]:
            found = [one.at(charge) for one in averages]
            return [AveragePath(path, one.leading, one.order) for one in found]

        return functions
    sums = size_sums(weights, wanted) if wanted.kind == "size" else trace_sums(weights, wanted)
    series = number_averages(weights, sums)

    def numbers(charge: Charge) -> list[AveragePath]:
        found = []
        for one in series.at(charge):
            order = max(0, -one.valuation)
            found.append(AveragePath(path, one.coefficient(-order), order))
        return found

    return numbers


def trace_sums(weights: Weights, wanted: Wanted) -> Callable[[Charge, int], Sequence[Laurent]]:
    """The sums of Tr phi^n, n = 1 ... powers, node by node."""
    corners = Corners(weights)

    def traces(configuration: Configuration, last: int) -> list[Laurent]:
        found: list[Laurent] = []
        for v in wanted.nodes:
            roots = corners.of_node(configuration, v)
            found += power_sums(roots, wanted.powers, scale=weights.scale, last=last)
        return found

    return sums_of(weights, traces, count=len(wanted.nodes) * wanted.powers)


def size_sums(weights: Weights, wanted: Wanted) -> Callable[[Charge, int], Sequence[Laurent]]:
    """The sums of the number of boxes, node by node: Z itself, multiplied."""

    def sizes(charge: Charge, last: int) -> list[Laurent]:
        z = direct_total(weights, charge, last=last)
        return [z.scaled(charge[v]) if charge[v] else Laurent.zero(precision=last + 1) for v in wanted.nodes]

    return sizes


def average_limits(
    setting: Setting, charge: Charge, own: Behaviour, further: Sequence[Behaviour]
) -> list[AverageLimit]:
    """The judgement on every wanted average at one charge. Further paths are followed where compactness is silent."""
    compact = compact_by_parameters(setting, charge)
    columns = [own(charge)] if compact else [own(charge), *(one(charge) for one in further)]
    return [judged(charge, values[0], values[1:], compact=compact) for values in zip(*columns, strict=True)]


def judged(charge: Charge, own: AveragePath, further: Sequence[AveragePath], *, compact: bool) -> AverageLimit:
    """One average from its behaviour on the own path and on the further ones.

    >>> a, b = AveragePath("p", ONE, 0), AveragePath("q", ONE / 2, 0)
    >>> judged((1,), a, [b], compact=False).status, judged((1,), a, [a], compact=False).independence
    ('path-dependent', 'agreement')
    """
    # The rule asks only which behaviours are equal, so that it serves functions as it serves numbers.
    first = PathValue(own.path, ZERO, own.order)
    others = [PathValue(one.path, ZERO if one.value == own.value else ONE, one.order) for one in further]
    outcome = judge(first, others, compact=compact)
    proof = None if isinstance(outcome, PathDependent) else outcome.independence
    values = (own, *further) if proof is None else ()
    return AverageLimit(
        charge=charge,
        status=outcome.status,
        value=own.value if outcome.status == "finite" else None,
        order=own.order,
        leading=own.value if outcome.status == "pole" else None,
        values=values,
        independence=None if proof is None else proof.value,
    )
