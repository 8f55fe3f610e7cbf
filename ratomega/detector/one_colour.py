"""At which ratios the diagrams of one colour have a vanishing denominator, for all ratios in one walk.

For a box with arm A and leg L the two vector factors of one colour are -eps1 L + eps2 (A + 1) and
eps1 (L + 1) - eps2 A. They vanish where eps1 : eps2 is (A + 1) : L, or A : (L + 1); so a box names the ratios at which
it is guilty, two at most, all of them positive, and no ratio needs to be tried.

A row added on top of a diagram, as long as the first one at least, changes no arm and no leg below. The walk adds rows
and counts the boxes of the new row alone. Cost: the number of diagrams times about their number of guilty ratios.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from math import gcd

__all__ = ["RatioCount", "one_colour_census"]

Steps = tuple[int, int]
"""(alpha, beta): eps1 : eps2 in lowest terms."""


@dataclass(frozen=True, slots=True)
class RatioCount:
    """By size, from 0: how many diagrams are singular at a ratio, and their largest order (0 where there is none)."""

    singular: tuple[int, ...]
    worst: tuple[int, ...]


def one_colour_census(top: int) -> dict[Steps, RatioCount]:
    """Every ratio at which a diagram with at most ``top`` boxes is singular, and the counts by size.

    >>> found = one_colour_census(3)
    >>> sorted(found), found[1, 1].singular
    ([(1, 1), (1, 2), (2, 1)], (0, 0, 2, 2))
    """
    ratios = {
        (x, y): (x // gcd(x, y), y // gcd(x, y)) for x in range(1, top + 1) for y in range(1, top + 1) if x + y <= top
    }
    singular: dict[Steps, list[int]] = {}
    worst: dict[Steps, list[int]] = {}
    for size, orders in _walk([0] * top, 0, top, {}, ratios):
        for steps, order in orders.items():
            if steps not in singular:
                singular[steps], worst[steps] = [0] * (top + 1), [0] * (top + 1)
            singular[steps][size] += 1
            worst[steps][size] = max(worst[steps][size], order)
    return {steps: RatioCount(tuple(counts), tuple(worst[steps])) for steps, counts in singular.items()}


def _walk(
    columns: list[int], longest: int, left: int, orders: dict[Steps, int], ratios: dict[tuple[int, int], Steps]
) -> Iterator[tuple[int, dict[Steps, int]]]:
    """(size, order at every guilty ratio) of a diagram and of all that come of it by rows on top.

    ``columns`` are the heights of its columns, ``longest`` its first row, ``left`` the boxes that may still be added.
    """
    yield len(columns) - left, orders
    for row in range(max(longest, 1), left + 1):
        grown = dict(orders)
        for j in range(row):
            arm, leg = row - 1 - j, columns[j]
            if leg:
                steps = ratios[arm + 1, leg]
                grown[steps] = grown.get(steps, 0) + 1
            if arm:
                steps = ratios[arm, leg + 1]
                grown[steps] = grown.get(steps, 0) + 1
        taller = [height + 1 if j < row else height for j, height in enumerate(columns)]
        yield from _walk(taller, row, left - row, grown, ratios)
