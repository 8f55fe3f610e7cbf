"""The direct sum against the plainest one.

Baseline: the plain per-box reference of the tests, unchanged, at the non-singular ratio 103/71, all charges up to a
bound. Against it, with the same configurations, the direct sum at the same ratio, and the exact limit at the ratios 1
and 2, where single weights diverge and the plain sum cannot be evaluated. Both sides take turns.
"""

from __future__ import annotations

from collections.abc import Sequence
from types import ModuleType

import ratomega
from benchmarks.measure import RUNS, Pace, Report, Row, Times, plain_reference, timed
from benchmarks.theories import FLAVOURED, NON_SINGULAR, PURE, THREE, Theory, at, rational, rationals
from ratomega.exact.rational import ONE, Rational

QUESTION = f"the direct sum against the plain per-box sum at ratio {NON_SINGULAR}"
RATIOS = (NON_SINGULAR, "1", "2")


def ask(pace: Pace, report: Report) -> None:
    plain = plain_reference()
    two = (12,) if pace.quick else (16, 20)
    three = (4,) if pace.quick else (8,)
    for theory, charges in ((PURE, two), (FLAVOURED, two), (THREE, three)):
        compare(plain, theory, charges, report)


def plain_times(
    plain: ModuleType, theory: Theory, charges: Sequence[int]
) -> tuple[dict[int, Times], dict[int, Rational]]:
    """Times for all charges up to each bound, from one run up to the last of them; and the coefficients."""
    given = theory.plain(ONE, rational(NON_SINGULAR))
    total = Times(0, 0, RUNS)
    times: dict[int, Times] = {}
    values: dict[int, Rational] = {}
    for k in range(max(charges) + 1):
        one, values[k] = timed(plain.coefficient, given, (k,))
        total += one
        if k in charges:
            times[k] = total
    return times, values


def compare(plain: ModuleType, theory: Theory, charges: Sequence[int], report: Report) -> None:
    """Rounds of one plain run and one call for every charge and ratio."""
    theirs: dict[int, list[Times]] = {charge: [] for charge in charges}
    ours: dict[tuple[int, str], list[Times]] = {(charge, eps2): [] for charge in charges for eps2 in RATIOS}
    results = {}
    for _ in range(RUNS):
        found, values = plain_times(plain, theory, charges)
        for charge in charges:
            theirs[charge].append(found[charge])
        for charge, eps2 in ours:
            case = ratomega.load_case(theory.case(charge, eps2))
            one, results[charge, eps2] = timed(ratomega.limit, case, route="direct")
            ours[charge, eps2].append(one)
    for charge in charges:
        if rationals(results[charge, NON_SINGULAR]) != [values[k] for k in range(charge + 1)]:
            raise RuntimeError(f"{theory.name}: the two sums disagree")
    for (charge, eps2), times in ours.items():
        route = results[charge, eps2].route
        report.row(
            Row(
                at(theory, eps2),
                charge,
                "direct sum" if eps2 == NON_SINGULAR else "direct sum, exact limit",
                Times.middle(times),
                f"plain sum, ratio {NON_SINGULAR}",
                Times.middle(theirs[charge]),
                details={
                    "configurations": theory.configurations(charge),
                    "primes": route.primes,
                    "spare_bits": route.spare_bits,
                },
                headline=True,
            )
        )
