"""A conformal block as JSON and back; ``documents`` has the rest."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from ratomega.block_results import BlockCoefficient, BlockResult, Dictionary, FieldEntry
from ratomega.case.case import Case
from ratomega.case.conformal import ConformalCase
from ratomega.case.conformal_reading import conformal_from_mapping, conformal_to_mapping
from ratomega.case.reading import case_from_mapping, case_to_mapping
from ratomega.exact.quadratic import Number, from_number_text, number_text, only_rational
from ratomega.exact.rational import Rational, exact_text
from ratomega.regulator.outcome import PathValue
from ratomega.validator.verdict import Check

__all__ = ["block_document", "read_block"]

Document = dict[str, Any]


def block_document(result: BlockResult, checks: list[Document]) -> Document:
    """The whole document; ``checks`` are written by the caller."""
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
        "checks": checks,
        "summary": result.summary,
    }


def read_block(document: Mapping[str, Any], checks: tuple[Check, ...]) -> BlockResult:
    """The way back. Raises ``KeyError``, ``TypeError``, ``ValueError`` or ``InputError`` for anything else."""
    tables = document["case"]
    case = conformal_from_mapping(tables) if "conformal" in tables else case_from_mapping(tables)
    if document["hash"] != case.hash:
        raise ValueError(f'the hash {document["hash"]} does not belong to the case, whose hash is {case.hash}')
    result = BlockResult(
        version=_word(document["version"]),
        case=case,
        hash=case.hash,
        path=_word(document["path"]),
        degenerate=tuple((_whole(r), _whole(s)) for r, s in _listed(document["degenerate"])),
        dictionary=_read_dictionary(document["dictionary"]),
        gauge=None if document["gauge"] is None else case_from_mapping(document["gauge"]),
        gauge_reason=_word(document["gauge_reason"]),
        z_reason=_word(document["z_reason"]),
        route=_word(document["route"]),
        coefficients=tuple(_read_coefficient(one) for one in _listed(document["coefficients"])),
        checks=checks,
    )
    if document["summary"] != result.summary:
        raise ValueError("the summary is not that of the checks")
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
        "u1_exponent": _optional(d.exponent),
    }


def _read_dictionary(d: Mapping[str, Any]) -> Dictionary:
    return Dictionary(
        _rational(d["c"]),
        _rational(d["b_squared"]),
        _rational(d["eps1"]),
        _rational(d["eps2"]),
        tuple(_read_field(one) for one in _listed(d["external"])),
        _read_field(d["internal"]),
        tuple(_exact(m) for m in _listed(d["masses"])),
        _read_optional(d["u1_exponent"]),
    )


def _field(one: FieldEntry) -> Document:
    return {
        "place": one.place,
        "weight": number_text(one.weight),
        "momentum_squared": number_text(one.square),
        "momentum": _optional(one.momentum),
    }


def _read_field(d: Mapping[str, Any]) -> FieldEntry:
    return FieldEntry(
        _word(d["place"]), _exact(d["weight"]), _exact(d["momentum_squared"]), _read_optional(d["momentum"])
    )


def _coefficient(c: BlockCoefficient) -> Document:
    document: Document = {"order": c.order, "status": c.status}
    given = {"block": c.block, "elliptic": c.elliptic, "gauge": c.gauge}
    document |= {name: number_text(value) for name, value in given.items() if value is not None}
    if c.leading is not None:
        document |= {"pole_order": c.pole_order, "leading": number_text(c.leading)}
    if c.values:
        document["values"] = [{"path": v.path, "value": number_text(v.value), "order": v.order} for v in c.values]
    return document | {"independence": c.independence}


def _read_coefficient(d: Mapping[str, Any]) -> BlockCoefficient:
    block, elliptic, gauge, leading = (
        _exact(d[name]) if name in d else None for name in ("block", "elliptic", "gauge", "leading")
    )
    values = tuple(
        PathValue(_word(v["path"]), _exact(v["value"]), _whole(v["order"])) for v in _listed(d.get("values", []))
    )
    return BlockCoefficient(
        _whole(d["order"]),
        _word(d["status"]),
        block,
        elliptic,
        gauge,
        _whole(d.get("pole_order", 0)),
        leading,
        values,
        None if d["independence"] is None else _word(d["independence"]),
    )


def _optional(value: Number | None) -> str | None:
    return None if value is None else number_text(value)


def _read_optional(value: object) -> Number | None:
    return None if value is None else _exact(value)


def _exact(value: object) -> Number:
    return from_number_text(_word(value))


def _rational(value: object) -> Rational:
    return only_rational(_exact(value))


def _word(value: object) -> str:
    if not isinstance(value, str):
        raise TypeError(f"expected a text, not {value!r}")
    return value


def _whole(value: object) -> int:
    if not isinstance(value, int) or isinstance(value, bool):
        raise TypeError(f"expected an integer, not {value!r}")
    return value


def _listed(value: object) -> list[Any]:
    if not isinstance(value, list):
        raise TypeError(f"expected a list, not {value!r}")
    return value
