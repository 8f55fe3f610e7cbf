"""Routes to a conformal block that know of no Gram matrix, and the comparison with what a Gram matrix gives.

* the recursion over the poles in the internal weight, where squares of momenta are rational. Beside a degenerate
  internal weight it is run at the point t = P of the path, P a prime of 127 bits or more, and compared modulo P (as in
  ``validator.recursion``);
* the elementary block, where the external momenta belong to the family with H = 1;
* a known function, for blocks of minimal models.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from ratomega.conformal.correlator import Correlator
from ratomega.conformal.elliptic import euler_power, series_product
from ratomega.conformal.exact_blocks import elementary_block
from ratomega.conformal.known_blocks import blocks_of
from ratomega.conformal.minimal import FourPoint, Label, MinimalModel
from ratomega.exact.laurent import Laurent
from ratomega.exact.quadratic import Number, as_integer, is_quadratic, number_text, only_rational
from ratomega.exact.rational import ONE, ZERO, Rational
from ratomega.regulator.poles.problem import PoleProblem, four_point_problem, torus_problem
from ratomega.regulator.poles.recursion import WIDEST_FORM, pole_coefficients
from ratomega.validator.verdict import Check, Kind, Verdict

__all__ = [
    "GRAM",
    "RECURSION",
    "Series",
    "compare_block",
    "elementary_check",
    "known_checks",
    "recursion_check",
    "recursion_reach",
    "recursion_values",
]

GRAM = "Gram matrices of Virasoro descendants"
RECURSION = "the pole recursion in the internal weight"
# A prime, so large that it divides no denominator of a case by accident.
BESIDE = 2**127 - 1
# Beyond this order the recursion in plain series takes minutes.
HIGHEST_PLAIN_ORDER = 20

_RECURSION_SOURCE = "Al. Zamolodchikov 1984, 1987; R. Poghossian, arXiv 0909.3412"
_ELEMENTARY_SOURCE = "Al. Zamolodchikov 1986; V. Fateev, A. Litvinov, A. Neveu, E. Onofri, arXiv 0902.1331"
_VARIABLE = {True: "q", False: "x"}


@dataclass(frozen=True, slots=True)
class Series:
    """A block by order on the own path: what every route is compared with, and the route it came from."""

    values: Sequence[Laurent]
    route: str

    def finite(self, order: int) -> Number | None:
        one = self.values[order]
        return None if one.valuation < 0 else one.coefficient(0)


def _problem(correlator: Correlator, t: int) -> PoleProblem | None:
    """The problem of the recursion at a point of the path; None where squares of momenta are not rational."""
    squares = [one.square_at(t) for one in (*correlator.external, correlator.internal)]
    if any(is_quadratic(x) for x in squares):
        return None
    *external, internal = (only_rational(x) for x in squares)
    eps1, eps2 = (only_rational(x.constant + x.slope * t) for x in (correlator.eps1, correlator.eps2))
    if correlator.torus:
        return torus_problem(eps1, eps2, internal, mu_square=external[0])
    return four_point_problem(eps1, eps2, internal, external)


def _solved(problem: PoleProblem, last: int, *, torus: bool, plain: bool | None) -> list[Number]:
    found = pole_coefficients(problem, last, exact=plain)
    if not torus:
        return list(found.coefficients)
    return series_product(found.regular, euler_power(-ONE, last + 1))


def recursion_reach(correlator: Correlator, wanted: int) -> int:
    """How far up to ``wanted`` the recursion goes at a regular internal weight; -1: it does not cover the case."""
    problem = _problem(correlator, 0)
    if problem is None:
        return -1
    return min(wanted, HIGHEST_PLAIN_ORDER) if _is_wide(problem, wanted) else wanted


def _is_wide(problem: PoleProblem, order: int) -> bool:
    """Is the ratio too long for residues? Then the recursion is done in plain series."""
    return 2 * order * (problem.steps[0] + abs(problem.steps[1])) >= WIDEST_FORM


def recursion_values(correlator: Correlator, last: int) -> list[Number] | None:
    """The block at a regular internal weight; None where the recursion does not cover it.

    Cost: a power of ``last``; some seconds at 40.
    """
    problem = _problem(correlator, 0)
    if problem is None or problem.pole(last) is not None or recursion_reach(correlator, last) < last:
        return None
    return _solved(problem, last, torus=correlator.torus, plain=True if _is_wide(problem, last) else None)


def compare_block(
    name: str, statement: str, source: str, series: Series, values: Sequence[Number], *, torus: bool
) -> Check | None:
    """Equal as far as both go and the block is finite, or the first difference; None when that is order 0 at most."""
    last, compared = min(len(values), len(series.values)) - 1, 0
    for order in range(last + 1):
        found = series.finite(order)
        if found is None:
            break
        compared = order
        if found != values[order]:
            evidence = (
                f"{statement}; first difference at {_VARIABLE[torus]}^{order}: this way {number_text(values[order])}, "
                f"from {series.route} {number_text(found)}"
            )
            return Check(name, Verdict.REFUTED, Kind.INDEPENDENT, evidence, source)
    if compared < 1:
        return None
    evidence = f"{statement}; equal to those from {series.route} up to {_VARIABLE[torus]}^{compared}"
    return Check(name, Verdict.AGREES, Kind.INDEPENDENT, evidence, source, compared == len(series.values) - 1)


def recursion_check(correlator: Correlator, series: Series) -> Check | None:
    """The recursion at t = P of the path against series in t, poles included; for a degenerate internal weight.

    None where squares of momenta are not rational. Cost: that of the plain recursion at numbers of 40 digits.
    """
    last = len(series.values) - 1
    problem = _problem(correlator, BESIDE)
    if problem is None or problem.pole(last) is not None or last < 1:
        return None
    values = _solved(problem, last, torus=correlator.torus, plain=True)
    statement = (
        "the block is the sum over its poles at h_rs, with residues fixed by lower orders, taken at the number "
        "t = P = 2^127 - 1 of the path; modulo P it is the expansion in t"
    )
    for order, (value, one) in enumerate(zip(values, series.values, strict=True)):
        rest = only_rational(value)
        for power in range(min(0, one.valuation), 1):
            rest -= only_rational(one.coefficient(power)) * Rational(BESIDE) ** power
        if int(rest.p) % BESIDE != 0:
            evidence = f"{statement}; first difference from {series.route} at {_VARIABLE[correlator.torus]}^{order}"
            return Check(RECURSION, Verdict.REFUTED, Kind.INDEPENDENT, evidence, _RECURSION_SOURCE)
    poles = any(one.valuation < 0 for one in series.values)
    kept = ", surviving poles included" if poles else ""
    evidence = f"{statement}; equal up to {_VARIABLE[correlator.torus]}^{last}{kept}"
    return Check(RECURSION, Verdict.AGREES, Kind.INDEPENDENT, evidence, _RECURSION_SOURCE, True)


def elementary_check(correlator: Correlator, series: Series) -> Check | None:
    """The block with H = 1 where the external momenta allow it; at a degenerate internal weight only where they allow
    it all along the path. None elsewhere."""
    if correlator.torus:
        return None
    last = len(series.values) - 1
    if correlator.degenerate(last) and _elementary(correlator, BESIDE, 1) is None:
        return None
    values = _elementary(correlator, 0, last)
    if values is None:
        return None
    statement = "H = 1: the block is (16 q_e)^(h - (c-1)/24) times powers of x, 1 - x and theta_3"
    return compare_block("the elementary block", statement, _ELEMENTARY_SOURCE, series, values, torus=False)


def _elementary(correlator: Correlator, t: int, last: int) -> list[Number] | None:
    eps1, eps2 = (only_rational(x.constant + x.slope * t) for x in (correlator.eps1, correlator.eps2))
    form = elementary_block(eps1, eps2, correlator.internal.square_at(t), [x.square_at(t) for x in correlator.external])
    return None if form is None else list(form.coefficients(last))


def known_checks(correlator: Correlator, series: Series) -> tuple[Check, ...]:
    """Known functions for four fields of a minimal model and a channel of it; at most one is expected."""
    point = _four_point(correlator)
    if point is None:
        return ()
    found = []
    for known, values in blocks_of(point, len(series.values) - 1):
        moved = "" if known.fields == point.fields else ", the fields in another order"
        statement = f"{point}: {known.statement}{moved}"
        check = compare_block(f"{known.name}, {known.model}", statement, known.source, series, values, torus=False)
        found += [] if check is None else [check]
    return tuple(found)


def _four_point(correlator: Correlator) -> FourPoint | None:
    eps1, eps2 = only_rational(correlator.eps1.constant), only_rational(correlator.eps2.constant)
    ratio = -eps2 / eps1
    if correlator.torus or ratio <= 0 or ratio.p < 2 or ratio.q < 2:
        return None
    model = MinimalModel.make(int(ratio.p), int(ratio.q))
    labels: list[Label] = []
    for one in (*correlator.external, correlator.internal):
        whole = None if one.limit is None else as_integer(one.limit * 2 * int(ratio.q) / eps1)
        label = None if whole is None else model.label_of(whole)
        if label is None:
            return None
        labels.append(model.canonical(label))
    return FourPoint(model, (labels[0], labels[1], labels[2], labels[3]), labels[4], ZERO)
