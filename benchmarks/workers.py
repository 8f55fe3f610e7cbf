"""What do two workers gain over one? ``python -m benchmarks.workers``

One run of over twenty seconds with one worker process and the same with two, starting processes, sending and merging
included. The case is resonant, so that further paths are summed as well, all by the direct sum. Both answers must be
the same bytes.

Where other programs use the cores too, elapsed times say as much about them as about the workers. Hence the load is
printed, and the processor time of this process and of its workers: what does not depend on others.
"""

from __future__ import annotations

import os
import resource
import time
from dataclasses import dataclass

import ratomega
from ratomega.pipeline import Job
from ratomega.workers.charges import cut

CASE = {
    "title": "two colours, two flavours, resonant",
    "charge": 15,
    "background": {"eps1": "1", "eps2": "1"},
    "node": [{"coulomb": ["1", "-1"], "antifundamental": ["1/2", "1/5"]}],
}
PROBES = 4


@dataclass(frozen=True, slots=True)
class Run:
    """One run: elapsed seconds, processor seconds here and in the workers, and the answer."""

    seconds: float
    here: float
    there: float
    answer: str

    def text(self, name: str) -> str:
        spent = f"{self.there:.1f} s in workers, {self.here:.1f} s here"
        return f"{name:<12}{self.seconds:8.1f} s elapsed; processor time {spent}"


def processor_time(who: int) -> float:
    used = resource.getrusage(who)
    return used.ru_utime + used.ru_stime


def measure(workers: int) -> Run:
    """Children are counted when they have ended, which they have by then."""
    start = time.perf_counter()
    before = [processor_time(who) for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN)]
    answer = ratomega.to_json(ratomega.limit(CASE, probes=PROBES, workers=workers))
    after = [processor_time(who) for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN)]
    return Run(time.perf_counter() - start, after[0] - before[0], after[1] - before[1], answer)


def main() -> None:
    job = Job.prepare(CASE)
    chunks = cut(job.case, job.setting, last=0, probes=PROBES, always_probe=False)
    load = ", ".join(f"{x:.1f}" for x in os.getloadavg())
    print(f"{job.case.title}, to charge {job.case.charge}: {len(chunks)} chunks; {os.cpu_count()} cores, load {load}")
    one = measure(1)
    print(one.text("one worker"), flush=True)
    two = measure(2)
    print(two.text("two workers"))
    if one.answer != two.answer:
        raise SystemExit("the answers differ")
    print(f"one/two     {one.seconds / two.seconds:8.2f}, same bytes; load now {os.getloadavg()[0]:.1f}")


if __name__ == "__main__":
    main()
