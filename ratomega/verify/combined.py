"""Two changes of different kinds: an offset, or precision lost at one, on top of a change of convention.

An offset can stand on every change: of the case, of q, of a U(1) factor or a scale (their number is fixed by one row at
every offset, so that one unknown is left to solve for), and on terms that were left out. What the sums at an offset
need is shared by all changes of Z. Of the many changes most fall with the first two rows.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

from ratomega.case.setting import Setting
from ratomega.exact.rational import Rational, decimal_text, exact_text
from ratomega.verify.case_edits import changed_lines
from ratomega.verify.convention import Variant, Variants
from ratomega.verify.dropped_singular import omissions
from ratomega.verify.explanation import Explanation, enough_evidence
from ratomega.verify.fitting import Fit, fitted_number, number_words
from ratomega.verify.given import Given
from ratomega.verify.offset import Change, Direction, directions, offset_at, offsets, pivots, short_decimals, solved
from ratomega.verify.precision_loss import precision_loss
from ratomega.verify.question import Question
from ratomega.verify.series import Series
from ratomega.verify.series_edits import (
    Family,
    SeriesEdit,
    families,
    fixed_edits,
    has_another_name,
    named_exponents,
)

__all__ = ["noisy_pairs", "offset_pairs"]

# Two changes are the best of so many at least.
MANY = 30
# Noise is looked for where the cheapest row is as near as this: offsets in floating point are small.
NEAR = Rational(1, 100)
# A number fitted together with another one is less certain than the rows say by themselves.
CARRIED = 1000


def offset_pairs(question: Question, variants: Variants) -> Iterator[Explanation]:
    """An offset and one other change."""
    singles = [*variants.singles(), *variants.twins()]
    tried = MANY + 3 * len(singles)
    if not enough_evidence(question.digits, fitted=0, tried=tried):
        return
    for variant in singles:
        for case, ways in variants.ways(variant):
            for found in offsets(_of(question, variant), words=variant.words, tried=tried, ways=ways):
                equal = tuple((*found.changes[:1], *other) for other in variant.others)
                yield replace(found, edits=changed_lines(question.case, case), equal=equal)
    ways = [way for _, some in variants.ways(variants.own) for way in some]
    for edit in fixed_edits(question.setting):
        for found in offsets(question, change=edit.apply, words=(edit.words,), tried=tried, ways=ways):
            yield replace(found, edits=(edit.advice,))
    for family in families(question.setting):
        for direction in ways:
            yield from _with_number(question, direction, family, tried)
    for omission in omissions():
        ways = list(directions(question.case, question.setting, omission.left_out))
        yield from offsets(question, words=(omission.words,), tried=tried, ways=ways)


def noisy_pairs(question: Question, variants: Variants) -> Iterator[Explanation]:
    """Precision lost at an offset, and one other change."""
    singles = [*variants.singles(), *variants.twins()]
    tried = MANY + len(singles)
    row = next((row for row in question.rows if any(row.charge)), None)
    if row is None:
        return
    for variant in singles:
        edited = _of(question, variant)
        if not _is_near(edited, row, None):
            continue
        for case, ways in variants.ways(variant):
            for found in precision_loss(edited, words=variant.words, tried=tried, way=ways[0]):
                yield replace(found, edits=changed_lines(question.case, case))
    ways = [way for _, some in variants.ways(variants.own) for way in some]
    for edit in _named_edits(question):
        if _is_near(question, row, edit.apply):
            for found in precision_loss(question, change=edit.apply, words=(edit.words,), tried=tried, way=ways[0]):
                yield replace(found, edits=(edit.advice,))


def _of(question: Question, variant: Variant) -> Question:
    """The same question about an edited case."""
    return replace(question, case=variant.case, setting=variant.setting, source=variant.source)


def _is_near(question: Question, row: Given, change: Change | None) -> bool:
    z: Series = question.source.z
    changed = z if change is None else change(z, question.setting)
    value = question.value(question.quantity.of(changed, question.setting), row)
    return value is not None and abs(row.value - value) <= NEAR * abs(value)


def _named_edits(question: Question) -> Iterator[SeriesEdit]:
    """The changes of Z without a free number, U(1) factors of an exponent with a meaning among them."""
    yield from fixed_edits(question.setting)
    for family in families(question.setting):
        if family.factor:
            for s, name in named_exponents(question.setting).items():
                words = f"a U(1) factor {family.words} with s = {name} = {exact_text(s)}"
                yield SeriesEdit(
                    words, f"{family.advice} (s = {exact_text(s)})", lambda z, _, f=family, n=s: f.build(z, n)  # type: ignore[misc]
                )


# ---- an offset, and a change with a number of its own ----


@dataclass(frozen=True, slots=True)
class _Eliminated:
    """A family of changes whose number is chosen, at every offset, so that one row comes out as given."""

    question: Question
    family: Family
    row: Given

    def number(self, z: Series, setting: Setting) -> Rational | None:
        start, after = (self._value(z, setting, self.family.neutral + n) for n in (0, 1))
        if start is None or after is None or start == after:
            return None
        return self.family.neutral + (self.row.value - start) / (after - start)

    def _value(self, z: Series, setting: Setting, s: Rational) -> Rational | None:
        return self.question.value(self.question.quantity.of(self.family.build(z, s), setting), self.row)

    def change(self, z: Series, setting: Setting) -> Series:
        s = self.number(z, setting)
        return self.family.build(z, self.family.neutral if s is None else s)


def _with_number(question: Question, direction: Direction, family: Family, tried: int) -> Iterator[Explanation]:
    if family.pivot is None and question.quantity.name in ("log", "prepotential"):
        return
    rows = (row for row in question.rows if row.value != 0 and family.pivot in (None, row.charge))
    fixing = next(rows, None)
    if fixing is None:
        return
    eliminated = _Eliminated(question, family, fixing)
    for pivot in pivots(question, direction, eliminated.change, strict=True):
        solution = solved(question, direction, pivot, eliminated.change)
        if solution is None:
            continue
        for delta, free, cost in _candidates(*solution):
            fit = _fitted(question, direction, family, fixing, delta, free)
            if fit is None:
                continue
            if has_another_name(family, direction.setting, fit.value, fit.uncertainty * CARRIED):
                # The fixed change was tried as well.
                return
            fitted = int(free) + int(fit.free)
            if enough_evidence(question.digits, fitted=fitted, tried=tried * 10 ** (cost + fit.cost)):
                yield _explanation(question, direction, family, fit, delta, fitted)
                return


def _candidates(delta: Rational, uncertainty: Rational) -> Iterator[tuple[Rational, bool, float]]:
    """Offsets to try: a short decimal, with what it costs to have chosen it; the fitted one, which counts as fitted."""
    # The number that was eliminated carries the rounding of its row into delta.
    for digits, short in short_decimals(delta, uncertainty * CARRIED):
        yield short, False, digits + 1
    yield delta, True, 0.0


def _fitted(
    question: Question, direction: Direction, family: Family, row: Given, delta: Rational, free: bool
) -> Fit | None:
    z, setting = offset_at(direction, delta)

    def build(s: Rational) -> tuple[Series, Setting]:
        return family.build(z, s), setting

    # The exponents of the offset numbers, or of those of the case.
    named = {**named_exponents(question.setting), **named_exponents(setting)} if family.factor else {}
    extra: Sequence[Rational] | None = [r.tolerance for r in question.rows] if free else None
    return fitted_number(question, build, row, neutral=family.neutral, named=named, extra=extra)


def _explanation(
    question: Question, direction: Direction, family: Family, fit: Fit, delta: Rational, fitted: int
) -> Explanation:
    number = number_words(fit.value, fit.uncertainty)
    s = f"{fit.name} = {number}" if fit.name else number
    words = f"{'a U(1) factor ' if family.factor else ''}{family.words} with s = {s}"
    change = direction.words.format(decimal_text(delta, 6))
    sentence = (
        f"The numbers were taken at an offset: {change}, and {words}; the exact sum there gives all "
        f"{len(question.rows)} rows."
    )
    return Explanation(
        "offset", question.quantity.name, sentence,
        changes=(change, words),
        edits=(f"{family.advice} (s = {number})",),
        parameters=(("offset", decimal_text(delta, 15)), ("s", number if fit.free else exact_text(fit.value))),
        charges=question.charges, length=2, fitted=fitted, predicted=fit.predicted,
    )
