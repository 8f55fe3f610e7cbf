"""How fast is the direct sum? ``python -m benchmarks.direct`` prints ratios measured in this one run.

Baseline: the plain per-box reference of the tests, unchanged, at the non-singular ratio 103/71, all charges up to a
bound. Against it, with the same configurations: the fast sum at the same ratio, and the exact limit at the ratios 1
and 2, where single weights diverge and the plain sum cannot be evaluated. Calls of the library are timed whole, with
tables and reconstruction. Every time is a median of at least three; baseline and engine take turns.

``--quick`` stops at charge 16 and leaves the growth out. ``--json FILE`` writes the figures with the environment.
"""

from __future__ import annotations

# isort: off
import benchmarks.one_core  # before anything that imports numpy

# isort: on
import json
import os
import platform
import resource
import subprocess
import sys
import time
from collections.abc import Callable, Sequence
from dataclasses import asdict, dataclass
from importlib.metadata import version
from math import log
from pathlib import Path
from statistics import median
from typing import Any

import ratomega
from ratomega.case.setting import Setting, own_setting
from ratomega.diagrams.tuples import count_all
from ratomega.exact.rational import Rational
from ratomega.regulator.fast import fast_sum

sys.path.insert(0, str(Path(__file__).resolve().parent.parent / "tests"))

import plain

assert benchmarks.one_core

REPEATS = 3
NON_SINGULAR = "103/71"
TWO = ["3/11", "-3/11"]
THREE = ["3/13", "-5/17", "1/7"]
FLAVOURS = ["1/3", "2/5", "3/7", "1/2"]


@dataclass(frozen=True, slots=True)
class Row:
    """One ratio: the same configurations, plain and by the engine."""

    theory: str
    charge: int
    eps2: str
    configurations: int
    plain_seconds: float
    engine_seconds: float
    primes: int
    spare_bits: int

    @property
    def ratio(self) -> float:
        return self.plain_seconds / self.engine_seconds


@dataclass(frozen=True, slots=True)
class Growth:
    """One point of the growth of the engine's cost; the peak memory is that of a process of its own."""

    eps2: str
    charge: int
    configurations: int
    seconds: float
    primes: int
    peak_mib: float


def setting(coulomb: Sequence[str], flavours: Sequence[str], eps2: str) -> Setting:
    node: dict[str, Any] = {"coulomb": list(coulomb), "antifundamental": list(flavours)}
    return own_setting(ratomega.load_case({"charge": 1, "background": {"eps1": "1", "eps2": eps2}, "node": [node]}))


def theory(coulomb: Sequence[str], flavours: Sequence[str]) -> dict[str, Any]:
    def numbers(texts: Sequence[str]) -> list[Rational]:
        return [Rational(*map(int, text.split("/"))) for text in texts]

    node = {"coulomb": numbers(coulomb), "antifundamental": numbers(flavours)}
    return {"eps1": Rational(1), "eps2": Rational(103, 71), "nodes": [node], "edges": []}


def clock(action: Callable[[], object]) -> float:
    start = time.perf_counter()
    action()
    return time.perf_counter() - start


def plain_times(coulomb: Sequence[str], flavours: Sequence[str], bounds: Sequence[int]) -> dict[int, float]:
    """Seconds for all charges up to each bound, from one run up to the last of them."""
    given = theory(coulomb, flavours)
    total, found = 0.0, {}
    for k in range(max(bounds) + 1):
        total += clock(lambda k=k: plain.coefficient(given, (k,)))  # type: ignore[misc]
        if k in bounds:
            found[k] = total
    return found


def compare(name: str, coulomb: Sequence[str], flavours: Sequence[str], bounds: Sequence[int]) -> list[Row]:
    """The baseline and the engine at 103/71, 1 and 2, in turns."""
    plain_found: list[dict[int, float]] = []
    engine: dict[tuple[int, str], list[float]] = {}
    answers = {}
    for _ in range(REPEATS):
        plain_found.append(plain_times(coulomb, flavours, bounds))
        for eps2 in (NON_SINGULAR, "1", "2"):
            for charge in bounds:
                case = setting(coulomb, flavours, eps2)
                for _ in range(REPEATS):
                    start = time.perf_counter()
                    answers[charge, eps2] = fast_sum(case, charge)
                    engine.setdefault((charge, eps2), []).append(time.perf_counter() - start)
    check = plain.coefficient(theory(coulomb, flavours), (4,))
    if answers[bounds[0], NON_SINGULAR].coefficients[4] != check:
        raise RuntimeError(f"{name}: the engine and the plain reference disagree at charge 4")
    rows = []
    for charge in bounds:
        for eps2 in (NON_SINGULAR, "1", "2"):
            answer = answers[charge, eps2]
            rows.append(
                Row(
                    name,
                    charge,
                    eps2,
                    count_all([len(coulomb)], charge),
                    median(found[charge] for found in plain_found),
                    median(engine[charge, eps2]),
                    answer.primes,
                    min(answer.spare_bits),
                )
            )
    return rows


