"""From a case to its conformal block: the dictionary, three forms of the coefficients, and the routes compared.

case -> momenta on a path -> block by one route -> by the others -> H and Z -> Z by the sum over diagrams -> result
"""

from __future__ import annotations

import os
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

from ratomega.case.case import Case
from ratomega.case.conformal import HIGHEST_ORDER, PLACES, ConformalCase, checked_order, gauge_case
from ratomega.case.reading import load_case_as_written
from ratomega.case.setting import own_setting, probe_setting
from ratomega.chain.pipeline import limit
from ratomega.conformal.correlator import (
    Correlator,
    further_correlator,
    of_conformal,
    of_gauge,
    pairing,
    u1_exponent,
    why_no_fields,
)
from ratomega.conformal.elliptic import elliptic_coefficients, euler_power, series_product
from ratomega.conformal.exact_blocks import NomeForm
from ratomega.diagrams.tuples import count_all
from ratomega.errors import InputError
from ratomega.exact.laurent import Laurent
from ratomega.exact.quadratic import Number, is_quadratic, number_text, one_field, only_rational, rational_parts
from ratomega.exact.rational import ONE, ZERO
from ratomega.regulator.outcome import FiniteLimit, Outcome, PathDependent, Pole, judge, leading
from ratomega.results.blocks import BlockCoefficient, BlockResult, Dictionary, FieldEntry
from ratomega.validator.blocks import (
    GRAM,
    RECURSION,
    Series,
    compare_block,
    elementary_check,
    known_checks,
    recursion_check,
    recursion_reach,
    recursion_values,
)
from ratomega.validator.verdict import Check, Kind, Verdict
from ratomega.version import VERSION

__all__ = ["BlockSource", "block"]

BlockSource = str | os.PathLike[str] | Mapping[str, object] | Case | ConformalCase

PROBES = 3
# The sum over diagrams is done cluster by cluster up to here.
MOST_CONFIGURATIONS = 1_500
# The deepest level of Gram matrices for the effort that the numbers make (see ``_depth``): seconds at most.
_DEPTHS = ((12, 10), (40, 8), (200, 6))
_ALWAYS = 4
# The highest order of the recursion for the digits of the longest number: a minute or so, minutes in the first line.
_REACHES = ((12, HIGHEST_ORDER), (80, 40), (400, 24))
_REACHES_ALWAYS = 12

_SUM = "the sum over pairs of diagrams"
_DICTIONARY_SOURCE = "L. Alday, D. Gaiotto, Y. Tachikawa, arXiv 0906.3219"


@dataclass(frozen=True, slots=True)
class _Prepared:
    """A case on its path; ``further`` makes the further ones."""

    case: Case | ConformalCase
    order: int
    hash: str
    correlator: Correlator
    further: Callable[[int], Correlator]
    gauge: Case | None
    gauge_reason: str


def block(source: BlockSource, *, order: int | None = None) -> BlockResult:
    """The conformal block of a case, in conformal terms or of U(2) with four flavours or one adjoint.

    Coefficients of x^0 ... x^order without the power of x and with constant term 1, H in 16 q_e, and Z where the
    exponent of its U(1) factor is rational. ``order`` defaults to that of the case (its charge, for a gauge case). At a
    degenerate internal weight coefficients are limits on a path; a pole that survives, or paths that differ, are a
    result. Raises ``InputError`` for bad input and for an order that no route reaches.

    Cost: about a second at order 8; the recursion alone goes on beyond order 10, some seconds at 40.

    >>> case = {"c": 25, "external": [{"weight": "15/16"}] * 4, "internal": {"weight": "3/7"}, "order": 3}
    >>> found = block({"conformal": case})                              # Al. Zamolodchikov 1986
    >>> [str(one.block) for one in found], [str(one.elliptic) for one in found]
    (['1', '3/14', '1131/6272', '13787/87808'], ['1', '0', '0', '0'])
    >>> str(found.dictionary.coulomb), [check.name for check in found.checks][:2]
    ('2/7*sqrt(7)', ['Gram matrices of Virasoro descendants', 'the elementary block'])
    """
    ready = _prepared(source, order)
    correlator, last = ready.correlator, ready.order
    degenerate = correlator.degenerate(last)
    depth = min(last, _depth(correlator, bool(degenerate)))
    values = None if degenerate or last > _reach(correlator) else recursion_values(correlator, last)
    if values is None and depth < last:
        raise InputError.single(_out_of_reach(correlator, degenerate, depth, last), "order")
    gram = correlator.coefficients(depth)
    if values is None:
        series = Series(gram, GRAM)
        further = [ready.further(n).coefficients(last) for n in range(1, PROBES + 1)] if degenerate else []
    else:
        series = Series([Laurent.constant(x, precision=1) for x in values], RECURSION)
        further = []
    outcomes = _outcomes(ready, series, further, degenerate)
    checks = list(_checks(correlator, series, gram, degenerate))
    known = [outcome.value for outcome in _finite_part(outcomes)]
    elliptic = elliptic_coefficients(correlator, known)
    exponent = u1_exponent(correlator)
    z = None if exponent is None else series_product(known, _u1_factor(correlator, exponent, len(known)))
    diagrams = None if z is None else _sum_check(ready, z, len(outcomes))
    checks += [] if diagrams is None else [diagrams]
    z_reason = _why_no_z(exponent)
    coefficients = tuple(
        _coefficient(k, outcome, elliptic, z if z is not None and not z_reason else [])
        for k, outcome in enumerate(outcomes)
    )
    return BlockResult(
        version=VERSION,
        case=ready.case,
        hash=ready.hash,
        path=correlator.text(),
        degenerate=degenerate,
        dictionary=_dictionary(correlator, ready.gauge, exponent),
        gauge=ready.gauge,
        gauge_reason=ready.gauge_reason,
        z_reason=z_reason,
        route=series.route,
        coefficients=coefficients,
        checks=tuple(checks),
    )


