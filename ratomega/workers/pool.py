"""Worker processes of our own: one lane a worker, each an executor with a single process.

A pool of several processes ends all of them when one dies. With an executor for each, a worker that dies takes with it
only the chunk that it had in hand, which is thereby known, and the one that waited behind it.
"""

from __future__ import annotations

import multiprocessing
import os
import signal
import threading
from collections.abc import Iterator
from concurrent.futures import BrokenExecutor, Future, ProcessPoolExecutor
from contextlib import contextmanager
from multiprocessing import resource_tracker
from multiprocessing.connection import Connection

from ratomega.errors import WorkerError
from ratomega.workers.chunks import Chunk, run_chunk
from ratomega.workers.hands import Fate

__all__ = ["OwnPool"]

# One chunk in hand and one that waits, so that a worker never waits for us.
DEPTH = 2
MOST_IDLE_DEATHS = 10
# In a row, without any chunk done in between.
MOST_FAILED_STARTS = 3
_ONE_THREAD = (
    "OMP_NUM_THREADS",
    "OPENBLAS_NUM_THREADS",
    "MKL_NUM_THREADS",
    "BLIS_NUM_THREADS",
    "VECLIB_MAXIMUM_THREADS",
    "NUMEXPR_NUM_THREADS",
)


class OwnPool:
    """Up to ``workers`` processes, started when there is work for them and started again when they die."""

    def __init__(self, workers: int) -> None:
        self._workers = workers
        self._lanes: list[_Lane] = []
        self._lane_of: dict[Future[str], _Lane] = {}
        self._idle_deaths = 0
        self._failed_starts = 0

    def room(self) -> bool:
        return len(self._lanes) < self._workers or any(lane.room() for lane in self._lanes)

    def submit(self, chunk: Chunk) -> Future[str] | None:
        while self.room():
            lane = self._freest()
            try:
                future = lane.submit(chunk)
            except BrokenExecutor:
                self._refused(lane)
                continue
            self._lane_of[future] = lane
            return future
        return None

    def _freest(self) -> _Lane:
        """A lane that is idle, a new one, or the shortest queue; there is room."""
        lane = min((lane for lane in self._lanes if lane.room()), key=lambda lane: len(lane.queue), default=None)
        if len(self._lanes) < self._workers and (lane is None or lane.queue):
            lane = _Lane()
            self._lanes.append(lane)
        assert lane is not None
        return lane

    def _refused(self, lane: _Lane) -> None:
        """The process of the lane is dead. What it still had comes to ``settled`` or ``lost``; then, at the latest, the
        lane goes. When nothing was lost it died idle."""
        lane.dead = True
        if not lane.queue:
            self._drop(lane)
            self._idle_deaths += 1
            if self._idle_deaths > MOST_IDLE_DEATHS:
                raise WorkerError(f"{self._idle_deaths} worker processes died without work in hand")

    def settled(self, future: Future[str]) -> None:
        self._failed_starts = 0
        lane = self._lane_of.pop(future)
        lane.queue.remove(future)
        if lane.dead:
            self._refused(lane)

    def lost(self, future: Future[str], error: Exception) -> Fate:
        if not isinstance(error, BrokenExecutor):
            raise error
        lane = self._lane_of.pop(future)
        if not lane.judged:
            lane.judged = True
            if lane.ready():
                lane.suspect = lane.queue[0]
            else:
                self._failed_starts += 1
            self._drop(lane)
            if self._failed_starts >= MOST_FAILED_STARTS:
                raise WorkerError(
                    f"{self._failed_starts} worker processes ended before they were ready; a script that asks for "
                    'workers must do so below if __name__ == "__main__":, because every worker process imports it'
                )
        return Fate.SUSPECT if future is lane.suspect else Fate.BYSTANDER

    def _drop(self, lane: _Lane) -> None:
        lane.dead = True
        lane.close()
        self._lanes.remove(lane)

    advice = "memory may be short"

    def close(self) -> None:
        # First all leashes, so that the workers end at the same time.
        for lane in self._lanes:
            lane.let_go()
        for lane in self._lanes:
            lane.close()
        self._lanes.clear()
        self._lane_of.clear()


class _Lane:
    """One worker process with its queue.

    The process holds the reading end of a pipe, the leash, and exits as soon as our end is closed, be it by us or
    because this process is gone: no worker outlives it, even when it is killed.
    """

    def __init__(self) -> None:
        self.queue: list[Future[str]] = []
        self.dead = self.judged = False
        self.suspect: Future[str] | None = None
        # A fresh process, not a fork: a fork copies the locks of our threads in whatever state they are.
        context = multiprocessing.get_context("spawn")
        self._their_end, self._our_end = context.Pipe()
        self._executor = ProcessPoolExecutor(1, context, initializer=_settle_in, initargs=(self._their_end,))
        self._started = False

    def room(self) -> bool:
        return not self.dead and len(self.queue) < DEPTH

    def submit(self, chunk: Chunk) -> Future[str]:
        if self._started:
            future = self._executor.submit(run_chunk, chunk)
        else:
            with _surroundings_of_a_worker():
                future = self._executor.submit(run_chunk, chunk)
            # The process has its own copies by now. Without ours the end of the process is seen also in the middle of a
            # result that it was sending; else the executor would wait for the rest for ever. There is no public way.
            self._their_end.close()
            self._executor._result_queue._writer.close()  # type: ignore[attr-defined]
            self._started = True
        self.queue.append(future)
        return future

    def ready(self) -> bool:
        """Did the process, which is dead by now, ever get so far as to take chunks?"""
        try:
            return self._our_end.poll() and bool(self._our_end.recv_bytes())
        except (EOFError, OSError):
            return False

    def let_go(self) -> None:
        """Let the process end, whatever it has in hand."""
        self._our_end.close()

    def close(self) -> None:
        """Let the process end, and wait for that."""
        self.let_go()
        self._executor.shutdown(wait=True, cancel_futures=True)
        self._their_end.close()


@contextmanager
def _surroundings_of_a_worker() -> Iterator[None]:
    """What a process started inside inherits: one thread for linear algebra, and no Ctrl-C, which reaches the workers
    of a terminal too and is for us to act on. Libraries read the first when they are imported, so that it cannot be set
    in the worker any more; the second must hold from its first instruction on."""
    # Starting the tracker unblocks signals, hence before they are blocked.
    resource_tracker.ensure_running()
    before = {name: os.environ.get(name) for name in _ONE_THREAD}
    blocked = signal.pthread_sigmask(signal.SIG_BLOCK, [signal.SIGINT]) if hasattr(signal, "pthread_sigmask") else None
    try:
        os.environ.update(dict.fromkeys(_ONE_THREAD, "1"))
        yield
    finally:
        for name, value in before.items():
            if value is None:
                os.environ.pop(name, None)
            else:
                os.environ[name] = value
        if blocked is not None:
            signal.pthread_sigmask(signal.SIG_SETMASK, blocked)


def _settle_in(leash: Connection) -> None:
    """In the worker, before its first chunk. Its last words are that it is ready."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    leash.send_bytes(b"ready")
    threading.Thread(target=_exit_with, args=(leash,), daemon=True).start()


def _exit_with(leash: Connection) -> None:
    try:
        leash.recv_bytes()
    except (EOFError, OSError):
        os._exit(1)
