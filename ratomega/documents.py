"""Results as JSON and back: exact numbers travel as "num/den", "num" or "x + y*sqrt(d)", functions of
symbols in Python syntax, diagrams as lists of rows by node name.

``load_result(to_json(result)) == result``, and writing again gives the same bytes. Host names, folders and times stay
out: the same case gives the same document everywhere.
"""

from __future__ import annotations

import json
import os
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from typing import Any

from ratomega.approach_documents import approach_body, read_approach
from ratomega.atlas_documents import atlas_document, read_atlas
from ratomega.average_documents import average_body, read_average
from ratomega.average_results import AverageResult
from ratomega.block_documents import block_document, read_block
from ratomega.block_results import BlockResult
from ratomega.case.case import Case
from ratomega.case.reading import case_from_mapping, case_to_mapping
from ratomega.detector.atlas import Atlas
from ratomega.diagrams.tuples import Configuration
from ratomega.errors import InputError
from ratomega.exact.function_text import function_text, parse_function
from ratomega.exact.quadratic import Number, from_number_text, number_text
from ratomega.exact.rational_function import RationalFunction
from ratomega.explaining import Explanation, Paragraph
from ratomega.regulator.outcome import PathValue
from ratomega.results import (
    ChargeReport,
    ClusterReport,
    Coefficient,
    DetectResult,
    Exchange,
    FactorReport,
    Header,
    LimitResult,
    PathRecord,
    RouteRecord,
    SingularReport,
    ValidateResult,
)
from ratomega.validator.checklist import depth_of
from ratomega.validator.verdict import Check, Kind, Verdict
from ratomega.verify.approach import Approach
from ratomega.verify.compare_documents import compare_body, read_compare
from ratomega.verify.comparing import CompareResult

__all__ = ["Result", "error_document", "load_result", "to_document", "to_json"]

Result = (
    LimitResult
    | DetectResult
    | ValidateResult
    | AverageResult
    | Atlas
    | BlockResult
    | Approach
    | CompareResult
    | Explanation
)
Document = dict[str, Any]

LARGEST_DOCUMENT = 512 * 1024 * 1024


def to_json(result: Result) -> str:
    """The result as one JSON document, with a final newline. Deterministic."""
    return json.dumps(to_document(result), indent=1, ensure_ascii=False) + "\n"


def error_document(error: InputError) -> Document:
    """An error as a document: the first problem, and all of them."""
    problems = [{"message": p.message, "where": p.where} for p in error.problems]
    return {"error": {**problems[0], "all": problems}}


def to_document(result: Result) -> Document:
    """The result as plain dictionaries, lists, strings, integers and truth values."""
    if isinstance(result, Atlas):
        return atlas_document(result)
    if isinstance(result, BlockResult):
        return block_document(result, [_check(c) for c in result.checks])
    if isinstance(result, LimitResult):
        body: Document = {
            "route": _route(result.route),
            "coefficients": [_coefficient(c) for c in result.coefficients],
            "checks": [_check(c) for c in result.checks],
        }
        return {"result": "limit", **_header(result.header), "partial": result.partial, **body}
    if isinstance(result, DetectResult):
        body = {"charges": [_charge(c, result.header.case) for c in result.charges]}
        return {"result": "detect", **_header(result.header), "partial": result.partial, **body}
    if isinstance(result, AverageResult):
        return {"result": "average", **_header(result.header), "partial": result.partial, **average_body(result)}
    if isinstance(result, Explanation):
        paragraphs = [{"title": p.title, "text": p.text} for p in result.paragraphs]
        return {"result": "explain", **_header(result.header), "partial": result.partial, "paragraphs": paragraphs}
    if isinstance(result, Approach):
        return {"result": "approach", **_header(result.header), "partial": result.partial, **approach_body(result)}
    if isinstance(result, CompareResult):
        return {"result": "compare", **_header(result.header), "partial": result.partial, **compare_body(result)}
    body = {"depth": result.depth, "checks": [_check(c) for c in result.checks], "summary": result.summary}
    return {"result": "validate", **_header(result.header), "partial": result.partial, **body}


