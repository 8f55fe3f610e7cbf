"""Two colours where single weights diverge: the exact limit from logarithms and truncated exponentials.

On the path eps1 - t, eps2 + t the weight of a pair is t^(-D) c_1 c_2 C exp(sum_j p_j t^j / j!): D is the sum of the
orders of the two diagrams, c_1 and c_2 their own constants, C the constant of their two clusters, and the power sums

    p_j = P_j(first) + P_j(second) + sum over boxes s of the first, u of the second of g_j(s - u).

The poles cancel in the total, so only the coefficient of t^D of every exponential is needed. The double sums over
boxes are matrix products of residues. Constants of clusters multiply sums over members, never single pairs.

At ratio 1 transposing both diagrams maps t to -t, which leaves the coefficient of t^0 alone: the first diagram runs
over half of the diagrams. (Exchanging the two diagrams, which maps a to -a, is no such symmetry of single pairs.)
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from ratomega.exact.residues import EXACT_LIMIT, Floats, Moduli
from ratomega.regulator.fast.bell import exponential
from ratomega.regulator.fast.cluster_sums import pair_constants
from ratomega.regulator.fast.factors import Bench, Parameters, differences
from ratomega.regulator.fast.layout import Layout, group_starts
from ratomega.regulator.fast.powers import pair_shifts, power_sums
from ratomega.regulator.fast.setup import FastSetup, less
from ratomega.regulator.fast.singles import Single, inverse_factorials, singles
from ratomega.regulator.fast.tables import Integers, box_arrays

__all__ = ["two_colours_limit"]

# Rows times columns times primes of one step: a handful of such arrays stays in the second-level cache.
PIECE = 16384


@dataclass(frozen=True, slots=True, eq=False)
class _Work:
    """Everything that the blocks of one batch share."""

    layout: Layout
    bench: Bench
    one: Single
    two: Single
    # The first colour's constants times the weight of the diagram.
    weighted: Floats
    factors: Floats
    half: float


@dataclass(frozen=True, slots=True, eq=False)
class _Second:
    """Second diagrams of one size and order, by cluster; ``starts`` is where a cluster begins.

    ``grids[n]`` holds g_(n+1) summed over the boxes of each, for every box that the first diagram can have, and in
    the last line their own power sums.
    """

    size: int
    order: int
    members: Integers
    starts: Integers
    grids: list[Floats]


def two_colours_limit(setup: FastSetup, layout: Layout, moduli: Moduli) -> Floats:
    """Z_0 ... Z_K at t = 0 of the integer parameters modulo every prime: shape (K + 1, primes).

    Raises ``BadPrimes`` when a factor vanishes modulo a prime. Cost, per pair of diagrams and prime: for a pair of
    order D a dot product over the boxes of the first diagram for each of D power sums, and D (D - 1) / 2 products.
    """
    charge, count = layout.charge, len(moduli)
    parameters = Parameters.make(setup, moduli)
    bench = Bench.make(moduli, max(len(layout.forest), 2 * PIECE // count))
    one, two = singles(setup, layout, parameters, bench)
    weighted = bench.reduce(one.constant * layout.weight[:, None])
    half = max(moduli.primes) / 2 + 1
    work = _Work(layout, bench, one, two, weighted, inverse_factorials(layout.depth, moduli), half)
    root = less(setup.coulomb[0], setup.coulomb[1])
    constants = pair_constants(setup, root, layout.clusters, charge, parameters, bench)
    i, j, place = differences(charge)
    powers = power_sums(pair_shifts(setup, root), i, j, layout.depth, setup, parameters, moduli)
    total = np.zeros((charge + 1, count))
    start = layout.clusters.node_start
    for size in range(charge + 1):
        # Sums over the members of two clusters, by node of the second and of the first.
        sums = np.zeros_like(constants[size])
        for second in _seconds(work, size, powers, place):
            for order in range(layout.worst[charge - size] + 1):
                _block(work, second, order, sums)
        by_first = bench.reduce(bench.multiply(sums, constants[size], sums).sum(axis=0))
        total[size:] += np.add.reduceat(by_first, np.array(start[: charge - size + 1]), axis=0)
    return moduli.reduce(total)


def _seconds(work: _Work, size: int, powers: list[Floats], place: Integers) -> Iterator[_Second]:
    layout, bench = work.layout, work.bench
    clusters = layout.clusters
    left = layout.charge - size
    part = layout.forest.sizes(size, size)
    members = part.start + np.lexsort((clusters.node[part], clusters.order[part]))
    orders = clusters.order[members]
    area = np.array([(i + 1) * (j + 1) for i, j in layout.boxes])
    row, column = box_arrays(layout.boxes)
    ours, theirs = int(np.searchsorted(area, left, "right")), int(np.searchsorted(area, size, "right"))
    codes = place[row[:ours] - row[:theirs, None], column[:ours] - column[:theirs, None]]
    inside = layout.inside[members, :theirs]
    grids = []
    for n in range(int(orders[-1]) + layout.worst[left]):
        # Of low orders the last power sums are not needed.
        low = int(np.searchsorted(orders, n + 1 - layout.worst[left]))
        grid = np.zeros((ours + 1, len(members), len(bench.moduli)))
        if ours and theirs:
            table = powers[n][codes].reshape(theirs, -1)
            product = (inside[low:] @ table).reshape(-1, ours, len(bench.moduli))
            grid[:-1, low:] = bench.reduce(product).transpose(1, 0, 2)
        grid[-1] = work.two.powers[n][members]
        grids.append(grid)
    for order in np.unique(orders).tolist():
        chosen = slice(int(np.searchsorted(orders, order)), int(np.searchsorted(orders, order, "right")))
        mine = members[chosen]
        depth = order + layout.worst[left]
        yield _Second(
            size, order, mine, group_starts(clusters.node[mine]), [grid[:, chosen] for grid in grids[:depth]]
        )


def _pieces(starts: Integers, total: int, width: int) -> Iterator[tuple[slice, Integers]]:
    """Cut range(total) into pieces of about ``width``, never inside a group; with each the starts in it, from 0."""
    low = first = 0
    edges = [*starts.tolist()[1:], total]
    for number, edge in enumerate(edges):
        if edge == total or edges[number + 1] - low > width:
            yield slice(low, edge), starts[first : number + 1] - low
            low, first = edge, number + 1


def _block(work: _Work, second: _Second, order: int, sums: Floats) -> None:
    """All first diagrams of one order beside ``second``: write the sums over members of pairs of clusters."""
    layout, bench = work.layout, work.bench
    clusters = layout.clusters
    left = layout.charge - second.size
    rows = layout.first[order]
    rows = rows[rows < layout.forest.start[left + 1]]
    if not len(rows):
        return
    starts = layout.starts[order]
    starts = starts[starts < len(rows)]
    depth = order + second.order
    factor = bench.multiply(work.two.constant[second.members], work.factors[depth])
    node_low = clusters.node_start[second.size]
    firsts = clusters.node[rows[starts]]
    seconds = clusters.node[second.members[second.starts]] - node_low
    if depth == 0:
        mine = bench.reduce(np.add.reduceat(work.weighted[rows], starts, axis=0))
        theirs = bench.reduce(np.add.reduceat(factor, second.starts, axis=0))
        sums[seconds[:, None], firsts] = bench.multiply(theirs[:, None], mine[None])
        return
    count = sums.shape[-1]
    ours = second.grids[0].shape[0] - 1
    inside = np.concatenate([layout.inside[rows, :ours], np.ones((len(rows), 1))], axis=1)
    # Reduced table entries: one per box of the first diagram, its own power sum, that of the second.
    bound = (left + 2) * work.half
    done = 0
    for columns, inner in _pieces(second.starts, len(second.members), max(1, PIECE // (32 * count))):
        width = columns.stop - columns.start
        tables = [np.ascontiguousarray(g[:, columns]).reshape(ours + 1, -1) for g in second.grids[:depth]]
        begun = 0
        for lines, outer in _pieces(starts, len(rows), max(1, PIECE // (width * count))):
            chosen = rows[lines]
            powers = []
            for n, table in enumerate(tables):
                power = (inside[lines] @ table).reshape(len(chosen), width, count)
                power += work.one.powers[n][chosen][:, None]
                powers.append(power)
            top = exponential(powers, bound, work.half, bench)
            top *= work.weighted[chosen][:, None]
            if len(chosen) * work.half**2 >= EXACT_LIMIT:
                bench.reduce(top)
            by_first = bench.reduce(np.add.reduceat(top, outer, axis=0))
            by_first = bench.multiply(by_first, factor[columns], by_first)
            both = bench.reduce(np.add.reduceat(by_first, inner, axis=1))
            place = seconds[done : done + len(inner), None]
            sums[place, firsts[begun : begun + len(outer)]] = both.transpose(1, 0, 2)
            begun += len(outer)
        done += len(inner)
