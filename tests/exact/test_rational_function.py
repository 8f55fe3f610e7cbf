"""Rational functions against sympy: arithmetic, text and back, poles, residues, Taylor coefficients, values."""

from __future__ import annotations

import cmath

import flint
import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st

from ratomega.errors import InputError
from ratomega.exact.function_text import parse_function
from ratomega.exact.interpolation import grid_polynomial, line_polynomial
from ratomega.exact.quadratic import square_root
from ratomega.exact.rational import Rational

TIMES = {"deadline": None, "max_examples": 40}
NAMES = ("a", "m")
A, M = sympy.symbols("a m")


def read(text, names=NAMES):
    return parse_function(text, names)


@st.composite
def expressions(draw, depth=2):
    """Text of an expression in a and m."""
    if depth == 0:
        return draw(st.sampled_from(["a", "m", "2", "3", "7", "(a + m)", "(a - 2)", "(2*m - 3*a)"]))
    left, right = draw(expressions(depth=depth - 1)), draw(expressions(depth=depth - 1))
    sign = draw(st.sampled_from(["+", "-", "*", "/"]))
    return f"({left} {sign} {right})"


@settings(**TIMES)
@given(expressions())
def test_reading_and_writing_against_sympy(text):
    expected = sympy.sympify(text, locals={"a": A, "m": M})
    if expected.has(sympy.zoo, sympy.nan):
        with pytest.raises(ValueError, match="rational function"):
            read(text)
        return
    function = read(text)
    assert sympy.cancel(function.sympy() - expected) == 0
    assert read(str(function)) == function
    assert sympy.cancel(sympy.sympify(str(function), locals={"a": A, "m": M}) - expected) == 0
    # Normal form: numerator and denominator have no common factor, contents included.
    top, bottom = (sympy.Poly(str(x).replace("^", "**"), A, M) for x in (function.numerator, function.denominator))
    assert sympy.gcd(top, bottom).is_one or top.is_zero
    assert sympy.gcd(top.content(), bottom.content()) == 1 or top.is_zero


@pytest.mark.parametrize(
    "text",
    ["", "b", "a +", "a b", "2**3", "a**b", "a**-1", "(a", "a)", "1/0", "1/(a - a)", "a**99999", "a^2", "a.b",
     "(a + m + 1)**3999", f"(a + 1{'0' * 10_000})**3000", "__import__('os')", "1.5*a", "(" * 60 + "a" + ")" * 60],
)  # fmt: skip
def test_what_is_no_function_is_refused(text):
    with pytest.raises(ValueError, match="rational function"):
        read(text)


def test_a_long_row_of_signs_is_no_trap():
    assert read("-" * 100_001 + "a") == read("-a")


def test_equal_functions_are_equal_values():
    one, two = read("(a**2 - 1)/(2*a + 2)"), read("(a - 1)/2")
    assert one == two
    assert hash(one) == hash(two)
    assert one != read("(a + 1)/2")
    assert read("4/2") == 2
    assert str(read("(1 - a)/(m - 2)")) == "-(a - 1)/(m - 2)"


def test_poles_and_residues_against_sympy():
    text = "(3*a**2 - a + 5)/((a - 1)**3*(2*a + 7)*(a**2 - 9))"
    function = read(text, ("a",))
    expected = sympy.sympify(text)
    assert [(str(p.location), p.order) for p in function.poles()] == [("-7/2", 1), ("-3", 1), ("1", 3), ("3", 1)]
    for pole in function.poles():
        where = sympy.Rational(str(pole.location))
        assert sympy.Rational(str(function.residue(pole.location))) == sympy.residue(expected, A, where)
    assert function.residue(5) == 0


def test_poles_that_move_with_another_symbol():
    function = read("(a + 3)/((a - m)*(a + 2*m - 1)**2)")
    poles = function.poles("a")
    assert [(str(p.location), p.order) for p in poles] == [("-(2*m - 1)", 2), ("m", 1)]
    expected = sympy.sympify(str(function))
    for pole, where in zip(poles, (1 - 2 * M, M), strict=True):
        ours = sympy.sympify(str(function.residue(pole.location, "a")))
        assert sympy.cancel(ours - sympy.residue(expected, A, where)) == 0
    with pytest.raises(InputError, match="say which"):
        function.poles()
    with pytest.raises(InputError, match="not linear in a"):
        read("1/(a**2 + 1)").poles("a")


