"""Polynomials from their values on a grid: Newton's divided differences, one direction after the other.

A polynomial whose degree in each variable is below the number of nodes there is determined by its values on the grid
of all nodes. Cost: for n nodes in each of r directions, about n^(r+1) exact operations.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from itertools import product

from flint import fmpq_poly

from ratomega.exact.rational import Rational

__all__ = ["grid_polynomial", "line_polynomial"]


def line_polynomial(nodes: Sequence[Rational], values: Sequence[Rational]) -> list[Rational]:
    """The coefficients, constant term first, of the polynomial with these values at these (different) nodes.

    >>> line_polynomial([Rational(0), Rational(1), Rational(3)], [Rational(2), Rational(3), Rational(11)])
    [2, 0, 1]
    """
    differences = list(values)
    for step in range(1, len(nodes)):
        for n in range(len(nodes) - 1, step - 1, -1):
            differences[n] = (differences[n] - differences[n - 1]) / (nodes[n] - nodes[n - step])
    poly = fmpq_poly()
    for node, difference in zip(reversed(nodes), reversed(differences), strict=True):
        poly = poly * fmpq_poly([-node, 1]) + difference
    return [poly[n] for n in range(len(nodes))]


def grid_polynomial(
    axes: Sequence[Sequence[Rational]], values: Mapping[tuple[int, ...], Rational]
) -> dict[tuple[int, ...], Rational]:
    """The coefficients by exponents; ``values`` are given by the indices of the nodes on every axis.

    >>> axes = [[Rational(0), Rational(1)], [Rational(0), Rational(2)]]
    >>> grid_polynomial(axes, {(0, 0): Rational(1), (0, 1): Rational(1), (1, 0): Rational(1), (1, 1): Rational(7)})
    {(0, 0): 1, (0, 1): 0, (1, 0): 0, (1, 1): 3}
    """
    table = dict(values)
    sizes = [range(len(axis)) for axis in axes]
    for place, axis in enumerate(axes):
        others = [sizes[n] if n != place else range(1) for n in range(len(axes))]
        for start in product(*others):
            line = [(*start[:place], n, *start[place + 1 :]) for n in sizes[place]]
            for index, coefficient in zip(line, line_polynomial(axis, [table[i] for i in line]), strict=True):
                table[index] = coefficient
    return {index: table[index] for index in product(*sizes)}
