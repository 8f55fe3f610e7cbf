"""From a case to a result: the only place where the chain is spelt out.

    case -> job (own path, weights, way) -> detector / regulator -> validator -> result
"""

from __future__ import annotations

import os
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import Executor
from contextlib import nullcontext
from dataclasses import replace
from typing import TYPE_CHECKING

from ratomega.case.case import Case
from ratomega.case.reading import load_case
from ratomega.chain.job import MOST_CONFIGURATIONS, CaseSource, Found, Job, ShortLimit
from ratomega.chain.nesting import nested_checks, nested_result, refuse_other_ways
from ratomega.detector.clusters import cluster_graph, find_clusters
from ratomega.detector.zeros import scan
from ratomega.diagrams.tuples import Charge
from ratomega.exact.quadratic import Number
from ratomega.exact.rational_function import RationalFunction
from ratomega.regulator.limits import ChargeLimit
from ratomega.regulator.outcome import FiniteLimit, Independence, PathDependent, Pole
from ratomega.regulator.routes import Way
from ratomega.results.detections import ChargeReport, DetectResult
from ratomega.results.limits import Coefficient, LimitResult, RouteRecord
from ratomega.results.validations import ValidateResult
from ratomega.symbolic.certificate import check_functions
from ratomega.symbolic.functions import SymbolicLimit
from ratomega.validator.checklist import Depth, depth_of, first_checks, outside_checks
from ratomega.validator.finiteness import certificate, short_cut_certificate
from ratomega.validator.verdict import Check

if TYPE_CHECKING:
    import networkx

__all__ = ["DEFAULT_PROBES", "clusters", "detect", "limit", "validate"]

DEFAULT_PROBES = 3

Watcher = Callable[[Charge], None]


def limit(
    source: CaseSource,
    *,
    terms: int | None = None,
    probes: int | None = None,
    allow_tilt: bool = True,
    most_configurations: int = MOST_CONFIGURATIONS,
    watch: Watcher | None = None,
    workers: int | None = None,
    executor: Executor | None = None,
    keep: str | os.PathLike[str] | None = None,
    route: str = "auto",
    certify: bool = False,
) -> LimitResult:
    """The exact limit of every coefficient of Z up to the case's charge, with its certificate.

    ``source`` is a case, a mapping, a file or the name of a bundled case. ``terms=n`` adds the expansion on the own
    path up to t^n. ``probes`` further paths, 3 unless said, are tried where compactness does not prove independence of
    the path. ``watch`` is called with every finished charge. Raises ``InputError`` for bad input; a surviving pole is a
    result, not an error.

    ``workers=n`` does the sum in n processes, which are started again when they die; ``executor`` does it in one of the
    caller's, which stays the caller's (``workers`` then says how many workers it has, if that is to be known). ``keep``
    names a file in which finished parts are kept, so that a run which was ended goes on from there. The result is the
    same with all of them. Raises ``WorkerError`` when workers or executor fail for good.

    ``route`` is "direct" (the sum over diagrams), "poles" (the recursion of U(2)) or "auto", a fixed rule on the case;
    ``result.route`` says which way was taken. Coefficients put together from residues say so, with the spare bits that
    confirm them; ``certify`` takes so many primes that a proved bound leaves no other answer.

    Cost: one pass over all configurations, and one more for every further path where paths are probed; far less on
    the short cuts.

    >>> result = limit({"charge": 2, "background": {"eps1": 1, "eps2": -1}, "node": [{"coulomb": ["0"]}]})
    >>> [str(c.value) for c in result]            # exp(q/(eps1 eps2)) = exp(-q)
    ['1', '-1', '1/2']

    With u in a parameter there is a limit inside the limit, u -> 0 before t -> 0, taken in one way of its own.

    With symbols the values are functions, found from limits at many points.

    >>> case = {"charge": 1, "symbols": ["a"], "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["a", "-a"]}]}
    >>> str(limit(case)[1].value)
    '-1/(2*(a + 1)*(a - 1))'
    """
    case = load_case(source)
    if case.nested:
        poles = route == "poles"
        asked = {"terms": terms is not None, "route": poles, "certify": certify, "probes": probes is not None}
        refuse_other_ways(**asked, workers=workers, executor=executor, keep=keep)
        return nested_result(case, allow_tilt=allow_tilt, most_configurations=most_configurations)
    job = Job.prepare(
        case,
        allow_tilt=allow_tilt,
        most_configurations=most_configurations,
        route=route,
        clusterwise=terms is not None,
    )
    found = []
    further = DEFAULT_PROBES if probes is None else probes
    with job.crew(workers=workers, executor=executor, keep=keep) or nullcontext() as crew:
        for one in job.limits(probes=further, terms=terms, crew=crew, certify=certify):
            found.append(one)
            if watch is not None:
                watch(one.charge)
    return limit_result(job, found, terms=terms)


