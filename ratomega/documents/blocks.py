"""A conformal block as a whole JSON document and back: its case may be one of fields in place of a theory."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from ratomega.case.case import Case
from ratomega.case.conformal import ConformalCase
from ratomega.case.conformal_reading import conformal_from_mapping, conformal_to_mapping
from ratomega.case.reading import case_from_mapping, case_to_mapping
from ratomega.documents.header import check_document, path_value, read_checks, read_path_values
from ratomega.documents.pieces import (
    Document,
    Misfit,
    each,
    exact,
    if_given,
    listed,
    optional_text,
    rational,
    together,
    whole,
    word,
)
from ratomega.exact.quadratic import number_text
from ratomega.exact.rational import exact_text
from ratomega.results.blocks import BlockCoefficient, BlockResult, Dictionary, FieldEntry

__all__ = ["block_document", "read_block"]


def block_document(result: BlockResult) -> Document:
    """The whole document as plain dictionaries, lists, strings and integers."""
    return {
        "result": "block",
        "version": result.version,
        "case": _case(result.case),
        "hash": result.hash,
        "path": result.path,
        "degenerate": [list(pair) for pair in result.degenerate],
        "dictionary": _dictionary(result.dictionary),
        "gauge": None if result.gauge is None else case_to_mapping(result.gauge),
        "gauge_reason": result.gauge_reason,
        "z_reason": result.z_reason,
        "route": result.route,
        "coefficients": [_coefficient(one) for one in result.coefficients],
        "checks": [check_document(c) for c in result.checks],
        "summary": result.summary,
    }


def read_block(document: Mapping[str, Any]) -> BlockResult:
    """The way back. Raises ``Misfit``, ``InputError``, or what Python raises, for anything else."""
    tables = document["case"]
    case = conformal_from_mapping(tables) if "conformal" in tables else case_from_mapping(tables)
    if document["hash"] != case.hash:
        raise Misfit(f'the hash {document["hash"]} does not belong to the case, whose hash is {case.hash}')
    result = BlockResult(
        version=word(document["version"]),
        case=case,
        hash=case.hash,
        path=word(document["path"]),
        degenerate=tuple((whole(r), whole(s)) for r, s in listed(document["degenerate"])),
        dictionary=_read_dictionary(document["dictionary"]),
        gauge=None if document["gauge"] is None else case_from_mapping(document["gauge"]),
        gauge_reason=word(document["gauge_reason"]),
        z_reason=word(document["z_reason"]),
        route=word(document["route"]),
        coefficients=each(_read_coefficient, document["coefficients"]),
        checks=read_checks(document["checks"]),
    )
    if document["summary"] != result.summary:
        raise Misfit("the summary is not that of the checks")
    return result


def _case(case: Case | ConformalCase) -> Document:
    return conformal_to_mapping(case) if isinstance(case, ConformalCase) else case_to_mapping(case)


def _dictionary(d: Dictionary) -> Document:
    return {
        "c": exact_text(d.central_charge),
        "b_squared": exact_text(d.b_squared),
        "eps1": exact_text(d.eps1),
        "eps2": exact_text(d.eps2),
        "external": [_field(one) for one in d.external],
        "internal": _field(d.internal),
        "masses": [number_text(m) for m in d.masses],
        "u1_exponent": optional_text(d.exponent),
    }


def _read_dictionary(d: Mapping[str, Any]) -> Dictionary:
    return Dictionary(
        rational(d["c"]),
        rational(d["b_squared"]),
        rational(d["eps1"]),
        rational(d["eps2"]),
        each(_read_field, d["external"]),
        _read_field(d["internal"]),
        each(exact, d["masses"]),
        if_given(exact, d["u1_exponent"]),
    )


def _field(one: FieldEntry) -> Document:
    return {
        "place": one.place,
        "weight": number_text(one.weight),
        "momentum_squared": number_text(one.square),
        "momentum": optional_text(one.momentum),
    }


def _read_field(d: Mapping[str, Any]) -> FieldEntry:
    return FieldEntry(
        word(d["place"]), exact(d["weight"]), exact(d["momentum_squared"]), if_given(exact, d["momentum"])
    )


def _coefficient(c: BlockCoefficient) -> Document:
    document: Document = {"order": c.order, "status": c.status}
    given = {"block": c.block, "elliptic": c.elliptic, "gauge": c.gauge}
    document |= {name: number_text(value) for name, value in given.items() if value is not None}
    if c.leading is not None:
        document |= {"pole_order": c.pole_order, "leading": number_text(c.leading)}
    if c.values:
        document["values"] = [path_value(v) for v in c.values]
    return document | {"independence": c.independence}


def _read_coefficient(d: Mapping[str, Any]) -> BlockCoefficient:
    together(d, "pole_order", "leading")
    block, elliptic, gauge, leading = (
        exact(d[name]) if name in d else None for name in ("block", "elliptic", "gauge", "leading")
    )
    return BlockCoefficient(
        whole(d["order"]),
        word(d["status"]),
        block,
        elliptic,
        gauge,
        whole(d.get("pole_order", 0)),
        leading,
        read_path_values(d.get("values", [])),
        if_given(word, d["independence"]),
    )
