"""One given number: its value, how many digits were given, and how far it may be from the exact value.

What is written decides. A fraction is exact. A decimal is right to less than one unit of its last digit, so that
rounding and cutting off both pass. Numbers of sixteen digits and more are taken as the output of double precision: a
few units of its last place are allowed. An uncertainty is a standard one, and three of them are allowed.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from decimal import Decimal
from fractions import Fraction

from ratomega.case.wording import kind, quoted
from ratomega.diagrams.tuples import Charge
from ratomega.errors import InputError
from ratomega.exact.rational import ZERO, Rational, as_rational

__all__ = ["Given", "given_number", "is_fraction", "last_unit", "read_number"]

DOUBLE_DIGITS = 16
DOUBLE = Rational(1, 2**48)
# Less than one unit of the last digit.
UNIT_SHARE = Rational(1023, 1024)
ALLOWED_UNCERTAINTIES = 3
# What typesetting makes of a minus.
MINUS = "\u2212"

_INTEGER = re.compile(r"[+-]?\d+")
_DECIMAL = re.compile(r"[+-]?(?P<whole>\d*)\.?(?P<decimals>\d*)(?:[eE](?P<exponent>[+-]?\d+))?")


@dataclass(frozen=True, slots=True)
class Given:
    """``digits`` are the significant digits given, None where the number is exact; ``row`` counts from 1."""

    charge: Charge
    text: str
    value: Rational
    digits: int | None
    tolerance: Rational
    row: int

    @property
    def double(self) -> bool:
        """Is this a number as double precision puts it out?"""
        return self.digits is not None and self.digits >= DOUBLE_DIGITS

    def agrees(self, exact: Rational, extra: Rational = ZERO) -> bool:
        """Is the number as near to ``exact`` as what was given allows, and ``extra`` more?"""
        return bool(abs(self.value - exact) <= self.tolerance + extra)


def is_fraction(text: str) -> bool:
    """Is this written as a fraction?

    >>> is_fraction("9/16"), is_fraction("0.5625")
    (True, False)
    """
    return "/" in text


def read_number(value: object, where: str) -> tuple[str, Rational]:
    """The text and the value of a number from outside. Floats are read at their shortest decimal text."""
    if not isinstance(value, bool) and hasattr(value, "p") and hasattr(value, "q"):
        return str(value), as_rational(value, where)
    if isinstance(value, bool) or not isinstance(value, (int, float, str, Fraction, Decimal)):
        raise InputError.single(f"a number is decimal text or an exact fraction, not {kind(value)}", where)
    # repr of a subclass of float need not be a number.
    text = (repr(float(value)) if isinstance(value, float) else str(value)).strip().replace(MINUS, "-")
    try:
        return text, as_rational(text, where)
    except InputError as error:
        if "divides by zero" in str(error) or "exponent" in str(error) or "characters" in str(error):
            raise
        hint = "; a decimal has a point, not a comma" if "," in text else ""
        message = f'{quoted(text)} is not a number; write decimal text or a fraction, such as "0.5625" or "9/16"{hint}'
        raise InputError.single(message, where) from error


def given_number(
    charge: Charge,
    text: str,
    value: Rational,
    uncertainty: Rational | None,
    row: int,
    *,
    exact_integers: bool,
    double: bool,
    many_digits: bool = False,
) -> Given:
    """The number with its digits and tolerance.

    ``exact_integers``: an integer is exact and not rounded. ``double``: this was a float. ``many_digits``: the table
    has so many digits that a bare "0.0" means zero.

    >>> from ratomega.exact.rational import Rational
    >>> g = given_number((1,), "0.5625", Rational(9, 16), None, 1, exact_integers=False, double=False)
    >>> g.digits, g.agrees(Rational(56255, 100000)), g.agrees(Rational(5624, 10000))
    (4, True, False)
    """
    digits, tolerance = _precision(text, value, exact_integers)
    if value == 0 and many_digits and len(text.strip("+-0.").partition("e")[0]) == 0 and len(text.lstrip("+-")) <= 3:
        digits, tolerance = None, ZERO
    if double:
        digits = max(digits or 0, DOUBLE_DIGITS)
    if digits is not None and digits >= DOUBLE_DIGITS:
        tolerance = max(tolerance, abs(value) * DOUBLE)
    if uncertainty is not None and uncertainty > 0:
        tolerance = tolerance / 2 + uncertainty * ALLOWED_UNCERTAINTIES
        digits = digits or 1
    return Given(charge, text, value, digits, tolerance, row)


def _precision(text: str, value: Rational, exact_integers: bool) -> tuple[int | None, Rational]:
    if is_fraction(text):
        return None, ZERO
    if _INTEGER.fullmatch(text):
        # An integer among fractions is exact; among decimals it may be a rounded number.
        if exact_integers or value == 0:
            return None, ZERO
        return len(text.lstrip("+-").lstrip("0")), Rational(1, 2)
    match = _parts(text)
    digits = len((match["whole"] + match["decimals"]).lstrip("0")) or 1
    return digits, last_unit(text) * UNIT_SHARE


def _parts(text: str) -> re.Match[str]:
    match = _DECIMAL.fullmatch(text)
    if match is None:
        raise ValueError(f"{text!r} is no decimal number")
    return match


def last_unit(text: str) -> Rational:
    """One unit of the last digit of a decimal text.

    >>> last_unit("0.25"), last_unit("1.5e3")
    (1/100, 100)
    """
    match = _parts(text)
    exponent = int(match["exponent"] or 0) - len(match["decimals"])
    return Rational(10) ** exponent if exponent >= 0 else 1 / Rational(10) ** -exponent
