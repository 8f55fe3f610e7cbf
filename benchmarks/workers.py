"""What do two workers gain over one? ``python -m benchmarks.workers``

One run of over twenty seconds with one worker process and the same with two, starting processes, sending and merging
included. The case is resonant, so that further paths are summed as well, all by the direct sum. Both answers must be the
same bytes.

Where other programs use the cores the figure says more about them than about the workers; the load is printed.
"""

from __future__ import annotations

import os
import time

import ratomega
from ratomega.pipeline import Job
from ratomega.workers.charges import cut

CASE = {
    "title": "two colours, two flavours, resonant",
    "charge": 12,
    "background": {"eps1": "1", "eps2": "1"},
    "node": [{"coulomb": ["1", "-1"], "antifundamental": ["1/2", "1/5"]}],
}
PROBES = 4


def measure(workers: int) -> tuple[float, str]:
    """Seconds of one run, and its answer."""
    start = time.perf_counter()
    answer = ratomega.to_json(ratomega.limit(CASE, probes=PROBES, workers=workers))
    return time.perf_counter() - start, answer


def main() -> None:
    job = Job.prepare(CASE)
    chunks = cut(job.case, job.setting, last=0, probes=PROBES, always_probe=False)
    load = ", ".join(f"{x:.1f}" for x in os.getloadavg())
    print(f"{job.case.title}, to charge {job.case.charge}: {len(chunks)} chunks; {os.cpu_count()} cores, load {load}")
    one, first = measure(1)
    print(f"one worker   {one:7.1f} s")
    two, second = measure(2)
    print(f"two workers  {two:7.1f} s")
    if first != second:
        raise SystemExit("the answers differ")
    print(f"one/two      {one / two:7.2f}, same bytes; load now {os.getloadavg()[0]:.1f}")


if __name__ == "__main__":
    main()
