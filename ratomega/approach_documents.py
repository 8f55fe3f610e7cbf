"""The part of a JSON document that belongs to an approach; header and errors are those of ``documents``."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import asdict
from typing import Any

from ratomega.exact.quadratic import from_number_text, number_text
from ratomega.exact.rational import exact_text, from_exact_text
from ratomega.results import Header
from ratomega.verify.approach import Approach, ApproachCharge, ApproachPoint

__all__ = ["approach_body", "read_approach"]

Document = dict[str, Any]


def approach_body(result: Approach) -> Document:
    """What an approach has beside the header. Seconds are those of the run: they alone differ from run to run."""
    return {"digits": result.digits, "charges": [_charge(one) for one in result.charges], "exit": result.exit_status}


def _charge(one: ApproachCharge) -> Document:
    document = asdict(one)
    document["charge"] = list(one.charge)
    document["exact"] = None if one.exact is None else number_text(one.exact)
    document["points"] = [{**asdict(p), "offset": exact_text(p.offset)} for p in one.points]
    return document


def read_approach(document: Mapping[str, Any], header: Header, partial: bool) -> Approach:
    """The way back. Raises ``KeyError``, ``TypeError`` or ``ValueError`` for anything else."""
    charges = tuple(_read_charge(one) for one in document["charges"])
    result = Approach(header, _whole(document["digits"]), charges, partial)
    if document["exit"] != result.exit_status:
        raise ValueError('"exit" is not that of the points')
    return result


def _read_charge(d: Mapping[str, Any]) -> ApproachCharge:
    exact = None if d["exact"] is None else from_number_text(_word(d["exact"]))
    points = tuple(
        ApproachPoint(
            from_exact_text(_word(p["offset"])),
            _word(p["value"]),
            _word(p["radius"]),
            _word(p["distance"]),
            _word(p["remainder"]),
            _real(p["lost"]),
            _whole(p["needed"]),
            _flag(p["consistent"]),
            _real(p["seconds"]),
        )
        for p in d["points"]
    )
    through, left_over = (None if d[key] is None else _word(d[key]) for key in ("extrapolated", "left_over"))
    order = None if d["order"] is None else _real(d["order"])
    charge, counts = tuple(_whole(k) for k in d["charge"]), (_whole(d["singular"]), _whole(d["worst_order"]))
    return ApproachCharge(charge, exact, _real(d["exact_seconds"]), *counts, points, order, through, left_over)


def _whole(value: object) -> int:
    if not isinstance(value, int) or isinstance(value, bool):
        raise ValueError("an integer is expected")
    return value


def _real(value: object) -> float:
    if not isinstance(value, (int, float)) or isinstance(value, bool):
        raise ValueError("a number is expected")
    return float(value)


def _flag(value: object) -> bool:
    if not isinstance(value, bool):
        raise ValueError("a truth value is expected")
    return value


def _word(value: object) -> str:
    if not isinstance(value, str):
        raise ValueError("a text is expected")
    return value
