"""From a case to a result: the only place where the chain is spelt out.

    case -> own path (tilted if need be) -> weights -> detector / regulator -> validator -> result

A case with symbols is put on its path at a generic point; beside what is found there, its coefficients are functions.
"""

from __future__ import annotations

import os
from collections.abc import Callable, Iterator, Mapping, Sequence
from concurrent.futures import Executor
from contextlib import nullcontext
from dataclasses import dataclass, replace

import networkx

from ratomega.case.affine import Affine
from ratomega.case.case import Case
from ratomega.case.reading import load_case
from ratomega.case.setting import MOST_PROBES, Setting, own_setting, probe_setting
from ratomega.detector.accidents import check_path, dead_colours, frozen_number_warnings
from ratomega.detector.clusters import cluster_graph, find_clusters
from ratomega.detector.geometry import compact_by_parameters
from ratomega.detector.zeros import scan
from ratomega.diagrams.tuples import Charge, count_all
from ratomega.errors import InputError
from ratomega.exact.batches import here
from ratomega.exact.path import SMALL_PARAMETERS
from ratomega.exact.rational import ZERO, Rational
from ratomega.regulator.limits import ChargeLimit, charge_limit
from ratomega.regulator.outcome import FiniteLimit, Independence, PathDependent, Pole
from ratomega.regulator.routes import ShortCut, Way, choose, point_values, short_cut
from ratomega.reports import charge_report
from ratomega.results import (
    ChargeReport,
    Coefficient,
    DetectResult,
    Header,
    LimitResult,
    PathRecord,
    RouteRecord,
    ValidateResult,
)
from ratomega.symbolic.certificate import check_functions
from ratomega.symbolic.functions import Functions, SymbolicLimit
from ratomega.validator.comparison import check_adjoint_clusters, check_closed_forms, check_recursion
from ratomega.validator.finiteness import certificate, check_orders, short_cut_certificate
from ratomega.validator.verdict import Check
from ratomega.version import VERSION
from ratomega.weights import Weights
from ratomega.workers.charges import charge_cost, charge_limits, cut
from ratomega.workers.crew import Crew
from ratomega.workers.hands import Hands, LentExecutor, ThisProcess
from ratomega.workers.pool import OwnPool
from ratomega.workers.primes import prime_supplier
from ratomega.workers.store import Store

__all__ = ["DEFAULT_PROBES", "MOST_CONFIGURATIONS", "Job", "clusters", "detect", "limit", "validate"]

MOST_CONFIGURATIONS = 1_000_000
DEFAULT_PROBES = 3
MOST_TERMS = 60
MOST_WORKERS = 1024

CaseSource = str | os.PathLike[str] | Mapping[str, object] | Case
Watcher = Callable[[Charge], None]


@dataclass(frozen=True, slots=True)
class ShortLimit:
    """The limit at one charge by a short cut: no weight was looked at."""

    charge: Charge
    value: Rational
    evidence: ShortCut


Found = ChargeLimit | SymbolicLimit | ShortLimit


