"""Regularity in x: averages that have to be polynomials, and what follows from them.

    T(x) = <Y(x + eps) + (-1)^N q P(x)/Y(x)>,        P(x) = prod (x + m) over the flavours,

has no poles in x, at the rational point as anywhere (for linear quivers: ``averages.characters``). All of this takes
our own weights as data: it is a check of consistency, no independent route. But a wrong factor in a weight leaves
poles.

T is found exactly, as a rational function; what is checked is that its denominator is gone. The coefficient of 1/x (the
first Dyson-Schwinger identity) is computed once more on its own, from power sums of the corners of diagrams. Where
poles in t survive in Z, the coefficients of all powers of t up to t^0 are checked.
Source: Nekrasov 1512.05388.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from itertools import combinations
from math import prod

from ratomega.averages.characters import character_terms, is_linear
from ratomega.averages.functions import SYMBOL, FunctionSeries, XAverages
from ratomega.averages.limits import Wanted, size_sums, trace_sums
from ratomega.averages.observables import Corners, Term, tail
from ratomega.averages.series import Sums, minus, number_averages, sums_of
from ratomega.case.setting import Setting
from ratomega.detector.geometry import compact_by_parameters
from ratomega.diagrams.tuples import Charge, Configuration, count_configurations
from ratomega.exact.laurent import Laurent
from ratomega.exact.path import Linear
from ratomega.exact.quadratic import Number, number_text
from ratomega.exact.rational import ONE, ZERO, Rational
from ratomega.exact.rational_function import RationalFunction
from ratomega.validator.depth import FULL, beyond, too_costly
from ratomega.validator.finiteness import charge_text, reach_text
from ratomega.validator.verdict import Check, Kind, Verdict
from ratomega.weights import Weights

__all__ = [
    "MOST_FUNCTIONS",
    "MOST_NUMBERS",
    "Regular",
    "check_dyson_schwinger",
    "check_regular_coefficients",
    "check_regularity",
    "check_trace_square",
    "regularity_checks",
]

MOST_FUNCTIONS = 2_000
"""So many products of Y's, one a configuration and term, are expanded for one check: one or two seconds."""
MOST_NUMBERS = 10_000
"""The same for observables that are numbers."""

SOURCE = "N. Nekrasov, arXiv 1512.05388"
TRACES = (
    "A. Losev, A. Marshakov, N. Nekrasov, arXiv hep-th/0302191; R. Flume, F. Fucito, J. Morales, R. Poghossian, arXiv "
    "hep-th/0403057"
)
# Evidence is a sentence, not a table: longer polynomials are left out of it.
LONGEST_TEXT = 160


def regularity_checks(weights: Weights, charges: Sequence[Charge], *, effort: int = 1) -> tuple[Check, ...]:
    """All checks of this module that apply to the theory, node by node.

    ``effort`` multiplies the bounds on the work. Cost: a second or two a node at most, times ``effort``.
    """
    found: list[Check | None] = []
    for node in range(len(weights.setting.nodes)):
        regular = Regular(weights, charges, node, most=MOST_FUNCTIONS * effort)
        found += [
            check_regularity(regular),
            check_regular_coefficients(regular),
            check_dyson_schwinger(weights, charges, node, most=MOST_NUMBERS * effort),
            check_trace_square(weights, charges, node, most=MOST_NUMBERS * effort),
        ]
    return tuple(check for check in found if check is not None)


class Regular:
    """T of one node, charge by charge as far as the work stays within ``most``; found when it is asked for.

    ``terms`` is empty where the quiver around the node is not linear: there is no T then.
    """

    def __init__(self, weights: Weights, charges: Sequence[Charge], node: int, *, most: int = MOST_FUNCTIONS) -> None:
        self.weights, self.charges, self.node, self.most = weights, tuple(charges), node, most
        setting = weights.setting
        self.terms = character_terms(setting, node, charges) if is_linear(setting, node) else ()
        self.reach = _affordable(setting, charges, self.terms, most=most) if self.terms else ()
        self._averages = XAverages(weights, self.terms)

    def applies(self) -> bool:
        """Is there a T, and a charge beyond 0?"""
        return bool(self.terms) and any(any(charge) for charge in self.charges)

    def at(self, charge: Charge) -> FunctionSeries:
        """T at one charge: polynomials in x, if all is well."""
        return self._averages.at(charge)


