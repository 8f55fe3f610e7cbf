"""A constant and factors with exponents as text in Python syntax, and as a sympy expression."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

from ratomega.exact.field_factors import Factors
from ratomega.exact.field_polynomials import Factor, factor_terms, factor_text, signed_text
from ratomega.exact.quadratic import Number, Quadratic, quadratic
from ratomega.exact.rational import Rational, common_denominator

__all__ = ["factored_sympy", "factored_text"]


def factored_text(factors: Factors) -> str:
    """The numerator, and the denominator after "/" where there is one."""
    constant, pairs = factors
    above = [_power_text(f, e) for f, e in pairs if e > 0]
    below = [_power_text(f, -e) for f, e in pairs if e < 0]
    sign, top, bottom = _constant_texts(constant)
    above = [*top, *above] or ["1"]
    below = [*bottom, *below]
    text = "*".join(above)
    if len(above) == 1 and not below and text.startswith("(") and text.endswith(")") and sign == "+":
        text = text[1:-1]
    if below:
        text = f"{text}/{below[0]}" if len(below) == 1 else f"{text}/({'*'.join(below)})"
    return f"-{text}" if sign == "-" else text


def _power_text(factor: Factor, exponent: int) -> str:
    text = factor_text(factor)
    base = text if len(factor_terms(factor)) == 1 else f"({text})"
    return f"{base}**{exponent}" if exponent > 1 else base


def _constant_texts(constant: Number) -> tuple[str, list[str], list[str]]:
    """Sign, factors above and factors below; a factor 1 is left out.

    >>> from ratomega.exact.quadratic import quadratic
    >>> _constant_texts(quadratic(Rational(-83, 72), Rational(-4, 3), -1))
    ('-', ['(83 + 96*sqrt(-1))'], ['72'])
    """
    if isinstance(constant, Quadratic):
        scale = common_denominator([constant.x, constant.y])
        content = math.gcd(int((constant.x * scale).p), int((constant.y * scale).p))
        whole = quadratic(constant.x * scale / content, constant.y * scale / content, constant.d)
        sign, size = signed_text(whole)
        above, below = [str(Rational(content)), size], str(Rational(scale))
    else:
        sign, size = signed_text(Rational(constant.p))
        above, below = [size], str(constant.q)
    return sign, [x for x in above if x != "1"], [below] if below != "1" else []


def factored_sympy(names: Sequence[str], factors: Factors) -> Any:
    """The product in ``sympy.Symbol``s of these names."""
    import sympy

    symbols = [sympy.Symbol(name) for name in names]
    constant, pairs = factors
    parts = [_sympy_number(constant)] if constant != 1 or not pairs else []
    for factor, exponent in pairs:
        terms = (
            sympy.Mul(_sympy_number(c), *(x**e for x, e in zip(symbols, powers, strict=True)))
            for powers, c in factor_terms(factor)
        )
        parts.append(sympy.Add(*terms) ** exponent)
    # Evaluated, sympy would multiply the constant into a sum.
    return sympy.Mul(*parts, evaluate=False)


def _sympy_number(value: Number) -> Any:
    import sympy

    if isinstance(value, Quadratic):
        return _sympy_number(value.x) + _sympy_number(value.y) * sympy.sqrt(value.d)
    return sympy.Rational(int(value.p), int(value.q))
