"""The short cuts cut by primes: chunks are batches of consecutive primes, their results residues.

How many primes an answer takes shows only while it is put together, so there are always more chunks; how they are cut
follows from the case alone all the same. The primes that the short cut foresees come first, stage by stage in even
portions; what it wants beyond comes in blocks that grow with what there is. The stream of residues that the short cut
reads is that of all good primes in their order, so that its answer cannot depend on portions, on who computed them, nor
on how far ahead others were computed meanwhile.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache
from itertools import tee

from ratomega.case.case import Case
from ratomega.errors import WorkerError
from ratomega.exact.batches import Batch, ResidueTask, Supplier, Supply, computed
from ratomega.exact.residues import PrimeSource
from ratomega.regulator.routes import residue_task
from ratomega.workers.chunks import STAMP
from ratomega.workers.crew import Crew
from ratomega.workers.texts import batch_data, batch_from, canonical_text, case_from, read_list, written

__all__ = ["PrimeChunk", "cut_primes", "prime_supplier"]

# Seconds; a batch should be long enough to be worth what every batch costs.
TARGET = 0.5
# A block beyond what was foreseen is this part of all primes before it.
BEYOND = 8
FEWEST = 4


@dataclass(frozen=True, slots=True)
class PrimeChunk:
    """The residues of a task of a case, given by its canonical text, modulo ``primes``.

    ``task`` and ``charge`` name the task (``residue_task``); ``shape`` is that of its residues for one prime.
    """

    case: str
    task: str
    charge: int
    shape: tuple[int, ...]
    primes: tuple[int, ...]
    cost: float
    stamp: str = STAMP

    def key(self) -> str:
        return written([self.task, self.charge, self.primes])

    def run(self) -> str:
        return written(batch_data(computed(_task(self.case, self.task, self.charge), self.primes)))

    def read(self, text: str) -> Batch:
        """The batch from the text that ``run`` gave. Raises ``WorkerError`` when it is none."""
        try:
            return batch_from(read_list(text), self.primes, self.shape)
        except ValueError as error:
            raise WorkerError(f"the result of {self} cannot be read: {error}") from error

    def __str__(self) -> str:
        span = f"{self.primes[0]} to {self.primes[-1]}"
        return f"the chunk ({self.task}, charge {self.charge}, {len(self.primes)} primes from {span})"


@lru_cache(maxsize=2)
def _task(case: str, name: str, charge: int) -> ResidueTask:
    """A worker plans a task once: what it does for a batch changes nothing of that."""
    return residue_task(name, case_from(case), charge)


def portion(task: ResidueTask) -> int:
    """How many primes a chunk has at most: at least so many that half of the time goes to primes.

    The memory may take fewer.
    """
    return min(task.largest, max(2 * task.overhead, int(TARGET / task.seconds)))


def _sizes(stages: tuple[int, ...], most: int) -> Iterator[int]:
    """How many primes chunk after chunk has.

    >>> from itertools import islice
    >>> list(islice(_sizes((7, 4), 3), 8))
    [2, 2, 3, 2, 2, 3, 3, 3]
    """
    total = 0
    for stage in stages:
        pieces = -(-stage // most)
        for n in range(pieces):
            yield stage * (n + 1) // pieces - stage * n // pieces
        total += stage
    while True:
        size = min(most, max(FEWEST, total // BEYOND))
        total += size
        yield size


def cut_primes(case: str, task: ResidueTask, stages: tuple[int, ...]) -> tuple[Iterator[PrimeChunk], int]:
    """Chunks without end, and how many of them hold the primes that are foreseen."""
    most = portion(task)
    foreseen = sum(-(-stage // most) for stage in stages)
    return _chunks(case, task, stages, most), foreseen


def _chunks(case: str, task: ResidueTask, stages: tuple[int, ...], most: int) -> Iterator[PrimeChunk]:
    source = PrimeSource(task.bits, task.radicand)
    for size in _sizes(stages, most):
        cost = task.seconds * (size + task.overhead)
        yield PrimeChunk(case, task.name, task.charge, task.shape, source.take(size), cost)


def prime_supplier(case: Case, crew: Crew) -> Supplier:
    """What lets a short cut of this case have its residues computed by a crew."""
    text = canonical_text(case)

    def supplier(task: ResidueTask, stages: tuple[int, ...]) -> Supply:
        chunks, foreseen = cut_primes(text, task, stages)
        ours, theirs = tee(chunks)
        # Ours first: a chunk is drawn before its result is waited for.
        results = zip(ours, crew.stream(theirs, foreseen), strict=True)

        def further(_: int) -> Batch:
            chunk, found = next(results)
            return chunk.read(found)

        return further

    return supplier
