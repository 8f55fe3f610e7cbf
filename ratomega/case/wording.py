"""How a message shows what somebody typed: shortened, on one line, harmless to a terminal."""

from __future__ import annotations

import difflib
from collections.abc import Collection, Mapping, Sequence

__all__ = ["kind", "nearest", "quoted", "shortened"]

LONGEST_SHOWN = 60


def shortened(text: str, limit: int = LONGEST_SHOWN) -> str:
    r"""``text`` with its middle left out beyond ``limit`` characters, what cannot be printed escaped.

    >>> shortened("9" * 5000, 20), shortened("a\nb")
    ('999999999...99999999', 'a\\nb')
    """
    if len(text) > limit:
        head = (limit - 2) // 2
        text = f"{text[:head]}...{text[len(text) - (limit - head - 3) :]}"
    return "".join(c if c.isprintable() else c.encode("unicode_escape", "replace").decode() for c in text)


def quoted(text: str, limit: int = LONGEST_SHOWN) -> str:
    """``shortened`` in quotes.

    >>> quoted("eps1/2")
    '"eps1/2"'
    """
    return f'"{shortened(text, limit)}"'


def nearest(word: str, known: Collection[str]) -> str:
    """The known word that looks most like ``word``, ready to end a sentence; empty when none does.

    >>> nearest("colomb", ["coulomb", "name"]), nearest("xyz", ["coulomb"])
    ('; the nearest known one is "coulomb"', '')
    """
    if len(word) > LONGEST_SHOWN:
        return ""
    exact = [k for k in known if k.lower() == word.lower()]
    close = exact or difflib.get_close_matches(word, list(known), n=1, cutoff=0.5)
    return f"; the nearest known one is {quoted(close[0])}" if close else ""


def kind(value: object) -> str:
    """What a value is, in the words of a TOML file.

    >>> kind(True), kind(3), kind({}), kind("x"), kind([]), kind(None)
    ('a truth value', 'an integer', 'a table', 'text', 'a list', 'null')
    """
    if value is None:
        return "null"
    if isinstance(value, bool):
        return "a truth value"
    if isinstance(value, int):
        return "an integer"
    if isinstance(value, float):
        return "a float"
    if isinstance(value, str):
        return "text"
    if isinstance(value, Mapping):
        return "a table"
    if isinstance(value, Sequence):
        return "a list"
    return type(value).__name__
