"""Rational functions over a quadratic field against sympy: arithmetic, factors, text and back, poles, values."""

from __future__ import annotations

import cmath
from random import Random

import flint
import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st

from ratomega.errors import InputError
from ratomega.exact.field_polynomials import factor_text
from ratomega.exact.function_text import parse_function
from ratomega.exact.point_function import PointFunction
from ratomega.exact.quadratic import as_number, quadratic, square_root
from ratomega.exact.rational import Rational
from ratomega.exact.rational_function import RationalFunction

TIMES = {"deadline": None, "max_examples": 20}
NAMES = ("a", "m")
A, M = sympy.symbols("a m")
I = square_root(-1)  # noqa: E741


def read(text, names=NAMES):
    return parse_function(text, names)


def line(text):
    return read(text, ("a",))


def equal(one, two):
    """Are two sympy expressions the same? Cross-multiplied, sympy's expansion knows that sqrt(d)**2 is d."""
    (p, q), (r, s) = (sympy.fraction(sympy.together(x)) for x in (one, two))
    return sympy.expand(p * s - r * q) == 0


def sym(text):
    return sympy.sympify(text, locals={"a": A, "m": M})


@st.composite
def expressions(draw, root, depth=2):
    """Text of an expression in a, m and one root, and the same for sympy; nothing is divided by zero."""
    if depth == 0:
        atoms = ["a", "m", "3", "(a + m)", root, f"(a - {root})", f"(2*m + 3 - {root}*a)", f"(a*m - {root})"]
        text = draw(st.sampled_from(atoms))
        return text, sym(text)
    (left, one), (right, two) = (draw(expressions(root, depth - 1)) for _ in range(2))
    sign = draw(st.sampled_from("+-*/"))
    if sign == "/" and equal(two, 0):
        sign = "*"
    value = {"+": one + two, "-": one - two, "*": one * two}[sign] if sign != "/" else one / two
    return f"({left} {sign} {right})", value


@settings(**TIMES)
@given(st.sampled_from(["sqrt(-1)", "sqrt(-3)", "sqrt(5)"]).flatmap(expressions))
def test_reading_and_writing_against_sympy(both):
    text, expected = both
    function = read(text)
    assert equal(function.sympy(), expected)
    assert equal(sym(str(function)), expected)
    assert read(str(function)) == function
    assert str(read(str(function))) == str(function)


def factors_of(expression, function):
    """By sympy: monic factors with exponents, over the field of the function."""
    # Over Q, where nothing irrational is left, factors are those over Q.
    options = {"extension": sympy.sqrt(function.radicand)} if function.radicand else {}
    found = {}
    top, bottom = sympy.fraction(sympy.cancel(expression, A, **options))
    for poly, sign in ((top, 1), (bottom, -1)):
        for factor, exponent in sympy.factor_list(poly, A, **options)[1]:
            found[sympy.expand(sympy.Poly(factor, A, **options).monic().as_expr())] = sign * exponent
    ours = {}
    for factor, exponent in function.factors()[1]:
        monic = sympy.Poly(sym(factor_text(factor)), A, **options).monic().as_expr()
        ours[sympy.expand(monic)] = exponent
    return ours, found


def random_product(dice, d, size):
    function, expected = line("1"), sympy.Integer(1)
    for _ in range(size):
        x, y = dice.randrange(-3, 4), dice.choice([-2, -1, 0, 1, 2])
        power, exponent = dice.choice([1, 1, 2]), dice.choice([-2, -1, 1, 2])
        if x or y:
            c = quadratic(Rational(x), Rational(y), d)
            function = function * (RationalFunction.symbol("a", ("a",)) ** power + c) ** exponent
            expected *= (A**power + x + y * sympy.sqrt(d)) ** exponent
    return function, expected


@pytest.mark.parametrize(("d", "size", "seed"), [(-1, 3, 1), (2, 3, 2), (-3, 3, 3), (5, 2, 4), (-1, 2, 5)])
def test_factors_in_one_symbol_are_those_of_sympy(d, size, seed):
    """Products of a^n + c with c in the field, n = 1 or 2, and exponents of either sign."""
    function, expected = random_product(Random(seed), d, size)
    ours, found = factors_of(expected, function)
    assert ours == found