@dataclass(frozen=True, slots=True)
class Job:
    """A case made ready: checked for size and path, put on its own path. Build it with ``Job.prepare``.

    ``sample`` is the case at numbers: the case itself, or at a generic point where it has symbols (then ``functions``).
    """

    case: Case
    sample: Case
    setting: Setting
    weights: Weights
    header: Header
    functions: Functions | None
    way: Way

    @classmethod
    def prepare(
        cls,
        source: CaseSource,
        *,
        allow_tilt: bool = True,
        most_configurations: int = MOST_CONFIGURATIONS,
        route: str = "auto",
        clusterwise: bool = False,
    ) -> Job:
        """Raises ``InputError`` when the case cannot be read, is too large, or has an unusable path.

        ``route`` and ``clusterwise`` as in ``regulator.routes.choose``.
        """
        case = load_case(source)
        functions = None
        if case.symbols:
            _check_count(case, most_configurations)
            functions = Functions(case, most_configurations=most_configurations, evaluator=point_values)
        sample = case.at(**functions.generic_point) if functions is not None else case
        setting = own_setting(sample, allow_tilt=allow_tilt)
        way = choose(case, setting, route, clusterwise=clusterwise or functions is not None)
        if way.short_cut != "poles":
            _check_count(case, most_configurations)
        check_path(setting, case.bounds)
        warnings = [*dead_colours(setting), *frozen_number_warnings(sample, setting)]
        if setting.tilted:
            names = ", ".join(name for name, _ in setting.tilts)
            warnings.insert(
                0,
                f"the Coulomb parameters of {names} were tilted, because a difference is an integer combination of "
                f"eps1 and eps2 all along the path: {setting.text()}",
            )
        path = path_record(setting)
        if functions is not None:
            path = symbolic_path(case, setting)
            point = ", ".join(f"{name} = {value}" for name, value in functions.generic_point.items())
            warnings.append(f"weights, singular terms, orders and clusters are those at the generic point {point}")
        header = Header(VERSION, case, path, case.hash, tuple(warnings))
        return cls(case, sample, setting, Weights(setting), header, functions, way)

    def probes(self, number: int) -> tuple[Weights, ...]:
        """The weights on the first ``number`` further paths."""
        _check_probes(number)
        return tuple(Weights(probe_setting(self.sample, n)) for n in range(1, number + 1))

    def limits(
        self,
        *,
        probes: int,
        terms: int | None = None,
        always_probe: bool = False,
        crew: Crew | None = None,
        certify: bool = False,
    ) -> Iterator[Found]:
        """The limits charge by charge, to t^terms; computed here, or in chunks by a crew: they do not depend on which.

        A short cut gives all charges at once; ``certify`` makes it prove what it found.
        Raises ``InputError`` for terms of a case with symbols, or a crew for it.
        """
        last = checked_terms(terms)
        if self.functions is not None and terms is not None:
            message = "the expansion in t belongs to a case without symbols; give numbers for them"
            raise InputError.single(message, "terms")
        if self.functions is not None and crew is not None:
            message = "a case with symbols is not cut into parts for workers or a file of finished parts"
            raise InputError.single(message, "symbols")
        if self.way.short_cut and (terms is not None or always_probe):
            raise ValueError("this job was prepared for a short cut; prepare it with clusterwise=True")
        _check_probes(probes)
        needed = always_probe or not compact_by_parameters(self.setting, self.case.bounds)
        further = self.probes(probes if needed else 0)
        if self.way.short_cut:
            supplier = here if crew is None else prime_supplier(self.case, crew)
            done = short_cut(self.way, self.case, self.setting, certify=certify, supplier=supplier)
            for charge, value in zip(self.case.charges, done.values, strict=True):
                yield ShortLimit(charge, value, done)
            return
        if crew is not None:
            chunks = cut(self.case, self.setting, last=last, probes=probes, always_probe=always_probe)
            yield from charge_limits(self.setting, [p.setting for p in further], chunks, crew.results(chunks))
            return
        for charge in self.case.charges:
            one = charge_limit(self.weights, charge, further, last=last, always_probe=always_probe)
            yield one if self.functions is None else SymbolicLimit(one, self.functions.at(charge))

    def cost(self, charge: Charge) -> float:
        """About how long one charge takes on one path, in seconds of some machine: for estimates of what is left."""
        return charge_cost(self.case.theory, charge)

    def scans(self, *, exchanges: int = 0) -> Iterator[ChargeReport]:
        """The detector's reports charge by charge; exchange edges in clusters of at most ``exchanges`` members."""
        for charge in self.case.charges:
            yield charge_report(self.weights, charge, exchanges=exchanges)

    def crew(
        self,
        *,
        workers: int | None = None,
        executor: Executor | LentExecutor | None = None,
        keep: str | os.PathLike[str] | None = None,
    ) -> Crew | None:
        """Who does the work, by the options of ``limit``; None when it is done here and nothing is kept."""
        if workers is not None and not (_is_whole(workers) and 1 <= workers <= MOST_WORKERS):
            raise InputError.single(f"the number of workers is between 1 and {MOST_WORKERS}, not {workers}", "workers")
        if executor is not None and not isinstance(executor, (Executor, LentExecutor)):
            message = f"an executor is a concurrent.futures.Executor, not {type(executor).__name__}"
            raise InputError.single(message, "executor")
        if workers is None and executor is None and keep is None:
            return None
        store = None if keep is None else Store.open(keep, self.case)
        hands: Hands
        if isinstance(executor, LentExecutor):
            hands = executor
        elif executor is not None:
            hands = LentExecutor(executor, None if workers is None else lambda: workers)
        else:
            hands = ThisProcess() if workers is None else OwnPool(workers)
        return Crew(hands, store)


def _check_probes(number: int) -> None:
    if not 0 <= number <= MOST_PROBES:
        message = f"the number of further paths is between 0 and {MOST_PROBES}, not {number}"
        raise InputError.single(message, "probes")


