"""The kernel tables of the pole recursion: power series of 2 R_c t^-v / ((m' eps1 + n' eps2)^2 - x^2) modulo primes.

With f = (m' eps1 + n' eps2)^2 - x^2 = c0 + c1 t + c2 t^2 the coefficients y_d of R/f obey c0 y_d = R_d - c1 y_{d-1} -
c2 y_{d-2}. Where c0 vanishes (a collision of poles) the series starts one power earlier and c1, c2 take the places of
c0, c1; where c1 vanishes too, two powers earlier.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from ratomega.exact.residues import Floats, Moduli
from ratomega.regulator.poles.lattice import Form, Integers
from ratomega.regulator.poles.scratch import Scratch

__all__ = ["Kernel"]

# Rows are given up when they are fewer than this share of those that are carried.
SHRINK = 0.8


@dataclass(frozen=True, slots=True, eq=False)
class Kernel:
    """The exact part: f for every column and row, as integers.

    ``lead`` holds the distinct first non-zero coefficients and ``where`` the place of each entry among them; the
    entries with a vanishing c0 are listed by ``columns`` and ``rows``.
    """

    lead: Integers
    where: Integers
    minus_c1: Integers
    minus_c2: Integers
    columns: Integers
    rows: Integers
    order: Integers
    tilt: Integers

    @classmethod
    def make(cls, far: Sequence[Form], near: Sequence[Form]) -> Kernel:
        """``far`` belongs to the columns and ``near`` to the rows, as (constant, slope)."""
        ahead = np.array(far, dtype=np.int64).reshape(-1, 1, 2)
        behind = np.array(near, dtype=np.int64).reshape(1, -1, 2)
        c0 = ahead[..., 0] ** 2 - behind[..., 0] ** 2
        c1 = 2 * (ahead[..., 0] * ahead[..., 1] - behind[..., 0] * behind[..., 1])
        c2 = ahead[..., 1] ** 2 - behind[..., 1] ** 2
        columns, rows = np.nonzero(c0 == 0)
        first = np.where(c0 != 0, c0, np.where(c1 != 0, c1, c2))
        lead, where = np.unique(first, return_inverse=True)
        b1, b2 = c1[columns, rows], c2[columns, rows]
        return cls(
            lead, where.reshape(c0.shape), -c1, -c2, columns, rows, np.where(b1 != 0, 1, 2), np.where(b1 != 0, -b2, 0)
        )

    def powers(
        self, moduli: Moduli, strength: Floats, lowest: int, rows_by_power: Integers, scratch: Scratch
    ) -> Iterator[Floats]:
        """Yield the coefficients of t^lowest, t^(lowest+1), ...: arrays (primes, columns, rows).

        Rows that no later power needs are given up now and then; at least ``rows_by_power`` of them, which does not
        increase, are yielded. ``strength`` has shape (primes, places, columns), with at least two places more than
        powers are asked for. A yielded array is overwritten two steps later. Raises ``BadPrimes``.
        Cost: some ten passes over each array.
        """
        shape = (len(moduli), *self.where.shape)
        inverse = np.take(moduli.inverses(moduli.integers(self.lead)), self.where, axis=1, out=scratch(0, shape))
        edge = inverse[:, self.columns, self.rows]
        inverse[:, self.columns, self.rows] = 0.0
        one, two, before, previous, current, work = (scratch(i, shape) for i in range(1, 7))
        for numbers, ratio in ((self.minus_c1, one), (self.minus_c2, two)):
            ratio[...] = numbers
            moduli.reduce(ratio, out=ratio, work=work)
            np.multiply(ratio, inverse, out=ratio)
            moduli.reduce(ratio, out=ratio, work=work)
        tilt = moduli.multiply(moduli.integers(self.tilt), edge)
        last = np.zeros_like(edge)
        seen = np.arange(len(self.rows))
        for index, rows in enumerate(rows_by_power):
            power = lowest + index
            if rows < SHRINK * current.shape[2]:
                arrays = (inverse, one, two, before, previous, current, work)
                inverse, one, two, before, previous, current, work = (_narrowed(x, rows) for x in arrays)
                seen = np.nonzero(self.rows < rows)[0]
            if power >= 0:
                np.multiply(strength[:, power, :, None], inverse, out=current)
                if power >= 1:
                    current += np.multiply(one, previous, out=work)
                if power >= 2:
                    current += np.multiply(two, before, out=work)
                moduli.reduce(current, out=current, work=work)
            else:
                current[...] = 0.0
            if len(seen):
                place = power + self.order
                source = np.where(place >= 0, strength[:, np.maximum(place, 0), self.columns], 0.0)
                last = moduli.reduce(source * edge + tilt * last)
                current[:, self.columns[seen], self.rows[seen]] = last[:, seen]
            yield current
            before, previous, current = previous, current, before


def _narrowed(array: Floats, rows: int) -> Floats:
    """The first rows of an array (primes, columns, rows), moved together within its own memory."""
    narrow = array.reshape(-1)[: array.shape[0] * array.shape[1] * rows].reshape(*array.shape[:2], rows)
    narrow[...] = array[:, :, :rows]
    return narrow
