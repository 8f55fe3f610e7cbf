"""The work of the pole recursion cut into matrix products, the same for every prime.

The recursion adds, for every order j, row r and power e,

    V[r, j, e] = sum_c sum_d G[r, c, d] V[c, j - w_c, e - d - v_c]

with G the kernel times R_c, v_c the valuation of R_c and w_c = m n. Columns are sorted into groups by w_c. A group
whose lightest column has w_c >= B feeds B orders at once, since it reads nothing younger than B orders: one matrix
product for B orders and a few neighbouring powers e. Within a group the columns have similar first powers, so that
little is spent on zeros.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ratomega.regulator.poles.lattice import Integers
from ratomega.regulator.poles.plan import Windows

__all__ = ["Group", "Schedule", "Step"]

LONGEST_BLOCK = 16
# How many right-hand sides a matrix product should have: fewer read the kernel table too often.
WIDTH = 32
# Columns of one group differ by at most this much in their first power.
SPREAD = 8


@dataclass(frozen=True, slots=True)
class Step:
    """One product: ``count`` powers first, first + stride, ... of the orders ``begin`` to ``end`` - 1, ``rows`` rows.

    ``low`` is the first power of the columns that is read; ``deepest`` = last power - low is the highest power of G.
    """

    begin: int
    end: int
    first: int
    count: int
    stride: int
    rows: int
    low: int

    @property
    def last(self) -> int:
        return self.first + (self.count - 1) * self.stride

    @property
    def deepest(self) -> int:
        return self.last - self.low


@dataclass(frozen=True, slots=True, eq=False)
class Group:
    """Columns that are treated together. ``steps`` by the order at which their block begins.

    ``lowest`` and ``highest`` bound the powers of the kernel; ``start`` is the first power that its copies of V hold
    (below the first one read by what a product of several powers overlaps), ``stop`` one past the last.
    ``depth[d - lowest]`` is the number of rows that need the power d.
    """

    columns: Integers
    block: int
    rows: int
    lowest: int
    highest: int
    start: int
    stop: int
    depth: Integers
    steps: dict[int, tuple[Step, ...]]

    @property
    def cells(self) -> int:
        """Numbers in the copies of V per order."""
        return (self.stop - self.start) * len(self.columns)


@dataclass(frozen=True, slots=True, eq=False)
class Schedule:
    """``first`` and ``last`` bound all powers; ``moves[j]`` says how V of order j is spread over the copies.

    A move is a pair of index arrays: from V of that order (powers x rows, flat) to the copies of all groups (flat,
    group after group, each orders x powers x columns).
    """

    windows: Windows
    groups: tuple[Group, ...]
    offsets: tuple[int, ...]
    size: int
    first: int
    last: int
    moves: tuple[tuple[Integers, Integers], ...]

    @classmethod
    def make(cls, windows: Windows) -> Schedule:
        """Cost: proportional to the number of steps, some thousands for charge 100."""
        groups = [_group(windows, columns, block) for columns, block in _column_groups(windows)]
        first, last = windows.span
        steps = [step for group in groups for steps in group.steps.values() for step in steps]
        # V_0 = 1 is entered at the power 0.
        first = min([0, first, *[step.first for step in steps]])
        last = max([0, last, *[step.last for step in steps]])
        sizes = [(windows.charge + 1) * g.cells for g in groups]
        offsets = [sum(sizes[:i]) for i in range(len(sizes))]
        moves = _moves(windows, groups, offsets, first)
        return cls(windows, tuple(groups), tuple(offsets), sum(sizes), first, last, moves)

    @property
    def table_size(self) -> int:
        """Numbers in the kernel tables, per prime and parity."""
        return sum(len(g.columns) * g.rows * (g.highest - g.lowest + 1) for g in self.groups)

    @property
    def products(self) -> int:
        """Multiplications in the matrix products, per prime."""
        return sum(
            (s.end - s.begin) * s.count * s.rows * len(g.columns) * (s.deepest - g.lowest + 1)
            for g in self.groups
            for steps in g.steps.values()
            for s in steps
        )


def _column_groups(windows: Windows) -> list[tuple[Integers, int]]:
    """Column numbers and block length: by powers of two of the weight, then by the first power ever read."""
    result = []
    lowest = windows.valuation + windows.low[np.arange(len(windows.pairs)), windows.charge - windows.weight]
    floor = 1
    while floor <= windows.charge:
        member = (windows.weight >= floor) & (windows.weight < 2 * floor)
        for band in sorted({int(x) // SPREAD for x in lowest[member]}):
            columns = np.nonzero(member & (lowest // SPREAD == band))[0]
            result.append((columns, min(floor, LONGEST_BLOCK)))
        floor *= 2
    return result


def _group(windows: Windows, columns: Integers, block: int) -> Group:
    charge, weight = windows.charge, windows.weight
    parities = (0, 1) if windows.path.mirror else (None,)
    hits = windows.hits[:, columns]
    steps: dict[int, tuple[Step, ...]] = {}
    origin = int(weight[columns].min())
    for begin in range(origin // block * block, charge + 1, block):
        orders = np.arange(max(begin, origin), min(begin + block, charge + 1))
        if len(orders) == 0:
            continue
        rows = int(np.searchsorted(weight, charge - orders[0], side="right"))
        if rows == 0:
            break
        need = windows.need[:rows, orders].max(axis=1)
        lowest = -int(hits[:rows].max())
        low = min(
            int(windows.valuation[c] + windows.low[c, j - weight[c]]) for c in columns for j in orders if j >= weight[c]
        )
        first = max(int(windows.low[:rows, orders].min()), low + lowest)
        found: list[Step] = []
        for parity in parities:
            stride = 1 if parity is None else 2
            e = first if parity is None else first + (parity - first) % 2
            count = max(1, WIDTH // len(orders))
            while e <= need.max():
                number = min(count, (int(need.max()) - e) // stride + 1)
                active = int(np.nonzero(need >= e)[0].max()) + 1
                found.append(Step(int(orders[0]), int(orders[-1]) + 1, e, number, stride, active, low))
                e += number * stride
        if found:
            steps[begin] = tuple(found)
    every = [step for some in steps.values() for step in some]
    lowest = -int(hits.max(initial=0))
    highest = max([step.deepest for step in every], default=lowest)
    rows = max([step.rows for step in every], default=0)
    depth = np.zeros(highest - lowest + 1, dtype=np.int64)
    for step in every:
        reach = step.deepest - lowest + 1
        depth[:reach] = np.maximum(depth[:reach], step.rows)
    # The answer itself reads everything up to the power 0, also at orders that no further row reads.
    bottom = int((windows.valuation[columns] + windows.low[columns, charge - weight[columns]]).min())
    start = min([0, bottom, *[step.low - (step.count - 1) * step.stride for step in every]])
    stop = max([1, *[step.last - lowest + 1 for step in every]])
    return Group(columns, block, rows, lowest, highest, start, stop, depth, steps)


def _moves(
    windows: Windows, groups: list[Group], offsets: list[int], first: int
) -> tuple[tuple[Integers, Integers], ...]:
    count = len(windows.pairs)
    base, width, position, start, stop = (np.zeros(count, dtype=np.int64) for _ in range(5))
    for group, offset in zip(groups, offsets, strict=True):
        base[group.columns] = offset
        width[group.columns] = len(group.columns)
        position[group.columns] = np.arange(len(group.columns))
        start[group.columns], stop[group.columns] = group.start, group.stop
    moves = []
    for order in range(windows.charge + 1):
        rows = int(np.searchsorted(windows.weight, windows.charge - order, side="right"))
        low, need = windows.low[:rows, order], np.maximum(windows.need[:rows, order], windows.low[:rows, order] - 1)
        row = np.repeat(np.arange(rows), need - low + 1)
        begins = np.cumsum(need - low + 1) - (need - low + 1)
        power = np.arange(len(row)) - np.repeat(begins, need - low + 1) + low[row]
        place = power + windows.valuation[row]
        # What lies at ``stop`` or above is planned for some other order of this row, but nothing reads it here.
        used = place < stop[row]
        row, power, place = row[used], power[used], place[used]
        level = (order + windows.weight[row]) * (stop - start)[row] + place - start[row]
        moves.append(((power - first) * rows + row, base[row] + level * width[row] + position[row]))
    return tuple(moves)
