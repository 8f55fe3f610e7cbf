"""Rational functions over products of linear forms."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence

from ratomega.exact.factored import Whole
from ratomega.exact.polynomials import context_of
from ratomega.exact.quadratic import Number, Quadratic
from ratomega.exact.rational import Rational
from ratomega.exact.rational_function import RationalFunction, function_of

__all__ = ["function_of_planes"]


def function_of_planes(
    coefficients: Mapping[tuple[int, ...], Number],
    planes: Sequence[tuple[Sequence[Whole], int]],
    symbols: Sequence[str],
) -> RationalFunction:
    """The polynomial with the given coefficients over a product of linear forms (c_0, c_1, ...) with multiplicities.

    All numbers lie in one field.

    >>> half = Rational(1, 2)
    >>> str(function_of_planes({(0,): half, (1,): half}, [((-1, 2), 1), ((1, 1), 2)], ("a",)))
    '1/(2*(2*a - 1)*(a + 1))'
    """
    context = context_of(symbols)
    denominator = context.constant(1)
    beyond: Counter[RationalFunction] = Counter()
    powers = [(0,) * len(symbols), *(tuple(int(s == p) for s in range(len(symbols))) for p in range(len(symbols)))]
    for plane, times in planes:
        numbers: list[Number] = [c if isinstance(c, Quadratic) else Rational(c) for c in plane]
        form = function_of(dict(zip(powers, numbers, strict=True)), context.constant(1), symbols)
        if form.radicand:
            beyond[form] += times
        else:
            denominator *= form.numerator**times
    rest = RationalFunction.constant(1, symbols)
    for form, times in beyond.items():
        # A form and its conjugate are one polynomial over the integers: what has no partner is divided by.
        shared = min(times, beyond.get(form.conjugate(), 0))
        if form.polynomials()[2].leading_coefficient() > 0:
            denominator *= (form * form.conjugate()).numerator ** shared
        rest = rest * form ** (times - shared)
    return function_of(coefficients, denominator, symbols) / rest
