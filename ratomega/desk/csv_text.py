"""Coefficients as comma-separated values, for a spreadsheet or a program.

Numerator and denominator stand in columns of their own. Text that a spreadsheet would take for a formula, because it
begins with = + - or @, gets an apostrophe in front.
"""

from __future__ import annotations

import csv
import io

from ratomega.exact.quadratic import Number, Quadratic, approximate_text, number_text
from ratomega.exact.rational_function import RationalFunction
from ratomega.results.limits import Coefficient, LimitResult

__all__ = ["guarded", "limit_csv"]

_FORMULA = ("=", "+", "-", "@", "\t", "\r")


def guarded(text: str) -> str:
    """Text that no spreadsheet takes for a formula.

    >>> guarded("=1+1"), guarded("left")
    ("'=1+1", 'left')
    """
    return f"'{text}" if text.startswith(_FORMULA) else text


def limit_csv(result: LimitResult, *, factored: bool = False) -> str:
    """One row a charge: charges by node, status, order of a pole, numerator, denominator, approximation.

    For numbers beyond the rationals and for functions of symbols ``numerator`` holds the whole text and the denominator
    is empty. With ``factored`` a column has the prime factors of the denominator.
    """
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    names = [node.name for node in result.header.case.theory.nodes]
    charges = ["charge"] if len(names) == 1 else [guarded(f"charge {name}") for name in names]
    extra = ["denominator factored"] if factored else []
    writer.writerow([*charges, "status", "order", "numerator", "denominator", "approximate", *extra])
    for c in result.coefficients:
        value = _shown(c)
        above, below, near = _cells(value)
        last = [_factors(value)] if factored else []
        writer.writerow([*c.charge, c.status, c.order, above, below, near, *last])
    return out.getvalue()


def _shown(c: Coefficient) -> Number | RationalFunction:
    if c.value is not None:
        return c.value
    return c.leading if c.leading is not None else c.values[0].value


def _cells(value: Number | RationalFunction) -> tuple[str, str, str]:
    if isinstance(value, RationalFunction):
        return guarded(str(value)), "", ""
    if isinstance(value, Quadratic):
        return guarded(number_text(value)), "", guarded(approximate_text(value, 15))
    return str(value.p), str(value.q), approximate_text(value, 15)


def _factors(value: Number | RationalFunction) -> str:
    """The denominator as a product of prime powers.

    >>> from ratomega.exact.rational import Rational
    >>> _factors(Rational(1, 360))
    '2^3*3^2*5'
    """
    if isinstance(value, (Quadratic, RationalFunction)):
        return ""
    return "*".join(f"{p}^{e}" if e > 1 else str(p) for p, e in value.q.factor()) or "1"
