"""Affine expressions as text: "3/11", "eps1/2 + 2*eps2 - t/7", "0.25", "-(eps1+eps2)/2", "1 + 2*i/3", "sqrt(21)/7".

The grammar, read by recursive descent; nothing is ever evaluated by Python:

    expression = term { ("+" | "-") term }
    term       = factor { ("*" | "/") factor }
    factor     = { "+" | "-" } ( number | name | "i" | "sqrt" "(" expression ")" | "(" expression ")" )

One side of a product is a number, and so is a divisor. The number under a root is a squarefree integer, and one
expression holds one root: its numbers lie in one quadratic field (i is sqrt(-1)). Length, nesting and the size of the
numbers are bounded, so that the cost is at most quadratic in a length of 2000 characters.
"""

from __future__ import annotations

import re
from collections.abc import Collection
from dataclasses import dataclass

from ratomega.case.affine import Affine
from ratomega.case.wording import nearest, quoted, shortened
from ratomega.errors import InputError
from ratomega.exact.quadratic import (
    LARGEST_RADICAND,
    Number,
    as_integer,
    as_number,
    is_quadratic,
    rational_parts,
    split_square,
    square_root,
    two_fields,
)
from ratomega.exact.rational import ONE, Rational, unsigned

__all__ = ["DEEPEST_NESTING", "INNER", "LONGEST_EXPRESSION", "MOST_DIGITS", "SYMBOLS", "as_affine", "parse_affine"]

SYMBOLS = ("eps1", "eps2", "t")
INNER = "u"
"""A second path parameter, taken to 0 before t."""
IMAGINARY, ROOT = "i", "sqrt"
_UNITS = {"eps1": Affine(eps1=ONE), "eps2": Affine(eps2=ONE), "t": Affine(t=ONE)}

LONGEST_EXPRESSION = 2000
DEEPEST_NESTING = 50
# With this bound the canonical text of every expression that was read is itself short enough to be read.
MOST_DIGITS = 200

_TOKEN = re.compile(
    r"(?P<space>[ \t\r\n]+)"
    r"|(?P<number>(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?)"
    r"|(?P<name>[A-Za-z_][A-Za-z0-9_]*)"
    r"|(?P<power>\*\*|\^)"
    r"|(?P<sign>[-+*/()])"
    r"|(?P<other>.)",
    re.DOTALL,
)

# Characters that people type or paste for what is written otherwise here.
_INSTEAD = {"−": "-", "–": "-", "·": "*", "×": "*", "÷": "/", "ε": "eps", "ϵ": "eps", ",": "."}


def as_affine(value: object, *, symbols: Collection[str] = SYMBOLS, where: str = "") -> Affine:
    """Return ``value`` as an affine expression: text is parsed, an exact number becomes a constant.

    Accepted: text, everything that ``as_number`` accepts, and ``Affine``. Floats are refused.
    Raises ``InputError`` naming ``where``.

    >>> str(as_affine("2*eps1 - 0.5")), str(as_affine(3))
    ('-1/2 + 2*eps1', '3')
    """
    if isinstance(value, str):
        return parse_affine(value, symbols=symbols, where=where)
    result = value if isinstance(value, Affine) else Affine(as_number(value, where))
    for name in SYMBOLS:
        if name not in symbols and getattr(result, name) != 0:
            raise InputError.single(_not_here(quoted(str(result)), name, symbols), where)
    for name, _ in result.symbols:
        if name not in symbols:
            raise InputError.single(_not_here(quoted(str(result)), name, symbols), where)
    if _too_long(result):
        raise InputError.single(_too_many_digits("a number"), where)
    return result


def parse_affine(text: str, *, symbols: Collection[str] = SYMBOLS, where: str = "") -> Affine:
    """Read an affine expression in ``symbols`` (some of eps1, eps2, t, and free parameters of any other name);
    coefficients are rational or of one quadratic field.

    ``parse_affine(str(x)) == x`` for every expression within the bounds. Raises ``InputError`` naming ``where``, with
    one sentence about the first mistake of the text.

    >>> str(parse_affine("-(eps1 + eps2)/2 + 1e-1")), str(parse_affine("2*(t - 1/3)"))
    ('1/10 - eps1/2 - eps2/2', '-2/3 + 2*t')
    >>> str(parse_affine("(1 + i)*(1 - 2*i)")), str(parse_affine("(eps1 - 1)/sqrt(5)"))
    ('3 - 1*sqrt(-1)', '-1/5*sqrt(5) + 1/5*sqrt(5)*eps1')
    >>> parse_affine("eps1*eps2")
    Traceback (most recent call last):
    ...
    ratomega.errors.InputError: "eps1*eps2" multiplies eps1 by eps2; one side of a product must be a number
    """
    if len(text) > LONGEST_EXPRESSION:
        message = f"{quoted(text)} has {len(text)} characters; an expression has at most {LONGEST_EXPRESSION}"
        raise InputError.single(message, where)
    result = _Parser(text, symbols, where).whole()
    if _too_long(result):
        raise InputError.single(_too_many_digits(quoted(text)), where)
    return result


