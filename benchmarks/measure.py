"""What every benchmark shares: clocks, medians, fits, the plain reference, runs in a process of their own, the report.

Seconds are processor seconds of one thread: on a machine with nothing else to do they are the elapsed ones, and where
others use the cores they are still those of the work. Elapsed seconds stand beside them in the JSON document.
"""

from __future__ import annotations

import importlib.util
import json
import os
import platform
import resource
import subprocess
import sys
import time
from collections.abc import Callable, Mapping, Sequence
from dataclasses import asdict, dataclass, field
from datetime import UTC, datetime
from importlib.metadata import version
from pathlib import Path
from statistics import median
from types import ModuleType
from typing import Any, ParamSpec, TypeVar

ROOT = Path(__file__).resolve().parent.parent
RUNS = 3
P = ParamSpec("P")
T = TypeVar("T")
PACKAGES = ("numpy", "python-flint", "sympy", "networkx")


@dataclass(frozen=True, slots=True)
class Pace:
    """How much of a benchmark to run. ``quick``: small sizes; ``long``: also what takes minutes."""

    quick: bool = False
    long: bool = False


@dataclass(frozen=True, slots=True)
class Times:
    """Processor and elapsed seconds: the medians of ``runs``."""

    processor: float
    elapsed: float
    runs: int = 1

    @classmethod
    def middle(cls, times: Sequence[Times]) -> Times:
        return cls(median(t.processor for t in times), median(t.elapsed for t in times), len(times))

    def __add__(self, other: Times) -> Times:
        return Times(self.processor + other.processor, self.elapsed + other.elapsed, min(self.runs, other.runs))


def timed(action: Callable[P, T], *arguments: P.args, **options: P.kwargs) -> tuple[Times, T]:
    """One run: its times and what it returned."""
    elapsed, processor = time.perf_counter(), time.process_time()
    value = action(*arguments, **options)
    return Times(time.process_time() - processor, time.perf_counter() - elapsed), value


def in_turn(actions: Mapping[str, Callable[[], object]], runs: int = RUNS) -> dict[str, Times]:
    """All actions in turn, several rounds, so that what changes on the machine meets each of them alike."""
    found: dict[str, list[Times]] = {name: [] for name in actions}
    for _ in range(runs):
        for name, action in actions.items():
            found[name].append(timed(action)[0])
    return {name: Times.middle(times) for name, times in found.items()}


def slope(x: Sequence[float], y: Sequence[float]) -> float:
    """The slope of the least-squares line.

    >>> slope([0, 1, 2], [5, 7, 9])
    2.0
    """
    mean_x, mean_y = sum(x) / len(x), sum(y) / len(y)
    up = sum((a - mean_x) * (b - mean_y) for a, b in zip(x, y, strict=True))
    return up / sum((a - mean_x) ** 2 for a in x)


def plain_reference() -> ModuleType:
    """tests/plain.py as it stands: a folder of tests is no package, hence by its place."""
    spec = importlib.util.spec_from_file_location("plain", ROOT / "tests" / "plain.py")
    if spec is None or spec.loader is None:
        raise RuntimeError("tests/plain.py is not there")
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def peak_mib() -> float:
    """The peak memory of this process. On Linux ``getrusage`` would count that of the parent before exec as well."""
    status = Path("/proc/self/status")
    if status.exists():
        for line in status.read_text(encoding="ascii").splitlines():
            if line.startswith("VmHWM:"):
                return int(line.split()[1]) / 2**10
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    return peak / (2**20 if sys.platform == "darwin" else 2**10)


@dataclass(frozen=True, slots=True)
class Alone:
    """``ratomega.limit`` in fresh processes: median times, the greatest peak memory, and what the result says."""

    times: Times
    peak_mib: float
    primes: int
    spare_bits: int | None


def alone(case: Mapping[str, Any], runs: int = RUNS, **options: object) -> Alone:
    """``ratomega.limit(case, **options)`` in a new process for every run; imports are not counted."""
    times, answers = [], []
    for _ in range(runs):
        command = [sys.executable, "-m", "benchmarks.alone", json.dumps([case, options])]
        done = subprocess.run(command, capture_output=True, text=True, check=False, cwd=ROOT)
        if done.returncode:
            raise RuntimeError(f"the run in a process of its own failed: {done.stderr.strip().splitlines()[-1]}")
        answers.append(json.loads(done.stdout))
        times.append(Times(answers[-1]["processor"], answers[-1]["elapsed"]))
    last = answers[-1]
    return Alone(Times.middle(times), max(a["peak_mib"] for a in answers), last["primes"], last["spare_bits"])


