"""The theory: a quiver of U(N) gauge nodes with matter.

A node carries Coulomb parameters (their number is the rank) and masses of antifundamental, fundamental and adjoint
multiplets; an edge is a bifundamental. A loop edge and an adjoint are the same multiplet: ``Theory.make`` turns every
loop into an adjoint, so that the theory has one form.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from ratomega.case.affine import Affine
from ratomega.case.wording import quoted
from ratomega.errors import InputError, Problem

if TYPE_CHECKING:
    import networkx

__all__ = ["HIGHEST_RANK", "MOST_EDGES", "MOST_MASSES", "MOST_NODES", "Edge", "Node", "Theory"]

# Bounds on what is taken on: far beyond every sum that can be done, small enough to be read at once.
MOST_NODES = 16
HIGHEST_RANK = 64
# Over all nodes: the work at charge 1 already grows like the square of this.
MOST_COLOURS = 128
MOST_MASSES = 256
MOST_EDGES = 256
LONGEST_NAME = 64


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

        Raises ``InputError`` with every mistake; ``where`` counts nodes and edges from 1.

        >>> zero = Affine()
        >>> Theory.make([Node("g", (zero,))], [Edge(0, 0, zero)]) == Theory.make([Node("g", (zero,), adjoint=(zero,))])
        True
        """
        nodes, edges = list(nodes), list(edges)
        problems = [*_bad_edges(edges, len(nodes))]
        if not problems:
            for edge in edges:
                if edge.source == edge.target:
                    node = nodes[edge.source]
                    nodes[edge.source] = replace(node, adjoint=(*node.adjoint, edge.mass))
        problems = [*_bad_nodes(nodes), *problems]
        if problems:
            raise InputError(problems)
        return cls(tuple(nodes), tuple(edge for edge in edges if edge.source != edge.target))

    @property
    def ranks(self) -> tuple[int, ...]:
        return tuple(node.rank for node in self.nodes)

    @property
    def graph(self) -> networkx.MultiDiGraph:
        """The quiver as a multigraph: nodes by name with ``rank``, edges with ``mass``; adjoints are loops."""
        # Here, since neither the command line nor a worker asks for it, and it takes longer to import than all of them.
        import networkx

        graph = networkx.MultiDiGraph()
        for node in self.nodes:
            graph.add_node(node.name, rank=node.rank)
        for node in self.nodes:
            for mass in node.adjoint:
                graph.add_edge(node.name, node.name, mass=str(mass))
        for edge in self.edges:
            graph.add_edge(self.nodes[edge.source].name, self.nodes[edge.target].name, mass=str(edge.mass))
        return graph

    def parameters(self) -> Iterator[tuple[str, Affine]]:
        """Every Coulomb parameter and every mass, each with its place."""
        for number, node in enumerate(self.nodes, 1):
            for key in ("coulomb", "antifundamental", "fundamental", "adjoint"):
                for position, value in enumerate(getattr(node, key), 1):
                    yield f"node[{number}].{key}[{position}]", value
        for number, edge in enumerate(self.edges, 1):
            yield f"edge[{number}].mass", edge.mass

    def at(self, values: Mapping[str, Affine]) -> Theory:
        """The theory with symbols replaced in every parameter."""
        return self.each(lambda x: x.at(values))

    def each(self, change: Callable[[Affine], Affine]) -> Theory:
        """The theory with every parameter changed."""

        def all_of(parameters: Iterable[Affine]) -> tuple[Affine, ...]:
            return tuple(change(x) for x in parameters)

        nodes = (
            Node(n.name, all_of(n.coulomb), all_of(n.antifundamental), all_of(n.fundamental), all_of(n.adjoint))
            for n in self.nodes
        )
        edges = (replace(edge, mass=change(edge.mass)) for edge in self.edges)
        return Theory(tuple(nodes), tuple(edges))

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


def _bad_edges(edges: list[Edge], nodes: int) -> Iterator[Problem]:
    if len(edges) > MOST_EDGES:
        yield Problem(f"a quiver has at most {MOST_EDGES} edges", "edge")
        return
    for number, edge in enumerate(edges, 1):
        for end in (edge.source, edge.target):
            if not 0 <= end < nodes:
                message = f"there is no node number {end}; the theory has {nodes}, counted from 0"
                yield Problem(message, f"edge[{number}]")


def _bad_nodes(nodes: list[Node]) -> Iterator[Problem]:
    if not nodes:
        yield Problem("a theory needs at least one gauge node", "node")
    if len(nodes) > MOST_NODES:
        yield Problem(f"a quiver has at most {MOST_NODES} nodes", "node")
        return
    colours = sum(node.rank for node in nodes)
    if colours > MOST_COLOURS:
        yield Problem(f"a quiver has at most {MOST_COLOURS} Coulomb parameters in all, not {colours}", "node")
        return
    first: dict[str, int] = {}
    for number, node in enumerate(nodes, 1):
        here = f"node[{number}]"
        bad = name_mistake(node.name)
        if bad:
            yield Problem(bad, f"{here}.name")
        elif first.setdefault(node.name, number) != number:
            yield Problem(f"node[{first[node.name]}] is already called {quoted(node.name)}", f"{here}.name")
        if not node.coulomb:
            yield Problem("a node needs at least one Coulomb parameter; their number is the rank", f"{here}.coulomb")
        if node.rank > HIGHEST_RANK:
            yield Problem(f"a node has at most {HIGHEST_RANK} Coulomb parameters", f"{here}.coulomb")
        masses = {"antifundamental": node.antifundamental, "fundamental": node.fundamental, "adjoint": node.adjoint}
        for key, values in masses.items():
            if len(values) > MOST_MASSES:
                yield Problem(f"a node has at most {MOST_MASSES} masses of one kind", f"{here}.{key}")


def name_mistake(name: str) -> str:
    """What is wrong with the name of a node; empty when nothing is.

    >>> name_mistake("left"), name_mistake("")
    ('', 'a name has at least one character')
    """
    if not name:
        return "a name has at least one character"
    if len(name) > LONGEST_NAME:
        return f"the name {quoted(name)} has {len(name)} characters; at most {LONGEST_NAME} are read"
    if not name.isprintable() or name != name.strip():
        return f"the name {quoted(name)} is not plain printable text without spaces at its ends"
    return ""
