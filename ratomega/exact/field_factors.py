"""Irreducible factors over a quadratic field K = Q(sqrt d), found through factors over Q.

*Norms.* Let N = P + Q sqrt(d), and let no rational polynomial divide both parts. Then no factor of N is rational up to
a number, an irreducible factor h has the norm F = h h' (h' its conjugate), irreducible over Q, and F^e divides the norm
of N as often as h^e divides N. So the norm is factored over the integers, and h is what N and F have in common.

*In one symbol* h = A + B sqrt(d) is found as a fraction: A/B = P/Q modulo F, with the degree of A at most half of that
of F and B below it, which Euclid's algorithm gives at half way. A rational polynomial is first shifted by a multiple of
sqrt(d), which makes it such an N (B. Trager 1976).

*In several symbols* factors are split where they are of degree 2 in some symbol with a number as leading coefficient:
linear factors always are, and denominators have no others. What is left of a numerator stays one factor.

Cost: one factorisation over the integers at twice the degree.
"""

from __future__ import annotations

from itertools import count

from flint import fmpq, fmpq_poly, fmpz_mpoly
from flint.utils.flint_exceptions import DomainError

from ratomega.exact.field_polynomials import Factor, FieldPoly, factor_degree, factor_text
from ratomega.exact.polynomials import coefficients_in
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ONE

__all__ = ["Factors", "field_factors", "split"]

Factors = tuple[Number, tuple[tuple[Factor, int], ...]]
"""A constant and irreducible factors in normal form with exponents; numerator first, by degree and by text."""


class _Collected:
    """A product in the making: a constant, and factors in normal form, which are known by their text."""

    def __init__(self) -> None:
        self.constant: Number = ONE
        self.factors: dict[str, tuple[Factor, int]] = {}

    def number(self, value: Number, exponent: int = 1) -> None:
        for _ in range(abs(exponent)):
            self.constant = self.constant * value if exponent > 0 else self.constant / value

    def take(self, factor: Factor, exponent: int) -> None:
        if isinstance(factor, FieldPoly):
            unit, factor = factor.normal()
            self.number(unit, exponent)
        elif factor.leading_coefficient() < 0:
            factor = -factor
            self.number(-ONE, exponent)
        text = factor_text(factor)
        self.factors[text] = (factor, self.factors.get(text, (factor, 0))[1] + exponent)

    def result(self) -> Factors:
        def order(pair: tuple[Factor, int]) -> tuple[bool, int, str]:
            return pair[1] < 0, factor_degree(pair[0]), factor_text(pair[0])

        return self.constant, tuple(sorted((pair for pair in self.factors.values() if pair[1]), key=order))


def field_factors(numerator: fmpz_mpoly, irrational: fmpz_mpoly, denominator: fmpz_mpoly, d: int) -> Factors:
    """The factors of (numerator + irrational sqrt(d))/denominator, not zero; with d = 0 those over Q."""
    found = _Collected()
    if not d:
        _rational(found, numerator, 1, 0)
        _rational(found, denominator, -1, 0)
        return found.result()
    common = numerator.gcd(irrational)
    _rational(found, common, 1, d)
    _rational(found, denominator, -1, d)
    _without_rational(found, FieldPoly(numerator / common, irrational / common, d))
    return found.result()


def _rational(found: _Collected, poly: fmpz_mpoly, sign: int, d: int) -> None:
    content, pairs = poly.factor()
    found.number(fmpq(content), sign)
    for factor, exponent in pairs:
        halves = split(factor, d) if d else None
        if halves is None:
            found.take(factor, sign * int(exponent))
        else:
            found.number(halves[0], sign * int(exponent))
            found.take(halves[1], sign * int(exponent))
            found.take(halves[1].conjugate(), sign * int(exponent))


def _without_rational(found: _Collected, rest: FieldPoly) -> None:
    """Take all factors of a polynomial whose parts have nothing in common."""
    univariate = len(rest.rational.context().names()) == 1
    for norm, exponent in rest.norm().factor()[1]:
        if norm.total_degree() == 2 * factor_degree(rest):
            # Nothing else is left.
            break
        halves = split(norm, rest.d, deep=False)
        if halves is not None:
            candidates = [halves[1], halves[1].conjugate()]
        else:
            candidates = [_common(rest, norm)] if univariate else []
        for candidate in candidates:
            for _ in range(int(exponent)):
                divided = rest.quotient(candidate)
                if divided is None:
                    break
                unit, rest = divided
                found.number(unit)
                found.take(candidate, 1)
    if rest.is_constant():
        found.number(rest.terms()[0][1])
    else:
        found.take(rest, 1)


