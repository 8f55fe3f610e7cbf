"""What every document has: the header with the case and the path, checks, and values path by path."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from ratomega.case.reading import case_from_mapping, case_to_mapping
from ratomega.documents.pieces import Document, Misfit, each, exact, flag, listed, whole, word
from ratomega.exact.quadratic import number_text
from ratomega.regulator.outcome import PathValue
from ratomega.results.header import Header, PathRecord
from ratomega.validator.verdict import Check, Kind, Verdict

__all__ = ["check_document", "header_document", "path_value", "read_checks", "read_header", "read_path_values"]


def header_document(header: Header) -> Document:
    return {
        "version": header.version,
        "case": case_to_mapping(header.case),
        "path": {
            "parameters": list(header.path.parameters),
            "eps1": header.path.eps1,
            "eps2": header.path.eps2,
            "coulomb": {name: list(values) for name, values in header.path.coulomb},
            "tilted": header.path.tilted,
        },
        "hash": header.hash,
        "warnings": list(header.warnings),
    }


def read_header(document: Mapping[str, Any]) -> Header:
    case = case_from_mapping(document["case"])
    if document["hash"] != case.hash:
        raise Misfit(f'the hash {document["hash"]} does not belong to the case, whose hash is {case.hash}')
    path = document["path"]
    record = PathRecord(
        each(word, path["parameters"]),
        word(path["eps1"]),
        word(path["eps2"]),
        tuple((name, each(word, values)) for name, values in path["coulomb"].items()),
        flag(path["tilted"]),
    )
    return Header(word(document["version"]), case, record, case.hash, each(word, document["warnings"]))


def check_document(check: Check) -> Document:
    return {
        "name": check.name,
        "verdict": check.verdict.value,
        "kind": check.kind.value,
        "evidence": check.evidence,
        "source": check.source,
        "complete": check.complete,
    }


def _read_check(d: Mapping[str, Any]) -> Check:
    name, evidence, source = word(d["name"]), word(d["evidence"]), word(d["source"])
    return Check(name, Verdict(d["verdict"]), Kind(d["kind"]), evidence, source, flag(d["complete"]))


def read_checks(values: object) -> tuple[Check, ...]:
    return each(_read_check, values)


def path_value(value: PathValue) -> Document:
    return {"path": value.path, "value": number_text(value.value), "order": value.order}


def read_path_values(values: object) -> tuple[PathValue, ...]:
    return tuple(PathValue(word(v["path"]), exact(v["value"]), whole(v["order"])) for v in listed(values))
