"""A case in words, for a terminal."""

from __future__ import annotations

from textwrap import fill

from ratomega.chain.explaining import Explanation
from ratomega.desk.text import heading

__all__ = ["explain_text"]

WIDTH = 100


def explain_text(result: Explanation) -> str:
    """One paragraph after the other under its heading."""
    lines = heading(result.header, result.partial)
    for paragraph in result.paragraphs:
        lines += [paragraph.title, fill(paragraph.text, WIDTH, initial_indent="  ", subsequent_indent="  "), ""]
    return "\n".join(lines).rstrip() + "\n"
