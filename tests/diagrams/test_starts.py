"""Enumeration from any number on is the same list without its beginning, for every start."""

from __future__ import annotations

import pytest

from ratomega.diagrams.tuples import configurations, count_configurations
from ratomega.diagrams.young import diagrams_of_size


@pytest.mark.parametrize("n", range(10))
def test_diagrams_from_every_start(n):
    for largest in [None, *range(n + 2)]:
        every = list(diagrams_of_size(n, largest))
        for start in range(len(every) + 3):
            assert list(diagrams_of_size(n, largest, start=start)) == every[start:], (largest, start)


@pytest.mark.parametrize(
    ("ranks", "charge"),
    [
        ([1], (7,)),
        ([2], (5,)),
        ([3], (3,)),
        ([2], (0,)),
        ([2, 1], (3, 2)),
        ([1, 2, 1], (1, 2, 2)),
        ([2, 2], (0, 2)),
        ([1, 1], (0, 0)),
    ],
)
def test_configurations_from_every_start(ranks, charge):
    every = list(configurations(ranks, charge))
    assert len(every) == len(set(every)) == count_configurations(ranks, charge)
    for start in range(len(every) + 3):
        assert list(configurations(ranks, charge, start=start)) == every[start:], start


def test_a_late_start_is_not_walked_to():
    """Were the 4087968 diagrams or so before it listed first, this would take a minute."""
    ((diagram,),) = next(configurations([1], (70,), start=4087967))
    assert diagram == (1,) * 70
