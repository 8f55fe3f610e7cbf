"""Depths: how much work a single check may be, and what to do where that is not enough.

Every check bounds its work before it starts. One that does not fit is undecided, and its evidence ends with the words
of this module: ask for the next depth, or, where there is none, for less.
"""

from __future__ import annotations

from dataclasses import dataclass

from ratomega.errors import InputError

__all__ = ["DEPTHS", "FULL", "Depth", "beyond", "depth_of", "too_costly"]


@dataclass(frozen=True, slots=True)
class Depth:
    """How much work a single check may be: configurations, levels of Gram matrices, effort of regularity in x."""

    name: str
    configurations: int
    level: int
    effort: int


FULL = Depth("full", 20_000, 10, 10)
DEPTHS = (Depth("quick", 2_000, 8, 1), FULL)

_ASK = '--depth full (depth="full" from Python)'


def depth_of(name: str) -> Depth:
    """The depth of that name. Raises ``InputError``."""
    for depth in DEPTHS:
        if depth.name == name:
            return depth
    known = ", ".join(depth.name for depth in DEPTHS)
    raise InputError.single(f'"{name}" is not a depth; the depths are {known}', "depth")


def too_costly(what: str, *, most: int, full: int, less: str = "lower the charge") -> str:
    """Why a check did not run, and what to do. ``most`` is the bound it had, ``full`` that of the deepest depth.

    >>> too_costly("37 configurations, more than 20", most=20, full=50)
    'too costly: 37 configurations, more than 20; ask for it with --depth full (depth="full" from Python)'
    >>> too_costly("90 configurations, more than 50", most=50, full=50)
    'too costly: 90 configurations, more than 50; --depth full does not allow more: lower the charge'
    """
    if most < full:
        return f"too costly: {what}; ask for it with {_ASK}"
    return f"too costly: {what}; --depth full does not allow more: {less}"


def beyond(*, most: int, full: int) -> str:
    """Why a check stopped at a lower charge than that of the case, to be put in brackets.

    >>> beyond(most=20, full=50), beyond(most=50, full=50)
    ('more is too costly; --depth full allows more', 'more is too costly at any depth')
    """
    return "more is too costly; --depth full allows more" if most < full else "more is too costly at any depth"