# ---- the four checks ----


def check_regularity(regular: Regular) -> Check | None:
    """Is T a polynomial at every charge? None when the quiver is not linear, or charge 0 stands alone."""
    if not regular.applies():
        return None
    setting = regular.weights.setting
    name = _name("regularity in x", setting, regular.node)
    if not regular.reach:
        return _too_costly(name, regular.most, MOST_FUNCTIONS)
    highest = max(term.monomial.degree(setting.ranks) for term in regular.terms)
    shown = []
    for charge in regular.reach:
        series = regular.at(charge)
        for power, function in enumerate(series.functions, -series.order):
            if not function.is_polynomial() or function.degree(SYMBOL) > highest:
                what = "has poles in x" if not function.is_polynomial() else f"has a degree above {highest}"
                return _check(name, Verdict.REFUTED, f"{_where(charge, power)}: T(x) {what}: {_short(function)}")
        times = f"t^-{series.order} times " if series.order else ""
        shown.append(f"{charge_text(charge)}: {times}{_short(series.leading)}")
    head = f"T(x) = {_statement(setting, regular.node)} is a polynomial of degree {highest} at most"
    extent = _extent(regular.reach, regular.charges, regular.most, MOST_FUNCTIONS)
    return _check(name, Verdict.AGREES, f"{head}, {extent}; {'; '.join(shown[:3])}")


def check_regular_coefficients(regular: Regular) -> Check | None:
    """The coefficients of T where they are known: U(1) with up to two flavours, U(2) with up to four, no edges.

    With A(x) = prod (x - a): T = A(x + eps) - q [P/A]_+ for one colour, and for two colours
    A(x + eps) + q [P/A]_+ + eps1 eps2 (1 - q) q d/dq log Z, without the - q for fewer than four flavours. None for
    other theories, and where no charge beyond 0 has compact components alone.
    """
    setting = regular.weights.setting
    here = setting.nodes[regular.node]
    flavours = len(here.antifundamental) + len(here.fundamental)
    compact = [charge for charge in regular.charges if compact_by_parameters(setting, charge)]
    fits = len(setting.nodes) == 1 and here.rank <= 2 and flavours <= 2 * here.rank
    if not regular.applies() or not fits or not any(any(charge) for charge in compact):
        return None
    name = _name("coefficients of the regular average", setting, regular.node)
    reach = [charge for charge in regular.reach if charge in compact]
    if not any(any(charge) for charge in reach):
        return _too_costly(name, regular.most, MOST_FUNCTIONS)
    sizes = number_averages(regular.weights, size_sums(regular.weights, Wanted("size", (regular.node,), 1)))
    known = {charge: sizes.at(charge)[0].coefficient(0) for charge in reach}
    # A polynomial of degree N is its values at N + 1 points.
    points = [Rational(n) for n in range(here.rank + 1)]
    for charge in reach:
        function = regular.at(charge).leading
        if not function.is_polynomial():
            return _check(name, Verdict.REFUTED, f"{charge_text(charge)}: T(x) has poles in x")
        for x in points:
            expected, value = _closed_value(setting, x, charge[0], known), function.at(**{SYMBOL: x})
            if expected != value:
                evidence = f"{charge_text(charge)}: T({x}) is {number_text(value)}, not {number_text(expected)}"
                return _check(name, Verdict.REFUTED, evidence)
    sign = "+" if here.rank == 2 else "-"
    more = "" if here.rank == 1 else f" + eps1 eps2 {'(1 - q) ' if flavours == 4 else ''}q d/dq log Z"
    known_as = "with A = prod (x - a), P = prod (x + m), []_+ the polynomial part"
    if len(reach) < len(regular.reach):
        extent = f"{reach_text(reach)} (beyond, not every component is compact)"
    else:
        extent = _extent(reach, regular.charges, regular.most, MOST_FUNCTIONS)
    return _check(name, Verdict.AGREES, f"T(x) = A(x + eps) {sign} q [P/A]_+{more} {known_as}, {extent}")


