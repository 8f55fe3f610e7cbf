"""Whole runs: the same bytes with any number of workers, and runs that are really killed, interrupted, watched."""

from __future__ import annotations

import json
import multiprocessing
import os
import pty
import re
import signal
import sqlite3
import subprocess
import sys
import time

import pytest
from building import make_case

import ratomega
from ratomega.case.reading import case_to_mapping
from ratomega.chain.job import Job
from ratomega.chain.pipeline import limit_result
from ratomega.cli.main import main
from ratomega.desk.text import limit_text
from ratomega.workers import charges

CASE = make_case("1", "1", [{"coulomb": ["1", "-1"], "antifundamental": ["1/2"]}], charge=5)
"""Not compact: clusters with and without sinks, three further paths."""


@pytest.fixture(scope="module")
def plain():
    return ratomega.to_json(ratomega.limit(CASE, terms=1))


def small_chunks(monkeypatch):
    """Cut CASE into some forty chunks. The worker processes never ask how it was cut."""
    monkeypatch.setattr(charges, "TARGET", 2e-3)


def until(condition, what):
    """Wait for another process. A minute is far beyond what it takes."""
    for _ in range(12000):
        if condition():
            return
        time.sleep(0.005)
    raise AssertionError(f"{what} never happened")


@pytest.mark.parametrize("workers", [1, 2, 3])
def test_the_bytes_do_not_depend_on_the_number_of_workers(monkeypatch, plain, workers):
    small_chunks(monkeypatch)
    seen = []
    result = ratomega.limit(CASE, terms=1, workers=workers, watch=seen.append)
    assert ratomega.to_json(result) == plain
    assert seen == list(CASE.charges)


def test_validate_with_workers(monkeypatch):
    small_chunks(monkeypatch)
    case = make_case("1", "1", [{"coulomb": ["1/3", "-1/5"], "adjoint": ["t/5"]}], charge=3)
    assert ratomega.to_json(ratomega.validate(case, workers=2)) == ratomega.to_json(ratomega.validate(case))


def test_killed_workers_change_nothing(monkeypatch, plain):
    """Two worker processes are killed, whatever they have in hand."""
    small_chunks(monkeypatch)
    killed = []

    def kill(progress):
        alive = [process.pid for process in multiprocessing.active_children() if process.pid not in killed]
        if alive and len(killed) < 2 and progress.done > 3 * len(killed):
            os.kill(alive[-1], signal.SIGKILL)
            killed.append(alive[-1])

    job = Job.prepare(CASE, clusterwise=True)
    with job.crew(workers=2) as crew:
        crew.watch = kill
        found = list(job.limits(probes=3, terms=1, crew=crew))
    assert ratomega.to_json(limit_result(job, found, terms=1)) == plain
    assert len(killed) == 2


# ---- the command, killed and interrupted


SCRIPT = """
import os
import time
from ratomega.cli.main import main
from ratomega.workers import charges

run = charges.SumChunk.run

def logged(self):
    handle = os.open("log", os.O_WRONLY | os.O_APPEND | os.O_CREAT)
    os.write(handle, f"{os.getpid()} {self.key()}\\n".encode())
    os.close(handle)
    time.sleep(float(os.environ.get("PAUSE", "0")))
    return run(self)

# The worker processes import this script, and with it this change.
charges.SumChunk.run = logged
charges.TARGET = 0.01

if __name__ == "__main__":
    main()
"""
LONG = make_case("1", "1", [{"coulomb": ["1", "-1"], "antifundamental": ["1/2"]}], charge=7)
WORDS = ["limit", "case.toml", "--keep", "kept", "--workers", "2"]


class Command:
    """The command on LONG, in a folder of its own, with a log of every chunk that is started."""

    def __init__(self, folder):
        self.folder = folder
        tables = case_to_mapping(LONG)
        (node,) = tables["node"]
        lines = [f"charge = {tables['charge']}", "[background]"]
        lines += [f'{key} = "{value}"' for key, value in tables["background"].items()]
        lines += ["[[node]]", *(f"{key} = {json.dumps(node[key])}" for key in ("name", "coulomb", "antifundamental"))]
        (folder / "case.toml").write_text("\n".join(lines))
        (folder / "script.py").write_text(SCRIPT)
        self.line = [sys.executable, "script.py", *WORDS]

    def start(self, *, pause=0.0, **options):
        """``pause`` makes every chunk longer, so that the run is not over before it is stopped."""
        surroundings = {**os.environ, "PAUSE": str(pause)}
        return subprocess.Popen(
            self.line, cwd=self.folder, text=True, start_new_session=True, env=surroundings, **options
        )

    def started(self):
        """(process id, key) of every chunk that was begun."""
        log = self.folder / "log"
        return [line.split(" ", 1) for line in log.read_text().splitlines()] if log.exists() else []

    def kept(self):
        if not (self.folder / "kept").exists():
            return 0
        connection = sqlite3.connect(self.folder / "kept", timeout=30)
        try:
            return connection.execute("SELECT count(*) FROM chunk").fetchone()[0]
        except sqlite3.OperationalError:
            return 0
        finally:
            connection.close()

    def finish(self):
        done = subprocess.run(self.line, cwd=self.folder, text=True, capture_output=True, check=False)
        # A pole survives at charge 1.
        assert (done.returncode, done.stderr) == (1, "")
        return done.stdout


@pytest.fixture
def command(tmp_path):
    return Command(tmp_path)


@pytest.fixture(scope="module")
def table():
    return limit_text(ratomega.limit(LONG))


