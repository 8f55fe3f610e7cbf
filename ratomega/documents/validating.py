"""Validations as JSON and back: every check, and the summary that follows from them."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from ratomega.documents.header import check_document, read_checks
from ratomega.documents.pieces import Document, Misfit
from ratomega.results.header import Header
from ratomega.results.validations import ValidateResult
from ratomega.validator.depth import depth_of

__all__ = ["read_validate", "validate_body"]


def validate_body(result: ValidateResult) -> Document:
    """What a validation has beside the header."""
    checks = [check_document(c) for c in result.checks]
    return {"depth": result.depth, "checks": checks, "summary": result.summary}


def read_validate(document: Mapping[str, Any], header: Header, partial: bool) -> ValidateResult:
    """The way back. Raises ``Misfit``, or what Python raises, for anything else."""
    checks = read_checks(document["checks"])
    result = ValidateResult(header, checks, depth_of(document["depth"]).name, partial)
    if document["summary"] != result.summary:
        raise Misfit("the summary is not that of the checks")
    return result
