"""From a file or a text to the tables of TOML, with every size bounded before work is done."""

from __future__ import annotations

import os
import re
import stat
import tomllib
from typing import Any

from ratomega.case.wording import quoted, shortened
from ratomega.errors import InputError

__all__ = ["LARGEST_FILE", "bounded_text", "file_label", "file_name", "text_of_file", "toml_tables"]

LARGEST_FILE = 256 * 1024
MOST_KEY_PARTS = 16

# A string or a comment of TOML; one that is never closed runs to the end, where tomllib stops as well.
_BLANK = re.compile(
    r'"""(?:[^"\\]|\\.|"(?!""))*+(?:"{3,5}|$)'
    r"|'''(?:[^']|'(?!''))*+(?:'{3,5}|$)"
    r'|"(?:[^"\\\n]|\\.)*+"?'
    r"|'[^'\n]*+'?"
    r"|#[^\n]*+",
    re.DOTALL,
)
_BETWEEN_KEYS = re.compile(r"[\n,=\[\]{}]+")
_PLACE = re.compile(r"\s*\(at (?:line (\d+), column (\d+)|end of document)\)\s*$")
_FRACTION = re.compile(r"[+-]?[0-9.]+\s*/\s*[0-9.]+")
_EXPRESSION = re.compile(r"[=,\[]\s*([^=,\[\]]*\b(?:eps1|eps2|t)\b[^=,\[\]]*)")
WINDOW = 100


def file_label(path: str) -> str:
    """How messages name a file: by its last part, since they travel and folders of a machine do not.

    >>> file_label("some/folder/demo.toml")
    'demo.toml'
    """
    return shortened(os.path.basename(path.rstrip("/")) or path)


def text_of_file(path: str) -> str:
    """The text of a regular file of at most ``LARGEST_FILE`` bytes. Raises ``InputError`` naming the file."""
    where = file_label(path)
    try:
        # Asked before opening: a pipe would block.
        mode = os.stat(path).st_mode
        if stat.S_ISDIR(mode):
            raise InputError.single("this is a directory, not a case file", where)
        if not stat.S_ISREG(mode):
            raise InputError.single("this is not a regular file", where)
        with open(path, "rb") as stream:
            data = stream.read(LARGEST_FILE + 1)
    except FileNotFoundError:
        raise InputError.single("there is no such file", where) from None
    except OSError as error:
        raise InputError.single(f"the file cannot be read: {error.strerror}", where) from None
    except ValueError:
        raise InputError.single("this is not the name of a file", where) from None
    if len(data) > LARGEST_FILE:
        raise InputError.single(f"the file is larger than {LARGEST_FILE // 1024} kB", where)
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        raise InputError.single("the file is not UTF-8 text", f"{where}: line {line}") from None


def bounded_text(source: str | os.PathLike[str], most: int, what: str) -> str:
    """The text of a file of at most ``most`` bytes that is given by hand: unlike a case it may come through a pipe.

    ``what`` is what messages call it. Raises ``InputError`` naming the file.
    """
    where = file_name(source)
    try:
        with open(source, "rb") as stream:
            # Bounded whatever the file is: a device has no size and no end.
            data = stream.read(most + 1)
    except OSError as error:
        raise InputError.single(f"the {what} cannot be read: {error.strerror}", where) from error
    except ValueError:
        raise InputError.single(f"the {what} cannot be read: this is not the name of a file", where) from None
    if len(data) > most:
        raise InputError.single(f"the {what} is larger than {most} bytes", where)
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError:
        raise InputError.single(f"the {what} is not UTF-8 text", where) from None


def file_name(source: str | os.PathLike[str]) -> str:
    """How messages name a file that was given by hand: as it was typed."""
    return shortened(os.fspath(source), 200)


def toml_tables(text: str, where: str) -> dict[str, Any]:
    """The tables of a TOML text; ``InputError`` with the line when it is none.

    >>> toml_tables("eps1 = 3/2", "demo.toml")
    Traceback (most recent call last):
    ...
    ratomega.errors.InputError: demo.toml: line 1: exact numbers are quoted: write "3/2"
    """
    if len(text) > LARGEST_FILE:
        raise InputError.single(f"the text is longer than {LARGEST_FILE // 1024} kB", where)
    bare = _BLANK.sub('""', text)
    # tomllib takes time and memory quadratic in the parts of a dotted key.
    if any(piece.count(".") > MOST_KEY_PARTS for piece in _BETWEEN_KEYS.split(bare)):
        raise InputError.single(f"this is not TOML with keys of at most {MOST_KEY_PARTS} parts", where)
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise _not_toml(text, str(error), where) from None
    except RecursionError:
        raise InputError.single("the lists and tables are nested too deeply", where) from None
    except ValueError:
        # Integers beyond Python's limit for text; tomllib lets this one through.
        raise InputError.single("an integer has too many digits", where) from None


def _not_toml(text: str, said: str, where: str) -> InputError:
    place = _PLACE.search(said)
    reason = shortened(said[: place.start()] if place else said, 120)
    message = f"this is not TOML: {reason[:1].lower()}{reason[1:]}"
    if place is None or place[1] is None:
        return InputError.single(message, where)
    # Quotes and comments are blanked on the whole text, so that a string over several lines hides nothing.
    number = int(place[1])
    lines = _BLANK.sub(_same_lines, text.replace("\r\n", "\n")).split("\n")
    column = int(place[2])
    # Only the neighbourhood of the mistake is searched: a line can be as long as the file.
    line = lines[number - 1][max(0, column - WINDOW) : column + WINDOW] if number <= len(lines) else ""
    here = f"{where}: line {number}"
    for pattern in (_EXPRESSION, _FRACTION):
        match = pattern.search(line)
        if match:
            shown = quoted(match[match.lastindex or 0].strip())
            return InputError.single(f"exact numbers are quoted: write {shown}", here)
    return InputError.single(f"{message} (column {column})", here)


def _same_lines(match: re.Match[str]) -> str:
    return '""' + "\n" * match[0].count("\n")
