"""Series in t over functions of x, against number by number evaluation and sympy."""

from __future__ import annotations

import plain_averages as reference
import pytest
import sympy
from flint import fmpq
from hypothesis import given, settings
from hypothesis import strategies as st
from plain import Line

from ratomega.errors import PrecisionError
from ratomega.exact.laurent import Laurent
from ratomega.exact.line_series import LineSeries, expand_roots, line_total
from ratomega.exact.quadratic import square_root

ROOTS = st.dictionaries(
    st.tuples(st.integers(-3, 3), st.integers(-2, 2)), st.integers(-3, 3).filter(bool), max_size=5
)
# Between the roots and beyond them.
POINTS = [fmpq(2 * n + 1, 2) for n in range(-8, 8)]


def plainly(roots, x, last):
    """The product at a number x, factor by factor."""
    factors = [(Line(x - c, -s), 1 if e > 0 else -1) for (c, s), e in roots.items() for _ in range(abs(e))]
    return reference.expand(factors, last)


@settings(deadline=None, max_examples=25)
@given(ROOTS)
def test_products_of_linear_forms_expand_as_number_by_number(roots):
    series = expand_roots(roots, last=3)
    values = [series.function(power, scale=1, symbol="x") for power in range(4)]
    for x in POINTS:
        expected = plainly(roots, x, 3)
        assert [function.at(x=x) for function in values] == [expected.get(power, 0) for power in range(4)]


@settings(deadline=None, max_examples=15)
@given(ROOTS, ROOTS)
def test_sums_and_products_with_series_in_t(one, two):
    factor = Laurent.from_coefficients(-1, [2, 3, 5, 7], precision=3)
    total = (expand_roots(one, last=2).times(factor) - expand_roots(two, last=2)).reduced()
    assert total.precision == 2
    for x in POINTS[::3]:
        left = reference.times(plainly(one, x, 2), {-1: fmpq(2), 0: fmpq(3), 1: fmpq(5), 2: fmpq(7)})
        expected = reference.add(left, plainly(two, x, 2), -1)
        for power in range(-1, 2):
            assert total.function(power, scale=1, symbol="x").at(x=x) == expected.get(power, 0)


def test_an_expansion_by_sympy():
    x, t = sympy.symbols("x t")
    whole = (x - 1 - t) ** 2 * (x - 2) / ((x - 1 + 2 * t) * (x - 3 - t) ** 2)
    series = expand_roots({(1, 1): 2, (2, 0): 1, (1, -2): -1, (3, 1): -2}, last=2)
    for power in range(3):
        expected = sympy.diff(whole, t, power).subs(t, 0) / sympy.factorial(power)
        assert sympy.cancel(series.function(power, scale=1, symbol="x").sympy() - expected) == 0


def test_what_cancels_is_gone_after_reduction():
    one = expand_roots({(1, 0): -2, (3, 1): 1}, last=0)
    other = expand_roots({(1, 0): -2, (5, 0): 1}, last=0)
    difference = (one - other).reduced()
    assert dict(difference.poles) == {1: 2}
    assert str(difference.function(0, scale=1, symbol="x")) == "2/(x - 1)**2"
    assert (one - one).is_zero()
    # (x - 3)/(x - 1)^2 + 2/(x - 1)^2 = 1/(x - 1)
    two = expand_roots({(1, 0): -2}, last=0).times(Laurent.constant(2, precision=1))
    assert dict((one + two).reduced().poles) == {1: 1}


def test_the_scale_is_taken_back():
    """Roots in units of 1/6: X = 6 x."""
    series = expand_roots({(2, 0): 1, (3, 0): -1}, last=0)
    assert str(series.function(0, scale=6, symbol="x")) == "2*(3*x - 1)/(3*(2*x - 1))"


@pytest.mark.parametrize(("one", "other"), [(-2, -1), (-1, -2), (-2, -2), (-2, 0), (0, -1), (-1, 1)])
def test_roots_beyond_the_rationals_as_sympy_has_them(one, other):
    """x (2x - 1 - 3i)^one (2x - 1 + 3i)^other/(2x - 5), X = 2x."""
    root = 1 + 3 * square_root(-1)
    forms = {(root, 0): one, (root.conjugate(), 0): other, (0, 0): 1, (5, 0): -1}
    series = expand_roots({form: exponent for form, exponent in forms.items() if exponent}, last=0)
    function = series.function(0, scale=2, symbol="x")
    x = sympy.Symbol("x")
    expected = 2 * x / (2 * x - 5) * (2 * x - 1 - 3 * sympy.I) ** one * (2 * x - 1 + 3 * sympy.I) ** other
    assert sympy.simplify(function.sympy() - expected) == 0
    assert function.radicand == (0 if one == other else -1)
    assert not function.is_polynomial()


def test_a_polynomial_beyond_the_rationals_is_one():
    i = square_root(-1)
    series = expand_roots({(i, 0): 2, (-i, 0): 1}, last=0)
    function = series.function(0, scale=1, symbol="x")
    assert function.is_polynomial()
    assert function.degree("x") == 3
    # (x - i)^2 (x + i) = (x^2 + 1)(x - i) at 1
    assert str(function.at(x=1)) == "2 - 2*sqrt(-1)"


def test_what_is_not_known_is_not_given():
    series = expand_roots({(1, 1): 1}, last=0)
    with pytest.raises(PrecisionError):
        series.numerator(1)
    assert LineSeries.zero(precision=1).function(0, scale=1, symbol="x").degree("x") == -1
    assert line_total([series, series], precision=1).precision == 1
