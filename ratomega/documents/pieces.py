"""The small pieces that every document is made of, each read with a check of what it is.

A reader raises ``TypeError`` or ``ValueError``; the door of this room makes a sentence of it. Exact numbers travel as
"num/den", "num" or "x + y*sqrt(d)".
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any, TypeVar

from ratomega.exact.quadratic import Number, from_number_text, number_text, only_rational
from ratomega.exact.rational import Rational

__all__ = [
    "Document",
    "each",
    "exact",
    "flag",
    "if_given",
    "listed",
    "one_of",
    "optional_text",
    "rational",
    "real",
    "whole",
    "word",
]

Document = dict[str, Any]
T = TypeVar("T")


def word(value: object) -> str:
    if not isinstance(value, str):
        raise TypeError(f"expected a text, not {value!r}")
    return value


def one_of(document: Mapping[str, Any], key: str, known: Sequence[str]) -> str:
    value = document[key]
    if value not in known:
        raise ValueError(f'"{key}" is {value!r}, not one of {", ".join(known)}')
    return word(value)


def whole(value: object) -> int:
    if not isinstance(value, int) or isinstance(value, bool):
        raise TypeError(f"expected an integer, not {value!r}")
    return value


def real(value: object) -> float:
    if not isinstance(value, (int, float)) or isinstance(value, bool):
        raise TypeError(f"expected a number, not {value!r}")
    return float(value)


def flag(value: object) -> bool:
    if not isinstance(value, bool):
        raise TypeError(f"expected true or false, not {value!r}")
    return value


def listed(value: object) -> list[Any]:
    if not isinstance(value, list):
        raise TypeError(f"expected a list, not {value!r}")
    return value


def each(read: Callable[[Any], T], values: object) -> tuple[T, ...]:
    return tuple(read(value) for value in listed(values))


def if_given(read: Callable[[object], T], value: object) -> T | None:
    return None if value is None else read(value)


def exact(value: object) -> Number:
    return from_number_text(word(value))


def rational(value: object) -> Rational:
    return only_rational(exact(value))


def optional_text(value: Number | None) -> str | None:
    return None if value is None else number_text(value)
