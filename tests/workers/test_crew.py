"""The machinery on its own: order, deaths of workers, executors of the caller, what ends a run and what is kept."""

from __future__ import annotations

import multiprocessing
import os
import signal
import threading
import time
from concurrent.futures import CancelledError, Executor, Future, ProcessPoolExecutor, ThreadPoolExecutor

import pytest
from odd_chunks import BreaksOff, Deadly, Held, Interrupted, Marked, Patient, Surroundings, Wrong, traces

import ratomega
from ratomega.errors import WorkerError
from ratomega.workers.crew import Crew
from ratomega.workers.hands import LentExecutor, ThisProcess
from ratomega.workers.pool import OwnPool
from ratomega.workers.store import Store


@pytest.fixture
def folder(tmp_path):
    return str(tmp_path)


def marked(folder, number, kind=Marked, **options):
    return [kind(folder, f"c{n}", **options) for n in range(number)]


def expected(chunks):
    return [f"result of {chunk.name}" for chunk in chunks]


def until(condition):
    """Wait for another process. A minute is far beyond what it takes."""
    for _ in range(6000):
        if condition():
            return
        time.sleep(0.01)
    raise AssertionError("the other process never got there")


def gone(pid):
    try:
        os.kill(pid, 0)
    except ProcessLookupError:
        return True
    return False


def kill_over(folder, name):
    """A thread that kills the worker that runs the chunk ``name``, as soon as it runs."""

    def work():
        until(lambda: any(found == name for _, found in traces(folder)))
        os.kill(next(pid for pid, found in traces(folder) if found == name), signal.SIGKILL)

    thread = threading.Thread(target=work)
    thread.start()
    return thread


def test_this_process_goes_chunk_by_chunk(folder):
    chunks = marked(folder, 4)
    with Crew(ThisProcess()) as crew:
        found = []
        for result in crew.results(chunks):
            found.append(result)
            # Nothing is done ahead of its turn: an interruption loses one chunk at most.
            assert len(traces(folder)) == len(found)
    assert found == expected(chunks)


def test_order_does_not_depend_on_who_is_first(folder):
    chunks = [Marked(folder, f"c{n}", seconds=0.05 * (n % 3 == 0)) for n in range(20)]
    with ThreadPoolExecutor(4) as executor, Crew(LentExecutor(executor)) as crew:
        assert list(crew.results(chunks)) == expected(chunks)
    assert sorted(name for _, name in traces(folder)) == sorted(chunk.name for chunk in chunks)


def test_a_worker_that_dies_costs_its_chunk_alone(folder):
    """Killed from outside in the middle of c3, while the other worker is in the middle of c2, which goes on."""
    chunks = marked(folder, 12)
    chunks[2] = Patient(folder, "c2", other="c3")
    chunks[3] = Held(folder, "c3")
    thread = kill_over(folder, "c3")
    with Crew(OwnPool(2)) as crew:
        assert list(crew.results(chunks)) == expected(chunks)
    thread.join()
    runs = traces(folder)
    names = [name for _, name in runs]
    assert {name: names.count(name) for name in names} == {f"c{n}": 1 + (n == 3) for n in range(12)}
    assert len({pid for pid, _ in runs}) == 3
    assert all(gone(pid) for pid, _ in runs)


def test_a_worker_that_dies_idle_costs_nothing(folder):
    chunks = marked(folder, 6)
    hands = OwnPool(1)
    with Crew(hands) as crew:
        results = crew.results(chunks)
        found = [next(results)]
        # It did all that it had, and its result arrived; the next chunk is given to a process that is dead already.
        until(lambda: len(traces(folder)) == 2 and all(f.done() for lane in hands._lanes for f in lane.queue))
        (process,) = multiprocessing.active_children()
        os.kill(process.pid, signal.SIGKILL)
        process.join()
        found += results
    assert found == expected(chunks)
    assert [name for _, name in traces(folder)] == [chunk.name for chunk in chunks]


