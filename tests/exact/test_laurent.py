"""Truncated Laurent series against plain dictionaries of Fractions, and against sympy."""

from __future__ import annotations

from fractions import Fraction

import flint
import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st

from ratomega.errors import PrecisionError
from ratomega.exact.laurent import Laurent, total
from ratomega.exact.rational import Rational, as_fraction

MANY = settings(deadline=None, max_examples=80)


@st.composite
def series(draw):
    """(Laurent, {power: Fraction}, precision): the same series twice, the second without the package."""
    low = draw(st.integers(-4, 3))
    small = st.builds(Fraction, st.integers(-6, 6), st.integers(1, 4))
    coefficients = draw(st.lists(small, max_size=6))
    precision = low + draw(st.integers(-1, 7))
    made = Laurent.from_coefficients(
        low, [Rational(c.numerator, c.denominator) for c in coefficients], precision=precision
    )
    return made, {low + n: c for n, c in enumerate(coefficients) if c and low + n < precision}, precision


def same(value, expected, precision):
    """``value`` is the expected dictionary, cut at ``precision``, and in canonical form."""
    kept = {n: c for n, c in expected.items() if c and n < precision}
    assert {n: as_fraction(c) for n, c in value.coefficients().items()} == kept
    assert value.precision == precision
    assert value.valuation == min(kept, default=precision)
    assert value.is_zero() == (not kept)
    for n in range(value.valuation - 2, precision):
        assert as_fraction(value.coefficient(n)) == kept.get(n, 0)
    return True


@MANY
@given(series())
def test_construction(x):
    assert same(*x)
    made, _, precision = x
    with pytest.raises(PrecisionError, match="not known"):
        made.coefficient(precision)


@MANY
@given(series(), series())
def test_sum_and_difference(x, y):
    (p, a, n), (q, b, m) = x, y
    precision = min(n, m)
    assert same(p + q, {k: a.get(k, 0) + b.get(k, 0) for k in a | b}, precision)
    assert same(p - q, {k: a.get(k, 0) - b.get(k, 0) for k in a | b}, precision)
    assert same(-p, {k: -c for k, c in a.items()}, n)


@MANY
@given(series(), series())
def test_product(x, y):
    (p, a, n), (q, b, m) = x, y
    expected: dict[int, Fraction] = {}
    for i, c in a.items():
        for j, d in b.items():
            expected[i + j] = expected.get(i + j, Fraction(0)) + c * d
    # What is unknown in one factor meets the lowest power of the other.
    precision = min(n + min(b, default=m), m + min(a, default=n))
    assert same(p * q, expected, precision)
    assert p * q == q * p


@MANY
@given(series())
def test_inverse(x):
    made, coefficients, precision = x
    if not coefficients:
        with pytest.raises(ZeroDivisionError):
            made.inverse()
        return
    low = min(coefficients)
    inverse = made.inverse()
    assert (inverse.valuation, inverse.precision) == (-low, precision - 2 * low)
    # Long division on a plain list.
    known = [coefficients.get(low + n, Fraction(0)) for n in range(precision - low)]
    quotient: list[Fraction] = []
    for n in range(len(known)):
        rest = Fraction(n == 0) - sum(known[k] * quotient[n - k] for k in range(1, n + 1))
        quotient.append(rest / known[0])
    assert same(inverse, {n - low: c for n, c in enumerate(quotient)}, precision - 2 * low)
    assert made * inverse == Laurent.constant(1, precision=precision - low)
    assert inverse.inverse() == made


@MANY
@given(series(), series())
def test_quotient(x, y):
    (p, _, _), (q, b, _) = x, y
    if b:
        assert p / q == p * q.inverse()
        assert ((p / q) * q).agrees_with(p)


@MANY
@given(series(), st.integers(-5, 5), st.integers(-6, 6), st.integers(-7, 12))
def test_shift_scale_truncate(x, shift, factor, cut):
    made, coefficients, precision = x
    assert same(made.shifted(shift), {n + shift: c for n, c in coefficients.items()}, precision + shift)
    assert same(made.scaled(factor), {n: c * factor for n, c in coefficients.items()}, precision)
    assert same(made.truncated(cut), coefficients, min(cut, precision))


@MANY
@given(st.lists(series(), max_size=4), st.integers(-4, 6))
def test_total(several, precision):
    expected: dict[int, Fraction] = {}
    for _, coefficients, _ in several:
        for n, c in coefficients.items():
            expected[n] = expected.get(n, Fraction(0)) + c
    known = min([precision, *(n for _, _, n in several)])
    assert same(total([made for made, _, _ in several], precision=precision), expected, known)


@MANY
@given(series(), series())
def test_equality_and_hash(x, y):
    (p, a, n), (q, b, m) = x, y
    assert (p == q) == (a == b and n == m)
    if p == q:
        assert hash(p) == hash(q)
    assert p.agrees_with(q) == all(a.get(k, 0) == b.get(k, 0) for k in a | b if k < min(n, m))
    assert p != "text"


def test_against_sympy():
    # (2 + t) / (t^2 (1 - 3 t) (5 + t/2)^2) to t^5.
    t = sympy.Symbol("t")
    length = 8

    def line(c, d):
        return Laurent.from_coefficients(0, [Rational(c), d], precision=length)

    half = line(5, Rational(1, 2))
    value = (line(2, 1) / (line(1, -3) * half * half)).shifted(-2)
    by_sympy = sympy.series((2 + t) / ((1 - 3 * t) * (5 + t / 2) ** 2), t, 0, length).removeO()
    expected = {n - 2: Fraction(str(by_sympy.coeff(t, n))) for n in range(length)}
    assert same(value, expected, length - 2)


def test_the_global_cap_of_the_backend_is_without_effect():
    before = flint.ctx.cap
    try:
        flint.ctx.cap = 3
        x = Laurent.from_coefficients(0, [1, 1], precision=20)
        assert (x * x.inverse(), x.inverse().precision) == (Laurent.constant(1, precision=20), 20)
        assert x.inverse().coefficient(19) == -1
    finally:
        flint.ctx.cap = before


def test_text():
    x = Laurent.from_coefficients(-1, [Rational(1, 2), 0, -3], precision=4)
    assert str(x) == "1/2*t^-1 + -3*t^1 + O(t^4)"