def load_result(source: str | os.PathLike[str]) -> Result:
    """Read a result back from a JSON text or from a file that holds one.

    Raises ``InputError`` when the file cannot be read or the document is not one of this package's results.
    """
    text, where = _text_of(source)
    try:
        document = json.loads(text)
    except (json.JSONDecodeError, RecursionError) as error:
        raise InputError.single(f"this is not a JSON document: {error}", where) from error
    try:
        return _from_document(document)
    except InputError as error:
        raise InputError.single(f"this is not a result of ratomega: {error}", where) from error
    except (KeyError, TypeError, ValueError, AttributeError, IndexError) as error:
        message = f"this is not a result of ratomega: {type(error).__name__} {error}"
        raise InputError.single(message, where) from error


def _text_of(source: str | os.PathLike[str]) -> tuple[str, str]:
    if isinstance(source, str) and source.lstrip()[:1] == "{":
        return source, "document"
    path = Path(source)
    try:
        if path.stat().st_size > LARGEST_DOCUMENT:
            raise InputError.single(f"the file is larger than {LARGEST_DOCUMENT} bytes", str(path))
        return path.read_text(encoding="utf-8"), str(path)
    except (OSError, UnicodeDecodeError, ValueError) as error:
        raise InputError.single(f"the file cannot be read: {error}", str(path)) from error


def _from_document(document: Document) -> Result:
    if document["result"] == "atlas":
        return read_atlas(document)
    if document["result"] == "block":
        return read_block(document, _each(_read_check, document["checks"]))
    header = _read_header(document)
    partial = _flag(document["partial"])
    kind = document["result"]
    if kind == "limit":
        coefficients = tuple(_read_coefficient(c, header.case.symbols) for c in document["coefficients"])
        checks = tuple(_read_check(c) for c in document["checks"])
        return LimitResult(header, _read_route(document["route"]), coefficients, checks, partial)
    if kind == "detect":
        return DetectResult(header, tuple(_read_charge(c, header.case) for c in document["charges"]), partial)
    if kind == "validate":
        checks = tuple(_read_check(c) for c in document["checks"])
        result = ValidateResult(header, checks, depth_of(document["depth"]).name, partial)
        if document["summary"] != result.summary:
            raise ValueError("the summary is not that of the checks")
        return result
    if kind == "average":
        return read_average(document, header, partial)
    if kind == "explain":
        paragraphs = tuple(Paragraph(_word(p["title"]), _word(p["text"])) for p in document["paragraphs"])
        return Explanation(header, paragraphs, partial)
    if kind == "approach":
        return read_approach(document, header, partial)
    if kind == "compare":
        return read_compare(document, header, partial)
    known = "limit, detect, validate, average, block, approach, compare, explain or atlas"
    raise ValueError(f'"result" is {kind!r}, not {known}')


# ---- small pieces, each with its way back ----


def _flag(value: object) -> bool:
    if not isinstance(value, bool):
        raise TypeError(f"expected true or false, not {value!r}")
    return value


def _number(value: object) -> int:
    if not isinstance(value, int) or isinstance(value, bool):
        raise TypeError(f"expected an integer, not {value!r}")
    return value


def _word(value: object) -> str:
    if not isinstance(value, str):
        raise TypeError(f"expected a text, not {value!r}")
    return value


def _exact(value: object) -> Number:
    return from_number_text(_word(value))


def _value_text(value: Number | RationalFunction) -> str:
    return function_text(value) if isinstance(value, RationalFunction) else number_text(value)


def _read_value(value: object, symbols: tuple[str, ...]) -> Number | RationalFunction:
    return parse_function(_word(value), symbols) if symbols else _exact(value)


def _each(read: Callable[[Any], Any], values: Sequence[Any]) -> tuple[Any, ...]:
    if not isinstance(values, list):
        raise TypeError(f"expected a list, not {values!r}")
    return tuple(read(value) for value in values)


def _header(header: Header) -> Document:
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


