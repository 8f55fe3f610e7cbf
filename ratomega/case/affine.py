"""Affine expressions in eps1, eps2 and t with exact coefficients (rational or of a quadratic field): what every
parameter of a case is.

``Affine`` is a value; ``case.expression`` reads it from text. ``str`` writes the canonical text, which reads back
to the same value. On a path, ``Affine.on`` turns the expression into ``c + d t``.
"""

from __future__ import annotations

from dataclasses import dataclass

from ratomega.exact.path import Linear, sum_text, term_text
from ratomega.exact.quadratic import Number, number_text
from ratomega.exact.rational import ONE, ZERO

__all__ = ["Affine"]


@dataclass(frozen=True, slots=True)
class Affine:
    """``constant + eps1*E1 + eps2*E2 + t*T`` with exact coefficients.

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

    def __add__(self, other: Affine) -> Affine:
        return Affine(
            self.constant + other.constant, self.eps1 + other.eps1, self.eps2 + other.eps2, self.t + other.t
        )

    def __neg__(self) -> Affine:
        return self.times(-ONE)

    def __sub__(self, other: Affine) -> Affine:
        return self + (-other)

    def times(self, factor: Number) -> Affine:
        return Affine(self.constant * factor, self.eps1 * factor, self.eps2 * factor, self.t * factor)

    def is_number(self) -> bool:
        """No symbol occurs: the value stays fixed while the background moves."""
        return self.eps1 == 0 and self.eps2 == 0 and self.t == 0

    def on(self, eps1: Linear, eps2: Linear) -> Linear:
        """The expression on the path (eps1, eps2)."""
        return Linear(
            self.constant + self.eps1 * eps1.constant + self.eps2 * eps2.constant,
            self.eps1 * eps1.slope + self.eps2 * eps2.slope + self.t,
        )

    def numbers(self) -> tuple[Number, ...]:
        """All coefficients."""
        return self.constant, self.eps1, self.eps2, self.t

    def key(self) -> tuple[str, str, str, str]:
        """Hashable canonical form (``fmpq`` hashes, but text is stable across processes)."""
        return number_text(self.constant), number_text(self.eps1), number_text(self.eps2), number_text(self.t)

    def __str__(self) -> str:
        terms = [number_text(self.constant)] if self.constant != 0 else []
        for coefficient, name in ((self.eps1, "eps1"), (self.eps2, "eps2"), (self.t, "t")):
            if coefficient != 0:
                terms.append(term_text(coefficient, name))
        return sum_text(terms)
