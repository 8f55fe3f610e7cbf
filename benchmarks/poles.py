"""The pole route of U(2): against the direct sum where both run, and how far it goes alone.

Charges of which the direct sum is far away have no baseline: there stand seconds and peak memory, every run in a
process of its own.
"""

from __future__ import annotations

import ratomega
from benchmarks.measure import RUNS, Pace, Report, Row, Times, alone, timed
from benchmarks.theories import FLAVOURED, PURE, Theory, at, rationals

QUESTION = "the pole route against the direct sum, and far beyond it"


def ask(pace: Pace, report: Report) -> None:
    for charge in (12,) if pace.quick else (12, 16, 20, 24):
        for theory in (PURE,) if pace.quick else (PURE, FLAVOURED):
            both(theory, charge, report, headline=charge == 24)
    far(PURE, "1", "1", (20,) if pace.quick else (40, 60, 100) if pace.long else (40, 60), report)
    if pace.quick:
        return
    far(FLAVOURED, "1", "1", (40, 60), report)
    far(PURE, "3", "-2", (40, 60), report)
    far(PURE, "1", "2", (40, 60), report)


def both(theory: Theory, charge: int, report: Report, *, headline: bool) -> None:
    """The two routes in turn."""
    case = ratomega.load_case(theory.case(charge, "1"))
    times: dict[str, list[Times]] = {"poles": [], "direct": []}
    values = {}
    for _ in range(RUNS):
        for route, found in times.items():
            one, result = timed(ratomega.limit, case, route=route)
            found.append(one)
            values[route] = rationals(result)
        if values["poles"] != values["direct"]:
            raise RuntimeError("the two routes disagree")
    row = Row(
        at(theory, "1"),
        charge,
        "pole route",
        Times.middle(times["poles"]),
        "direct sum, exact limit",
        Times.middle(times["direct"]),
        headline=headline,
    )
    report.row(row)


def far(theory: Theory, eps1: str, eps2: str, charges: tuple[int, ...], report: Report) -> None:
    ratio = eps2 if eps1 == "1" else f"{eps2}/{eps1}"
    for charge in charges:
        run = alone(theory.case(charge, eps2, eps1), route="poles")
        details = {"primes": run.primes, "spare_bits": run.spare_bits}
        row = Row(
            at(theory, ratio), charge, "pole route", run.times, peak_mib=run.peak_mib, details=details, headline=True
        )
        report.row(row)
