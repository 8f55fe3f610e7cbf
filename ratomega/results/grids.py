"""The result of ``ratomega grid``: the coefficients, or their partial sums, point by point."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from ratomega.case.progression import Axes, Counting
from ratomega.diagrams.tuples import Charge
from ratomega.exact.decimals import Decimals, decimals
from ratomega.exact.quadratic import Number
from ratomega.results.header import Header
from ratomega.validator.verdict import Check, Verdict

__all__ = ["GridResult", "GridRow"]

DOUBLE_DIGITS = 17


@dataclass(frozen=True, slots=True)
class GridRow:
    """One coefficient at one point, or, where ``charge`` is None, the partial sum there.

    The value is ``value``, or ``decimals`` where those were asked for; neither where ``note`` says what is there
    instead. ``last`` bounds the size of the last terms of a sum.
    """

    point: tuple[Number, ...]
    charge: Charge | None
    value: Number | None
    decimals: Decimals | None
    last: str | None
    note: str

    def __complex__(self) -> complex:
        """The value in double precision. Raises ``ValueError`` where there is none."""
        if self.decimals is not None:
            return complex(self.decimals)
        if self.value is None:
            raise ValueError(f"there is no value: {self.note}")
        return complex(decimals(self.value, DOUBLE_DIGITS))


@dataclass(frozen=True, slots=True)
class GridResult:
    """``of`` is "Z" or "H", a series in ``variable``; ``axes`` are the values of every symbol, ``rows`` their product,
    the last symbol fastest, and within a point charge by charge.

    ``way`` is "functions" (the coefficients as functions of the symbols, at the points) or "points" (a limit at every
    point); ``why`` says why. ``q`` holds the counting parameters of a sum, by node.
    """

    header: Header
    of: str
    variable: str
    axes: Axes
    digits: int | None
    q: tuple[Counting, ...] | None
    way: str
    why: str
    rows: tuple[GridRow, ...]
    checks: tuple[Check, ...]
    partial: bool = False

    def __getitem__(self, charge: int | Charge) -> tuple[GridRow, ...]:
        """The rows of one charge along the grid; ``KeyError`` when it was not computed."""
        wanted = (charge,) if isinstance(charge, int) else tuple(charge)
        found = tuple(row for row in self.rows if row.charge == wanted)
        if not found:
            raise KeyError(charge)
        return found

    def __iter__(self) -> Iterator[GridRow]:
        return iter(self.rows)

    @property
    def missing(self) -> int:
        """How many rows have no value."""
        return sum(1 for row in self.rows if row.note)

    @property
    def exit_status(self) -> int:
        """1 when a row has no value, or a check is refuted; else 0."""
        return 1 if self.missing or any(check.verdict is Verdict.REFUTED for check in self.checks) else 0