def _check_count(case: Case, most: int) -> None:
    count = count_all(case.theory.ranks, case.charge)
    if count > most:
        raise InputError.single(
            f"{count} configurations up to this charge, more than the limit of {most}; "
            "lower the charge or raise the limit (--most-configurations, most_configurations=)",
            "charge",
        )


def _is_whole(value: object) -> bool:
    return isinstance(value, int) and not isinstance(value, bool)


def path_record(setting: Setting) -> PathRecord:
    coulomb = tuple((node.name, tuple(str(a) for a in node.coulomb)) for node in setting.nodes)
    return PathRecord(SMALL_PARAMETERS, str(setting.eps1), str(setting.eps2), coulomb, setting.tilted)


def symbolic_path(case: Case, setting: Setting) -> PathRecord:
    """The path of a case with symbols; ``setting`` is the same path at the generic point."""
    tilts = dict(setting.tilts)
    coulomb = []
    for node in case.theory.nodes:
        texts = []
        for a, tilt in zip(node.coulomb, tilts.get(node.name, (ZERO,) * node.rank), strict=True):
            on_path = replace(a, symbols=()).on(setting.eps1, setting.eps2)
            texts.append(str(Affine(on_path.constant, t=on_path.slope + tilt, symbols=a.symbols)))
        coulomb.append((node.name, tuple(texts)))
    return PathRecord(SMALL_PARAMETERS, str(setting.eps1), str(setting.eps2), tuple(coulomb), setting.tilted)


def limit(
    source: CaseSource,
    *,
    terms: int | None = None,
    probes: int = DEFAULT_PROBES,
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
    path up to t^n. ``probes`` further paths are tried where compactness does not prove path-independence. ``watch`` is
    called with every finished charge. Raises ``InputError`` for bad input; a surviving pole is a result, not an error.

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

    With symbols the values are functions, found from limits at many points.

    >>> case = {"charge": 1, "symbols": ["a"], "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["a", "-a"]}]}
    >>> str(limit(case)[1].value)
    '-1/(2*(a + 1)*(a - 1))'
    """
    job = Job.prepare(
        source,
        allow_tilt=allow_tilt,
        most_configurations=most_configurations,
        route=route,
        clusterwise=terms is not None,
    )
    found = []
    with job.crew(workers=workers, executor=executor, keep=keep) or nullcontext() as crew:
        for one in job.limits(probes=probes, terms=terms, crew=crew, certify=certify):
            found.append(one)
            if watch is not None:
                watch(one.charge)
    return limit_result(job, found, terms=terms)


def checked_terms(terms: int | None) -> int:
    if terms is None:
        return 0
    if not 0 <= terms <= MOST_TERMS:
        raise InputError.single(f"the last power of t is between 0 and {MOST_TERMS}, not {terms}", "terms")
    return terms


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
    probes: int = DEFAULT_PROBES,
    allow_tilt: bool = True,
    most_configurations: int = MOST_CONFIGURATIONS,
    watch: Watcher | None = None,
    workers: int | None = None,
    executor: Executor | None = None,
    keep: str | os.PathLike[str] | None = None,
) -> ValidateResult:
    """Every check that applies to the case: finiteness, further paths, equal orders, closed forms.

    Further paths are run here also where compactness proves the outcome. A check that does not apply is left out.
    ``workers``, ``executor`` and ``keep`` are those of ``limit``.
    """
    job = Job.prepare(
        source, allow_tilt=allow_tilt, most_configurations=most_configurations, clusterwise=True
    )
    found = []
    with job.crew(workers=workers, executor=executor, keep=keep) or nullcontext() as crew:
        for one in job.limits(probes=probes, always_probe=True, crew=crew):
            found.append(one)
            if watch is not None:
                watch(one.charge)
    return validate_result(job, found)


def validate_result(job: Job, found: Sequence[Found], *, partial: bool = False) -> ValidateResult:
    """The checks for the charges found so far; with symbols all but the last are made at the generic point."""
    limits = samples(found)
    if not limits:
        return ValidateResult(job.header, (), partial)
    checks = [*certificate(limits), check_orders(limits), *check_closed_forms(job.sample, job.setting, limits)]
    checks += [*check_recursion(job.sample, limits), *_function_checks(job, found)]
    adjoint = check_adjoint_clusters(job.setting, limits)
    return ValidateResult(job.header, (*checks, adjoint) if adjoint is not None else tuple(checks), partial)
