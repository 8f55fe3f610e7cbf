"""Integer polynomials in several symbols: contexts, parts, values, text. Terms are in lexicographic order."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from flint import Ordering, fmpq, fmpz, fmpz_mpoly, fmpz_mpoly_ctx

from ratomega.exact.rational import ZERO

__all__ = ["coefficients_in", "context_of", "evaluated", "poly_text", "power_text"]


def context_of(symbols: Sequence[str]) -> fmpz_mpoly_ctx:
    return fmpz_mpoly_ctx.get(tuple(symbols), Ordering.lex)


def coefficients_in(poly: fmpz_mpoly, place: int) -> list[fmpz_mpoly]:
    """The coefficients of the powers of one symbol, as polynomials of all symbols."""
    parts: list[dict[tuple[int, ...], fmpz]] = [{} for _ in range(int(poly.degrees()[place]) + 1)] or [{}]
    for powers, c in poly.to_dict().items():
        rest = tuple(0 if n == place else int(e) for n, e in enumerate(powers))
        parts[int(powers[place])][rest] = c
    return [poly.context().from_dict(part) for part in parts]


def evaluated(poly: fmpz_mpoly, values: Sequence[Any]) -> Any:
    """The polynomial at numbers of any kind that add and multiply, symbol by symbol with Horner's scheme."""
    return _nested({tuple(int(e) for e in powers): c for powers, c in poly.to_dict().items()}, list(values))


def _nested(terms: Mapping[tuple[int, ...], fmpz], values: list[Any]) -> Any:
    if not values:
        return fmpq(terms.get((), fmpz(0)))
    rows: dict[int, dict[tuple[int, ...], fmpz]] = {}
    for powers, c in terms.items():
        rows.setdefault(powers[0], {})[powers[1:]] = c
    result: Any = ZERO
    for power in range(max(rows, default=-1), -1, -1):
        result = result * values[0]
        if power in rows:
            result = result + _nested(rows[power], values[1:])
    return result


def poly_text(poly: fmpz_mpoly) -> str:
    """An integer polynomial in Python syntax, leading term first.

    >>> poly_text(context_of(("a", "m")).from_dict({(2, 1): -3, (0, 1): 1, (0, 0): 4}))
    '-3*a**2*m + m + 4'
    """
    names = poly.context().names()
    terms = []
    for powers, c in poly.terms():
        pieces = [f"{name}**{e}" if e > 1 else name for name, e in zip(names, powers, strict=True) if e]
        if abs(c) != 1 or not pieces:
            pieces.insert(0, str(abs(c)))
        terms.append(("-" if c < 0 else "+", "*".join(pieces)))
    text = "".join(f" {sign} {body}" for sign, body in terms)
    return text[3:] if text.startswith(" + ") else f"-{text[3:]}" if text else "0"


def power_text(poly: fmpz_mpoly, exponent: int) -> str:
    text = poly_text(poly)
    base = text if len(poly.to_dict()) == 1 else f"({text})"
    return f"{base}**{exponent}" if exponent > 1 else base
