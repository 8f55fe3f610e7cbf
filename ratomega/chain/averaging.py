"""From a case to averages: the chain of ``pipeline``, with observables on the configurations.

case -> own path -> weights -> sums of weight times observable -> quotient by Z -> judgement -> result
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from ratomega.averages.limits import KINDS, AverageLimit, Wanted, average_limits, behaviour
from ratomega.case.wording import quoted
from ratomega.chain.job import MOST_CONFIGURATIONS, CaseSource, Job
from ratomega.chain.pipeline import DEFAULT_PROBES, Watcher
from ratomega.detector.geometry import compact_by_parameters
from ratomega.diagrams.tuples import Charge
from ratomega.errors import InputError
from ratomega.results.averages import Average, AverageResult

__all__ = ["DEFAULT_POWERS", "MOST_POWERS", "ChargeAverages", "average", "average_result", "averages_of", "wanted_of"]

DEFAULT_POWERS = 4
MOST_POWERS = 100


@dataclass(frozen=True, slots=True)
class ChargeAverages:
    """Every wanted average at one charge."""

    charge: Charge
    limits: tuple[AverageLimit, ...]


def average(
    source: CaseSource,
    *,
    of: str = "Y(x)",
    node: str | None = None,
    powers: int = DEFAULT_POWERS,
    probes: int = DEFAULT_PROBES,
    allow_tilt: bool = True,
    most_configurations: int = MOST_CONFIGURATIONS,
    watch: Watcher | None = None,
) -> AverageResult:
    """Exact limits of averages over configurations, as power series in the counting parameters.

    ``of`` is "Y(x)" or "1/Y(x)" (rational functions of x), "trace-powers" (the chiral traces Tr phi^n for n = 1 ...
    ``powers``) or "size" (the number of boxes). The average is (sum of weight times observable)/Z. ``node`` names one
    node of a quiver; without it every node is asked. The other options are those of ``limit``.

    Raises ``InputError`` for bad input, among it a case with symbols. A pole or a path-dependent limit is a result.
    Cost: for numbers one pass over the configurations; for functions of x about as many values a configuration as
    there are boxes that can be removed at all, times the order of the poles there.

    >>> case = {"charge": 2, "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["0"]}]}
    >>> [str(c.value) for c in average(case)["Y(x)"]]            # without matter: x + q/(x - a - eps1 - eps2) + ...
    ['x', '1/(x - 2)', '-1/((x - 2)*(x - 3)**2)']
    >>> [str(c.value) for c in average(case, of="size")["size"]]        # Z = exp(q/(eps1 eps2))
    ['0', '1', '0']
    """
    job = Job.prepare(source, allow_tilt=allow_tilt, most_configurations=most_configurations, clusterwise=True)
    wanted = wanted_of(job, of=of, node=node, powers=powers)
    found = []
    for one in averages_of(job, wanted, probes=probes):
        found.append(one)
        if watch is not None:
            watch(one.charge)
    return average_result(job, wanted, found)


def wanted_of(job: Job, *, of: str, node: str | None, powers: int) -> Wanted:
    """The observable of the options. Raises ``InputError``."""
    if of not in KINDS:
        raise InputError.single(f"there is no average of {quoted(of)}; choose one of {', '.join(KINDS)}", "of")
    if job.case.symbols:
        message = f"averages are taken at numbers; give numbers for {', '.join(job.case.symbols)}"
        raise InputError.single(message, "symbols")
    if not isinstance(powers, int) or isinstance(powers, bool) or not 1 <= powers <= MOST_POWERS:
        raise InputError.single(f"the highest power is between 1 and {MOST_POWERS}, not {powers}", "powers")
    names = [one.name for one in job.setting.nodes]
    if node is not None and node not in names:
        raise InputError.single(f"there is no node {quoted(node)}; the nodes are {', '.join(names)}", "node")
    nodes = tuple(range(len(names))) if node is None else (names.index(node),)
    return Wanted(of, nodes, powers)


def averages_of(job: Job, wanted: Wanted, *, probes: int) -> Iterator[ChargeAverages]:
    """The averages charge by charge. Further paths are prepared only where compactness does not decide everything."""
    charges = job.case.charges
    paths = job.probes(probes)
    if compact_by_parameters(job.setting, job.case.bounds):
        paths = ()
    further = [behaviour(weights, wanted) for weights in paths]
    own = behaviour(job.weights, wanted)
    for charge in charges:
        yield ChargeAverages(charge, tuple(average_limits(job.setting, charge, own, further)))


def average_result(
    job: Job, wanted: Wanted, found: Sequence[ChargeAverages], *, partial: bool = False
) -> AverageResult:
    """The result of the charges found so far."""
    names = wanted.names(job.setting)
    averages = tuple(Average(name, tuple(one.limits[n] for one in found)) for n, name in enumerate(names))
    return AverageResult(job.header, wanted.kind, averages, partial)
