"""The diagnosis: hypotheses in the order of their simplicity, for every quantity that the numbers may be.

First one change (an offset, terms left out, one change of convention), then one wrong entry or lost precision, then two
changes, last precision lost on top of another change. The first of these stages that explains the rows ends the search;
everything that it found is given, what fits without a fitted number first. Explanations that predict the same numbers
in every row are one, under several names.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import replace

from ratomega.exact.rational import Rational
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


def diagnose(questions: Sequence[Question]) -> tuple[Explanation, ...]:
    """The explanations, the simplest first; the questions differ in the quantity alone. Never empty."""
    variants = Variants(questions[0])
    found: list[Explanation] = []
    for stage in (_one_change, _one_entry, _lost_precision, pairs, offset_pairs, noisy_pairs):
        found += [explanation for question in questions for explanation in stage(question, variants)]
        # Two changes of convention with a number that was found may as well be an offset and one change.
        if found and (stage is not pairs or any(not explanation.parameters for explanation in found)):
            return _sorted(found, questions)
    return (_unexplained(questions[0], variants),)


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


def _sorted(found: Iterable[Explanation], questions: Sequence[Question]) -> tuple[Explanation, ...]:
    order = [question.quantity.name for question in questions]
    ranked = sorted(found, key=lambda one: (one.rank, order.index(one.quantity)))
    kept: list[Explanation] = []
    places: dict[tuple[str, str, tuple[Rational, ...]], int] = {}
    for one in ranked:
        key = one.quantity, one.kind, one.predicted
        place = places.get(key) if one.predicted else None
        if place is None:
            places[key] = len(kept)
            kept.append(one)
        elif kept[place].rank == one.rank and kept[place].changes != one.changes:
            kept[place] = replace(kept[place], equal=(*kept[place].equal, one.changes, *one.equal))
    return tuple(kept[:MOST_EXPLANATIONS])


def _unexplained(question: Question, variants: Variants) -> Explanation:
    rows = len(question.deviating)
    cut = f"; {variants.left_out} pairs of changes were too many to try" if variants.left_out else ""
    sentence = (
        f"Nothing that was tried explains the {'row that deviates' if rows == 1 else f'{rows} rows that deviate'}: no "
        "offset, no terms left out, no change of convention or two of them, no loss of precision, no single wrong "
        f"entry{cut}."
    )
    return Explanation("unexplained", question.quantity.name, sentence, charges=question.charges)
