"""The door of this room: any result as JSON and back.

``load_result(to_json(result)) == result``, and writing again gives the same bytes. Host names, folders and times stay
out (but for the seconds of an approach): the same case gives the same document everywhere.
"""

from __future__ import annotations

import json
import os
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

from ratomega.case.tables import bounded_text, file_name
from ratomega.case.wording import kind, quoted, shortened
from ratomega.chain.explaining import Explanation
from ratomega.detector.atlas import Atlas
from ratomega.documents.approach import approach_body, read_approach
from ratomega.documents.atlas import atlas_document, read_atlas
from ratomega.documents.averages import average_body, read_average
from ratomega.documents.blocks import block_document, read_block
from ratomega.documents.comparing import compare_body, read_compare
from ratomega.documents.detecting import detect_body, read_detect
from ratomega.documents.explaining import explanation_body, read_explanation
from ratomega.documents.grids import grid_body, read_grid
from ratomega.documents.header import header_document, read_header
from ratomega.documents.limits import limit_body, read_limit
from ratomega.documents.pieces import Document, Misfit, flag, one_of
from ratomega.documents.validating import read_validate, validate_body
from ratomega.errors import InputError, Problem
from ratomega.results.averages import AverageResult
from ratomega.results.blocks import BlockResult
from ratomega.results.detections import DetectResult
from ratomega.results.grids import GridResult
from ratomega.results.header import Header
from ratomega.results.limits import LimitResult
from ratomega.results.validations import ValidateResult
from ratomega.verify.approach import Approach
from ratomega.verify.comparing import CompareResult

__all__ = ["Result", "load_result", "to_document", "to_json"]

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
    | GridResult
)

LARGEST_DOCUMENT = 512 * 1024 * 1024
LONGEST_SENTENCE = 600


@dataclass(frozen=True, slots=True)
class _Form:
    """A kind of result that has a header: its type, what it has beside the header, and the way back."""

    type: type[Any]
    body: Callable[[Any], Document]
    read: Callable[[Mapping[str, Any], Header, bool], Result]


_FORMS = {
    "limit": _Form(LimitResult, limit_body, read_limit),
    "detect": _Form(DetectResult, detect_body, read_detect),
    "validate": _Form(ValidateResult, validate_body, read_validate),
    "average": _Form(AverageResult, average_body, read_average),
    "approach": _Form(Approach, approach_body, read_approach),
    "compare": _Form(CompareResult, compare_body, read_compare),
    "grid": _Form(GridResult, grid_body, read_grid),
    "explain": _Form(Explanation, explanation_body, read_explanation),
}


def to_json(result: Result) -> str:
    """The result as one JSON document, with a final newline. Deterministic."""
    return json.dumps(to_document(result), indent=1, ensure_ascii=False) + "\n"


def to_document(result: Result) -> Document:
    """The result as plain dictionaries, lists, strings, integers and truth values."""
    if isinstance(result, Atlas):
        return atlas_document(result)
    if isinstance(result, BlockResult):
        return block_document(result)
    name, form = next((name, form) for name, form in _FORMS.items() if isinstance(result, form.type))
    return {"result": name, **header_document(result.header), "partial": result.partial, **form.body(result)}


def load_result(source: str | os.PathLike[str]) -> Result:
    """Read a result back from a JSON text or from a file that holds one.

    Raises ``InputError`` when the file cannot be read or the document is not one of this package's results.
    """
    text, where = _text_of(source)
    try:
        document = json.loads(text)
    except (json.JSONDecodeError, RecursionError) as error:
        raise InputError.single(f"this is not a JSON document: {error}", where) from error
    except ValueError:
        # Integers beyond Python's limit for text.
        raise InputError.single("this is not a result of ratomega: an integer has too many digits", where) from None
    if not isinstance(document, dict):
        raise InputError.single(f"a result of ratomega is a JSON object, not {kind(document)}", where)
    try:
        return _from_document(document)
    except InputError as error:
        inside = (f"this is not a result of ratomega: {problem.text()}" for problem in error.problems)
        raise InputError(Problem(shortened(said, LONGEST_SENTENCE), where) for said in inside) from error
    except Misfit as error:
        said = f"this is not a result of ratomega: {error}"
    except KeyError as error:
        said = f"this is not a result of ratomega: the key {quoted(str(error.args[0]))} is missing"
    except (TypeError, ValueError, AttributeError, IndexError, ArithmeticError):
        # Raised by Python where, say, a list stands in the place of a table.
        said = "this is not a result of ratomega: a value is not of the kind that belongs in its place"
    raise InputError.single(shortened(said, LONGEST_SENTENCE), where)


def _text_of(source: str | os.PathLike[str]) -> tuple[str, str]:
    if isinstance(source, str) and source.lstrip()[:1] == "{":
        return source, "document"
    return bounded_text(source, LARGEST_DOCUMENT, "file"), file_name(source)


def _from_document(document: Document) -> Result:
    of = document["result"]
    if of == "atlas":
        return read_atlas(document)
    if of == "block":
        return read_block(document)
    form = _FORMS[one_of(document, "result", (*_FORMS, "atlas", "block"))]
    return form.read(document, read_header(document), flag(document["partial"]))
