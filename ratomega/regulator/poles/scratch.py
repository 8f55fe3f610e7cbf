"""Memory that is used again: large arrays cost more to ask for than to fill."""

from __future__ import annotations

from math import prod

import numpy as np

from ratomega.exact.residues import Floats

__all__ = ["Scratch"]


class Scratch:
    """Arrays by number. The contents do not survive the next request for the same number.

    >>> scratch = Scratch()
    >>> scratch(0, (2, 3)).shape, scratch(0, (2, 2)).shape
    ((2, 3), (2, 2))
    """

    def __init__(self) -> None:
        self._flat: dict[int, Floats] = {}
        self._parts: dict[int, Scratch] = {}

    def part(self, number: int) -> Scratch:
        """Scratch memory of its own for a routine that runs meanwhile."""
        return self._parts.setdefault(number, Scratch())

    def __call__(self, number: int, shape: tuple[int, ...]) -> Floats:
        size = prod(shape)
        flat = self._flat.get(number)
        if flat is None or flat.size < size:
            flat = self._flat[number] = np.empty(size)
        return flat[:size].reshape(shape)
