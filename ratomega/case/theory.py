"""The theory: a quiver of U(N) gauge nodes with matter.

A node carries Coulomb parameters (their number is the rank) and masses of antifundamental, fundamental and adjoint
multiplets; an edge is a bifundamental. A loop edge and an adjoint are the same multiplet: ``Theory.make`` turns every
loop into an adjoint, so that the theory has one form.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

import networkx

from ratomega.case.affine import Affine
from ratomega.errors import InputError

__all__ = ["Edge", "Node", "Theory"]


@dataclass(frozen=True, slots=True)
class Node:
    """One gauge group U(N), N = ``len(coulomb)``."""

    name: str
    coulomb: tuple[Affine, ...]
    antifundamental: tuple[Affine, ...] = ()
    fundamental: tuple[Affine, ...] = ()
    adjoint: tuple[Affine, ...] = ()

    @property
    def rank(self) -> int:
        return len(self.coulomb)


@dataclass(frozen=True, slots=True)
class Edge:
    """A bifundamental of mass ``mass`` from node number ``source`` to node number ``target`` (both from 0)."""

    source: int
    target: int
    mass: Affine


@dataclass(frozen=True, slots=True)
class Theory:
    """Nodes in their order and edges between different nodes. Build it with ``Theory.make``."""

    nodes: tuple[Node, ...]
    edges: tuple[Edge, ...] = ()

    @classmethod
    def make(cls, nodes: Iterable[Node], edges: Iterable[Edge] = ()) -> Theory:
        """The checking constructor: at least one node, no empty rank, unique names, edges between nodes that exist.

        >>> zero = Affine()
        >>> Theory.make([Node("g", (zero,))], [Edge(0, 0, zero)]) == Theory.make([Node("g", (zero,), adjoint=(zero,))])
        True
        """
        nodes, edges = list(nodes), list(edges)
        if not nodes:
            raise InputError.single("a theory needs at least one gauge node")
        names = [node.name for node in nodes]
        for node in nodes:
            if not node.coulomb:
                raise InputError.single("a node needs at least one Coulomb parameter", f"node {node.name}")
            if names.count(node.name) > 1:
                raise InputError.single(f'the name "{node.name}" is used twice', f"node {node.name}")
        for edge in edges:
            if not (0 <= edge.source < len(nodes) and 0 <= edge.target < len(nodes)):
                raise InputError.single(f"an edge joins nodes {edge.source} and {edge.target}; there are {len(nodes)}")
            if edge.source == edge.target:
                node = nodes[edge.source]
                nodes[edge.source] = replace(node, adjoint=(*node.adjoint, edge.mass))
        proper = tuple(edge for edge in edges if edge.source != edge.target)
        return cls(tuple(nodes), proper)

    @property
    def ranks(self) -> tuple[int, ...]:
        return tuple(node.rank for node in self.nodes)

    @property
    def graph(self) -> networkx.MultiDiGraph:
        """The quiver as a multigraph: nodes by name with ``rank``, edges with ``mass``; adjoints are loops."""
        graph = networkx.MultiDiGraph()
        for node in self.nodes:
            graph.add_node(node.name, rank=node.rank)
        for node in self.nodes:
            for mass in node.adjoint:
                graph.add_edge(node.name, node.name, mass=str(mass))
        for edge in self.edges:
            graph.add_edge(self.nodes[edge.source].name, self.nodes[edge.target].name, mass=str(edge.mass))
        return graph

    def key(self) -> list[object]:
        """The physics in canonical form: node and colour order kept, masses sorted, names left out."""
        nodes = [
            [
                [x.key() for x in node.coulomb],
                sorted(x.key() for x in node.antifundamental),
                sorted(x.key() for x in node.fundamental),
                sorted(x.key() for x in node.adjoint),
            ]
            for node in self.nodes
        ]
        return [nodes, sorted([e.source, e.target, e.mass.key()] for e in self.edges)]