def environment() -> dict[str, str]:
    """What the figures depend on, without the name of the machine or of any folder."""
    import ratomega

    return {
        "date": datetime.now(UTC).date().isoformat(),
        "python": platform.python_version(),
        "machine": f"{platform.system()} {platform.machine()}",
        "cores": str(os.cpu_count()),
        "load": load(),
        "ratomega": ratomega.__version__,
        **{name: version(name) for name in PACKAGES},
    }


def load() -> str:
    """How many processes wanted a core, on average over one, five and fifteen minutes."""
    return " ".join(f"{x:.1f}" for x in os.getloadavg())


@dataclass(frozen=True, slots=True)
class Row:
    """One line: what ratomega took and, where there is a baseline, what that took on the same work.

    ``elapsed``: the ratio is that of elapsed seconds, for work that is spread over processes.
    """

    case: str
    charge: int
    call: str
    ours: Times
    baseline: str = ""
    theirs: Times | None = None
    peak_mib: float | None = None
    details: Mapping[str, Any] = field(default_factory=dict)
    headline: bool = False
    elapsed: bool = False

    @property
    def ratio(self) -> float | None:
        if self.theirs is None:
            return None
        return self.theirs.elapsed / self.ours.elapsed if self.elapsed else self.theirs.processor / self.ours.processor

    def document(self) -> dict[str, Any]:
        return asdict(self) | {"ratio": self.ratio}

    def cells(self) -> tuple[str, ...]:
        ours = self.ours.elapsed if self.elapsed else self.ours.processor
        cells = [self.case, str(self.charge), self.call, seconds_text(ours)]
        if self.theirs is None:
            cells += ["", "", ""]
        else:
            theirs = self.theirs.elapsed if self.elapsed else self.theirs.processor
            cells += [self.baseline, seconds_text(theirs), ratio_text(self.ratio)]
        cells.append("" if self.peak_mib is None else f"{self.peak_mib:.0f}")
        return tuple(cells)


def seconds_text(seconds: float) -> str:
    """Three digits.

    >>> seconds_text(0.01234), seconds_text(1.234), seconds_text(12.34), seconds_text(123.4)
    ('0.0123', '1.23', '12.3', '123')
    """
    decimals = 0 if seconds >= 100 else 1 if seconds >= 10 else 2 if seconds >= 1 else 3 if seconds >= 0.1 else 4
    return f"{seconds:.{decimals}f}"


def ratio_text(ratio: float | None) -> str:
    if ratio is None:
        return ""
    return f"{ratio:.2f}" if ratio < 3 else f"{ratio:.1f}" if ratio < 100 else f"{ratio:.0f}"


HEADS = ("case", "charges <=", "ratomega", "s", "baseline", "s", "ratio", "peak MiB")
WIDTHS = (37, 10, 23, 7, 35, 7, 6, 8)


class Report:
    """Prints rows as they are found, as a Markdown table, and keeps them for the JSON document."""

    def __init__(self, write: Callable[[str], None] = print) -> None:
        self.write = write
        self.rows: dict[str, list[Row]] = {}
        self.notes: dict[str, list[str]] = {}
        self.name = ""

    def question(self, name: str, text: str) -> None:
        self.name = name
        self.rows[name], self.notes[name] = [], []
        self.write(f"\n## {name}: {text}\n")
        self._heads()

    def row(self, row: Row) -> None:
        self.rows[self.name].append(row)
        self.write(_line(row.cells()))

    def note(self, text: str) -> None:
        self.notes[self.name].append(text)
        self.write(f"\n{text}")

    def summary(self) -> None:
        """The rows that stand for the others, of all questions, in one table."""
        self.write("\n## summary\n")
        self._heads()
        for rows in self.rows.values():
            for row in rows:
                if row.headline:
                    self.write(_line(row.cells()))
        for notes in self.notes.values():
            for note in notes:
                self.write(f"\n{note}")

    def document(self, surroundings: Mapping[str, str]) -> dict[str, Any]:
        questions = {
            name: {"rows": [row.document() for row in rows], "notes": self.notes[name]}
            for name, rows in self.rows.items()
        }
        return {"environment": dict(surroundings), "questions": questions}

    def _heads(self) -> None:
        self.write(_line(HEADS))
        rules = ["-" * (width + 1) + (":" if i in RIGHT else "-") for i, width in enumerate(WIDTHS)]
        self.write("|" + "|".join(rules) + "|")


RIGHT = (1, 3, 5, 6, 7)


def _line(cells: Sequence[str]) -> str:
    padded = [
        cell.rjust(width) if i in RIGHT else cell.ljust(width)
        for i, (cell, width) in enumerate(zip(cells, WIDTHS, strict=True))
    ]
    return "| " + " | ".join(padded) + " |"
