"""The quadratic field: arithmetic against sympy, normal form, text and back, decimals, the squarefree form."""

from __future__ import annotations

import pytest
import sympy
from flint import fmpq
from hypothesis import given, settings
from hypothesis import strategies as st

from ratomega.errors import InputError
from ratomega.exact.laurent import Laurent
from ratomega.exact.quadratic import (
    Quadratic,
    approximate_text,
    as_integer,
    as_number,
    from_number_text,
    number_text,
    quadratic,
    split_square,
    square_root,
)
from ratomega.exact.quadratic_poly import QuadraticPoly, low_product, poly_of

TIMES = {"deadline": None, "max_examples": 60}
RADICANDS = (-7, -3, -1, 2, 5, 21)
small = st.builds(fmpq, st.integers(-9, 9), st.integers(1, 9))


@st.composite
def pairs(draw):
    d = draw(st.sampled_from(RADICANDS))
    return quadratic(draw(small), draw(small), d), quadratic(draw(small), draw(small), d)


def sym(value):
    if isinstance(value, Quadratic):
        return sym(value.x) + sym(value.y) * sympy.sqrt(value.d)
    return sympy.Rational(int(value.p), int(value.q))


@settings(**TIMES)
@given(pairs())
def test_the_four_operations_against_sympy(both):
    a, b = both
    for ours, theirs in [(a + b, sym(a) + sym(b)), (a - b, sym(a) - sym(b)), (a * b, sym(a) * sym(b))]:
        assert sympy.expand(sym(ours) - theirs) == 0
        assert as_number(theirs) == ours
    if b != 0:
        assert a / b * b == a
        assert sympy.expand(sym(a / b) * sym(b) - sym(a)) == 0


@pytest.mark.parametrize(
    "text",
    ["i", "-i", "i/2", "-2*i/3", "1+2*i/3", "1 - sqrt(21)/7", "-3/2*sqrt(-3)/5", "1.5*i + 2", "i - 1/3", " 2 * i / 3 "],
)
def test_numbers_as_text(text):
    assert sympy.expand(sym(as_number(text)) - sympy.sympify(text.replace("i", "I"), rational=True)) == 0


@pytest.mark.parametrize(
    "text",
    ["1i", "i i", "i*2", "ii", "hi", "i/2/3", "1 +", "-+i", "3 4*i", "i/0", "1/i", "2*3 + i", "1e3*i", "sqrt(2) + i",
     "sqrt(8)", "sqrt(1)", "sqrt()", "sqrt(-1", "\u0663*i", "1" * 3000 + "*i", "sqrt(99999999999999)"],
)  # fmt: skip
def test_what_is_no_number(text):
    with pytest.raises(InputError) as caught:
        as_number(text, "a")
    assert caught.value.problems[0].where == "a"
    assert len(caught.value.problems[0].message) < 200


@settings(**TIMES)
@given(pairs(), small, st.integers(-5, 5))
def test_rationals_and_integers_on_either_side(both, x, n):
    a = both[0]
    for other in (x, n):
        assert a + other == other + a == a - (-other)
        assert other - a == -(a - other)
        assert a * other == other * a
        if a != 0:
            assert other / a * a == other
        if other != 0:
            assert a / other * other == a


@settings(**TIMES)
@given(pairs())
def test_normal_form(both):
    a, b = both
    for value in (a + b, a - b, a * b, a - a, a + (b - a)):
        assert isinstance(value, fmpq) or value.y != 0
    assert a - a == 0
    assert isinstance(a - a, fmpq)
    if isinstance(a, Quadratic):
        assert isinstance(a * a.conjugate(), fmpq)
        assert a != a.x
        assert (a == a.conjugate()) is False
        assert len({a, quadratic(a.x, a.y, a.d), a.conjugate()}) == 2


def test_two_fields_are_never_mixed():
    for operation in ("__add__", "__sub__", "__mul__", "__truediv__"):
        with pytest.raises(ValueError, match="one quadratic field"):
            getattr(square_root(2), operation)(square_root(3))


def test_powers():
    golden = (1 + square_root(5)) / 2
    assert golden**2 == golden + 1
    assert golden**-1 == golden - 1
    assert golden**0 == 1
    # Lucas numbers: golden^n + (1 - golden)^n.
    assert [golden**n + (1 - golden) ** n for n in range(2, 8)] == [3, 4, 7, 11, 18, 29]


