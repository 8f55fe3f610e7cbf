"""What a chunk is: a small frozen description of a few tenths of a second of work, whose exact result is a text.

Every kind of work can be cut this way: a range of configurations (``charges``), a range of primes, an evaluation point.
A kind is a frozen dataclass of plain values (text, integers, tuples of them: they pickle anywhere) with the members of
``Chunk``. What it computes is a function of the description alone, so that it does not matter where, in which order or
how often a chunk is run. How work is cut must not depend on the number of workers either: then the chunks that one run
kept serve another with more workers or fewer.
"""

from __future__ import annotations

from typing import Protocol

from ratomega.errors import WorkerError
from ratomega.version import VERSION

__all__ = ["SCHEME", "STAMP", "Chunk", "run_chunk"]

SCHEME = 1
"""Raise it whenever chunks are cut otherwise or their results are written otherwise."""

STAMP = f"ratomega {VERSION}, scheme {SCHEME}"


class Chunk(Protocol):
    """One piece of work. ``stamp`` is the ``STAMP`` of the program that cut it, ``cost`` an estimate in seconds."""

    @property
    def stamp(self) -> str: ...

    @property
    def cost(self) -> float: ...

    def key(self) -> str:
        """What the result depends on beyond the case, as canonical text: its name in a store."""
        ...

    def run(self) -> str:
        """Do the work. The text must read back exactly, and be the same wherever and whenever it is computed."""
        ...


def run_chunk(chunk: Chunk) -> str:
    """Do a chunk, on whatever machine this runs.

    Raises ``WorkerError`` where another version of the program is installed than the one that cut the chunk.
    """
    if chunk.stamp != STAMP:
        raise WorkerError(f"a worker has {STAMP}, and was given a chunk of {chunk.stamp}; install the same everywhere")
    return chunk.run()
