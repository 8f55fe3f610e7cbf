"""The same sum in ball arithmetic at irrational ratios close to the limit: how fast it gets there, and what it loses.

At t = delta sqrt(2) on the case's own path no ratio is rational, no weight is singular, and the sum can be evaluated
weight by weight, each a ball with a rigorous radius. It differs from the limit by z_1 t + z_2 t^2 + ..., whose first
coefficients the exact expansion knows; and where single weights grow like t^-d, d digits of every digit of 1/delta
cancel in the total.
"""

from __future__ import annotations

import time
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import ceil, isfinite, log2

from ratomega.chain.job import MOST_CONFIGURATIONS, CaseSource, Job
from ratomega.diagrams.tuples import Charge, configurations
from ratomega.errors import InputError
from ratomega.exact.balls import Ball, ball_of, ball_sum, extrapolated, irrational_offset
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ZERO, Rational, as_rational
from ratomega.regulator.limits import charge_limit
from ratomega.regulator.outcome import FiniteLimit
from ratomega.results.header import Header

__all__ = ["Approach", "ApproachCharge", "ApproachPoint", "approach", "checked_digits", "checked_offsets"]

DEFAULT_OFFSETS = ("1e-2", "1e-4", "1e-6", "1e-8")
DEFAULT_DIGITS = 30
MOST_OFFSETS = 50
MOST_DIGITS = 20_000
LEAST_DIGITS = 5
# How many terms of the exact expansion are set against the balls.
TERMS = 2
# An offset is a fraction 1/q or p/q of at most so many digits; smaller ones show nothing new.
SMALLEST_OFFSET = Rational(1, 10**1000)


@dataclass(frozen=True, slots=True)
class ApproachPoint:
    """One charge at one offset; sizes are texts of a few digits.

    ``distance`` from the exact limit, ``remainder`` from the exact expansion to t^2 at this t; ``lost``: decimal digits
    that cancel between the largest weight and the sum; ``needed``: digits of working precision below which rounding
    hides the distance from the limit; ``consistent``: the ball lies where the expansion says, as far as that goes.
    """

    offset: Rational
    value: str
    radius: str
    distance: str
    remainder: str
    lost: float
    needed: int
    consistent: bool
    seconds: float


@dataclass(frozen=True, slots=True)
class ApproachCharge:
    """One charge: the exact limit, the points, the order of convergence from the last two, the extrapolated value.

    ``singular`` weights and ``worst_order`` as the detector counts them; ``exact`` is None where there is no limit.
    ``extrapolated`` and ``left_over`` (its distance from the limit) use all offsets; None for a single one.
    """

    charge: Charge
    exact: Number | None
    exact_seconds: float
    singular: int
    worst_order: int
    points: tuple[ApproachPoint, ...]
    order: float | None
    extrapolated: str | None
    left_over: str | None


@dataclass(frozen=True, slots=True)
class Approach:
    """All charges, at the offsets and with the digits of working precision that were asked for."""

    header: Header
    digits: int
    charges: tuple[ApproachCharge, ...]
    partial: bool = False

    def __getitem__(self, charge: int | Charge) -> ApproachCharge:
        wanted = (charge,) if isinstance(charge, int) else tuple(charge)
        for one in self.charges:
            if one.charge == wanted:
                return one
        raise KeyError(charge)

    @property
    def nothing_lost(self) -> bool:
        """No weight is singular: sums near this ratio lose no digits to it."""
        return all(not one.worst_order for one in self.charges)

    @property
    def exit_status(self) -> int:
        """1 when a ball is not where the exact expansion says, or a limit does not exist; else 0."""
        fine = all(one.exact is not None and all(p.consistent for p in one.points) for one in self.charges)
        return 0 if fine else 1


def checked_offsets(offsets: Sequence[object]) -> tuple[Rational, ...]:
    """The offsets as exact numbers, descending. Raises ``InputError`` for none, too many, zero, or equal ones."""
    if not offsets or len(offsets) > MOST_OFFSETS:
        raise InputError.single(f"between 1 and {MOST_OFFSETS} offsets are taken, not {len(offsets)}", "offsets")
    read = sorted({as_rational(offset, "offsets") for offset in offsets}, key=abs, reverse=True)
    if len(read) != len(offsets):
        raise InputError.single("an offset is listed twice", "offsets")
    for offset in read:
        if offset == 0 or abs(offset) > 1 or abs(offset) < SMALLEST_OFFSET:
            message = f"an offset is not zero, at most 1 and at least 1e-1000 in size, not {offset}"
            raise InputError.single(message, "offsets")
    return tuple(read)


def checked_digits(digits: int) -> int:
    if not LEAST_DIGITS <= digits <= MOST_DIGITS:
        message = f"the working precision is between {LEAST_DIGITS} and {MOST_DIGITS} digits, not {digits}"
        raise InputError.single(message, "digits")
    return digits


