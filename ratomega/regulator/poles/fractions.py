"""W as a function of x = a1 - a2: partial fractions in x^2, exact.

At generic eps1, eps2 the poles of W_k in x^2 are simple and sit at (m eps1 + n eps2)^2, m n <= k. At a rational ratio
several of them fall together: a pole at S^2, S = m alpha + n beta at the limit point, is then of an order up to the
number of pairs with this S^2. Its coefficients do not depend on a, so they are much shorter numbers than W at some a.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from ratomega.errors import RatomegaError
from ratomega.exact.rational import ZERO, Rational
from ratomega.regulator.poles.lattice import pairs_up_to

__all__ = ["ConsistencyError", "PartialFractions", "PoleLayout", "Term"]


class ConsistencyError(RatomegaError):
    """Parts that have to cancel did not, or residues fit no fraction: the machinery is at fault, not the input."""


@dataclass(frozen=True, slots=True)
class PoleLayout:
    """All terms 1/(S^2 - x^2)^power that can occur up to a charge, and from which charge on.

    >>> PoleLayout.make((1, 1), 3)
    PoleLayout(squares=(4, 9, 16), powers=(1, 1, 2, 1, 2), places=(0, 1, 1, 2, 2), born=(1, 2, 2, 3, 3))
    """

    squares: tuple[int, ...]
    powers: tuple[int, ...]
    places: tuple[int, ...]
    born: tuple[int, ...]

    @classmethod
    def make(cls, steps: tuple[int, int], charge: int) -> PoleLayout:
        """``places`` are places in ``squares``; terms are sorted by square and power."""
        weights: dict[int, list[int]] = {}
        for m, n in pairs_up_to(charge):
            weights.setdefault((m * steps[0] + n * steps[1]) ** 2, []).append(m * n)
        squares = tuple(sorted(weights))
        terms = [
            (power, place, weight)
            for place, square in enumerate(squares)
            for power, weight in enumerate(weights[square], 1)
        ]
        return cls(squares, tuple(t[0] for t in terms), tuple(t[1] for t in terms), tuple(t[2] for t in terms))

    @property
    def keys(self) -> tuple[tuple[int, int], ...]:
        """(S^2, power) of every term."""
        return tuple((self.squares[place], power) for place, power in zip(self.places, self.powers, strict=True))


@dataclass(frozen=True, slots=True)
class Term:
    """coefficient / (square - x^2)^power."""

    square: int
    power: int
    coefficient: Rational


@dataclass(frozen=True, slots=True)
class PartialFractions:
    """constant + sum of terms, in the units of the problem. Terms that vanish are left out.

    >>> half = PartialFractions(ZERO, (Term(4, 1, Rational(1, 2)), Term(9, 2, Rational(1))))
    >>> half.at(Rational(3))
    19/36
    """

    constant: Rational
    terms: tuple[Term, ...]

    def at(self, square: Rational) -> Rational:
        """The value at x^2 = ``square``. Raises ``ZeroDivisionError`` at a pole."""
        values = [self.constant]
        for place, term in enumerate(self.terms):
            if place and self.terms[place - 1].square == term.square:
                continue
            # Horner in 1/(S^2 - x^2), from the highest power down.
            same = [other for other in self.terms[place:] if other.square == term.square]
            step = 1 / (term.square - square)
            total, power = ZERO, same[-1].power
            for other in reversed(same):
                total = total * step ** (power - other.power) + other.coefficient
                power = other.power
            values.append(total * step**power)
        return _sum(values)


def _sum(values: Sequence[Rational]) -> Rational:
    """Pairwise, so that long denominators meet late."""
    while len(values) > 1:
        paired = [values[i] + values[i + 1] for i in range(0, len(values) - 1, 2)]
        values = paired + list(values[len(values) - len(values) % 2 :])
    return values[0]
