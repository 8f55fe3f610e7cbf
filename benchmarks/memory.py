"""The peak memory of the direct sum, interpreter and libraries included, in a process of its own."""

from __future__ import annotations

from benchmarks.measure import Pace, Report, Row, alone
from benchmarks.theories import NON_SINGULAR, PURE, at

QUESTION = "the peak memory of the direct sum"


def ask(pace: Pace, report: Report) -> None:
    charge = 12 if pace.quick else 24
    for ratio in ("1",) if pace.quick else (NON_SINGULAR, "1", "2"):
        run = alone(PURE.case(charge, ratio), route="direct")
        details = {"configurations": PURE.configurations(charge)}
        row = Row(
            at(PURE, ratio), charge, "direct sum", run.times, peak_mib=run.peak_mib, details=details, headline=True
        )
        report.row(row)
