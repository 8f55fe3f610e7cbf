"""Single-entry: one coefficient is wrong and the rest is right; where it shows, how it was miswritten."""

from __future__ import annotations

from ratomega.exact.rational import Rational, decimal_text, exact_text
from ratomega.verify.explanation import Explanation
from ratomega.verify.given import Given, last_unit
from ratomega.verify.question import Question

__all__ = ["misprint", "single_entry"]

LEAST_DIGITS = 2
# With a digit too few or too many the last place stands for another power of ten.
SHIFTS = (Rational(1, 10), Rational(10))


def single_entry(question: Question) -> Explanation | None:
    """One row deviates, and at least one other that has something to say agrees."""
    deviating = question.deviating
    if len(deviating) != 1:
        return None
    row = deviating[0]
    telling = [one for one in question.rows if one is not row and any(one.charge)]
    if not telling:
        return None
    exact = question.exact[question.rows.index(row)]
    how = misprint(row, exact)
    shown = ",".join(str(k) for k in row.charge)
    right = right_text(row, exact)
    others = f"the other {len(telling)} above charge 0 agree" if len(telling) > 1 else "the other above charge 0 agrees"
    note = f" ({how})" if how else ""
    sentence = f"One coefficient is wrong, at charge {shown}: {row.text} should be {right}{note}; {others}."
    return Explanation(
        "single-entry", question.quantity.name, sentence,
        changes=(f"charge {shown}: {row.text} -> {right}",),
        parameters=(("right", right), *((("misprint", how),) if how else ())),
        charges=(row.charge,), fitted=1,
    )


def right_text(row: Given, exact: Rational) -> str:
    """The exact value in as many digits as were given."""
    return exact_text(exact) if row.digits is None else decimal_text(exact, row.digits)


def misprint(row: Given, exact: Rational) -> str:
    """What was miswritten: the sign, a power of ten, neighbouring digits exchanged, one digit; empty when it is none.

    It has to turn the given number into the right one to the digits given, and those must be two at least: one digit
    is turned into any other by one digit.

    >>> from ratomega.verify.table import read_table
    >>> [misprint(read_table({1: text}, ["g"])[0], Rational(5678, 10000)) for text in ("0.5768", "-0.5678", "0.5675")]
    ['neighbouring digits exchanged', 'the sign', 'one digit']
    """
    if sum(c.isdigit() for c in row.text.lower().partition("e")[0].lstrip("+-0.")) < LEAST_DIGITS:
        return ""
    if row.agrees(-exact) or row.value == -exact:
        return "the sign"
    if exact != 0:
        for power in (-3, -2, -1, 1, 2, 3):
            scale = Rational(10) ** power if power > 0 else 1 / Rational(10) ** -power
            if abs(row.value / scale - exact) <= row.tolerance / scale:
                return f"a factor {exact_text(scale)}"
    given, right = _digits(row, exact)
    if row.digits is not None and len(right.lstrip("0")) < LEAST_DIGITS:
        # Too small to show at the last place given.
        return ""
    if len(given) != len(right):
        return "one digit left out or added" if _one_more(given, right) else ""
    differ = [n for n, (a, b) in enumerate(zip(given, right, strict=True)) if a != b]
    if len(differ) == 1:
        return "one digit"
    if len(differ) == 2 and differ[1] == differ[0] + 1:
        n = differ[0]
        if given[n] == right[n + 1] and given[n + 1] == right[n]:
            return "neighbouring digits exchanged"
    if row.digits is not None and any(_one_more(given, _rounded(exact, last_unit(row.text) * u)) for u in SHIFTS):
        return "one digit left out or added"
    return ""


def _digits(row: Given, exact: Rational) -> tuple[str, str]:
    """The digits of the given number and those of the right one, to the same last place; of a fraction its text."""
    if row.digits is None:
        return row.text.lstrip("+-"), exact_text(exact).lstrip("-")
    unit = last_unit(row.text)
    given, right = _rounded(row.value, unit), _rounded(exact, unit)
    if row.value * exact < 0:
        return "", "the sign and more"
    width = max(len(given), len(right)) if abs(len(given) - len(right)) != 1 else 0
    return given.zfill(width), right.zfill(width)


def _rounded(value: Rational, unit: Rational) -> str:
    return str(int((abs(value) / unit + Rational(1, 2)).floor()))


def _one_more(one: str, other: str) -> bool:
    longer, shorter = (one, other) if len(one) > len(other) else (other, one)
    return len(longer) == len(shorter) + 1 and any(longer[:n] + longer[n + 1 :] == shorter for n in range(len(longer)))