def limit_result(job: Job, found: Sequence[Found], *, terms: int | None = None, partial: bool = False) -> LimitResult:
    """The result of the charges found so far."""
    short = [one for one in found if isinstance(one, ShortLimit)]
    coefficients = tuple(_coefficient(one, terms) for one in found)
    return LimitResult(job.header, _route_record(job.way, short), coefficients, _limit_checks(job, found), partial)


def _limit_checks(job: Job, found: Sequence[Found]) -> tuple[Check, ...]:
    if not found:
        # Interrupted before anything was finished: no check ran.
        return ()
    if job.way.short_cut:
        return short_cut_certificate([one.charge for one in found], job.way.why)
    return (*certificate(samples(found)), *_function_checks(job, found))


def _route_record(way: Way, short: Sequence[ShortLimit]) -> RouteRecord:
    if not short:
        return RouteRecord(way.route, "exact", way.why, None, 0)
    evidence = short[0].evidence
    return RouteRecord(way.route, evidence.method, way.why, evidence.spare_bits, evidence.primes)


def samples(found: Sequence[Found]) -> list[ChargeLimit]:
    """The limits that were taken cluster by cluster, with symbols those at the generic point."""
    limits = (one.sample if isinstance(one, SymbolicLimit) else one for one in found)
    return [one for one in limits if isinstance(one, ChargeLimit)]


def _function_checks(job: Job, found: Sequence[Found]) -> tuple[Check, ...]:
    functions = [one.found for one in found if isinstance(one, SymbolicLimit)]
    return (check_functions(job.case.symbols, functions),) if functions else ()


def _coefficient(one: Found, terms: int | None) -> Coefficient:
    if isinstance(one, SymbolicLimit):
        return replace(_coefficient(one.sample, None), value=one.found.function)
    if isinstance(one, ShortLimit):
        independence = Independence.THEOREM.value
        return Coefficient(one.charge, "finite", one.value, 0, None, (), independence, None, *(None,) * 6)
    outcome, charge_sum = one.outcome, one.sum
    proof = None if isinstance(outcome, PathDependent) else outcome.independence
    return Coefficient(
        charge=one.charge,
        status=outcome.status,
        value=outcome.value if isinstance(outcome, FiniteLimit) else None,
        order=outcome.order if isinstance(outcome, Pole) else 0,
        leading=outcome.leading if isinstance(outcome, Pole) else None,
        values=() if isinstance(outcome, FiniteLimit) else outcome.values,
        independence=None if proof is None else proof.value,
        terms=None if terms is None else one.terms(terms),
        configurations=charge_sum.configurations,
        singular=charge_sum.singular,
        indeterminate=charge_sum.indeterminate,
        worst_order=charge_sum.worst_order,
        clusters=len(charge_sum.clusters),
        singular_clusters=sum(1 for c in charge_sum.clusters.values() if c.singular_members),
    )


def detect(
    source: CaseSource,
    *,
    exchanges: int = 0,
    allow_tilt: bool = True,
    most_configurations: int = MOST_CONFIGURATIONS,
    watch: Watcher | None = None,
) -> DetectResult:
    """The singular and indeterminate configurations of every charge, their guilty factors and their clusters.

    ``exchanges=n`` adds to each cluster of at most n members the edges of its graph. Nothing is expanded or evaluated.

    >>> report = detect({"charge": 2, "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["0"]}]})[2]
    >>> report.singular, [cluster.members for cluster in report.clusters]
    (2, [((((2,),),), (((1, 1),),))])
    """
    job = Job.prepare(
        source, allow_tilt=allow_tilt, most_configurations=most_configurations, clusterwise=True
    )
    reports = []
    for report in job.scans(exchanges=exchanges):
        reports.append(report)
        if watch is not None:
            watch(report.charge)
    return detect_result(job, reports)