@pytest.mark.long
@pytest.mark.parametrize("seed", range(30))
def test_more_factors_in_one_symbol(seed):
    dice = Random(100 + seed)
    function, expected = random_product(dice, dice.choice([-1, 2, -3, 5, -7]), 4)
    ours, found = factors_of(expected, function)
    assert ours == found


@pytest.mark.parametrize(
    ("text", "shown"),
    [
        # a^4 + 1 = (a^2 + i)(a^2 - i): a factor over Q that splits into two of degree 2.
        ("(a**4 + 1)*(a + sqrt(-1))", "(a + sqrt(-1))*(a**2 + sqrt(-1))*(a**2 - sqrt(-1))"),
        ("(a**4 + 1)/(a**2 - sqrt(-1))", "a**2 + sqrt(-1)"),
        ("(a**2 - sqrt(-1))**2/(a**4 + 1)", "(a**2 - sqrt(-1))/(a**2 + sqrt(-1))"),
        # a^4 - 10 a^2 + 1 has the roots +-sqrt(2) +- sqrt(3).
        ("sqrt(2)*(a**4 - 10*a**2 + 1)", "sqrt(2)*(a**2 + 2*sqrt(2)*a - 1)*(a**2 - 2*sqrt(2)*a - 1)"),
        ("(a**4 + 2)*sqrt(-1)", "sqrt(-1)*(a**4 + 2)"),
        ("((a**3 + sqrt(-1)*a + 2)*(a**2 + a + sqrt(-1)*3))**2",
         "(a**2 + a + 3*sqrt(-1))**2*(a**3 + sqrt(-1)*a + 2)**2"),
        ("(3 + 2*sqrt(-1))*a + 1", "(3 + 2*sqrt(-1))*(13*a + 3 - 2*sqrt(-1))/13"),
        ("1/sqrt(2)", "sqrt(2)/2"),
        ("-(1 + sqrt(-1))/6", "-(1 + sqrt(-1))/6"),
        ("(a**2 + 1)/(a - sqrt(-1))", "a + sqrt(-1)"),
    ],
)  # fmt: skip
def test_factors_and_lowest_terms_by_hand(text, shown):
    assert str(line(text)) == shown
    assert equal(sym(text), sym(shown))


@pytest.mark.parametrize(
    ("text", "shown"),
    [
        ("(a**2 + (m - 1)**2)/(a + sqrt(-1)*(m - 1))**3",
         "(a - sqrt(-1)*m + sqrt(-1))/(a + sqrt(-1)*m - sqrt(-1))**2"),
        ("(a*m - sqrt(2))*(a - m*sqrt(2))**2", "(a - sqrt(2)*m)**2*(a*m - sqrt(2))"),
        ("(a**2*m**2 - 2)/(a + sqrt(2))", "(a**2*m**2 - 2)/(a + sqrt(2))"),
        ("(m**2 - 2)/(a + sqrt(2)*m)/(m + sqrt(2))", "(m - sqrt(2))/(a + sqrt(2)*m)"),
    ],
)  # fmt: skip
def test_linear_factors_in_two_symbols(text, shown):
    function = read(text)
    assert str(function) == shown
    assert equal(sym(text), sym(shown))
    assert read(shown) == function


def test_what_is_rational_is_a_function_over_q():
    function = line("(a + sqrt(-1))*(a - sqrt(-1))/(2*a)")
    assert function == line("(a**2 + 1)/(2*a)")
    assert function.radicand == 0
    assert hash(function) == hash(line("(a**2 + 1)/(2*a)"))
    assert line("a + sqrt(-1)") - I == line("a")
    assert line("sqrt(-1)*sqrt(-1)") == -1
    assert line("a + sqrt(-1)") != line("a + sqrt(-3)")
    assert line("a + sqrt(-1)").conjugate() == line("a - sqrt(-1)")
    with pytest.raises(ValueError, match="one quadratic field"):
        line("a + sqrt(-1)") + line("a + sqrt(-3)")


@pytest.mark.parametrize(
    "text",
    ["sqrt(8)", "sqrt(1)", "sqrt(0)", "sqrt(a)", "sqrt()", "sqrt", "sqrt(-1", "sqrt(2) + sqrt(3)", "sqrt(2)**2",
     "sqrt(99999999999999999999)", "1/(a*sqrt(2) - sqrt(2)*a)", "a*sqrt(--2)", "i*a", "(a + m + sqrt(-1))**3999",
     "1/(a + sqrt(-1))**2100"],
)  # fmt: skip
def test_what_is_no_function_is_refused(text):
    with pytest.raises(ValueError, match="rational function"):
        read(text)