def _too_long(value: Affine) -> bool:
    bound = 10**MOST_DIGITS
    numbers = [part for number in value.numbers() for part in rational_parts(number)]
    return any(abs(x.p) >= bound or x.q >= bound for x in numbers)


def _too_many_digits(subject: str) -> str:
    return f"{subject} leads to a numerator or denominator of more than {MOST_DIGITS} digits, the most that is read"


def _not_here(shown: str, name: str, symbols: Collection[str]) -> str:
    if set(symbols) == {"t"}:
        return f"{shown} contains {name}, but in eps1 and eps2 themselves only t may occur"
    allowed = ", ".join(symbols) or "no symbol at all"
    return f"{shown} contains {name}, but here only numbers and {allowed} may occur"


def _root_of_fraction(value: Number) -> str:
    """sqrt(p/q) = sqrt(p q)/q, in squarefree form."""
    (x,) = rational_parts(value)
    product, bottom = int(x.p) * int(x.q), int(x.q)
    if abs(product) > LARGEST_RADICAND:
        return "under a root stands an integer"
    size, d = split_square(product)
    factor = Rational(size, bottom)
    return f"under a root stands an integer; write {factor}" + (f"*sqrt({d})" if d != 1 else "")


@dataclass(frozen=True, slots=True)
class _Token:
    kind: str  # "number", "name", "sign", "other" or "end"
    text: str


