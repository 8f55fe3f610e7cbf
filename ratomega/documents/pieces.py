"""The small pieces that every document is made of, each read with a check of what it is.

What does not fit raises ``Misfit``, with words for a person; the door of this room makes a sentence of it, and of what
Python itself raises where a list stands for a table. Exact numbers travel as "num/den", "num" or "x + y*sqrt(d)".
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from typing import Any, TypeVar

from ratomega.case.wording import kind, shortened
from ratomega.exact.quadratic import Number, from_number_text, number_text, only_rational
from ratomega.exact.rational import Rational

__all__ = [
    "Document",
    "Misfit",
    "each",
    "exact",
    "flag",
    "if_given",
    "listed",
    "one_of",
    "optional_text",
    "rational",
    "real",
    "together",
    "whole",
    "word",
]

Document = dict[str, Any]
T = TypeVar("T")


class Misfit(ValueError):
    """What stands in a document is not what belongs there; the message says so in words."""


def word(value: object) -> str:
    if not isinstance(value, str):
        raise Misfit(f"expected a text, not {_shown(value)}")
    return value


def one_of(document: Mapping[str, Any], key: str, known: Sequence[str]) -> str:
    value = document[key]
    if value not in known:
        raise Misfit(f'"{key}" is {_shown(value)}, not one of {", ".join(known)}')
    return word(value)


def whole(value: object) -> int:
    if not isinstance(value, int) or isinstance(value, bool):
        raise Misfit(f"expected an integer, not {_shown(value)}")
    return value


def real(value: object) -> float:
    # A JSON text of Python's may hold NaN and Infinity.
    if not isinstance(value, (int, float)) or isinstance(value, bool) or not math.isfinite(value):
        raise Misfit(f"expected a number, not {_shown(value)}")
    return float(value)


def flag(value: object) -> bool:
    if not isinstance(value, bool):
        raise Misfit(f"expected true or false, not {_shown(value)}")
    return value


def listed(value: object) -> list[Any]:
    if not isinstance(value, list):
        raise Misfit(f"expected a list, not {_shown(value)}")
    return value


def each(read: Callable[[Any], T], values: object) -> tuple[T, ...]:
    return tuple(read(value) for value in listed(values))


def if_given(read: Callable[[object], T], value: object) -> T | None:
    return None if value is None else read(value)


def together(document: Mapping[str, Any], first: str, second: str) -> None:
    """Two keys of which neither says anything without the other."""
    if (first in document) != (second in document):
        raise Misfit(f'"{first}" and "{second}" go together, and one of them is missing')


def exact(value: object) -> Number:
    try:
        return from_number_text(word(value))
    except ValueError as error:
        raise Misfit(str(error)) from None


def rational(value: object) -> Rational:
    try:
        return only_rational(exact(value))
    except ValueError as error:
        raise Misfit(str(error)) from None


def optional_text(value: Number | None) -> str | None:
    return None if value is None else number_text(value)


def _shown(value: object) -> str:
    return kind(value) if isinstance(value, (dict, list)) or value is None else shortened(repr(value))
