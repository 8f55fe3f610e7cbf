"""The part of a JSON document that belongs to averages; header and errors are those of every document.

Numbers and functions of x travel as everywhere: functions in Python syntax, a root of a quadratic field as sqrt(d).
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from ratomega.averages.functions import SYMBOL
from ratomega.averages.limits import FUNCTIONS, KINDS, AverageLimit, AveragePath, AverageValue
from ratomega.documents.pieces import Document, each, exact, if_given, listed, one_of, together, whole, word
from ratomega.exact.function_text import function_text, parse_function
from ratomega.exact.quadratic import number_text
from ratomega.exact.rational_function import RationalFunction
from ratomega.results.averages import Average, AverageResult
from ratomega.results.header import Header

__all__ = ["average_body", "read_average"]


def average_body(result: AverageResult) -> Document:
    """What an average has beside the header."""
    averages = [{"name": a.name, "coefficients": [_limit(c) for c in a.coefficients]} for a in result.averages]
    return {"of": result.of, "averages": averages}


def read_average(document: Mapping[str, Any], header: Header, partial: bool) -> AverageResult:
    """The way back. Raises ``Misfit``, or what Python raises, for anything else."""
    of = one_of(document, "of", KINDS)
    averages = tuple(
        Average(word(a["name"]), tuple(_read_limit(c, of in FUNCTIONS) for c in listed(a["coefficients"])))
        for a in listed(document["averages"])
    )
    return AverageResult(header, of, averages, partial)


def _limit(c: AverageLimit) -> Document:
    document: Document = {"charge": list(c.charge), "status": c.status}
    if c.value is not None:
        document["value"] = _value(c.value)
    if c.leading is not None:
        document |= {"order": c.order, "leading": _value(c.leading)}
    if c.values:
        document["values"] = [{"path": v.path, "value": _value(v.value), "order": v.order} for v in c.values]
    return document | {"independence": c.independence}


def _read_limit(d: Mapping[str, Any], function: bool) -> AverageLimit:
    together(d, "order", "leading")
    values = listed(d["values"]) if "values" in d else []
    return AverageLimit(
        charge=each(whole, d["charge"]),
        status=word(d["status"]),
        value=_read_value(d["value"], function) if "value" in d else None,
        order=whole(d.get("order", 0)),
        leading=_read_value(d["leading"], function) if "leading" in d else None,
        values=tuple(
            AveragePath(word(v["path"]), _read_value(v["value"], function), whole(v["order"])) for v in values
        ),
        independence=if_given(word, d["independence"]),
    )


def _value(value: AverageValue) -> str:
    return function_text(value) if isinstance(value, RationalFunction) else number_text(value)


def _read_value(value: object, function: bool) -> AverageValue:
    return parse_function(word(value), (SYMBOL,)) if function else exact(value)