def test_poles_and_residues_against_sympy():
    text = "(3*a**2 - sqrt(-1)*a + 5)/((a - sqrt(-1))**3*(2*a + 7)*(2*a + 1 + 3*sqrt(-1)))"
    function, expected = line(text), sym(text)
    assert [(str(p.location), p.order) for p in function.poles()] == [
        ("-7/2", 1), ("-1/2 - 3/2*sqrt(-1)", 1), ("1*sqrt(-1)", 3)
    ]  # fmt: skip
    for pole in function.poles():
        where, n = sym(str(pole.location)), pole.order
        rest = sympy.cancel(expected * (A - where) ** n, extension=sympy.I)
        value = sympy.diff(rest, A, n - 1).subs(A, where) / sympy.factorial(n - 1)
        assert equal(sym(str(function.residue(pole.location))), value)
    assert function.residue("-i") == 0
    assert function.residue("i") == function.residue(I)


def test_poles_of_a_function_over_q_that_lie_beyond_q():
    function = line("1/((3*a**2 + 4*a + 2)**2*(a**2 - 2))")
    places = [(p.location, p.order) for p in function.poles()]
    assert places == [
        (quadratic(Rational(-2, 3), Rational(-1, 3), -2), 2), (quadratic(Rational(-2, 3), Rational(1, 3), -2), 2),
        (-square_root(2), 1), (square_root(2), 1),
    ]  # fmt: skip
    for place, conjugate in zip([p for p, _ in places[:2]], [p for p, _ in places[1::-1]], strict=True):
        rest = 1 / (9 * (A - sym(str(conjugate))) ** 2 * (A**2 - 2))
        expected = sympy.diff(rest, A).subs(A, sym(str(place)))
        assert equal(sym(str(function.residue(place))), expected)
    # At sqrt(2): 1/((3*2 + 4 sqrt(2) + 2)^2 * 2 sqrt(2)).
    assert equal(sym(str(function.residue("sqrt(2)"))), 1 / ((8 + 4 * sympy.sqrt(2)) ** 2 * 2 * sympy.sqrt(2)))
    with pytest.raises(InputError, match="not linear in a"):
        line("1/(a**3 + 2)").poles()
    with pytest.raises(InputError, match="not linear in a"):
        line("1/(a**2 + sqrt(2))").poles()


def test_poles_that_move_with_another_symbol():
    function = read("(a + 3)/((a - sqrt(-1)*m)*(a + 2*m - sqrt(-1))**2)")
    poles = function.poles("a")
    assert [(str(p.location), p.order) for p in poles] == [("-(2*m - sqrt(-1))", 2), ("sqrt(-1)*m", 1)]
    for pole, where in zip(poles, (sympy.I - 2 * M, sympy.I * M), strict=True):
        assert equal(sym(str(function.residue(pole.location, "a"))), sympy.residue(sym(str(function)), A, where))


def test_taylor_coefficients_against_sympy():
    text = "(a*m**2 - sqrt(-1)*m - 5*a)/((a - sqrt(-1))*(m + 3))"
    function, expected = read(text), sym(text)
    for about, centre in ((0, 0), ("i", sympy.I), ("2 - i/3", 2 - sympy.I / 3)):
        for n, coefficient in enumerate(function.taylor("m", 3, about)):
            assert equal(sym(str(coefficient)), sympy.diff(expected, M, n).subs(M, centre) / sympy.factorial(n))
    with pytest.raises(InputError, match="pole of order 1"):
        function.taylor("a", 1, "i")
    with pytest.raises(InputError, match=r"sqrt\(2\)"):
        function.taylor("a", 1, "sqrt(2)")