def _read_header(document: Document) -> Header:
    case = case_from_mapping(document["case"])
    if document["hash"] != case.hash:
        raise ValueError(f'the hash {document["hash"]} does not belong to the case, whose hash is {case.hash}')
    path = document["path"]
    record = PathRecord(
        _each(_word, path["parameters"]),
        _word(path["eps1"]),
        _word(path["eps2"]),
        tuple((name, _each(_word, values)) for name, values in path["coulomb"].items()),
        _flag(path["tilted"]),
    )
    return Header(_word(document["version"]), case, record, case.hash, _each(_word, document["warnings"]))


def _check(check: Check) -> Document:
    return {
        "name": check.name,
        "verdict": check.verdict.value,
        "kind": check.kind.value,
        "evidence": check.evidence,
        "source": check.source,
        "complete": check.complete,
    }


def _read_check(d: Document) -> Check:
    name, evidence, source = _word(d["name"]), _word(d["evidence"]), _word(d["source"])
    return Check(name, Verdict(d["verdict"]), Kind(d["kind"]), evidence, source, _flag(d["complete"]))


def _path_value(value: PathValue) -> Document:
    return {"path": value.path, "value": number_text(value.value), "order": value.order}


_COUNTS = ("configurations", "singular", "indeterminate", "worst_order", "clusters", "singular_clusters")


def _coefficient(c: Coefficient) -> Document:
    document: Document = {"charge": list(c.charge), "status": c.status}
    if c.value is not None:
        document["value"] = _value_text(c.value)
    if c.leading is not None:
        document |= {"order": c.order, "leading": number_text(c.leading)}
    if c.values:
        document["values"] = [_path_value(v) for v in c.values]
    document["independence"] = c.independence
    if c.terms is not None:
        document["terms"] = [{"power": power, "value": number_text(value)} for power, value in c.terms]
    counts = {name: getattr(c, name) for name in _COUNTS}
    return document | {name: value for name, value in counts.items() if value is not None}


def _read_coefficient(d: Document, symbols: tuple[str, ...]) -> Coefficient:
    return Coefficient(
        charge=_each(_number, d["charge"]),
        status=_word(d["status"]),
        value=_read_value(d["value"], symbols) if "value" in d else None,
        order=_number(d.get("order", 0)),
        leading=_exact(d["leading"]) if "leading" in d else None,
        values=tuple(
            PathValue(_word(v["path"]), _exact(v["value"]), _number(v["order"])) for v in d.get("values", [])
        ),
        independence=None if d["independence"] is None else _word(d["independence"]),
        terms=tuple((_number(t["power"]), _exact(t["value"])) for t in d["terms"]) if "terms" in d else None,
        **{name: _number(d[name]) if name in d else None for name in _COUNTS},
    )


def _route(r: RouteRecord) -> Document:
    return {"name": r.route, "method": r.method, "why": r.why, "spare_bits": r.spare_bits, "primes": r.primes}


def _read_route(d: Document) -> RouteRecord:
    bits = None if d["spare_bits"] is None else _number(d["spare_bits"])
    return RouteRecord(_word(d["name"]), _word(d["method"]), _word(d["why"]), bits, _number(d["primes"]))


def _diagrams(configuration: Configuration, case: Case) -> Document:
    nodes = zip(case.theory.nodes, configuration, strict=True)
    return {node.name: [list(diagram) for diagram in diagrams] for node, diagrams in nodes}


def _read_diagrams(d: Mapping[str, Any], case: Case) -> Configuration:
    return tuple(
        _each(lambda diagram: _each(_number, diagram), d[node.name]) for node in case.theory.nodes
    )


def _factor(f: FactorReport) -> Document:
    return {
        "multiplet": f.multiplet,
        "place": f.place,
        "colours": list(f.colours),
        "box": list(f.box),
        "arm": f.arm,
        "leg": f.leg,
        "form": f.form,
        "on_path": f.on_path,
        "within": list(f.within),
    }


