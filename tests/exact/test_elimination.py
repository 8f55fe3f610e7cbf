"""Contraction with an inverse form: against flint on numbers, against evaluation at small t on series."""

from __future__ import annotations

from random import Random

import pytest
from flint import fmpq, fmpq_mat
from hypothesis import given, settings
from hypothesis import strategies as st

from ratomega.exact.elimination import diagonalised_contraction, inverse_contraction
from ratomega.exact.laurent import Laurent
from ratomega.exact.quadratic import ONE, quadratic, square_root

entries = st.fractions(min_value=-4, max_value=4, max_denominator=5).map(lambda x: fmpq(x.numerator, x.denominator))


def series(coefficients, precision) -> Laurent:
    return Laurent.from_coefficients(0, coefficients, precision=precision)


def at(x: Laurent, t: fmpq) -> fmpq:
    return sum((c * t**n for n, c in x.coefficients().items()), fmpq(0))


@settings(deadline=None, max_examples=25)
@given(size=st.integers(1, 5), width=st.integers(1, 3), data=st.data())
def test_numbers_against_the_inverse(size, width, data) -> None:
    form = fmpq_mat(size, size)
    for i in range(size):
        for j in range(i, size):
            form[i, j] = form[j, i] = data.draw(entries)
    many = st.lists(entries, min_size=size * width, max_size=size * width)
    left, right = (fmpq_mat(size, width, data.draw(many)) for _ in range(2))
    rows = [[[series([m[i, j]], 1) for j in range(m.ncols())] for i in range(size)] for m in (form, left, right)]
    for contraction in (inverse_contraction, diagonalised_contraction):
        if form.det() == 0:
            with pytest.raises(ZeroDivisionError):
                contraction(*rows, precision=1)
            continue
        middle = left.transpose() * form.inv() * right
        expected = sum((middle[i, i] for i in range(width)), fmpq(0))
        found = contraction(*rows, precision=1)
        assert (found.coefficient(0), found.precision) == (expected, 1)


@pytest.mark.parametrize("seed", range(12))
def test_series_against_numbers_at_small_t(seed) -> None:
    # A form P^T D P with D powers of t and P invertible at t = 0: the inverse has the poles of D.
    dice = Random(seed)
    size, precision = dice.randrange(2, 6), 9
    powers = [dice.choice([0, 0, 0, 1, 1, 2, 3]) for _ in range(size)]

    def entry():
        return [fmpq(dice.randrange(-4, 5), dice.randrange(1, 4)) for _ in range(3)]

    while True:
        base = [[entry() for _ in range(size)] for _ in range(size)]
        if fmpq_mat([[x[0] for x in row] for row in base]).det() != 0:
            break
    p = [[series(x, precision) for x in row] for row in base]
    d = [Laurent.from_coefficients(n, [1], precision=precision) for n in powers]
    zero = Laurent.zero(precision=precision)
    form = [[sum((p[k][i] * d[k] * p[k][j] for k in range(size)), zero) for j in range(size)] for i in range(size)]
    left, right = ([[series(entry(), precision)] for _ in range(size)] for _ in range(2))
    found = inverse_contraction(form, left, right, precision=precision)
    assert found.precision >= precision - 2 * max(powers)
    assert found.valuation >= -max(powers)
    # At a small rational t, exactly, to the order that is left out.
    t = fmpq(1, 10**40)
    numbers = [fmpq_mat([[at(x, t) for x in row] for row in rows]) for rows in (p, left, right)]
    inner = fmpq_mat([[t ** powers[i] if i == j else fmpq(0) for j in range(size)] for i in range(size)])
    exact = (numbers[1].transpose() * (numbers[0].transpose() * inner * numbers[0]).inv() * numbers[2])[0, 0]
    assert abs(exact - at(found, t)) < 10**30 * t**found.precision


def test_an_isotropic_basis() -> None:
    # No diagonal entry leads: the basis is changed on the way.
    t, one = (Laurent.from_coefficients(n, [1], precision=5) for n in (1, 0))
    zero = Laurent.zero(precision=5)
    form = [[zero, one, zero, zero], [one, zero, zero, zero], [zero, zero, zero, t], [zero, zero, t, zero]]
    left = [[one], [zero], [one], [zero]]
    right = [[zero], [one], [zero], [one]]
    found = inverse_contraction(form, left, right, precision=5)
    assert found.coefficients() == {-1: 1, 0: 1}


def test_a_quadratic_field() -> None:
    root = square_root(5)
    form = [[series([root], 1), series([1], 1)], [series([1], 1), series([root + 1], 1)]]
    unit = [[series([1], 1)], [series([0], 1)]]
    assert inverse_contraction(form, unit, unit, precision=1).coefficient(0) == (root + 1) / (root * (root + 1) - 1)
    assert quadratic(ONE, ONE, 5) == root + 1


def test_a_form_that_is_degenerate_as_far_as_it_is_known() -> None:
    t, zero = Laurent.from_coefficients(1, [1], precision=3), Laurent.zero(precision=3)
    with pytest.raises(ZeroDivisionError, match="as far as it is known"):
        inverse_contraction([[t, zero], [zero, zero]], [[t], [t]], [[t], [t]], precision=3)
