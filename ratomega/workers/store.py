"""The store of finished chunks: one SQLite file for one case, filled as results arrive.

A file is taken when it is new or empty, or a sound store of the same case, program and scheme. Any other is refused
with a reason and left as it is. Results stand compressed, each with a checksum over its key and text; all are checked
before any work is done. Two runs of one case may use a store at the same time: equal keys have equal results.
"""

from __future__ import annotations

import hashlib
import os
import sqlite3
import stat
import zlib
from collections.abc import Iterable
from typing import Self

from ratomega.case.case import Case
from ratomega.case.tables import file_label
from ratomega.case.wording import shortened
from ratomega.errors import InputError
from ratomega.workers.chunks import STAMP
from ratomega.workers.texts import written

__all__ = ["Store", "identity"]

# Says in the header of the file that it is one of ours.
APPLICATION = 0x5241544F
LARGEST_RESULT = 1 << 28
PATIENCE = 30.0
# The messages of SQLite quote what stands in the file, which need not be text.
_UNREADABLE = (sqlite3.Error, UnicodeDecodeError)

_TABLES = """
CREATE TABLE about (name TEXT PRIMARY KEY, value TEXT NOT NULL) WITHOUT ROWID;
CREATE TABLE chunk (key TEXT PRIMARY KEY, result BLOB NOT NULL, checksum BLOB NOT NULL) WITHOUT ROWID;
"""


def identity(case: Case) -> dict[str, str]:
    """What a store belongs to. Node names count, because tilts are chosen in their order; charge and title do not."""
    names = written([node.name for node in case.theory.nodes])
    return {"stamp": STAMP, "hash": case.hash, "physics": case.key(), "nodes": names}


class Store:
    """An open store. Build it with ``Store.open``; close it, or use it in a ``with``."""

    def __init__(self, connection: sqlite3.Connection, label: str) -> None:
        self._connection = connection
        self.label = label

    @classmethod
    def open(cls, path: str | os.PathLike[str], case: Case) -> Store:
        """Raises ``InputError`` when the file cannot be used for this case; then it is left as it was.

        Cost: every result that is there is read once.
        """
        # An absolute name, so that no text is taken for one of SQLite's special names.
        name = os.path.abspath(os.fsdecode(path))
        label = file_label(name)
        _check_kind(name, label)
        try:
            connection = sqlite3.connect(name, timeout=PATIENCE, isolation_level=None)
        except (sqlite3.Error, ValueError) as error:
            raise _refusal(f"the store cannot be opened: {error}", label) from None
        try:
            # A file from elsewhere may bring triggers and views along.
            connection.execute("PRAGMA trusted_schema = OFF")
            # Exclusive, so that of two runs that find it empty one makes it and the other sees it made.
            connection.execute("BEGIN EXCLUSIVE")
            _make_or_check(connection, identity(case), label)
            connection.execute("COMMIT")
        except _UNREADABLE as error:
            connection.close()
            raise _refusal(_sentence(error), label) from None
        except BaseException:
            connection.close()
            raise
        return cls(connection, label)

    def keys(self) -> set[str]:
        """The keys of all chunks that are kept."""
        return {str(key) for (key,) in self._ask("SELECT key FROM chunk")}

    def get(self, key: str) -> str:
        """The result of a chunk that is kept."""
        ((result, checksum),) = self._ask("SELECT result, checksum FROM chunk WHERE key = ?", key)
        return _checked(key, result, checksum, self.label)

    def put(self, results: Iterable[tuple[str, str]]) -> None:
        """Keep results, given as (key, text), in one transaction. Raises ``InputError`` when they cannot be written."""
        rows = [(key, _packed(text), _checksum(key, text)) for key, text in results]
        try:
            self._connection.execute("BEGIN IMMEDIATE")
            self._connection.executemany("INSERT OR IGNORE INTO chunk VALUES (?, ?, ?)", rows)
            self._connection.execute("COMMIT")
        except BaseException as error:
            if self._connection.in_transaction:
                self._connection.execute("ROLLBACK")
            if not isinstance(error, _UNREADABLE):
                raise
            raise _refusal(f"a result could not be written: {shortened(str(error), 200)}", self.label) from None

    def __len__(self) -> int:
        return len(self._ask("SELECT key FROM chunk"))

    def _ask(self, question: str, *values: str) -> list[tuple[object, ...]]:
        try:
            return self._connection.execute(question, values).fetchall()
        except _UNREADABLE as error:
            raise _refusal(_sentence(error), self.label) from None

    def close(self) -> None:
        self._connection.close()

    def __enter__(self) -> Self:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()


