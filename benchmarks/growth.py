"""How the cost of both routes grows with the charge; every point in processes of its own.

The direct sum runs over pairs of diagrams, whose number grows like exp(c sqrt(k)); the pole recursion costs a power
of the charge. The fits are least-squares lines through the logarithms of the seconds.
"""

from __future__ import annotations

from math import log, sqrt

from benchmarks.measure import Pace, Report, Row, alone, slope
from benchmarks.theories import NON_SINGULAR, PURE, at

QUESTION = "cost against the charge, both routes, with the fit"


def ask(pace: Pace, report: Report) -> None:
    direct = (12, 16) if pace.quick else (12, 16, 20, 24, 28) if pace.long else (12, 16, 20, 24)
    poles = (12, 20) if pace.quick else (12, 20, 30, 40, 60, 80) if pace.long else (12, 20, 30, 40, 60)
    fits = []
    for ratio in (NON_SINGULAR, "1"):
        seconds = series(report, ratio, "direct", direct)
        roots = slope([sqrt(k) for k in direct], seconds)
        weights = slope([log(PURE.configurations(k)) for k in direct], seconds)
        fits.append(
            f"Direct sum, ratio {ratio}: seconds ~ exp({roots:.2f} sqrt(k)) ~ weights^{weights:.2f}, "
            f"charges {direct[0]} to {direct[-1]}."
        )
    seconds = series(report, "1", "poles", poles)
    power = slope([log(k) for k in poles], seconds)
    last = slope([log(k) for k in poles[-2:]], seconds[-2:])
    fits.append(
        f"Pole route, ratio 1: seconds ~ k^{power:.2f}, charges {poles[0]} to {poles[-1]}; "
        f"k^{last:.2f} between the last two."
    )
    for fit in fits:
        report.note(fit)


def series(report: Report, ratio: str, route: str, charges: tuple[int, ...]) -> list[float]:
    """One row a charge; the logarithms of the seconds."""
    found = []
    for charge in charges:
        run = alone(PURE.case(charge, ratio), route=route, most_configurations=10**7)
        details = {"primes": run.primes, "spare_bits": run.spare_bits}
        if route == "direct":
            details["configurations"] = PURE.configurations(charge)
        call = "direct sum" if route == "direct" else "pole route"
        report.row(Row(at(PURE, ratio), charge, call, run.times, peak_mib=run.peak_mib, details=details))
        found.append(log(run.times.processor))
    return found
