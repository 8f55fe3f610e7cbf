"""The part of a JSON document that belongs to an approach; header and errors are those of every document."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import asdict
from typing import Any

from ratomega.documents.pieces import Document, Misfit, each, exact, flag, if_given, listed, rational, real, whole, word
from ratomega.exact.quadratic import number_text
from ratomega.exact.rational import exact_text
from ratomega.results.header import Header
from ratomega.verify.approach import Approach, ApproachCharge, ApproachPoint

__all__ = ["approach_body", "read_approach"]


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
    """The way back. Raises ``Misfit``, or what Python raises, for anything else."""
    charges = each(_read_charge, document["charges"])
    result = Approach(header, whole(document["digits"]), charges, partial)
    if document["exit"] != result.exit_status:
        raise Misfit('"exit" is not that of the points')
    return result


def _read_charge(d: Mapping[str, Any]) -> ApproachCharge:
    points = tuple(
        ApproachPoint(
            rational(p["offset"]),
            word(p["value"]),
            word(p["radius"]),
            word(p["distance"]),
            word(p["remainder"]),
            real(p["lost"]),
            whole(p["needed"]),
            flag(p["consistent"]),
            real(p["seconds"]),
        )
        for p in listed(d["points"])
    )
    through, left_over = (if_given(word, d[key]) for key in ("extrapolated", "left_over"))
    return ApproachCharge(
        each(whole, d["charge"]),
        if_given(exact, d["exact"]),
        real(d["exact_seconds"]),
        whole(d["singular"]),
        whole(d["worst_order"]),
        points,
        if_given(real, d["order"]),
        through,
        left_over,
    )
