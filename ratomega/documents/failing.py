"""An error as a JSON document."""

from __future__ import annotations

from typing import Any

from ratomega.errors import InputError

__all__ = ["error_document"]


def error_document(error: InputError) -> dict[str, Any]:
    """The first problem, and all of them.

    >>> error_document(InputError.single("no such key", "case.toml: colour"))["error"]["where"]
    'case.toml: colour'
    """
    problems = [{"message": p.message, "where": p.where} for p in error.problems]
    return {"error": {**problems[0], "all": problems}}
