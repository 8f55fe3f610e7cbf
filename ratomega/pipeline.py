"""From a case to a result: the only place where the chain is spelt out.

    case -> own path (tilted if need be) -> weights -> detector / regulator -> validator -> result
"""

from __future__ import annotations

import os
from collections.abc import Callable, Iterator, Mapping
from concurrent.futures import Executor
from contextlib import nullcontext
from dataclasses import dataclass

import networkx

from ratomega.case.case import Case
from ratomega.case.reading import load_case
from ratomega.case.setting import MOST_PROBES, Setting, own_setting, probe_setting
from ratomega.detector.accidents import check_path, dead_colours, frozen_number_warnings
from ratomega.detector.clusters import Cluster, cluster_graph, find_clusters, tagged_boxes
from ratomega.detector.zeros import Zeros, guilty_factors, scan
from ratomega.diagrams.tuples import Charge, Configuration, count_all
from ratomega.errors import InputError
from ratomega.exact.path import SMALL_PARAMETERS
from ratomega.regulator.limits import ChargeLimit, charge_limit
from ratomega.regulator.outcome import FiniteLimit, PathDependent, Pole
from ratomega.results import (
    ChargeReport,
    ClusterReport,
    Coefficient,
    DetectResult,
    Exchange,
    FactorReport,
    Header,
    LimitResult,
    PathRecord,
    SingularReport,
    ValidateResult,
)
from ratomega.validator.comparison import check_adjoint_clusters, check_closed_forms
from ratomega.validator.finiteness import certificate, check_orders
from ratomega.version import VERSION
from ratomega.weights import Factor, Weights
from ratomega.workers.charges import charge_cost, charge_limits, cut
from ratomega.workers.crew import Crew
from ratomega.workers.hands import Hands, LentExecutor, ThisProcess
from ratomega.workers.pool import OwnPool
from ratomega.workers.store import Store

__all__ = ["DEFAULT_PROBES", "MOST_CONFIGURATIONS", "Job", "clusters", "detect", "limit", "validate"]

MOST_CONFIGURATIONS = 1_000_000
DEFAULT_PROBES = 3
MOST_TERMS = 60
MOST_WORKERS = 1024

CaseSource = str | os.PathLike[str] | Mapping[str, object] | Case
Watcher = Callable[[Charge], None]


@dataclass(frozen=True, slots=True)
class Job:
    """A case made ready: checked for size and path, put on its own path. Build it with ``Job.prepare``."""

    case: Case
    setting: Setting
    weights: Weights
    header: Header

    @classmethod
    def prepare(
        cls, source: CaseSource, *, allow_tilt: bool = True, most_configurations: int = MOST_CONFIGURATIONS
    ) -> Job:
        """Raises ``InputError`` when the case cannot be read, is too large, or has an unusable path."""
        case = load_case(source)
        count = count_all(case.theory.ranks, case.charge)
        if count > most_configurations:
            raise InputError.single(
                f"{count} configurations up to this charge, more than the limit of {most_configurations}; "
                "lower the charge or raise the limit (--most-configurations, most_configurations=)",
                "charge",
            )
        setting = own_setting(case, allow_tilt=allow_tilt)
        check_path(setting, case.bounds)
        warnings = [*dead_colours(setting), *frozen_number_warnings(case, setting)]
        if setting.tilted:
            names = ", ".join(name for name, _ in setting.tilts)
            warnings.insert(
                0,
                f"the Coulomb parameters of {names} were tilted, because a difference is an integer combination of "
                f"eps1 and eps2 all along the path: {setting.text()}",
            )
        header = Header(VERSION, case, path_record(setting), case.hash, tuple(warnings))
        return cls(case, setting, Weights(setting), header)

    def probes(self, number: int) -> tuple[Weights, ...]:
        """The weights on the first ``number`` further paths."""
        if not 0 <= number <= MOST_PROBES:
            message = f"the number of further paths is between 0 and {MOST_PROBES}, not {number}"
            raise InputError.single(message, "probes")
        return tuple(Weights(probe_setting(self.case, n)) for n in range(1, number + 1))

    def limits(
        self, *, probes: int, last: int = 0, always_probe: bool = False, crew: Crew | None = None
    ) -> Iterator[ChargeLimit]:
        """The limits charge by charge; computed here, or in chunks by a crew. They do not depend on which."""
        further = self.probes(probes)
        if crew is not None:
            chunks = cut(self.case, self.setting, last=last, probes=probes, always_probe=always_probe)
            yield from charge_limits(self.setting, [p.setting for p in further], chunks, crew.results(chunks))
            return
        for charge in self.case.charges:
            yield charge_limit(self.weights, charge, further, last=last, always_probe=always_probe)

    def cost(self, charge: Charge) -> float:
        """About how long one charge takes on one path, in seconds of some machine: for estimates of what is left."""
        return charge_cost(self.case.theory, charge)

    def scans(self, *, exchanges: int = 0) -> Iterator[ChargeReport]:
        """The detector's reports charge by charge; exchange edges in clusters of at most ``exchanges`` members."""
        for charge in self.case.charges:
            found = tuple(scan(self.weights, charge))
            yield _charge_report(self.weights, charge, found, exchanges)


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


