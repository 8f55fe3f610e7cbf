"""The series of the closed forms against tables, sympy and mpmath."""

from math import comb

import mpmath
import pytest
import sympy
from flint import fmpz
from hypothesis import given, settings
from hypothesis import strategies as st

from ratomega.exact.rational import ONE, Rational, as_fraction
from ratomega.validator.qseries import (
    Multiseries,
    Series,
    binomial,
    euler_product,
    exponential,
    hypergeometric,
)

fractions = st.fractions(min_value=-3, max_value=3, max_denominator=7).map(
    lambda x: Rational(x.numerator, x.denominator)
)
tails = st.lists(fractions, min_size=5, max_size=5)


def evaluated(series: Series, x: mpmath.mpf) -> mpmath.mpf:
    return mpmath.polyval([mpmath.mpf(int(c.p)) / int(c.q) for c in reversed(series.coefficients)], x)


def test_euler_products_against_tables() -> None:
    # Ramanujan's tau, OEIS A000594, from memory.
    assert [int(c.p) for c in euler_product(Rational(24), 6).coefficients] == [1, -24, 252, -1472, 4830, -6048, -16744]
    # Partition numbers, python-flint.
    assert euler_product(-ONE, 30).coefficients == tuple(Rational(fmpz(n).partitions_p()) for n in range(31))
    # Pairs of diagrams and triples of diagrams: Vafa, Witten hep-th/9408074 for U(2) and U(3).
    assert euler_product(Rational(-2), 3).coefficients == (1, 2, 5, 10)
    assert euler_product(Rational(-3), 3).coefficients == (1, 3, 9, 22)


def test_hypergeometric_against_mpmath() -> None:
    upper, lower = [Rational(1, 3), Rational(-5, 2)], [Rational(7, 5)]
    with mpmath.workdps(40):
        x = mpmath.mpf(1) / 100
        direct = mpmath.hyp2f1(mpmath.mpf(1) / 3, mpmath.mpf(-5) / 2, mpmath.mpf(7) / 5, -3 * x)
        series = hypergeometric(upper, lower, Rational(-3), 18)
        assert mpmath.almosteq(evaluated(series, x), direct, rel_eps=mpmath.mpf(10) ** -28)


def test_elementary_series_against_sympy() -> None:
    q = sympy.Symbol("q")
    for series, expression in (
        (exponential(Rational(-2, 3), 6), sympy.exp(-2 * q / 3)),
        (binomial(Rational(-5, 2), Rational(3, 7), 6), (1 - 5 * q / 2) ** sympy.Rational(3, 7)),
        (binomial(ONE, Rational(4), 6), (1 + q) ** 4),
        (Series.make([1, 1, 1, 0, 0, 0, 0]).power(Rational(-1, 2)), (1 + q + q**2) ** sympy.Rational(-1, 2)),
        (Series.make([0, 2, -1, 0, 0, 0, 0]).exp(), sympy.exp(2 * q - q**2)),
        (Series.make([1, 2, -1, 0, 0, 0, 0]).log(), sympy.log(1 + 2 * q - q**2)),
    ):
        expansion = sympy.series(expression, q, 0, 7).removeO()
        expected = [expansion.coeff(q, n) for n in range(7)]
        assert [sympy.Rational(as_fraction(c)) for c in series.coefficients] == expected


@settings(deadline=None, max_examples=40)
@given(tails, fractions, fractions)
def test_powers_add_and_logarithms_undo_exponentials(tail: list[Rational], x: Rational, y: Rational) -> None:
    f = Series((ONE, *tail))
    assert f.power(x) * f.power(y) == f.power(x + y)
    assert f.log().exp() == f
    assert f.log().scaled(x).exp() == f.power(x)
    assert f * f.inverse() == Series.one(5)


def test_several_parameters() -> None:
    charges = [(j, k) for j in range(5) for k in range(5) if j + k <= 4]
    # 1/(1 - x) at x = q1 and at x = q2; then 1/(1 - q1 q2).
    both = Multiseries.one(charges).times(binomial(-ONE, -ONE, 4), (1, 0)).times(binomial(-ONE, -ONE, 4), (0, 1))
    assert set(both.coefficients.values()) == {ONE}
    product = both.times(binomial(-ONE, -ONE, 2), (1, 1))
    assert all(c == min(charge) + 1 for charge, c in product.coefficients.items())
    assert all(c == (-1) ** charge[1] for charge, c in both.with_signs([1, -1]).coefficients.items())
    # (1 + q1 q2^2)^3
    cube = Multiseries.one([(j, k) for j in range(4) for k in range(7)]).times(binomial(ONE, Rational(3), 3), (1, 2))
    assert {c: v for c, v in cube.coefficients.items() if v != 0} == {(n, 2 * n): comb(3, n) for n in range(4)}


@pytest.mark.parametrize(
    ("bad", "error"),
    [
        (lambda: Series.make([]), ValueError),
        (lambda: Series.make([2, 1]).power(Rational(1, 2)), ValueError),
        (lambda: Series.make([1, 1]).exp(), ValueError),
        (lambda: Series.make([0, 1]).log(), ValueError),
        (lambda: hypergeometric([ONE], [Rational(-1)], ONE, 2), ZeroDivisionError),
        (lambda: Multiseries.one([(0,), (1,), (2,)]).times(Series.make([1, 1]), (1,)), ValueError),
        (lambda: Multiseries.one([(0,), (1,)]).times(Series.make([1, 1]), (0,)), ValueError),
    ],
)
def test_what_cannot_be_done_is_refused(bad, error) -> None:
    with pytest.raises(error):
        bad()
