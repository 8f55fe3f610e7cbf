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
    """What a check rests on.

    * ``THEOREM``: a theorem, applied to exact facts about the case.
    * ``INDEPENDENT``: Z of this very case from a computation that shares no code with the sum over diagrams.
    * ``SIBLING``: the same, but for a relative of the case (special masses, other Coulomb parameters): it tries the
      engine at the case's background and does not prove this case.
    * ``GEOMETRY``: a published statement on the components of the fixed locus; no coefficient of Z is compared.
    * ``CONSISTENCY``: a relation that takes our own weights or Z as data.
    """

    THEOREM = "theorem"
    INDEPENDENT = "independent"
    SIBLING = "sibling"
    GEOMETRY = "geometry"
    CONSISTENCY = "consistency"


@dataclass(frozen=True, slots=True)
class Check:
    """One check with its evidence, a sentence that can be read alone, and its source.

    ``complete``: Z was compared at every charge of the case.
    """

    name: str
    verdict: Verdict
    kind: Kind
    evidence: str
    source: str
    complete: bool = False
