"""Numbers x + y sqrt(d) of one quadratic field: what lies beyond the rationals.

d is a squarefree integer other than 0 and 1, positive or negative; sqrt(-1) is i. Normal form: a number with y = 0 *is*
a ``Rational``, so every ``Quadratic`` has y != 0, is different from every rational, and zero tests are exact. Rational
arithmetic never passes through here. Two different fields are never mixed: that raises ``ValueError``.
"""

from __future__ import annotations

import cmath
import math
import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import TypeGuard, overload

from flint import fmpq, fmpz

from ratomega.errors import InputError
from ratomega.exact.rational import (
    LONGEST_TEXT,
    ONE,
    ZERO,
    Rational,
    as_fraction,
    as_rational,
    decimal_text,
    exact_text,
    from_exact_text,
)

__all__ = [
    "LARGEST_RADICAND",
    "Number",
    "Quadratic",
    "approximate_text",
    "as_integer",
    "as_number",
    "from_number_text",
    "from_parts",
    "is_quadratic",
    "is_whole",
    "number_text",
    "one_field",
    "only_rational",
    "parts_in",
    "quadratic",
    "rational_parts",
    "split_square",
    "square_root",
]

# Squarefreeness is found by factoring; up to here that costs microseconds.
LARGEST_RADICAND = 10**12

_TERM = re.compile(
    r"""\s*(?P<sign>[+-]?)\s*(?=[0-9.is])
    (?:(?P<number>[0-9.]+(?:\s*/\s*[0-9]+)?)(?:\s*\*\s*(?=[is])|(?!\s*[is*/0-9.])))?
    (?P<root>i|sqrt\((?P<d>-?[0-9]{1,13})\))?(?:(?<=[i)])\s*/\s*(?P<below>[0-9]+))?\s*(?=[+-]|$)""",
    re.VERBOSE | re.ASCII,
)
_TEXT = re.compile(r"(?:(?P<x>-?[0-9/]+) (?P<sign>[+-]) )?(?P<y>-?[0-9/]+)\*sqrt\((?P<d>-?[1-9][0-9]*)\)")


