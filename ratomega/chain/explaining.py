"""A case in words: what is singular, why, what cancels it, and what the limit means; with the numbers of the case.

Everything said here comes from the detector and from the parameters; nothing is expanded or summed.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from ratomega.case.case import Case
from ratomega.case.setting import resonances
from ratomega.chain.job import MOST_CONFIGURATIONS, CaseSource, Job
from ratomega.detector.accidents import dead_colours, frozen_number_warnings
from ratomega.detector.geometry import resonance_text
from ratomega.detector.poincare import polynomial_text
from ratomega.diagrams.tuples import Charge, Configuration, count_all
from ratomega.results.detections import ChargeReport, ClusterReport
from ratomega.results.header import Header

__all__ = ["Explanation", "Paragraph", "explain"]

MOST_NAMED = 6


@dataclass(frozen=True, slots=True)
class Paragraph:
    """A heading of a few words and what is said under it."""

    title: str
    text: str


@dataclass(frozen=True, slots=True)
class Explanation:
    """A case in words."""

    header: Header
    paragraphs: tuple[Paragraph, ...]
    partial: bool = False

    @property
    def exit_status(self) -> int:
        """Always 0: whatever there is to say is a result."""
        return 0


def explain(
    source: CaseSource, *, allow_tilt: bool = True, most_configurations: int = MOST_CONFIGURATIONS
) -> Explanation:
    """What happens in a case and what its limit means, in words.

    Raises ``InputError`` for bad input. Cost: one pass over the factors of all configurations, none evaluated.

    >>> case = {"charge": 2, "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["1/3", "-1/3"]}]}
    >>> [paragraph.title for paragraph in explain(case).paragraphs]
    ['The limit point', 'What is singular', 'What cancels it', 'What the limit means', 'What moves and what stays']
    """
    job = Job.prepare(source, allow_tilt=allow_tilt, most_configurations=most_configurations, clusterwise=True)
    reports = list(job.scans())
    paragraphs = [
        Paragraph("The limit point", _limit_point(job)),
        Paragraph("What is singular", _singular(job, reports)),
        *_cancelling(job, reports),
        Paragraph("What the limit means", _meaning(job, reports)),
        Paragraph("What moves and what stays", _moving(job.case)),
        *_accidents(job, reports),
    ]
    return Explanation(job.header, tuple(paragraphs))


def _limit_point(job: Job) -> str:
    alpha, beta = job.case.background.steps
    sizes = f"eps1 : eps2 = {alpha} : {beta}"
    said = f"The limit is taken at {sizes}, along {job.header.path.text()}; t -> 0. "
    if beta < 0:
        said += (
            "The ratio is negative: for one colour eps1*L = eps2*(A + 1) has no solution with arm A and leg L >= 0, so "
            "no weight of a generic case is singular."
        )
        return said
    first = alpha + beta
    return said + (
        f"The ratio is positive: a vector factor -eps1*L + eps2*(A + 1) of a box with arm A and leg L vanishes where "
        f"(L, A + 1) is a multiple of ({beta}, {alpha}), and its partner where (L + 1, A) is. Such a box needs {first} "
        f"boxes at least, so weights are singular from charge {first} on, to the order floor(k/{first}) for generic "
        "Coulomb parameters."
    )


def _singular(job: Job, reports: Sequence[ChargeReport]) -> str:
    total = count_all(job.sample.theory.ranks, job.sample.charge)
    singular = sum(report.singular for report in reports)
    if not singular:
        zeros = sum(report.indeterminate for report in reports)
        hidden = f" {_number(zeros, 'weight')} would still read 0/0 in a plain program." if zeros else ""
        return f"Nothing: none of the {total} weights up to this charge diverges.{hidden}"
    first = next(report for report in reports if report.singular)
    worst = max(reports, key=lambda report: report.worst_order)
    example = first.singular_configurations[0]
    factor = example.factors[0]
    colours = ",".join(str(c) for c in factor.colours)
    return (
        f"{singular} of {total} weights diverge, the first at {_charge(first.charge)}; the worst order is "
        f"t^-{worst.worst_order}, at {_charge(worst.charge)}. For example {_diagrams(job.case, example.diagrams)}: the "
        f"{factor.multiplet} factor of colours {colours} at box ({factor.box[0]},{factor.box[1]}) is {factor.form} = "
        f"{factor.on_path} in the denominator."
    )


def _cancelling(job: Job, reports: Sequence[ChargeReport]) -> Iterator[Paragraph]:
    clusters = [(report.charge, cluster) for report in reports for cluster in report.clusters]
    if not clusters:
        return
    charge, cluster = clusters[0]
    members = ", ".join(_diagrams(job.case, member) for member in cluster.members[:MOST_NAMED])
    more = f" and {cluster.size - MOST_NAMED} more" if cluster.size > MOST_NAMED else ""
    open_ones = sum(1 for _, one in clusters if not one.compact)
    if open_ones:
        rest = (
            f"{open_ones} of the {len(clusters)} singular clusters are not compact: inside these the poles need not "
            "cancel, and it is the total alone that may be finite."
        )
    else:
        rest = "All of them are compact, and the poles cancel inside each."
    yield Paragraph(
        "What cancels it",
        f"Configurations with the same contents at the limit point lie on one component of the fixed locus, a cluster; "
        f"there are {_number(len(clusters), 'singular cluster')}. The first, at {_charge(charge)}, has the members "
        f"{members}{more}: {_component(cluster)}. {rest}",
    )


def _component(cluster: ClusterReport) -> str:
    shape = f"dimension {cluster.dimension}, Euler number {cluster.euler_number}"
    if cluster.poincare is not None:
        shape += f", Poincaré polynomial {polynomial_text(cluster.poincare)}"
    return f"{'a compact' if cluster.compact else 'a non-compact'} component of {shape}"


def _meaning(job: Job, reports: Sequence[ChargeReport]) -> str:
    top = reports[-1].charge if len(job.case.theory.nodes) == 1 else job.case.bounds
    found = list(resonances(job.setting, top))
    if not found:
        return (
            "No difference of Coulomb parameters of one node is m*eps1 + n*eps2 with m, n >= 1 and m*n <= charge, so "
            "every component is compact: the limit exists and is the same on every path to this point."
        )
    least = min(found, key=lambda one: one[3] * one[4])
    first = least[3] * least[4]
    return (
        f"The Coulomb parameters are resonant: {resonance_text(job.setting, least)}, so from charge {first} of that "
        "node on components need not be compact. There the limit may exist because numerators vanish (as for minimal "
        "models), may be a pole, or may depend on the path; `ratomega limit` tries further paths and says which. A "
        "limit inside the limit is written with u."
    )


def _moving(case: Case) -> str:
    fixed: list[str] = []
    moving: list[str] = []
    for where, value in case.theory.parameters():
        text = f"{where} = {value}"
        if value.symbols:
            continue
        (fixed if value.eps1 == 0 and value.eps2 == 0 and value.t == 0 else moving).append(text)
    parts = []
    if fixed:
        parts.append(f"Typed numbers stay fixed along the path: {_some(fixed)}.")
    if moving:
        parts.append(f"Expressions move with it: {_some(moving)}.")
    if case.symbols:
        parts.append(f"Free parameters stay fixed: {', '.join(case.symbols)}.")
    return " ".join(parts)


def _accidents(job: Job, reports: Sequence[ChargeReport]) -> Iterator[Paragraph]:
    said = [*dead_colours(job.setting), *frozen_number_warnings(job.sample, job.setting)]
    vanishing = sum(report.vanishing for report in reports)
    if vanishing:
        said.append(f"{_number(vanishing, 'weight')} vanish in the limit, because numerators of the matter do")
    if job.setting.tilted:
        said.append(
            "the Coulomb parameters were tilted by multiples of t, because a difference stays on the lattice of eps1 "
            "and eps2 all along the path"
        )
    if said:
        yield Paragraph("What looks accidental", "; ".join(one.rstrip(".") for one in said) + ".")


def _some(texts: Sequence[str]) -> str:
    shown = ", ".join(texts[:MOST_NAMED])
    return f"{shown} and {len(texts) - MOST_NAMED} more" if len(texts) > MOST_NAMED else shown


def _charge(charge: Charge) -> str:
    return f"charge {','.join(str(k) for k in charge)}"


def _number(n: int, noun: str) -> str:
    return f"{n} {noun}{'' if n == 1 else 's'}"


def _diagrams(case: Case, configuration: Configuration) -> str:
    nodes = []
    for node, diagrams in zip(case.theory.nodes, configuration, strict=True):
        text = " ".join(f"({','.join(str(row) for row in d)})" if d else "()" for d in diagrams)
        nodes.append(f"{node.name} {text}" if len(case.theory.nodes) > 1 else text)
    return "; ".join(nodes)
