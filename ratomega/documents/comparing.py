"""The part of a JSON document that belongs to a comparison; header and errors are those of every document."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from ratomega.documents.pieces import Document, each, exact, flag, if_given, one_of, rational, whole, word
from ratomega.exact.quadratic import number_text
from ratomega.exact.rational import exact_text
from ratomega.results.header import Header
from ratomega.verify.comparing import CompareResult
from ratomega.verify.explanation import KINDS, Explanation
from ratomega.verify.quantities import NAMES
from ratomega.verify.rows import Row

__all__ = ["compare_body", "read_compare"]


def compare_body(result: CompareResult) -> Document:
    """What a comparison has beside the header."""
    return {
        "as": result.quantity,
        "rows": [_row(row) for row in result.rows],
        "diagnosis": [_explanation(one) for one in result.diagnosis],
        "used": result.used,
    }


def read_compare(document: Mapping[str, Any], header: Header, partial: bool) -> CompareResult:
    """The way back. Raises ``Misfit``, or what Python raises, for anything else."""
    rows = each(_read_row, document["rows"])
    diagnosis = each(_read_explanation, document["diagnosis"])
    return CompareResult(header, one_of(document, "as", NAMES), rows, diagnosis, whole(document["used"]), partial)


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
    return Row(
        each(whole, d["charge"]), word(d["given"]), exact(d["exact"]), flag(d["agrees"]),
        whole(d["digits"]), if_given(whole, d["given_digits"]), rational(d["tolerance"]),
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
        one_of(d, "kind", KINDS), one_of(d, "as", NAMES), word(d["sentence"]),
        changes=each(word, d["changes"]),
        edits=each(word, d["edits"]),
        parameters=tuple((word(name), word(value)) for name, value in d["parameters"].items()),
        equal=each(lambda words: each(word, words), d["equal"]),
        charges=each(lambda charge: each(whole, charge), d["charges"]),
        length=whole(d["length"]),
        fitted=whole(d["fitted"]),
    )
