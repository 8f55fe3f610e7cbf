"""The pole route of U(2): time, peak memory and growth with the charge.

``python -m benchmarks.poles`` runs every line in a process of its own with one BLAS thread; imports are not counted,
everything else is: planning, primes, reconstruction, dressing. Wall and processor time are medians of three (of one
with ``--quick``, which also leaves out the long lines). The growth is the slope of log(processor time) against
log(charge) by least squares over the charges of one theory.
"""

from __future__ import annotations

import argparse
import json
import math
import os
import platform
import resource
import subprocess
import sys
import time
from collections.abc import Sequence
from dataclasses import dataclass
from importlib.metadata import version
from statistics import median

from ratomega.exact.rational import Rational
from ratomega.regulator.pole_problem import PoleProblem, gauge_problem
from ratomega.regulator.poles import pole_coefficients

RUNS = 3


@dataclass(frozen=True, slots=True)
class Line:
    """One theory, the charges to run it at, and how."""

    name: str
    ratio: tuple[int, int]
    flavours: int
    charges: tuple[int, ...]
    options: dict[str, bool]

    def problem(self) -> PoleProblem:
        masses = [Rational(1, 2), Rational(1, 4), Rational(1, 5), Rational(1, 7)][: self.flavours]
        a = Rational(3, 11)
        return gauge_problem(Rational(self.ratio[0]), Rational(self.ratio[1]), (a, -a), antifundamental=masses)


LINES = (
    Line("no matter, ratio 1", (1, 1), 0, (20, 30, 40, 60, 80, 100), {}),
    Line("no matter, ratio 1, certified", (1, 1), 0, (20, 40, 60), {"certify": True}),
    Line("no matter, ratio 1, exact series", (1, 1), 0, (8, 12, 16, 20), {"exact": True}),
    Line("four flavours, ratio 1", (1, 1), 4, (20, 40, 60), {}),
    Line("no matter, ratio 2", (1, 2), 0, (20, 40, 60), {}),
    Line("no matter, ratio -2/3", (3, -2), 0, (20, 40, 60), {}),
    Line("no matter, ratio -1", (1, -1), 0, (20, 40, 60), {}),
)
QUICK_CHARGE = 40


@dataclass(frozen=True, slots=True)
class Measurement:
    seconds: float
    processor: float
    megabytes: float
    primes: int
    spare_bits: int | None
    digits: int


def measure_here(line: Line, charge: int) -> Measurement:
    """One run in this process, which should be fresh: the peak memory is that of the process."""
    problem = line.problem()
    wall, processor = time.perf_counter(), time.process_time()
    result = pole_coefficients(problem, charge, **line.options)
    wall, processor = time.perf_counter() - wall, time.process_time() - processor
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / (2**20 if sys.platform == "darwin" else 2**10)
    bits = int(result.coefficients[-1].p).bit_length() + int(result.coefficients[-1].q).bit_length()
    return Measurement(wall, processor, peak, result.primes, result.spare_bits, int(bits * math.log10(2)) + 1)


def measure(index: int, charge: int, runs: int) -> Measurement:
    """The medians of several runs, each in a process of its own."""
    found = []
    for _ in range(runs):
        command = [sys.executable, "-m", "benchmarks.poles", "--one", str(index), str(charge)]
        done = subprocess.run(
            command, check=True, capture_output=True, text=True, env={**os.environ, "OPENBLAS_NUM_THREADS": "1"}
        )
        found.append(Measurement(**json.loads(done.stdout)))
    return Measurement(
        median(m.seconds for m in found),
        median(m.processor for m in found),
        max(m.megabytes for m in found),
        found[0].primes,
        found[0].spare_bits,
        found[0].digits,
    )


def slope(charges: Sequence[int], seconds: Sequence[float]) -> float:
    """The exponent of a power law through the points, by least squares of the logarithms."""
    x, y = [math.log(k) for k in charges], [math.log(s) for s in seconds]
    middle, height = sum(x) / len(x), sum(y) / len(y)
    return sum((a - middle) * (b - height) for a, b in zip(x, y, strict=True)) / sum((a - middle) ** 2 for a in x)


def main() -> None:
    parser = argparse.ArgumentParser(description="Time, memory and growth of the pole route.")
    parser.add_argument("--quick", action="store_true", help=f"one run each, charges up to {QUICK_CHARGE}")
    parser.add_argument("--one", nargs=2, type=int, metavar=("LINE", "CHARGE"), help="one run in this process, as JSON")
    options = parser.parse_args()
    if options.one:
        result = measure_here(LINES[options.one[0]], options.one[1])
        print(json.dumps({name: getattr(result, name) for name in Measurement.__slots__}))
        return
    packages = ", ".join(f"{name} {version(name)}" for name in ("ratomega", "numpy", "python-flint"))
    print(f"Python {platform.python_version()}, {platform.machine()}; {packages}; one BLAS thread")
    runs = 1 if options.quick else RUNS
    print(f"{'theory':34} {'charge':>6} {'wall s':>8} {'cpu s':>8} {'peak MB':>8} {'primes':>7} {'spare bits':>10} "
          f"{'digits':>7}")
    for index, line in enumerate(LINES):
        charges = [k for k in line.charges if not options.quick or k <= QUICK_CHARGE]
        seconds = []
        for charge in charges:
            m = measure(index, charge, runs)
            seconds.append(m.processor)
            spare = "-" if m.spare_bits is None else str(m.spare_bits)
            print(f"{line.name:34} {charge:6} {m.seconds:8.2f} {m.processor:8.2f} {m.megabytes:8.0f} {m.primes:7} "
                  f"{spare:>10} {m.digits:7}", flush=True)
        exponent = slope(charges, seconds)
        print(f"{'':34} growth: cpu time ~ charge^{exponent:.1f} over charges {charges[0]}-{charges[-1]}")


if __name__ == "__main__":
    main()