@dataclass(frozen=True, slots=True)
class Quadratic:
    """The exact number x + y sqrt(d) with y != 0. Build it with ``quadratic`` or by arithmetic from ``square_root``.

    >>> i = square_root(-1)
    >>> (1 + i) * (1 - i), str(ONE / (2 + i)), str((1 + i) ** 3), complex(ONE / (2 + i))
    (2, '2/5 - 1/5*sqrt(-1)', '-2 + 2*sqrt(-1)', (0.4-0.2j))
    """

    x: Rational
    y: Rational
    d: int

    def conjugate(self) -> Quadratic:
        """x - y sqrt(d)."""
        return Quadratic(self.x, -self.y, self.d)

    def norm(self) -> Rational:
        """The product with the conjugate, x^2 - d y^2: never zero."""
        return self.x * self.x - self.y * self.y * self.d

    def _same_field(self, other: Quadratic) -> None:
        if self.d != other.d:
            raise ValueError(f"sqrt({self.d}) and sqrt({other.d}) do not lie in one quadratic field")

    @overload
    def __add__(self, other: int) -> Quadratic: ...

    @overload
    def __add__(self, other: Number) -> Number: ...

    def __add__(self, other: Number | int) -> Number:
        if isinstance(other, Quadratic):
            self._same_field(other)
            return quadratic(self.x + other.x, self.y + other.y, self.d)
        return Quadratic(self.x + other, self.y, self.d) if isinstance(other, (fmpq, int)) else NotImplemented

    def __radd__(self, other: Rational | int) -> Quadratic:
        return Quadratic(self.x + other, self.y, self.d)

    def __neg__(self) -> Quadratic:
        return Quadratic(-self.x, -self.y, self.d)

    @overload
    def __sub__(self, other: int) -> Quadratic: ...

    @overload
    def __sub__(self, other: Number) -> Number: ...

    def __sub__(self, other: Number | int) -> Number:
        if isinstance(other, Quadratic):
            return self + (-other)
        return Quadratic(self.x - other, self.y, self.d) if isinstance(other, (fmpq, int)) else NotImplemented

    def __rsub__(self, other: Rational | int) -> Quadratic:
        return Quadratic(other - self.x, -self.y, self.d)

    def __mul__(self, other: Number | int) -> Number:
        if isinstance(other, Quadratic):
            self._same_field(other)
            real = self.x * other.x + self.y * other.y * self.d
            return quadratic(real, self.x * other.y + self.y * other.x, self.d)
        return quadratic(self.x * other, self.y * other, self.d) if isinstance(other, (fmpq, int)) else NotImplemented

    def __rmul__(self, other: Rational | int) -> Number:
        return self * other

    def __truediv__(self, other: Number | int) -> Number:
        if isinstance(other, Quadratic):
            return self * other.conjugate() * (ONE / other.norm())
        return Quadratic(self.x / other, self.y / other, self.d) if isinstance(other, (fmpq, int)) else NotImplemented

    def __rtruediv__(self, other: Rational | int) -> Number:
        return self.conjugate() * (other / self.norm())

    def __pow__(self, exponent: int) -> Number:
        result: Number = ONE
        for _ in range(abs(exponent)):
            result = result * self
        return result if exponent >= 0 else ONE / result

    def __complex__(self) -> complex:
        return float(as_fraction(self.x)) + float(as_fraction(self.y)) * cmath.sqrt(self.d)

    def __str__(self) -> str:
        root = f"{abs(self.y)}*sqrt({self.d})"
        if self.x == 0:
            return f"-{root}" if self.y < 0 else root
        return f"{self.x} {'-' if self.y < 0 else '+'} {root}"

    __repr__ = __str__


Number = Rational | Quadratic


def is_quadratic(value: object) -> TypeGuard[Quadratic]:
    """Is this number not rational?"""
    return isinstance(value, Quadratic)


def quadratic(x: Rational, y: Rational, d: int) -> Number:
    """x + y sqrt(d) in normal form; d must be squarefree and is not checked here (``square_root`` does)."""
    return Quadratic(x, y, d) if y != 0 else x