def _check_kind(name: str, label: str) -> None:
    try:
        mode = os.stat(name).st_mode
    except FileNotFoundError:
        if not os.path.isdir(os.path.dirname(name)):
            raise _refusal("there is no folder to put the store in", label) from None
        return
    except (OSError, ValueError) as error:
        raise _refusal(f"the store cannot be opened: {error}", label) from None
    if not stat.S_ISREG(mode):
        raise _refusal("this is not a regular file, so it can be no store", label)


def _make_or_check(connection: sqlite3.Connection, mine: dict[str, str], label: str) -> None:
    tables = connection.execute("SELECT name FROM sqlite_master").fetchall()
    ((application,),) = connection.execute("PRAGMA application_id")
    if not tables and application == 0:
        for statement in _TABLES.split(";"):
            connection.execute(statement)
        connection.execute(f"PRAGMA application_id = {APPLICATION}")
        connection.executemany("INSERT INTO about VALUES (?, ?)", list(mine.items()))
        return
    if application != APPLICATION:
        raise _refusal("this is a database of another program, not a store of chunks", label)
    if connection.execute("PRAGMA quick_check(1)").fetchall() != [("ok",)]:
        raise _refusal(_DAMAGED, label)
    about = {str(name): str(value) for name, value in connection.execute("SELECT name, value FROM about LIMIT 100")}
    _check_identity(about, mine, label)
    for key, result, checksum in connection.execute("SELECT key, result, checksum FROM chunk"):
        _checked(key, result, checksum, label)


def _check_identity(about: dict[str, str], mine: dict[str, str], label: str) -> None:
    if about.keys() != mine.keys():
        raise _refusal(_DAMAGED, label)
    if about["stamp"] != mine["stamp"]:
        raise _refusal(
            f"this store was made by {shortened(about['stamp'])}, and this is {mine['stamp']}; name another file", label
        )
    if about["hash"] != mine["hash"]:
        raise _refusal(
            f"this store belongs to another case, of hash {shortened(about['hash'])}; this has {mine['hash']}", label
        )
    if about != mine:
        raise _refusal("this store belongs to a case whose nodes have other names, or another order", label)


def _checked(key: object, result: object, checksum: object, label: str) -> str:
    """The text of one row. Raises ``InputError`` when it is not what was once put there."""
    if isinstance(key, str) and isinstance(result, bytes):
        unpack = zlib.decompressobj()
        try:
            text = unpack.decompress(result, LARGEST_RESULT).decode("ascii")
        except (zlib.error, UnicodeDecodeError):
            text = ""
        if unpack.eof and checksum == _checksum(key, text):
            return text
    raise _refusal(_DAMAGED, label)


def _packed(text: str) -> bytes:
    return zlib.compress(text.encode("ascii"), 1)


def _checksum(key: str, text: str) -> bytes:
    return hashlib.sha256(f"{key}\n{text}".encode()).digest()[:16]


_DAMAGED = "this store is damaged; it was left as it is, name another file or remove it"


def _refusal(message: str, label: str) -> InputError:
    return InputError.single(message, label)


def _sentence(error: Exception) -> str:
    text = str(error)
    if "not a database" in text:
        return "this file is no store of chunks; it was left as it is"
    if "locked" in text or "busy" in text:
        return "the store is held by another program; try again when that has ended"
    if "readonly" in text or "unable to open" in text:
        return f"the store cannot be opened for writing: {text}"
    return _DAMAGED
