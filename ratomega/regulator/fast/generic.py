"""Two colours where no single weight diverges: one modular product per pair of diagrams.

Two passes over pairs (big, small): big of colour 1 and small of colour 2 with |small| <= |big|, then the colours
exchanged with |small| < |big|. For every box u of a small diagram G[u] holds prod_{s in big} S(...) for all big
diagrams, by their tree. Walking down the tree of small diagrams multiplies one slice of G per diagram.
"""

from __future__ import annotations

import numpy as np

from ratomega.exact.residues import Floats, Moduli
from ratomega.regulator.fast.factors import (
    Bench,
    Parameters,
    box_factors,
    diagram_factors,
    differences,
    hook_values,
    pair_factors,
    tree_products,
)
from ratomega.regulator.fast.setup import FastSetup, less
from ratomega.regulator.fast.tables import Forest, Integers, box_arrays, box_list

__all__ = ["one_colour", "two_colours"]


def one_colour(setup: FastSetup, forest: Forest, parameters: Parameters, bench: Bench) -> Floats:
    """The one-colour part of the weight of every diagram: D, V and the flavours. Shape (colours, diagrams, primes)."""
    hooks, place = hook_values(setup, forest.charge, parameters, bench.moduli)
    alone = diagram_factors(hooks, place, forest, bench)
    boxes = box_list(forest.charge)
    where = np.full((forest.charge + 1, forest.charge + 1), -1)
    for n, box in enumerate(boxes):
        where[box] = n
    i, j = box_arrays(boxes)
    parts = tree_products(box_factors(setup, i, j, parameters, bench.moduli), where, forest, bench)
    return bench.multiply(parts, alone, parts)


def two_colours(setup: FastSetup, forest: Forest, moduli: Moduli) -> Floats:
    """Z_0 ... Z_K of the integer parameters modulo every prime: shape (K + 1, primes).

    Raises ``BadPrimes`` when a denominator vanishes modulo a prime. Cost: one product per pair of diagrams and prime.
    """
    charge = forest.charge
    total = np.zeros((charge + 1, len(moduli)))
    if charge == 0:
        return total + 1.0
    parameters = Parameters.make(setup, moduli)
    bench = Bench.make(moduli, len(forest))
    parts = one_colour(setup, forest, parameters, bench)
    i, j, place = differences(charge)
    difference = less(setup.coulomb[0], setup.coulomb[1])
    # At charge 1 no two diagrams meet.
    table = pair_factors(setup, [difference], i, j, parameters, moduli)[0] if charge > 1 else total[:1]
    # S is even: for colour 2 the difference (i, j) of colour 1 less colour 2 changes sign, nothing else.
    for big, small, sign in ((parts[0], parts[1], 1), (parts[1], parts[0], -1)):
        _pass(big, small, table, sign, place, forest, bench, total)
    return moduli.reduce(total)


def _grown(
    table: Floats, sign: int, place: Integers, boxes: list[tuple[int, int]], forest: Forest, bench: Bench
) -> Floats:
    """G[u, big]: the product of S over the boxes of the big diagram, for every box u of small diagrams.

    Only sizes up to K - (area of the box) are filled in.
    """
    charge = forest.charge
    row, column = box_arrays(boxes)
    area = (row + 1) * (column + 1)
    grown = np.empty((len(boxes), forest.start[charge], len(bench.moduli)))
    grown[:, 0] = 1.0
    for n in range(1, charge):
        count = int(np.searchsorted(area, charge - n, side="right"))
        part = forest.sizes(n, n)
        codes = place[
            sign * (forest.row[part][None, :] - row[:count, None]),
            sign * (forest.column[part][None, :] - column[:count, None]),
        ]
        for u in range(count):
            bench.multiply(grown[u, forest.parent[part]], table[codes[u]], grown[u, part])
    return grown


def _pass(
    big: Floats,
    small: Floats,
    table: Floats,
    sign: int,
    place: Integers,
    forest: Forest,
    bench: Bench,
    total: Floats,
) -> None:
    """Add the pairs with |small| <= |big| (sign 1) or |small| < |big| (sign -1) to ``total``."""
    charge = forest.charge
    strict = 0 if sign > 0 else 1
    half = (charge - strict) // 2
    boxes = box_list(half)
    number = {box: n for n, box in enumerate(boxes)}
    grown = _grown(table, sign, place, boxes, forest, bench)
    # One buffer per depth: the walk keeps the path from the root only.
    path = [big] + [np.empty((forest.start[charge - d + 1], big.shape[1])) for d in range(1, half + 1)]
    sums = np.zeros((charge + 1, big.shape[1]))

    def add(depth: int, place_of: int, here: Floats) -> None:
        low = depth + strict
        part = forest.sizes(low, charge - depth)
        starts = np.array(forest.start[low : charge - depth + 1]) - part.start
        by_size = np.add.reduceat(here[part], starts, axis=0)
        bench.reduce(by_size)
        sums[low + depth : charge + 1] += bench.multiply(by_size, small[place_of])

    if strict <= charge:
        add(0, 0, big)
    children: list[list[int]] = [[] for _ in range(len(forest))]
    for child in range(forest.start[half + 1] - 1, 0, -1):
        children[forest.parent[child]].append(child)
    stack = list(children[0])
    depth_of = [0] * forest.start[half + 1]
    while stack:
        node = stack.pop()
        depth = depth_of[int(forest.parent[node])] + 1
        depth_of[node] = depth
        part = forest.sizes(depth + strict, charge - depth)
        u = number[int(forest.row[node]), int(forest.column[node])]
        bench.multiply(path[depth - 1][part], grown[u, part], path[depth][part])
        add(depth, node, path[depth])
        if depth < half:
            stack.extend(children[node])
    total += sums
