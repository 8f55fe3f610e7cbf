"""Prepared functions against sympy, and decimals with their radius against mpmath and fractions."""

from __future__ import annotations

from fractions import Fraction

import flint
import mpmath
import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st

from ratomega.exact.decimals import (
    ball_decimals,
    ball_power_sum,
    decimal_value,
    decimals,
    enclosed,
    size_bound,
    upper_text,
)
from ratomega.exact.function_text import parse_function
from ratomega.exact.point_function import UNDETERMINED, PointFunction
from ratomega.exact.quadratic import Quadratic, quadratic
from ratomega.exact.rational import ONE, ZERO, Rational, as_fraction

ONE_SYMBOL = ["0", "7", "(3*a**2 - 2)/(6*(a + 1)*(a - 1))", "a**5/(a**2 + 4)**2", "(2*a - 1)**3/(a**3 - 5)"]
RATIONAL = [ZERO, ONE, Rational(-7, 3), Rational(1, 2)]
BEYOND = [Quadratic(ZERO, Rational(3, 5), -1), Quadratic(Rational(1, 2), Rational(-2), -7), Quadratic(ONE, ONE, 5)]


def symbolic(value):
    if isinstance(value, Quadratic):
        return symbolic(value.x) + symbolic(value.y) * sympy.sqrt(value.d)
    return sympy.Rational(int(value.p), int(value.q))


@pytest.mark.parametrize("text", ONE_SYMBOL)
@pytest.mark.parametrize("where", [*RATIONAL, *BEYOND], ids=str)
def test_one_symbol_against_sympy(text, where):
    found = PointFunction(parse_function(text, ("a",))).at([where])
    expected = sympy.sympify(text).subs(sympy.Symbol("a"), symbolic(where))
    if expected.has(sympy.zoo):
        assert found == "pole of order 1"
    else:
        assert abs(sympy.N(symbolic(found) - expected, 60, maxn=400)) < sympy.Float("1e-50")


def test_orders_of_poles():
    function = PointFunction(parse_function("1/((a - 1)**3*(2*a + 1)*(a**2 + 4)**2)", ("a",)))
    assert [function.at([x]) for x in (ONE, Rational(-1, 2), Quadratic(ZERO, Rational(2), -1))] == [
        "pole of order 3",
        "pole of order 1",
        "pole of order 2",
    ]


def test_several_symbols():
    function = PointFunction(parse_function("(a - m)*(a + 3)/(a + m - 2)", ("a", "m")))
    assert function.at([ONE, ONE]) == UNDETERMINED
    assert function.at([Rational(3), Rational(-1)]) == "pole"
    assert function.at([Rational(1, 2), Rational(1, 3)]) == Rational(-1, 2)
    i = Quadratic(ZERO, ONE, -1)
    assert function.at([i, -i]) == (2 * i) * (i + 3) / Rational(-2)


NUMBERS = st.builds(
    lambda x, y, d: quadratic(Rational(*x), Rational(*y), d),
    st.tuples(st.integers(-(10**9), 10**9), st.integers(1, 10**9)),
    st.tuples(st.integers(-(10**9), 10**9), st.integers(1, 10**9)),
    st.sampled_from([2, 5, -1, -3]),
)


@settings(deadline=None, max_examples=60)
@given(NUMBERS, st.integers(1, 40))
def test_decimals_are_rounded_and_their_radius_holds(value, digits):
    shown = decimals(value, digits)
    with mpmath.workdps(120):
        exact = mp(value)
        for text, part in ((shown.real, exact.real), (shown.imaginary, exact.imag)):
            error = abs(mpmath.mpf(text) - part)
            assert error <= mpmath.mpf(shown.radius)
            # Half a unit of the last digit, not more: as many digits as were asked for.
            assert error <= abs(part) * mpmath.mpf(10) ** (1 - digits) / 2 * (1 + mpmath.mpf(10) ** -60)
            assert len(text.lstrip("-0.").partition("e")[0].replace(".", "")) <= digits


def mp(value):
    if not isinstance(value, Quadratic):
        return mpmath.mpc(mpmath.mpf(int(value.p)) / int(value.q))
    return mp(value.x) + mp(value.y) * mpmath.sqrt(value.d)


def test_a_radius_is_rounded_up():
    for n in range(1, 400):
        size = Rational(n, 997)
        text = upper_text(size)
        assert 0 <= Fraction(text) - as_fraction(size) <= as_fraction(size) / 100
    assert decimals(Rational(1, 8), 5).radius == "0"


def test_cancellation_between_the_parts_is_seen_through():
    # sqrt(2) and a convergent of its continued fraction agree to 30 digits.
    p, q = 1, 1
    for _ in range(40):
        p, q = p + 2 * q, p + q
    shown = decimals(Quadratic(Rational(-p, q), ONE, 2), 12)
    with mpmath.workdps(100):
        assert abs(mpmath.mpf(shown.real) - (mpmath.sqrt(2) - mpmath.mpf(p) / q)) <= mpmath.mpf(shown.radius)
    assert 0 < float(shown.radius) < 1e-40


def test_a_ball_is_covered_and_one_without_end_refused():
    ball = enclosed(Quadratic(Rational(1, 3), Rational(1, 7), -1), Rational(1, 10**6), 100)
    shown = ball_decimals(ball, 20)
    assert shown.real.startswith("0.33333333333333333")
    assert 1e-6 <= float(shown.radius) <= 1.01e-6
    with pytest.raises(ValueError, match="no end"):
        ball_decimals(type(ball)(flint.acb(flint.arb("inf")), 53), 5)


def test_a_sum_of_balls_contains_what_it_may_be():
    terms = [(Rational(1), (0,)), (Rational(-3, 2), (1,)), (Rational(5, 7), (2,))]
    total = ball_power_sum(terms, [enclosed(Rational(1, 4), Rational(1, 1000), 80)])
    shown = ball_decimals(total, 12)
    for q in (Fraction(249, 1000), Fraction(1, 4), Fraction(251, 1000)):
        value = 1 - Fraction(3, 2) * q + Fraction(5, 7) * q**2
        assert abs(Fraction(shown.real) - value) <= Fraction(shown.radius)
        assert value <= as_fraction(size_bound(total)) < 1


def test_large_and_small_decimals_are_read_back():
    for value in (Rational(10) ** 700 / 7, Rational(1, 7 * 10**700)):
        shown = decimals(value, 9)
        assert abs(decimal_value(shown.real) - value) <= decimal_value(shown.radius)
