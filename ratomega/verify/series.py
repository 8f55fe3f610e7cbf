"""Power series in the counting parameters, as functions from a charge to a coefficient.

Coefficients are asked for one by one, cheapest first, so a series is a function that remembers. The constant
coefficient of what is inverted must not be zero, that of a logarithm is divided out.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from itertools import product

from ratomega.diagrams.tuples import Charge
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ONE, ZERO

__all__ = ["Series", "below", "inverse", "logarithm", "remembered", "rescaled", "scaled", "times"]

Series = Callable[[Charge], Number]


def remembered(series: Series) -> Series:
    """The same series, every coefficient computed once."""
    known: dict[Charge, Number] = {}

    def coefficient(charge: Charge) -> Number:
        if charge not in known:
            known[charge] = series(charge)
        return known[charge]

    return coefficient


def below(charge: Charge) -> Iterator[Charge]:
    """All charges that are at most ``charge`` at every node, ``charge`` last."""
    return product(*(range(k + 1) for k in charge))


def minus(charge: Charge, other: Charge) -> Charge:
    return tuple(k - j for k, j in zip(charge, other, strict=True))


def times(one: Series, other: Series) -> Series:
    """The product."""

    def coefficient(charge: Charge) -> Number:
        total: Number = ZERO
        for j in below(charge):
            factor = other(minus(charge, j))
            if factor != 0:
                total = total + one(j) * factor
        return total

    return remembered(coefficient)


def inverse(series: Series) -> Series:
    """1 / series."""

    def coefficient(charge: Charge) -> Number:
        lead = series((0,) * len(charge))
        if not any(charge):
            return ONE / lead
        total: Number = ZERO
        for j in below(charge):
            if any(j):
                total = total - series(j) * known(minus(charge, j))
        return total / lead

    known = remembered(coefficient)
    return known


def logarithm(series: Series) -> Series:
    """log(series / its constant coefficient), by the derivative q d/dq that counts the total charge.

    >>> from ratomega.exact.rational import Rational
    >>> exponential = [Rational(1), Rational(3), Rational(9, 2), Rational(9, 2)]
    >>> [str(logarithm(lambda k: exponential[k[0]])((k,))) for k in range(4)]
    ['0', '3', '0', '0']
    """

    def coefficient(charge: Charge) -> Number:
        if not any(charge):
            return ZERO
        lead = series((0,) * len(charge))
        total = series(charge) * sum(charge)
        for j in below(charge):
            if any(j) and j != charge:
                total = total - known(j) * series(minus(charge, j)) * sum(j)
        return total / (lead * sum(charge))

    known = remembered(coefficient)
    return known


def scaled(series: Series, factor: Number) -> Series:
    """The series times a number."""
    return lambda charge: series(charge) * factor


def rescaled(series: Series, factors: tuple[Number, ...]) -> Series:
    """The series with the counting parameter of every node multiplied by a number."""

    def coefficient(charge: Charge) -> Number:
        result = series(charge)
        for factor, k in zip(factors, charge, strict=True):
            result = result * factor**k
        return result

    return remembered(coefficient)
