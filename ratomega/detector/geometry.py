"""Geometry of the component of the fixed locus that a cluster stands for: dimension, compactness.

At the limit point only a smaller torus T' acts on the instanton moduli space M; its fixed locus is a union of smooth
connected components, and the members of a cluster are the points of one component F that the full torus fixes.

*Dimension*: the number of vanishing vector factors of any member (its tangent weights that are trivial under T').

*Compactness*, an exact criterion: M is projective over the affine Uhlenbeck space. Choose a one-parameter group under
which every function there that can be non-constant on F has positive weight, with eps1 >> eps2 >> |Coulomb| > 0: such
functions are J B1^(m-1) B2^(n-1) I, of weight a_alpha - a_beta + m eps1 + n eps2 with m, n >= 1. All points of F flow
to a limit. If some member has only negative tangent weights, then the points near it flow away from it, so a dense part
of F has a limit in both directions; a function of positive weight must vanish there, so F maps to a point and is
compact. Conversely a compact F has exactly one such member, the sink (Bialynicki-Birula 1973). The sign of
a_alpha - a_beta + p eps1 + q eps2 is that of p, else of q, else of the order of the colours: integer bookkeeping again.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from ratomega.case.setting import Setting, resonances
from ratomega.diagrams.tuples import Charge, Configuration
from ratomega.weights import Weights

__all__ = ["Compactness", "cluster_compactness", "compact_by_parameters", "component_dimension", "is_sink"]


@dataclass(frozen=True, slots=True)
class Compactness:
    """Whether a component is compact, and why."""

    compact: bool
    why: str


def _negative(first: int, second: int, p: int, q: int) -> bool:
    return p < 0 if p else q < 0 if q else first > second


def is_sink(weights: Weights, configuration: Configuration) -> bool:
    """Are all tangent weights of the component at this member negative?"""
    return all(_negative(*point) for point in weights.tangent_points(configuration))


def component_dimension(weights: Weights, configuration: Configuration) -> int:
    """The complex dimension of the component through this member."""
    return sum(1 for _ in weights.tangent_points(configuration))


def compact_by_parameters(setting: Setting, charge: Charge) -> bool:
    """True when every component at this charge is compact: no Coulomb difference is m eps1 + n eps2, m n <= charge."""
    return next(resonances(setting, charge), None) is None


def cluster_compactness(
    weights: Weights, charge: Charge, members: Iterable[Configuration], dimension: int
) -> Compactness:
    """Whether the component of these members is compact. Cost: one pass over the members."""
    if dimension == 0:
        return Compactness(True, "an isolated point")
    found = list(resonances(weights.setting, charge))
    if not found:
        return Compactness(True, "no resonance m*eps1 + n*eps2 with m, n >= 1, m*n <= charge")
    if any(is_sink(weights, member) for member in members):
        return Compactness(True, "a member is a sink: all tangent weights of the component are negative there")
    return Compactness(False, f"no member is a sink; {resonance_text(weights.setting, found[0])}")


def resonance_text(setting: Setting, resonance: Sequence[int]) -> str:
    """One resonance in words.

    The order of the colours is such that m, n >= 1.
    """
    index, alpha, beta, m, n = resonance
    node = setting.nodes[index]
    prefix = f"{node.name}: " if len(setting.nodes) > 1 else ""
    left = "eps1" if m == 1 else f"{m}*eps1"
    right = "eps2" if n == 1 else f"{n}*eps2"
    return f"{prefix}a{alpha + 1} - a{beta + 1} = {left} + {right} at the limit point"
