"""Closed forms for one U(N) node at special masses, any N.

- An adjoint of mass 0 or eps (every weight is 1), eps1 or eps2 (every weight vanishes).
- Flavours of masses -a_1, ..., -a_N: every first box has the factor zero.
- Flavours of masses -a_1 - eps1, -a_2, ..., -a_N: only one-row diagrams of the first colour survive, and their weights
  are the terms of a hypergeometric series. With eps1 and eps2 exchanged, one-column diagrams.

At a rational ratio single weights are singular and the surviving sets differ; the values of the total do not.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from ratomega.exact.quadratic import Number
from ratomega.exact.rational import Rational
from ratomega.validator.limit_point import Charge, ClosedForm, LimitPoint
from ratomega.validator.qseries import Series, euler_product, hypergeometric

__all__ = ["adjoint_forms", "truncation_forms", "vanishing_forms"]


def _values(series: Series, charges: Sequence[Charge]) -> dict[Charge, Number]:
    return {charge: series.coefficients[charge[0]] for charge in charges}


def adjoint_forms(point: LimitPoint, charges: Sequence[Charge]) -> Iterator[ClosedForm]:
    """U(N), N >= 2, with one adjoint of special mass and nothing else (U(1) has its form at every mass)."""
    node = point.nodes[0]
    if len(point.nodes) > 1 or node.rank < 2 or node.flavours or len(node.adjoint) != 1:
        return
    mass, order = node.adjoint[0], max(charge[0] for charge in charges)
    if mass in (0, point.eps):
        yield ClosedForm(
            f"U({node.rank}) with an adjoint of mass 0 or eps",
            f"Z = prod over n >= 1 of (1 - q^n)^(-{node.rank}): Euler numbers of the moduli spaces",
            "C. Vafa, E. Witten, arXiv hep-th/9408074",
            _values(euler_product(Rational(-node.rank), order), charges),
        )
    elif mass in (point.eps1, point.eps2):
        yield ClosedForm(
            f"U({node.rank}) with an adjoint of mass eps1 or eps2",
            "Z = 1: for every diagram a corner box makes a factor vanish",
            "common practice",
            _values(Series.one(order), charges),
        )


def vanishing_forms(point: LimitPoint, charges: Sequence[Charge]) -> Iterator[ClosedForm]:
    """U(N) with a flavour of mass -a for every colour, whatever else it carries."""
    node = point.nodes[0]
    if len(point.nodes) == 1 and _without(node.flavours, [-a for a in node.coulomb]) is not None:
        yield ClosedForm(
            f"U({node.rank}) with flavours of masses -a",
            "Z = 1 where every colour has its flavour factor phi - a: the first box of any diagram gives zero",
            "common practice",
            _values(Series.one(max(charge[0] for charge in charges)), charges),
        )


def truncation_forms(point: LimitPoint, charges: Sequence[Charge]) -> Iterator[ClosedForm]:
    """U(N) with flavours (-a_1 - eps1, -a_2, ..., -a_N) in any order, any further masses; also eps1 <-> eps2.

    A lower parameter 1 + (a_1 - a_b + eps1)/eps2 that reaches zero within the charge is the resonance
    a_b - a_1 = eps1 + n eps2, n <= charge: such charges are not among ``charges``.
    """
    node = point.nodes[0]
    if len(point.nodes) > 1 or node.adjoint:
        return
    order = max(charge[0] for charge in charges)
    directions = {"eps1": (point.eps1, point.eps2, "eps2")}
    if point.eps1 != point.eps2:
        directions["eps2"] = (point.eps2, point.eps1, "eps1")
    for name, (killer, step, step_name) in directions.items():
        for colour, first in enumerate(node.coulomb):
            others = [a for index, a in enumerate(node.coulomb) if index != colour]
            rest = _without(node.flavours, [-first - killer, *(-a for a in others)])
            if rest is None or first in node.coulomb[:colour]:
                continue
            argument = Rational((-1) ** node.rank) * step ** (len(rest) - node.rank)
            series = hypergeometric(
                [(first + m) / step for m in rest],
                [1 + (first - a + killer) / step for a in others],
                argument,
                order,
            )
            yield ClosedForm(
                f"U({node.rank}) truncated to a hypergeometric series along {step_name}, colour {colour + 1}",
                f"With flavours -a_1-{name}, -a_b (b > 1) and p further masses m_j, "
                f"Z = pF(N-1)((a_1+m_j)/{step_name}; 1+(a_1-a_b+{name})/{step_name}; "
                f"(-1)^N {step_name}^(p-N) q); here a_1 = {first}, p = {len(rest)}",
                "common practice: the masses leave the one-row diagrams of one colour",
                _values(series, charges),
            )


def _without(masses: Sequence[Number], needed: Sequence[Number]) -> list[Number] | None:
    """``masses`` without ``needed``, as multisets; None where one of them is missing."""
    rest = list(masses)
    for mass in needed:
        if mass not in rest:
            return None
        rest.remove(mass)
    return rest