def detect_result(job: Job, reports: list[ChargeReport], *, partial: bool = False) -> DetectResult:
    """The result of the charges found so far."""
    return DetectResult(job.header, tuple(reports), partial)


def clusters(
    source: CaseSource, charge: int | Charge, *, exchanges: bool = False, largest: int = 24
) -> networkx.Graph:
    """All clusters of one charge as a networkx graph whose connected components are the clusters."""
    wanted = (charge,) if isinstance(charge, int) else tuple(charge)
    job = Job.prepare(load_case(source).with_charge(list(wanted)), clusterwise=True)
    found = find_clusters(job.weights, wanted, scan(job.weights, wanted))
    return cluster_graph(found, exchanges=exchanges, largest=largest)


def validate(
    source: CaseSource,
    *,
    probes: int | None = None,
    allow_tilt: bool = True,
    most_configurations: int = MOST_CONFIGURATIONS,
    watch: Watcher | None = None,
    workers: int | None = None,
    executor: Executor | None = None,
    keep: str | os.PathLike[str] | None = None,
    depth: str = "quick",
) -> ValidateResult:
    """Every check that applies to the case: finiteness, further paths, independent routes, identities.

    Further paths, ``probes`` of them or 3, are run here also where compactness proves the outcome. A check that does
    not apply is left out; one that costs more than ``depth`` ("quick" or "full") allows is undecided and says so.
    ``workers``, ``executor`` and ``keep`` are those of ``limit`` and serve the limits of the case itself.

    >>> case = {"charge": 3, "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["1/3", "-1/3"]}]}
    >>> result = validate(case)
    >>> [check.name for check in result.routes]
    ['pole recursion in the Coulomb parameter', 'Gram matrix of Virasoro descendants']
    >>> result.exit_status
    0
    """
    asked = depth_of(depth)
    case = load_case(source)
    if case.nested:
        refuse_other_ways(probes=probes is not None, workers=workers, executor=executor, keep=keep)
        found_limits = nested_result(case, allow_tilt=allow_tilt, most_configurations=most_configurations)
        return ValidateResult(found_limits.header, tuple(nested_checks(case, found_limits)), asked.name)
    job = Job.prepare(
        case, allow_tilt=allow_tilt, most_configurations=most_configurations, clusterwise=True
    )
    found = []
    further = DEFAULT_PROBES if probes is None else probes
    with job.crew(workers=workers, executor=executor, keep=keep) or nullcontext() as crew:
        for one in job.limits(probes=further, always_probe=True, crew=crew):
            found.append(one)
            if watch is not None:
                watch(one.charge)
    return ValidateResult(job.header, tuple(validate_checks(job, found, asked)), asked.name)


def validate_checks(job: Job, found: Sequence[Found], depth: Depth) -> Iterator[Check]:
    """The checks for the charges found so far, one by one; with symbols all but one are made at the generic point."""
    limits = samples(found)
    if not limits:
        return
    yield from first_checks(limits)
    yield from _function_checks(job, found)
    if len(limits) < len(job.case.charges):
        # Interrupted: what is there is shown, and no further work begun.
        return
    known: dict[tuple[str, object], list[Number]] = {}

    def evaluate(case: Case) -> list[Number]:
        key = case.hash, case.charge
        if key not in known:
            known[key] = [_number(one) for one in limit(case, probes=0)]
        return known[key]

    def clusterwise(case: Case) -> list[ChargeLimit]:
        return samples(list(Job.prepare(case, clusterwise=True).limits(probes=0)))

    yield from outside_checks(
        job.sample, job.weights, limits, evaluate=evaluate, clusterwise=clusterwise, depth=depth
    )


def _number(one: Coefficient) -> Number:
    if one.value is None or isinstance(one.value, RationalFunction):
        raise ValueError(f"the limit at charge {one.charge} is no number; checks ask for compact cases without symbols")
    return one.value
