"""Three colours: matrices of pairs where no weight diverges, a list of triples in the limit.

The weight of a triple is d_1 d_2 d_3 M_12 M_13 M_23 with one-colour parts d and pair matrices M. Without poles the sum
over the third diagram is a product of the matrices (M_13 d_3) and M_23. In the limit every triple has its own order,
constant and power sums, each a sum or product of parts that belong to single diagrams or pairs.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from ratomega.exact.residues import Floats, Moduli, longest_dot
from ratomega.regulator.fast.bell import exponential
from ratomega.regulator.fast.cluster_sums import pair_constants
from ratomega.regulator.fast.factors import Bench, Parameters, differences, pair_factors
from ratomega.regulator.fast.generic import one_colour
from ratomega.regulator.fast.layout import Layout, group_starts
from ratomega.regulator.fast.powers import pair_shifts, power_sums
from ratomega.regulator.fast.setup import FastSetup, Whole, less
from ratomega.regulator.fast.singles import inverse_factorials, singles
from ratomega.regulator.fast.tables import Forest, Integers, box_arrays, box_list

__all__ = ["three_colours", "three_colours_limit"]

PAIRS = ((0, 1), (0, 2), (1, 2))
PIECE = 16384


def three_colours(setup: FastSetup, forest: Forest, moduli: Moduli) -> Floats:
    """Z_0 ... Z_K of the integer parameters modulo every prime: shape (K + 1, primes).

    Raises ``BadPrimes`` when a denominator vanishes modulo a prime. Cost: for every third diagram a multiplication and
    addition per pair of diagrams that fit beside it one by one, for every size one product per pair that fit together.
    """
    charge = forest.charge
    total = np.zeros((charge + 1, len(moduli)))
    if charge == 0:
        return total + 1.0
    parameters = Parameters.make(setup, moduli)
    bench = Bench.make(moduli, max(len(forest), 2 * PIECE // len(moduli)))
    flat = Moduli.make(moduli.primes)
    d1, d2, d3 = one_colour(setup, forest, parameters, bench)
    pairs = _pair_products(setup, forest, parameters, bench)
    one, two, starts, place = _pairs_by_charge(forest)
    # The pair of the first two colours with everything that does not involve the third.
    first_two = np.concatenate([pair[0].reshape(-1, len(moduli)) for pair in pairs])[place]
    bench.multiply(bench.multiply(first_two, d1[one], first_two), d2[two], first_two)
    weights = _primes_first(first_two)
    for third in range(charge + 1):
        here = forest.sizes(third, third)
        _, m13, m23 = pairs[third]
        seen = forest.start[charge - third + 1]
        left = _primes_first(bench.multiply(m13, d3[here, None])).transpose(0, 2, 1)
        both = _dot(left, _primes_first(m23), flat).reshape(len(moduli), -1)
        count = starts[charge - third + 1]
        # Only pairs that fit beside the third diagram are worth a reduction.
        chosen = flat.reduce(np.take(both, one[:count] * seen + two[:count], axis=1))
        summed = flat.multiply(chosen, weights[:, :count])
        total[third:] += flat.reduce(np.add.reduceat(summed, starts[: charge - third + 1], axis=1)).T
    return moduli.reduce(total)


def _pairs_by_charge(forest: Forest) -> tuple[Integers, Integers, Integers, Integers]:
    """(one, two, starts, place): all pairs by their charge, where each charge begins (and the end), and the place of
    each in the order of the second diagram, then the first."""
    seen = np.array([forest.start[forest.charge - sum(diagram) + 1] for diagram in forest.diagrams])
    two = np.repeat(np.arange(len(forest)), seen)
    one = np.concatenate([np.arange(n) for n in seen])
    size = np.array([sum(diagram) for diagram in forest.diagrams])
    charges = size[one] + size[two]
    place = np.argsort(charges, kind="stable")
    starts = np.searchsorted(charges[place], np.arange(forest.charge + 2))
    return one[place], two[place], starts, place


def _primes_first(x: Floats) -> Floats:
    return np.ascontiguousarray(np.moveaxis(x, -1, 0))


def _dot(left: Floats, right: Floats, flat: Moduli) -> Floats:
    """The matrix product of residues, prime by prime, exact but not reduced where one piece suffices."""
    half = max(flat.primes) / 2 + 1
    step = longest_dot(half, half)
    inner = right.shape[1]
    if inner <= step:
        product: Floats = left @ right
        return product
    total = np.zeros((len(flat), left.shape[1], right.shape[2]))
    for low in range(0, inner, step):
        total += flat.reduce(left[..., low : low + step] @ right[:, low : low + step])
    return total


def _pair_products(setup: FastSetup, forest: Forest, parameters: Parameters, bench: Bench) -> list[Floats]:
    """The product of S over pairs of boxes, for every pair of colours.

    The n-th entry has shape (pairs of colours; diagrams of size n, of the later colour; of the earlier one; primes).
    """
    charge, moduli = forest.charge, bench.moduli
    products = [np.ones((len(PAIRS), 1, len(forest), len(moduli)))]
    if charge == 1:
        return [*products, np.ones((len(PAIRS), 1, 1, len(moduli)))]
    i, j, place = differences(charge)
    roots = [less(setup.coulomb[a], setup.coulomb[b]) for a, b in PAIRS]
    table = pair_factors(setup, roots, i, j, parameters, moduli)
    boxes = box_list(charge)
    number = np.full((charge + 1, charge + 1), -1)
    for n, box in enumerate(boxes):
        number[box] = n
    row, column = box_arrays(boxes)
    area = (row + 1) * (column + 1)
    grown = np.ones((len(PAIRS), len(boxes), forest.start[charge], len(moduli)))
    for n in range(1, charge):
        part = forest.sizes(n, n)
        count = int(np.searchsorted(area, charge - n, side="right"))
        codes = place[forest.row[part] - row[:count, None], forest.column[part] - column[:count, None]]
        factor = table[:, codes]
        grown[:, :count, part] = bench.multiply(grown[:, :count, forest.parent[part]], factor, factor)
    for n in range(1, charge + 1):
        part = forest.sizes(n, n)
        seen = forest.start[charge - n + 1]
        before = products[-1][:, forest.parent[part] - forest.start[n - 1], :seen]
        products.append(bench.multiply(before, grown[:, number[forest.row[part], forest.column[part]], :seen]))
    return products


def three_colours_limit(setup: FastSetup, layout: Layout, moduli: Moduli) -> Floats:
    """Z_0 ... Z_K at t = 0 of the integer parameters modulo every prime: shape (K + 1, primes).

    Raises ``BadPrimes`` when a factor vanishes modulo a prime. Cost, per triple of order D and prime: 6 D additions,
    D (D - 1) / 2 + 5 products. Memory: power sums of all pairs, and a list of all triples.
    """
    forest, clusters, charge = layout.forest, layout.clusters, layout.charge
    parameters = Parameters.make(setup, moduli)
    bench = Bench.make(moduli, max(len(forest), 2 * PIECE // len(moduli)))
    alone = singles(setup, layout, parameters, bench)
    weighted = bench.reduce(alone[0].constant * layout.weight[:, None])
    sums, constants = [], []
    for a, b in PAIRS:
        root = less(setup.coulomb[a], setup.coulomb[b])
        by_size = pair_constants(setup, root, clusters, charge, parameters, bench)
        constants.append(
            np.concatenate([_of_pairs(layout, by_size[n], n).reshape(-1, len(moduli)) for n in range(charge + 1)])
        )
        sums.append(_pair_sums(setup, root, layout, parameters, bench))
    factors = inverse_factorials(layout.depth, moduli)
    half = max(moduli.primes) / 2 + 1
    total = np.zeros((charge + 1, len(moduli)))
    # Pairs stand in the order of the second diagram, then the first.
    seen = np.array([forest.start[charge - sum(diagram) + 1] for diagram in forest.diagrams])
    base = np.concatenate(([0], np.cumsum(seen)[:-1]))
    step = max(1, PIECE // len(moduli))
    for order, size, triples in _triples(layout):
        for low in range(0, triples.shape[1], step):
            one, two, three = triples[:, low : low + step]
            pairs = (base[two] + one, base[three] + one, base[three] + two)
            value = bench.multiply(weighted[one], alone[1].constant[two])
            for factor in (alone[2].constant[three], *(c[p] for c, p in zip(constants, pairs, strict=True))):
                bench.multiply(value, factor, value)
            if order:
                powers = []
                for n in range(order):
                    power = alone[0].powers[n][one] + alone[1].powers[n][two]
                    power += alone[2].powers[n][three]
                    for table, pair in zip(sums, pairs, strict=True):
                        power += table[n][pair]
                    powers.append(power)
                bench.multiply(value, exponential(powers, 6 * half, half, bench), value)
            charges = size[low : low + step]
            edges = group_starts(charges)
            by_charge = bench.reduce(np.add.reduceat(value, edges, axis=0))
            total[charges[edges]] += bench.multiply(by_charge, factors[order])
    return moduli.reduce(total)


def _of_pairs(layout: Layout, table: Floats, size: int) -> Floats:
    """Constants by node as constants by diagram: (second diagrams of ``size``, first diagrams, primes)."""
    nodes = layout.clusters.node
    second = nodes[layout.forest.sizes(size, size)] - layout.clusters.node_start[size]
    first = nodes[: layout.forest.start[layout.charge - size + 1]]
    return table[second[:, None], first]


def _pair_sums(
    setup: FastSetup, root: Whole, layout: Layout, parameters: Parameters, bench: Bench
) -> list[Floats]:
    """The power sums over pairs of boxes, for all pairs of diagrams in the order of the second, then the first."""
    forest, charge, count = layout.forest, layout.charge, len(bench.moduli)
    i, j, place = differences(charge)
    powers = power_sums(pair_shifts(setup, root), i, j, layout.depth, setup, parameters, bench.moduli)
    row, column = box_arrays(layout.boxes)
    area = (row + 1) * (column + 1)
    result = []
    for power in powers:
        pieces = []
        for size in range(charge + 1):
            part = forest.sizes(size, size)
            seen = forest.start[charge - size + 1]
            ours, theirs = (int(np.searchsorted(area, n, "right")) for n in (charge - size, size))
            codes = place[row[:ours] - row[:theirs, None], column[:ours] - column[:theirs, None]]
            width = part.stop - part.start
            if not (ours and theirs):
                pieces.append(np.zeros((width * seen, count)))
                continue
            grid = bench.reduce((layout.inside[part, :theirs] @ power[codes].reshape(theirs, -1)).reshape(-1, count))
            both = layout.inside[:seen, :ours] @ grid.reshape(width, ours, count)
            pieces.append(bench.reduce(both.reshape(-1, count)))
        result.append(np.concatenate(pieces))
    return result


def _triples(layout: Layout) -> Iterator[tuple[int, Integers, Integers]]:
    """(order, charges, triples), by charge, one order at a time; first diagrams of zero weight are left out."""
    forest, charge, order = layout.forest, layout.charge, layout.clusters.order
    size = np.array([sum(diagram) for diagram in forest.diagrams])
    one, two, starts, _ = _pairs_by_charge(forest)
    counts = starts[charge - size + 1]
    pairs = np.concatenate([np.arange(count) for count in counts])
    triples = np.stack([one[pairs], two[pairs], np.repeat(np.arange(len(forest)), counts)])
    triples = triples[:, layout.weight[triples[0]] > 0]
    orders, charges = order[triples].sum(axis=0), size[triples].sum(axis=0)
    for d in np.unique(orders).tolist():
        chosen = np.flatnonzero(orders == d)
        chosen = chosen[np.argsort(charges[chosen], kind="stable")]
        yield d, charges[chosen], triples[:, chosen]
