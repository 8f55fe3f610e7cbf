"""An explanation, and what makes one worth giving.

An explanation predicts every row within what was given. How much that proves is counted in digits: of each deviating
row, the digits by which the prediction does better than the exact value. A fitted number uses up the best row, and an
explanation found among n candidates the logarithm of n. What is left must be one digit at least.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from math import log10

from ratomega.diagrams.tuples import Charge
from ratomega.exact.rational import Rational
from ratomega.verify.given import Given

__all__ = ["KINDS", "Explanation", "enough_evidence", "evidence", "size"]

KINDS = ("offset", "dropped-singular", "precision-loss", "convention", "single-entry", "unexplained")

# No row counts for more than this, an exact fraction included.
MOST_OF_A_ROW = 15.0
LEAST_EVIDENCE = 1.0


@dataclass(frozen=True, slots=True)
class Explanation:
    """``changes`` in words, ``edits`` of the case file, ``parameters`` that were found from the rows.

    ``equal`` are other wordings of the same numbers. ``quantity`` is what the numbers are coefficients of.
    ``length`` counts the changes and ``fitted`` the numbers that were fitted and are no simple ones: the order of
    simplicity.
    """

    kind: str
    quantity: str
    sentence: str
    changes: tuple[str, ...] = ()
    edits: tuple[str, ...] = ()
    parameters: tuple[tuple[str, str], ...] = ()
    equal: tuple[tuple[str, ...], ...] = ()
    charges: tuple[Charge, ...] = ()
    length: int = 1
    fitted: int = 0
    predicted: tuple[Rational, ...] = field(default=(), compare=False, repr=False)

    @property
    def rank(self) -> tuple[int, int, int]:
        return self.length + self.fitted, self.fitted, KINDS.index(self.kind)


def evidence(rows: Sequence[Given], exact: Sequence[Rational]) -> list[float]:
    """For each row that deviates from the exact value, by how many digits it does: most first."""
    found = []
    for row, value in zip(rows, exact, strict=True):
        if row.agrees(value):
            continue
        ratio = MOST_OF_A_ROW
        if row.tolerance != 0:
            share = abs(row.value - value) / row.tolerance
            ratio = log10(int(share.p)) - log10(int(share.q))
        found.append(min(ratio, MOST_OF_A_ROW))
    return sorted(found, reverse=True)


def enough_evidence(digits: Sequence[float], *, fitted: int, tried: float) -> bool:
    """Do the deviating rows support an explanation with ``fitted`` free numbers, the best of ``tried`` candidates?

    >>> enough_evidence([11.0, 10.0], fitted=1, tried=3), enough_evidence([11.0], fitted=1, tried=1)
    (True, False)
    """
    return sum(digits[fitted:]) - log10(max(tried, 1)) >= LEAST_EVIDENCE


def size(value: Rational) -> float:
    """How many digits it takes to write a number down: what it costs to have chosen it."""
    return log10(abs(int(value.p)) + 1) + log10(int(value.q))
