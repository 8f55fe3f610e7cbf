"""Offset: the numbers were taken near the limit point, at t = delta on the path or with another eps moved by delta.

The row that moves most for its precision gives delta, by the secant method with exact values; then the sum at this
delta must give every row, all orders in delta included. A short delta inside what the row allows (0.001, say) is
preferred. On top of another change the first two rows that say something must agree about delta before anything is
solved for: so many changes are tried.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import replace

from ratomega.case.background import Background
from ratomega.case.case import Case
from ratomega.case.setting import Setting, own_setting
from ratomega.exact.path import Linear
from ratomega.exact.rational import ONE, ZERO, Rational, decimal_text
from ratomega.verify.explanation import Explanation, enough_evidence
from ratomega.verify.given import Given
from ratomega.verify.question import Question
from ratomega.verify.rows import real_value
from ratomega.verify.series import Series
from ratomega.verify.source import Left, Source, moved

__all__ = ["Change", "Direction", "directions", "offset_at", "offsets", "pivots", "short_decimals", "solved"]

STEP = Rational(1, 10**20)
SECANT_STEPS = 15
SMALLEST = Rational(1, 10**40)
# An offset beyond this share of eps1 or eps2 is another background.
LARGEST_SHARE = Rational(1, 20)
MOST_PIVOTS = 3
MOST_SHORT_DIGITS = 3

Change = Callable[[Series, Setting], Series]

_Telling = tuple[Rational, int, Given, Rational, Rational]
"""How well a row resolves delta, minus its place, the row, its derivative, and by how much it deviates."""


class Direction:
    """Which way the background was moved, in words with the number left open, and the setting that moves so.

    The sums at every offset that is asked for are kept. ``left_out`` decides by the weights at the limit point.
    """

    def __init__(self, words: str, setting: Setting, left_out: Left | None = None) -> None:
        self.words = words
        self.setting = setting
        self._still = Source(setting)
        self._left_out = left_out
        self._known: dict[Rational, Source] = {}

    @property
    def whole(self) -> bool:
        """Is nothing left out?"""
        return self._left_out is None

    def at(self, delta: Rational) -> Source:
        """Z at an offset."""
        if delta not in self._known:
            chosen = self._left_out
            left: Left | None = None
            if chosen is not None:
                weights = self._still.weights
                left = lambda _, configuration: chosen(weights.weight(configuration), configuration)  # noqa: E731
            self._known[delta] = Source(moved(self.setting, delta), left_out=left)
        return self._known[delta]


def directions(case: Case, setting: Setting, left_out: Left | None = None) -> Iterator[Direction]:
    """The case's own path first; then eps2 and eps1 alone, where the case does not itself say what moves."""
    own = case.background
    simple = own.eps1.slope == 0 and own.eps2.slope == 1
    words = "eps2 moved by {}" if simple else "t = {} on the path of the case"
    yield Direction(words, setting, left_out)
    if any(x.t != 0 for _, x in case.theory.parameters()):
        return
    for name, slopes in (("eps2", (ZERO, ONE)), ("eps1", (ONE, ZERO))):
        if (own.eps1.slope, own.eps2.slope) != slopes:
            background = Background(Linear(own.eps1.constant, slopes[0]), Linear(own.eps2.constant, slopes[1]))
            yield Direction(f"{name} moved by {{}}", own_setting(replace(case, background=background)), left_out)


def offset_at(direction: Direction, delta: Rational, change: Change | None = None) -> tuple[Series, Setting]:
    """Z and the numbers of the theory at an offset."""
    source = direction.at(delta)
    return (source.z if change is None else change(source.z, source.setting)), source.setting


