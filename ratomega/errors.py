"""One exception tree; every error carries its data, and a class maps to an exit status.

``RatomegaError``
    ├── ``InputError``        the input is wrong (exit status 2); carries one ``Problem`` per mistake
    ├── ``PathError``         the chosen path cannot be used (exit status 2)
    ├── ``WorkerError``       the worker processes or the executor failed (exit status 4)
    └── ``PrecisionError``    a coefficient was asked beyond the known precision of a series
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Self

__all__ = ["INTERRUPTED", "InputError", "PathError", "PrecisionError", "Problem", "RatomegaError", "WorkerError"]

INTERRUPTED = 130
"""The exit status of a run that was interrupted from the keyboard; those of errors stand with them."""


@dataclass(frozen=True, slots=True)
class Problem:
    """One mistake: ``message`` is a sentence that says what would be right, ``where`` names file and key.

    >>> Problem("charge must be zero or more, not -1", "case.toml: charge").text()
    'case.toml: charge: charge must be zero or more, not -1'
    """

    message: str
    where: str = ""

    def text(self) -> str:
        return f"{self.where}: {self.message}" if self.where else self.message


class RatomegaError(Exception):
    """Root of everything that the package raises on purpose."""

    exit_status = 2


class InputError(RatomegaError):
    """The input is wrong. ``problems`` holds every mistake found, in reading order, never empty.

    >>> InputError.single("no such key", "case.toml: colour").problems[0].where
    'case.toml: colour'
    """

    def __init__(self, problems: Iterable[Problem]) -> None:
        self.problems: tuple[Problem, ...] = tuple(problems)
        if not self.problems:
            raise ValueError("an InputError needs at least one problem")
        super().__init__("\n".join(problem.text() for problem in self.problems))

    def __reduce__(self) -> tuple[type[Self], tuple[tuple[Problem, ...]]]:
        # An exception is pickled by its text unless told otherwise; this one crosses processes with its problems.
        return type(self), (self.problems,)

    @classmethod
    def single(cls, message: str, where: str = "") -> Self:
        return cls([Problem(message, where)])


class PathError(InputError):
    """The path to the limit point cannot be used: it stays on the ratio, or needs a tilt that was forbidden."""


class WorkerError(RatomegaError):
    """The work could not be brought to its end by the workers; the message says what was kept."""

    exit_status = 4


class PrecisionError(RatomegaError):
    """A coefficient was asked for at or beyond the precision to which a series is known."""
