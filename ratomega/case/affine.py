"""Affine expressions in eps1, eps2, t and the symbols of a case, with exact coefficients (rational or of a quadratic
field): what every parameter of a case is.

``Affine`` is a value; ``case.expression`` reads it from text. ``str`` writes the canonical text, which reads back
to the same value. On a path, ``Affine.on`` turns the expression into ``c + d t``.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from ratomega.exact.path import Linear, sum_text, term_text
from ratomega.exact.quadratic import Number, number_text
from ratomega.exact.rational import ONE, ZERO

__all__ = ["Affine"]


@dataclass(frozen=True, slots=True)
class Affine:
    """``constant + eps1*E1 + eps2*E2 + t*T`` with exact coefficients, and terms in free parameters by their names.

    >>> from ratomega.exact.rational import Rational
    >>> x = Affine(constant=Rational(1, 2), eps2=Rational(2), t=Rational(-1, 7))
    >>> str(x), str(-x)
    ('1/2 + 2*eps2 - t/7', '-1/2 - 2*eps2 + t/7')
    >>> str(x.on(Linear(ONE), Linear(ONE, ONE)))
    '5/2 + 13*t/7'
    """

    constant: Number = ZERO
    eps1: Number = ZERO
    eps2: Number = ZERO
    t: Number = ZERO
    symbols: tuple[tuple[str, Number], ...] = ()

    def __add__(self, other: Affine) -> Affine:
        return Affine(
            self.constant + other.constant,
            self.eps1 + other.eps1,
            self.eps2 + other.eps2,
            self.t + other.t,
            _collected((*self.symbols, *other.symbols)),
        )

    def __neg__(self) -> Affine:
        return self.times(-ONE)

    def __sub__(self, other: Affine) -> Affine:
        return self + (-other)

    def times(self, factor: Number) -> Affine:
        symbols = _collected((name, x * factor) for name, x in self.symbols)
        return Affine(self.constant * factor, self.eps1 * factor, self.eps2 * factor, self.t * factor, symbols)

    def is_number(self) -> bool:
        """No symbol occurs: the value stays fixed while the background moves."""
        return self.eps1 == 0 and self.eps2 == 0 and self.t == 0 and not self.symbols

    def on(self, eps1: Linear, eps2: Linear) -> Linear:
        """The expression on the path (eps1, eps2). Raises ``ValueError`` when a symbol occurs."""
        if self.symbols:
            raise ValueError(f"{self} contains the symbol {self.symbols[0][0]}")
        return Linear(
            self.constant + self.eps1 * eps1.constant + self.eps2 * eps2.constant,
            self.eps1 * eps1.slope + self.eps2 * eps2.slope + self.t,
        )

    def numbers(self) -> tuple[Number, ...]:
        """All coefficients."""
        return self.constant, self.eps1, self.eps2, self.t, *(x for _, x in self.symbols)

    def coefficient(self, symbol: str) -> Number:
        """The coefficient of a symbol."""
        return dict(self.symbols).get(symbol, ZERO)

    def at(self, values: Mapping[str, Affine]) -> Affine:
        """The expression with symbols replaced; those without a value stay.

        >>> from ratomega.exact.rational import Rational
        >>> str(Affine(symbols=(("a", Rational(2)),)).at({"a": Affine(Rational(1, 2), t=ONE)}))
        '1 + 2*t'
        """
        result = Affine(self.constant, self.eps1, self.eps2, self.t)
        for name, x in self.symbols:
            result += values.get(name, Affine(symbols=((name, ONE),))).times(x)
        return result

    def key(self) -> tuple[str, ...]:
        """Hashable canonical form (``fmpq`` hashes, but text is stable across processes)."""
        known = number_text(self.constant), number_text(self.eps1), number_text(self.eps2), number_text(self.t)
        return (*known, *(text for name, x in self.symbols for text in (name, number_text(x))))

    def __str__(self) -> str:
        terms = [number_text(self.constant)] if self.constant != 0 else []
        named = [(x, name) for name, x in self.symbols]
        for coefficient, name in (*named, (self.eps1, "eps1"), (self.eps2, "eps2"), (self.t, "t")):
            if coefficient != 0:
                terms.append(term_text(coefficient, name))
        return sum_text(terms)


def _collected(terms: Iterable[tuple[str, Number]]) -> tuple[tuple[str, Number], ...]:
    """Terms in symbols in normal form: by name, no zero among them."""
    table: dict[str, Number] = {}
    for name, x in terms:
        table[name] = table.get(name, ZERO) + x
    return tuple((name, table[name]) for name in sorted(table) if table[name] != 0)
