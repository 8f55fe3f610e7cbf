"""Young diagrams: rows, arms, legs.

A diagram is a weakly decreasing tuple of positive integers, its rows. A box is (i, j), row and column, both from 1.
arm(s) = row_i - j and leg(s) = column_j - i; both may be negative for a box outside the diagram.
"""

from __future__ import annotations

from collections.abc import Iterator
from functools import lru_cache

__all__ = ["Box", "Diagram", "boxes", "diagrams_of_size", "size", "transpose"]

Diagram = tuple[int, ...]
Box = tuple[int, int]


def diagrams_of_size(n: int, largest: int | None = None, *, start: int = 0) -> Iterator[Diagram]:
    """All diagrams with ``n`` boxes and no row beyond ``largest``, first rows descending, from number ``start`` on.

    The start is reached by counting, without walking there.

    >>> list(diagrams_of_size(3)), list(diagrams_of_size(3, start=1))
    ([(3,), (2, 1), (1, 1, 1)], [(2, 1), (1, 1, 1)])
    """
    if n == 0:
        if start == 0:
            yield ()
        return
    for first in range(n if largest is None else min(n, largest), 0, -1):
        if start:
            here = _counts(n)[min(first, n - first)][n - first]
            if start >= here:
                start -= here
                continue
        for rest in diagrams_of_size(n - first, first, start=start):
            yield (first, *rest)
        start = 0


@lru_cache(maxsize=128)
def _counts(top: int) -> tuple[tuple[int, ...], ...]:
    """Entry [m][n]: how many diagrams with n boxes have no row beyond m, for m and n up to ``top``."""
    rows = [(1,) + (0,) * top]
    for m in range(1, top + 1):
        row = list(rows[-1])
        for n in range(m, top + 1):
            row[n] += row[n - m]
        rows.append(tuple(row))
    return tuple(rows)


def size(diagram: Diagram) -> int:
    return sum(diagram)


def transpose(diagram: Diagram) -> Diagram:
    """The diagram with rows and columns exchanged.

    >>> transpose((3, 1))
    (2, 1, 1)
    """
    return tuple(sum(1 for row in diagram if row > j) for j in range(diagram[0])) if diagram else ()


def boxes(diagram: Diagram) -> Iterator[Box]:
    """The boxes row by row.

    >>> list(boxes((2, 1)))
    [(1, 1), (1, 2), (2, 1)]
    """
    for i, row in enumerate(diagram, 1):
        for j in range(1, row + 1):
            yield i, j
