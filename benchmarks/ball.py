"""The exact limit against ball arithmetic a little away from it.

At ratio 1 and eps2 = 1 + delta sqrt(2) no denominator vanishes, so the plain product over boxes can be evaluated in
balls (arb). The total there differs from the limit by a term linear in delta, and the weights are as large as
delta^-d, d = floor(k/2) at ratio 1, which cancels in the total. With

    delta = 2^-n,  n = 2 bits(denominator of the limit) + MARGIN,
    working precision (d + 2) n + bits of the answer + MARGIN

(d n for what cancels in the total, n for what cancels in each factor of size delta, n for what is to be seen) the
continued fraction of the ball gives the limit back. The denominators are taken from the exact answer, charge by charge:
whoever has only balls must guess them, and a guess costs more.
"""

from __future__ import annotations

from collections.abc import Sequence
from types import ModuleType

import flint
from flint import arb, fmpq, fmpz

import ratomega
from benchmarks.measure import RUNS, Pace, Report, Row, Times, plain_reference, timed
from benchmarks.theories import PURE, Theory, at, rational, rationals
from ratomega.exact.rational import Rational

QUESTION = "the exact limit against ball arithmetic at eps2 = 1 + delta sqrt(2), the same rational recovered"
# Bits for what is multiplied by delta, and for rounding; also how sure the recovery is.
MARGIN = 64


def nearby_ball(plain: ModuleType, theory: Theory, charge: int, bits: int, precision: int) -> arb:
    """The coefficient at eps2 = 1 + 2^-bits sqrt(2), box by box; one division per weight."""
    with flint.ctx.workprec(precision):
        moved = arb(1) + arb(2).sqrt() * arb((fmpz(1), -bits))
        given = theory.plain(arb(1), moved, lambda text: arb(rational(text)))
        total = arb(0)
        for configuration in plain.configurations([len(theory.coulomb)], (charge,)):
            top, bottom = arb(1), arb(1)
            for factor, exponent in plain.factors(given, configuration):
                if exponent > 0:
                    top *= factor
                else:
                    bottom *= factor
            total += top / bottom
        return total


def recovered(ball: arb, tolerance_bits: int) -> Rational:
    """The first continued-fraction convergent of the centre within 2^-tolerance_bits.

    Raises ``RuntimeError`` when the ball is wider than that, or when the denominator found is too large for the
    tolerance to leave one answer.

    >>> recovered(arb(fmpq(22, 7) + fmpq(1, 2**40)), 30)
    22/7
    """
    tolerance = fmpq(1, fmpz(1) << tolerance_bits)
    if not ball.rad() < arb(tolerance):
        raise RuntimeError("the working precision did not survive the cancellation")
    mantissa, exponent = ball.mid().man_exp()
    centre = fmpq(mantissa << int(exponent)) if exponent >= 0 else fmpq(mantissa, fmpz(1) << -int(exponent))
    rest = centre
    before, here = (fmpz(0), fmpz(1)), (fmpz(1), fmpz(0))
    while True:
        whole = rest.floor()
        before, here = here, (whole * here[0] + before[0], whole * here[1] + before[1])
        found = fmpq(*here)
        if abs(found - centre) <= tolerance:
            break
        rest = 1 / (rest - whole)
    if 2 * found.q * found.q * (2 * tolerance) >= 1:
        raise RuntimeError("delta is too large for the denominator that was found")
    return found


def by_balls(plain: ModuleType, theory: Theory, charge: int, limit: Rational) -> Rational:
    """The limit at ratio 1 from balls; ``limit`` is looked at for the sizes of numerator and denominator alone."""
    bits = 2 * int(limit.q).bit_length() + MARGIN
    answer = max(0, int(limit.p).bit_length() - int(limit.q).bit_length())
    precision = (charge // 2 + 2) * bits + answer + MARGIN
    return recovered(nearby_ball(plain, theory, charge, bits, precision), bits - MARGIN // 2)


def series_by_balls(plain: ModuleType, limits: Sequence[Rational]) -> list[Rational]:
    return [by_balls(plain, PURE, k, value) for k, value in enumerate(limits)]


def ask(pace: Pace, report: Report) -> None:
    plain = plain_reference()
    for charge in (6,) if pace.quick else (8, 12):
        case = ratomega.load_case(PURE.case(charge, "1"))
        exact = rationals(ratomega.limit(case))
        ours, theirs = [], []
        for _ in range(RUNS):
            ours.append(timed(ratomega.limit, case, route="direct")[0])
            one, found = timed(series_by_balls, plain, exact)
            theirs.append(one)
            if found != exact:
                raise RuntimeError("a rational recovered from its ball is not the limit")
        row = Row(
            at(PURE, "1"),
            charge,
            "direct sum, exact limit",
            Times.middle(ours),
            "arb at 1 + delta sqrt(2), recovered",
            Times.middle(theirs),
            details={"denominator_bits": int(exact[-1].q).bit_length()},
            headline=charge == 12,
        )
        report.row(row)