def offsets(
    question: Question,
    *,
    change: Change | None = None,
    words: tuple[str, ...] = (),
    tried: int = 3,
    ways: Sequence[Direction] | None = None,
) -> Iterator[Explanation]:
    """Offsets that explain all rows; on top of another change where there are ``words`` for it.

    ``change`` is what it does to Z; a change of the case is in the question. ``ways`` are the directions to try.
    """
    digits = question.digits
    if len(digits) < 2:
        # One number can always be fitted to one row.
        return
    if not enough_evidence(digits, fitted=1, tried=tried) and not enough_evidence(digits, fitted=0, tried=tried * 10):
        return
    for direction in directions(question.case, question.setting) if ways is None else ways:
        for pivot in pivots(question, direction, change, strict=bool(words)):
            found = _at_pivot(question, direction, pivot, change, tried)
            if found is not None:
                delta, free, predicted = found
                yield _explanation(question, direction, delta, free, predicted, words)
                break


def _at_pivot(
    question: Question, direction: Direction, pivot: Given, change: Change | None, tried: int
) -> tuple[Rational, bool, tuple[Rational, ...]] | None:
    solution = solved(question, direction, pivot, change)
    if solution is None:
        return None
    delta, uncertainty = solution
    for digits, short in short_decimals(delta, uncertainty):
        if enough_evidence(question.digits, fitted=0, tried=tried * 10 ** (digits + 1)):
            predicted = question.fit(*offset_at(direction, short, change))
            if predicted is not None:
                return short, False, predicted
    if not enough_evidence(question.digits, fitted=1, tried=tried):
        return None
    # The pivot moves most for its precision: within its uncertainty no other row moves by more than its own.
    extra = [row.tolerance for row in question.rows]
    predicted = question.fit(*offset_at(direction, delta, change), extra=extra)
    return None if predicted is None else (delta, True, predicted)


def short_decimals(delta: Rational, uncertainty: Rational) -> Iterator[tuple[int, Rational]]:
    """The shortest decimal of a few digits within the uncertainty, if any, with the number of its digits."""
    for digits in range(1, MOST_SHORT_DIGITS + 1):
        short = Rational(*_decimal(delta, digits))
        if short != 0 and abs(short - delta) <= uncertainty:
            yield digits, short
            return


def _decimal(value: Rational, digits: int) -> tuple[int, int]:
    exponent = 0
    while abs(value) * 10**exponent < 10 ** (digits - 1):
        exponent += 1
    return int((value * 10**exponent + Rational(1, 2)).floor()), 10**exponent


def pivots(
    question: Question, direction: Direction, change: Change | None = None, *, strict: bool = False
) -> list[Given]:
    """The rows that resolve delta best: the derivative over the tolerance, largest first.

    Empty where the derivatives say at once that there is no such delta: it is too large, or most rows deviate by
    another amount than the derivative makes them. ``strict``: the first two that deviate must say nearly the same.
    """
    still, moved_series = _here(question, direction, change), question.quantity.of(*offset_at(direction, STEP, change))
    found: list[_Telling] = []
    for n, row in enumerate(question.rows):
        b = question.value(still, row)
        if b is None or (strict and b != 0 and len(found) < 2 and abs(row.value - b) > abs(b) + row.tolerance):
            # No small offset doubles a coefficient.
            return []
        a = question.value(moved_series, row)
        if a is None:
            return []
        slope = (a - b) / STEP
        tolerance = row.tolerance if row.tolerance != 0 else Rational(1, 10**60)
        if slope != 0 and not row.agrees(b):
            found.append((abs(slope) / tolerance, -n, row, slope, row.value - b))
            if strict and len(found) <= 2 and not _of_one_mind(question, found):
                return []
    found.sort(key=lambda one: one[:2], reverse=True)
    # Near a resonance the derivative does not reach as far as delta: such a row is not the one to solve.
    return [row for _, _, row, slope, shift in found if _is_supported(shift / slope, question, found)][:MOST_PIVOTS]


