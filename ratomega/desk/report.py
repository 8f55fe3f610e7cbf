"""A report: one page on a case, complete in itself."""

from __future__ import annotations

import os
import shlex
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from ratomega.case.case import Case
from ratomega.chain.job import CaseSource
from ratomega.desk.findings import Findings, gather
from ratomega.desk.markup import element
from ratomega.desk.page import page
from ratomega.errors import InputError

__all__ = ["Report", "report"]


@dataclass(frozen=True, slots=True)
class Report:
    """The page as text, and the results that it shows. ``notes`` say what was left out to keep it quick."""

    html: str
    findings: Findings

    @property
    def notes(self) -> tuple[str, ...]:
        return self.findings.notes

    def save(self, file: str | os.PathLike[str]) -> None:
        """Write the page to a file, which is replaced. Raises ``InputError`` when it cannot be written."""
        try:
            Path(file).write_text(self.html, encoding="utf-8", newline="\n")
        except OSError as error:
            raise InputError.single(f"the report cannot be written: {error.strerror}", os.fspath(file)) from error

    def _repr_html_(self) -> str:
        """In a notebook the page stands in a frame of its own, which runs nothing."""
        return element("iframe", srcdoc=self.html, sandbox=True, width="100%", height=720, title="report").text


def report(
    source: CaseSource,
    *,
    depth: str = "quick",
    allow_tilt: bool = True,
    command: str | None = None,
) -> Report:
    """Everything about a case on one self-contained page of HTML.

    ``source`` is a case, a mapping, a file or the name of a bundled case; ``depth`` as in ``validate`` ("full" also
    goes to higher charges); ``command`` is the one that the page names to repeat it. Raises ``InputError`` for bad
    input. Cost: bounded, up to some twenty seconds at "quick"; big cases are cut to fewer charges, and ``notes`` and
    the page say so.

    >>> made = report({"charge": 1, "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["0"]}]})
    >>> made.html[:15], made.notes
    ('<!DOCTYPE html>', ())
    """
    findings = gather(source, depth=depth, allow_tilt=allow_tilt)
    words = _command(source, depth, allow_tilt) if command is None else command
    return Report(page(findings, command=words), findings)


def _command(source: CaseSource, depth: str, allow_tilt: bool) -> str:
    """What does the same on the command line; a case without a file is the one that the page shows as a file."""
    case = "case.toml" if isinstance(source, (Case, Mapping)) else os.fsdecode(source)
    options = [*(["--depth", depth] if depth != "quick" else []), *([] if allow_tilt else ["--no-tilt"])]
    return shlex.join(["ratomega", "report", case, *options, "-o", "report.html"])
