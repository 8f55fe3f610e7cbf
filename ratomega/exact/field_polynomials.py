"""Polynomials in several symbols over a quadratic field, as two integer ones: P + Q sqrt(d).

Normal form of a factor: the coefficient of its leading term (lexicographic in the order of the symbols) is a positive
integer, and no integer divides all parts of all coefficients. Polynomials that differ by a number of the field have the
same one.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from flint import fmpq, fmpz_mpoly

from ratomega.exact.factored import Whole
from ratomega.exact.polynomials import evaluated, joined_terms, monomial_text, poly_text
from ratomega.exact.quadratic import Number, Quadratic, quadratic
from ratomega.exact.rational import Rational

__all__ = ["Factor", "FieldPoly", "factor_degree", "factor_terms", "factor_text", "factor_value"]


@dataclass(frozen=True, slots=True, eq=False)
class FieldPoly:
    """P + Q sqrt(d), not zero, with integer polynomials of the same symbols; d squarefree."""

    rational: fmpz_mpoly
    irrational: fmpz_mpoly
    d: int

    def times(self, other: FieldPoly) -> FieldPoly:
        (a, b), (p, q) = (self.rational, self.irrational), (other.rational, other.irrational)
        return FieldPoly(a * p + b * q * self.d, a * q + b * p, self.d)

    def plus(self, other: FieldPoly) -> FieldPoly:
        return FieldPoly(self.rational + other.rational, self.irrational + other.irrational, self.d)

    def conjugate(self) -> FieldPoly:
        return FieldPoly(self.rational, -self.irrational, self.d)

    def norm(self) -> fmpz_mpoly:
        """The product with the conjugate: a polynomial over the integers."""
        return self.rational**2 - self.irrational**2 * self.d

    def terms(self) -> list[tuple[tuple[int, ...], Number]]:
        """(exponents, coefficient) of all terms, the leading one first; coefficients have integer parts."""
        tables = [
            {tuple(int(e) for e in powers): int(c) for powers, c in part.to_dict().items()}
            for part in (self.rational, self.irrational)
        ]
        powers = sorted({*tables[0], *tables[1]}, reverse=True)
        return [(p, quadratic(fmpq(tables[0].get(p, 0)), fmpq(tables[1].get(p, 0)), self.d)) for p in powers]

    def is_constant(self) -> bool:
        return bool(self.rational.is_constant() and self.irrational.is_constant())

    def primitive(self) -> tuple[int, FieldPoly]:
        """The positive integer content, and the rest."""
        content = math.gcd(*(int(c) for part in (self.rational, self.irrational) for c in part.coeffs()))
        context = self.rational.context()
        whole = context.constant(content)
        return content, FieldPoly(self.rational / whole, self.irrational / whole, self.d)

    def normal(self) -> tuple[Number, FieldPoly]:
        """(c, f) with this polynomial = c f and f in the normal form of a factor."""
        lead = self.terms()[0][1]
        factor: Number = fmpq(1)
        result = self
        if isinstance(lead, Quadratic):
            context = self.rational.context()
            x, y = context.constant(int(lead.x.p)), context.constant(-int(lead.y.p))
            result, factor = self.times(FieldPoly(x, y, self.d)), fmpq(1) / lead.conjugate()
            lead = result.terms()[0][1]
        content, result = result.primitive()
        if isinstance(lead, fmpq) and lead < 0:
            content, result = -content, FieldPoly(-result.rational, -result.irrational, self.d)
        return factor * content, result

    def quotient(self, other: FieldPoly) -> tuple[Rational, FieldPoly] | None:
        """(c, f) with this polynomial = c f other and f without integer content; None where ``other`` does not divide.

        Both are multiplied by the conjugate of ``other``, so that one integer polynomial is divided by.
        """
        product, norm = self.times(other.conjugate()), other.norm()
        content = math.gcd(*(int(c) for c in norm.coeffs()))
        norm = norm / norm.context().constant(content)
        parts = [divmod(part, norm) for part in (product.rational, product.irrational)]
        if not all(rest.is_zero() for _, rest in parts):
            return None
        whole, result = FieldPoly(parts[0][0], parts[1][0], self.d).primitive()
        return fmpq(whole, content), result


Factor = fmpz_mpoly | FieldPoly


def factor_degree(factor: Factor) -> int:
    parts = (factor.rational, factor.irrational) if isinstance(factor, FieldPoly) else (factor,)
    return max(int(part.total_degree()) for part in parts)


def factor_terms(factor: Factor) -> list[tuple[tuple[int, ...], Number]]:
    """(exponents, coefficient) of all terms, leading one first."""
    if isinstance(factor, FieldPoly):
        return factor.terms()
    return [(tuple(int(e) for e in powers), fmpq(c)) for powers, c in factor.terms()]


def factor_value(factor: Factor, values: Sequence[Any], root: Any) -> Any:
    """The factor at numbers of any kind; ``root`` is sqrt(d) as a number of that kind."""
    if not isinstance(factor, FieldPoly):
        return evaluated(factor, values)
    return evaluated(factor.rational, values) + evaluated(factor.irrational, values) * root


def factor_text(factor: Factor) -> str:
    """In Python syntax, leading term first.

    >>> from ratomega.exact.polynomials import context_of
    >>> a, m = context_of(("a", "m")).gens()
    >>> factor_text(FieldPoly(2 * a - m, 3 * a * m - 1 + m, -1))
    '3*sqrt(-1)*a*m + 2*a - (1 - sqrt(-1))*m - sqrt(-1)'
    """
    if not isinstance(factor, FieldPoly):
        return poly_text(factor)
    names = factor.rational.context().names()
    terms = []
    for powers, c in factor.terms():
        sign, size = signed_text(c)
        if sign == "+" and not any(powers):
            size = size.removeprefix("(").removesuffix(")") if size.startswith("(") else size
        terms.append((sign, monomial_text(size, names, powers)))
    return joined_terms(terms)


def signed_text(value: Number | Whole) -> tuple[str, str]:
    """A number with integer parts as its sign and a factor of a product, "1" for one."""
    if not isinstance(value, Quadratic):
        return ("-" if value < 0 else "+"), str(abs(value))
    first = value.x if value.x != 0 else value.y
    sign, one = ("-", -value) if first < 0 else ("+", value)
    size = abs(one.y)
    root = f"sqrt({one.d})" if size == 1 else f"{size}*sqrt({one.d})"
    return sign, root if one.x == 0 else f"({one.x} {'-' if one.y < 0 else '+'} {root})"