def split_square(n: int) -> tuple[int, int]:
    """(s, d) with n = s^2 d and d squarefree, for n != 0.

    >>> split_square(8), split_square(-12), split_square(49)
    ((2, 2), (2, -3), (7, 1))
    """
    root, rest = 1, -1 if n < 0 else 1
    for prime, exponent in fmpz(abs(n)).factor():
        root *= int(prime) ** (int(exponent) // 2)
        rest *= int(prime) ** (int(exponent) % 2)
    return root, rest


def square_root(d: int, where: str = "") -> Quadratic:
    """sqrt(d) for a squarefree integer d. Raises ``InputError`` that suggests the squarefree form.

    >>> str(square_root(-7))
    '1*sqrt(-7)'
    >>> square_root(8)
    Traceback (most recent call last):
    ...
    ratomega.errors.InputError: sqrt(8): 8 is not squarefree; write 2*sqrt(2)
    """
    if abs(d) > LARGEST_RADICAND:
        # Not shown: Python refuses to write very long integers.
        raise InputError.single(f"numbers under a root go up to {LARGEST_RADICAND}", where)
    if d == 0:
        raise InputError.single("sqrt(0) is 0; write 0", where)
    root, rest = split_square(d)
    if rest == 1:
        raise InputError.single(f"sqrt({d}) is {root}; write {root}", where)
    if root > 1:
        raise InputError.single(f"sqrt({d}): {d} is not squarefree; write {root}*sqrt({rest})", where)
    return Quadratic(ZERO, ONE, d)


def as_number(value: object, where: str = "") -> Number:
    """Return ``value`` as an exact number: everything that ``as_rational`` accepts, ``Quadratic``, exact sympy numbers
    of a quadratic field, and text such as "1 + i/2", "-2*sqrt(5)/3". Raises ``InputError`` naming ``where``.

    >>> import sympy
    >>> str(as_number(sympy.sqrt(21) / 7)), str(as_number("1 - i/2")), as_number("1/3")
    ('1/7*sqrt(21)', '1 - 1/2*sqrt(-1)', 1/3)
    """
    if isinstance(value, Quadratic):
        return value
    if isinstance(value, complex):
        message = f'the complex {value!r} is not exact; write it as text, for example "1/3 + i/2"'
        raise InputError.single(message, where)
    if isinstance(value, str) and ("sqrt" in value or "i" in value):
        return _from_terms(value, where)
    if type(value).__module__.startswith("sympy.") and not getattr(value, "is_Rational", True):
        return _from_sympy(value, where)
    return as_rational(value, where)


def _from_terms(text: str, where: str) -> Number:
    """The sum of rational multiples of 1 and of one root, written as in a case."""
    result: Number = ZERO
    place = 0
    while place < len(text):
        match = _TERM.match(text, place) if len(text) <= LONGEST_TEXT else None
        if match is None or (place > 0 and not match["sign"]):
            message = f'"{text[:40]}" is not an exact number; write for example "1 + i/2" or "-2*sqrt(5)/3"'
            raise InputError.single(message, where)
        term: Number = as_rational(f"{match['sign'] or ''}{match['number'] or '1'}", where)
        if match["root"]:
            d = -1 if match["root"] == "i" else int(match["d"])
            root = square_root(d, where)
            if isinstance(result, Quadratic) and result.d != d:
                raise InputError.single(two_fields(result.d, d), where)
            term = root * term * as_rational(f"1/{match['below'] or '1'}", where)
        result = result + term
        place = match.end()
    return result


def _from_sympy(value: object, where: str) -> Number:
    """A sympy number x + y sqrt(d); its terms are rational multiples of 1 and of one square root."""
    if not getattr(value, "is_number", False) or getattr(value, "is_Float", False):
        raise InputError.single(f"expected an exact number, not {type(value).__name__}", where)
    result: Number = ZERO
    for unit, coefficient in value.expand().as_coefficients_dict().items():  # type: ignore[attr-defined]
        factor = as_rational(coefficient, where)
        square = unit**2
        if unit == 1:
            result = result + factor
        elif getattr(square, "is_Integer", False):
            root = square_root(int(square), where)
            if isinstance(result, Quadratic) and result.d != root.d:
                raise InputError.single(f"{value} does not lie in one quadratic field", where)
            result = result + factor * root
        else:
            raise InputError.single(f"{value} is not an exact number x + y*sqrt(d)", where)
    return result


def one_field(values: Iterable[Number]) -> int:
    """The d of the field in which all values lie, 0 when all are rational. Raises ``InputError`` when there are two.

    >>> one_field([ONE, square_root(5)]), one_field([ONE])
    (5, 0)
    """
    found = 0
    for value in values:
        if isinstance(value, Quadratic) and value.d != found:
            if found:
                raise InputError.single(two_fields(found, value.d))
            found = value.d
    return found


def two_fields(first: int, second: int) -> str:
    """What is wrong when both roots occur."""
    one, two = (("i" if d == -1 else f"sqrt({d})") for d in (first, second))
    return f"{one} and {two} occur together; all numbers of a case lie in one quadratic field"


def rational_parts(value: Number) -> tuple[Rational, ...]:
    """(x,) of a rational number, (x, y) of a quadratic one."""
    return (value.x, value.y) if isinstance(value, Quadratic) else (value,)


def parts_in(value: Number, radicand: int) -> tuple[Rational, ...]:
    """(x,) where all numbers are rational (radicand 0), (x, y) in a quadratic field, also of a rational number.

    >>> parts_in(ONE, 0), parts_in(ONE, 5)
    ((1,), (1, 0))
    """
    if isinstance(value, Quadratic):
        return value.x, value.y
    return (value, ZERO) if radicand else (value,)


def from_parts(parts: Sequence[Rational], radicand: int) -> Number:
    """Back from ``parts_in``."""
    return quadratic(parts[0], parts[1], radicand) if radicand else parts[0]


def only_rational(value: Number) -> Rational:
    """A number that is rational by what was checked before (the background is). Raises ``ValueError`` otherwise."""
    if isinstance(value, Quadratic):
        raise ValueError(f"{value} is not rational")
    return value


def is_whole(value: Number) -> bool:
    """Has the number integer parts x and y?"""
    return all(part.q == 1 for part in rational_parts(value))


def as_integer(value: Number) -> int | None:
    """The number as ``int``, None when it is no integer.

    >>> as_integer(Rational(4, 2)), as_integer(Rational(1, 2)), as_integer(square_root(3))
    (2, None, None)
    """
    if isinstance(value, Quadratic) or value.q != 1:
        return None
    return int(value.p)


def number_text(value: Number) -> str:
    """The one form in which numbers travel: "num/den" or "num", else "x + y*sqrt(d)", "x - y*sqrt(d)", "y*sqrt(d)".

    >>> number_text(quadratic(Rational(-83, 72), Rational(-4, 3), -1)), number_text(Rational(1, 2))
    ('-83/72 - 4/3*sqrt(-1)', '1/2')
    """
    return exact_text(value) if not isinstance(value, Quadratic) else str(value)


def from_number_text(text: str) -> Number:
    """Read back what ``number_text`` wrote, in that form only. Raises ``ValueError``.

    >>> from_number_text("-83/72 - 4/3*sqrt(-1)") == quadratic(Rational(-83, 72), Rational(-4, 3), -1)
    True
    """
    if not text.endswith(")"):
        return from_exact_text(text)
    match = _TEXT.fullmatch(text)
    if match is None or (match["x"] is not None and (match["y"].startswith("-") or match["x"] == "0")):
        raise ValueError(f'"{text[:40]}" is not an exact number "x + y*sqrt(d)"')
    d, y = int(match["d"]), from_exact_text(match["y"])
    if y == 0 or abs(d) > LARGEST_RADICAND or d == 1 or split_square(d)[0] != 1:
        raise ValueError(f'"{text[:40]}" is not in normal form: y != 0, d squarefree')
    return Quadratic(from_exact_text(match["x"] or "0"), -y if match["sign"] == "-" else y, d)


def approximate_text(value: Number, digits: int = 12) -> str:
    """A decimal to ``digits`` significant digits, each of a complex number's two parts.

    >>> approximate_text(square_root(2)), approximate_text(quadratic(Rational(1, 2), Rational(-2, 3), -3))
    ('1.41421356237', '0.5 - 1.15470053838*i')
    """
    if not isinstance(value, Quadratic):
        return decimal_text(value, digits)
    if value.d > 0:
        return _real_text(value.x, value.y, value.d, digits)
    size = _real_text(ZERO, abs(value.y), -value.d, digits)
    imaginary = "i" if size == "1" else f"{size}*i"
    if value.x == 0:
        return f"-{imaginary}" if value.y < 0 else imaginary
    return f"{decimal_text(value.x, digits)} {'-' if value.y < 0 else '+'} {imaginary}"


def _real_text(x: Rational, y: Rational, d: int, digits: int) -> str:
    """x + y sqrt(d) for d >= 1, rounded correctly: the root is enclosed until both ends round to the same text."""
    if d == 1:
        return decimal_text(x + y, digits)
    bits = 64
    while True:
        floor = math.isqrt(d << (2 * bits))
        low, high = (decimal_text(x + y * fmpq(n, fmpz(1) << bits), digits) for n in (floor, floor + 1))
        if low == high:
            return low
        bits *= 2
