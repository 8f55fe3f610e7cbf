"""Exact truncated Laurent series in one small parameter.

A series is ``t^valuation * (c_0 + c_1 t + ...) + O(t^precision)``. The precision is data that travels with the series;
there is no global setting. Built on ``fmpq_poly`` because ``fmpq_series`` obeys a process-wide cap; coefficients of a
quadratic field make a pair of them (``QuadraticPoly``).

Canonical form: ``poly`` has a non-zero constant term, or is zero with ``valuation == precision``.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from flint import fmpq_poly

from ratomega.errors import PrecisionError
from ratomega.exact.quadratic import Number
from ratomega.exact.quadratic_poly import Poly, low_product, poly_of
from ratomega.exact.rational import ZERO

__all__ = ["Laurent", "Sum", "total"]


@dataclass(frozen=True, slots=True, eq=False)
class Laurent:
    """An exact Laurent series known up to, not including, the power ``precision``.

    >>> x = Laurent.from_coefficients(-1, [1, 1], precision=3)      # 1/t + 1 + O(t^3)
    >>> (x * x).coefficient(-2), (x * x).precision
    (1, 2)
    >>> x.inverse().coefficients()
    {1: 1, 2: -1, 3: 1, 4: -1}
    """

    valuation: int
    poly: Poly
    precision: int

    @classmethod
    def make(cls, valuation: int, poly: Poly, precision: int) -> Laurent:
        """The checking constructor: truncates at ``precision`` and shifts out leading zeros."""
        if precision <= valuation:
            return cls(precision, fmpq_poly(), precision)
        if poly.length() > precision - valuation:
            poly = poly.truncate(precision - valuation)
        if poly.is_zero():
            return cls(precision, fmpq_poly(), precision)
        shift = 0
        while poly[shift] == 0:
            shift += 1
        return cls(valuation + shift, poly.right_shift(shift) if shift else poly, precision)

    @classmethod
    def from_coefficients(cls, valuation: int, coefficients: Iterable[Number | int], *, precision: int) -> Laurent:
        return cls.make(valuation, poly_of(coefficients), precision)

    @classmethod
    def constant(cls, value: Number | int, *, precision: int) -> Laurent:
        return cls.make(0, poly_of([value]), precision)

    @classmethod
    def zero(cls, *, precision: int) -> Laurent:
        return cls(precision, fmpq_poly(), precision)

    def is_zero(self) -> bool:
        """No non-zero coefficient is known (the series may differ from zero beyond its precision)."""
        return self.poly.is_zero()

    def coefficient(self, power: int) -> Number:
        """The coefficient of ``t**power``; ``PrecisionError`` when it is not known."""
        if power >= self.precision:
            raise PrecisionError(f"the coefficient of t^{power} is not known: the series stops at t^{self.precision}")
        return self.poly[power - self.valuation] if power >= self.valuation else ZERO

    def coefficients(self) -> dict[int, Number]:
        """The known non-zero coefficients, by power."""
        return {self.valuation + n: c for n, c in enumerate(self.poly.coeffs()) if c != 0}

    def truncated(self, precision: int) -> Laurent:
        return self if precision >= self.precision else Laurent.make(self.valuation, self.poly, precision)

    def shifted(self, power: int) -> Laurent:
        """The series times ``t**power``."""
        return Laurent(self.valuation + power, self.poly, self.precision + power)

    def __add__(self, other: Laurent) -> Laurent:
        low = min(self.valuation, other.valuation)
        left = self.poly if self.valuation == low else self.poly.left_shift(self.valuation - low)
        right = other.poly if other.valuation == low else other.poly.left_shift(other.valuation - low)
        return Laurent.make(low, left + right, min(self.precision, other.precision))

    def __neg__(self) -> Laurent:
        return Laurent(self.valuation, -self.poly, self.precision)

    def __sub__(self, other: Laurent) -> Laurent:
        return self + (-other)

    def __mul__(self, other: Laurent) -> Laurent:
        precision = min(self.precision + other.valuation, other.precision + self.valuation)
        valuation = self.valuation + other.valuation
        return Laurent.make(valuation, low_product(self.poly, other.poly, max(precision - valuation, 0)), precision)

    def scaled(self, factor: Number | int) -> Laurent:
        poly = low_product(self.poly, poly_of([factor]), self.poly.length())
        return Laurent.make(self.valuation, poly, self.precision)

    def inverse(self) -> Laurent:
        """1 / series; ``ZeroDivisionError`` when no non-zero coefficient is known. Quadratic in the length."""
        if self.is_zero():
            raise ZeroDivisionError("the series has no known non-zero coefficient")
        length = self.precision - self.valuation
        known: list[Number] = list(self.poly.coeffs())
        lead = known[0]
        result: list[Number] = [1 / lead]
        for n in range(1, length):
            total: Number = ZERO
            for k in range(1, min(n, len(known) - 1) + 1):
                total = total + known[k] * result[n - k]
            result.append(-total / lead)
        return Laurent.make(-self.valuation, poly_of(result), length - self.valuation)

    def __truediv__(self, other: Laurent) -> Laurent:
        return self * other.inverse()

    def agrees_with(self, other: Laurent) -> bool:
        """Equal as far as both are known (the precisions may differ)."""
        return (self - other).is_zero()

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Laurent):
            return NotImplemented
        return (self.valuation, self.precision) == (other.valuation, other.precision) and self.poly == other.poly

    def __hash__(self) -> int:
        return hash((self.valuation, self.precision, tuple(str(c) for c in self.poly.coeffs())))

    def __str__(self) -> str:
        terms = [f"{c}*t^{n}" for n, c in self.coefficients().items()]
        return " + ".join([*terms, f"O(t^{self.precision})"])


class Sum:
    """A sum of series that is put together term by term; those of equal valuation cost one addition of polynomials.

    ``series`` gives what was added so far, to ``precision`` at most and no further than any of the terms is known.

    >>> whole = Sum(precision=1)
    >>> for slope in (1, -1):
    ...     whole.add(Laurent.from_coefficients(-1, [slope, 2], precision=1))
    >>> whole.series().coefficients()
    {0: 4}
    """

    __slots__ = ("_polys", "precision")

    def __init__(self, *, precision: int) -> None:
        self.precision = precision
        self._polys: dict[int, Poly] = {}

    def add(self, one: Laurent) -> None:
        if one.precision < self.precision:
            self.precision = one.precision
        known = self._polys.get(one.valuation)
        self._polys[one.valuation] = one.poly if known is None else known + one.poly

    def series(self) -> Laurent:
        if not self._polys:
            return Laurent.zero(precision=self.precision)
        low = min(self._polys)
        poly: Poly = fmpq_poly()
        for valuation, part in self._polys.items():
            poly = part.left_shift(valuation - low) + poly
        return Laurent.make(low, poly, self.precision)


def total(series: Iterable[Laurent], *, precision: int) -> Laurent:
    """The sum of several series, to ``precision``."""
    result = Sum(precision=precision)
    for one in series:
        result.add(one)
    return result.series()
