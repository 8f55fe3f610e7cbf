"""A rational function of x over Q or a quadratic field, from a numerator and known poles.

It is written f + g sqrt(d) with rational f and g. A pole that is not rational is joined by its conjugate, so that the
denominator is rational.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from flint import fmpq_poly

from ratomega.exact.factored import Whole
from ratomega.exact.quadratic import Number, Quadratic, quadratic, rational_parts
from ratomega.exact.quadratic_poly import Poly, low_product, poly_of
from ratomega.exact.rational import ZERO, Rational
from ratomega.exact.rational_function import RationalFunction, function_of

__all__ = ["LineFunction", "root_power", "scaled", "times"]


@dataclass(frozen=True, slots=True)
class LineFunction:
    """rational + irrational * sqrt(radicand); over the rationals the second part is zero and the radicand 0."""

    rational: RationalFunction
    irrational: RationalFunction
    radicand: int

    @classmethod
    def make(
        cls, numerator: Poly, poles: Mapping[Whole, int], *, scale: int, symbol: str, radicand: int = 0
    ) -> LineFunction:
        """numerator(X) / prod (X - c)^poles[c] with X = scale x, as a function of x.

        >>> str(LineFunction.make(poly_of([1, 1]), {3: 2}, scale=2, symbol="x"))
        '(2*x + 1)/(2*x - 3)**2'
        """
        x = RationalFunction.symbol(symbol, (symbol,)) * scale
        denominator = RationalFunction.constant(1, (symbol,))
        for c, order in poles.items():
            if not isinstance(c, Quadratic):
                denominator = denominator * (x - c) ** order
                continue
            missing = order - poles.get(c.conjugate(), 0)
            if missing > 0:
                numerator = times(numerator, root_power(c.conjugate(), missing))
            if missing >= 0 and (missing > 0 or c.y > 0):
                denominator = denominator * ((x - c.x) ** 2 - c.y * c.y * c.d) ** order
        unit = Rational(1)
        columns: tuple[dict[tuple[int, ...], Rational], ...] = ({}, {})
        for n, coefficient in enumerate(numerator.coeffs()):
            for column, part in zip(columns, (*rational_parts(coefficient), ZERO), strict=False):
                column[(n,)] = part * unit
            unit = unit * scale
        parts = [function_of(column, denominator.numerator, (symbol,)) for column in columns]
        return cls(parts[0], parts[1], radicand)

    def at(self, x: Rational) -> Number:
        """The value at a rational point that is no pole."""
        (name,) = self.rational.symbols
        value, other = self.rational.at(**{name: x}), self.irrational.at(**{name: x})
        return quadratic(value, other, self.radicand) if self.radicand else value

    def is_polynomial(self) -> bool:
        return all(part.denominator.total_degree() == 0 for part in (self.rational, self.irrational))

    def degree(self) -> int:
        """The growth at infinity; -1 for the zero function."""
        (name,) = self.rational.symbols
        parts = (self.rational, self.irrational)
        return max((part.degree(name) for part in parts if not part.is_zero()), default=-1)

    def __str__(self) -> str:
        if self.irrational.is_zero():
            return str(self.rational)
        return f"{self.rational} + ({self.irrational})*sqrt({self.radicand})"


def times(left: Poly, right: Poly) -> Poly:
    """The whole product of two polynomials of one field."""
    return low_product(left, right, left.length() + right.length())


def scaled(poly: Poly, factor: Number) -> Poly:
    """The polynomial times a number of its field."""
    if isinstance(poly, fmpq_poly) and not isinstance(factor, Quadratic):
        return poly * factor
    return low_product(poly, poly_of([factor]), poly.length())


def root_power(c: Whole, exponent: int) -> Poly:
    """(X - c)^exponent."""
    result, base = poly_of([1]), poly_of([-c, 1])
    for _ in range(exponent):
        result = times(result, base)
    return result
