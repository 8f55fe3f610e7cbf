"""The exact limit against computer algebra, as one would do it by hand.

The weights at ratio 1 are rational functions of eps2, built box by box; their sum is brought over one denominator,
cancelled, and eps2 = 1 is substituted.
"""

from __future__ import annotations

from types import ModuleType

import sympy

import ratomega
from benchmarks.measure import RUNS, Pace, Report, Row, Times, plain_reference, timed
from benchmarks.theories import PURE, Theory, at, rationals
from ratomega.exact.rational import Rational, as_rational

QUESTION = "the exact limit against sympy: the sum as a rational function of eps2, together, cancel, substitute"
# A run longer than this is not repeated.
PATIENCE = 60.0
# Runs of milliseconds: the median of so many, since three of them measure the start of the interpreter's own caches.
SHORT_RUNS = 25


def algebraic_limit(plain: ModuleType, theory: Theory, charge: int, ratio: int = 1) -> Rational:
    """One coefficient at eps2 = ratio."""
    eps2 = sympy.Symbol("eps2")
    given = theory.plain(sympy.Integer(1), eps2, sympy.Rational)
    weights = []
    for configuration in plain.configurations([len(theory.coulomb)], (charge,)):
        weight = sympy.Integer(1)
        for factor, exponent in plain.factors(given, configuration):
            weight *= factor**exponent
        weights.append(weight)
    total = sympy.cancel(sympy.together(sympy.Add(*weights)))
    return as_rational(total.subs(eps2, ratio))


def algebraic_series(plain: ModuleType, charge: int) -> list[Rational]:
    return [algebraic_limit(plain, PURE, k) for k in range(charge + 1)]


def ask(pace: Pace, report: Report) -> None:
    plain = plain_reference()
    charge = 3 if pace.quick else 5
    case = ratomega.load_case(PURE.case(charge, "1"))
    ours: list[Times] = []
    theirs: list[Times] = []
    for _ in range(SHORT_RUNS):
        ours.append(timed(ratomega.limit, case)[0])
    exact = rationals(ratomega.limit(case))
    while len(theirs) < RUNS:
        # Sympy remembers what it has computed.
        sympy.core.cache.clear_cache()
        one, found = timed(algebraic_series, plain, charge)
        theirs.append(one)
        if found != exact:
            raise RuntimeError("sympy and the engine disagree")
        if one.processor > PATIENCE:
            break
    row = Row(
        at(PURE, "1"),
        charge,
        "direct sum, exact limit",
        Times.middle(ours),
        "sympy, together and cancel",
        Times.middle(theirs),
        headline=True,
    )
    report.row(row)
    if len(theirs) < RUNS:
        report.note(f"sympy ran {len(theirs)} time, being longer than {PATIENCE:.0f} s.")
