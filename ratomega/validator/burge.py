"""Burge pairs: the configurations of U(2) that a minimal model keeps.

Let 2a = a_1 - a_2 = r eps1 + s eps2 at the limit point on the ratio eps1 : eps2 = p' : -p, and let Y, Y' be the
columns of the diagrams of the first and of the second colour. No vector factor of the pair vanishes at the limit
point if and only if

    Y_i - Y'_(i + s - 1) >= 1 - r  and  Y'_i - Y_(i + p' - s - 1) >= 1 - p + r  for all i >= 1,

and there are as many such pairs with n boxes as chi_rs prod 1/(1 - q^n) has at q^n, chi_rs the character of the
irreducible module and the product that of the U(1) factor. Where the fusion rules hold, the sum of their weights
alone is the limit; other weights need not vanish on a path, and cancel among themselves.

Sources: W. Burge 1993; M. Bershtein, O. Foda, arXiv 1404.7075; K. Alkalaev, V. Belavin, arXiv 1404.7094; characters:
A. Rocha-Caridi 1985.

Both checks take our own weights as data: the first only how many of their factors vanish, the second their values.
"""

from __future__ import annotations

from collections.abc import Sequence

from ratomega.case.affine import Affine
from ratomega.conformal.minimal import Label, MinimalModel, MinimalPoint, minimal_point
from ratomega.detector.zeros import scan
from ratomega.diagrams.tuples import coloured_partitions, configurations, count_all
from ratomega.diagrams.young import Diagram, transpose
from ratomega.exact.quadratic import Number, number_text
from ratomega.exact.rational import ZERO, Rational
from ratomega.regulator.limits import ChargeLimit
from ratomega.regulator.outcome import FiniteLimit
from ratomega.validator.depth import FULL, too_costly
from ratomega.validator.finiteness import charge_text
from ratomega.validator.verdict import Check, Kind, Verdict
from ratomega.weights import Weights

__all__ = ["MOST_CONFIGURATIONS", "check_burge_pairs", "check_burge_sum", "expected_counts", "is_burge_pair"]

MOST_CONFIGURATIONS = 20_000
"""Up to here both checks take seconds: charge 16 of U(2)."""

_PAIRS, _SUM = "Burge pairs", "sum over Burge pairs"
_BURGE = "M. Bershtein, O. Foda, arXiv 1404.7075; K. Alkalaev, V. Belavin, arXiv 1404.7094"


def is_burge_pair(model: MinimalModel, label: Label, first: Diagram, second: Diagram) -> bool:
    """The inequalities alone: nothing of the weights. ``label`` is that of a_1 - a_2, the diagrams are lists of rows.

    >>> lee_yang = MinimalModel.make(2, 5)
    >>> [is_burge_pair(lee_yang, (1, 1), *pair) for pair in (((1,), ()), ((), (1,)))]
    [True, False]
    """
    r, s = label
    one, two = transpose(first), transpose(second)
    # Beyond the longer diagram all columns are empty, and both right-hand sides are at most zero.
    return all(
        _column(one, i) - _column(two, i + s - 1) >= 1 - r
        and _column(two, i) - _column(one, i + model.p_prime - s - 1) >= 1 - model.p + r
        for i in range(1, max(len(one), len(two)) + 1)
    )


def _column(columns: Diagram, number: int) -> int:
    return columns[number - 1] if number <= len(columns) else 0


def expected_counts(model: MinimalModel, label: Label, order: int) -> list[int]:
    """The coefficients of chi_rs prod 1/(1 - q^n) up to q^order.

    >>> expected_counts(MinimalModel.make(2, 5), (1, 1), 6)
    [1, 1, 3, 5, 9, 14, 24]
    """
    states, bosons = model.character(label, order), coloured_partitions(1, order)
    return [sum(states[j] * bosons[n - j] for j in range(n + 1)) for n in range(order + 1)]