def test_a_worker_that_dies_while_it_sends_a_result(folder):
    """Half of a result has arrived, and the other half never will."""
    chunks = [Marked(folder, "c0"), BreaksOff(folder, "c1"), Marked(folder, "c2")]
    with Crew(OwnPool(1)) as crew:
        assert list(crew.results(chunks)) == expected(chunks)
    assert [name for _, name in traces(folder)] == ["c0", "c1", "half", "c1", "c2"]


def test_leaving_while_a_result_is_being_sent(folder):
    chunks = [Marked(folder, "c0"), BreaksOff(folder, "c1", seconds=600)]
    with Crew(OwnPool(1)) as crew:
        assert next(crew.results(chunks)) == "result of c0"
        until(lambda: "half" in [name for _, name in traces(folder)])
    assert all(gone(pid) for pid, _ in traces(folder))


def test_workers_leave_ctrl_c_to_us(folder):
    """A terminal sends it to them too; what is in hand is then for us to finish or to give up."""
    chunks = marked(folder, 2, Interrupted)
    with Crew(OwnPool(1)) as crew:
        assert list(crew.results(chunks)) == expected(chunks)


@pytest.mark.long
def test_a_chunk_that_always_kills_ends_in_an_error(folder):
    chunks = marked(folder, 8)
    chunks[4] = Deadly(folder, "deadly")
    with Crew(OwnPool(2)) as crew, pytest.raises(WorkerError, match="3 workers died over") as caught:
        list(crew.results(chunks))
    assert "deadly" in str(caught.value)
    assert "chunks were done, and nothing was kept" in str(caught.value)
    names = [name for _, name in traces(folder)]
    assert names.count("deadly") == 3
    assert all(names.count(f"c{n}") == 1 for n in range(4))


def test_the_error_of_a_chunk_is_raised_as_it_is(folder):
    with Crew(OwnPool(1)) as crew, pytest.raises(ZeroDivisionError, match="the error of a chunk"):
        list(crew.results([Marked(folder, "c0"), Wrong(folder, "wrong")]))
    with Crew(ThisProcess()) as crew, pytest.raises(ZeroDivisionError, match="the error of a chunk"):
        list(crew.results([Wrong(folder, "wrong")]))


def test_workers_have_one_thread_for_linear_algebra(folder, monkeypatch):
    monkeypatch.setenv("OMP_NUM_THREADS", "7")
    monkeypatch.delenv("OPENBLAS_NUM_THREADS", raising=False)
    with Crew(OwnPool(1)) as crew:
        assert list(crew.results([Surroundings(folder, "c0")])) == ["OMP_NUM_THREADS=1 OPENBLAS_NUM_THREADS=1"]
    assert os.environ["OMP_NUM_THREADS"] == "7"
    assert "OPENBLAS_NUM_THREADS" not in os.environ


def test_leaving_early_ends_the_workers(folder):
    chunks = [Marked(folder, "c0"), *(Held(folder, f"h{n}") for n in range(4))]
    with Crew(OwnPool(2)) as crew:
        assert next(crew.results(chunks)) == "result of c0"
        until(lambda: len(traces(folder)) == 3)
    assert all(gone(pid) for pid, _ in traces(folder))


def test_no_more_workers_than_chunks(folder):
    with Crew(OwnPool(3)) as crew:
        assert list(crew.results(marked(folder, 1))) == ["result of c0"]
    with Crew(OwnPool(3)) as crew:
        assert list(crew.results([])) == []
    assert len(traces(folder)) == 1


# ---- an executor of the caller


def test_an_executor_of_the_caller_is_left_to_the_caller(folder):
    with ProcessPoolExecutor(2, multiprocessing.get_context("spawn")) as executor:
        for _ in range(2):
            with Crew(LentExecutor(executor)) as crew:
                assert list(crew.results(marked(folder, 5))) == expected(marked(folder, 5))
        assert executor.submit(abs, -3).result() == 3