def _is_whole(value: object) -> bool:
    return isinstance(value, int) and not isinstance(value, bool)


def path_record(setting: Setting) -> PathRecord:
    coulomb = tuple((node.name, tuple(str(a) for a in node.coulomb)) for node in setting.nodes)
    return PathRecord(SMALL_PARAMETERS, str(setting.eps1), str(setting.eps2), coulomb, setting.tilted)


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
) -> LimitResult:
    """The exact limit of every coefficient of Z up to the case's charge, with its certificate.

    ``source`` is a case, a mapping, a file or the name of a bundled case. ``terms=n`` adds the expansion on the own
    path up to t^n. ``probes`` further paths are tried where compactness does not prove path-independence. ``watch`` is
    called with every finished charge. Raises ``InputError`` for bad input; a surviving pole is a result, not an error.

    ``workers=n`` does the sum in n processes, which are started again when they die; ``executor`` does it in one of the
    caller's, which stays the caller's (``workers`` then says how many workers it has, if that is to be known). ``keep``
    names a file in which finished parts are kept, so that a run which was ended goes on from there. The result is the
    same with all of them. Raises ``WorkerError`` when workers or executor fail for good.

    Cost: one pass over all configurations, and one more for every further path where paths are probed.

    >>> result = limit({"charge": 2, "background": {"eps1": 1, "eps2": -1}, "node": [{"coulomb": ["0"]}]})
    >>> [str(c.value) for c in result]            # exp(q/(eps1 eps2)) = exp(-q)
    ['1', '-1', '1/2']
    """
    job = Job.prepare(source, allow_tilt=allow_tilt, most_configurations=most_configurations)
    last = checked_terms(terms)
    found = []
    with job.crew(workers=workers, executor=executor, keep=keep) or nullcontext() as crew:
        for one in job.limits(probes=probes, last=last, crew=crew):
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


def limit_result(job: Job, found: list[ChargeLimit], *, terms: int | None = None, partial: bool = False) -> LimitResult:
    """The result of the charges found so far."""
    coefficients = tuple(_coefficient(one, terms) for one in found)
    return LimitResult(job.header, coefficients, certificate(found), partial)


