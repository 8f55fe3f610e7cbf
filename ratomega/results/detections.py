"""The result of ``ratomega detect``: singular configurations, guilty factors and clusters, charge by charge."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from ratomega.detector.clusters import add_exchanges
from ratomega.diagrams.tuples import Charge, Configuration
from ratomega.results.header import Header

if TYPE_CHECKING:
    import networkx

__all__ = ["ChargeReport", "ClusterReport", "DetectResult", "Exchange", "FactorReport", "SingularReport"]


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
