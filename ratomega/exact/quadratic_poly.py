"""Polynomials over a quadratic field, as two rational ones: P + Q sqrt(d).

``QuadraticPoly`` answers the calls that a Laurent series makes of ``fmpq_poly``, so that the series is one class for
both. Normal form as for numbers: with Q = 0 the polynomial *is* an ``fmpq_poly``.

Integer polynomials over Z[sqrt(d)] are plain pairs here; a quotient is taken with the conjugate of the denominator.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from flint import fmpq, fmpq_poly, fmpz_poly

from ratomega.exact.quadratic import Number, Quadratic, one_field, quadratic

__all__ = [
    "IntegerPair",
    "Poly",
    "QuadraticPoly",
    "low_product",
    "pair_low_product",
    "pair_norm_quotient",
    "poly_of",
    "root_power",
    "scaled",
    "times",
]

IntegerPair = tuple[fmpz_poly, fmpz_poly]


@dataclass(frozen=True, slots=True)
class QuadraticPoly:
    """P + Q sqrt(d) with rational polynomials, Q != 0. Build it with ``QuadraticPoly.make``."""

    rational: fmpq_poly
    irrational: fmpq_poly
    d: int

    @staticmethod
    def make(rational: fmpq_poly, irrational: fmpq_poly, d: int) -> Poly:
        return rational if irrational.is_zero() else QuadraticPoly(rational, irrational, d)

    def length(self) -> int:
        return max(self.rational.length(), self.irrational.length())

    def is_zero(self) -> bool:
        return False

    def __getitem__(self, power: int) -> Number:
        return quadratic(self.rational[power], self.irrational[power], self.d)

    def coeffs(self) -> list[Number]:
        return [self[n] for n in range(self.length())]

    def truncate(self, length: int) -> Poly:
        return self.make(self.rational.truncate(length), self.irrational.truncate(length), self.d)

    def left_shift(self, power: int) -> Poly:
        return self.make(self.rational.left_shift(power), self.irrational.left_shift(power), self.d)

    def right_shift(self, power: int) -> Poly:
        return self.make(self.rational.right_shift(power), self.irrational.right_shift(power), self.d)

    def __neg__(self) -> QuadraticPoly:
        return QuadraticPoly(-self.rational, -self.irrational, self.d)

    def __add__(self, other: Poly) -> Poly:
        p, q = _pair(other, self.d)
        return self.make(self.rational + p, self.irrational + q, self.d)

    def __radd__(self, other: fmpq_poly) -> Poly:
        return self + other


Poly = fmpq_poly | QuadraticPoly


def _pair(poly: Poly, d: int) -> tuple[fmpq_poly, fmpq_poly]:
    if isinstance(poly, QuadraticPoly):
        if poly.d != d:
            raise ValueError(f"sqrt({poly.d}) and sqrt({d}) do not lie in one quadratic field")
        return poly.rational, poly.irrational
    return poly, fmpq_poly()


def poly_of(coefficients: Iterable[Number | int]) -> Poly:
    """The polynomial with the given coefficients, constant term first."""
    known = [fmpq(c) if isinstance(c, int) else c for c in coefficients]
    d = one_field(known)
    rational = fmpq_poly([c.x if isinstance(c, Quadratic) else c for c in known])
    return QuadraticPoly.make(rational, fmpq_poly([c.y if isinstance(c, Quadratic) else fmpq(0) for c in known]), d)


def low_product(left: Poly, right: Poly, length: int) -> Poly:
    """The product without the powers from ``length`` on."""
    if isinstance(left, fmpq_poly) and isinstance(right, fmpq_poly):
        return left.mul_low(right, length)
    d = left.d if isinstance(left, QuadraticPoly) else right.d if isinstance(right, QuadraticPoly) else 0
    (a, b), (p, q) = _pair(left, d), _pair(right, d)
    real = a.mul_low(p, length) + b.mul_low(q, length) * d
    return QuadraticPoly.make(real, a.mul_low(q, length) + b.mul_low(p, length), d)


def times(left: Poly, right: Poly) -> Poly:
    """The whole product of two polynomials of one field."""
    return low_product(left, right, left.length() + right.length())


def scaled(poly: Poly, factor: Number) -> Poly:
    """The polynomial times a number of its field."""
    if isinstance(poly, fmpq_poly) and not isinstance(factor, Quadratic):
        return poly * factor
    return low_product(poly, poly_of([factor]), poly.length())


def root_power(c: Number | int, exponent: int) -> Poly:
    """(X - c)^exponent."""
    result, base = poly_of([1]), poly_of([-c, 1])
    for _ in range(exponent):
        result = times(result, base)
    return result


def pair_product(left: IntegerPair, right: IntegerPair, d: int) -> IntegerPair:
    """(a + b sqrt(d)) (p + q sqrt(d))."""
    (a, b), (p, q) = left, right
    return a * p + b * q * d, a * q + b * p


def pair_low_product(left: IntegerPair, right: IntegerPair, d: int, length: int) -> IntegerPair:
    """The same without the powers from ``length`` on."""
    (a, b), (p, q) = left, right
    real = a.mul_low(p, length) + b.mul_low(q, length) * d
    return real, a.mul_low(q, length) + b.mul_low(p, length)


def pair_norm_quotient(up: IntegerPair, down: IntegerPair, d: int, length: int) -> tuple[IntegerPair, fmpz_poly]:
    """The numerator and the integer denominator of up/down to ``length`` terms: both times the conjugate of down.

    The denominator is a norm; its constant term vanishes only with that of ``down``.
    """
    p, q = down
    norm = p.mul_low(p, length) - q.mul_low(q, length) * d
    return pair_low_product(up, (p, -q), d, length), norm
