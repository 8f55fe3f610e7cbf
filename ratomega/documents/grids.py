"""The part of a JSON document that belongs to values on a grid; header and errors are those of every document."""

from __future__ import annotations

import math
from collections.abc import Mapping
from itertools import product
from typing import Any

from ratomega.case.progression import Axes, Counting
from ratomega.diagrams.tuples import Charge
from ratomega.documents.header import check_document, read_checks
from ratomega.documents.pieces import Document, Misfit, each, exact, if_given, listed, one_of, rational, whole, word
from ratomega.exact.decimals import Decimals, decimal_value
from ratomega.exact.quadratic import Number, number_text
from ratomega.exact.rational import exact_text
from ratomega.results.grids import GridResult, GridRow
from ratomega.results.header import Header

__all__ = ["grid_body", "read_grid"]


def grid_body(result: GridResult) -> Document:
    """What a grid has beside the header. Every row names its point by places on the axes, from 0."""
    places = [{value: n for n, value in enumerate(axis)} for axis in result.axes]
    symbols = result.header.case.symbols
    return {
        "of": result.of,
        "variable": result.variable,
        "at": {name: [number_text(x) for x in axis] for name, axis in zip(symbols, result.axes, strict=True)},
        "digits": result.digits,
        "q": None if result.q is None else [_counting(one) for one in result.q],
        "way": result.way,
        "why": result.why,
        "rows": [_row(row, places) for row in result.rows],
        "checks": [check_document(check) for check in result.checks],
    }


def _counting(one: Counting) -> Document:
    return {"value": number_text(one.value), "radius": exact_text(one.radius)}


def _row(row: GridRow, places: list[dict[Number, int]]) -> Document:
    document: Document = {"place": [place[x] for place, x in zip(places, row.point, strict=True)]}
    if row.charge is not None:
        document["charge"] = list(row.charge)
    if row.value is not None:
        document["value"] = number_text(row.value)
    if row.decimals is not None:
        near = row.decimals
        document |= {"real": near.real, "imaginary": near.imaginary, "radius": near.radius}
    if row.last is not None:
        document["last_terms"] = row.last
    return document | ({"note": row.note} if row.note else {})


def read_grid(document: Mapping[str, Any], header: Header, partial: bool) -> GridResult:
    """The way back. Raises ``Misfit``, or what Python raises, for anything else."""
    at = document["at"]
    if tuple(at) != header.case.symbols:
        raise Misfit(f'"at" has values of {", ".join(at)}, not of {", ".join(header.case.symbols)}')
    axes = tuple(each(exact, axis) for axis in at.values())
    if any(len(set(axis)) < len(axis) for axis in axes):
        raise Misfit('"at" lists a value twice')
    digits = if_given(whole, document["digits"])
    counting = None if document["q"] is None else each(_read_counting, document["q"])
    charges: tuple[Charge | None, ...] = header.case.charges if counting is None else (None,)
    listed_rows = listed(document["rows"])
    if len(listed_rows) != math.prod(map(len, axes)) * len(charges):
        raise Misfit(f"{len(listed_rows)} rows do not fit the points")
    wanted = product(*(range(len(axis)) for axis in axes), charges)
    rows = tuple(_read_row(row, axes, place) for row, place in zip(listed_rows, wanted, strict=True))
    for row in rows:
        kinds = (row.value is not None, row.decimals is not None, bool(row.note))
        if kinds.count(True) != 1 or kinds[0 if digits is not None else 1]:
            raise Misfit("a row has an exact value, or decimals where digits were asked for, or a note")
    return GridResult(
        header,
        one_of(document, "of", ("Z", "H")),
        one_of(document, "variable", ("q", "16 q_e")),
        axes,
        digits,
        counting,
        one_of(document, "way", ("functions", "points")),
        word(document["why"]),
        rows,
        read_checks(document["checks"]),
        partial,
    )


def _read_counting(d: Mapping[str, Any]) -> Counting:
    return Counting(exact(d["value"]), rational(d["radius"]))


def _read_row(d: Mapping[str, Any], axes: Axes, wanted: tuple[Any, ...]) -> GridRow:
    *places, charge = wanted
    if each(whole, d["place"]) != tuple(places) or (each(whole, d["charge"]) if "charge" in d else None) != charge:
        raise Misfit(f"a row is not where it belongs, at {places}, charge {charge}")
    near = None
    if "real" in d:
        near = Decimals(_decimal(d["real"]), _decimal(d["imaginary"]), _decimal(d["radius"]))
    return GridRow(
        tuple(axis[n] for axis, n in zip(axes, places, strict=True)),
        charge,
        exact(d["value"]) if "value" in d else None,
        near,
        _decimal(d["last_terms"]) if "last_terms" in d else None,
        word(d["note"]) if "note" in d else "",
    )


def _decimal(value: object) -> str:
    text = word(value)
    decimal_value(text)
    return text
