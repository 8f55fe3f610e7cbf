"""The values of a function that is given by its factors: exact ones, balls, complex numbers.

Factor by factor: an expanded polynomial loses digits near its zeros, and over a quadratic field only the factors show
the function in lowest terms.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from flint import acb, arb, ctx

from ratomega.errors import InputError
from ratomega.exact.field_factors import Factors
from ratomega.exact.field_polynomials import factor_value
from ratomega.exact.quadratic import Number, square_root
from ratomega.exact.rational import Rational
from ratomega.exact.values import Value, ball_value

__all__ = ["ball_of_factors", "complex_of_factors", "exact_of_factors"]

# A complex number is worked out with this many bits, doubled until both parts are good to a double.
FIRST_BITS = 128
MOST_BITS = 1 << 16


def exact_of_factors(factors: Factors, radicand: int, values: Sequence[Number]) -> tuple[Number, Number]:
    """Numerator and denominator at exact numbers of the field, either of which can be zero."""
    constant, powers = factors
    root = square_root(radicand) if radicand else None
    top: Any = constant
    bottom: Any = Rational(1)
    for factor, exponent in powers:
        value = factor_value(factor, values, root) ** abs(exponent)
        top, bottom = (top * value, bottom) if exponent > 0 else (top, bottom * value)
    return top, bottom


def ball_of_factors(factors: Factors, radicand: int, balls: Sequence[arb | acb]) -> arb | acb:
    """The value with the precision of flint's context."""
    constant, powers = factors
    root = ball_value(square_root(radicand)) if radicand else None
    result: arb | acb = ball_value(constant)
    for factor, exponent in powers:
        value: arb | acb = factor_value(factor, balls, root)
        result = result * value**exponent if exponent > 0 else result / value**-exponent
    return result


def complex_of_factors(factors: Factors, radicand: int, values: Sequence[Value], where: str) -> complex:
    """The value good to a double. Raises ``InputError``, about ``where``, when that takes too many bits."""
    bits = FIRST_BITS
    while bits <= MOST_BITS:
        with ctx.workprec(bits):
            value = acb(ball_of_factors(factors, radicand, [ball_value(x) for x in values]))
            if value.rel_accuracy_bits() >= 60 or value == 0:
                return complex(value)
        bits *= 2
    raise InputError.single("the value is a pole, or too close to one to be told from it", where)
