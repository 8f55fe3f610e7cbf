"""A crew: hands out chunks, collects the results in order, keeps them in a store, and knows how long it will take.

Results are given in the order of the chunks whatever the order in which they arrive, so that nothing after this can
depend on it. Chunks may come from an iterator that never ends, for work whose end shows in its results: then a few more
are given out than were asked for, and what they bring is not used, though kept.
"""

from __future__ import annotations

import time
from collections import Counter, deque
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import FIRST_COMPLETED, Future, wait
from dataclasses import dataclass
from typing import Self

from ratomega.errors import WorkerError
from ratomega.workers.chunks import Chunk
from ratomega.workers.hands import Fate, Hands
from ratomega.workers.store import Store

__all__ = ["Crew", "Progress"]

MOST_DEATHS = 3
"""So many workers may die over one chunk; then the chunk is taken to be what kills them."""

AHEAD = 2
"""So many chunks more than were asked for are given out once those that were foreseen are used up."""


@dataclass(frozen=True, slots=True)
class Progress:
    """``done`` of ``total`` chunks; ``seconds_left`` is an estimate, None until there is something to go by."""

    done: int
    total: int
    seconds_left: float | None


class Crew:
    """Use it in a ``with``: leaving it stops what is still under way and closes hands and store.

    ``watch`` is called whenever chunks have arrived.
    """

    def __init__(
        self, hands: Hands, store: Store | None = None, watch: Callable[[Progress], None] | None = None
    ) -> None:
        self._hands = hands
        self._store = store
        self.watch = watch
        self._chunks: list[Chunk] = []
        self._keys: list[str] = []
        self._todo: deque[int] = deque()
        self._under_way: dict[Future[str], int] = {}
        self._arrived: dict[int, str] = {}
        # Arrived, but not yet written: an interruption may come in between.
        self._unkept: list[tuple[str, str]] = []
        self._deaths: Counter[int] = Counter()
        self._done = 0

    def results(self, chunks: Sequence[Chunk]) -> Iterator[str]:
        """The results of the chunks, in order, each as soon as it and all before it are there.

        Raises ``WorkerError`` when the hands fail, ``InputError`` when the store does; an error in a chunk is raised as
        it is. What arrived before is kept.
        """
        return self.stream(iter(chunks), len(chunks))

    def stream(self, chunks: Iterator[Chunk], foreseen: int) -> Iterator[str]:
        """The same for chunks that are drawn one by one, perhaps without end; close it when it was enough.

        The first ``foreseen`` are given out as fast as there is room, those after them at most ``AHEAD`` before they
        are asked for. Which results come, and in which order, depends on the chunks alone.
        """
        try:
            yield from self._results(chunks, foreseen)
        except WorkerError as error:
            raise WorkerError(f"{error}; {self.kept_text()}") from error
        finally:
            self._todo.clear()

    def _results(self, chunks: Iterator[Chunk], foreseen: int) -> Iterator[str]:
        kept = set() if self._store is None else self._store.keys()
        clock = _Clock()
        n = len(self._chunks)
        planned = n + foreseen
        while True:
            self._draw(chunks, planned if n < planned else n + 1 + AHEAD, kept, clock)
            if n == len(self._chunks):
                return
            if self._store is not None and self._keys[n] in kept:
                yield self._store.get(self._keys[n])
                n += 1
                continue
            while n not in self._arrived:
                for number in self._advance():
                    clock.finished(self._chunks[number].cost)
                if self.watch is not None:
                    total = max(planned, n + 1)
                    self.watch(Progress(min(self._done, total), total, clock.seconds_left()))
            # No worker is to wait while results that came early are put to use.
            if back := {future for future in self._under_way if future.done()}:
                for number in self._collect(back):
                    clock.finished(self._chunks[number].cost)
                self._give_out()
            yield self._arrived.pop(n)
            n += 1

    def _draw(self, chunks: Iterator[Chunk], number: int, kept: set[str], clock: _Clock) -> None:
        """Draw chunks until there are ``number`` in all, or no more."""
        while len(self._chunks) < number and (chunk := next(chunks, None)) is not None:
            self._chunks.append(chunk)
            self._keys.append(chunk.key())
            if self._keys[-1] in kept:
                self._done += 1
            else:
                self._todo.append(len(self._chunks) - 1)
                clock.planned(chunk.cost)

    def _advance(self) -> list[int]:
        """Give out what there is room for, wait until something comes back; the numbers of what arrived."""
        self._give_out()
        if not self._under_way:
            raise RuntimeError("hands that have nothing in hand took no chunk")
        back, _ = wait(self._under_way, return_when=FIRST_COMPLETED)
        return self._collect(back)

    def _give_out(self) -> None:
        while self._todo and self._hands.room():
            future = self._hands.submit(self._chunks[self._todo[0]])
            if future is None:
                return
            self._under_way[future] = self._todo.popleft()
            if future.done():
                return

    def _collect(self, back: set[Future[str]]) -> list[int]:
        """Take in futures that are done: first those that brought a result, so that the rest can be judged."""
        arrived = []
        failed = []
        for future in back:
            number = self._under_way.pop(future)
            error = None if future.cancelled() else future.exception()
            if future.cancelled() or error is not None:
                failed.append((number, future, error))
                continue
            self._hands.settled(future)
            self._arrived[number] = future.result()
            arrived.append(number)
        self._done += len(arrived)
        self._unkept += [(self._keys[n], self._arrived[n]) for n in arrived]
        self._keep()
        for number, future, error in sorted(failed, key=lambda one: -one[0]):
            if not isinstance(error, Exception):
                error = WorkerError("the executor cancelled a chunk")
            if self._hands.lost(future, error) is Fate.SUSPECT:
                self._deaths[number] += 1
                if self._deaths[number] >= MOST_DEATHS:
                    raise self._deadly(number)
            self._todo.appendleft(number)
        return arrived

    def _keep(self) -> None:
        if self._store is not None and self._unkept:
            self._store.put(self._unkept)
        self._unkept.clear()

    def _deadly(self, number: int) -> WorkerError:
        return WorkerError(f"{MOST_DEATHS} workers died over {self._chunks[number]} ({self._hands.advice})")

    def kept_text(self) -> str:
        """What is not lost when this ends here, in words.

        >>> from ratomega.workers.hands import ThisProcess
        >>> Crew(ThisProcess()).kept_text()
        '0 of 0 chunks were done, and nothing was kept of them without --keep'
        """
        done = f"{self._done} of {len(self._chunks)} chunks were done"
        if self._store is None:
            return f"{done}, and nothing was kept of them without --keep"
        return f"{done} and are kept in {self._store.label}"

    def __enter__(self) -> Self:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    def close(self) -> None:
        """Stop. Results that came back meanwhile are still taken in."""
        try:
            back = {f for f in self._under_way if f.done() and not f.cancelled() and f.exception() is None}
            self._collect(back)
            self._keep()
        finally:
            self._under_way.clear()
            self._hands.close()
            if self._store is not None:
                self._store.close()


class _Clock:
    """Estimates the time that is left from the cost of what is done and what is not."""

    def __init__(self) -> None:
        self._left = self._spent = 0.0
        self._start = time.monotonic()

    def planned(self, cost: float) -> None:
        self._left += cost

    def finished(self, cost: float) -> None:
        self._left -= cost
        self._spent += cost

    def seconds_left(self) -> float | None:
        if self._spent <= 0:
            return None
        return max(0.0, (time.monotonic() - self._start) * self._left / self._spent)
