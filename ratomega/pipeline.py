"""From a case to a result: the only place where the chain is spelt out.

    case -> own path (tilted if need be) -> weights -> detector / regulator -> validator -> result

A case with symbols is put on its path at a generic point; beside what is found there, its coefficients are functions.
"""

from __future__ import annotations

import os
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace

import networkx

from ratomega.case.affine import Affine
from ratomega.case.case import Case
from ratomega.case.reading import load_case
from ratomega.case.setting import MOST_PROBES, Setting, own_setting, probe_setting
from ratomega.detector.accidents import check_path, dead_colours, frozen_number_warnings
from ratomega.detector.clusters import Cluster, cluster_graph, find_clusters, tagged_boxes
from ratomega.detector.zeros import Zeros, guilty_factors, scan
from ratomega.diagrams.tuples import Charge, Configuration, count_all
from ratomega.errors import InputError
from ratomega.exact.path import SMALL_PARAMETERS
from ratomega.exact.rational import ZERO
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
from ratomega.symbolic.certificate import check_functions
from ratomega.symbolic.functions import Functions, SymbolicLimit
from ratomega.validator.comparison import check_adjoint_clusters, check_closed_forms
from ratomega.validator.finiteness import certificate, check_orders
from ratomega.validator.verdict import Check
from ratomega.version import VERSION
from ratomega.weights import Factor, Weights

__all__ = ["DEFAULT_PROBES", "MOST_CONFIGURATIONS", "Job", "clusters", "detect", "limit", "validate"]

MOST_CONFIGURATIONS = 1_000_000
DEFAULT_PROBES = 3
MOST_TERMS = 60

CaseSource = str | os.PathLike[str] | Mapping[str, object] | Case
Watcher = Callable[[Charge], None]
Found = ChargeLimit | SymbolicLimit


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
    functions: Functions | None = None

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
        functions = Functions(case, most_configurations=most_configurations) if case.symbols else None
        sample = case.at(**functions.generic_point) if functions is not None else case
        setting = own_setting(sample, allow_tilt=allow_tilt)
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
        return cls(case, sample, setting, Weights(setting), header, functions)

    def probes(self, number: int) -> tuple[Weights, ...]:
        """The weights on the first ``number`` further paths."""
        if not 0 <= number <= MOST_PROBES:
            message = f"the number of further paths is between 0 and {MOST_PROBES}, not {number}"
            raise InputError.single(message, "probes")
        return tuple(Weights(probe_setting(self.sample, n)) for n in range(1, number + 1))

    def limits(self, *, probes: int, terms: int | None = None, always_probe: bool = False) -> Iterator[Found]:
        """The limits charge by charge, to t^terms. Raises ``InputError`` for terms of a case with symbols."""
        last = checked_terms(terms)
        if self.functions is not None and terms is not None:
            message = "the expansion in t belongs to a case without symbols; give numbers for them"
            raise InputError.single(message, "terms")
        further = self.probes(probes)
        for charge in self.case.charges:
            one = charge_limit(self.weights, charge, further, last=last, always_probe=always_probe)
            yield one if self.functions is None else SymbolicLimit(one, self.functions.at(charge))

    def scans(self, *, exchanges: int = 0) -> Iterator[ChargeReport]:
        """The detector's reports charge by charge; exchange edges in clusters of at most ``exchanges`` members."""
        for charge in self.case.charges:
            found = tuple(scan(self.weights, charge))
            yield _charge_report(self.weights, charge, found, exchanges)


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
) -> LimitResult:
    """The exact limit of every coefficient of Z up to the case's charge, with its certificate.

    ``source`` is a case, a mapping, a file or the name of a bundled case. ``terms=n`` adds the expansion on the own
    path up to t^n. ``probes`` further paths are tried where compactness does not prove path-independence. ``watch`` is
    called with every finished charge. Raises ``InputError`` for bad input; a surviving pole is a result, not an error.

    Cost: one pass over all configurations, and one more for every further path where paths are probed.

    >>> result = limit({"charge": 2, "background": {"eps1": 1, "eps2": -1}, "node": [{"coulomb": ["0"]}]})
    >>> [str(c.value) for c in result]            # exp(q/(eps1 eps2)) = exp(-q)
    ['1', '-1', '1/2']

    With symbols the values are functions, found from limits at many points.

    >>> case = {"charge": 1, "symbols": ["a"], "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["a", "-a"]}]}
    >>> str(limit(case)[1].value)
    '-1/(2*(a + 1)*(a - 1))'
    """
    job = Job.prepare(source, allow_tilt=allow_tilt, most_configurations=most_configurations)
    found = []
    for one in job.limits(probes=probes, terms=terms):
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
    coefficients = tuple(_coefficient(one, terms) for one in found)
    return LimitResult(job.header, coefficients, (*certificate(samples(found)), *_function_checks(job, found)), partial)


def samples(found: Sequence[Found]) -> list[ChargeLimit]:
    """The limits at numbers: the limits themselves, or those at the generic point."""
    return [one.sample if isinstance(one, SymbolicLimit) else one for one in found]


def _function_checks(job: Job, found: Sequence[Found]) -> tuple[Check, ...]:
    functions = [one.found for one in found if isinstance(one, SymbolicLimit)]
    return (check_functions(job.case.symbols, functions),) if functions else ()


def _coefficient(one: Found, terms: int | None) -> Coefficient:
    if isinstance(one, SymbolicLimit):
        return replace(_coefficient(one.sample, None), value=one.found.function)
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
) -> ValidateResult:
    """Every check that applies to the case: finiteness, further paths, equal orders, closed forms.

    Further paths are run here also where compactness proves the outcome. A check that does not apply is left out.
    """
    job = Job.prepare(source, allow_tilt=allow_tilt, most_configurations=most_configurations)
    found = []
    for one in job.limits(probes=probes, always_probe=True):
        found.append(one)
        if watch is not None:
            watch(one.charge)
    return validate_result(job, found)


def validate_result(job: Job, found: Sequence[Found], *, partial: bool = False) -> ValidateResult:
    """The checks for the charges found so far; with symbols all but the last are made at the generic point."""
    limits = samples(found)
    checks = [*certificate(limits), check_orders(limits), *check_closed_forms(job.sample, job.setting, limits)]
    checks += _function_checks(job, found)
    adjoint = check_adjoint_clusters(job.setting, limits)
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
