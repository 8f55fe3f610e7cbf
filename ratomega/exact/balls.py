"""Sums of products of linear factors in ball arithmetic, at one irrational point: rigorous enclosures.

The precision of balls is a setting of the whole process in flint; it is set here alone, for the time of one call.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from flint import acb, arb, ctx, fmpz

from ratomega.exact.factored import Factored, Whole
from ratomega.exact.quadratic import Number, Quadratic
from ratomega.exact.rational import Rational

__all__ = ["Ball", "ball_of", "ball_sum", "extrapolated", "irrational_offset"]

DIGITS_OF_DISTANCE = 3


@dataclass(frozen=True, slots=True)
class Ball:
    """A complex ball, real where all parameters were, with the bits of precision it was computed with."""

    value: acb
    bits: int

    @property
    def radius(self) -> arb:
        return self.value.real.rad() + self.value.imag.rad()

    def text(self, digits: int = 15) -> str:
        """The midpoint in decimals, as many as the radius leaves, up to ``digits``; "?" where it leaves none.

        >>> ball_of(Rational(1, 3), 100).text(5), Ball(acb(arb(1, 2)), 53).text()
        ('0.33333', '?')
        """
        parts = [_decimal(self.value.real, digits)]
        if not self.value.imag.is_zero():
            parts.append(f"{_decimal(self.value.imag, digits)}*i")
        return " + ".join(parts)

    def radius_log10(self) -> float:
        """The decimal logarithm of the radius; -inf for an exact number."""
        radius = self.radius
        return float("-inf") if radius == 0 else float(radius.log() / arb(10).log())

    def radius_text(self) -> str:
        return size_text(self.radius)

    def minus(self, other: Ball) -> Ball:
        with ctx.workprec(max(self.bits, other.bits)):
            return Ball(self.value - other.value, self.bits)

    def plus(self, other: Ball) -> Ball:
        with ctx.workprec(max(self.bits, other.bits)):
            return Ball(self.value + other.value, self.bits)

    def times(self, other: Ball) -> Ball:
        with ctx.workprec(max(self.bits, other.bits)):
            return Ball(self.value * other.value, self.bits)

    def over(self, other: Ball) -> Ball:
        with ctx.workprec(max(self.bits, other.bits)):
            return Ball(self.value / other.value, self.bits)

    def size_text(self) -> str:
        return size_text(self.value.abs_upper())

    def log10(self) -> float:
        """The decimal logarithm of the upper bound of the absolute value; -inf for zero."""
        upper = self.value.abs_upper()
        return float("-inf") if upper == 0 else float(upper.log() / arb(10).log())


def _decimal(value: arb, digits: int) -> str:
    if not value.is_finite() or (value.rad() >= abs(value.mid()) and not value.is_zero()):
        return "?"
    return str(value.str(digits, radius=False))


def size_text(size: arb) -> str:
    """A few digits of a size.

    >>> size_text(arb(Rational(1, 3))), size_text(arb(0))
    ('0.333', '0')
    """
    return str(size.mid().str(DIGITS_OF_DISTANCE, radius=False)) if size.is_finite() else "inf"


def ball_of(value: Number, bits: int) -> Ball:
    """An exact number as a ball."""
    with ctx.workprec(bits):
        return Ball(_enclosed(value), bits)


def irrational_offset(delta: Rational, bits: int) -> Ball:
    """delta * sqrt(2).

    >>> irrational_offset(Rational(1, 100), 60).text(10)
    '0.01414213562'
    """
    with ctx.workprec(bits):
        return Ball(acb(arb(2).sqrt() * arb(delta)), bits)


def _enclosed(value: Number) -> acb:
    if not isinstance(value, Quadratic):
        return acb(arb(value))
    root = acb(arb(abs(value.d)).sqrt()) if value.d > 0 else acb(0, arb(-value.d).sqrt())
    return acb(arb(value.x)) + acb(arb(value.y)) * root


def ball_sum(weights: Iterable[Sequence[Factored]], point: Ball) -> tuple[Ball, Ball]:
    """The sum of the weights at t = ``point``, each given by its parts; and the largest weight in absolute value.

    One division a weight. A factor whose ball contains zero in a denominator makes an infinite ball.
    """
    with ctx.workprec(point.bits):
        t = point.value
        total, largest = acb(0), arb(0)
        for parts in weights:
            up, down = acb(1), acb(1)
            exponent, scale = 0, 1
            for part in parts:
                scale = part.scale
                exponent += len(part.down) - len(part.up)
                for c, s in part.up:
                    up *= _form(c, s, t)
                for c, s in part.down:
                    down *= _form(c, s, t)
            factor = arb(fmpz(scale) ** abs(exponent))
            weight = up / down * factor if exponent >= 0 else up / down / factor
            total += weight
            size = weight.abs_upper()
            if not size <= largest:
                largest = size
        return Ball(total, point.bits), Ball(acb(largest), point.bits)


def _form(c: Whole, s: Whole, t: acb) -> acb:
    return _whole(c) + _whole(s) * t if s else _whole(c)


def _whole(value: Whole) -> acb:
    return _enclosed(value) if isinstance(value, Quadratic) else acb(value)


def extrapolated(points: Sequence[Ball], values: Sequence[Ball]) -> Ball:
    """The polynomial through (point, value) at 0, by Neville's scheme (Richardson's extrapolation).

    >>> at = [irrational_offset(Rational(1, n), 100) for n in (2, 3)]
    >>> extrapolated(at, [x.times(x).plus(x) for x in at]).minus(ball_of(Rational(-1, 3), 100)).log10() < -20
    True
    """
    table = list(values)
    for level in range(1, len(points)):
        for n in range(len(points) - level):
            left, right = points[n], points[n + level]
            above = left.times(table[n + 1]).minus(right.times(table[n]))
            table[n] = above.over(left.minus(right))
    return table[0]
