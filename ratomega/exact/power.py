"""Exact power series with constant term, truncated at a length that the caller names.

A series is the list of its coefficients. Quadratic algorithms in exact rationals, except for products and compositions,
which go through ``fmpq_poly``.
"""

from __future__ import annotations

from collections.abc import Sequence

from flint import fmpq_poly

from ratomega.exact.rational import ONE, ZERO, Rational

__all__ = ["composed", "exponential", "logarithmic_derivative", "product", "reciprocal"]


def product(left: Sequence[Rational], right: Sequence[Rational], length: int) -> list[Rational]:
    """The first ``length`` coefficients of the product.

    >>> product([ONE, ONE], [ONE, -ONE], 3)
    [1, 0, -1]
    """
    return _padded(fmpq_poly(list(left)).mul_low(fmpq_poly(list(right)), length), length)


def _padded(poly: fmpq_poly, length: int) -> list[Rational]:
    known = poly.coeffs()[:length]
    return known + [ZERO] * (length - len(known))


def reciprocal(series: Sequence[Rational], length: int) -> list[Rational]:
    """1 / series for a series that starts with 1. Raises ``ValueError`` for any other constant term.

    >>> reciprocal([ONE, -ONE], 4)
    [1, 1, 1, 1]
    """
    if series[0] != 1:
        raise ValueError(f"the constant term is {series[0]}, not 1")
    result = [ONE]
    for n in range(1, length):
        last = min(n, len(series) - 1)
        result.append(-sum((series[k] * result[n - k] for k in range(1, last + 1)), ZERO))
    return result


def logarithmic_derivative(series: Sequence[Rational], length: int) -> list[Rational]:
    """x d/dx log(series), for a series that starts with 1.

    >>> logarithmic_derivative([ONE, -ONE], 4)
    [0, -1, -1, -1]
    """
    steps = [series[n] * n for n in range(min(length, len(series)))]
    return product(steps, reciprocal(series, length), length)


def exponential(slope: Sequence[Rational], length: int) -> list[Rational]:
    """The series f with f(0) = 1 and x f'/f = ``slope`` (a series without constant term).

    Exponents and powers meet here: f^c has c times the slope of f.

    >>> exponential([ZERO, ONE], 4)
    [1, 1, 1/2, 1/6]
    >>> exponential([c / 2 for c in logarithmic_derivative([ONE, ONE], 3)], 3)
    [1, 1/2, -1/8]
    """
    result = [ONE]
    for n in range(1, length):
        last = min(n, len(slope) - 1)
        result.append(sum((slope[k] * result[n - k] for k in range(1, last + 1)), ZERO) / n)
    return result


def composed(outer: Sequence[Rational], inner: Sequence[Rational], length: int) -> list[Rational]:
    """outer(inner(x)), for an inner series without constant term. Horner: ``length`` products.

    >>> composed([ONE, ONE, ONE], [ZERO, ONE, ONE], 4)
    [1, 1, 2, 2]
    """
    if inner and inner[0] != 0:
        raise ValueError("the inner series has a constant term")
    step = fmpq_poly(list(inner[:length]))
    result = fmpq_poly([])
    for index in range(min(len(outer), length) - 1, -1, -1):
        result = result.mul_low(step, length - index) + outer[index]
    return _padded(result, length)
