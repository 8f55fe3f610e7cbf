"""Integer polynomials in several symbols: contexts, parts, values, text. Terms are in lexicographic order."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from flint import Ordering, fmpq, fmpz, fmpz_mpoly, fmpz_mpoly_ctx

from ratomega.exact.rational import ZERO

__all__ = ["coefficients_in", "context_of", "evaluated", "joined_terms", "monomial_text", "poly_text"]


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
    return joined_terms(("-" if c < 0 else "+", monomial_text(str(abs(c)), names, e)) for e, c in poly.terms())


def monomial_text(size: str, names: Sequence[str], powers: Sequence[int]) -> str:
    """``size``, the text of a factor, times the powers of the symbols."""
    pieces = [f"{name}**{e}" if e > 1 else name for name, e in zip(names, powers, strict=True) if e]
    return "*".join(pieces if pieces and size == "1" else [size, *pieces])


def joined_terms(terms: Iterable[tuple[str, str]]) -> str:
    """(sign, text) of every term as a sum; "0" where there is none."""
    text = "".join(f" {sign} {body}" for sign, body in terms)
    return text[3:] if text.startswith(" + ") else f"-{text[3:]}" if text else "0"