def test_an_executor_that_breaks_is_an_error_that_says_what_was_kept(folder, tmp_path):
    chunks = [*marked(folder, 3), Deadly(folder, "deadly"), *marked(folder, 3)]
    store = Store.open(tmp_path / "kept", ratomega.load_case("b1-four-flavours"))
    with (
        ProcessPoolExecutor(1, multiprocessing.get_context("spawn")) as executor,
        pytest.raises(WorkerError, match=r"failed with BrokenProcessPool.*chunks were done and are kept in kept"),
        Crew(LentExecutor(executor, lambda: 1), store) as crew,
    ):
        list(crew.results(chunks))
    with Store.open(tmp_path / "kept", ratomega.load_case("b1-four-flavours")) as again:
        assert {"c0", "c1"} <= again.keys() <= {"c0", "c1", "c2"}


class Recording(Executor):
    """Runs at once, in this process, and counts what it has in hand; ``limit`` chunks, then it refuses or cancels."""

    def __init__(self, limit, cancels=False):
        self.limit, self.cancels, self.taken = limit, cancels, 0

    def submit(self, function, /, *arguments, **options):
        self.taken += 1
        future = Future()
        if self.taken <= self.limit:
            future.set_result(function(*arguments, **options))
        elif self.cancels:
            future.cancel()
            future.set_running_or_notify_cancel()
        else:
            raise RuntimeError("no more\nand a second line")
        return future


@pytest.mark.parametrize("cancels", [False, True])
def test_an_executor_that_takes_no_more(folder, cancels):
    said = "cancelled" if cancels else "failed with RuntimeError: no more;"
    with Crew(LentExecutor(Recording(3, cancels))) as crew, pytest.raises(WorkerError, match=said) as caught:
        list(crew.results(marked(folder, 5)))
    assert "3 of 5 chunks were done" in str(caught.value)
    assert not isinstance(caught.value, CancelledError)


class Hoarding(Recording):
    """Never does anything."""

    def submit(self, function, /, *arguments, **options):
        self.taken += 1
        return Future()


@pytest.mark.parametrize(("size", "most"), [(None, 256), (lambda: 3, 6), (lambda: 0, 2)])
def test_a_lent_executor_is_not_flooded(folder, size, most):
    executor = Hoarding(0)
    hands = LentExecutor(executor, size)
    futures = [hands.submit(chunk) for chunk in marked(folder, 300) if hands.room()]
    assert executor.taken == most
    hands.close()
    assert all(future.cancelled() for future in futures)


# ---- progress


def test_progress_counts_and_foresees(folder, monkeypatch):
    now = iter(range(100))
    monkeypatch.setattr("ratomega.workers.crew.time.monotonic", lambda: float(next(now)))
    seen = []
    with Crew(ThisProcess(), watch=seen.append) as crew:
        list(crew.results(marked(folder, 4)))
    assert [(p.done, p.total) for p in seen] == [(1, 4), (2, 4), (3, 4), (4, 4)]
    # The clock goes by one second a chunk, and the chunks cost the same.
    assert [p.seconds_left for p in seen] == pytest.approx([3, 2, 1, 0])


def test_what_was_kept_is_not_done_again_and_not_counted_as_speed(folder, tmp_path, monkeypatch):
    case = ratomega.load_case("b1-four-flavours")
    with Crew(ThisProcess(), Store.open(tmp_path / "kept", case)) as crew:
        results = crew.results(marked(folder, 4))
        assert [next(results), next(results)] == ["result of c0", "result of c1"]
        assert crew.kept_text() == "2 of 4 chunks were done and are kept in kept"
    now = iter(range(100))
    monkeypatch.setattr("ratomega.workers.crew.time.monotonic", lambda: float(next(now)))
    seen = []
    with Crew(ThisProcess(), Store.open(tmp_path / "kept", case), seen.append) as crew:
        assert list(crew.results(marked(folder, 4))) == expected(marked(folder, 4))
    assert [name for _, name in traces(folder)] == ["c0", "c1", "c2", "c3"]
    assert [(p.done, p.seconds_left) for p in seen] == [(3, pytest.approx(1)), (4, pytest.approx(0))]
