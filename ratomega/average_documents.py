"""The part of a JSON document that belongs to averages; header and errors are those of ``documents``.

Numbers travel as everywhere, functions of x in Python syntax. A function with numbers of a quadratic field is an object
with its two parts: {"rational": ..., "irrational": ..., "radicand": d} stands for rational + irrational * sqrt(d).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from ratomega.average_results import Average, AverageResult
from ratomega.averages.functions import SYMBOL
from ratomega.averages.limits import FUNCTIONS, KINDS, AverageLimit, AveragePath, AverageValue
from ratomega.exact.function_text import function_text, parse_function
from ratomega.exact.line_function import LineFunction
from ratomega.exact.quadratic import from_number_text, number_text, square_root
from ratomega.exact.rational_function import RationalFunction
from ratomega.results import Header

__all__ = ["average_body", "read_average"]

Document = dict[str, Any]


def average_body(result: AverageResult) -> Document:
    """What an average has beside the header."""
    averages = [{"name": a.name, "coefficients": [_limit(c) for c in a.coefficients]} for a in result.averages]
    return {"of": result.of, "averages": averages}


def read_average(document: Mapping[str, Any], header: Header, partial: bool) -> AverageResult:
    """The way back. Raises ``KeyError``, ``TypeError`` or ``ValueError`` for anything else."""
    of = document["of"]
    if of not in KINDS:
        raise ValueError(f'"of" is {of!r}, not one of {", ".join(KINDS)}')
    averages = tuple(
        Average(_word(a["name"]), tuple(_read_limit(c, of in FUNCTIONS) for c in _listed(a["coefficients"])))
        for a in _listed(document["averages"])
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
    values = _listed(d["values"]) if "values" in d else []
    return AverageLimit(
        charge=tuple(_whole(k) for k in _listed(d["charge"])),
        status=_word(d["status"]),
        value=_read_value(d["value"], function) if "value" in d else None,
        order=_whole(d.get("order", 0)),
        leading=_read_value(d["leading"], function) if "leading" in d else None,
        values=tuple(
            AveragePath(_word(v["path"]), _read_value(v["value"], function), _whole(v["order"])) for v in values
        ),
        independence=None if d["independence"] is None else _word(d["independence"]),
    )


def _value(value: AverageValue) -> str | Document:
    if isinstance(value, RationalFunction):
        return function_text(value)
    if isinstance(value, LineFunction):
        parts = {"rational": function_text(value.rational), "irrational": function_text(value.irrational)}
        return {**parts, "radicand": value.radicand}
    return number_text(value)


def _read_value(value: object, function: bool) -> AverageValue:
    if not function:
        return from_number_text(_word(value))
    if isinstance(value, dict):
        rational, irrational = (parse_function(_word(value[key]), (SYMBOL,)) for key in ("rational", "irrational"))
        return LineFunction(rational, irrational, square_root(_whole(value["radicand"])).d)
    return parse_function(_word(value), (SYMBOL,))


def _whole(value: object) -> int:
    if not isinstance(value, int) or isinstance(value, bool):
        raise TypeError(f"expected an integer, not {value!r}")
    return value


def _word(value: object) -> str:
    if not isinstance(value, str):
        raise TypeError(f"expected a text, not {value!r}")
    return value


def _listed(value: object) -> Sequence[Any]:
    if not isinstance(value, list):
        raise TypeError(f"expected a list, not {value!r}")
    return value
