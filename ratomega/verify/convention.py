"""Convention: the numbers are right in another convention. Single changes first, then pairs.

Edits of the case are tried on the cheapest rows first; most candidates fall at charge 1. Those that lead to a theory
already tried, to the case itself among them, are not tried again. Every candidate predicts every row; changes of Z
with a free number (an exponent, a scale) fix it from one row.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

from ratomega.case.case import Case
from ratomega.case.setting import Setting, own_setting
from ratomega.diagrams.tuples import count_configurations
from ratomega.errors import PathError
from ratomega.exact.rational import Rational, exact_text
from ratomega.verify.case_edits import CaseEdit, case_edits, changed_lines, theory_key
from ratomega.verify.dropped_singular import omissions
from ratomega.verify.explanation import Explanation, enough_evidence
from ratomega.verify.fitting import fitted_number, number_words
from ratomega.verify.offset import Direction, directions
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
from ratomega.verify.source import NoLimitError, Source

__all__ = ["Variant", "Variants", "pairs", "singles"]

# Bounds on the search: theories that are tried, and configurations that are summed for the first row of each.
MOST_THEORIES = 3000
MOST_FIRST_CONFIGURATIONS = 30_000


@dataclass(frozen=True, slots=True)
class Variant:
    """The case after some edits, with Z of its own; ``words`` has one entry an edit, ``others`` its other names.

    ``typed`` is the case with eps1 + eps2 in its edit as a number, where that is another one.
    """

    words: tuple[str, ...]
    others: tuple[tuple[str, ...], ...]
    case: Case
    setting: Setting
    source: Source
    omitted: bool = False
    typed: Case | None = None


class Variants:
    """Edited cases, each theory once, by the number of edits; made when they are asked for."""

    def __init__(self, question: Question) -> None:
        self.case = question.case
        self._own = Variant((), (), question.case, question.setting, question.source)
        self._edits = list(case_edits(question.case))
        self._known: dict[tuple[object, ...], int] = {theory_key(question.setting): -1}
        self._singles: list[Variant] | None = None
        self._pairs: list[Variant] | None = None
        self._twins: list[Variant] = []
        # By identity: variants are kept as long as this is.
        self._ways: dict[int, list[tuple[Case, list[Direction]]]] = {}
        # A row above charge 0 that costs least decides how many pairs can be afforded.
        first = next((row for row in question.rows if any(row.charge)), question.rows[0])
        configurations = count_configurations(question.setting.ranks, first.charge)
        self._most = min(MOST_THEORIES, MOST_FIRST_CONFIGURATIONS // max(configurations, 1))
        self.left_out = 0

    @property
    def own(self) -> Variant:
        return self._own

    def singles(self) -> list[Variant]:
        """One edit each."""
        if self._singles is None:
            self._singles = self._made([(edit,) for edit in self._edits])
        return self._singles

    def twins(self) -> list[Variant]:
        """Edits that are symmetries of the case, with eps1 + eps2 typed as a number: another theory at an offset."""
        self.singles()
        return self._twins

    def pairs(self) -> list[Variant]:
        """Two edits that touch different places."""
        if self._pairs is None:
            self.singles()
            chosen = [
                (one, two)
                for n, one in enumerate(self._edits)
                for two in self._edits[n + 1 :]
                if not one.places & two.places
            ]
            self.left_out = max(0, len(chosen) - self._most)
            self._pairs = self._made(chosen[: self._most])
        return self._pairs

    def ways(self, of: Variant) -> list[tuple[Case, list[Direction]]]:
        """The directions of an offset, whose sums all questions share, for the case and for the typed one."""
        if id(of) not in self._ways:
            self._ways[id(of)] = []
            for case in (of.case, *([] if of.typed is None else [of.typed])):
                try:
                    self._ways[id(of)].append((case, list(directions(case, own_setting(case)))))
                except PathError:
                    continue
        return self._ways[id(of)]

    def _made(self, chosen: Sequence[tuple[CaseEdit, ...]]) -> list[Variant]:
        found: list[Variant] = []
        for edits in chosen:
            edited = self.case
            for edit in edits:
                edited = edit.apply(edited)
            try:
                setting = own_setting(edited)
            except PathError:
                continue
            key = theory_key(setting)
            words = tuple(edit.words for edit in edits)
            place = self._known.get(key)
            typed = edits[0].typed(self.case) if len(edits) == 1 and edits[0].typed else None
            if place == -1 and typed is not None:
                self._twins.append(Variant(words, (), typed, own_setting(typed), self._own.source))
            if place is None:
                self._known[key] = len(found)
                found.append(Variant(words, (), edited, setting, Source(setting), typed=typed))
            elif 0 <= place < len(found) and len(found[place].words) == len(words):
                same = found[place]
                if theory_key(same.setting) == key:
                    found[place] = replace(same, others=(*same.others, words))
        return found


def singles(question: Question, variants: Variants) -> Iterator[Explanation]:
    """One change: of the case, of q, a U(1) factor, the normalisation."""
    tried = len(variants.singles()) + 20
    digits = question.digits
    if enough_evidence(digits, fitted=0, tried=tried):
        for variant in variants.singles():
            predicted = question.fit(variant.source.z, variant.setting)
            if predicted is not None:
                yield _of_case(question, variant, predicted)
        for edit in fixed_edits(question.setting):
            predicted = _fit_edits(question, variants.own, [edit])
            if predicted is not None:
                yield _of_series(question, variants.own, [edit], predicted)
    yield from _fitted(question, variants.own, [], tried)


def pairs(question: Question, variants: Variants) -> Iterator[Explanation]:
    """Two changes: of the case twice, of the case and of Z, of Z twice, or singular terms left out and one of Z."""
    digits = question.digits
    fixed = list(fixed_edits(question.setting))
    tried = len(variants.pairs()) + len(variants.singles()) * 30
    if enough_evidence(digits, fitted=0, tried=tried):
        for variant in variants.pairs():
            predicted = question.fit(variant.source.z, variant.setting)
            if predicted is not None:
                yield _of_case(question, variant, predicted)
        for variant in variants.singles():
            for omitted in _omitted(variant):
                predicted = question.fit(omitted.source.z, omitted.setting)
                if predicted is not None:
                    yield _of_case(question, omitted, predicted)
        for variant in [*variants.singles(), *_omitted(variants.own)]:
            for edit in fixed:
                predicted = _fit_edits(question, variant, [edit])
                if predicted is not None:
                    yield _of_series(question, variant, [edit], predicted)
        for n, one in enumerate(fixed):
            for two in fixed[n + 1 :]:
                predicted = _fit_edits(question, variants.own, [one, two])
                if predicted is not None:
                    yield _of_series(question, variants.own, [one, two], predicted)
    for variant in [*variants.singles(), *_omitted(variants.own)]:
        yield from _fitted(question, variant, [], tried)
    for edit in fixed:
        yield from _fitted(question, variants.own, [edit], tried)


def _omitted(of: Variant) -> list[Variant]:
    """The same with terms left out."""
    return [
        Variant(
            (omission.words, *of.words), tuple((omission.words, *other) for other in of.others),
            of.case, of.setting, Source(of.setting, left_out=omission.left_out), omitted=True,
        )
        for omission in omissions()
    ]


def _edited(z: Series, setting: Setting, edits: list[SeriesEdit]) -> Series:
    for edit in edits:
        z = edit.apply(z, setting)
    return z


def _fit_edits(question: Question, variant: Variant, edits: list[SeriesEdit]) -> tuple[Rational, ...] | None:
    return question.fit(_edited(variant.source.z, variant.setting, edits), variant.setting)


def _fitted(question: Question, variant: Variant, edits: list[SeriesEdit], tried: int) -> Iterator[Explanation]:
    """Changes with one free number on top of others."""
    digits = question.digits
    # One number can always be fitted to one row, unless it is one that has a meaning.
    alone = len(digits) < 2
    rows = {row.charge: row for row in question.rows}
    named = named_exponents(question.setting)
    z = _edited(variant.source.z, variant.setting, edits)
    for family in families(question.setting):
        if family.pivot is None:
            if question.quantity.name in ("log", "prepotential"):
                continue
            pivot = next((row for row in question.rows if row.value != 0), None)
        else:
            pivot = rows.get(family.pivot)
        if pivot is None:
            continue

        def build(s: Rational, family: Family = family) -> tuple[Series, Setting]:
            return family.build(z, s), variant.setting

        try:
            fit = fitted_number(question, build, pivot, neutral=family.neutral, named=named if family.factor else {})
        except NoLimitError:
            continue
        if fit is None or has_another_name(family, variant.setting, fit.value, fit.uncertainty):
            continue
        if alone and not fit.name:
            continue
        if fit.free and not enough_evidence(digits, fitted=1, tried=tried):
            continue
        if not fit.free and not enough_evidence(digits, fitted=0, tried=tried * 10**fit.cost):
            continue
        number = number_words(fit.value, fit.uncertainty)
        shown = f"{fit.name} = {number}" if fit.name else number
        words = f"a U(1) factor {family.words}" if family.factor else family.words
        change = f"{words} with s = {shown}"
        advice = f"{family.advice} (s = {number})"
        found = _explanation(
            question, (*variant.words, *(e.words for e in edits), change), variant,
            (*(e.advice for e in edits), advice), fit.predicted,
        )
        yield replace(
            found,
            parameters=(("s", number if fit.free else exact_text(fit.value)),),
            fitted=int(fit.free),
        )


def _of_case(question: Question, variant: Variant, predicted: tuple[Rational, ...]) -> Explanation:
    return _explanation(question, variant.words, variant, (), predicted)


def _of_series(
    question: Question, variant: Variant, edits: list[SeriesEdit], predicted: tuple[Rational, ...]
) -> Explanation:
    words = (*variant.words, *(edit.words for edit in edits))
    return _explanation(question, words, variant, tuple(edit.advice for edit in edits), predicted)


def _explanation(
    question: Question,
    words: tuple[str, ...],
    variant: Variant,
    advice: tuple[str, ...],
    predicted: tuple[Rational, ...],
) -> Explanation:
    tail = words[len(variant.words) :]
    equal = tuple((*other, *tail) for other in variant.others)
    if variant.omitted:
        said = f"In the numbers {words[0]}, and they belong to another convention: {' and '.join(words[1:])}"
    else:
        said = f"The numbers belong to another convention: {' and '.join(words)}"
    rows, deviate = len(question.rows), len(question.deviating)
    sentence = f"{said}; this gives all {rows} rows, of which {deviate} deviate without it."
    kind = "dropped-singular" if variant.omitted else "convention"
    return Explanation(
        kind, question.quantity.name, sentence,
        changes=words, edits=(*changed_lines(question.case, variant.case), *advice), equal=equal,
        charges=question.charges, length=len(words), predicted=predicted,
    )
