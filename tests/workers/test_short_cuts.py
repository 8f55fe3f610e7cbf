"""Whole runs of the short cuts: the same bytes with any number of workers, which are really killed."""

from __future__ import annotations

import json
import multiprocessing
import os
import signal
import subprocess
import sys
from concurrent.futures import ThreadPoolExecutor

import pytest
from building import make_case

import ratomega
from ratomega.chain.job import Job
from ratomega.chain.pipeline import limit_result
from ratomega.cli.main import main
from ratomega.regulator import routes
from ratomega.workers import primes

CASES = {
    "fast": (make_case("1", "1", [{"coulomb": ["3/11", "-2/7"], "antifundamental": ["1/3"]}], charge=9), "direct"),
    "poles": (make_case("1", "1", [{"coulomb": ["3/11", "-3/11"], "adjoint": ["2/7"]}], charge=16), "poles"),
}


@pytest.fixture(autouse=True)
def _small_chunks(monkeypatch):
    """Five chunks or more. The worker processes never ask how it was cut, nor for the rule that takes the short cut."""
    monkeypatch.setattr(primes, "portion", lambda task: 3)
    monkeypatch.setattr(routes, "CLUSTERWISE", 20)


@pytest.fixture(scope="module")
def plain():
    """Without workers, and with the batches of that."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(routes, "CLUSTERWISE", 20)
        found = {name: ratomega.to_json(ratomega.limit(case, route=route)) for name, (case, route) in CASES.items()}
    for text in found.values():
        assert json.loads(text)["route"]["primes"] > 12
        assert json.loads(text)["route"]["spare_bits"] >= 45
    return found


@pytest.mark.parametrize(
    ("name", "workers"),
    [
        ("fast", 1),
        ("fast", 3),
        *(pytest.param(name, n, marks=pytest.mark.long) for name, n in (("fast", 2), ("poles", 1), ("poles", 3))),
    ],
)
def test_the_bytes_do_not_depend_on_the_number_of_workers(plain, name, workers):
    case, route = CASES[name]
    assert ratomega.to_json(ratomega.limit(case, route=route, workers=workers)) == plain[name]


@pytest.mark.parametrize("name", CASES)
def test_the_bytes_do_not_depend_on_an_executor(plain, name):
    case, route = CASES[name]
    with ThreadPoolExecutor(3) as executor:
        for workers in (None, 2):
            result = ratomega.limit(case, route=route, executor=executor, workers=workers)
            assert ratomega.to_json(result) == plain[name]


@pytest.mark.parametrize("name", ["fast", pytest.param("poles", marks=pytest.mark.long)])
def test_killed_workers_change_nothing(plain, name):
    """One of two worker processes is killed, whatever it has in hand; what the other has goes on."""
    case, route = CASES[name]
    killed = []

    def kill(progress):
        alive = [process.pid for process in multiprocessing.active_children()]
        if alive and not killed:
            assert progress.done < progress.total
            os.kill(alive[-1], signal.SIGKILL)
            killed.append(alive[-1])

    job = Job.prepare(case, route=route)
    with job.crew(workers=2) as crew:
        crew.watch = kill
        found = list(job.limits(probes=0, crew=crew))
    assert ratomega.to_json(limit_result(job, found)) == plain[name]
    assert len(killed) == 1


# ---- the command


SCRIPT = """
import os
import time
from ratomega.cli.main import main
from ratomega.regulator import routes
from ratomega.workers import primes

run = primes.PrimeChunk.run

def logged(self):
    handle = os.open("log", os.O_WRONLY | os.O_APPEND | os.O_CREAT)
    os.write(handle, f"{os.getpid()} {self.key()}\\n".encode())
    os.close(handle)
    time.sleep(float(os.environ.get("PAUSE", "0")))
    return run(self)

# The worker processes import this script, and with it this change.
primes.PrimeChunk.run = logged
primes.portion = lambda task: 3
routes.CLUSTERWISE = 20

if __name__ == "__main__":
    main()
"""
WORDS = {
    "fast": ["limit", "u2-pure", "--charge", "9", "--route", "direct", "--certify"],
    "poles": ["limit", "u2-pure", "--charge", "20", "--route", "poles"],
}


def started(folder):
    log = folder / "log"
    return [line.split(" ", 1)[1] for line in log.read_text().splitlines()] if log.exists() else []


@pytest.mark.long
@pytest.mark.parametrize("name", WORDS)
def test_a_run_that_was_killed_goes_on_where_it_was(tmp_path, name):
    """The whole run is killed with SIGKILL, and repeats what its two workers had in hand or on the way."""
    (tmp_path / "script.py").write_text(SCRIPT)
    line = [sys.executable, "script.py", *WORDS[name]]
    options = {"cwd": tmp_path, "text": True}
    alone = subprocess.run([*line, "--json"], capture_output=True, check=True, **options)
    assert started(tmp_path) == []
    line += ["--json", "--keep", "kept", "--workers", "2"]
    surroundings = {**os.environ, "PAUSE": "0.5"}
    process = subprocess.Popen(line, start_new_session=True, stdout=subprocess.DEVNULL, env=surroundings, **options)
    while len(started(tmp_path)) < 6:
        assert process.poll() is None
    process.kill()
    process.wait()
    before = started(tmp_path)
    done = subprocess.run(line, capture_output=True, check=True, **options)
    assert (done.stdout, done.stderr) == (alone.stdout, "")
    every = started(tmp_path)
    # In hand and on the way at the kill; the first run may also have begun a chunk between our look and the kill.
    assert 0 < len(every) - len(set(every)) <= 2 + 2
    assert len(every) > len(before)
    assert json.loads(done.stdout)["route"]["primes"] > 12


@pytest.mark.parametrize(("words", "note"), [(["--charge", "9"], ""), (["--charge", "8"], "note: so low a charge is")])
def test_a_note_where_nothing_is_cut(tmp_path, monkeypatch, capsys, words, note):
    monkeypatch.chdir(tmp_path)
    with pytest.raises(SystemExit, match="0"):
        main(["limit", "u2-pure", "--route", "poles", "--keep", "kept", *words])
    printed = capsys.readouterr()
    assert printed.err.startswith(note)
    assert printed.err.count("\n") == bool(note)