def growth_point(eps2: str, charge: int) -> Growth:
    """One measurement in this process; call it in a fresh one for the peak memory."""
    case = setting(TWO, [], eps2)
    start = time.perf_counter()
    answer = fast_sum(case, charge)
    seconds = time.perf_counter() - start
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
    return Growth(eps2, charge, count_all([2], charge), seconds, answer.primes, peak)


def growth(eps2: str, charge: int) -> Growth:
    """The median of three fresh processes, and the greatest peak memory among them."""
    points = []
    for _ in range(REPEATS):
        command = [sys.executable, "-m", "benchmarks.direct", "--point", eps2, str(charge)]
        done = subprocess.run(command, capture_output=True, text=True, check=True)
        points.append(Growth(**json.loads(done.stdout)))
    points.sort(key=lambda point: point.seconds)
    middle = points[len(points) // 2]
    return Growth(eps2, charge, middle.configurations, middle.seconds, middle.primes, max(p.peak_mib for p in points))


def exponent(points: Sequence[Growth]) -> float:
    """The least-squares slope of log(seconds) against log(configurations)."""
    x, y = [log(p.configurations) for p in points], [log(p.seconds) for p in points]
    mean_x, mean_y = sum(x) / len(x), sum(y) / len(y)
    up = sum((a - mean_x) * (b - mean_y) for a, b in zip(x, y, strict=True))
    return up / sum((a - mean_x) ** 2 for a in x)


def environment() -> dict[str, str]:
    packages = {name: version(name) for name in ("numpy", "python-flint")}
    return {
        "python": platform.python_version(),
        "machine": platform.machine(),
        "cores": str(os.cpu_count()),
        "ratomega": ratomega.__version__,
        **packages,
    }


def row_text(row: Row) -> str:
    return (
        f"{row.theory:<20} <= {row.charge:<3} {row.eps2:>7} {row.configurations:>8} {row.plain_seconds:>9.3f} s"
        f" {row.engine_seconds:>8.4f} s {row.ratio:>7.1f} {row.primes:>6} {row.spare_bits:>6}"
    )


def main(words: Sequence[str]) -> None:
    if words[:1] == ["--point"]:
        print(json.dumps(asdict(growth_point(words[1], int(words[2])))))
        return
    quick = "--quick" in words
    bounds = [16] if quick else [16, 20]
    print(", ".join(f"{key} {value}" for key, value in environment().items()))
    print(f"plain reference at eps2/eps1 = {NON_SINGULAR} against the engine; medians, one core\n")
    print(f"{'theory':<20} {'charges':<6} {'eps2':>7} {'weights':>8} {'plain':>11} {'engine':>10} {'ratio':>7}", end="")
    print(" primes  spare")
    rows = []
    for name, coulomb, flavours, tops in (
        ("U(2), no matter", TWO, [], bounds),
        ("U(2), four flavours", TWO, FLAVOURS, bounds),
        ("U(3), no matter", THREE, [], [8]),
    ):
        for row in compare(name, coulomb, flavours, tops):
            print(row_text(row), flush=True)
            rows.append(row)
    points = []
    if not quick:
        print("\ngrowth, U(2) without matter; every point in a process of its own")
        print(f"{'eps2':>7} {'charge':>6} {'weights':>8} {'seconds':>9} primes {'peak MiB':>9}")
        for eps2 in (NON_SINGULAR, "1", "2"):
            series = [growth(eps2, charge) for charge in (8, 12, 16, 20, 24)]
            for p in series:
                print(f"{p.eps2:>7} {p.charge:>6} {p.configurations:>8} {p.seconds:>9.3f}", end="")
                print(f" {p.primes:>6} {p.peak_mib:>9.0f}")
            print(f"{'':>7} seconds ~ weights^{exponent(series[2:]):.2f} from charge 16 on", flush=True)
            points += series
    if "--json" in words:
        document = {
            "environment": environment(),
            "rows": [asdict(row) | {"ratio": row.ratio} for row in rows],
            "growth": [asdict(point) for point in points],
        }
        Path(words[list(words).index("--json") + 1]).write_text(json.dumps(document, indent=1) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main(sys.argv[1:])
