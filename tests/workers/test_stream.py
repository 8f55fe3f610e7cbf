"""Chunks without end: drawn in order, a few ahead, and what comes too much is no harm."""

from __future__ import annotations

import os
import signal
import threading
import time
from concurrent.futures import Executor, Future, ThreadPoolExecutor
from itertools import count, islice

import pytest
from odd_chunks import Held, Marked, traces

import ratomega
from ratomega.workers import crew as crews
from ratomega.workers.crew import Crew
from ratomega.workers.hands import LentExecutor, ThisProcess
from ratomega.workers.pool import OwnPool
from ratomega.workers.store import Store


@pytest.fixture
def folder(tmp_path):
    return str(tmp_path)


class Endless:
    """Chunks c0, c1, ... for ever, and how many were drawn."""

    def __init__(self, folder):
        self.folder, self.drawn = folder, 0

    def __iter__(self):
        return self

    def __next__(self):
        self.drawn += 1
        return Marked(self.folder, f"c{self.drawn - 1}")


def names(numbers):
    return [f"result of c{n}" for n in numbers]


def ran(folder):
    return [name for _, name in traces(folder)]


def test_this_process_does_nothing_ahead(folder):
    with Crew(ThisProcess()) as crew:
        results = crew.stream(Endless(folder), 3)
        for n in range(8):
            assert next(results) == f"result of c{n}"
            assert ran(folder) == [f"c{m}" for m in range(n + 1)]
        results.close()
    assert len(ran(folder)) == 8


class Willing(Executor):
    """Takes everything, and does it when it is told to."""

    def __init__(self):
        self.waiting = []

    def submit(self, function, /, *arguments, **options):
        future = Future()
        self.waiting.append((future, lambda: function(*arguments)))
        return future

    def work(self):
        """Do everything, the last first."""
        while self.waiting:
            future, call = self.waiting.pop()
            if future.set_running_or_notify_cancel():
                future.set_result(call())


def test_beyond_what_is_foreseen_only_a_few_are_given_out(folder, monkeypatch):
    executor = Willing()
    chunks = Endless(folder)
    given = []

    def wait(futures, **_):
        given.append(len(executor.waiting))
        executor.work()
        return set(futures), set()

    monkeypatch.setattr(crews, "wait", wait)
    with Crew(LentExecutor(executor)) as crew:
        results = crew.stream(chunks, 5)
        assert list(islice(results, 5)) == names(range(5))
        # All that were foreseen at once, and nothing else.
        assert (given, chunks.drawn) == ([5], 5)
        for n in range(5, 20):
            assert next(results) == f"result of c{n}"
            assert chunks.drawn <= n + 3
        results.close()
    assert max(given[1:]) <= 3


def test_order_and_surplus_with_threads(folder, tmp_path):
    case = ratomega.load_case("b1-four-flavours")
    with ThreadPoolExecutor(3) as executor, Crew(LentExecutor(executor), Store.open(tmp_path / "kept", case)) as crew:
        results = crew.stream(Endless(folder), 4)
        assert list(islice(results, 9)) == names(range(9))
        results.close()
        # A crew that was through with one piece of work takes another.
        more = [Marked(folder, f"d{n}") for n in range(3)]
        assert list(crew.results(more)) == [f"result of d{n}" for n in range(3)]
    assert len(ran(folder)) == len(set(ran(folder))) <= 9 + 2 + 3
    with Store.open(tmp_path / "kept", case) as again:
        assert {f"c{n}" for n in range(9)} <= again.keys() <= set(ran(folder))


def test_what_was_kept_is_not_done_again(folder, tmp_path):
    case = ratomega.load_case("b1-four-flavours")
    for number in (6, 10):
        with Crew(ThisProcess(), Store.open(tmp_path / "kept", case)) as crew:
            assert list(islice(crew.stream(Endless(folder), 4), number)) == names(range(number))
    assert ran(folder) == [f"c{n}" for n in range(10)]


@pytest.mark.long
def test_a_worker_that_dies_in_a_stream(folder):
    """Beyond what is foreseen as well: c6 is given out there, and its worker is killed over it."""
    chunks = (Held(folder, "c6") if n == 6 else Marked(folder, f"c{n}") for n in count())

    def kill():
        while "c6" not in ran(folder):
            time.sleep(0.01)
        os.kill(next(pid for pid, name in traces(folder) if name == "c6"), signal.SIGKILL)

    thread = threading.Thread(target=kill)
    thread.start()
    with Crew(OwnPool(2)) as crew:
        assert list(islice(crew.stream(chunks, 4), 9)) == names(range(9))
    thread.join()
    assert ran(folder).count("c6") == 2
    assert all(ran(folder).count(f"c{n}") == 1 for n in range(9) if n != 6)


def test_progress_counts_what_is_foreseen_and_then_what_comes(folder, monkeypatch):
    now = iter(range(100))
    monkeypatch.setattr("ratomega.workers.crew.time.monotonic", lambda: float(next(now)))
    seen = []
    with Crew(ThisProcess(), watch=seen.append) as crew:
        list(islice(crew.stream(Endless(folder), 3), 5))
    assert [(p.done, p.total) for p in seen] == [(1, 3), (2, 3), (3, 3), (4, 4), (5, 5)]
    assert [p.seconds_left for p in seen[:3]] == pytest.approx([2, 1, 0])
