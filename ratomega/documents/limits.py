"""Limits as JSON and back: coefficients with what is known of each, and the route."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from ratomega.documents.header import check_document, path_value, read_checks, read_path_values
from ratomega.documents.pieces import Document, each, exact, if_given, listed, together, whole, word
from ratomega.exact.function_text import function_text, parse_function
from ratomega.exact.quadratic import Number, number_text
from ratomega.exact.rational_function import RationalFunction
from ratomega.results.header import Header
from ratomega.results.limits import Coefficient, LimitResult, RouteRecord

__all__ = ["limit_body", "read_limit"]


def limit_body(result: LimitResult) -> Document:
    """What a limit has beside the header."""
    return {
        "route": _route(result.route),
        "coefficients": [_coefficient(c) for c in result.coefficients],
        "checks": [check_document(c) for c in result.checks],
    }


def read_limit(document: Mapping[str, Any], header: Header, partial: bool) -> LimitResult:
    """The way back. Raises ``Misfit``, or what Python raises, for anything else."""
    coefficients = tuple(_read_coefficient(c, header.case.symbols) for c in listed(document["coefficients"]))
    checks = read_checks(document["checks"])
    return LimitResult(header, _read_route(document["route"]), coefficients, checks, partial)


def _value_text(value: Number | RationalFunction) -> str:
    return function_text(value) if isinstance(value, RationalFunction) else number_text(value)


def _read_value(value: object, symbols: tuple[str, ...]) -> Number | RationalFunction:
    return parse_function(word(value), symbols) if symbols else exact(value)


_COUNTS = ("configurations", "singular", "indeterminate", "worst_order", "clusters", "singular_clusters")


def _coefficient(c: Coefficient) -> Document:
    document: Document = {"charge": list(c.charge), "status": c.status}
    if c.value is not None:
        document["value"] = _value_text(c.value)
    if c.leading is not None:
        document |= {"order": c.order, "leading": number_text(c.leading)}
    if c.values:
        document["values"] = [path_value(v) for v in c.values]
    document["independence"] = c.independence
    if c.terms is not None:
        document["terms"] = [{"power": power, "value": number_text(value)} for power, value in c.terms]
    counts = {name: getattr(c, name) for name in _COUNTS}
    return document | {name: value for name, value in counts.items() if value is not None}


def _read_coefficient(d: Mapping[str, Any], symbols: tuple[str, ...]) -> Coefficient:
    together(d, "order", "leading")
    return Coefficient(
        charge=each(whole, d["charge"]),
        status=word(d["status"]),
        value=_read_value(d["value"], symbols) if "value" in d else None,
        order=whole(d.get("order", 0)),
        leading=exact(d["leading"]) if "leading" in d else None,
        values=read_path_values(d.get("values", [])),
        independence=if_given(word, d["independence"]),
        terms=tuple((whole(t["power"]), exact(t["value"])) for t in listed(d["terms"])) if "terms" in d else None,
        **{name: whole(d[name]) if name in d else None for name in _COUNTS},
    )


def _route(r: RouteRecord) -> Document:
    return {"name": r.route, "method": r.method, "why": r.why, "spare_bits": r.spare_bits, "primes": r.primes}


def _read_route(d: Mapping[str, Any]) -> RouteRecord:
    bits, primes = if_given(whole, d["spare_bits"]), whole(d["primes"])
    return RouteRecord(word(d["name"]), word(d["method"]), word(d["why"]), bits, primes)
