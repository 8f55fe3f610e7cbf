"""The limit point as plain numbers, and what a closed form says there.

Where every component of the fixed locus is compact, the limit depends on the limit values of the parameters alone, so
closed forms look at nothing else. A fundamental of mass m is the antifundamental of mass eps - m, factor by factor
(phi - m + eps = phi + (eps - m)); here every flavour is an antifundamental.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from ratomega.case.setting import Setting
from ratomega.exact.quadratic import Number, only_rational
from ratomega.exact.rational import Rational

__all__ = ["Charge", "ClosedForm", "LimitPoint", "NodePoint", "limit_point"]

Charge = tuple[int, ...]


@dataclass(frozen=True, slots=True)
class ClosedForm:
    """Exact values of Z from a formula that is no sum over diagrams.

    ``name`` is short, ``statement`` one sentence with the formula, ``source`` where it comes from. ``values`` maps
    each charge at which the form holds to the coefficient of Z at the limit point.
    """

    name: str
    statement: str
    source: str
    values: Mapping[Charge, Number]


@dataclass(frozen=True, slots=True)
class NodePoint:
    """One node: Coulomb parameters, antifundamental masses of all its flavours, adjoint masses."""

    coulomb: tuple[Number, ...]
    flavours: tuple[Number, ...]
    adjoint: tuple[Number, ...]

    @property
    def rank(self) -> int:
        return len(self.coulomb)


@dataclass(frozen=True, slots=True)
class LimitPoint:
    """The theory at t = 0; an edge is (source, target, mass)."""

    eps1: Rational
    eps2: Rational
    nodes: tuple[NodePoint, ...]
    edges: tuple[tuple[int, int, Number], ...]

    @property
    def eps(self) -> Rational:
        return self.eps1 + self.eps2

    def components(self) -> tuple[tuple[int, ...], ...]:
        """The nodes of each connected part of the quiver, ascending; Z is the product over the parts."""
        parts: list[set[int]] = [{node} for node in range(len(self.nodes))]
        for source, target, _ in self.edges:
            joined = [part for part in parts if source in part or target in part]
            parts = [part for part in parts if part not in joined] + [set().union(*joined)]
        return tuple(sorted(tuple(sorted(part)) for part in parts))

    def part(self, nodes: tuple[int, ...]) -> LimitPoint:
        """The theory of one connected part, its nodes numbered from 0 in the order given."""
        number = {node: index for index, node in enumerate(nodes)}
        edges = tuple((number[s], number[t], m) for s, t, m in self.edges if s in number)
        return LimitPoint(self.eps1, self.eps2, tuple(self.nodes[node] for node in nodes), edges)


def limit_point(setting: Setting) -> LimitPoint:
    """The values at t = 0 of everything on the path."""
    eps1, eps2 = only_rational(setting.eps1.constant), only_rational(setting.eps2.constant)
    eps = eps1 + eps2
    nodes = tuple(
        NodePoint(
            tuple(a.constant for a in node.coulomb),
            tuple(m.constant for m in node.antifundamental) + tuple(eps - m.constant for m in node.fundamental),
            tuple(m.constant for m in node.adjoint),
        )
        for node in setting.nodes
    )
    edges = tuple((source, target, mass.constant) for source, target, mass in setting.edges)
    return LimitPoint(eps1, eps2, nodes, edges)
