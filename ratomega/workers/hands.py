"""Hands: what does the chunks of a crew. Here the simplest, this process itself, and an executor lent by the caller.

Hands take chunks as long as they have ``room`` and give a future for each. ``settled`` tells them that a future brought
a result; ``lost`` that it brought an exception: either the chunk is to be given out again, and they say whether it is
suspected of what happened, or they raise what the crew is to end with.
"""

from __future__ import annotations

from collections.abc import Callable
from concurrent.futures import Executor, Future
from enum import Enum
from typing import Protocol

from ratomega.errors import RatomegaError, WorkerError
from ratomega.workers.chunks import Chunk, run_chunk

__all__ = ["Fate", "Hands", "LentExecutor", "ThisProcess"]

# How many chunks are given to a foreign executor at a time when nothing is known about its size: enough for a
# hundred workers, few enough to be cancelled at once.
LENT_AT_A_TIME = 256


class Fate(Enum):
    """Why a chunk that did not come back is to be given out again."""

    BYSTANDER = "its worker died before its turn"
    SUSPECT = "its worker died over it"


class Hands(Protocol):
    """See the module's docstring. ``advice`` goes with the complaint that workers die."""

    @property
    def advice(self) -> str: ...

    def room(self) -> bool: ...

    def submit(self, chunk: Chunk) -> Future[str] | None:
        """None when nothing could be taken just now; then other chunks are still under way."""
        ...

    def settled(self, future: Future[str]) -> None: ...

    def lost(self, future: Future[str], error: Exception) -> Fate: ...

    def close(self) -> None:
        """The end; what is under way is given up. May be called more than once."""
        ...


class ThisProcess:
    """Chunks one after the other, here. ``submit`` returns when the chunk is done; what it raises is raised."""

    advice = ""

    def room(self) -> bool:
        return True

    def submit(self, chunk: Chunk) -> Future[str]:
        future: Future[str] = Future()
        future.set_result(run_chunk(chunk))
        return future

    def settled(self, future: Future[str]) -> None:
        pass

    def lost(self, future: Future[str], error: Exception) -> Fate:
        raise error

    def close(self) -> None:
        pass


class LentExecutor:
    """An executor that belongs to the caller. It is never shut down here, and what goes wrong with it is not mended:
    that is the business of whoever set it up.

    ``size``: how many workers it has at the moment, if that is known.
    """

    def __init__(self, executor: Executor, size: Callable[[], int] | None = None) -> None:
        self._executor = executor
        self._size = size
        self._under_way: set[Future[str]] = set()

    advice = "the executor is the caller's"

    def room(self) -> bool:
        # Two for each worker: one to do, and one that waits there already when the first is done.
        most = LENT_AT_A_TIME if self._size is None else 2 * max(1, self._size())
        return len(self._under_way) < most

    def submit(self, chunk: Chunk) -> Future[str]:
        try:
            future = self._executor.submit(run_chunk, chunk)
        except Exception as error:
            raise _failure(error) from error
        self._under_way.add(future)
        return future

    def settled(self, future: Future[str]) -> None:
        self._under_way.discard(future)

    def lost(self, future: Future[str], error: Exception) -> Fate:
        self._under_way.discard(future)
        raise _failure(error) from error

    def close(self) -> None:
        for future in self._under_way:
            future.cancel()
        self._under_way.clear()


def _failure(error: Exception) -> RatomegaError:
    if isinstance(error, RatomegaError):
        return error
    text = str(error).strip().split("\n")[0][:200]
    return WorkerError(f"the executor failed with {type(error).__name__}{f': {text}' if text else ''}")
