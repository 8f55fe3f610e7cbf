"""The coefficients of a setting modulo primes, as a task: which method, primes of which size, how many at once."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from ratomega.diagrams.tuples import count_all
from ratomega.exact.residues import Floats, Moduli
from ratomega.regulator.fast.generic import two_colours
from ratomega.regulator.fast.layout import Layout
from ratomega.regulator.fast.limit import two_colours_limit
from ratomega.regulator.fast.setup import FastSetup
from ratomega.regulator.fast.tables import Forest
from ratomega.regulator.fast.three import three_colours, three_colours_limit

__all__ = ["FAST", "FastTask"]

FAST = "fast"

# Single products leave room below 2^53; sums of products and unreduced power sums want smaller primes.
PRODUCT_BITS = 26
MATRIX_BITS = 25
LIMIT_BITS = 23
# More primes at once gain nothing but memory. Three colours keep matrices over pairs of diagrams.
LARGEST_BATCH = 96
MATRIX_ENTRIES = 2**22
# Measured on one core with two and three colours; good to a factor of three, which is all that planning needs.
PER_CONFIGURATION = 8e-8
PER_PAIR = 2e-8
OVERHEAD = 10


@dataclass(frozen=True, slots=True, eq=False)
class FastTask:
    """Z_0 ... Z_charge of the integer parameters of a setup, modulo primes. See ``ResidueTask``.

    ``singular``: single weights diverge, so that the limit is taken.
    """

    charge: int
    bits: int
    largest: int
    seconds: float
    singular: bool
    compute: Callable[[Moduli], Floats]
    radicand: int
    name: str = FAST
    overhead: int = OVERHEAD

    @classmethod
    def make(cls, setup: FastSetup, charge: int) -> FastTask:
        """The tables that all primes share are made here. Cost: about that of a few primes."""
        threshold = setup.singular_from()
        singular = threshold is not None and threshold <= charge
        if singular:
            return cls._limit(setup, charge)
        forest = Forest.make(charge)
        count = count_all([setup.rank], charge)
        if setup.rank == 2:
            method = _on_forest(two_colours, setup, forest)
            return cls(charge, PRODUCT_BITS, LARGEST_BATCH, PER_PAIR * count, False, method, setup.radicand)
        batch = _fitting(len(forest) ** 2)
        method = _on_forest(three_colours, setup, forest)
        return cls(charge, MATRIX_BITS, batch, PER_CONFIGURATION * count, False, method, setup.radicand)

    @classmethod
    def _limit(cls, setup: FastSetup, charge: int) -> FastTask:
        layout = Layout.make(setup, charge)
        seconds = PER_CONFIGURATION * count_all([setup.rank], charge)
        if setup.rank == 2:
            method = _on_layout(two_colours_limit, setup, layout)
            return cls(charge, LIMIT_BITS, LARGEST_BATCH, seconds, True, method, setup.radicand)
        batch = _fitting(layout.depth * count_all([2], charge))
        method = _on_layout(three_colours_limit, setup, layout)
        return cls(charge, LIMIT_BITS, batch, seconds, True, method, setup.radicand)

    @property
    def shape(self) -> tuple[int, ...]:
        return (self.charge + 1, 2) if self.radicand else (self.charge + 1,)

    def residues(self, primes: Sequence[int]) -> Floats:
        if self.radicand:
            return self._parts(primes)
        return np.ascontiguousarray(self.compute(Moduli.make(primes, last=True)).T)

    def _parts(self, primes: Sequence[int]) -> Floats:
        """x and y of the coefficients x + y sqrt(d), from their values with either square root of d."""
        split = Moduli.split(primes, self.radicand, last=True)
        values = self.compute(split)
        plus, minus = values[:, 0::2], values[:, 1::2]
        moduli = Moduli.make(primes, last=True)
        root = np.array(split.roots[0::2], dtype=np.float64)
        halves = moduli.inverses(np.stack([np.full(len(primes), 2.0), moduli.reduce(2 * root)]))
        x = moduli.multiply(moduli.reduce(plus + minus), halves[0])
        y = moduli.multiply(moduli.reduce(plus - minus), halves[1])
        return np.ascontiguousarray(np.stack([x, y]).transpose(2, 1, 0))


def _fitting(entries: int) -> int:
    """How many primes at once where each takes so many matrix entries."""
    return max(4, min(LARGEST_BATCH, MATRIX_ENTRIES // entries))


def _on_forest(
    method: Callable[[FastSetup, Forest, Moduli], Floats], setup: FastSetup, forest: Forest
) -> Callable[[Moduli], Floats]:
    return lambda moduli: method(setup, forest, moduli)


def _on_layout(
    method: Callable[[FastSetup, Layout, Moduli], Floats], setup: FastSetup, layout: Layout
) -> Callable[[Moduli], Floats]:
    return lambda moduli: method(setup, layout, moduli)
