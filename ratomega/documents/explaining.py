"""Explanations as JSON and back: titled paragraphs."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from ratomega.chain.explaining import Explanation, Paragraph
from ratomega.documents.pieces import Document, listed, word
from ratomega.results.header import Header

__all__ = ["explanation_body", "read_explanation"]


def explanation_body(result: Explanation) -> Document:
    """What an explanation has beside the header."""
    return {"paragraphs": [{"title": p.title, "text": p.text} for p in result.paragraphs]}


def read_explanation(document: Mapping[str, Any], header: Header, partial: bool) -> Explanation:
    """The way back. Raises ``Misfit``, or what Python raises, for anything else."""
    paragraphs = tuple(Paragraph(word(p["title"]), word(p["text"])) for p in listed(document["paragraphs"]))
    return Explanation(header, paragraphs, partial)
