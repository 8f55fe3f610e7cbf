"""The diagnosis: hypotheses in the order of their simplicity, for every quantity that the numbers may be.

First one change (an offset, terms left out, one change of convention), then one wrong entry or lost precision, then two
changes, last precision lost on top of another change. The first of these stages that explains the rows ends the search;
everything that it found is given, what fits without a fitted number first. Explanations that predict the same numbers
in every row are one, under several names.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import replace

from ratomega.diagrams.tuples import count_configurations
from ratomega.verify.combined import noisy_pairs, offset_pairs
from ratomega.verify.convention import Variants, pairs, singles
from ratomega.verify.dropped_singular import dropped
from ratomega.verify.explanation import Explanation
from ratomega.verify.offset import offsets
from ratomega.verify.precision_loss import precision_loss
from ratomega.verify.question import Question
from ratomega.verify.single_entry import single_entry

__all__ = ["diagnose"]

MOST_EXPLANATIONS = 8
# Noise is added up from single weights and two changes make thousands of hypotheses: both are tried where the two
# cheapest rows have no more configurations than this.
MOST_FOR_ALL = 200

_Found = tuple[Question, Explanation]
"""An explanation, and the question that it answers."""


def diagnose(questions: Sequence[Question], whole: Sequence[Question]) -> tuple[Explanation, ...]:
    """The explanations, the simplest first; the questions differ in the quantity alone. Never empty.

    ``questions`` have the rows that can be afforded, ``whole`` all rows: of those only what is known already is asked.
    """
    asked = [question for question in questions if question.deviating]
    if not asked:
        entries = [(one, found) for one in whole for found in [single_entry(one)] if found is not None]
        return _sorted(entries, whole) if entries else (_too_high(questions[0], whole[0]),)
    variants = Variants(asked[0])
    full = {question.quantity: question for question in whole}
    found: list[_Found] = []
    affordable = _first_cost(asked[0]) <= MOST_FOR_ALL
    further = (_lost_precision, pairs, offset_pairs, noisy_pairs) if affordable else ()
    for stage in (_one_change, _one_entry, *further):
        for question in asked:
            rows = full[question.quantity] if stage is _one_entry else question
            found += [(question, explanation) for explanation in stage(rows, variants)]
        # Two changes of convention with a number that was found may as well be an offset and one change.
        if found and (stage is not pairs or any(not explanation.parameters for _, explanation in found)):
            return _sorted(found, asked)
    return (_unexplained(asked[0], variants, affordable=affordable),)


def _first_cost(question: Question) -> int:
    """The configurations of the two cheapest rows above charge 0: with them nearly every hypothesis stands or falls."""
    rows = [row for row in question.rows if any(row.charge)][:2]
    return sum(count_configurations(question.setting.ranks, row.charge) for row in rows)


def _one_change(question: Question, variants: Variants) -> Iterator[Explanation]:
    yield from offsets(question)
    yield from dropped(question, tried=2)
    yield from singles(question, variants)


def _one_entry(question: Question, _: Variants) -> Iterator[Explanation]:
    found = single_entry(question)
    if found is not None:
        yield found


def _lost_precision(question: Question, _: Variants) -> Iterator[Explanation]:
    yield from precision_loss(question)


def _sorted(found: Iterable[_Found], questions: Sequence[Question]) -> tuple[Explanation, ...]:
    order = [question.quantity for question in questions]
    ranked = sorted(found, key=lambda one: (one[1].rank, order.index(one[0].quantity)))
    kept: list[_Found] = []
    places: dict[tuple[object, ...], int] = {}
    for question, one in ranked:
        # Noise predicts no numbers: it is known by its words, whatever the numbers are read as.
        key = (one.quantity, one.kind, one.predicted) if one.predicted else (one.kind, one.changes)
        place = places.get(key)
        if place is None:
            places[key] = len(kept)
            kept.append((question, one))
            continue
        asked, same = kept[place]
        if not one.predicted:
            kept[place] = max(kept[place], (question, one), key=lambda found: found[0].nearness)
        # Blocks of other dealings differ by a factor: what makes up for it is another function, not another name.
        elif asked.quantity == question.quantity and same.rank == one.rank and same.changes != one.changes:
            kept[place] = asked, replace(same, equal=(*same.equal, one.changes, *one.equal))
    return tuple(one for _, one in kept[:MOST_EXPLANATIONS])


def _too_high(question: Question, whole: Question) -> Explanation:
    """The rows that deviate cost too much."""
    lower = "; those at lower charges agree" if any(any(row.charge) for row in question.rows) else ""
    sentence = f"The rows that deviate are at charges too high for a diagnosis{lower}."
    return Explanation("unexplained", whole.quantity.name, sentence, charges=whole.charges)


def _unexplained(question: Question, variants: Variants, *, affordable: bool) -> Explanation:
    rows = len(question.deviating)
    cut = f"; {variants.left_out} pairs of changes were too many to try" if variants.left_out else ""
    tried = "no change of convention or two of them, no loss of precision, no single wrong entry"
    if not affordable:
        tried = "no change of convention, no single wrong entry"
        cut = (
            "; a loss of precision and two changes at once were not looked for, because even the cheapest rows cost "
            "too much for that"
        )
    sentence = (
        f"Nothing that was tried explains the {'row that deviates' if rows == 1 else f'{rows} rows that deviate'}: no "
        f"offset, no terms left out, {tried}{cut}."
    )
    return Explanation("unexplained", question.quantity.name, sentence, charges=question.charges)
