"""Exact numbers and balls as decimals with a rigorous radius: no digit is shown without a bound on its error.

Integer and rational arithmetic alone decides what is printed; a ball enters by its two ends.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import count

from flint import acb, arb, ctx, fmpq, fmpz

from ratomega.exact.balls import Ball, ball_of
from ratomega.exact.quadratic import Number, Quadratic
from ratomega.exact.rational import ZERO, Rational, decimal_text

__all__ = [
    "Decimals",
    "ball_decimals",
    "ball_power_sum",
    "decimal_value",
    "decimals",
    "enclosed",
    "size_bound",
    "upper_text",
]

RADIUS_DIGITS = 3
FIRST_BITS = 64


@dataclass(frozen=True, slots=True)
class Decimals:
    """Real and imaginary part in decimals; neither is off by more than ``radius``. "0" is exactly that."""

    real: str
    imaginary: str
    radius: str

    def __complex__(self) -> complex:
        return complex(float(self.real), float(self.imaginary))


def decimals(value: Number, digits: int) -> Decimals:
    """An exact number to ``digits`` significant digits, each part rounded correctly.

    >>> decimals(Rational(-2, 3), 5)
    Decimals(real='-0.66667', imaginary='0', radius='3.34e-06')
    >>> decimals(Quadratic(Rational(1, 2), Rational(1), -2), 5)
    Decimals(real='0.5', imaginary='1.4142', radius='0.0000136')
    """
    if not isinstance(value, Quadratic):
        return _together(_rounded(value, ZERO, 1, digits), ("0", ZERO))
    if value.d > 0:
        return _together(_rounded(value.x, value.y, value.d, digits), ("0", ZERO))
    return _together(_rounded(value.x, ZERO, 1, digits), _rounded(ZERO, value.y, -value.d, digits))


def ball_decimals(ball: Ball, digits: int) -> Decimals:
    """A ball to ``digits`` digits of its midpoint; the radius covers the whole ball. Raises ``ValueError`` for a ball
    without end.

    >>> ball_decimals(enclosed(Rational(1, 3), Rational(1, 1000), 64), 4)
    Decimals(real='0.3333', imaginary='0', radius='0.00104')
    """
    return _together(*(_between(*_ends(part), digits) for part in (ball.value.real, ball.value.imag)))


def _together(real: tuple[str, Rational], imaginary: tuple[str, Rational]) -> Decimals:
    return Decimals(real[0], imaginary[0], upper_text(max(real[1], imaginary[1])))


def _rounded(x: Rational, y: Rational, d: int, digits: int) -> tuple[str, Rational]:
    """x + y sqrt(d), d >= 1, and a bound on the error: the root is enclosed until both ends round to one text."""
    if y == 0 or d == 1:
        return _between(x + y, x + y, digits)
    bits = FIRST_BITS + 4 * digits
    while True:
        root = math.isqrt(d << (2 * bits))
        low, high = sorted(x + y * fmpq(n, fmpz(1) << bits) for n in (root, root + 1))
        if decimal_text(low, digits) == decimal_text(high, digits):
            return _between(low, high, digits)
        bits *= 2


def _between(low: Rational, high: Rational, digits: int) -> tuple[str, Rational]:
    """The middle in decimals, and how far the ends are from what is written."""
    text = decimal_text((low + high) / 2, digits)
    shown = decimal_value(text)
    return text, max(abs(low - shown), abs(high - shown))


def decimal_value(text: str) -> Rational:
    """The exact value of a decimal as ``decimal_text`` writes it, of any size.

    >>> decimal_value("-0.25"), decimal_value("1.5e+02")
    (-1/4, 150)
    """
    mantissa, _, exponent = text.partition("e")
    whole, _, rest = mantissa.partition(".")
    power = int(exponent or 0) - len(rest)
    digits = fmpq(fmpz(whole + rest))
    return digits * fmpz(10) ** power if power >= 0 else digits / fmpz(10) ** -power


def upper_text(size: Rational) -> str:
    """A size in few digits, rounded up.

    >>> upper_text(Rational(1, 3)), upper_text(Rational(1, 2)), upper_text(ZERO)
    ('0.334', '0.5', '0')
    """
    # A thousandth is no more than a unit of the last digit: some steps of it bring the next one.
    for step in count():
        text = decimal_text(size * fmpq(1000 + step, 1000), RADIUS_DIGITS)
        if decimal_value(text) >= size:
            return text
    raise AssertionError("unreachable")


def enclosed(value: Number, radius: Rational, bits: int) -> Ball:
    """The ball around an exact number. The radius holds for the real and, if there is one, the imaginary part."""
    middle = ball_of(value, bits)
    if radius == 0:
        return middle
    with ctx.workprec(bits):
        around = arb(-radius).union(arb(radius))
        imaginary = middle.value.imag
        wide = imaginary if imaginary.is_zero() else imaginary + around
        return Ball(acb(middle.value.real + around, wide), bits)


def ball_power_sum(values: Sequence[tuple[Number, Sequence[int]]], variables: Sequence[Ball]) -> Ball:
    """The sum of value * prod variable^exponent, in the precision of the variables."""
    bits = max(one.bits for one in variables)
    with ctx.workprec(bits):
        total = acb(0)
        for value, exponents in values:
            term = ball_of(value, bits).value
            for variable, exponent in zip(variables, exponents, strict=True):
                term *= variable.value**exponent
            total += term
        return Ball(total, bits)


def size_bound(ball: Ball) -> Rational:
    """An upper bound of the absolute value."""
    return _exactly(ball.value.abs_upper())


def _ends(part: arb) -> tuple[Rational, Rational]:
    """The two ends of a real ball as exact numbers."""
    if not part.is_finite():
        raise ValueError("this ball has no end")
    middle, radius = _exactly(part.mid()), _exactly(part.rad())
    return middle - radius, middle + radius


def _exactly(end: arb) -> Rational:
    """A ball without radius as the number that it is."""
    mantissa, exponent = (fmpz(x) for x in end.man_exp())
    return fmpq(mantissa << int(exponent)) if exponent >= 0 else fmpq(mantissa, fmpz(1) << int(-exponent))
