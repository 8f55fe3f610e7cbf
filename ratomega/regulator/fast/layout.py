"""What the exact limit needs to know of the diagrams alone: trees, clusters, indicators, how deep each one goes."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ratomega.exact.residues import Floats
from ratomega.regulator.fast.cluster_sums import Clusters
from ratomega.regulator.fast.factors import hook_forms
from ratomega.regulator.fast.setup import FastSetup
from ratomega.regulator.fast.tables import Forest, Integers, box_list

__all__ = ["Layout", "group_starts"]


@dataclass(frozen=True, slots=True, eq=False)
class Layout:
    """All diagrams up to a charge at a rational ratio.

    ``inside[d, b]`` says whether box b (of ``boxes``) lies in diagram d, ``hooks[d, h]`` how often the hook h occurs.
    ``weight`` is 1, except at ratio 1: there a diagram stands for its transpose too, 2 or 0. ``first[e]`` are the
    diagrams of order e with non-zero weight, by size, then cluster; ``starts[e]`` is where a cluster begins among them.
    ``worst[n]`` is the greatest order up to size n, and ``need`` the order of a diagram together with the worst
    partner that it can meet: that many power sums are needed.
    """

    forest: Forest
    clusters: Clusters
    boxes: tuple[tuple[int, int], ...]
    where: Integers
    inside: Floats
    hooks: Floats
    weight: Floats
    first: tuple[Integers, ...]
    starts: tuple[Integers, ...]
    worst: tuple[int, ...]
    need: Integers

    @property
    def charge(self) -> int:
        return self.forest.charge

    @property
    def depth(self) -> int:
        """The highest power of t in any exponential."""
        return int(self.need.max())

    @classmethod
    def make(cls, setup: FastSetup, charge: int) -> Layout:
        """Cost: linear in (diagrams) x (boxes of all diagrams)."""
        forest = Forest.make(charge)
        clusters = Clusters.make(setup, forest)
        boxes = box_list(charge)
        where = np.full((charge + 1, charge + 1), -1)
        for n, box in enumerate(boxes):
            where[box] = n
        inside = np.zeros((len(forest), len(boxes)))
        for n in range(1, charge + 1):
            part = forest.sizes(n, n)
            inside[part] = inside[forest.parent[part]]
            inside[np.arange(part.start, part.stop), where[forest.row[part], forest.column[part]]] = 1.0
        weight = _mirror_weights(forest) if setup.alpha == setup.beta else np.ones(len(forest))
        by_node = np.argsort(clusters.node, kind="stable")
        kept = by_node[weight[by_node] > 0]
        worst = tuple(int(clusters.order[forest.sizes(0, n)].max()) for n in range(charge + 1))
        first = tuple(kept[clusters.order[kept] == e] for e in range(worst[-1] + 1))
        starts = tuple(group_starts(clusters.node[rows]) for rows in first)
        beside = np.array([worst[charge - sum(diagram)] for diagram in forest.diagrams])
        need = clusters.order + beside
        hooks = _hook_counts(forest)
        return cls(
            forest, clusters, tuple(boxes), where, inside, hooks, weight, first, starts, worst, need
        )


def group_starts(values: Integers) -> Integers:
    """Where a run of equal values begins.

    >>> group_starts(np.array([4, 4, 7, 9, 9])).tolist()
    [0, 2, 3]
    """
    if not len(values):
        return np.zeros(0, dtype=np.int64)
    return np.concatenate(([0], np.flatnonzero(values[1:] != values[:-1]) + 1))


def _mirror_weights(forest: Forest) -> Floats:
    """1 for a diagram that is its own transpose, 2 for the greater one of a pair, 0 for the other."""
    width = max(forest.charge, 1)
    rows = np.zeros((len(forest), width), dtype=np.int64)
    for n in range(1, forest.charge + 1):
        part = forest.sizes(n, n)
        rows[part, 0] = forest.first[part]
        rows[part, 1:] = rows[forest.rest[part], :-1]
    apart = rows - forest.heights
    leading = np.argmax(apart != 0, axis=1)
    weights: Floats = 1.0 + np.sign(apart[np.arange(len(forest)), leading])
    return weights


def _hook_counts(forest: Forest) -> Floats:
    """How often every (arm, leg) occurs in every diagram."""
    _, _, place = hook_forms(forest.charge)
    counts = np.zeros((len(forest), int(place.max(initial=0)) + 1))
    for j in range(forest.charge):
        rows = np.nonzero(forest.first > j)[0]
        counts[rows, place[forest.first[rows] - 1 - j, forest.heights[rows, j] - 1]] += 1.0
    for n in range(1, forest.charge + 1):
        part = forest.sizes(n, n)
        counts[part] += counts[forest.rest[part]]
    return counts
