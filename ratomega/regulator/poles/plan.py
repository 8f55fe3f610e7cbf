"""Which powers of t the pole recursion needs, planned exactly in integers before any arithmetic.

V_c,j(t) is W_j at x = m eps1 - n eps2 for the pair c = (m, n). Two facts fix its window:

lower end. W_j is finite at the limit point for generic x, and its poles in x are simple, at +-(m' eps1 + n' eps2) with
    m' n' <= j. So W_j times the product of all (m' eps1 + n' eps2)^2 - x^2 is a polynomial in x whose coefficients are
    regular in t, and V_c,j is no more singular than that product is small: its valuation is at least minus the number
    of factors that vanish at t = 0. Terms of the recursion reach below that and cancel there. They are not computed;
    that those which are computed do cancel is checked at every prime.
upper end. Planned backwards from the answer, the coefficient of t^0: if row r needs t^e at order j, then column c must
    be known at order j - m n up to t^(e - v), v the valuation of the kernel between them including R_c.

A row and a column are the same pair in its two roles. With a mirror symmetry only pairs with m >= n are kept.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ratomega.regulator.poles.lattice import Integers, PolePath, pairs_up_to
from ratomega.regulator.poles.residues import ResidueLattice

__all__ = ["NOT_NEEDED", "Windows"]

NOT_NEEDED = -(10**6)


@dataclass(frozen=True, slots=True, eq=False)
class Windows:
    """Rows in increasing weight m n, and for each row and order the first and last power of t.

    ``low[r, j]`` and ``need[r, j]`` (NOT_NEEDED outside m n + j <= charge); ``valuation[c]`` is that of R_c,
    ``hits[r, c]`` counts the linear factors of (m' eps1 + n' eps2)^2 - x_r^2 that vanish at t = 0.
    """

    charge: int
    path: PolePath
    pairs: tuple[tuple[int, int], ...]
    weight: Integers
    valuation: Integers
    hits: Integers
    low: Integers
    need: Integers

    @classmethod
    def make(cls, lattice: ResidueLattice) -> Windows:
        """Cost: about charge^3 log^2 charge integer operations in numpy."""
        path, charge, pairs = lattice.path, lattice.charge, lattice.pairs
        every = pairs_up_to(charge)
        weight = np.array([m * n for m, n in pairs], dtype=np.int64)
        valuation = lattice.valuation
        near = np.array([path.form(m, -n)[0] for m, n in pairs], dtype=np.int64)
        low = _lower_ends(path, every, near, charge)
        far = np.array([path.form(m, n)[0] for m, n in pairs], dtype=np.int64)
        hits = _hits(near, far)
        need = _upper_ends(weight, valuation, hits, charge)
        return cls(charge, path, pairs, weight, valuation, hits, low, need)

    def rows(self, order: int) -> int:
        """How many rows exist at this order: those with m n + order <= charge."""
        return int(np.searchsorted(self.weight, self.charge - order, side="right"))

    @property
    def span(self) -> tuple[int, int]:
        """The lowest and the highest power that occur in any window."""
        wanted = self.need > NOT_NEEDED
        if not wanted.any():
            return 0, 0
        return int(self.low[wanted].min()), int(self.need[wanted].max())


def _hits(near: Integers, far: Integers) -> Integers:
    ahead: Integers = (far[None, :] == near[:, None]).astype(np.int64)
    behind: Integers = (far[None, :] == -near[:, None]).astype(np.int64)
    return ahead + behind


def _lower_ends(path: PolePath, every: tuple[tuple[int, int], ...], near: Integers, charge: int) -> Integers:
    # All pairs count here, also those whose R vanishes or that the mirror leaves out: W is regular for generic x only
    # up to the poles that can occur, and a bound that is too low costs nothing but time.
    far = np.array([path.form(m, n)[0] for m, n in every], dtype=np.int64)
    weight = np.array([m * n for m, n in every], dtype=np.int64)
    counted = np.cumsum(_hits(near, far), axis=1)
    low = np.zeros((len(near), charge + 1), dtype=np.int64)
    for order in range(1, charge + 1):
        low[:, order] = -counted[:, np.searchsorted(weight, order, side="right") - 1]
    return low


def _upper_ends(weight: Integers, valuation: Integers, hits: Integers, charge: int) -> Integers:
    need = np.full((len(weight), charge + 1), NOT_NEEDED, dtype=np.int64)
    for order in range(charge, -1, -1):
        columns = int(np.searchsorted(weight, charge - order, side="right"))
        # The answer itself, at order + m n: its kernel is regular because x is at no pole.
        need[:columns, order] = -valuation[:columns]
        if columns == 0:
            continue
        users = order + weight[:columns]
        rows = int(np.searchsorted(weight, charge - int(users[0]), side="right"))
        if rows:
            asked = need[:rows, users] + hits[:rows, :columns] - valuation[:columns]
            wanted = need[:rows, users] > NOT_NEEDED
            best = np.where(wanted, asked, NOT_NEEDED).max(axis=0)
            need[:columns, order] = np.maximum(need[:columns, order], best)
    return need