def _prepared(source: BlockSource, order: int | None) -> _Prepared:
    loaded = load_case_as_written(source)
    if isinstance(loaded, ConformalCase):
        case = loaded if order is None else loaded.with_order(order)
        gauge, reason = None, ""
        try:
            gauge = gauge_case(case)
        except InputError as error:
            reason = error.problems[0].message.removesuffix('; "ratomega block" takes the case as it is')
        return _Prepared(
            case,
            case.order,
            case.hash,
            of_conformal(case),
            lambda n: further_correlator(case, n, level=case.order),
            gauge,
            reason,
        )
    if loaded.symbols:
        message = f"a block is computed at numbers; give numbers for {', '.join(loaded.symbols)}"
        raise InputError.single(message, "symbols")
    if loaded.nested:
        raise InputError.single("a block is computed on one path, and this case has a limit inside the limit (u)", "u")
    reason = why_no_fields(probe_setting(loaded, 1))
    if reason:
        raise InputError.single(reason, "node")
    last = checked_order(loaded.bounds[0] if order is None else order)
    given = loaded.with_charge(last)
    setting = own_setting(given)
    second = pairing(setting)
    return _Prepared(
        given,
        last,
        given.hash,
        of_gauge(setting, second),
        lambda n: of_gauge(probe_setting(given, n), second),
        given,
        "",
    )


def _depth(correlator: Correlator, degenerate: bool) -> int:
    """How deep Gram matrices are taken, by the length of the numbers; decided before any work."""
    effort = _digits(correlator) * (4 if correlator.torus else 1)
    if degenerate or any(is_quadratic(x) for x in correlator.numbers()):
        effort *= 2
    return next((level for most, level in _DEPTHS if effort <= most), _ALWAYS)


def _digits(correlator: Correlator) -> int:
    """The digits of the longest number."""
    parts = [part for x in correlator.numbers() for part in rational_parts(x)]
    return max(max(int(x.p).bit_length(), int(x.q).bit_length()) for x in parts) * 3 // 10 + 1


def _reach(correlator: Correlator) -> int:
    """How far the recursion goes, by the length of the numbers; decided before any work."""
    digits = _digits(correlator)
    return next((order for most, order in _REACHES if digits <= most), _REACHES_ALWAYS)


def _out_of_reach(correlator: Correlator, degenerate: Sequence[tuple[int, int]], depth: int, last: int) -> str:
    most = depth
    if degenerate:
        why = f"the internal weight is h_({degenerate[0][0]},{degenerate[0][1]}), where the recursion divides by zero"
    else:
        most = max(depth, recursion_reach(correlator, _reach(correlator)))
        why = f"the recursion does not go to order {last} here (it takes rational squares of momenta and short numbers)"
    return f"{why}, and Gram matrices go to order {depth} at these numbers; ask for order {most} at most"


def _outcomes(
    ready: _Prepared,
    series: Series,
    further: Sequence[Sequence[Laurent]],
    degenerate: Sequence[tuple[int, int]],
) -> list[Outcome]:
    first = degenerate[0][0] * degenerate[0][1] if degenerate else ready.order + 1
    paths = [ready.further(n).text() for n in range(1, len(further) + 1)]
    result = []
    for order, one in enumerate(series.values):
        own = leading(ready.correlator.text(), one)
        others = [leading(path, other[order]) for path, other in zip(paths, further, strict=True)]
        result.append(judge(own, others, compact=order < first))
    return result


def _finite_part(outcomes: Sequence[Outcome]) -> list[FiniteLimit]:
    """The coefficients before the first that is a pole or depends on the path."""
    found = []
    for outcome in outcomes:
        if not isinstance(outcome, FiniteLimit):
            break
        found.append(outcome)
    return found