def test_values_of_every_kind():
    function = line("(a**2 - sqrt(-1))/(a - 5)")
    assert function.at(a="1/2") == (Rational(1, 4) - I) / Rational(-9, 2)
    assert function.at(a="i/2") == function.at(a=sympy.I / 2) == (Rational(-1, 4) - I) / (I / 2 - 5)
    for z in (0.3 + 2j, 1.5, -4j):
        assert cmath.isclose(function.at(a=z), (z**2 - 1j) / (z - 5), rel_tol=1e-14)
    assert function.at(a=flint.arb(2)).overlaps(flint.acb(4, -1) / -3)
    real = line("(a - sqrt(2))/(a + sqrt(2))")
    assert isinstance(real.at(a=flint.arb(1)), flint.arb)
    assert cmath.isclose(real.at(a=1.0), (1 - 2**0.5) / (1 + 2**0.5), rel_tol=1e-14)
    # Near the zero sqrt(2) the parts cancel.
    x = 1.4142135623730951
    expected = (sympy.Rational(x) - sympy.sqrt(2)) / (sympy.Rational(x) + sympy.sqrt(2))
    assert cmath.isclose(real.at(a=x), complex(sympy.N(expected, 30)), rel_tol=1e-14)
    with pytest.raises(InputError, match="a = 5 is a pole"):
        function.at(a=5)
    with pytest.raises(InputError, match="pole"):
        real.at(a="-sqrt(2)")
    with pytest.raises(InputError, match="one quadratic field"):
        function.at(a="sqrt(2)")
    with pytest.raises(InputError, match="one quadratic field"):
        read("a + m").at(a="sqrt(2)", m="i")


def test_giving_some_of_the_symbols():
    function = read("(a + m)/(a - 2*m)")
    half = function.at(m="i/2")
    assert half.symbols == ("a",)
    assert str(half) == "(2*a + sqrt(-1))/(2*(a - sqrt(-1)))"
    assert half.at(a=3) == function.at(a=3, m="i/2")
    assert half.at(a="i/2") == -2
    assert read("(a + sqrt(-1))/(m - sqrt(-1))").at(a="i").at(m="2*i") == 2
    with pytest.raises(InputError, match="whatever the other symbols are"):
        read("a/(m - sqrt(-1))").at(m="i")
    with pytest.raises(InputError, match="is not exact"):
        function.at(m=0.5)
    with pytest.raises(InputError, match="one quadratic field"):
        half.at(a="sqrt(3)")


def test_latex_is_that_of_sympy():
    assert line("(a + sqrt(-1))/(a - sqrt(-1))**2").latex() == r"\frac{a + i}{\left(a - i\right)^{2}}"
    assert line("a/sqrt(21)").latex() == r"\frac{\sqrt{21}}{21} a"


def test_numbers_of_any_length_are_written():
    """Python's own integers refuse to be written beyond 4300 digits."""
    digits = "7" * 5000
    text = f"({digits} + sqrt(-1))*(a + 1{digits}*sqrt(-1))/(3{digits}*a)"
    function = line(text)
    assert str(function) == f"({digits} + sqrt(-1))*(a + 1{digits}*sqrt(-1))/(3{digits}*a)"
    assert line(str(function)) == function


def test_values_where_only_the_denominator_over_the_integers_vanishes():
    """1/(a - i) is (a + i)/(a^2 + 1): at a = -i nothing is wrong with it."""
    function = line("(a + 2)/((a - sqrt(-1))**2*(a - 1 + sqrt(-1)))")
    for place in ("-i", "1 + i"):
        where = sympy.sympify(place.replace("i", "I"))
        expected = sym(str(function)).subs(A, where)
        for value in (function.at(a=place), PointFunction(function).at([as_number(place)])):
            assert equal(sym(str(value)), expected)
        assert function.taylor("a", 0, place) == (function.at(a=place),)
        assert function.valuation(place) == 0
    assert PointFunction(function).at([I]) == "pole of order 2"
    assert function.valuation("i") == -2
    with pytest.raises(InputError, match="is a pole"):
        function.at(a="i")
    two = read("(a + m)/((a - sqrt(-1)*m)*(m - sqrt(-1)))")
    assert str(two.at(m="-i")) == "sqrt(-1)*(a - sqrt(-1))/(2*(a - 1))"
    assert two.at(m="-i").at(a="3") == two.at(a="3", m="-i") == PointFunction(two).at([Rational(3), -I])
    assert two.at(a="1", m="-1") == 0
    assert PointFunction(two).at([Rational(0), I]) == "pole"
    assert PointFunction(two).at([Rational(0), Rational(0)]).startswith("0/0")
    assert read("a*(m + sqrt(-1))/(m - sqrt(-1))").at(m="-i") == 0