def check_burge_pairs(
    weights: Weights, limits: Sequence[ChargeLimit], *, most_configurations: int = MOST_CONFIGURATIONS
) -> Check | None:
    """At every charge of ``limits``: the configurations without a vanishing vector factor are the Burge pairs, as
    many as the character says.

    None where the internal parameter is no value of a minimal model, or there is nothing beyond charge 0. Undecided
    where there are more configurations than ``most_configurations``. Matter does not enter. Cost: one pass over the
    factors of all configurations, none evaluated.
    """
    point = _point(weights, limits)
    if point is None:
        return None
    said, source = _said(point), f"{_BURGE}; A. Rocha-Caridi 1985"
    last = max(limit.charge[0] for limit in limits)
    if (count := count_all([2], last)) > most_configurations:
        return Check(_PAIRS, Verdict.UNDECIDED, Kind.CONSISTENCY, _too_many(said, count, most_configurations), source)
    expected = expected_counts(point.model, point.label, last)
    found: list[int] = []
    for charge in (limit.charge for limit in limits):
        kept = 0
        for zeros in scan(weights, charge):
            ((first, second),) = zeros.configuration
            regular = zeros.vanishing_denominators == 0
            kept += regular
            if regular != is_burge_pair(point.model, point.label, first, second):
                words = "no vector factor vanishes" if regular else "a vector factor vanishes"
                evidence = f"{said}; {charge_text(charge)}: {words} for {first}, {second}, against the inequalities"
                return Check(_PAIRS, Verdict.REFUTED, Kind.CONSISTENCY, evidence, source)
        if kept != expected[charge[0]]:
            evidence = (
                f"{said}; {charge_text(charge)}: {kept} configurations without a vanishing vector factor, "
                f"the character gives {expected[charge[0]]}"
            )
            return Check(_PAIRS, Verdict.REFUTED, Kind.CONSISTENCY, evidence, source)
        found.append(kept)
    evidence = (
        f"{said}; configurations without a vanishing vector factor, up to charge {last}: {', '.join(map(str, found))}, "
        "as many as the character times prod 1/(1 - q^n) has, and each of them a Burge pair"
    )
    return Check(_PAIRS, Verdict.AGREES, Kind.CONSISTENCY, evidence, source)


def check_burge_sum(
    weights: Weights, limits: Sequence[ChargeLimit], *, most_configurations: int = MOST_CONFIGURATIONS
) -> Check | None:
    """At every charge of ``limits``: the sum of the weights of the Burge pairs alone, at the limit point, is the limit.

    None where the internal parameter is no value of a minimal model, the flavours are not four degenerate fields or
    the fusion rules do not hold; undecided as above. The evidence says how many weights outside are not zero in the
    limit and cancel. Cost: one pass over all configurations, and the expansion of the Burge pairs to t^0.
    """
    point = _point(weights, limits)
    if point is None or not point.fusion_holds:
        return None
    said = _said(point)
    last = max(limit.charge[0] for limit in limits)
    if (count := count_all([2], last)) > most_configurations:
        return Check(_SUM, Verdict.UNDECIDED, Kind.CONSISTENCY, _too_many(said, count, most_configurations), _BURGE)
    outside = 0
    for limit in limits:
        value: Number = ZERO
        for configuration in configurations([2], limit.charge):
            weight = weights.weight(configuration)
            if weight.vanishing_denominators == 0:
                value = value + weight.laurent(0).coefficient(0)
            elif weight.order >= 0 and not weight.dead:
                outside += 1
        outcome = limit.outcome
        if not isinstance(outcome, FiniteLimit) or outcome.value != value:
            there = number_text(outcome.value) if isinstance(outcome, FiniteLimit) else outcome.status
            evidence = f"{said}; {charge_text(limit.charge)}: sum over Burge pairs {number_text(value)}, limit {there}"
            return Check(_SUM, Verdict.REFUTED, Kind.CONSISTENCY, evidence, _BURGE)
    others = (
        f"of the other configurations {outside} do not vanish one by one on the path; they cancel"
        if outside
        else "the weight of every other configuration vanishes in the limit"
    )
    evidence = f"{said}; the weights of the Burge pairs alone sum to the limit, up to charge {last}; {others}"
    return Check(_SUM, Verdict.AGREES, Kind.CONSISTENCY, evidence, _BURGE)


def _point(weights: Weights, limits: Sequence[ChargeLimit]) -> MinimalPoint | None:
    return minimal_point(weights.setting) if any(any(limit.charge) for limit in limits) else None


def _said(point: MinimalPoint) -> str:
    """The point in words."""
    r, s = point.label
    words = f"{point.model}, a1 - a2 = {Affine(eps1=Rational(r), eps2=Rational(s))} at the limit point"
    if not point.four_points:
        return words
    held = next((one for one in point.four_points if one.fusion_holds), None)
    if held is None:
        return f"{words}; {point.four_points[0]}: the fusion rules do not hold"
    return f"{words}; {held}: the fusion rules hold"


def _too_many(said: str, count: int, most: int) -> str:
    full = FULL.configurations if count <= FULL.configurations else most
    what = f"{count} configurations, more than {most}"
    return f"{said}; not run: {too_costly(what, most=most, full=full)}"
