"""What became of a limit: three outcomes, three types.

The case's own path gives the status, the order and the leading coefficient of a pole. Where compactness does not prove
that the limit is the same on every path, further paths were probed; their values stand beside.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from enum import Enum

from ratomega.exact.laurent import Laurent
from ratomega.exact.quadratic import Number

__all__ = ["FiniteLimit", "Independence", "Outcome", "PathDependent", "PathValue", "Pole", "judge"]


class Independence(Enum):
    """Why a value is the same on every path."""

    THEOREM = "theorem"
    AGREEMENT = "agreement"
    UNDECIDED = "undecided"


@dataclass(frozen=True, slots=True)
class PathValue:
    """The leading behaviour on one path: ``value * t^(-order)``; order 0 is a finite limit."""

    path: str
    value: Number
    order: int


@dataclass(frozen=True, slots=True)
class FiniteLimit:
    """The limit exists and no path was found on which it differs."""

    value: Number
    independence: Independence

    status = "finite"


@dataclass(frozen=True, slots=True)
class Pole:
    """A pole survives on the case's own path. ``values`` is empty unless the probed paths differ, own path first."""

    order: int
    leading: Number
    values: tuple[PathValue, ...]
    independence: Independence | None

    status = "pole"


@dataclass(frozen=True, slots=True)
class PathDependent:
    """The limit exists on the case's own path (``values[0]``) and is not the same on every path."""

    values: tuple[PathValue, ...]

    status = "path-dependent"


Outcome = FiniteLimit | Pole | PathDependent


def leading(path: str, series: Laurent) -> PathValue:
    """The leading behaviour of a series that is known up to t^0 at least."""
    order = max(0, -series.valuation)
    return PathValue(path, series.coefficient(-order), order)


def judge(own: PathValue, further: Sequence[PathValue], *, compact: bool) -> Outcome:
    """Three outcomes from the behaviour on the own path and on the further ones.

    >>> from ratomega.exact.rational import Rational
    >>> a, b = PathValue("p", Rational(1, 2), 0), PathValue("q", Rational(1, 3), 0)
    >>> judge(a, [b], compact=False).status, judge(a, [], compact=True).independence.value
    ('path-dependent', 'theorem')
    """
    agree = all((other.value, other.order) == (own.value, own.order) for other in further)
    if compact:
        independence = Independence.THEOREM
    else:
        independence = Independence.AGREEMENT if further else Independence.UNDECIDED
    if own.order > 0:
        values = () if agree else (own, *further)
        return Pole(own.order, own.value, values, independence if agree else None)
    if agree:
        return FiniteLimit(own.value, independence)
    return PathDependent((own, *further))
