"""One number fitted to the rows: found from one row where the prediction is linear in it, then tried on all others."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

from ratomega.case.setting import Setting
from ratomega.exact.rational import ZERO, Rational, decimal_text, exact_text
from ratomega.verify.explanation import size
from ratomega.verify.given import Given
from ratomega.verify.question import Question
from ratomega.verify.series import Series
from ratomega.verify.simplest import simplest_between

__all__ = ["Fit", "fitted_number", "number_words"]

# A fraction counts as meant when it is this many digits shorter than what was fitted could have been.
SHORTER_BY = 4.0


@dataclass(frozen=True, slots=True)
class Fit:
    """The number, its uncertainty (zero where it is exact), a name if it has one, and the predicted rows.

    ``free``: it is no simple number and counts as fitted; otherwise ``cost`` is what it costs to have chosen it.
    """

    value: Rational
    uncertainty: Rational
    name: str
    free: bool
    cost: float
    predicted: tuple[Rational, ...]


def fitted_number(
    question: Question,
    build: Callable[[Rational], tuple[Series, Setting]],
    pivot: Given,
    *,
    neutral: Rational,
    named: Mapping[Rational, str],
    extra: Sequence[Rational] | None = None,
) -> Fit | None:
    """The number with which ``build`` predicts all rows, None when there is none. ``pivot`` fixes it.

    ``extra`` is added to the tolerances: what another fitted number leaves open.
    """

    def at(s: Rational) -> Rational | None:
        z, setting = build(s)
        return question.value(question.quantity.of(z, setting), pivot)

    start, next_one = at(neutral), at(neutral + 1)
    if start is None or next_one is None or start == next_one or pivot.agrees(start):
        return None
    slope = next_one - start
    value = neutral + (pivot.value - start) / slope
    uncertainty = abs(pivot.tolerance / slope)
    low, high = value - uncertainty, value + uncertainty
    for known, name in named.items():
        if low <= known <= high:
            predicted = question.fit(*build(known), extra=extra)
            if predicted is not None:
                return Fit(known, ZERO, name, False, 1.0, predicted)
    simple = simplest_between(low, high)
    resolved = _resolved(value, uncertainty) if uncertainty != 0 else 30
    if size(simple) + SHORTER_BY <= resolved:
        predicted = question.fit(*build(simple), extra=extra)
        if predicted is not None:
            return Fit(simple, ZERO, "", False, size(simple), predicted)
    open_ = _sensitivity(question, build, value, uncertainty)
    if extra is not None:
        open_ = [a + b for a, b in zip(open_, extra, strict=True)]
    predicted = question.fit(*build(value), extra=open_)
    return None if predicted is None else Fit(value, uncertainty, "", True, 0.0, predicted)


def _sensitivity(
    question: Question, build: Callable[[Rational], tuple[Series, Setting]], value: Rational, uncertainty: Rational
) -> Sequence[Rational]:
    """How far the predictions move with the fitted number inside its uncertainty."""
    if uncertainty == 0:
        return [ZERO] * len(question.rows)
    found = []
    (one, setting), (two, _) = build(value), build(value + uncertainty)
    here, there = question.quantity.of(one, setting), question.quantity.of(two, setting)
    for row in question.rows:
        a, b = question.value(here, row), question.value(there, row)
        # A little more than linear.
        found.append(ZERO if a is None or b is None else abs(b - a) * 3 / 2)
    return found


def number_words(value: Rational, uncertainty: Rational, name: str = "") -> str:
    """A found number as text: exact where it is short, else a decimal.

    >>> number_words(Rational(-1, 2), ZERO), number_words(Rational(1, 3) + Rational(1, 10**9), Rational(1, 10**9))
    ('-1/2', '0.333333334')
    """
    if uncertainty == 0 and len(exact_text(value)) <= 40:
        return f"{name} = {exact_text(value)}" if name else exact_text(value)
    digits = 12
    if uncertainty != 0 and value != 0:
        digits = min(16, _resolved(value, uncertainty))
    return decimal_text(value, digits)


def _resolved(value: Rational, uncertainty: Rational) -> int:
    digits = 0
    while digits < 30 and uncertainty * 10 ** (digits + 1) <= abs(value) * 5:
        digits += 1
    return max(digits, 1)
