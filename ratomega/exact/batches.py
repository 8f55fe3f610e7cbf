"""Residues modulo the good primes of a task, in order, whoever computes them and in whatever batches.

A *task* (``ResidueTask``) says which numbers are wanted modulo primes, and computes them for primes that it is given.
The primes are those of ``PrimeSource``, in its order, less those that are bad for the task. A *supply* gives batches of
them in that order: computed here as they are asked for (``here``), or brought from elsewhere. How they are batched is
the supply's business and cannot be seen in what a ``ResidueStream`` gives: the residues modulo the first so many good
primes.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Protocol

import numpy as np

from ratomega.errors import RatomegaError
from ratomega.exact.residues import BadPrimes, Floats, PrimeSource

__all__ = ["Batch", "ResidueStream", "ResidueTask", "Supplier", "Supply", "computed", "here"]

# Of some thousand factors about one in 2^22 vanishes modulo a prime by chance.
MOST_BAD_PRIMES = 100


class ResidueTask(Protocol):
    """Numbers that are wanted modulo primes of ``bits`` bits, ``shape`` of them for every prime.

    ``name`` and ``charge`` tell the tasks of one case apart. ``largest`` is how many primes the memory takes at once.
    About ``seconds`` are spent on each prime, and on each batch as much as on ``overhead`` primes more.
    """

    @property
    def name(self) -> str: ...

    @property
    def charge(self) -> int: ...

    @property
    def bits(self) -> int: ...

    @property
    def radicand(self) -> int:
        """d where the numbers lie in Q(sqrt(d)), 0 where they are rational: the primes are to split."""
        ...

    @property
    def shape(self) -> tuple[int, ...]: ...

    @property
    def largest(self) -> int: ...

    @property
    def seconds(self) -> float: ...

    @property
    def overhead(self) -> int: ...

    def residues(self, primes: Sequence[int]) -> Floats:
        """Shape (primes, *shape). Raises ``BadPrimes``; which primes are bad does not depend on their company."""
        ...


@dataclass(frozen=True, slots=True, eq=False)
class Batch:
    """Residues modulo ``primes``; ``bad`` are the primes of the batch that had to be left out."""

    primes: tuple[int, ...]
    bad: tuple[int, ...]
    values: Floats


Supply = Callable[[int], Batch]
"""One more batch. The number says how many more good primes are wanted now; the batch may have fewer or more."""

Supplier = Callable[[ResidueTask, tuple[int, ...]], Supply]
"""A supply for a task. The numbers say how many primes will be wanted, stage by stage: an estimate, for planning."""


def computed(task: ResidueTask, primes: Sequence[int]) -> Batch:
    """The batch of these primes, computed here; bad ones are found out and left out."""
    good, bad = list(primes), list[int]()
    while good:
        try:
            values = task.residues(good)
        except BadPrimes as found:
            bad += found.primes
            good = [p for p in good if p not in found.primes]
        else:
            return Batch(tuple(good), tuple(p for p in primes if p in bad), values)
    return Batch((), tuple(primes), np.zeros((0, *task.shape)))


def here(task: ResidueTask, stages: tuple[int, ...] = ()) -> Supply:
    """A supply that computes just what is asked for, in batches as large as the memory takes."""
    source = PrimeSource(task.bits, task.radicand)

    def further(count: int) -> Batch:
        pieces = -(-count // task.largest)
        return computed(task, source.take(-(-count // pieces)))

    return further


class ResidueStream:
    """The residues modulo the first good primes, as many as are asked for; what came before is kept."""

    def __init__(self, supply: Supply) -> None:
        self._supply = supply
        self._primes: tuple[int, ...] = ()
        self._bad = 0
        self._values: list[Floats] = []

    def first(self, count: int) -> tuple[tuple[int, ...], Floats]:
        """The first ``count`` good primes, and the residues: shape (count, *shape of the task).

        Raises ``RatomegaError`` when nearly all primes are bad, which means that a denominator is zero.
        """
        if count < 1:
            raise ValueError(f"at least one prime, not {count}")
        while len(self._primes) < count:
            batch = self._supply(count - len(self._primes))
            self._primes += batch.primes
            self._bad += len(batch.bad)
            self._values.append(batch.values)
            if self._bad > count + MOST_BAD_PRIMES:
                raise RatomegaError("a denominator vanishes modulo every prime, so it is zero")
        if len(self._values) > 1:
            self._values = [np.concatenate(self._values)]
        return self._primes[:count], self._values[0][:count]