@settings(**TIMES)
@given(pairs())
def test_text_and_back(both):
    text = number_text(both[0])
    assert from_number_text(text) == both[0]
    assert number_text(from_number_text(text)) == text
    assert sympy.expand(sympy.sympify(text) - sym(both[0])) == 0


@pytest.mark.parametrize(
    "text",
    ["sqrt(2)", "1 + sqrt(2)", "1 + -1*sqrt(2)", "0 + 1*sqrt(2)", "1+1*sqrt(2)", "0*sqrt(2)", "1*sqrt(8)", "1*sqrt(1)",
     "2/4*sqrt(2)", "1*sqrt(2) + 1", "1*sqrt(0)", "1*sqrt(10000000000001)", "1*sqrt(2) ", "i", "1.5 + 1*sqrt(2)",
     "1 - 0*sqrt(2)", "--1*sqrt(2)"],
)  # fmt: skip
def test_other_texts_are_refused(text):
    with pytest.raises(ValueError, match=r"exact number|lowest terms|normal form"):
        from_number_text(text)


@pytest.mark.parametrize("n", [*range(-60, 0), *range(1, 60), 10**12, -999999999989, 2**39])
def test_squarefree_form(n):
    root, rest = split_square(n)
    assert root**2 * rest == n
    assert all(exponent == 1 for prime, exponent in sympy.factorint(rest).items() if prime != -1)


@pytest.mark.parametrize(
    ("d", "said"), [(8, r"2\*sqrt\(2\)"), (-75, r"5\*sqrt\(-3\)"), (81, "write 9"), (0, "write 0")]
)
def test_what_is_not_squarefree_is_refused_with_a_suggestion(d, said):
    with pytest.raises(InputError, match=said):
        square_root(d)


@pytest.mark.parametrize(
    "value",
    [
        quadratic(fmpq(1, 3), fmpq(-5, 7), 2),
        quadratic(fmpq(0), fmpq(22, 7), 3),
        # A difference of nearly equal numbers: 10^20 is the floor of 10^20 sqrt(2) / sqrt(2) no double can see.
        quadratic(fmpq(-141421356237309504880), fmpq(10**20), 2),
        quadratic(fmpq(10) ** 30, fmpq(1), 5),
    ],
)
def test_real_decimals_against_sympy(value):
    assert sympy.Rational(approximate_text(value)) == sympy.Rational(f"{sympy.N(sym(value), 60).round(60):.11e}")


def test_complex_decimals():
    assert approximate_text(quadratic(fmpq(0), fmpq(1), -1)) == "i"
    assert approximate_text(quadratic(fmpq(1, 2), fmpq(-3), -1)) == "0.5 - 3*i"
    assert approximate_text(quadratic(fmpq(0), fmpq(-1, 3), -2)) == f"-{float(sympy.sqrt(2) / 3):.12f}*i"


def test_integers_are_recognised():
    assert as_integer(fmpq(-6, 2)) == -3
    assert as_integer(square_root(2) * square_root(2)) == 2
    assert as_integer(1 + square_root(-1)) is None


@st.composite
def coefficient_lists(draw):
    d = draw(st.sampled_from(RADICANDS))
    number = st.builds(lambda x, y: quadratic(x, y, d), small, small)
    return [draw(st.lists(number, min_size=1, max_size=4)) for _ in range(2)]


@settings(**TIMES)
@given(coefficient_lists(), st.integers(1, 6))
def test_polynomials_and_series_against_convolution(lists, length):
    left, right = lists
    plain = [
        sum((left[k] * right[n - k] for k in range(n + 1) if k < len(left) and n - k < len(right)), fmpq(0))
        for n in range(length)
    ]
    product = low_product(poly_of(left), poly_of(right), length)
    assert [product[n] for n in range(length)] == plain
    assert not isinstance(product, QuadraticPoly) or not product.irrational.is_zero()
    one, two = (Laurent.from_coefficients(-1, side, precision=3) for side in lists)
    assert [(one + two).coefficient(n) for n in range(-1, 3)] == [
        (left[n] if n < len(left) else 0) + (right[n] if n < len(right) else 0) for n in range(4)
    ]
    assert (one - one).is_zero()
    if not one.is_zero():
        assert (one * one.inverse()).coefficients() == {0: 1}
    assert one.scaled(square_root(left[0].d) if isinstance(left[0], Quadratic) else 3).precision == 3
