"""Cases with u: the chain for a limit inside the limit, and what is checked of it.

    case -> inner limits at two numbers t = P/Q (regulator.nested) -> coefficients -> checks -> result
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace
from itertools import islice

from ratomega.case.affine import Affine
from ratomega.case.case import Case
from ratomega.case.expression import INNER
from ratomega.case.setting import own_setting
from ratomega.chain.job import check_count
from ratomega.conformal.dictionary import gauge_path, why_not_covered
from ratomega.conformal.gauge_sum import gauge_coefficients
from ratomega.detector.accidents import check_path, dead_colours
from ratomega.errors import InputError, PathError
from ratomega.exact.path import SMALL_PARAMETERS
from ratomega.exact.quadratic import Number, number_text, only_rational
from ratomega.exact.rational import ZERO, Rational
from ratomega.regulator.limits import charge_limit
from ratomega.regulator.nested import BELOW, NestedLimit, NestedLimits, nested_limits
from ratomega.regulator.outcome import Independence
from ratomega.regulator.poles.problem import applies, case_problem
from ratomega.regulator.poles.recursion import pole_coefficients
from ratomega.results.header import Header, PathRecord
from ratomega.results.limits import Coefficient, LimitResult, RouteRecord
from ratomega.validator.finiteness import CANCELLATION, charge_text, reach_text
from ratomega.validator.verdict import Check, Kind, Verdict
from ratomega.validator.virasoro import GRAM_NAME, GRAM_SOURCE, MOST_LEVEL, deepest_level
from ratomega.version import VERSION
from ratomega.weights import Weights

__all__ = ["nested_checks", "nested_result", "refuse_other_ways"]

# u = kappa t: directions that no symmetry relates; the first of them that leave all resonances are taken.
DIRECTIONS = tuple(Rational(*kappa) for kappa in ((1, 7), (-3, 5), (5, 11), (-2, 13), (7, 3), (4, 17), (-9, 19)))
MOST_DIRECTIONS = 3
# A number t at which nothing happens by accident.
GENERIC = Rational(2**61 - 1, BELOW)

_WHY = "u -> 0 at fixed t, then t -> 0; the inner limits are taken at t = P/Q, P and Q primes"
_ONE_WAY = "a limit inside the limit (u) is taken in one way, in one process"
_NO_PATHS = "a limit inside the limit (u) follows no single path, so there is no number of further ones to be tried"
_NESTED = "limit inside the limit"
_ORDER = "order of the two limits"
_SOURCE = "P-adic evaluation: a fraction is found from its residue when the prime is longer than both of its parts"
_CONVENTION = "the same sum over diagrams, along u = kappa t"


def nested_result(case: Case, *, allow_tilt: bool, most_configurations: int) -> LimitResult:
    """The limits u -> 0, then t -> 0, with their check. Raises ``InputError`` as ``nested_limits`` does."""
    check_count(case, most_configurations)
    found = nested_limits(case, allow_tilt=allow_tilt)
    # What holds at t = 0 alone, where parameters meet, says nothing of the inner limits.
    inner = own_setting(case.inner(GENERIC))
    warnings = list(dead_colours(own_setting(case.inner(ZERO)))) if dead_colours(inner) else []
    if inner.tilted:
        names = ", ".join(name for name, _ in inner.tilts)
        warnings.insert(
            0,
            f"the Coulomb parameters of {names} were tilted by multiples of u in the inner limit, because a difference "
            "stays on the lattice of eps1 and eps2 there; give multiples of u of your own to choose",
        )
    header = Header(VERSION, case, _path(case), case.hash, tuple(warnings))
    route = RouteRecord("direct", "residues", _WHY, found.spare_bits, 2)
    return LimitResult(header, route, tuple(_coefficient(one) for one in found.limits), (_check(found),), False)


def _path(case: Case) -> PathRecord:
    """eps1, eps2 and the Coulomb parameters as expressions in t and u."""
    eps1, eps2 = case.background.affine()
    coulomb = []
    for node in case.theory.nodes:
        texts = []
        for a in node.coulomb:
            rest = Affine(a.constant, t=a.t, symbols=a.symbols)
            texts.append(str(rest + eps1.times(a.eps1) + eps2.times(a.eps2)))
        coulomb.append((node.name, tuple(texts)))
    return PathRecord((INNER, *SMALL_PARAMETERS), str(eps1), str(eps2), tuple(coulomb), False)


def _coefficient(one: NestedLimit) -> Coefficient:
    order = one.inner_order + one.order
    independence = Independence.THEOREM.value if one.compact else None
    value, leading = (one.value, None) if order == 0 else (None, one.value)
    status = "finite" if order == 0 else "pole"
    return Coefficient(one.charge, status, value, order, leading, (), independence, None, *(None,) * 6)


def _check(found: NestedLimits) -> Check:
    poles = [one for one in found.limits if one.inner_order + one.order]
    if poles:
        said = "; ".join(
            f"{charge_text(one.charge)}: {number_text(one.value)} u^-{one.inner_order} t^-{one.order}" for one in poles
        )
        return Check(CANCELLATION, Verdict.REFUTED, Kind.CONSISTENCY, f"poles survive: {said}", _SOURCE)
    first, second = found.bits
    evidence = (
        f"inner limits at t = (2^{first} - 1)/{BELOW} and (2^{second} - 1)/{BELOW}; no pole in u or t; every value is "
        f"the fraction behind its residue modulo the first prime, with {found.spare_bits} bits to spare at least, and "
        "confirmed by the second"
    )
    return Check(_NESTED, Verdict.AGREES, Kind.CONSISTENCY, evidence, _SOURCE)


# ---- further checks, for validate ----


def nested_checks(case: Case, result: LimitResult) -> Iterator[Check]:
    """What ``validate`` says of a case with u: its own check, the order of the limits, independent routes."""
    yield from result.checks
    yield _order_check(case, result)
    yield from _route_checks(case, result)


def along(case: Case, direction: Rational) -> Case:
    """The case with one small parameter: u = direction * t."""
    values = {INNER: Affine(t=direction)}
    eps1, eps2 = (eps.at(values) for eps in case.background.affine())
    return Case.make(case.theory.at(values), type(case.background).make(eps1, eps2), case.charge, case.title)


def _order_check(case: Case, result: LimitResult) -> Check:
    """The nested limits beside those along u = kappa t: equal where every component is compact, and free elsewhere."""
    paths = list(islice(_paths(case), MOST_DIRECTIONS))
    if not paths:
        evidence = "not run: along every u = kappa t that was tried, a Coulomb difference stays on a resonance"
        return Check(_ORDER, Verdict.UNDECIDED, Kind.CONSISTENCY, evidence, _CONVENTION)
    different, wrong = [], False
    for coefficient in result.coefficients:
        own = _text(coefficient.order, coefficient.value if coefficient.leading is None else coefficient.leading)
        found = [(kappa, charge_limit(weights, coefficient.charge).own) for kappa, weights in paths]
        texts = [(kappa, _text(one.order, one.value)) for kappa, one in found]
        if any(text != own for _, text in texts):
            said = ", ".join(f"u = {kappa}*t gives {text}" for kappa, text in texts)
            different.append(f"{charge_text(coefficient.charge)}: u before t gives {own}; {said}")
            wrong = wrong or coefficient.independence == Independence.THEOREM.value
    if wrong:
        evidence = f"every component is compact at some of these charges: {'; '.join(different)}"
        return Check(_ORDER, Verdict.REFUTED, Kind.CONSISTENCY, evidence, _CONVENTION)
    if not different:
        tried = ", ".join(str(kappa) for kappa, _ in paths)
        evidence = f"u before t, and u = kappa t for kappa = {tried}: equal at all charges"
        return Check(_ORDER, Verdict.AGREES, Kind.CONSISTENCY, evidence, _CONVENTION)
    evidence = f"the limits do not commute where components are not compact: {'; '.join(different)}"
    return Check(_ORDER, Verdict.AGREES, Kind.CONSISTENCY, evidence, _CONVENTION)


def _paths(case: Case) -> Iterator[tuple[Rational, Weights]]:
    """The weights along u = kappa t, for every kappa with a path that can be used."""
    for kappa in DIRECTIONS:
        try:
            setting = own_setting(along(case, kappa), allow_tilt=False)
            check_path(setting, case.bounds)
        except PathError:
            # A difference stays on a resonance along this kappa: the next one is as good.
            continue
        yield kappa, Weights(setting)


def _text(order: int, value: object) -> str:
    assert value is not None
    return f"{number_text(value)}{f' at a pole of order {order}' if order else ''}"  # type: ignore[arg-type]


def _route_checks(case: Case, result: LimitResult) -> Iterator[Check]:
    """Independent routes at the numbers t = P, u = P^m, m beyond every pole: modulo P they give the nested limit."""
    if not isinstance(case.charge, int) or case.charge < 1 or any(c.order for c in result.coefficients):
        return
    if any(c.value is None or not isinstance(c.value, Rational) for c in result.coefficients):
        return
    prime = 2**127 - 1
    # Every order of a pole in t that an expansion in u/t can bring stays below this (two for a box and a colour).
    power = 4 * case.charge + 2
    at_t = case.inner(Rational(prime))
    u = Rational(prime) ** power
    background = at_t.background
    eps1, eps2 = (Affine(e.constant + e.slope * u) for e in (background.eps1, background.eps2))
    theory = at_t.theory.each(lambda x: Affine(x.constant + x.t * u, x.eps1, x.eps2))
    near = Case.make(theory, type(background).make(eps1, eps2), case.charge)
    at = "at the numbers t = P and u = P^m, P = 2^127 - 1, is the limit modulo P"
    if applies(near).applies:
        recursion = pole_coefficients(case_problem(near), case.charge).coefficients
        name = "pole recursion in the Coulomb parameter"
        source = "Al. Zamolodchikov 1984; R. Poghossian, arXiv 0909.3412"
        check = Check(name, Verdict.AGREES, Kind.INDEPENDENT, f"Z by the recursion over its poles in a, {at}", source)
        yield _compared(check, result, recursion, prime)
    setting = own_setting(near)
    if not why_not_covered(setting):
        gauge = gauge_path(setting)
        blocks = gauge_coefficients(gauge, min(case.charge, deepest_level(gauge, MOST_LEVEL)))
        check = Check(GRAM_NAME, Verdict.AGREES, Kind.INDEPENDENT, f"Z by Gram matrices, {at}", GRAM_SOURCE)
        yield _compared(check, result, [z.coefficient(0) for z in blocks], prime)


def _compared(check: Check, result: LimitResult, values: Sequence[Number], prime: int) -> Check:
    """The check with its verdict: values at the numbers against the limits, as far as there are values."""
    compared = result.coefficients[: len(values)]
    for coefficient, value in zip(compared, values, strict=True):
        assert isinstance(coefficient.value, Rational)
        rest = only_rational(value) - coefficient.value
        if int(rest.p) % prime or int(rest.q) % prime == 0:
            below = int(only_rational(value).q)
            this = int(only_rational(value).p) * pow(below, -1, prime) % prime if below % prime else "a pole"
            there = int(coefficient.value.p) * pow(int(coefficient.value.q), -1, prime) % prime
            where = charge_text(coefficient.charge)
            said = f"first difference at {where}: this way {this}, the limit {coefficient.value} is {there} modulo P"
            return replace(check, verdict=Verdict.REFUTED, evidence=f"{check.evidence}; {said}")
    evidence = f"{check.evidence}; equal {reach_text([c.charge for c in compared])}"
    return replace(check, evidence=evidence, complete=len(compared) == len(result.coefficients))


def refuse_other_ways(**given: object) -> None:
    """A case with u takes one way. Raises ``InputError`` for an option of another."""
    for name, value in given.items():
        if value:
            raise InputError.single(_NO_PATHS if name == "probes" else _ONE_WAY, name)