def split(factor: fmpz_mpoly, d: int, *, deep: bool = True) -> tuple[Number, FieldPoly] | None:
    """(c, h) with factor = c h h' for a polynomial irreducible over Q; None where it stays so over the field.

    None also where the search is not made: see above for several symbols; in one symbol with ``deep`` False a degree
    beyond 2.

    >>> from ratomega.exact.polynomials import context_of
    >>> a, m = context_of(("a", "m")).gens()
    >>> unit, half = split(a**2 + 2 * a * m + m**2 + 1, -1)
    >>> factor_text(half), unit
    ('a + m - sqrt(-1)', 1)
    >>> split(a**2 + m**2 + 2, -1) is None
    True
    """
    for place, degree in enumerate(factor.degrees()):
        parts = coefficients_in(factor, place) if degree == 2 else []
        if parts and parts[2].is_constant():
            return _roots(factor, place, parts, d)
    if deep and len(factor.degrees()) == 1 and factor.total_degree() % 2 == 0:
        return _by_shift(factor, d)
    return None


def _roots(factor: fmpz_mpoly, place: int, parts: list[fmpz_mpoly], d: int) -> tuple[Number, FieldPoly] | None:
    """A X^2 + B X + C with a number A splits where d times the discriminant is a square, (d l)^2."""
    constant, linear, lead = parts
    try:
        root = ((linear**2 - constant * lead * 4) * d).sqrt()
    except DomainError:
        return None
    x = factor.context().gens()[place]
    return _halves(factor, FieldPoly((lead * x * 2 + linear) * d, root, d))


def _halves(factor: fmpz_mpoly, half: FieldPoly) -> tuple[Number, FieldPoly]:
    half = half.normal()[1]
    norm = half.norm()
    return fmpq(factor.leading_coefficient(), norm.leading_coefficient()), half


def _by_shift(factor: fmpz_mpoly, d: int) -> tuple[Number, FieldPoly] | None:
    """In one symbol: the factor at X + s sqrt(d) is free of rational factors for almost every s."""
    for step in count(1):
        shifted = _shifted(factor, step, d)
        if not shifted.rational.gcd(shifted.irrational).is_constant():
            continue
        norms = shifted.norm().factor()[1]
        if len(norms) == 1:
            return None
        half = _common(shifted, norms[0][0])
        return _halves(factor, _shifted_pair(half, -step))
    raise AssertionError("unreachable")


def _shifted(poly: fmpz_mpoly, step: int, d: int) -> FieldPoly:
    zero = poly.context().constant(0)
    return _shifted_pair(FieldPoly(poly, zero, d), step)


def _shifted_pair(poly: FieldPoly, step: int) -> FieldPoly:
    """The polynomial at X + step sqrt(d), by Horner's scheme."""
    context, d = poly.rational.context(), poly.d
    one, zero = context.constant(1), context.constant(0)
    move = FieldPoly(context.gens()[0], one * step, d)
    result = FieldPoly(zero, zero, d)
    tables = (poly.rational.to_dict(), poly.irrational.to_dict())
    for n in range(factor_degree(poly), -1, -1):
        x, y = (one * int(part.get((n,), 0)) for part in tables)
        result = result.times(move).plus(FieldPoly(x, y, d))
    return result


def _common(poly: FieldPoly, norm: fmpz_mpoly) -> FieldPoly:
    """In one symbol: the factor of a polynomial without rational factors that has the given irreducible norm."""
    p, q, modulus = (_line(part) for part in (poly.rational, poly.irrational, norm))
    half = modulus.degree() // 2
    # The norm is irreducible and does not divide q, so that q has an inverse.
    _, inverse, _ = (q % modulus).xgcd(modulus)
    above, last = modulus, (p * inverse) % modulus
    below_above, below = fmpq_poly(), fmpq_poly([1])
    while last.degree() > half:
        quotient, remainder = divmod(above, last)
        above, last = last, remainder
        below_above, below = below, below_above - quotient * below
    scale = last.denom() * below.denom()
    context = norm.context()
    parts = [
        context.from_dict({(n,): int((c * scale).p) for n, c in enumerate(part.coeffs()) if c != 0})
        for part in (last, below)
    ]
    return FieldPoly(parts[0], parts[1], poly.d).normal()[1]


def _line(poly: fmpz_mpoly) -> fmpq_poly:
    table = poly.to_dict()
    return fmpq_poly([table.get((n,), 0) for n in range(int(poly.total_degree()) + 1)])
