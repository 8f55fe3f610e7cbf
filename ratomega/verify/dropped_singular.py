"""Dropped-singular: singular configurations were left out of the sum, all of them or one cluster."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

from ratomega.diagrams.tuples import Configuration
from ratomega.exact.rational import Rational
from ratomega.regulator.direct import direct_sum
from ratomega.verify.explanation import Explanation, enough_evidence
from ratomega.verify.question import Question
from ratomega.verify.rows import real_value
from ratomega.verify.source import Source
from ratomega.weights import Weight

__all__ = ["Omission", "dropped", "omissions"]


@dataclass(frozen=True, slots=True)
class Omission:
    """A rule by which configurations are left out, in words."""

    words: str
    left_out: Callable[[Weight, Configuration], bool]


def omissions() -> tuple[Omission, ...]:
    """All that diverge; all with a vanishing denominator, which takes those of the form 0/0 as well."""
    return (
        Omission("the singular configurations were left out", lambda w, _: w.order > 0 and not w.dead),
        Omission(
            "every configuration with a vanishing denominator was left out, those of the form 0/0 among them",
            lambda w, _: w.vanishing_denominators > 0,
        ),
    )


def dropped(question: Question, *, tried: int) -> Iterator[Explanation]:
    """What explains all rows."""
    digits = question.digits
    if not enough_evidence(digits, fitted=0, tried=tried):
        return
    seen: list[tuple[Rational, ...]] = []
    for omission in omissions():
        source = Source(question.setting, left_out=omission.left_out)
        predicted = question.fit(source.z, question.setting)
        if predicted is not None and predicted not in seen:
            seen.append(predicted)
            yield _explanation(question, omission.words, predicted)
    if not seen and len(question.deviating) == 1:
        yield from _one_cluster(question)


def _one_cluster(question: Question) -> Iterator[Explanation]:
    """One deviating coefficient of Z: is one singular cluster missing there?"""
    if question.quantity.name != "z":
        return
    row = question.deviating[0]
    exact = question.exact[question.rows.index(row)]
    whole = direct_sum(question.source.weights, row.charge)
    singular = [cluster for cluster in whole.clusters.values() if cluster.singular_members]
    if not enough_evidence(question.digits, fitted=0, tried=10 * max(len(singular), 1)):
        return
    for number, cluster in enumerate(singular, 1):
        if cluster.series.valuation < 0:
            continue
        value = real_value(cluster.series.coefficient(0))
        if value is not None and value != 0 and row.agrees(exact - value):
            pairs = zip(question.rows, question.exact, strict=True)
            predicted = tuple(exact - value if one is row else other for one, other in pairs)
            shown = ",".join(str(k) for k in row.charge)
            words = f"one singular cluster of {cluster.size} configurations was left out at charge {shown}"
            yield _explanation(question, words, predicted, (("cluster", str(number)), ("sum", str(value))))


def _explanation(
    question: Question,
    words: str,
    predicted: tuple[Rational, ...],
    parameters: tuple[tuple[str, str], ...] = (),
) -> Explanation:
    rows = len(question.deviating)
    sentence = (
        f"In the numbers {words}; the sum without them gives all {len(question.rows)} rows, "
        f"the {rows} that deviate{'s' if rows == 1 else ''} among them."
    )
    return Explanation(
        "dropped-singular", question.quantity.name, sentence,
        changes=(words,), parameters=parameters, charges=question.charges, predicted=predicted,
    )