def check_dyson_schwinger(
    weights: Weights, charges: Sequence[Charge], node: int, *, most: int = MOST_NUMBERS
) -> Check | None:
    """The coefficients of 1/x in the terms of T add up to zero, found without any function of x.

    None when the quiver is not linear, or charge 0 stands alone.
    """
    setting = weights.setting
    if not is_linear(setting, node) or not any(any(charge) for charge in charges):
        return None
    name = _name("first Dyson-Schwinger identity", setting, node)
    terms = character_terms(setting, node, charges)
    reach = _affordable(setting, charges, terms, most=most)
    if not reach:
        return _too_costly(name, most, MOST_NUMBERS)
    averages = number_averages(weights, _tail_sums(weights, terms))
    example = ""
    for charge in reach:
        parts = averages.at(charge)
        lowest = min(0, *(part.valuation for part in parts))
        for power in range(lowest, 1):
            values = [part.coefficient(power) for part in parts]
            total = sum(values, ZERO)
            if total != 0:
                evidence = f"the coefficients of 1/x add up to {number_text(total)}, not to 0"
                return _check(name, Verdict.REFUTED, f"{_where(charge, power)}: {evidence}")
            if not example and any(value != 0 for value in values):
                example = f"; {_where(charge, power)}: {', '.join(number_text(value) for value in values)}"
    head = f"the coefficients of 1/x of the terms of T(x) = {_statement(setting, node)} add up to zero"
    return _check(name, Verdict.AGREES, f"{head}, {_extent(reach, charges, most, MOST_NUMBERS)}{example}")


def check_trace_square(
    weights: Weights, charges: Sequence[Charge], node: int, *, most: int = MOST_NUMBERS
) -> Check | None:
    """<Tr phi^2> = sum a^2 - 2 eps1 eps2 q d/dq log Z. None when charge 0 stands alone.

    This holds configuration by configuration; it checks contents, corners and the division by Z, not the weights.
    """
    setting = weights.setting
    if not any(any(charge) for charge in charges):
        return None
    name = _name("second chiral trace", setting, node)
    reach = _affordable(setting, charges, None, most=most)
    if not reach:
        return _too_costly(name, most, MOST_NUMBERS)
    traces = number_averages(weights, trace_sums(weights, Wanted("trace-powers", (node,), 2)))
    sizes = number_averages(weights, size_sums(weights, Wanted("size", (node,), 1)))
    for charge in reach:
        trace, size = traces.at(charge)[1], sizes.at(charge)[0]
        expected = _product(setting.eps1, setting.eps2, size).scaled(-2)
        if not any(charge):
            for a in setting.nodes[node].coulomb:
                expected = expected + _product(a, a, Laurent.constant(1, precision=1))
        difference = (trace - expected).truncated(1)
        if not difference.is_zero():
            evidence = f"{charge_text(charge)}: the two sides differ by {difference}"
            return _check(name, Verdict.REFUTED, evidence, TRACES)
    statement = "<Tr phi^2> = sum a^2 - 2 eps1 eps2 q d/dq log Z"
    return _check(name, Verdict.AGREES, f"{statement}, {_extent(reach, charges, most, MOST_NUMBERS)}", TRACES)


# ---- what they are made of ----


def _tail_sums(weights: Weights, terms: Sequence[Term]) -> Sums:
    """The sums of the coefficients of 1/x, term by term."""
    corners = Corners(weights)

    def of_term(term: Term) -> Sums:
        def tails(configuration: Configuration, last: int) -> list[Laurent]:
            return [tail(corners.roots(configuration, term.monomial), scale=weights.scale, last=last)]

        return sums_of(weights, tails, count=1)

    single = [of_term(term) for term in terms]

    def sums(charge: Charge, last: int) -> list[Laurent]:
        found = []
        for term, one in zip(terms, single, strict=True):
            rest = minus(charge, term.charge)
            found.append(Laurent.zero(precision=last + 1) if rest is None else one(rest, last)[0].scaled(term.sign))
        return found

    return sums


