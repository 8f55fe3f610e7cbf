"""The values that a function takes: exact numbers, balls, complex numbers."""

from __future__ import annotations

from collections.abc import Mapping

from flint import acb, arb, fmpq

from ratomega.exact.quadratic import Number, Quadratic, as_number

__all__ = ["Value", "ball_value", "exact_values", "value_of"]

Value = Number | arb | acb | complex


def value_of(value: object, name: str) -> Value:
    """A value as it was given for a symbol; a float is taken as what it is. Raises ``InputError``."""
    if isinstance(value, (arb, acb)):
        return value
    if isinstance(value, (complex, float)) and not isinstance(value, bool):
        return complex(value)
    return as_number(value, name)


def exact_values(given: Mapping[str, Value]) -> list[Number]:
    """The exact ones among the values."""
    return [value for value in given.values() if isinstance(value, (fmpq, Quadratic))]


def ball_value(value: Value) -> arb | acb:
    """A number as a ball of the current precision."""
    if isinstance(value, (arb, acb)):
        return value
    if isinstance(value, complex):
        return acb(value.real, value.imag) if value.imag else arb(value.real)
    if isinstance(value, Quadratic):
        root = arb(abs(value.d)).sqrt()
        return arb(value.x) + arb(value.y) * root if value.d > 0 else acb(arb(value.x), arb(value.y) * root)
    return arb(value)
