"""From V to the partial fractions of W, modulo primes.

The coefficient of t^0 of sum_c 2 R_c V_c / (x_c^2 - x^2) with x_c^2 = S^2 + f, f = O(t), is expanded in f:

    1/(S^2 + f - x^2) = sum_i (-f)^i / (S^2 - x^2)^(i+1),

so the coefficient of 1/(S^2 - x^2)^(i+1) is the sum of [2 R_c (-f_c)^i V_c] at t^0 over the pairs that meet at S^2.
Sums at a lower power of t vanish, and so do those at a higher order of the pole than pairs can make; both is checked
(the first for i = 0).
"""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

from ratomega.exact.residues import Floats, Moduli
from ratomega.regulator.poles.fractions import ConsistencyError, PoleLayout
from ratomega.regulator.poles.lattice import Integers
from ratomega.regulator.poles.plan import Windows
from ratomega.regulator.poles.schedule import Group

__all__ = ["PrincipalParts"]


class PrincipalParts:
    """The exact part: which column meets which pole, and with which f."""

    def __init__(self, windows: Windows, layout: PoleLayout) -> None:
        path = windows.path
        forms = np.array([path.form(m, n) for m, n in windows.pairs], dtype=np.int64).reshape(-1, 2)
        self.windows, self.layout = windows, layout
        self.place: Integers = np.searchsorted(np.array(layout.squares), forms[:, 0] ** 2)
        self.minus_f: tuple[Integers, Integers] = (-2 * forms[:, 0] * forms[:, 1], -(forms[:, 1] ** 2))
        self.count = np.array([1.0 + (path.mirror and m != n) for m, n in windows.pairs])
        # With a mirror symmetry odd powers cancel between (m, n) and (n, m) of themselves.
        self.lower = -2 if path.mirror else -1
        bottom = windows.valuation + windows.low[np.arange(len(forms)), windows.charge - windows.weight]
        self.depth = np.maximum(1 - bottom, 0)

    def residues(self, moduli: Moduli, strength: Floats, parts: Iterable[tuple[Group, Floats]]) -> Floats:
        """The coefficients of all terms of the layout in W_0 ... W_charge: shape (primes, charge + 1, terms).

        ``parts`` are the groups with their copies of V (primes, orders, powers, columns). Raises ``ConsistencyError``.
        """
        charge, layout = self.windows.charge, self.layout
        powers = max(int(self.depth.max(initial=0)), max(layout.powers, default=0))
        total = np.zeros((len(moduli), charge + 1, len(layout.squares), powers))
        below = np.zeros((len(moduli), charge + 1, len(layout.squares), 1))
        for group, copies in parts:
            self._add(total, moduli, strength[:, :, group.columns], group, copies, 0)
            self._add(below, moduli, strength[:, :, group.columns], group, copies, self.lower)
        if moduli.reduce(below).any():
            raise ConsistencyError(f"the coefficient of t^{self.lower} of W does not vanish")
        moduli.reduce(total, out=total)
        places, orders = np.array(layout.places, dtype=np.int64), np.array(layout.powers, dtype=np.int64) - 1
        result = total[:, :, places, orders]
        unborn = np.arange(charge + 1)[:, None] < np.array(layout.born, dtype=np.int64)
        total[:, :, places, orders] = np.where(unborn, result, 0.0)
        if total.any():
            raise ConsistencyError("W has a pole in a1 - a2 of a higher order than pairs can make")
        return result

    def _add(
        self, total: Floats, moduli: Moduli, strength: Floats, group: Group, copies: Floats, power: int
    ) -> None:
        """Add the sums at t^power of one group: ``total`` has shape (primes, orders, squares, powers of the pole)."""
        depth = min(int(self.depth[group.columns].max(initial=0)), total.shape[3])
        if depth == 0:
            return
        # V starts at group.start; it meets the coefficient power - e of 2 R_c (-f)^i.
        reach = np.arange(group.start, 1)
        place = power - reach
        good = (place >= 0) & (place < strength.shape[1])
        weights = np.zeros((len(moduli), len(group.columns), len(reach), depth))
        one, two = (moduli.integers(f[group.columns])[:, None] for f in self.minus_f)
        series = moduli.reduce(strength * self.count[group.columns])
        for index in range(depth):
            weights[:, :, good, index] = series[:, place[good]].transpose(0, 2, 1)
            later = np.zeros_like(series)
            later[:, 1:] = one * series[:, :-1]
            later[:, 2:] += two * series[:, :-2]
            series = moduli.reduce(later)
        values = np.ascontiguousarray(copies[:, :, : len(reach)].transpose(0, 3, 1, 2))
        sums = moduli.reduce(np.matmul(values, weights))
        for index, column in enumerate(group.columns):
            total[:, :, self.place[column], :depth] += sums[:, index]
