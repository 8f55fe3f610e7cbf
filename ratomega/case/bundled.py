"""The bundled demo cases, of our own invention: one TOML file each in the folder ``bundled``."""

from __future__ import annotations

from importlib.resources import files

from ratomega.case.wording import nearest, quoted
from ratomega.errors import InputError

__all__ = ["bundled_names", "bundled_text"]

_FOLDER = files("ratomega.case") / "bundled"
_SUFFIX = ".toml"


def bundled_names() -> tuple[str, ...]:
    """The names of the bundled cases, in alphabetical order.

    >>> "b1-four-flavours" in bundled_names()
    True
    """
    names = (entry.name for entry in _FOLDER.iterdir())
    return tuple(sorted(name.removesuffix(_SUFFIX) for name in names if name.endswith(_SUFFIX)))


def bundled_text(name: str) -> str:
    """The TOML text of a bundled case. Raises ``InputError`` with the nearest name when there is none.

    >>> bundled_text("b1-four-flavours").startswith("# An invented demo case")
    True
    """
    known = bundled_names()
    # Looked up in the list, never joined to a path unchecked.
    if name not in known:
        hint = nearest(name, known)
        message = f'{quoted(name)} is neither a file nor a bundled case{hint}; "ratomega cases" lists the bundled ones'
        raise InputError.single(message, "case")
    return (_FOLDER / f"{name}{_SUFFIX}").read_text(encoding="utf-8")