def _is_supported(delta: Rational, question: Question, found: Sequence[_Telling]) -> bool:
    """Is this a small delta, at which the derivative moves half of the rows by what they deviate?"""
    alike = sum(1 for *_, row, slope, shift in found if abs(shift - slope * delta) <= abs(shift) / 2 + row.tolerance)
    return bool(abs(delta) <= 2 * _largest(question)) and 2 * alike >= len(found)


def _here(question: Question, direction: Direction, change: Change | None) -> Series:
    """The quantity at the limit point, from sums that are known already where nothing was left out."""
    z: Series = question.source.z if direction.whole else direction.at(ZERO).z
    return question.quantity.of(z if change is None else change(z, question.setting), question.setting)


def _of_one_mind(question: Question, found: Sequence[_Telling]) -> bool:
    """Do these rows ask for a small delta, and the last of them for nearly the same one as the first?"""
    deltas = [shift / slope for *_, slope, shift in found]
    if any(abs(delta) > 2 * _largest(question) for delta in deltas):
        return False
    (*_, row, slope, _), delta = found[-1], deltas[0]
    allowed = max(abs(x) for x in deltas) / 2 + abs(row.tolerance / slope)
    return abs(deltas[-1] - delta) <= allowed


def _largest(question: Question) -> Rational:
    e1, e2 = real_value(question.setting.eps1.constant), real_value(question.setting.eps2.constant)
    assert e1 is not None
    assert e2 is not None
    return LARGEST_SHARE * min(abs(e1), abs(e2))


def solved(
    question: Question, direction: Direction, pivot: Given, change: Change | None = None
) -> tuple[Rational, Rational] | None:
    """delta and its uncertainty from one row, by the secant method; None when it does not lead to a small delta."""

    def miss(delta: Rational) -> Rational | None:
        value = question.value(question.quantity.of(*offset_at(direction, delta, change)), pivot)
        return None if value is None else value - pivot.value

    largest = _largest(question)
    before, delta = ZERO, STEP
    miss_before, miss_here = miss(before), miss(delta)
    for _ in range(SECANT_STEPS):
        if miss_before is None or miss_here is None or miss_before == miss_here:
            return None
        slope = (miss_here - miss_before) / (delta - before)
        uncertainty = abs(pivot.tolerance / slope)
        correction = miss_here / slope
        rounding = max(SMALLEST, uncertainty / 10**4)
        places = 10 ** max(1, len(str(int((1 / rounding).floor()))))
        before, miss_before = delta, miss_here
        delta = Rational(((delta - correction) * places + Rational(1, 2)).floor(), places)
        if abs(delta) > largest:
            return None
        if abs(correction) <= max(uncertainty / 100, SMALLEST):
            return (delta, uncertainty) if delta != 0 else None
        miss_here = miss(delta)
    return None


def _explanation(
    question: Question,
    direction: Direction,
    delta: Rational,
    free: bool,
    predicted: tuple[Rational, ...],
    words: tuple[str, ...],
) -> Explanation:
    shown = decimal_text(delta, 6)
    change = direction.words.format(shown)
    orders = "" if words else _orders(question, direction, delta)
    also = f", and {' and '.join(words)}" if words else ""
    sentence = (
        f"The numbers were taken at an offset: {change}{also}; the exact sum there gives all {len(question.rows)} rows"
        f"{orders}."
    )
    return Explanation(
        "offset", question.quantity.name, sentence,
        changes=(change, *words),
        parameters=(("offset", decimal_text(delta, 15)),),
        charges=question.charges,
        length=1 + len(words),
        fitted=int(free),
        predicted=predicted,
    )


def _orders(question: Question, direction: Direction, delta: Rational) -> str:
    """How many rows need more than the derivative: the check of the next order."""
    near = question.quantity.of(*offset_at(direction, STEP))
    second = 0
    for row, exact in zip(question.rows, question.exact, strict=True):
        value = question.value(near, row)
        if value is not None and not row.agrees(exact + (value - exact) / STEP * delta):
            second += 1
    return f" (the first derivative alone would miss {second} of them)" if second else ""
