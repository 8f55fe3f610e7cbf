"""Observables on a configuration, as linear forms in t over the scale of the weights.

With contents phi and eps = eps1 + eps2,

    Y(x) = prod_alpha (x - a_alpha) prod_s (x - phi - eps1)(x - phi - eps2) / ((x - phi)(x - phi - eps)).

Almost everything cancels: what is left are zeros at the contents of the boxes that can be added, and poles at
phi + eps of the boxes that can be removed. The chiral traces are the power sums of the same corners,

    Tr e^(z phi) = sum_alpha e^(z a_alpha) - (1 - e^(z eps1))(1 - e^(z eps2)) sum_s e^(z phi_s)
                 = sum over addable e^(z phi) - sum over removable e^(z (phi + eps)),

because Y'(x)/Y(x) = sum_n Tr phi^n / x^(n+1). Source: Nekrasov 1512.05388; Losev, Marshakov, Nekrasov hep-th/0302191.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from math import comb

from ratomega.diagrams.tuples import Charge, Configuration
from ratomega.diagrams.young import Diagram
from ratomega.exact.factored import Form, Whole, integer_form
from ratomega.exact.laurent import Laurent
from ratomega.exact.path import Linear
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ONE, ZERO, Rational
from ratomega.weights import Weights

__all__ = ["Corners", "Monomial", "Roots", "Term", "growth", "power_sums", "tail"]

Roots = Mapping[Form, int]
"""A product of x - root: exponents by root, in units of 1/scale, cancelled ones left out."""


@dataclass(frozen=True, slots=True)
class Monomial:
    """prod Y_v(x + shift)^exponent prod (x + mass); a factor is (node, shift, exponent)."""

    factors: tuple[tuple[int, Linear, int], ...]
    masses: tuple[Linear, ...] = ()

    def degree(self, ranks: Sequence[int]) -> int:
        """The degree in x at infinity: that of Y is the rank of its node, on every configuration."""
        return sum(ranks[v] * exponent for v, _, exponent in self.factors) + len(self.masses)


@dataclass(frozen=True, slots=True)
class Term:
    """sign * q^charge * <monomial>."""

    sign: int
    charge: Charge
    monomial: Monomial


class Corners:
    """The corners of configurations of one theory on one path. Those of a diagram are found once."""

    def __init__(self, weights: Weights) -> None:
        self.weights = weights
        self._known: dict[tuple[int, Diagram], tuple[tuple[Form, int], ...]] = {}
        ranks = weights.setting.ranks
        self._first_slots = tuple(sum(ranks[:v]) for v in range(len(ranks)))

    def of_diagram(self, slot: int, diagram: Diagram) -> tuple[tuple[Form, int], ...]:
        """(root, +1) for every box that can be added, (root + eps, -1) for every box that can be removed."""
        known = self._known.get((slot, diagram))
        if known is None:
            known = self._known[slot, diagram] = tuple(
                (self._content(slot, i, j), sign) for i, j, sign in _corners(diagram)
            )
        return known

    def _content(self, slot: int, i: int, j: int) -> Form:
        """a + i eps1 + j eps2 of the colour."""
        (c, s), (c1, s1), (c2, s2) = self.weights.coulomb[slot], self.weights.eps1, self.weights.eps2
        return c + i * c1 + j * c2, s + i * s1 + j * s2

    def of_node(self, configuration: Configuration, node: int) -> dict[Form, int]:
        """All corners of one node, equal ones collected: the roots of Y(x) with their exponents."""
        found: dict[Form, int] = {}
        for colour, diagram in enumerate(configuration[node]):
            for root, sign in self.of_diagram(self._first_slots[node] + colour, diagram):
                found[root] = found.get(root, 0) + sign
        return {root: exponent for root, exponent in found.items() if exponent}

    def roots(self, configuration: Configuration, monomial: Monomial) -> dict[Form, int]:
        """The roots of a monomial in x on a configuration."""
        scale = self.weights.scale
        found: dict[Form, int] = {}
        for node, shift, exponent in monomial.factors:
            c0, s0 = integer_form(shift, scale)
            for (c, s), sign in self.of_node(configuration, node).items():
                root = _less(c, c0), _less(s, s0)
                found[root] = found.get(root, 0) + sign * exponent
        for mass in monomial.masses:
            root = integer_form(-mass, scale)
            found[root] = found.get(root, 0) + 1
        return {root: exponent for root, exponent in found.items() if exponent}


def _less(one: Whole, other: Whole) -> Whole:
    """The difference of integers of the field, as one: an ``int`` where it is rational."""
    difference = one - other
    return int(difference.p) if isinstance(difference, Rational) else difference


def _corners(diagram: Diagram) -> Iterable[tuple[int, int, int]]:
    """(i, j, sign): the content is i eps1 + j eps2; sign +1 for an addable box, -1 for phi + eps of a removable one.

    >>> list(_corners((2, 1)))
    [(0, 2, 1), (1, 2, -1), (1, 1, 1), (2, 1, -1), (2, 0, 1)]
    """
    above = None
    for i, row in enumerate((*diagram, 0)):
        if above is None or row < above:
            if above is not None:
                yield i, above, -1
            yield i, row, 1
        above = row


def growth(roots: Roots) -> int:
    """The degree in x at infinity."""
    return sum(roots.values())


def power_sums(roots: Roots, highest: int, *, scale: int, last: int) -> list[Laurent]:
    """sum exponent * root^n for n = 1 ... highest as series in t, all powers up to ``last``: the traces of Y(x)."""
    length = max(last + 1, 0)
    unit = ONE / scale
    sums: list[list[Number]] = [[ZERO] * min(length, n + 1) for n in range(1, highest + 1)]
    for (c, s), exponent in roots.items():
        constants, slopes = _powers(c * unit, highest), _powers(s * unit, highest)
        for n, row in enumerate(sums, 1):
            for j in range(len(row)):
                row[j] = row[j] + constants[n - j] * slopes[j] * (comb(n, j) * exponent)
    return [Laurent.from_coefficients(0, row, precision=last + 1) for row in sums]


def _powers(value: Number, highest: int) -> list[Number]:
    powers: list[Number] = [ONE]
    for _ in range(highest):
        powers.append(powers[-1] * value)
    return powers


def tail(roots: Roots, *, scale: int, last: int) -> Laurent:
    """The coefficient of 1/x of prod (x - root)^exponent at large x, as a series in t, all powers up to ``last``.

    The product is x^d exp(-sum p_n / (n x^n)) with the power sums p_n; by Newton's identities the coefficient of
    x^(d-n) is e_n with n e_n = -sum_j p_j e_(n-j).
    """
    degree = growth(roots)
    if degree + 1 < 0:
        return Laurent.zero(precision=last + 1)
    sums = power_sums(roots, degree + 1, scale=scale, last=last)
    parts = [Laurent.constant(1, precision=last + 1)]
    for n in range(1, degree + 2):
        new = Laurent.zero(precision=last + 1)
        for j in range(1, n + 1):
            new = new + sums[j - 1] * parts[n - j]
        parts.append(new.scaled(-ONE / n))
    return parts[degree + 1]