def test_taylor_coefficients_against_sympy():
    text = "(a*m**3 + m**2 - 5*a)/((a - 1)*(m + 3))"
    function, expected = read(text), sympy.sympify(text)
    for about in (0, 2):
        series = sympy.series(expected, M, about, 5).removeO()
        shifted = sympy.expand(series.subs(M, M + about))
        for n, coefficient in enumerate(function.taylor("m", 4, about)):
            assert sympy.cancel(sympy.sympify(str(coefficient)) - shifted.coeff(M, n)) == 0
    assert [str(c) for c in read("m**2/(a + 1)").taylor("m", 3)] == ["0", "0", "1/(a + 1)", "0"]
    with pytest.raises(InputError, match="pole of order 1"):
        function.taylor("m", 1, -3)


def test_values_of_every_kind():
    function = read("(a**2 - 3)/(a - 5)", ("a",))
    assert function.at(a="1/2") == function.at(a=Rational(1, 2)) == function.at(a=sympy.Rational(1, 2))
    assert str(function.at(a="1/2")) == "11/18"
    assert function.at(a=square_root(3)) == 0
    assert function.at(a=sympy.I) == -4 / (square_root(-1) - 5)
    for z in (0.3 + 2j, 1.5, -4j):
        assert cmath.isclose(function.at(a=z), (z**2 - 3) / (z - 5), rel_tol=1e-14)
        assert isinstance(function.at(a=z), complex)
    ball = function.at(a=flint.arb(1) / 3)
    assert isinstance(ball, flint.arb)
    assert ball.contains(flint.fmpq(26, 9) / flint.fmpq(14, 3)) or ball.contains(function.at(a="1/3"))
    assert function.at(a=flint.acb(0, 1)).overlaps(flint.acb(-4) / flint.acb(-5, 1))
    with pytest.raises(InputError, match="a = 5 is a pole"):
        function.at(a=5)
    with pytest.raises(InputError, match="pole"):
        function.at(a=5.0)
    with pytest.raises(InputError, match="no symbol"):
        function.at(b=1)


def test_a_complex_value_is_good_where_the_numerator_nearly_vanishes():
    """(a - 1)^40 near 1 in expanded form would lose every digit of a double."""
    function = read("(a - 1)**40", ("a",))
    assert cmath.isclose(function.at(a=1 + 1e-6), (1 + 1e-6 - 1) ** 40, rel_tol=1e-12)


def test_giving_some_of_the_symbols():
    function = read("(a + m)/(a - 2*m)")
    half = function.at(m="1/2")
    assert half.symbols == ("a",)
    assert str(half) == "(2*a + 1)/(2*(a - 1))"
    assert half.at(a=3) == function.at(a=3, m="1/2")
    with pytest.raises(InputError, match="whatever the other symbols are"):
        read("a/(m - 1)").at(m=1)
    with pytest.raises(InputError, match="given values are exact"):
        function.at(m=0.5)


def test_latex_is_that_of_sympy():
    assert read("a/(m - 1)**2").latex() == r"\frac{a}{\left(m - 1\right)^{2}}"


@settings(**TIMES)
@given(st.lists(st.integers(-9, 9), min_size=1, max_size=6))
def test_interpolation_on_a_line(coefficients):
    nodes = [Rational(n, 3) for n in range(len(coefficients))]
    values = [sum(c * x**k for k, c in enumerate(coefficients)) for x in nodes]
    assert line_polynomial(nodes, [Rational(0) + v for v in values]) == coefficients


@settings(**TIMES)
@given(st.lists(st.lists(st.integers(-9, 9), min_size=3, max_size=3), min_size=2, max_size=2))
def test_interpolation_on_a_grid(rows):
    axes = [[Rational(1), Rational(-2, 3)], [Rational(0), Rational(5), Rational(1, 7)]]
    values = {
        (i, j): sum(c * x**k * y**n for k, row in enumerate(rows) for n, c in enumerate(row)) + Rational(0)
        for i, x in enumerate(axes[0])
        for j, y in enumerate(axes[1])
    }
    assert grid_polynomial(axes, values) == {(k, n): c for k, row in enumerate(rows) for n, c in enumerate(row)}
