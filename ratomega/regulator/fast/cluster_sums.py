"""Diagrams at a rational ratio: orders, clusters, and the constants of pairs of clusters.

The order of a diagram is the number of factors of D that vanish at the limit point. Diagrams with the same
multiset of limiting contents alpha i + beta j form a cluster; all its members have the same order, and a product of S
over the boxes of two diagrams takes the same value at t = 0 for all members of two clusters.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ratomega.exact.residues import Floats, Moduli
from ratomega.regulator.fast.factors import Bench, Parameters, pair_factors
from ratomega.regulator.fast.setup import FastSetup, Whole
from ratomega.regulator.fast.tables import Forest, Integers

__all__ = ["Clusters", "pair_constants"]

Contents = tuple[int, ...]


@dataclass(frozen=True, slots=True, eq=False)
class Clusters:
    """The clusters of all diagrams of a forest, as nodes of a tree of sorted contents.

    ``order[d]`` and ``node[d]`` belong to diagram d. A node stands for a sorted tuple of contents; its parent lacks the
    last (greatest) one. Nodes are ordered by size; some are no clusters, only beginnings of one. ``node_start[n]`` is
    the first node of size n.
    """

    order: Integers
    node: Integers
    node_parent: Integers
    node_content: Integers
    node_start: tuple[int, ...]

    @classmethod
    def make(cls, setup: FastSetup, forest: Forest) -> Clusters:
        """Cost: linear in the boxes of all diagrams."""
        alpha, beta = setup.alpha, setup.beta
        keys: list[Contents] = [()]
        for place in range(1, len(forest)):
            content = alpha * int(forest.row[place]) + beta * int(forest.column[place])
            keys.append(tuple(sorted((*keys[int(forest.parent[place])], content))))
        nodes: list[set[Contents]] = [set() for _ in range(forest.charge + 1)]
        for key in set(keys):
            while key not in nodes[len(key)]:
                nodes[len(key)].add(key)
                if not key:
                    break
                key = key[:-1]
        number: dict[Contents, int] = {}
        start, parent, last = [0], [], []
        for level in nodes:
            for key in sorted(level):
                number[key] = len(number)
                parent.append(number[key[:-1]] if key else 0)
                last.append(key[-1] if key else 0)
            start.append(len(number))
        return cls(
            _orders(setup, forest),
            np.array([number[key] for key in keys]),
            np.array(parent),
            np.array(last),
            tuple(start),
        )


def _orders(setup: FastSetup, forest: Forest) -> Integers:
    """How many factors E and eps - E of D vanish, for every diagram; first rows, then row by row."""
    order = np.zeros(len(forest), dtype=np.int64)
    for j in range(forest.charge):
        rows = np.nonzero(forest.first > j)[0]
        arm, leg = forest.first[rows] - 1 - j, forest.heights[rows, j] - 1
        order[rows] += setup.alpha * leg == setup.beta * (arm + 1)
        order[rows] += setup.alpha * (leg + 1) == setup.beta * arm
    for n in range(1, forest.charge + 1):
        part = forest.sizes(n, n)
        order[part] += order[forest.rest[part]]
    return order


def pair_constants(
    setup: FastSetup, root: Whole, clusters: Clusters, charge: int, parameters: Parameters, bench: Bench
) -> list[Floats]:
    """The product of S(root + unit (c - c')) over contents c of one cluster and c' of another, at t = 0.

    The n-th entry has shape (nodes of size n, nodes of size <= charge - n, primes): second cluster, then first.
    """
    moduli: Moduli = bench.moduli
    start, content = clusters.node_start, clusters.node_content
    top = int(content.max(initial=0))
    delta = np.arange(-top, top + 1)
    # Contents are multiples of the unit: p alpha + q beta = delta has a solution in integers for every delta.
    p = delta * pow(setup.alpha, -1, setup.beta)
    q = (delta - setup.alpha * p) // setup.beta
    table = pair_factors(setup, [root], p, q, parameters, moduli)[0]
    grown = np.ones((top + 1, start[charge] if charge else 1, len(moduli)))
    against = np.arange(top + 1)[:, None]
    for n in range(1, charge):
        part = slice(start[n], start[n + 1])
        factor = table[content[None, part] - against + top]
        grown[:, part] = bench.multiply(grown[:, clusters.node_parent[part]], factor, factor)
    products = [np.ones((1, start[charge + 1], len(moduli)))]
    for n in range(1, charge + 1):
        part = slice(start[n], start[n + 1])
        seen = start[charge - n + 1]
        before = products[-1][clusters.node_parent[part] - start[n - 1], :seen]
        products.append(bench.multiply(before, grown[content[part], :seen]))
    return products
