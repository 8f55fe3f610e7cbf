"""Rational functions from text in Python syntax: what ``str(function)`` writes, and whatever means the same.

    expression = term { ("+" | "-") term }
    term       = power { ("*" | "/") power }
    power      = { "-" } ( integer | symbol | root | "(" expression ")" ) [ "**" integer ]
    root       = "sqrt" "(" [ "-" ] integer ")"                     a squarefree integer, one and the same

Nothing is evaluated by Python. Nesting and degrees are bounded; only what contains a symbol has a power.
"""

from __future__ import annotations

import math
import re
from collections.abc import Sequence

from flint import fmpq, fmpz

from ratomega.errors import InputError
from ratomega.exact.quadratic import LARGEST_RADICAND, square_root
from ratomega.exact.rational_function import RationalFunction

__all__ = ["function_text", "parse_function"]

ROOT = "sqrt"
DEEPEST_NESTING = 50
HIGHEST_DEGREE = 4000
MOST_TERMS = 200_000
MOST_BITS = 10_000_000

_TOKEN = re.compile(
    r"\s*(?:(?P<integer>[0-9]+)|(?P<name>[A-Za-z_][A-Za-z0-9_]*)|(?P<sign>\*\*|[-+*/()])|(?P<other>\S))"
)


def function_text(value: RationalFunction) -> str:
    """The factored form in Python syntax."""
    return str(value)


def parse_function(text: str, symbols: Sequence[str]) -> RationalFunction:
    """Read a rational function of ``symbols``. Raises ``ValueError``.

    >>> str(parse_function("1/(a - 1) - 1/(a + 1)", ("a",)))
    '2/((a + 1)*(a - 1))'
    """
    return _Parser(text, tuple(symbols)).whole()


class _Parser:
    def __init__(self, text: str, symbols: tuple[str, ...]) -> None:
        self.symbols = symbols
        self.shown = text[:40]
        self.tokens = [(str(m.lastgroup), m[m.lastgroup or 0]) for m in _TOKEN.finditer(text.rstrip())]
        self.tokens.append(("end", ""))
        self.place = 0
        self.depth = 0
        self.radicand = 0

    def mistake(self) -> ValueError:
        return ValueError(f'"{self.shown}" is not a rational function of {", ".join(self.symbols)}')

    def takes(self, *signs: str) -> str:
        kind, text = self.tokens[self.place]
        if kind == "sign" and text in signs:
            self.place += 1
            return text
        return ""

    def whole(self) -> RationalFunction:
        result = self.expression()
        if self.tokens[self.place][0] != "end":
            raise self.mistake()
        return result

    def expression(self) -> RationalFunction:
        result = self.term()
        while sign := self.takes("+", "-"):
            other = self.term()
            result = result + other if sign == "+" else result - other
        return self.bounded(result)

    def term(self) -> RationalFunction:
        result = self.power()
        while sign := self.takes("*", "/"):
            other = self.power()
            if sign == "/" and other.is_zero():
                raise self.mistake()
            # One divides by a function of a quadratic field with its conjugate.
            self.room(_degree(result) + _degree(other) * (2 if sign == "/" and other.radicand else 1))
            result = result * other if sign == "*" else result / other
        return result

    def power(self) -> RationalFunction:
        negative = False
        while self.takes("-"):
            negative = not negative
        result = self.primary()
        if self.takes("**"):
            kind, text = self.tokens[self.place]
            self.place += 1
            if kind != "integer" or len(text) > 5 or _degree(result) == 0:
                raise self.mistake()
            self.room(_degree(result) * int(text))
            if _bits(result) * int(text) > MOST_BITS:
                raise ValueError(f'"{self.shown}" is a rational function with too long numbers')
            result = result ** int(text)
        return -result if negative else result

    def primary(self) -> RationalFunction:
        kind, text = self.tokens[self.place]
        self.place += 1
        if kind == "integer":
            return RationalFunction.constant(fmpq(fmpz(text)), self.symbols)
        if kind == "name" and text in self.symbols:
            return RationalFunction.symbol(text, self.symbols)
        if kind == "name" and text == ROOT:
            return self.root()
        if text != "(" or self.depth >= DEEPEST_NESTING:
            raise self.mistake()
        self.depth += 1
        result = self.expression()
        if not self.takes(")"):
            raise self.mistake()
        self.depth -= 1
        return result

    def root(self) -> RationalFunction:
        if not self.takes("("):
            raise self.mistake()
        sign = -1 if self.takes("-") else 1
        kind, text = self.tokens[self.place]
        self.place += 1
        if kind != "integer" or len(text) > len(str(LARGEST_RADICAND)) or not self.takes(")"):
            raise self.mistake()
        try:
            root = square_root(sign * int(text))
        except InputError as error:
            raise ValueError(f'"{self.shown}" is a rational function with a root that is none: {error}') from error
        if self.radicand not in (0, root.d):
            raise ValueError(f'"{self.shown}" is a rational function over two quadratic fields')
        self.radicand = root.d
        return RationalFunction.constant(root, self.symbols)

    def bounded(self, value: RationalFunction) -> RationalFunction:
        self.room(_degree(value))
        return value

    def room(self, degree: int) -> None:
        """Refuse before the work is done what would have too high a degree or too many terms."""
        count = len(self.symbols)
        if degree > HIGHEST_DEGREE or math.comb(degree + count, count) > MOST_TERMS:
            raise ValueError(f'"{self.shown}" is a rational function of too high a degree')


def _bits(value: RationalFunction) -> int:
    """The length of the longest coefficient."""
    return max((int(c).bit_length() for part in value.polynomials() for c in part.coeffs()), default=0)


def _degree(value: RationalFunction) -> int:
    top, bottom, second = value.polynomials()
    return max(0, int(top.total_degree()), int(second.total_degree())) + int(bottom.total_degree())