def _read_factor(d: Document) -> FactorReport:
    row, column = _each(_number, d["box"])
    node, colour = _each(_number, d["within"])
    return FactorReport(
        _word(d["multiplet"]),
        _word(d["place"]),
        _each(_number, d["colours"]),
        (row, column),
        None if d["arm"] is None else _number(d["arm"]),
        None if d["leg"] is None else _number(d["leg"]),
        _word(d["form"]),
        _word(d["on_path"]),
        (node, colour),
    )


def _singular(s: SingularReport, case: Case) -> Document:
    return {
        "diagrams": _diagrams(s.diagrams, case),
        "order": s.order,
        "factors": [_factor(f) for f in s.factors],
        "compensating": [_factor(f) for f in s.compensating],
        "cluster": s.cluster,
        "dead": s.dead,
    }


def _read_singular(d: Document, case: Case) -> SingularReport:
    return SingularReport(
        _read_diagrams(d["diagrams"], case),
        _number(d["order"]),
        _each(_read_factor, d["factors"]),
        _each(_read_factor, d["compensating"]),
        None if d["cluster"] is None else _number(d["cluster"]),
        _flag(d["dead"]),
    )


def _exchange(e: Exchange) -> Document:
    return {"members": list(e.members), "leaves": [list(b) for b in e.leaves], "enters": [list(b) for b in e.enters]}


def _read_box(values: list[int]) -> tuple[int, int, int, int]:
    node, colour, row, column = _each(_number, values)
    return node, colour, row, column


def _read_exchange(d: Document) -> Exchange:
    first, second = _each(_number, d["members"])
    return Exchange((first, second), _each(_read_box, d["leaves"]), _each(_read_box, d["enters"]))


def _cluster(c: ClusterReport, case: Case) -> Document:
    document: Document = {
        "order": c.order,
        "size": c.size,
        "dimension": c.dimension,
        "euler_number": c.euler_number,
        "compact": c.compact,
        "why": c.why,
        "poincare": None if c.poincare is None else list(c.poincare),
        "poincare_why": c.poincare_why,
        "members": [_diagrams(member, case) for member in c.members],
    }
    if c.exchanges is not None:
        document["exchanges"] = [_exchange(e) for e in c.exchanges]
    return document


def _read_cluster(d: Document, case: Case) -> ClusterReport:
    return ClusterReport(
        _number(d["order"]),
        _each(lambda member: _read_diagrams(member, case), d["members"]),
        _number(d["dimension"]),
        _flag(d["compact"]),
        _word(d["why"]),
        _each(_read_exchange, d["exchanges"]) if "exchanges" in d else None,
        None if d["poincare"] is None else _each(_number, d["poincare"]),
        _word(d["poincare_why"]),
    )


def _charge(c: ChargeReport, case: Case) -> Document:
    return {
        "charge": list(c.charge),
        "configurations": c.configurations,
        "singular": c.singular,
        "indeterminate": c.indeterminate,
        "vanishing": c.vanishing,
        "worst_order": c.worst_order,
        "all_clusters": c.all_clusters,
        "clusters": [_cluster(cluster, case) for cluster in c.clusters],
        "singular_configurations": [_singular(s, case) for s in c.singular_configurations],
        "indeterminate_configurations": [_singular(s, case) for s in c.indeterminate_configurations],
        "vanishing_configurations": [_diagrams(v, case) for v in c.vanishing_configurations],
    }


def _read_charge(d: Document, case: Case) -> ChargeReport:
    return ChargeReport(
        charge=_each(_number, d["charge"]),
        configurations=_number(d["configurations"]),
        singular=_number(d["singular"]),
        indeterminate=_number(d["indeterminate"]),
        vanishing=_number(d["vanishing"]),
        worst_order=_number(d["worst_order"]),
        all_clusters=_number(d["all_clusters"]),
        clusters=_each(lambda c: _read_cluster(c, case), d["clusters"]),
        singular_configurations=_each(lambda s: _read_singular(s, case), d["singular_configurations"]),
        indeterminate_configurations=_each(lambda s: _read_singular(s, case), d["indeterminate_configurations"]),
        vanishing_configurations=_each(lambda v: _read_diagrams(v, case), d["vanishing_configurations"]),
    )
