"""What the shell offers for an argument: bundled cases and files that fit. Nothing is checked here.

The reading of a case or a table says what is wrong with it, so these types let every text through.
"""

from __future__ import annotations

import os
import re

import click
from click.shell_completion import CompletionItem
from click.types import StringParamType

from ratomega.case.bundled import bundled_names

__all__ = ["CASE", "CASE_NAME", "FILE", "TABLE", "FileLike"]

# A shell would have to quote any other name, and is left to do so; ":" ends a word in bash.
_PLAIN = re.compile(r"[\w./~@%+-]+")


class FileLike(StringParamType):
    """Text that names a file, or a bundled case where ``bundled`` says so.

    Offered are those names and the files with one of the ``endings``; without endings any file, with ``files=False``
    none.
    """

    def __init__(self, *endings: str, bundled: bool = False, files: bool = True) -> None:
        self.endings = endings
        self.bundled = bundled
        self.files = files

    def shell_complete(self, ctx: click.Context, param: click.Parameter, incomplete: str) -> list[CompletionItem]:
        """Names first, then files, then the folders on the way to some."""
        names = [name for name in bundled_names() if name.startswith(incomplete)] if self.bundled else []
        if not self.files:
            return [CompletionItem(name) for name in names]
        if not self.endings:
            return [CompletionItem(incomplete, type="file")]
        files, folders = _entries(incomplete, self.endings)
        plain = [*names, *(file for file in files if _PLAIN.fullmatch(file))]
        if plain:
            return [CompletionItem(word) for word in (*plain, *(f for f in folders if _PLAIN.fullmatch(f)))]
        # The shell itself knows how to go on in a folder, and to quote what has to be quoted.
        return [CompletionItem(incomplete, type="file" if files else "dir")] if files or folders else []


def _entries(incomplete: str, endings: tuple[str, ...]) -> tuple[list[str], list[str]]:
    """The files with these endings, and the folders, that begin as typed; as one would go on typing."""
    folder, begin = os.path.split(incomplete)
    typed = incomplete[: len(incomplete) - len(begin)]
    files, folders = [], []
    try:
        with os.scandir(os.path.expanduser(folder) or ".") as entries:
            for entry in entries:
                if not entry.name.startswith(begin) or (entry.name.startswith(".") and not begin):
                    continue
                if entry.is_dir():
                    folders.append(f"{typed}{entry.name}/")
                elif entry.name.endswith(endings):
                    files.append(typed + entry.name)
    except (OSError, ValueError):
        # No such folder, or none that may be read: there is nothing to offer.
        return [], []
    return sorted(files), sorted(folders)


CASE = FileLike(".toml", bundled=True)
CASE_NAME = FileLike(bundled=True, files=False)
TABLE = FileLike(".csv", ".json")
FILE = FileLike()
