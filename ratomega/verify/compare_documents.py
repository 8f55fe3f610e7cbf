"""The part of a JSON document that belongs to a comparison; header and errors are those of ``documents``."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any, TypeVar

from ratomega.exact.quadratic import from_number_text, number_text
from ratomega.exact.rational import exact_text, from_exact_text
from ratomega.results import Header
from ratomega.verify.comparing import CompareResult
from ratomega.verify.explanation import KINDS, Explanation
from ratomega.verify.quantities import NAMES
from ratomega.verify.rows import Row

__all__ = ["compare_body", "read_compare"]

Document = dict[str, Any]
T = TypeVar("T")


def compare_body(result: CompareResult) -> Document:
    """What a comparison has beside the header."""
    return {
        "as": result.quantity,
        "rows": [_row(row) for row in result.rows],
        "diagnosis": [_explanation(one) for one in result.diagnosis],
        "used": result.used,
    }


def read_compare(document: Mapping[str, Any], header: Header, partial: bool) -> CompareResult:
    """The way back. Raises ``KeyError``, ``TypeError`` or ``ValueError`` for anything else."""
    rows = _all(document["rows"], _read_row)
    diagnosis = _all(document["diagnosis"], _read_explanation)
    return CompareResult(header, _one_of(document["as"], NAMES), rows, diagnosis, _whole(document["used"]), partial)


def _row(row: Row) -> Document:
    return {
        "charge": list(row.charge),
        "agrees": row.agrees,
        "digits": row.digits,
        "given": row.given,
        "given_digits": row.given_digits,
        "exact": number_text(row.exact),
        "tolerance": exact_text(row.tolerance),
    }


def _read_row(d: Mapping[str, Any]) -> Row:
    if not isinstance(d["agrees"], bool):
        raise TypeError(f"expected true or false, not {d['agrees']!r}")
    given_digits = None if d["given_digits"] is None else _whole(d["given_digits"])
    return Row(
        _all(d["charge"], _whole), _word(d["given"]), from_number_text(_word(d["exact"])), d["agrees"],
        _whole(d["digits"]), given_digits, from_exact_text(_word(d["tolerance"])),
    )


def _explanation(one: Explanation) -> Document:
    return {
        "kind": one.kind,
        "as": one.quantity,
        "sentence": one.sentence,
        "changes": list(one.changes),
        "edits": list(one.edits),
        "parameters": dict(one.parameters),
        "equal": [list(words) for words in one.equal],
        "charges": [list(charge) for charge in one.charges],
        "length": one.length,
        "fitted": one.fitted,
    }


def _read_explanation(d: Mapping[str, Any]) -> Explanation:
    return Explanation(
        _one_of(d["kind"], KINDS), _one_of(d["as"], NAMES), _word(d["sentence"]),
        changes=_all(d["changes"], _word),
        edits=_all(d["edits"], _word),
        parameters=tuple((_word(name), _word(value)) for name, value in d["parameters"].items()),
        equal=_all(d["equal"], lambda words: _all(words, _word)),
        charges=_all(d["charges"], lambda charge: _all(charge, _whole)),
        length=_whole(d["length"]),
        fitted=_whole(d["fitted"]),
    )


def _all(values: object, read: Callable[[Any], T]) -> tuple[T, ...]:
    if not isinstance(values, list):
        raise TypeError(f"expected a list, not {values!r}")
    return tuple(read(value) for value in values)


def _whole(value: object) -> int:
    if not isinstance(value, int) or isinstance(value, bool):
        raise TypeError(f"expected an integer, not {value!r}")
    return value


def _word(value: object) -> str:
    if not isinstance(value, str):
        raise TypeError(f"expected a text, not {value!r}")
    return value


def _one_of(value: object, known: tuple[str, ...]) -> str:
    if value not in known:
        raise ValueError(f"{value!r} is not one of {', '.join(known)}")
    return _word(value)
