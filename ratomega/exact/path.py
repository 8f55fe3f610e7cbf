"""The path to the limit point: every parameter is c + d t, and the answer is the value at t -> 0.

This module is the one place that says what a parameter on the path is. ``SMALL_PARAMETERS`` is the ordered list of
path parameters, the first taken to zero last; one is implemented.
"""

from __future__ import annotations

from dataclasses import dataclass

from ratomega.exact.rational import ZERO, Rational, exact_text

__all__ = ["SMALL_PARAMETERS", "Linear", "integer_combination", "leaves_the_ratio"]

SMALL_PARAMETERS = ("t",)


@dataclass(frozen=True, slots=True)
class Linear:
    """The exact linear form ``constant + slope t``.

    >>> x = Linear(Rational(1, 2), Rational(1))
    >>> str(x + x), (x - x).is_zero()
    ('1 + 2*t', True)
    """

    constant: Rational
    slope: Rational = ZERO

    def __add__(self, other: Linear) -> Linear:
        return Linear(self.constant + other.constant, self.slope + other.slope)

    def __sub__(self, other: Linear) -> Linear:
        return Linear(self.constant - other.constant, self.slope - other.slope)

    def __neg__(self) -> Linear:
        return Linear(-self.constant, -self.slope)

    def scaled(self, factor: Rational | int) -> Linear:
        return Linear(self.constant * factor, self.slope * factor)

    def is_zero(self) -> bool:
        """True when the form vanishes all along the path, not only at its end."""
        return self.constant == 0 and self.slope == 0

    def __str__(self) -> str:
        if self.slope == 0:
            return exact_text(self.constant)
        top, bottom = abs(self.slope.p), self.slope.q
        term = ("t" if top == 1 else f"{top}*t") + ("" if bottom == 1 else f"/{bottom}")
        if self.constant == 0:
            return f"-{term}" if self.slope < 0 else term
        return f"{exact_text(self.constant)} {'-' if self.slope < 0 else '+'} {term}"


def leaves_the_ratio(eps1: Linear, eps2: Linear) -> bool:
    """Does the path leave the ratio eps2/eps1 of its end point to first order?

    >>> leaves_the_ratio(Linear(Rational(1)), Linear(Rational(1), Rational(1)))
    True
    >>> leaves_the_ratio(Linear(Rational(1), Rational(2)), Linear(Rational(1), Rational(2)))
    False
    """
    return bool(eps1.constant * eps2.slope != eps2.constant * eps1.slope)


def integer_combination(form: Linear, eps1: Linear, eps2: Linear) -> tuple[int, int] | None:
    """Integers (m, n) with ``form = m eps1 + n eps2`` all along the path, or None.

    On a path that stays on the ratio many pairs can qualify; the one with the smallest |m| + |n| is returned.

    >>> one = Linear(Rational(1)); moving = Linear(Rational(1), Rational(1))
    >>> integer_combination(Linear(Rational(2)), one, moving), integer_combination(Linear(Rational(1, 2)), one, moving)
    ((2, 0), None)
    """
    determinant = eps1.constant * eps2.slope - eps2.constant * eps1.slope
    if determinant != 0:
        m = (form.constant * eps2.slope - eps2.constant * form.slope) / determinant
        n = (eps1.constant * form.slope - form.constant * eps1.slope) / determinant
        return (int(m.p), int(n.p)) if m.q == 1 and n.q == 1 else None
    if form.constant * eps1.slope != form.slope * eps1.constant:
        return None
    ratio = eps2.constant / eps1.constant
    target = form.constant / eps1.constant * ratio.q
    if target.q != 1:
        return None
    # m alpha + n beta = target in coprime integers: one residue class of n, and |m| + |n| is convex along it.
    alpha, beta, whole = int(ratio.q), int(ratio.p), int(target.p)
    first = whole * pow(beta, -1, alpha) % alpha if alpha > 1 else 0
    centre = whole // beta
    near = [first + alpha * (x // alpha + shift) for x in (-first, centre - first) for shift in (-1, 0, 1)]
    pairs = [((whole - n * beta) // alpha, n) for n in near]
    return min(pairs, key=lambda pair: (abs(pair[0]) + abs(pair[1]), pair))