def _checks(
    correlator: Correlator, series: Series, gram: Sequence[Laurent], degenerate: Sequence[tuple[int, int]]
) -> list[Check]:
    found: list[Check | None] = []
    if series.route == RECURSION:
        statement = "the block is the contraction of two states with the inverse Gram matrix, level by level"
        if correlator.torus:
            statement = "the block is the trace of the field over the Verma module, level by level"
        values = [one.coefficient(0) for one in gram]
        source = "A. Belavin, A. Polyakov, A. Zamolodchikov 1984"
        found.append(compare_block(GRAM, statement, source, series, values, torus=correlator.torus))
    elif degenerate:
        found.append(recursion_check(correlator, series))
    found.append(elementary_check(correlator, series))
    found += known_checks(correlator, series)
    return [check for check in found if check is not None]


def _u1_factor(correlator: Correlator, exponent: Number, length: int) -> list[Number]:
    if correlator.torus:
        return euler_power(exponent, length)
    return list(NomeForm(ZERO, exponent, ZERO).coefficients(length - 1))


def _why_no_z(exponent: Number | None) -> str:
    if exponent is None:
        return "the momenta at x and 1, which the exponent of the U(1) factor needs, are no exact numbers of one field"
    if is_quadratic(exponent):
        return f"the exponent {number_text(exponent)} of the U(1) factor is not rational"
    return ""


def _sum_check(ready: _Prepared, z: Sequence[Number], orders: int) -> Check | None:
    """Z from the block against the sum over diagrams, as far as both are finite; None where there is no gauge theory.

    Done to the highest charge with at most ``MOST_CONFIGURATIONS`` configurations.
    """
    last = len(z) - 1
    while last > 0 and count_all((2,), last) > MOST_CONFIGURATIONS:
        last -= 1
    if ready.gauge is None or last < 1:
        return None
    statement = "Z = (U(1) factor) times block"
    compared = 0
    for one in limit(ready.gauge.with_charge(last), route="direct"):
        charge = one.charge[0]
        if one.status != "finite":
            evidence = f"{statement}; equal up to charge {compared}; at charge {charge} the sum is {one.status}"
            return Check(_SUM, Verdict.UNDECIDED, Kind.INDEPENDENT, evidence, _DICTIONARY_SOURCE)
        if one.value != z[charge]:
            evidence = (
                f"{statement}; first difference at charge {charge}: from the block {number_text(z[charge])}, "
                f"from the sum {one.value}"
            )
            return Check(_SUM, Verdict.REFUTED, Kind.INDEPENDENT, evidence, _DICTIONARY_SOURCE)
        compared = charge
    evidence = f"{statement}; equal up to charge {compared}"
    return Check(_SUM, Verdict.AGREES, Kind.INDEPENDENT, evidence, _DICTIONARY_SOURCE, compared == orders - 1)


def _coefficient(
    order: int, outcome: Outcome, elliptic: Sequence[Number], z: Sequence[Number]
) -> BlockCoefficient:
    h = elliptic[order] if order < len(elliptic) else None
    gauge = z[order] if order < len(z) else None
    if isinstance(outcome, FiniteLimit):
        return BlockCoefficient(
            order, outcome.status, outcome.value, h, gauge, 0, None, (), outcome.independence.value
        )
    if isinstance(outcome, PathDependent):
        return BlockCoefficient(order, outcome.status, None, h, gauge, 0, None, outcome.values, None)
    assert isinstance(outcome, Pole)
    proof = None if outcome.independence is None else outcome.independence.value
    return BlockCoefficient(
        order, outcome.status, None, h, gauge, outcome.order, outcome.leading, outcome.values, proof
    )


def _dictionary(correlator: Correlator, gauge: Case | None, exponent: Number | None) -> Dictionary:
    eps1, eps2 = only_rational(correlator.eps1.constant), only_rational(correlator.eps2.constant)
    places = ("on the torus",) if correlator.torus else tuple(f"at {place}" for place in PLACES)
    entries = [
        FieldEntry(place, correlator.weight(one), one.limit_square, one.limit)
        for place, one in zip((*places, "internal"), (*correlator.external, correlator.internal), strict=True)
    ]
    return Dictionary(
        central_charge=ONE + 6 * (eps1 + eps2) ** 2 / (eps1 * eps2),
        b_squared=eps1 / eps2,
        eps1=eps1,
        eps2=eps2,
        external=tuple(entries[:-1]),
        internal=entries[-1],
        masses=() if gauge is None else _masses(entries[:-1], (eps1 + eps2) / 2),
        exponent=exponent,
    )


def _masses(fields: Sequence[FieldEntry], half_eps: Number) -> tuple[Number, ...]:
    momenta = [field.momentum for field in fields if field.momentum is not None]
    assert len(momenta) == len(fields), "a gauge theory was found, so all momenta are numbers"
    one_field(momenta)
    if len(momenta) == 1:
        return (momenta[0] + half_eps,)
    at_zero, at_x, at_one, at_infinity = momenta
    m0, m1 = at_x + half_eps, at_one + half_eps
    return m0 + at_zero, m0 - at_zero, m1 + at_infinity, m1 - at_infinity
