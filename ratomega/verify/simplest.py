"""The simplest fraction in an interval: the number that somebody meant, where a fitted one is near it."""

from __future__ import annotations

from ratomega.exact.rational import Rational

__all__ = ["simplest_between"]


def simplest_between(low: Rational, high: Rational) -> Rational:
    """The fraction of the least denominator (then of the least size) with low <= x <= high, by continued fractions.

    >>> simplest_between(Rational(314, 1000), Rational(316, 1000)), simplest_between(Rational(-1, 2), Rational(1))
    (6/19, 0)
    """
    if low > high:
        raise ValueError(f"{low} > {high}")
    if low <= 0 <= high:
        return Rational(0)
    if high < 0:
        return -simplest_between(-high, -low)
    whole = low.floor()
    if whole == low:
        return Rational(whole)
    if whole + 1 <= high:
        return Rational(whole + 1)
    rest = simplest_between(1 / (high - whole), 1 / (low - whole))
    return whole + 1 / rest