def approach(
    source: CaseSource,
    *,
    offsets: Sequence[object] = DEFAULT_OFFSETS,
    digits: int = DEFAULT_DIGITS,
    allow_tilt: bool = True,
    most_configurations: int = MOST_CONFIGURATIONS,
) -> Approach:
    """Z at t = offset * sqrt(2) on the case's own path in ball arithmetic, beside the exact limit.

    ``offsets`` are exact numbers or decimal texts, ``digits`` the working precision in decimal digits. Seconds are
    those of this run. Raises ``InputError`` for bad input, and for cases with symbols or u. Cost: every offset is one
    pass over all weights, with one division each.

    >>> result = approach({"charge": 2, "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["1/3", "-1/3"]}]})
    >>> last = result[2].points[-1]
    >>> last.offset, last.lost > 8, last.consistent, result[2].order
    (1/100000000, True, True, 1.0)
    """
    job = Job.prepare(source, allow_tilt=allow_tilt, most_configurations=most_configurations, clusterwise=True)
    if job.functions is not None:
        raise InputError.single("balls are taken at numbers; give numbers for the symbols", "symbols")
    at, bits = checked_offsets(offsets), ceil(checked_digits(digits) * log2(10)) + 1
    return Approach(job.header, digits, tuple(_charge(job, charge, at, bits) for charge in job.case.charges))


def _charge(job: Job, charge: Charge, offsets: Sequence[Rational], bits: int) -> ApproachCharge:
    start = time.perf_counter()
    limit = charge_limit(job.weights, charge, last=TERMS)
    exact_seconds = time.perf_counter() - start
    exact = limit.own.value if isinstance(limit.outcome, FiniteLimit) else None
    powers = limit.terms(TERMS)
    points, balls, values = [], [], []
    for offset in offsets:
        point, ball, value = _point(job, charge, offset, bits, powers)
        points.append(point)
        balls.append(ball)
        values.append(value)
    order = left_over = through = None
    if len(values) > 1 and exact is not None:
        limit_ball = ball_of(exact, bits)
        order = _order(balls, [value.minus(limit_ball) for value in values])
        found = extrapolated(balls, values)
        through, left_over = found.text(), found.minus(limit_ball).size_text()
    counts = limit.sum.singular, limit.sum.worst_order
    return ApproachCharge(charge, exact, exact_seconds, *counts, tuple(points), order, through, left_over)


def _order(at: Sequence[Ball], distances: Sequence[Ball]) -> float | None:
    """The power of t with which the distance shrinks, from the last two offsets at which it exceeds its radius."""
    sharp = [(t, d) for t, d in zip(at, distances, strict=True) if d.radius_log10() < d.log10() - 1]
    if len(sharp) < 2:
        return None
    (t1, d1), (t2, d2) = sharp[-2:]
    return round((d2.log10() - d1.log10()) / (t2.log10() - t1.log10()), 3)


def _point(
    job: Job, charge: Charge, offset: Rational, bits: int, powers: Sequence[tuple[int, Number]]
) -> tuple[ApproachPoint, Ball, Ball]:
    start = time.perf_counter()
    at = irrational_offset(offset, bits)
    weights = job.weights
    total, largest = ball_sum(
        (weights.weight(configuration).parts for configuration in configurations(weights.setting.ranks, charge)), at
    )
    seconds = time.perf_counter() - start
    terms = dict(powers)
    distance = total.minus(ball_of(terms.get(0, ZERO), bits))
    foreseen = _expansion(terms, at)
    rest = total.minus(foreseen)
    # Beyond t^2 the next term decides: the expansion describes the ball while it leaves less than its last term moved.
    last = _expansion({n: z for n, z in terms.items() if n == TERMS}, at)
    bound = max(last.log10(), distance.log10() + at.log10(), total.radius_log10()) + 1
    moved = foreseen.minus(ball_of(terms.get(0, ZERO), bits))
    lost = _decades(largest, foreseen)
    needed = ceil(_decades(largest, moved))
    point = ApproachPoint(
        offset,
        total.text(),
        total.radius_text(),
        distance.size_text(),
        rest.size_text(),
        round(max(lost, 0.0), 1),
        max(needed, 0),
        rest.log10() <= bound,
        seconds,
    )
    return point, at, total


def _expansion(terms: Mapping[int, Number], at: Ball) -> Ball:
    """The sum of z_n t^n."""
    total = ball_of(ZERO, at.bits)
    for n, z in terms.items():
        term = ball_of(z, at.bits)
        for _ in range(abs(n)):
            term = term.times(at) if n > 0 else term.over(at)
        total = total.plus(term)
    return total


def _decades(large: Ball, small: Ball) -> float:
    """By how many digits one size exceeds another; 0 where one of them is nothing."""
    ratio = large.log10() - small.log10()
    return ratio if isfinite(ratio) else 0.0
