"""Diagrams against sympy's partitions and the plainest definitions."""

from __future__ import annotations

import pytest
from sympy.functions.combinatorial.numbers import partition
from sympy.utilities.iterables import partitions

from ratomega.diagrams.young import boxes, diagrams_of_size, size, transpose

ALL = [diagram for n in range(10) for diagram in diagrams_of_size(n)]


@pytest.mark.parametrize("n", range(16))
def test_all_diagrams_once_and_in_order(n):
    found = list(diagrams_of_size(n))
    assert len(found) == partition(n)
    assert found == sorted(set(found), reverse=True)
    by_sympy = {tuple(row for row in sorted(p, reverse=True) for _ in range(p[row])) for p in partitions(n)}
    assert set(found) == by_sympy


@pytest.mark.parametrize("diagram", ALL, ids=str)
def test_boxes_and_transpose(diagram):
    inside = list(boxes(diagram))
    assert inside == [(i, j) for i in range(1, 12) for j in range(1, 12) if i <= len(diagram) and j <= diagram[i - 1]]
    assert len(inside) == size(diagram) == sum(diagram)
    assert sorted(boxes(transpose(diagram))) == sorted((j, i) for i, j in inside)
    assert transpose(transpose(diagram)) == diagram