def _closed_value(setting: Setting, x: Rational, k: int, sizes: Mapping[Charge, Number]) -> Number:
    """The coefficient of q^k of T at x, from Z alone; ``sizes`` are those of q d/dq log Z."""
    eps1, eps2 = setting.eps1.constant, setting.eps2.constant
    here = setting.nodes[0]
    coulomb = [a.constant for a in here.coulomb]
    flavours = [m.constant for m in here.antifundamental] + [eps1 + eps2 - m.constant for m in here.fundamental]
    value: Number = ZERO
    if k == 0:
        value = prod((x + eps1 + eps2 - a for a in coulomb), start=ONE)
    elif k == 1:
        value = (-1) ** here.rank * _polynomial_part(x, coulomb, flavours)
    if here.rank == 2:
        value = value + eps1 * eps2 * sizes[(k,)]
        if len(flavours) == 4 and k:
            value = value - eps1 * eps2 * sizes[(k - 1,)]
    return value


def _polynomial_part(x: Rational, coulomb: Sequence[Number], flavours: Sequence[Number]) -> Number:
    """[prod (x + m) / prod (x - a)]_+ at x, from symmetric functions: elementary ones of m, complete ones of a."""
    degree = len(flavours) - len(coulomb)
    complete: list[Number] = [ONE, *[ZERO] * max(degree, 0)]
    for a in coulomb:
        for n in range(1, len(complete)):
            complete[n] = complete[n] + a * complete[n - 1]
    value: Number = ZERO
    for d in range(degree + 1):
        coefficient: Number = ZERO
        for i in range(d + 1):
            elementary = sum((prod(chosen, start=ONE) for chosen in combinations(flavours, i)), ZERO)
            coefficient = coefficient + elementary * complete[d - i]
        value = value + coefficient * x ** (degree - d)
    return value


def _product(one: Linear, other: Linear, series: Laurent) -> Laurent:
    """(c + d t)(c' + d' t) times a series."""
    middle = one.constant * other.slope + one.slope * other.constant
    coefficients = [one.constant * other.constant, middle, one.slope * other.slope]
    precision = max(3, series.precision - series.valuation + 3)
    return Laurent.from_coefficients(0, coefficients, precision=precision) * series


def _affordable(
    setting: Setting, charges: Sequence[Charge], terms: Sequence[Term] | None, *, most: int
) -> tuple[Charge, ...]:
    """The charges, from the first on, that stay within ``most`` values; () when not even one beyond 0 does."""
    shifts = [(0,) * len(setting.ranks)] if terms is None else [term.charge for term in terms]
    work, reach = 0, 0
    for n, charge in enumerate(charges):
        rests = [rest for shift in shifts if (rest := minus(charge, shift)) is not None]
        work += sum(count_configurations(setting.ranks, rest) for rest in rests)
        if work > most:
            break
        reach = n + 1
    kept = tuple(charges[:reach])
    return kept if any(any(charge) for charge in kept) else ()


def _statement(setting: Setting, node: int) -> str:
    """T in words: the average of its first terms."""
    if len(setting.nodes) == 1:
        return f"<Y(x + eps) {'-' if setting.nodes[0].rank % 2 else '+'} q P(x)/Y(x)>"
    return f"<Y(x + eps) + ...>, Y that of node {setting.nodes[node].name},"


def _where(charge: Charge, power: int) -> str:
    return f"{charge_text(charge)}{f', t^{power}' if power else ''}"


def _extent(reach: Sequence[Charge], charges: Sequence[Charge], most: int, unit: int) -> str:
    """Up to where was compared; ``most`` values were allowed, ``unit`` are at the lowest effort."""
    cut = "" if len(reach) == len(charges) else f" ({beyond(most=most, full=unit * FULL.effort)})"
    return f"{reach_text(reach)}{cut}"


def _short(function: RationalFunction) -> str:
    text = str(function)
    return text if len(text) <= LONGEST_TEXT else f"a function of {len(text)} characters"


def _name(name: str, setting: Setting, node: int) -> str:
    return name if len(setting.nodes) == 1 else f"{name}, node {setting.nodes[node].name}"


def _check(name: str, verdict: Verdict, evidence: str, source: str = SOURCE) -> Check:
    return Check(name, verdict, Kind.CONSISTENCY, evidence, source)


def _too_costly(name: str, most: int, unit: int) -> Check:
    what = f"more than {most} values of observables up to the first charge"
    why = too_costly(what, most=most, full=unit * FULL.effort, less="take fewer colours")
    return _check(name, Verdict.UNDECIDED, f"not run: {why}")
