"""What a polynomial does at a place or far out, from its values at as many nodes as it has coefficients.

Newton's divided differences, over the rationals or a quadratic field. Cost: the square of the number of nodes.
"""

from __future__ import annotations

from collections.abc import Sequence

from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ZERO

__all__ = ["leading_two", "value_and_slope"]


def _differences(nodes: Sequence[Number], values: Sequence[Number]) -> list[Number]:
    found = list(values)
    for step in range(1, len(nodes)):
        for n in range(len(nodes) - 1, step - 1, -1):
            found[n] = (found[n] - found[n - 1]) / (nodes[n] - nodes[n - step])
    return found


def value_and_slope(place: Number, nodes: Sequence[Number], values: Sequence[Number]) -> tuple[Number, Number]:
    """The value and the derivative at ``place``; the nodes are different.

    >>> from ratomega.exact.rational import ONE, Rational
    >>> value_and_slope(Rational(5), [ZERO, ONE, Rational(3)], [ZERO, ONE, Rational(9)])      # x^2
    (25, 10)
    """
    value: Number = ZERO
    slope: Number = ZERO
    for node, difference in zip(reversed(nodes), reversed(_differences(nodes, values)), strict=True):
        slope = slope * (place - node) + value
        value = value * (place - node) + difference
    return value, slope


def leading_two(nodes: Sequence[Number], values: Sequence[Number]) -> tuple[Number, Number]:
    """The coefficients of x^n and x^(n-1) from n + 1 nodes; for n = 0 the second is 0.

    >>> from ratomega.exact.rational import ONE, Rational
    >>> leading_two([ZERO, ONE, Rational(2)], [Rational(7), Rational(14), Rational(27)])       # 3 x^2 + 4 x + 7
    (3, 4)
    """
    found = _differences(nodes, values)
    if len(nodes) == 1:
        return found[0], ZERO
    return found[-1], found[-2] - found[-1] * sum(nodes[:-1], ZERO)