def _coefficient(one: ChargeLimit, terms: int | None) -> Coefficient:
    outcome, charge_sum = one.outcome, one.sum
    independence = None if isinstance(outcome, PathDependent) else outcome.independence
    return Coefficient(
        charge=one.charge,
        status=outcome.status,
        value=outcome.value if isinstance(outcome, FiniteLimit) else None,
        order=outcome.order if isinstance(outcome, Pole) else 0,
        leading=outcome.leading if isinstance(outcome, Pole) else None,
        values=() if isinstance(outcome, FiniteLimit) else outcome.values,
        independence=None if independence is None else independence.value,
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
    job = Job.prepare(source, allow_tilt=allow_tilt, most_configurations=most_configurations)
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
    job = Job.prepare(load_case(source).with_charge(list(wanted)))
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
    job = Job.prepare(source, allow_tilt=allow_tilt, most_configurations=most_configurations)
    found = []
    with job.crew(workers=workers, executor=executor, keep=keep) or nullcontext() as crew:
        for one in job.limits(probes=probes, always_probe=True, crew=crew):
            found.append(one)
            if watch is not None:
                watch(one.charge)
    return validate_result(job, found)


def validate_result(job: Job, found: list[ChargeLimit], *, partial: bool = False) -> ValidateResult:
    """The checks for the charges found so far."""
    checks = [*certificate(found), check_orders(found), *check_closed_forms(job.case, job.setting, found)]
    adjoint = check_adjoint_clusters(job.setting, found)
    return ValidateResult(job.header, (*checks, adjoint) if adjoint is not None else tuple(checks), partial)


# ---- reports of the detector ----


def _charge_report(weights: Weights, charge: Charge, found: tuple[Zeros, ...], exchanges: int) -> ChargeReport:
    grouped = find_clusters(weights, charge, found)
    guilty = [cluster for cluster in grouped if cluster.singular]
    index = {member.configuration: n for n, cluster in enumerate(guilty) for member in cluster.members}
    singular = tuple(_singular_report(weights, zeros, index) for zeros in found if zeros.singular)
    indeterminate = tuple(_singular_report(weights, zeros, index) for zeros in found if zeros.indeterminate)
    vanishing = tuple(zeros.configuration for zeros in found if zeros.vanishing)
    return ChargeReport(
        charge=charge,
        configurations=len(found),
        singular=len(singular),
        indeterminate=len(indeterminate),
        vanishing=len(vanishing),
        worst_order=max((zeros.order for zeros in found if zeros.singular), default=0),
        all_clusters=len(grouped),
        clusters=tuple(_cluster_report(cluster, exchanges) for cluster in guilty),
        singular_configurations=singular,
        indeterminate_configurations=indeterminate,
        vanishing_configurations=vanishing,
    )


def _singular_report(weights: Weights, zeros: Zeros, index: dict[Configuration, int]) -> SingularReport:
    down, up = guilty_factors(weights, zeros.configuration)
    return SingularReport(
        zeros.configuration,
        zeros.order,
        tuple(_factor_report(f) for f in down),
        tuple(_factor_report(f) for f in up),
        index.get(zeros.configuration),
        zeros.dead,
    )


def _factor_report(f: Factor) -> FactorReport:
    return FactorReport(f.multiplet, f.place, f.colours, f.box, f.arm, f.leg, f.form, str(f.value))


def _cluster_report(cluster: Cluster, exchanges: int) -> ClusterReport:
    members = tuple(member.configuration for member in cluster.members)
    edges: tuple[Exchange, ...] | None = None
    if 0 < len(members) <= exchanges:
        graph = cluster_graph([cluster], exchanges=True, largest=exchanges)
        place = {member: n for n, member in enumerate(members)}
        edges = tuple(_exchange(place[one], place[two], one, two) for one, two in graph.edges)
    return ClusterReport(
        cluster.order, members, cluster.dimension, cluster.compactness.compact, cluster.compactness.why, edges
    )


def _exchange(first: int, second: int, one: Configuration, two: Configuration) -> Exchange:
    if first > second:
        first, second, one, two = second, first, two, one
    before, after = tagged_boxes(one), tagged_boxes(two)
    leaves = tuple((v + 1, c + 1, i, j) for v, c, i, j in sorted(before - after))
    enters = tuple((v + 1, c + 1, i, j) for v, c, i, j in sorted(after - before))
    return Exchange((first, second), leaves, enters)
