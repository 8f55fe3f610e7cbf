"""Results: frozen values that say everything about one run and travel as JSON without loss.

Every result carries ``version``, the ``case`` as read, the ``path``, the canonical ``hash`` and the ``warnings``.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

from ratomega.case.case import Case
from ratomega.detector.clusters import add_exchanges
from ratomega.diagrams.tuples import Charge, Configuration
from ratomega.exact.quadratic import Number
from ratomega.exact.rational_function import RationalFunction
from ratomega.regulator.outcome import PathValue
from ratomega.validator.finiteness import CANCELLATION, PATHS
from ratomega.validator.verdict import Check, Kind, Verdict

if TYPE_CHECKING:
    import networkx

__all__ = [
    "ChargeReport",
    "ClusterReport",
    "Coefficient",
    "DetectResult",
    "FactorReport",
    "LimitResult",
    "PathRecord",
    "RouteRecord",
    "SingularReport",
    "ValidateResult",
]


@dataclass(frozen=True, slots=True)
class PathRecord:
    """The path: eps1, eps2 and all Coulomb parameters as linear forms in t. ``tilted``: the engine moved the latter."""

    parameters: tuple[str, ...]
    eps1: str
    eps2: str
    coulomb: tuple[tuple[str, tuple[str, ...]], ...]
    tilted: bool

    def text(self) -> str:
        parts = [f"eps1 = {self.eps1}", f"eps2 = {self.eps2}"]
        parts += [f"{name}: a = ({', '.join(values)})" for name, values in self.coulomb]
        return "; ".join(parts)


@dataclass(frozen=True, slots=True)
class Header:
    """What every result carries."""

    version: str
    case: Case
    path: PathRecord
    hash: str
    warnings: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Coefficient:
    """Z at one charge.

    ``status`` is "finite" (then ``value``), "pole" (then ``order`` and ``leading``) or "path-dependent" (then
    ``values``, the case's own path first). ``independence`` is "theorem", "agreement" (of probed paths), "undecided"
    (none was probed), or None where paths differ. ``terms`` are (power of t, coefficient) on the own path.

    The counts are None where no weight was looked at, on the short cuts of ``routes``.
    In a case with symbols ``value`` is a ``RationalFunction`` of them, the limit is finite by theorem away from its
    poles, and the counts belong to a generic point.
    """

    charge: Charge
    status: str
    value: Number | RationalFunction | None
    order: int
    leading: Number | None
    values: tuple[PathValue, ...]
    independence: str | None
    terms: tuple[tuple[int, Number], ...] | None
    configurations: int | None
    singular: int | None
    indeterminate: int | None
    worst_order: int | None
    clusters: int | None
    singular_clusters: int | None


@dataclass(frozen=True, slots=True)
class RouteRecord:
    """How the coefficients were found.

    ``route`` is "direct" or "poles". ``method`` is "exact", "residues" (put together from residues modulo ``primes``
    primes; every coefficient is confirmed by ``spare_bits`` at least), or "proved" (residues beyond a proved bound).
    """

    route: str
    method: str
    why: str
    spare_bits: int | None
    primes: int


@dataclass(frozen=True, slots=True)
class LimitResult:
    """The exact coefficients and their certificate. ``partial``: the run was interrupted, finished charges are here."""

    header: Header
    route: RouteRecord
    coefficients: tuple[Coefficient, ...]
    checks: tuple[Check, ...]
    partial: bool = False

    def __getitem__(self, charge: int | Charge) -> Coefficient:
        """The coefficient of one charge; ``KeyError`` when it was not computed."""
        wanted = (charge,) if isinstance(charge, int) else tuple(charge)
        for coefficient in self.coefficients:
            if coefficient.charge == wanted:
                return coefficient
        raise KeyError(charge)

    def __iter__(self) -> Iterator[Coefficient]:
        return iter(self.coefficients)

    @property
    def exit_status(self) -> int:
        """0 all finite; 1 a pole or a path-dependent limit; 3 finiteness or path-independence undecided."""
        if any(c.status != "finite" for c in self.coefficients):
            return 1
        return _exit_status(self.checks)


def _exit_status(checks: tuple[Check, ...]) -> int:
    if any(check.verdict is Verdict.REFUTED for check in checks):
        return 1
    open_checks = (c for c in checks if c.name in (CANCELLATION, PATHS) and c.verdict is Verdict.UNDECIDED)
    return 3 if any(True for _ in open_checks) else 0


@dataclass(frozen=True, slots=True)
class FactorReport:
    """One vanishing factor. ``form`` is what vanishes at the limit point, ``on_path`` its value c + d t on the path.

    ``within`` is the (node, colour), from 1, of the diagram in which the box lies.
    """

    multiplet: str
    place: str
    colours: tuple[int, ...]
    box: tuple[int, int]
    arm: int | None
    leg: int | None
    form: str
    on_path: str
    within: tuple[int, int]


@dataclass(frozen=True, slots=True)
class SingularReport:
    """A configuration with a vanishing denominator.

    ``factors`` are the vanishing denominators, ``compensating`` the vanishing numerators; the order is the difference.
    ``cluster`` is the index in the list of clusters of the charge, None where no member of the cluster is singular.
    """

    diagrams: Configuration
    order: int
    factors: tuple[FactorReport, ...]
    compensating: tuple[FactorReport, ...]
    cluster: int | None
    dead: bool


@dataclass(frozen=True, slots=True)
class Exchange:
    """Two members (by index) between which no third lies, and the boxes exchanged.

    A box is (node, colour, row, column), all from 1.
    """

    members: tuple[int, int]
    leaves: tuple[tuple[int, int, int, int], ...]
    enters: tuple[tuple[int, int, int, int], ...]


@dataclass(frozen=True, slots=True)
class ClusterReport:
    """One cluster with at least one singular member. ``exchanges`` is None unless asked for.

    ``poincare`` holds the coefficients of 1, q, q^2, ... of the Poincaré polynomial of the component in q = t^2; None
    where the component is not compact, or where ``poincare_why`` says that directions disagree (a fault).
    """

    order: int
    members: tuple[Configuration, ...]
    dimension: int
    compact: bool
    why: str
    exchanges: tuple[Exchange, ...] | None
    poincare: tuple[int, ...] | None = None
    poincare_why: str = ""

    @property
    def size(self) -> int:
        return len(self.members)

    @property
    def euler_number(self) -> int:
        """The Euler number of the component: the number of its members."""
        return len(self.members)


@dataclass(frozen=True, slots=True)
class ChargeReport:
    """The detector's findings at one charge."""

    charge: Charge
    configurations: int
    singular: int
    indeterminate: int
    vanishing: int
    worst_order: int
    all_clusters: int
    clusters: tuple[ClusterReport, ...]
    singular_configurations: tuple[SingularReport, ...]
    indeterminate_configurations: tuple[SingularReport, ...]
    vanishing_configurations: tuple[Configuration, ...]

    def graph(self) -> networkx.Graph:
        """The singular clusters as a graph: members are nodes, two are joined when no third lies between them."""
        import networkx

        graph = networkx.Graph()
        for index, cluster in enumerate(self.clusters):
            graph.add_nodes_from(cluster.members, cluster=index, order=cluster.order)
            add_exchanges(graph, cluster.members)
        return graph


@dataclass(frozen=True, slots=True)
class DetectResult:
    """The singular configurations and clusters of every charge."""

    header: Header
    charges: tuple[ChargeReport, ...]
    partial: bool = False

    def __getitem__(self, charge: int | Charge) -> ChargeReport:
        wanted = (charge,) if isinstance(charge, int) else tuple(charge)
        for report in self.charges:
            if report.charge == wanted:
                return report
        raise KeyError(charge)

    @property
    def exit_status(self) -> int:
        """Always 0: whatever the detector finds is a result."""
        return 0


@dataclass(frozen=True, slots=True)
class ValidateResult:
    """All checks that apply to the case, run to a depth: "quick" or "full"."""

    header: Header
    checks: tuple[Check, ...]
    depth: str
    partial: bool = False

    @property
    def routes(self) -> tuple[Check, ...]:
        """The checks by which an independent route agrees with the limits of this very case, at all its charges."""
        independent = (c for c in self.checks if c.kind is Kind.INDEPENDENT and c.verdict is Verdict.AGREES)
        return tuple(c for c in independent if c.complete)

    @property
    def summary(self) -> str:
        """One sentence: what is refuted, how many independent routes agree, what stayed undecided."""
        refuted = [c.name for c in self.checks if c.verdict is Verdict.REFUTED]
        undecided = [c.name for c in self.checks if c.verdict is Verdict.UNDECIDED]
        parts = [f"REFUTED: {', '.join(refuted)}" if refuted else "nothing is refuted"]
        routes = self.routes
        if routes:
            word = "independent route agrees" if len(routes) == 1 else "independent routes agree"
            parts.append(f"{len(routes)} {word} with the limits of this case at all its charges")
        else:
            parts.append("no independent route covers all charges of this case")
            relatives = sum(1 for c in self.checks if c.kind is Kind.SIBLING and c.verdict is Verdict.AGREES)
            if relatives:
                word = "check on a relative of it agrees" if relatives == 1 else "checks on relatives of it agree"
                parts.append(f"{relatives} {word}, which does not prove this case")
        if undecided:
            parts.append(f"undecided: {', '.join(undecided)}")
        return f"{len(self.checks)} checks at depth {self.depth}: {'; '.join(parts)}."

    @property
    def exit_status(self) -> int:
        """1 when a check is refuted; 3 when finiteness or path-independence stayed undecided; else 0."""
        return _exit_status(self.checks)
