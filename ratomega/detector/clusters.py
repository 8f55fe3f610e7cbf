"""Clusters: configurations on one component of the fixed locus at the limit point.

Two configurations belong together exactly when they have, node by node, the same multiset of limiting contents. The
members are the nodes of a networkx graph whose connected components are the clusters.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from ratomega.detector.geometry import Compactness, cluster_compactness, component_dimension
from ratomega.detector.zeros import Zeros
from ratomega.diagrams.tuples import Charge, Configuration
from ratomega.diagrams.young import boxes
from ratomega.weights import ContentsKey, Weights

if TYPE_CHECKING:
    import networkx

__all__ = ["Cluster", "TaggedBox", "add_exchanges", "cluster_graph", "find_clusters"]

TaggedBox = tuple[int, int, int, int]
"""(node, colour, row, column), node and colour from 0."""


@dataclass(frozen=True, slots=True)
class Cluster:
    """One cluster. ``order`` is that of every member; ``orders_agree`` says whether that was found to hold."""

    members: tuple[Zeros, ...]
    order: int
    orders_agree: bool
    dimension: int
    compactness: Compactness

    @property
    def euler_number(self) -> int:
        """The Euler number of the component: the number of its torus-fixed points."""
        return len(self.members)

    @property
    def singular(self) -> bool:
        """At least one member is singular."""
        return any(member.singular for member in self.members)


def find_clusters(weights: Weights, charge: Charge, found: Iterable[Zeros]) -> tuple[Cluster, ...]:
    """Group the configurations of one charge, in the order of their first members."""
    groups: dict[ContentsKey, list[Zeros]] = {}
    for zeros in found:
        groups.setdefault(weights.contents(zeros.configuration), []).append(zeros)
    clusters = []
    for members in groups.values():
        first = members[0].configuration
        dimension = component_dimension(weights, first)
        compactness = cluster_compactness(weights, charge, (m.configuration for m in members), dimension)
        orders = {member.order for member in members}
        clusters.append(Cluster(tuple(members), max(orders), len(orders) == 1, dimension, compactness))
    return tuple(clusters)


def tagged_boxes(configuration: Configuration) -> frozenset[TaggedBox]:
    """All boxes of a configuration with their node and colour."""
    return frozenset(
        (v, c, i, j)
        for v, node in enumerate(configuration)
        for c, diagram in enumerate(node)
        for i, j in boxes(diagram)
    )


def cluster_graph(clusters: Sequence[Cluster], *, exchanges: bool = False, largest: int = 24) -> networkx.Graph:
    """The graph whose connected components are the clusters.

    Nodes are configurations with the attributes ``order``, ``dead`` and ``cluster`` (the index of the cluster). With
    ``exchanges``, two members of a cluster of at most ``largest`` members are joined when no third member lies between
    them (its boxes containing their common boxes and contained in their union); the edge attributes ``leaves`` and
    ``enters`` name the boxes exchanged. Otherwise, and in larger clusters, the members form a chain.

    Cost of the exchanges: cubic in the size of a cluster.
    """
    import networkx

    graph = networkx.Graph()
    for index, cluster in enumerate(clusters):
        for member in cluster.members:
            graph.add_node(member.configuration, order=member.order, dead=member.dead, cluster=index)
        names = [member.configuration for member in cluster.members]
        if exchanges and len(names) <= largest:
            add_exchanges(graph, names)
        else:
            networkx.add_path(graph, names)
    return graph


def add_exchanges(graph: networkx.Graph, members: Sequence[Configuration]) -> None:
    """Join the members between which no third lies. The result is connected: between the ends of any other pair some
    member lies strictly closer to both."""
    sets = [tagged_boxes(member) for member in members]
    for a, first in enumerate(sets):
        for b in range(a + 1, len(sets)):
            second = sets[b]
            common, union = first & second, first | second
            if any(common <= third <= union for n, third in enumerate(sets) if n not in (a, b)):
                continue
            leaves, enters = sorted(first - second), sorted(second - first)
            graph.add_edge(members[a], members[b], leaves=tuple(leaves), enters=tuple(enters))


def size_histogram(clusters: Iterable[Cluster]) -> dict[tuple[int, int], int]:
    """How many clusters there are of each (order, size)."""
    return dict(sorted(Counter((c.order, len(c.members)) for c in clusters).items()))
