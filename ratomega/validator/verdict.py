"""Verdicts and checks.

A verdict has four values and no truth value: ``if verdict:`` is an error, because "undecided" is neither.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum
from typing import NoReturn

__all__ = ["Check", "Kind", "Verdict"]


class Verdict(Enum):
    """What a check found.

    >>> bool(Verdict.UNDECIDED)
    Traceback (most recent call last):
    TypeError: a verdict has no truth value; compare it with Verdict.PROVED and the others
    """

    PROVED = "proved"
    AGREES = "agrees"
    REFUTED = "refuted"
    UNDECIDED = "undecided"

    def __bool__(self) -> NoReturn:
        raise TypeError("a verdict has no truth value; compare it with Verdict.PROVED and the others")


class Kind(Enum):
    """What a check rests on: a theorem, an independent computation, or our own weights taken as data."""

    THEOREM = "theorem"
    INDEPENDENT = "independent"
    CONSISTENCY = "consistency"


@dataclass(frozen=True, slots=True)
class Check:
    """One check with its evidence, a sentence that can be read alone, and its source."""

    name: str
    verdict: Verdict
    kind: Kind
    evidence: str
    source: str
