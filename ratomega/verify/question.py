"""The question that every hypothesis is asked: these rows, this case, this quantity."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from ratomega.case.case import Case
from ratomega.case.setting import Setting
from ratomega.diagrams.tuples import Charge
from ratomega.exact.rational import Rational
from ratomega.verify.explanation import evidence
from ratomega.verify.given import Given
from ratomega.verify.quantities import Quantity
from ratomega.verify.rows import agreeing_digits, real_value
from ratomega.verify.series import Series
from ratomega.verify.source import NoLimitError, Source

__all__ = ["Question"]


@dataclass(frozen=True, slots=True)
class Question:
    """``rows`` are the cheapest first, ``exact`` the values that they should have; ``source`` is Z of the case."""

    case: Case
    setting: Setting
    source: Source
    quantity: Quantity
    rows: tuple[Given, ...]
    exact: tuple[Rational, ...]

    @property
    def deviating(self) -> tuple[Given, ...]:
        return tuple(row for row, exact in zip(self.rows, self.exact, strict=True) if not row.agrees(exact))

    @property
    def charges(self) -> tuple[Charge, ...]:
        """The charges of the deviating rows."""
        return tuple(row.charge for row in self.deviating)

    @property
    def digits(self) -> list[float]:
        """What the deviating rows prove, most first."""
        return evidence(self.rows, self.exact)

    @property
    def nearness(self) -> int:
        """In how many digits the rows agree with the exact values, all together."""
        pairs = zip(self.rows, self.exact, strict=True)
        return sum(agreeing_digits(row.value, exact) for row, exact in pairs)

    def values(self, series: Series) -> tuple[Rational, ...] | None:
        """The values of all rows by a series of the quantity; None where one is not real or has no limit."""
        found = []
        for row in self.rows:
            value = self.value(series, row)
            if value is None:
                return None
            found.append(value)
        return tuple(found)

    def value(self, series: Series, row: Given) -> Rational | None:
        """The value of one row; None where it is not real or has no limit."""
        try:
            return real_value(series(row.charge))
        except (NoLimitError, ZeroDivisionError):
            return None

    def fit(
        self, z: Series, setting: Setting, extra: Sequence[Rational] | None = None
    ) -> tuple[Rational, ...] | None:
        """The values of all rows by another Z, when every given number agrees with them; it stops at the first that
        does not. ``extra`` is added to the tolerances."""
        series = self.quantity.of(z, setting)
        found = []
        for n, row in enumerate(self.rows):
            value = self.value(series, row)
            if value is None or not (row.agrees(value) if extra is None else row.agrees(value, extra[n])):
                return None
            found.append(value)
        return tuple(found)
