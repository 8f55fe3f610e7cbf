"""Configurations: enumeration and exact counts against sympy and generating functions multiplied out by hand."""

from __future__ import annotations

from itertools import product
from math import comb

import pytest
from sympy.functions.combinatorial.numbers import partition

from ratomega.diagrams.tuples import (
    charges_up_to,
    coloured_partitions,
    configurations,
    count_all,
    count_configurations,
    splittings,
)


def convolved(rank, top):
    """Coefficients of prod 1/(1 - q^n)^rank: the counts of partitions, by sympy, multiplied ``rank`` times."""
    one = [int(partition(n)) for n in range(top + 1)]
    result = [1] + [0] * top
    for _ in range(rank):
        result = [sum(result[k] * one[n - k] for k in range(n + 1)) for n in range(top + 1)]
    return result


@pytest.mark.parametrize("rank", [0, 1, 2, 3, 5, 24])
def test_coloured_partitions(rank):
    assert coloured_partitions(rank, 30) == convolved(rank, 30)


def test_known_sequences():
    # U(2) and U(3) counts: Vafa, Witten hep-th/9408074. 24 colours: the reciprocal of the discriminant, from memory.
    assert coloured_partitions(2, 5) == [1, 2, 5, 10, 20, 36]
    assert coloured_partitions(3, 3) == [1, 3, 9, 22]
    assert coloured_partitions(24, 4) == [1, 24, 324, 3200, 25650]


@pytest.mark.parametrize("parts", range(5))
@pytest.mark.parametrize("n", range(6))
def test_splittings(n, parts):
    found = list(splittings(n, parts))
    expected = [c for c in product(range(n + 1), repeat=parts) if sum(c) == n]
    assert found == expected
    assert len(found) == (comb(n + parts - 1, n) if parts else n == 0)


@pytest.mark.parametrize("ranks", [(1,), (2,), (3,), (1, 1), (2, 1), (1, 2, 1), (2, 2)])
def test_configurations_are_counted_exactly(ranks):
    for charge in charges_up_to(4, len(ranks)):
        found = list(configurations(ranks, charge))
        assert len(found) == len(set(found)) == count_configurations(ranks, charge)
        for configuration in found:
            assert [len(node) for node in configuration] == list(ranks)
            assert tuple(sum(map(sum, node)) for node in configuration) == charge
            for node in configuration:
                for diagram in node:
                    assert list(diagram) == sorted(diagram, reverse=True)
                    assert 0 not in diagram


@pytest.mark.parametrize("ranks", [(1,), (2,), (1, 1), (2, 3), (1, 2, 1)])
@pytest.mark.parametrize("bound", [0, 1, 4, 7])
def test_the_count_of_all_charges(ranks, bound):
    nodes = len(ranks)
    assert count_all(ranks, bound) == sum(count_configurations(ranks, c) for c in charges_up_to(bound, nodes))
    each = [max(bound - v, 0) for v in range(nodes)]
    assert count_all(ranks, each) == sum(count_configurations(ranks, c) for c in charges_up_to(each, nodes))


@pytest.mark.parametrize("nodes", [1, 2, 3])
@pytest.mark.parametrize("bound", [0, 1, 3])
def test_charges(nodes, bound):
    total = charges_up_to(bound, nodes)
    box = charges_up_to([bound] * nodes, nodes)
    every = set(product(range(bound + 1), repeat=nodes))
    assert set(box) == every
    assert set(total) == {c for c in every if sum(c) <= bound}
    for charges in (total, box):
        assert len(set(charges)) == len(charges)
        assert charges[0] == (0,) * nodes
        # By total first, then the earlier nodes first.
        assert list(charges) == sorted(charges, key=lambda c: (sum(c), [-k for k in c]))


def test_a_count_without_a_list():
    # Far beyond enumeration; by Hardy and Ramanujan's numbers through sympy.
    assert count_configurations((1,), (500,)) == partition(500)
    assert count_configurations((2, 1), (300, 200)) == convolved(2, 300)[300] * partition(200)
