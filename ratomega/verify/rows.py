"""One row: the exact value, the given one, the digits in which they agree, and the verdict."""

from __future__ import annotations

from dataclasses import dataclass
from math import isqrt

from ratomega.diagrams.tuples import Charge
from ratomega.exact.quadratic import Number, Quadratic, is_quadratic
from ratomega.exact.rational import Rational
from ratomega.verify.given import Given

__all__ = ["MOST_DIGITS", "Row", "agreeing_digits", "compared", "real_value"]

# Agreement beyond this many digits is not counted out.
MOST_DIGITS = 60
ROOT_DIGITS = 80


@dataclass(frozen=True, slots=True)
class Row:
    """``digits`` agree of ``given_digits`` (None: the number is exact); ``tolerance`` is the distance that passes."""

    charge: Charge
    given: str
    exact: Number
    agrees: bool
    digits: int
    given_digits: int | None
    tolerance: Rational


def real_value(value: Number) -> Rational | None:
    """A real number as a rational, exactly or to 80 digits; None for one that is not real.

    >>> from ratomega.exact.quadratic import square_root
    >>> real_value(square_root(-1)) is None, real_value(Rational(1, 2))
    (True, 1/2)
    """
    if not isinstance(value, Quadratic):
        return value
    if value.d < 0:
        return None
    root = Rational(isqrt(value.d * 10 ** (2 * ROOT_DIGITS)), 10**ROOT_DIGITS)
    return value.x + value.y * root


def compared(given: Given, exact: Number, real: Rational) -> Row:
    """The row of a given number beside the exact value; ``real`` is the latter as a rational."""
    agrees = given.agrees(real) or (is_quadratic(exact) and given.agrees(real, abs(real) / 10**ROOT_DIGITS))
    digits = agreeing_digits(given.value, real)
    if given.digits is not None:
        digits = given.digits if agrees else min(digits, given.digits)
    return Row(given.charge, given.text, exact, agrees, digits, given.digits, given.tolerance)


def agreeing_digits(value: Rational, exact: Rational) -> int:
    """How many significant digits two numbers share: the largest n with |difference| <= |exact| 10^-n / 2.

    >>> agreeing_digits(Rational(5626, 10000), Rational(5625, 10000)), agreeing_digits(Rational(1), Rational(-1))
    (3, 0)
    """
    difference = abs(value - exact)
    if difference == 0:
        return MOST_DIGITS
    digits = 0
    while digits < MOST_DIGITS and difference * 2 * 10 ** (digits + 1) <= abs(exact):
        digits += 1
    return digits
