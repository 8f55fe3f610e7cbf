"""Closed forms for quivers of U(1) nodes: chains with at most one flavour at each end, and necklaces.

One node is the shortest chain (two ends, hence up to two flavours) and, with an adjoint, the shortest necklace. The
edges are first turned to run along the chain or necklace: reversing an edge, with mass m -> eps - m, multiplies each
weight by (-1)^(N_target k_source + N_source k_target), for U(1) nodes a sign of both q's.

Where a chain has no flavour at an end, the form is the limit of a heavy flavour there: with q -> q / M and M -> oo,
(1 + s q)^(M r / (eps1 eps2)) becomes exp(s q r / (eps1 eps2)).
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import pairwise

from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ONE, ZERO, Rational
from ratomega.validator.limit_point import Charge, ClosedForm, LimitPoint
from ratomega.validator.qseries import Multiseries, Series, binomial, euler_product, exponential, fits

__all__ = ["chain_forms", "necklace_forms"]

_VERTEX_OPERATORS = "from memory: E. Carlsson, A. Okounkov, arXiv 0801.2565 (traces of vertex operators)"
_NO_MATTER = "from memory: N. Nekrasov, A. Okounkov, arXiv hep-th/0306238"


def chain_forms(point: LimitPoint, charges: Sequence[Charge]) -> Iterator[ClosedForm]:
    """U(1) linear quivers of any length, one node included. ``charges`` is closed downwards."""
    order = _chain_order(point)
    if order is None or any(node.rank != 1 or node.adjoint for node in point.nodes):
        return
    length = len(order)
    flavours = [point.nodes[node].flavours for node in order]
    ends: list[Number | None] = [None, None]
    if length == 1:
        if len(flavours[0]) > 2:
            return
        ends[: len(flavours[0])] = flavours[0]
    else:
        if any(flavours[1:-1]) or len(flavours[0]) > 1 or len(flavours[-1]) > 1:
            return
        ends = [flavours[0][0] if flavours[0] else None, flavours[-1][0] if flavours[-1] else None]
    masses, signs = _along(point, order)
    a = [point.nodes[node].coulomb[0] for node in order]
    left: list[Number | None] = [None if ends[0] is None else a[0] + ends[0]]
    left += [a[i] - a[i - 1] + masses[i - 1] for i in range(1, length)]
    right: list[Number | None] = [a[j] - a[j + 1] + point.eps - masses[j] for j in range(length - 1)]
    right.append(None if ends[1] is None else a[-1] + ends[1])

    scale = point.eps1 * point.eps2
    total = Multiseries.one(charges)
    for i in range(length):
        for j in range(i, length):
            monomial = _monomial(length, order[i : j + 1])
            slope = ONE if i == 0 else -ONE
            series = _arc(slope, left[i], right[j], scale, _depth(monomial, charges))
            total = total.times(series, monomial)
    yield ClosedForm(*_chain_words(length, ends), total.with_signs(signs).coefficients)


def _arc(slope: Rational, left: Number | None, right: Number | None, scale: Rational, depth: int) -> Series:
    """(1 + slope x)^(left right / scale); an end without a flavour (None) is the limit of a heavy one."""
    if left is not None and right is not None:
        return binomial(slope, left * right / scale, depth)
    rate = (ONE if left is None else left) * (ONE if right is None else right)
    return exponential(slope * rate / scale, depth)


def _chain_words(length: int, ends: Sequence[Number | None]) -> tuple[str, str, str]:
    """Name, statement and source."""
    present = sum(end is not None for end in ends)
    if length == 1:
        return (
            ("U(1) without matter", "Z = exp(q/(eps1 eps2))", _NO_MATTER),
            ("U(1) with one flavour", "Z = exp(q (a+m)/(eps1 eps2)), flavour factor phi + m", _VERTEX_OPERATORS),
            (
                "U(1) with two flavours",
                "Z = (1+q)^((a+m1)(a+m2)/(eps1 eps2)), flavour factors phi + m1 and phi + m2",
                _VERTEX_OPERATORS,
            ),
        )[present]
    heavy = (
        ""
        if present == 2
        else "; an end without a flavour is the limit of a heavy one (M -> oo at fixed q M), which turns the powers of "
        "every arc that reaches this end into exponentials"
    )
    return (
        f"U(1) linear quiver of {length} nodes",
        "Z = prod over i <= j of (1 + s_i q_i...q_j)^(l_i r_j/(eps1 eps2)), s_1 = 1, else -1, l_1 = a_1 + M, "
        "l_i = a_i - a_(i-1) + m_(i-1), r_j = a_j - a_(j+1) + eps - m_j, r_n = a_n + M', "
        f"edges i -> i+1 of mass m_i, flavour factors phi + M and phi + M' at the ends{heavy}",
        _VERTEX_OPERATORS,
    )


def necklace_forms(point: LimitPoint, charges: Sequence[Charge]) -> Iterator[ClosedForm]:
    """Circular U(1) quivers without flavours; one node with an adjoint is the shortest. ``charges`` as above."""
    if any(node.rank != 1 or node.flavours for node in point.nodes):
        return
    length = len(point.nodes)
    signs = [1] * length
    if length == 1:
        if len(point.nodes[0].adjoint) != 1:
            return
        order, masses = [0], list(point.nodes[0].adjoint)
    else:
        circle = _circle_order(point)
        if circle is None or any(node.adjoint for node in point.nodes):
            return
        order, used = circle
        masses, signs = _turned(point, used)
    a = [point.nodes[node].coulomb[0] for node in order]
    left = [a[i] - a[i - 1] + masses[i - 1] for i in range(length)]
    right = [a[j] - a[(j + 1) % length] + point.eps - masses[j] for j in range(length)]

    scale = point.eps1 * point.eps2
    # Arcs of whole windings make, with the factors 1/(1 - Q^k), one Euler product in Q.
    whole = sum((left[i] * right[i - 1] for i in range(length)), ZERO) / scale - 1
    winding = (1,) * length
    total = Multiseries.one(charges).times(euler_product(whole, _depth(winding, charges)), winding)
    steps, fitting = 0, length > 1
    while fitting:
        steps, fitting = steps + 1, False
        for start in range(length):
            monomial = _monomial(length, [order[(start + n) % length] for n in range(steps)])
            depth = _depth(monomial, charges)
            fitting = fitting or depth > 0
            if depth > 0 and steps % length:
                power = left[start] * right[(start + steps - 1) % length] / scale
                total = total.times(binomial(-ONE, power, depth), monomial)
    if length == 1:
        words = (
            "U(1) with an adjoint",
            "Z = prod over n >= 1 of (1 - q^n)^(-(m-eps1)(m-eps2)/(eps1 eps2))",
            "N. Nekrasov, A. Okounkov, arXiv hep-th/0306238 (eps1 = -eps2); " + _VERTEX_OPERATORS,
        )
    else:
        words = (
            f"U(1) necklace of {length} nodes",
            "Z = prod over arcs of (1 - q_arc)^(l_i r_j/(eps1 eps2)) times prod over k >= 1 of 1/(1 - Q^k), arcs i...j "
            "of every length, windings included, Q = q_1...q_n, l_i = a_i - a_(i-1) + m_(i-1), "
            "r_j = a_j - a_(j+1) + eps - m_j, edges i -> i+1 of mass m_i",
            _VERTEX_OPERATORS,
        )
    yield ClosedForm(*words, total.with_signs(signs).coefficients)


def _depth(monomial: Charge, charges: Sequence[Charge]) -> int:
    """The highest power of the monomial that the charges need."""
    return max(fits(monomial, charge) for charge in charges)


def _monomial(length: int, nodes: Sequence[int]) -> Charge:
    counts = [0] * length
    for node in nodes:
        counts[node] += 1
    return tuple(counts)


def _neighbours(point: LimitPoint) -> list[list[tuple[int, int]]]:
    """For every node the pairs (edge, node at its other end)."""
    result: list[list[tuple[int, int]]] = [[] for _ in point.nodes]
    for number, (source, target, _) in enumerate(point.edges):
        result[source].append((number, target))
        result[target].append((number, source))
    return result


def _chain_order(point: LimitPoint) -> list[int] | None:
    """The nodes from one end of a chain to the other, or None where the connected quiver is no chain."""
    neighbours = _neighbours(point)
    if len(point.edges) != len(point.nodes) - 1 or any(len(near) > 2 for near in neighbours):
        return None
    order = [next(node for node, near in enumerate(neighbours) if len(near) < 2)]
    while len(order) < len(point.nodes):
        order.append(next(node for _, node in neighbours[order[-1]] if node not in order[-2:]))
    return order


def _along(point: LimitPoint, order: Sequence[int]) -> tuple[list[Number], list[int]]:
    """Masses and signs of a chain with its edges turned to run along ``order``."""
    number = {frozenset(edge[:2]): index for index, edge in enumerate(point.edges)}
    return _turned(point, [(number[frozenset(pair)], pair[0]) for pair in pairwise(order)])


def _circle_order(point: LimitPoint) -> tuple[list[int], list[tuple[int, int]]] | None:
    """Nodes around a necklace and (edge, node where it starts) for every step; None where the quiver is no circle."""
    neighbours = _neighbours(point)
    if any(len(near) != 2 for near in neighbours):
        return None
    order: list[int] = []
    used: list[tuple[int, int]] = []
    node = 0
    while node not in order:
        order.append(node)
        edge, after = next((e, n) for e, n in neighbours[node] if all(e != old for old, _ in used))
        used.append((edge, node))
        node = after
    return order, used


def _turned(point: LimitPoint, steps: Sequence[tuple[int, int]]) -> tuple[list[Number], list[int]]:
    """Masses along the steps and the sign of q at every node, edges that run backwards being reversed."""
    masses: list[Number] = []
    signs = [1] * len(point.nodes)
    for edge, start in steps:
        source, target, mass = point.edges[edge]
        masses.append(mass if source == start else point.eps - mass)
        if source != start:
            signs[source] = -signs[source]
            signs[target] = -signs[target]
    return masses, signs