def gone(pid):
    try:
        os.kill(int(pid), 0)
    except ProcessLookupError:
        return True
    return False


def test_a_run_that_was_killed_goes_on_where_it_was(command, table):
    process = command.start(pause=0.3, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
    until(lambda: command.kept() >= 6 or process.poll() is not None, "the sixth chunk")
    process.kill()
    process.wait()
    before = command.started()
    # No worker outlives the run.
    until(lambda: all(gone(pid) for pid, _ in before), "the end of the workers")
    before = command.started()
    kept = command.kept()
    assert command.finish() == table
    every = command.started()
    total = len({key for _, key in every})
    assert 6 <= kept < total
    assert command.kept() == total
    # What had arrived is not done again; what is: one chunk in the hands of each worker, one on its way from each.
    assert len(every) - len(before) == total - kept
    assert len(every) - total <= 2 + 2


def test_an_interrupted_run_says_what_it_kept(command):
    process = command.start(pause=0.3, stdout=subprocess.PIPE, stderr=subprocess.PIPE)
    until(lambda: command.kept() >= 6 or process.poll() is not None, "the sixth chunk")
    # As a terminal does it: to the command and to its workers.
    os.killpg(process.pid, signal.SIGINT)
    out, err = process.communicate()
    assert process.returncode == 130, err
    said = re.fullmatch(
        r"interrupted: (\d+) of 8 charges were finished and are printed; (\d+) of (\d+) chunks were done and are kept "
        r"in kept\n",
        err,
    )
    assert said, err
    assert int(said[2]) == command.kept() < int(said[3])
    assert "interrupted: only the charges below were finished" in out
    assert all(gone(pid) for pid, _ in command.started())


def test_progress_is_shown_on_a_terminal_alone(command, table):
    ours, theirs = pty.openpty()
    process = command.start(stdout=subprocess.PIPE, stderr=theirs)
    os.close(theirs)
    out, _ = process.communicate()
    seen = b""
    try:
        while data := os.read(ours, 65536):
            seen += data
    except OSError:
        # This is how Linux says that nobody holds the other end any more.
        pass
    os.close(ours)
    assert process.returncode == 1
    assert out == table
    assert re.search(rb"\rchunk \d+ of \d+", seen)
    # The line is gone in the end.
    assert re.search(rb"\r +\r$", seen)
    assert b"\n" not in seen


# ---- the command, refused


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (["--workers", "0"], "workers: the number of workers is between 1 and 1024, not 0"),
        (["--workers", "x"], "not a valid integer"),
        (["--cluster", "tcp://127.0.0.1:1"], 'no dask scheduler answers at "tcp://127.0.0.1:1"'),
        (["--cluster", "no address"], 'no dask scheduler answers at "no address"'),
        (["--cluster", "odd://127.0.0.1:1"], 'no dask scheduler answers at "odd://127.0.0.1:1"'),
        (["--cluster", "tcp://127.0.0.1:1", "--workers", "2"], "leave one of --workers and --cluster out"),
        (["--keep", "."], "not a regular file"),
        (["--keep", "case.toml"], "case.toml: this file is no store of chunks; it was left as it is"),
        (["--keep", "nowhere/kept"], "no folder"),
    ],
)
def test_options_that_are_refused(command, monkeypatch, capsys, words, said):
    monkeypatch.chdir(command.folder)
    with pytest.raises(SystemExit) as ended:
        main(["limit", "case.toml", "--charge", "2", *words])
    printed = capsys.readouterr()
    assert ended.value.code == 2
    assert printed.out == ""
    assert said in printed.err
    assert printed.err.count("\n") == 1


def test_a_store_of_another_case_exits_2(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    with pytest.raises(SystemExit, match="0"):
        main(["limit", "u2-pure", "--charge", "1", "--keep", "kept"])
    capsys.readouterr()
    before = (tmp_path / "kept").read_bytes()
    with pytest.raises(SystemExit, match="2"):
        main(["validate", "b1-four-flavours", "--charge", "1", "--keep", "kept", "--json"])
    error = json.loads(capsys.readouterr().out)["error"]
    assert error["where"] == "kept"
    assert "belongs to another case" in error["message"]
    assert (tmp_path / "kept").read_bytes() == before


FAILING = """
import os, signal
from ratomega.cli.main import main
from ratomega.workers import charges

def deadly(self):
    os.kill(os.getpid(), signal.SIGKILL)

charges.SumChunk.run = deadly

if __name__ == "__main__":
    main()
"""


@pytest.mark.long
def test_workers_that_always_die_exit_4(command):
    (command.folder / "script.py").write_text(FAILING)
    done = subprocess.run(
        [sys.executable, "script.py", "limit", "case.toml", "--charge", "1", "--workers", "1", "--json"],
        cwd=command.folder,
        text=True,
        capture_output=True,
        check=False,
    )
    assert done.returncode == 4
    assert "3 workers died over the chunk (charge 0 on the own path" in json.loads(done.stdout)["error"]["message"]
    assert done.stderr.count("\n") == 1


UNGUARDED = "import ratomega\nratomega.limit('u2-pure', workers=1)\n"


@pytest.mark.long
def test_a_script_without_a_guard_is_told_so(tmp_path):
    (tmp_path / "script.py").write_text(UNGUARDED)
    done = subprocess.run(
        [sys.executable, "script.py"], cwd=tmp_path, text=True, capture_output=True, check=False
    )
    assert done.returncode != 0
    assert 'must do so below if __name__ == "__main__":' in done.stderr
