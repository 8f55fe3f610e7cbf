"""The path to the limit point: every parameter is c + d t, and the answer is the value at t -> 0.

This module is the one place that says what a parameter on the path is. ``SMALL_PARAMETERS`` is the ordered list of
path parameters, the first taken to zero last; one is implemented.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from ratomega.exact.quadratic import Number, Quadratic, as_integer, number_text, only_rational
from ratomega.exact.rational import ZERO

__all__ = ["SMALL_PARAMETERS", "Linear", "integer_combination", "leaves_the_ratio", "sum_text", "term_text"]

SMALL_PARAMETERS = ("t",)


@dataclass(frozen=True, slots=True)
class Linear:
    """The exact linear form ``constant + slope t``.

    >>> from ratomega.exact.rational import Rational
    >>> x = Linear(Rational(1, 2), Rational(1))
    >>> str(x + x), (x - x).is_zero()
    ('1 + 2*t', True)
    """

    constant: Number
    slope: Number = ZERO

    def __add__(self, other: Linear) -> Linear:
        return Linear(self.constant + other.constant, self.slope + other.slope)

    def __sub__(self, other: Linear) -> Linear:
        return Linear(self.constant - other.constant, self.slope - other.slope)

    def __neg__(self) -> Linear:
        return Linear(-self.constant, -self.slope)

    def scaled(self, factor: Number | int) -> Linear:
        return Linear(self.constant * factor, self.slope * factor)

    def is_zero(self) -> bool:
        """True when the form vanishes all along the path, not only at its end."""
        return self.constant == 0 and self.slope == 0

    def __str__(self) -> str:
        terms = [number_text(self.constant)] if self.constant != 0 else []
        if self.slope != 0:
            terms.append(term_text(self.slope, "t"))
        return sum_text(terms)


def term_text(coefficient: Number, name: str) -> str:
    """A coefficient times a name, as it is read back.

    >>> from ratomega.exact.rational import Rational
    >>> term_text(Rational(-3, 2), "t"), term_text(Quadratic(ZERO, Rational(1, 2), 5), "t")
    ('-3*t/2', '1/2*sqrt(5)*t')
    """
    if isinstance(coefficient, Quadratic):
        return f"{coefficient}*{name}" if coefficient.x == 0 else f"({coefficient})*{name}"
    top, bottom = coefficient.p, coefficient.q
    head = name if top == 1 else f"-{name}" if top == -1 else f"{top}*{name}"
    return head if bottom == 1 else f"{head}/{bottom}"


def sum_text(terms: Sequence[str]) -> str:
    """Terms joined by their signs; "0" when there is none."""
    if not terms:
        return "0"
    return terms[0] + "".join(f" - {x[1:]}" if x.startswith("-") else f" + {x}" for x in terms[1:])


def leaves_the_ratio(eps1: Linear, eps2: Linear) -> bool:
    """Does the path leave the ratio eps2/eps1 of its end point to first order?

    >>> from ratomega.exact.rational import Rational
    >>> leaves_the_ratio(Linear(Rational(1)), Linear(Rational(1), Rational(1)))
    True
    >>> leaves_the_ratio(Linear(Rational(1), Rational(2)), Linear(Rational(1), Rational(2)))
    False
    """
    return bool(eps1.constant * eps2.slope != eps2.constant * eps1.slope)


def integer_combination(form: Linear, eps1: Linear, eps2: Linear) -> tuple[int, int] | None:
    """Integers (m, n) with ``form = m eps1 + n eps2`` all along the path, or None.

    On a path that stays on the ratio many pairs can qualify; the one with the smallest |m| + |n| is returned.

    >>> from ratomega.exact.rational import Rational
    >>> one = Linear(Rational(1)); moving = Linear(Rational(1), Rational(1))
    >>> integer_combination(Linear(Rational(2)), one, moving), integer_combination(Linear(Rational(1, 2)), one, moving)
    ((2, 0), None)
    """
    determinant = eps1.constant * eps2.slope - eps2.constant * eps1.slope
    if determinant != 0:
        m = (form.constant * eps2.slope - eps2.constant * form.slope) / determinant
        n = (eps1.constant * form.slope - form.constant * eps1.slope) / determinant
        whole_m, whole_n = as_integer(m), as_integer(n)
        return None if whole_m is None or whole_n is None else (whole_m, whole_n)
    if form.constant * eps1.slope != form.slope * eps1.constant:
        return None
    ratio = only_rational(eps2.constant / eps1.constant)
    whole = as_integer(form.constant / eps1.constant * int(ratio.q))
    if whole is None:
        return None
    # m alpha + n beta = target in coprime integers: one residue class of n, and |m| + |n| is convex along it.
    alpha, beta = int(ratio.q), int(ratio.p)
    first = whole * pow(beta, -1, alpha) % alpha if alpha > 1 else 0
    centre = whole // beta
    near = [first + alpha * (x // alpha + shift) for x in (-first, centre - first) for shift in (-1, 0, 1)]
    pairs = [((whole - n * beta) // alpha, n) for n in near]
    return min(pairs, key=lambda pair: (abs(pair[0]) + abs(pair[1]), pair))
