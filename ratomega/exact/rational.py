"""The one gate for numbers: exact rationals in, floats refused.

Inside the package every number is a ``Rational`` (``flint.fmpq``). Anything from outside passes through
``as_rational``; nothing else converts. Numbers beyond Q will come through the same gate.
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from decimal import Decimal
from fractions import Fraction

from flint import fmpq, fmpz

from ratomega.errors import InputError

__all__ = [
    "ONE",
    "ZERO",
    "Rational",
    "as_fraction",
    "as_rational",
    "common_denominator",
    "decimal_text",
    "exact_text",
    "from_exact_text",
]

Rational = fmpq
ZERO = fmpq(0)
ONE = fmpq(1)

# Bounds on what is read as text. A number of 1000 digits is no physics; 1e999999 would fill the memory.
LONGEST_TEXT = 2000
LARGEST_EXPONENT = 400

_NUMBER = re.compile(r"(?:(?P<whole>\d+)(?:\.(?P<decimals>\d*))?|\.(?P<bare>\d+))(?:[eE](?P<exponent>[+-]?\d+))?")
_EXACT = re.compile(r"(?P<top>0|-?[1-9][0-9]*)(?:/(?P<bottom>[1-9][0-9]*))?")
_RATIONAL = re.compile(r"\s*(?P<sign>[+-]?)\s*(?P<top>[^/\s]+)\s*(?:/\s*(?P<bottom>[^/\s]+)\s*)?")


def as_rational(value: object, where: str = "") -> Rational:
    """Return ``value`` as an exact rational.

    Accepted: ``int``, ``fractions.Fraction``, ``flint.fmpq`` and ``fmpz``, exact sympy numbers, and text such as
    ``"3/11"``, ``"-2"``, ``"0.25"``, ``"1e-3"`` (decimals are read exactly). Floats are refused: 0.1 is not 1/10.

    Raises ``InputError`` naming ``where``. Cost: linear in the length of the text, which is bounded.

    >>> as_rational("0.25"), as_rational(Fraction(3, 11)), as_rational("1e-3")
    (1/4, 3/11, 1/1000)
    """
    if isinstance(value, fmpq):
        return value
    if isinstance(value, bool):
        raise InputError.single(f"expected an exact number, not the truth value {value}", where)
    if isinstance(value, (int, fmpz)):
        return fmpq(value)
    if isinstance(value, Fraction):
        return fmpq(value.numerator, value.denominator)
    if isinstance(value, Decimal) and value.is_finite():
        return as_rational(str(value), where)
    if isinstance(value, float):
        raise InputError.single(
            f"the float {value!r} is not exact; write it as text, for example {_suggestion(value)}", where
        )
    if isinstance(value, str):
        return _from_text(value, where)
    if type(value).__module__.startswith("sympy.") and getattr(value, "is_Rational", False):
        return fmpq(int(value.p), int(value.q))  # type: ignore[attr-defined]
    shown = "null" if value is None else type(value).__name__
    raise InputError.single(f"expected an exact number, not {shown}", where)


def _suggestion(value: float) -> str:
    if value != value or value in (float("inf"), float("-inf")):
        return '"1/3"'
    return f'"{Fraction(value).limit_denominator(1000)}" or "{value!r}"'


def _from_text(text: str, where: str) -> Rational:
    if len(text) > LONGEST_TEXT:
        raise InputError.single(f"a number of {len(text)} characters; at most {LONGEST_TEXT} are read", where)
    match = _RATIONAL.fullmatch(text)
    if match is None:
        raise InputError.single(f'"{text}" is not an exact number; write for example "3/11" or "0.25"', where)
    top = unsigned(match["top"], where)
    bottom = ONE if match["bottom"] is None else unsigned(match["bottom"], where)
    if bottom == 0:
        raise InputError.single(f'"{text}" divides by zero', where)
    return -top / bottom if match["sign"] == "-" else top / bottom


def unsigned(text: str, where: str = "") -> Rational:
    """Read an unsigned decimal literal exactly.

    >>> unsigned("2.50"), unsigned("1e3")
    (5/2, 1000)
    """
    match = _NUMBER.fullmatch(text)
    if match is None or not text.isascii():
        raise InputError.single(f'"{text}" is not an exact number; write for example "3/11" or "0.25"', where)
    whole = match["whole"] or "0"
    decimals = match["decimals"] or match["bare"] or ""
    exponent_text = match["exponent"] or "0"
    if len(exponent_text) > 5 or abs(int(exponent_text)) > LARGEST_EXPONENT:
        raise InputError.single(f'the exponent in "{text}" is beyond {LARGEST_EXPONENT}', where)
    exponent = int(exponent_text) - len(decimals)
    digits = fmpz(whole + decimals)
    power = fmpz(10) ** abs(exponent)
    return fmpq(digits * power) if exponent >= 0 else fmpq(digits, power)


def exact_text(value: Rational) -> str:
    """The exact number as "num/den", or "num" for an integer: the only form in which numbers travel.

    >>> exact_text(fmpq(-6, 4)), exact_text(fmpq(7))
    ('-3/2', '7')
    """
    return str(value)


def from_exact_text(text: str) -> Rational:
    """Read back what ``exact_text`` wrote, of any length and in that form only. Raises ``ValueError``.

    >>> from_exact_text("-3/2")
    -3/2
    """
    match = _EXACT.fullmatch(text)
    if match is None:
        raise ValueError(f'"{text[:40]}" is not an exact number "num/den" or "num"')
    bottom = fmpz(match["bottom"] or "1")
    value = fmpq(fmpz(match["top"]), bottom)
    if value.q != bottom or match["bottom"] == "1":
        raise ValueError(f'"{text[:40]}" is not in lowest terms')
    return value


def as_fraction(value: Rational) -> Fraction:
    """The same number as ``fractions.Fraction``.

    >>> as_fraction(fmpq(1, 2))
    Fraction(1, 2)
    """
    return Fraction(int(value.p), int(value.q))


def decimal_text(value: Rational, digits: int = 12) -> str:
    """``value`` rounded half-even to ``digits`` significant digits; integer arithmetic throughout.

    >>> decimal_text(fmpq(2, 3)), decimal_text(fmpq(-1, 8)), decimal_text(fmpq(10) ** 20 / 3)
    ('0.666666666667', '-0.125', '3.33333333333e+19')
    """
    if value == 0:
        return "0"
    top, bottom = abs(int(value.p)), int(value.q)
    # value = top/bottom lies in [10^e, 10^(e+1)): the estimate from bit lengths is off by at most one.
    exponent = int((top.bit_length() - bottom.bit_length()) * 0.30103) - 1
    while top * 10 ** max(0, -exponent - 1) >= bottom * 10 ** max(0, exponent + 1):
        exponent += 1
    while top * 10 ** max(0, -exponent) < bottom * 10 ** max(0, exponent):
        exponent -= 1
    shift = digits - 1 - exponent
    scaled, rest = divmod(top * 10 ** max(0, shift), bottom * 10 ** max(0, -shift))
    double = 2 * rest - bottom * 10 ** max(0, -shift)
    if double > 0 or (double == 0 and scaled % 2):
        scaled += 1
    if scaled == 10**digits:
        scaled, exponent = scaled // 10, exponent + 1
    sign = "-" if value < 0 else ""
    mantissa = str(scaled)
    if -5 <= exponent < digits:
        if exponent >= 0:
            body = f"{mantissa[: exponent + 1]}.{mantissa[exponent + 1 :]}"
        else:
            body = f"0.{'0' * (-exponent - 1)}{mantissa}"
        return sign + body.rstrip("0").rstrip(".")
    body = f"{mantissa[0]}.{mantissa[1:]}".rstrip("0").rstrip(".")
    return f"{sign}{body}e{exponent:+03d}"


def common_denominator(values: Iterable[Rational]) -> int:
    """The least positive integer that makes every value integral.

    >>> common_denominator([fmpq(1, 6), fmpq(3, 4)])
    12
    """
    result = fmpz(1)
    for value in values:
        result = result.lcm(value.q)
    return int(result)
