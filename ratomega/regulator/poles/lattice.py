"""The integer lattice behind the pole recursion: pairs (m, n), the path, and the linear forms of the residues R_mn.

On the path eps1 = alpha + d1 t, eps2 = beta + d2 t every form i eps1 + j eps2 is an integer plus an integer times t.
At ratio 1 and -1 the path is chosen so that exchanging eps1 and eps2 is t -> -t (up to an overall sign, to which
nothing here is sensitive): then everything at (n, m) is the mirror image of what it is at (m, n).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from ratomega.exact.rational import Rational
from ratomega.regulator.poles.problem import PoleMatter

__all__ = ["Form", "Integers", "PolePath", "denominator_points", "even_at", "numerator_points", "pairs_up_to"]

Form = tuple[int, int]
Integers = NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class PolePath:
    """eps1 = steps[0] + direction[0] t, eps2 = steps[1] + direction[1] t.

    >>> PolePath.towards((1, 1)).form(1, 1), PolePath.towards((3, -2)).form(2, 3)
    ((2, 0), (0, 3))
    """

    steps: tuple[int, int]
    direction: tuple[int, int]
    mirror: bool

    @classmethod
    def towards(cls, steps: tuple[int, int]) -> PolePath:
        if steps == (1, 1):
            return cls(steps, (-1, 1), True)
        if steps == (1, -1):
            return cls(steps, (1, 1), True)
        return cls(steps, (0, 1), False)

    def form(self, i: int, j: int) -> Form:
        """i eps1 + j eps2 as (constant, slope)."""
        return i * self.steps[0] + j * self.steps[1], i * self.direction[0] + j * self.direction[1]


def pairs_up_to(charge: int) -> tuple[tuple[int, int], ...]:
    """All (m, n) with m, n >= 1 and m n <= charge, by increasing m n.

    >>> pairs_up_to(3)
    ((1, 1), (1, 2), (2, 1), (1, 3), (3, 1))
    """
    pairs = [(m, n) for m in range(1, charge + 1) for n in range(1, charge // m + 1)]
    return tuple(sorted(pairs, key=lambda pair: (pair[0] * pair[1], pair)))


def denominator_points(m: int, n: int) -> Iterator[tuple[int, int]]:
    """The (i, j) of the denominator of R_mn: 1-m <= i <= m, 1-n <= j <= n without (0, 0) and (m, n)."""
    for i in range(1 - m, m + 1):
        for j in range(1 - n, n + 1):
            if (i, j) not in ((0, 0), (m, n)):
                yield i, j


def numerator_points(m: int, n: int, *, adjoint: bool) -> Iterator[tuple[int, int]]:
    """One half of the (p, r) of the numerator of R_mn under reflection, the centre (0, 0) left out.

    p = 1-m, 3-m, ..., m-1 and r likewise; for an adjoint 1-2m, 3-2m, ..., 2m-1.
    """
    width, height = (2 * m, 2 * n) if adjoint else (m, n)
    for r in range(1 - height, height, 2):
        for p in range(1 - width, width, 2):
            if r > 0 or (r == 0 and p > 0):
                yield p, r


def even_at(matter: PoleMatter, form: Form) -> tuple[Rational, ...]:
    """P(y) P(-y) at y = (c + s t)/2 as an exact polynomial in t, trailing zeros included.

    >>> even_at(PoleMatter.of_flavours([Rational(1)]), (1, 2))
    (3/4, -1, -1)
    """
    square = (Rational(form[0] ** 2, 4), Rational(form[0] * form[1], 2), Rational(form[1] ** 2, 4))
    result = [Rational(0)] * (2 * len(matter.even) - 1)
    power = [Rational(1)]
    for index, coefficient in enumerate(matter.even):
        for place, value in enumerate(power):
            result[place] += coefficient * value
        if index + 1 < len(matter.even):
            longer = [Rational(0)] * (len(power) + 2)
            for i, left in enumerate(power):
                for j, right in enumerate(square):
                    longer[i + j] += left * right
            power = longer
    return tuple(result)