class _Parser:
    """One text; ``place`` counts the tokens consumed."""

    def __init__(self, text: str, symbols: Collection[str], where: str) -> None:
        self.text = text
        self.symbols = symbols
        self.where = where
        self.shown = quoted(text)
        self.place = 0
        self.depth = 0
        self.radicand = 0
        self.tokens = self.tokenized()

    def mistake(self, message: str) -> InputError:
        return InputError.single(f"{self.shown} {message}", self.where)

    def tokenized(self) -> list[_Token]:
        tokens = [_Token(str(m.lastgroup), m[0]) for m in _TOKEN.finditer(self.text) if m.lastgroup != "space"]
        if any(token.kind == "power" for token in tokens):
            raise self.mistake("contains a power, which is not read; an expression has only + - * / and parentheses")
        if not tokens:
            example = '"1 + t"' if "eps1" not in self.symbols else '"1/3 + eps1"'
            raise InputError.single(f"the expression is empty; write for example {example}", self.where)
        return [*tokens, _Token("end", "")]

    def strange(self, character: str) -> InputError:
        shown = quoted(character)
        if character in _INSTEAD:
            return self.mistake(f"contains {shown}; write {quoted(_INSTEAD[character])} instead")
        if character.isdigit():
            return self.mistake(f"contains {shown}; the digits are 0 to 9")
        return self.mistake(f"contains {shown}; an expression has only numbers, names, + - * / and parentheses")

    @property
    def next(self) -> _Token:
        return self.tokens[self.place]

    def take(self) -> _Token:
        token = self.tokens[self.place]
        self.place += 1
        return token

    def takes(self, signs: str) -> str:
        """The next token when it is one of ``signs``, consumed; else empty."""
        token = self.next
        return self.take().text if token.kind == "sign" and token.text in signs else ""

    def whole(self) -> Affine:
        result = self.expression()
        if self.next.kind != "end":
            # An expression stops before an operand or a closing parenthesis; both are refused elsewhere but this one.
            raise self.mistake('has a ")" without "("')
        return result

    def expression(self) -> Affine:
        result = self.term()
        while sign := self.takes("+-"):
            other = self.term()
            result = result + other if sign == "+" else result - other
        return result

    def term(self) -> Affine:
        result = self.factor()
        while sign := self.takes("*/"):
            other = self.factor()
            result = self.product(result, other) if sign == "*" else self.quotient(result, other)
        return result

    def product(self, left: Affine, right: Affine) -> Affine:
        if right.is_number():
            return left.times(right.constant)
        if left.is_number():
            return right.times(left.constant)
        by = f"{shortened(str(left))} by {shortened(str(right))}"
        raise self.mistake(f"multiplies {by}; one side of a product must be a number")

    def quotient(self, left: Affine, right: Affine) -> Affine:
        if not right.is_number():
            raise self.mistake(f"divides by {shortened(str(right))}; a divisor must be a number")
        if right.constant == 0:
            raise self.mistake("divides by zero")
        return left.times(ONE / right.constant)

    def factor(self) -> Affine:
        negative = False
        while sign := self.takes("+-"):
            negative ^= sign == "-"
        result = self.primary()
        self.expect_operator()
        return -result if negative else result

    def primary(self) -> Affine:
        token = self.take()
        if token.kind == "number":
            return Affine(self.number(token.text))
        if token.kind == "name":
            return self.named(token.text)
        if token.text == "(":
            return self.parenthesis()
        if token.kind == "end":
            raise self.mistake("ends where a number or a name is expected")
        if token.kind == "other":
            raise self.strange(token.text)
        raise self.mistake(f"has {quoted(token.text)} where a number or a name is expected")

    def number(self, text: str) -> Rational:
        if len(text) > 2 * MOST_DIGITS:
            raise self.mistake(f"contains a number of {len(text)} characters; at most {MOST_DIGITS} digits are read")
        return unsigned(text, self.where)

    def named(self, name: str) -> Affine:
        if name == ROOT:
            return self.root()
        if self.next.text == "(" and name not in (*SYMBOLS, INNER, IMAGINARY):
            message = f"calls the function {quoted(name)}; functions are not read, only numbers, sqrt(d) and + - * /"
            raise self.mistake(message)
        if name == IMAGINARY:
            return Affine(self.of_field(-1))
        if name in self.symbols:
            return _UNITS[name] if name in _UNITS else Affine(symbols=((name, ONE),))
        if name in SYMBOLS:
            raise InputError.single(_not_here(self.shown, name, self.symbols), self.where)
        if set(self.symbols) <= {"t", INNER}:
            message = f"contains the unknown name {quoted(name)}; only t may occur in eps1 and eps2 themselves, and u"
            raise self.mistake(message)
        if name in ("I", "j", "J"):
            raise self.mistake(f"contains the unknown name {quoted(name)}; the imaginary unit is written i")
        hint = nearest(name, self.symbols) or f"; the names known here: {', '.join([*self.symbols, IMAGINARY])}"
        raise self.mistake(f"contains the unknown name {quoted(name)}{hint}")

    def of_field(self, d: int) -> Number:
        """sqrt(d), d checked to be squarefree; all roots of one expression agree."""
        result = square_root(d, self.where)
        if self.radicand not in (0, d):
            raise InputError.single(f"{self.shown}: {two_fields(self.radicand, d)}", self.where)
        self.radicand = d
        return result

    def root(self) -> Affine:
        if not self.takes("("):
            raise self.mistake(f'has "{ROOT}" without "("; write for example "sqrt(2)"')
        inside = self.parenthesis()
        if not inside.is_number() or is_quadratic(inside.constant):
            raise self.mistake(f"takes the root of {shortened(str(inside))}; under a root stands an integer")
        d = as_integer(inside.constant)
        if d is None:
            raise self.mistake(f"takes the root of {shortened(str(inside))}; {_root_of_fraction(inside.constant)}")
        return Affine(self.of_field(d))

    def parenthesis(self) -> Affine:
        self.depth += 1
        if self.depth > DEEPEST_NESTING:
            raise self.mistake(f"is nested deeper than {DEEPEST_NESTING} parentheses")
        if self.next.text == ")":
            raise self.mistake('has "()" with nothing inside')
        result = self.expression()
        if not self.takes(")"):
            raise self.mistake('has a "(" that is never closed')
        self.depth -= 1
        return result

    def expect_operator(self) -> None:
        """A number, a name or "(" right behind an operand: a product sign was left out, or a number is malformed."""
        before, token = self.tokens[self.place - 1], self.next
        if token.kind == "other":
            raise self.strange(token.text)
        if before.kind == "number" and token.kind == "name" and token.text.startswith("_"):
            raise self.mistake('contains "_" inside a number; write the digits alone')
        if before.kind == token.kind == "number":
            raise self.mistake(f"has {quoted(f'{before.text} {token.text}')} where one number is expected")
        if token.kind == "name" and token.text not in (*self.symbols, IMAGINARY, ROOT):
            self.named(self.take().text)
        if token.kind in ("number", "name") or token.text == "(":
            right = "(...)" if token.text == "(" else token.text
            left = "(...)" if before.text == ")" else before.text
            raise self.mistake(f"lacks an operator; write {quoted(f'{left}*{right}')}")
