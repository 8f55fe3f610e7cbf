"""One edge with equal Coulomb parameters at its ends: diagrams that have to lie in one another.

The factor N_lm(0) of a bifundamental vanishes unless the diagram m lies in the diagram l. So let an edge go from U(N)
to U(N'), N' <= N, with mass 0, and let the Coulomb parameters of U(N') be the first N' of U(N): every diagram of the
target has to lie in its partner, and

    Z_{k k'} = 0 for k' > k,        and for N = N':  Z_{k k} = Z_k of U(N) with the flavours of both nodes,

because bifundamental and one of the two vectors cancel on the diagonal. For N < N' the same holds from the other end:
mass eps1 + eps2 is the reversed edge with mass 0. An edge that is read the wrong way round breaks it.

Sources: the zeros of the bifundamental, elementary; L. Alday, D. Gaiotto, Y. Tachikawa 0906.3219 (the factor).
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import product

from ratomega.case.affine import Affine
from ratomega.case.case import Case
from ratomega.case.setting import own_setting, resonances
from ratomega.case.theory import Edge, Node, Theory
from ratomega.diagrams.tuples import count_all
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ONE, ZERO
from ratomega.validator.identities.siblings import MOST_WORK, Evaluate, Identity, nothing_allowed, reach_text
from ratomega.validator.verdict import Check, Kind

__all__ = ["check_collapse"]

_SOURCE = "elementary; the factor: L. Alday, D. Gaiotto, Y. Tachikawa, arXiv 0906.3219"
_EPS = Affine(eps1=ONE, eps2=ONE)


def check_collapse(case: Case, evaluate: Evaluate, *, most: int = MOST_WORK) -> tuple[Check, ...]:
    """For every edge, the two nodes at its ends alone: the zeros, and the diagonal where the ranks agree.

    The zeros are a statement on a relative of the case; the diagonal compares two sums of our own. None for a case with
    symbols, at charge 0, and where the Coulomb parameters of the larger node are resonant at charge 1 or have to be
    tilted. Cost: the limits of two nodes, at most ``most`` configurations an edge; the charge is lowered to that.
    """
    if case.symbols:
        return ()
    return tuple(check for edge in case.theory.edges for check in _edge_checks(case, edge, evaluate, most))


def _edge_checks(case: Case, edge: Edge, evaluate: Evaluate, most: int) -> Iterator[Check]:
    source, target = case.theory.nodes[edge.source], case.theory.nodes[edge.target]
    forward = target.rank <= source.rank
    wanted = _smooth(case, edge, min(case.bounds[edge.source], case.bounds[edge.target]))
    if wanted < 1:
        return
    place = f"edge {source.name} -> {target.name}"
    equal = source.rank == target.rank
    large, small = (source.name, target.name) if forward else (target.name, source.name)
    colours = "equal Coulomb parameters" if equal else f"the Coulomb parameters of {small} among those of {large}"
    alone = f"these two nodes alone, {colours}, mass {'0' if forward else 'eps1 + eps2'}"
    zeros = Identity(
        f"zeros of a bifundamental, {place}",
        Kind.SIBLING,
        f"Z = 0 where {small} has more charge than {large}: {alone}; this does not prove the case",
        _SOURCE,
    )
    diagonal = Identity(
        f"diagonal of a bifundamental, {place}",
        Kind.CONSISTENCY,
        f"where both have charge k, Z is Z_k of one node with the flavours of both: {alone}",
        _SOURCE,
    )
    charge = wanted
    while charge and count_all((source.rank, target.rank), (charge, charge)) > most:
        charge -= 1
    if charge < 1:
        yield zeros.undecided(nothing_allowed(most))
        if equal:
            yield diagonal.undecided(nothing_allowed(most))
        return
    pair = _pair(case, edge, charge)
    found = dict(zip(pair.charges, evaluate(pair), strict=True))
    yield zeros.judged(_zeros(found, charge, forward), reach_text(charge, wanted, most))
    if equal:
        one = evaluate(_single(case, edge, charge))
        yield diagonal.judged(_diagonal(found, one, charge), reach_text(charge, wanted, most))


def _zeros(
    found: dict[tuple[int, ...], Number], charge: int, forward: bool
) -> Iterator[tuple[str, Number, Number]]:
    for one, two in product(range(charge + 1), repeat=2):
        if one != two and (two > one) == forward:
            yield f"Z_({one}, {two})", found[one, two], ZERO


def _diagonal(
    found: dict[tuple[int, ...], Number], one: Sequence[Number], charge: int
) -> Iterator[tuple[str, Number, Number]]:
    for k in range(1, charge + 1):
        yield f"Z_({k}, {k})", found[k, k], one[k]


def _smooth(case: Case, edge: Edge, charge: int) -> int:
    """The highest charge, at most the one given, at which the larger node has no resonance; 0 where it needs a tilt."""
    if charge < 1:
        return 0
    setting = own_setting(_single(case, edge, charge))
    if setting.tilted:
        return 0
    return min((m * n - 1 for *_, m, n in resonances(setting, (charge,))), default=charge)


def _larger(case: Case, edge: Edge) -> Node:
    source, target = case.theory.nodes[edge.source], case.theory.nodes[edge.target]
    return source if target.rank <= source.rank else target


def _pair(case: Case, edge: Edge, charge: int) -> Case:
    colours = _larger(case, edge).coulomb
    ends = [case.theory.nodes[edge.source], case.theory.nodes[edge.target]]
    nodes = [Node(end.name, colours[: end.rank], end.antifundamental, end.fundamental) for end in ends]
    mass = Affine() if nodes[1].rank <= nodes[0].rank else _EPS
    return Case.make(Theory.make(nodes, [Edge(0, 1, mass)]), case.background, [charge, charge])


def _single(case: Case, edge: Edge, charge: int) -> Case:
    """One node with the Coulomb parameters of the larger end and the flavours of both."""
    source, target = case.theory.nodes[edge.source], case.theory.nodes[edge.target]
    flavours = (*source.antifundamental, *target.antifundamental), (*source.fundamental, *target.fundamental)
    return Case.make(Theory.make([Node("both", _larger(case, edge).coulomb, *flavours)]), case.background, charge)
