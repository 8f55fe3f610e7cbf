"""The partial fractions of W, or W at one point, modulo primes: the pole recursion as a task."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from ratomega.exact.rational import Rational
from ratomega.exact.residues import PRIME_BITS, Floats, Moduli, residues_of
from ratomega.regulator.poles.engine import PoleEngine, PoleSolver
from ratomega.regulator.poles.problem import PoleProblem

__all__ = ["POLES", "POLES_AT_POINT", "PoleTask"]

POLES = "poles"
POLES_AT_POINT = "poles at the point"

BATCH_BYTES = 2**28
LARGEST_BATCH = 24
# Measured on one core at ratios of both signs, charges 24 to 80.
PER_BYTE = 5e-9
OVERHEAD = 4


@dataclass(frozen=True, slots=True, eq=False)
class PoleTask:
    """W_0 ... W_charge modulo primes. See ``ResidueTask``.

    With ``at_square`` the values at the x^2 of the problem, else the coefficients of all partial fractions: (charge +
    1, terms of the layout) of them, without the constant of W_0, which is 1.
    """

    problem: PoleProblem
    charge: int
    at_square: bool
    engine: PoleEngine
    bits: int = PRIME_BITS
    radicand: int = 0
    overhead: int = OVERHEAD

    @classmethod
    def make(cls, problem: PoleProblem, charge: int, *, at_square: bool) -> PoleTask:
        """The recursion is planned here. Cost: that of a few primes."""
        return cls(problem, charge, at_square, PoleEngine.make(problem, charge))

    @property
    def name(self) -> str:
        return POLES_AT_POINT if self.at_square else POLES

    @property
    def shape(self) -> tuple[int, ...]:
        return (self.charge + 1,) if self.at_square else (self.charge + 1, len(self.engine.layout.powers))

    @property
    def largest(self) -> int:
        return max(1, min(LARGEST_BATCH, BATCH_BYTES // max(1, self.engine.bytes_per_prime)))

    @property
    def seconds(self) -> float:
        return PER_BYTE * max(1, self.engine.bytes_per_prime)

    def residues(self, primes: Sequence[int]) -> Floats:
        moduli = Moduli.make(primes)
        inverse = self._inverse_distances(moduli) if self.at_square else None
        # A solver works in arrays of its own: one for each call, so that calls may run side by side.
        residues = PoleSolver(self.engine, len(moduli)).solve(moduli)
        return residues if inverse is None else self._at_square(moduli, residues, inverse)

    def _inverse_distances(self, moduli: Moduli) -> Floats:
        """1/(S^2 - x^2) for every pole of the layout: shape (primes, squares). Raises ``BadPrimes``."""
        distances = [Rational(square) - self.problem.square for square in self.engine.layout.squares]
        return moduli.inverses(residues_of(distances, moduli))

    def _at_square(self, moduli: Moduli, residues: Floats, inverse: Floats) -> Floats:
        layout = self.engine.layout
        if not layout.powers:
            return np.ones((len(moduli), 1))
        powers = [inverse]
        while len(powers) < max(layout.powers):
            powers.append(moduli.multiply(powers[-1], inverse))
        terms = zip(layout.powers, layout.places, strict=True)
        weights = np.stack([powers[power - 1][:, place] for power, place in terms], axis=1)
        values = moduli.reduce((moduli.multiply(residues, weights[:, None, :])).sum(axis=2))
        values[:, 0] += 1.0
        return values
