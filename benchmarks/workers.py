"""What two workers gain over one.

One run with one worker process and the same with two, starting processes, sending and merging included; over twenty
seconds with ``--long``. One case is resonant, so that no short cut applies and further paths are summed as well, all by
the sum over clusters; the other takes the fast sums, cut by primes, and proves what they find. Both answers must be the
same bytes.

These ratios alone are of elapsed seconds. Where other programs use the cores too, they say as much about those as about
the workers; hence the note on processor time, which does not depend on others: what two workers spent beyond one.
"""

from __future__ import annotations

import os
import resource
import time
from dataclasses import dataclass
from typing import Any

import ratomega
from benchmarks.measure import RUNS, Pace, Report, Row, Times, load
from ratomega.chain.job import Job

QUESTION = "two workers against one, the same bytes"


@dataclass(frozen=True, slots=True)
class Run:
    """A case at ratio 1 by the direct route, and the short cut that it takes, "" for none."""

    name: str
    node: dict[str, Any]
    short_cut: str
    options: dict[str, Any]

    def case(self, charge: int) -> ratomega.Case:
        return ratomega.load_case(
            {"charge": charge, "background": {"eps1": "1", "eps2": "1"}, "node": [self.node]}
        )


RESONANT = Run(
    "U(2), two flavours, resonant, ratio 1",
    {"coulomb": ["1", "-1"], "antifundamental": ["1/2", "1/5"]},
    "",
    {"probes": 4},
)
BY_PRIMES = Run("U(2), no matter, ratio 1, certified", {"coulomb": ["3/11", "-3/11"]}, "fast", {"certify": True})
MEASURED_ON_LONG = 23


def processor_seconds() -> float:
    """Of this process and of its children that have ended, which workers have when ``limit`` returns."""
    used = [resource.getrusage(who) for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN)]
    return sum(u.ru_utime + u.ru_stime for u in used)


def one_run(case: ratomega.Case, workers: int, options: dict[str, Any]) -> tuple[Times, str]:
    elapsed, processor = time.perf_counter(), processor_seconds()
    answer = ratomega.to_json(ratomega.limit(case, workers=workers, route="direct", **options))
    return Times(processor_seconds() - processor, time.perf_counter() - elapsed), answer


def ask(pace: Pace, report: Report) -> None:
    compare(RESONANT, 15 if pace.long else 6 if pace.quick else 10, pace, report)
    if pace.long:
        compare(BY_PRIMES, MEASURED_ON_LONG, pace, report)
    else:
        report.note("Starting processes weighs in so short a run; --long takes some of over twenty seconds.")


def compare(run: Run, charge: int, pace: Pace, report: Report) -> None:
    case = run.case(charge)
    if Job.prepare(case, route="direct", clusterwise=False).way.short_cut != run.short_cut:
        raise RuntimeError(f"{run.name}: another way is taken than the one that is to be measured")
    times: dict[int, list[Times]] = {1: [], 2: []}
    answers = set()
    for _ in range(RUNS):
        for workers, found in times.items():
            one, answer = one_run(case, workers, run.options)
            found.append(one)
            answers.add(answer)
    if len(answers) != 1:
        raise RuntimeError("the answers differ")
    one, two = Times.middle(times[1]), Times.middle(times[2])
    report.row(
        Row(
            run.name, charge, "two workers (elapsed)", two, "one worker (elapsed)", one,
            headline=pace.long, elapsed=True,
        )
    )
    report.note(
        f"Processor time, all processes: {one.processor:.1f} s with one worker, {two.processor:.1f} s with two; "
        f"{os.cpu_count()} cores, load {load()}."
    )
