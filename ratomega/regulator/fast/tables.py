"""All diagrams up to a size as arrays: a tree in which every diagram follows its parent.

The parent of a diagram lacks the last box of the last row. Diagrams are ordered by size, so parents come first and
the diagrams of a range of sizes lie together. Boxes are (i, j) from 0 here, as in phi = i eps1 + j eps2.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from ratomega.diagrams.young import Diagram

__all__ = ["Forest", "Integers", "box_arrays", "box_list"]

Integers = NDArray[np.int64]


def box_list(charge: int) -> list[tuple[int, int]]:
    """The boxes (i, j) of all diagrams up to ``charge``, those that occur in small diagrams first.

    >>> box_list(2)
    [(0, 0), (0, 1), (1, 0)]
    """
    found = [(i, j) for i in range(charge) for j in range(charge // (i + 1))]
    return sorted(found, key=lambda box: ((box[0] + 1) * (box[1] + 1), box))


def box_arrays(boxes: Sequence[tuple[int, int]]) -> tuple[Integers, Integers]:
    """The rows and the columns of a list of boxes."""
    return np.array([i for i, _ in boxes], dtype=np.int64), np.array([j for _, j in boxes], dtype=np.int64)


@dataclass(frozen=True, slots=True, eq=False)
class Forest:
    """Every diagram with at most ``charge`` boxes.

    ``start[n]`` is the place of the first diagram of size n; ``parent``, ``row`` and ``column`` give the parent and the
    new box; ``rest`` the diagram without its first row; ``heights[d, j]`` the length of column j.

    >>> forest = Forest.make(3)
    >>> forest.diagrams, forest.start
    (((), (1,), (2,), (1, 1), (3,), (2, 1), (1, 1, 1)), (0, 1, 2, 4, 7))
    >>> forest.parent.tolist(), forest.rest.tolist()
    ([0, 0, 1, 1, 2, 2, 3], [0, 0, 0, 1, 0, 1, 3])
    """

    charge: int
    diagrams: tuple[Diagram, ...]
    start: tuple[int, ...]
    parent: Integers
    row: Integers
    column: Integers
    rest: Integers
    first: Integers
    heights: Integers

    @classmethod
    def make(cls, charge: int) -> Forest:
        """Cost: linear in the number of diagrams."""
        diagrams: list[Diagram] = [()]
        parent, row, column, start = [0], [0], [0], [0, 1]
        for _ in range(charge):
            for place in range(start[-2], start[-1]):
                diagram = diagrams[place]
                last = len(diagram) - 1
                if diagram and (last == 0 or diagram[last - 1] > diagram[last]):
                    diagrams.append((*diagram[:last], diagram[last] + 1))
                    row.append(last)
                    column.append(diagram[last])
                    parent.append(place)
                diagrams.append((*diagram, 1))
                row.append(last + 1)
                column.append(0)
                parent.append(place)
            start.append(len(diagrams))
        where = {diagram: place for place, diagram in enumerate(diagrams)}
        rest = np.array([where[diagram[1:]] for diagram in diagrams])
        first = np.array([diagram[0] if diagram else 0 for diagram in diagrams])
        heights = np.zeros((len(diagrams), max(charge, 1)), dtype=np.int64)
        columns = np.arange(max(charge, 1))
        for low, high in pairwise(start[1:]):
            part = slice(low, high)
            heights[part] = heights[rest[part]] + (columns < first[part, None])
        return cls(
            charge,
            tuple(diagrams),
            tuple(start),
            np.array(parent),
            np.array(row),
            np.array(column),
            rest,
            first,
            heights,
        )

    def __len__(self) -> int:
        return len(self.diagrams)

    def sizes(self, low: int, high: int) -> slice:
        """The places of all diagrams with low <= size <= high.

        >>> Forest.make(3).sizes(1, 2)
        slice(1, 4, None)
        """
        return slice(self.start[low], self.start[max(low, high + 1)])
