"""A comparison as plain text: the rows, then the diagnosis."""

from __future__ import annotations

from ratomega.case.wording import shortened
from ratomega.desk.text import charge_word, heading, table
from ratomega.exact.quadratic import approximate_text, number_text
from ratomega.verify.comparing import CompareResult
from ratomega.verify.explanation import Explanation
from ratomega.verify.quantities import MEANING
from ratomega.verify.rows import Row

__all__ = ["compare_text"]

LONGEST_CELL = 40


def compare_text(result: CompareResult) -> str:
    """Row by row: the given number, the exact one, how many digits agree of those given; then what explains them."""
    lines = [*heading(result.header, result.partial)[:-1], f"numbers  compared with {MEANING[result.quantity]}", ""]
    head = ["charge", "given", "digits", "verdict", "approx.", "exact"]
    lines += table(head, [_cells(row) for row in result.rows], left=[1, 3, 4, 5])
    if result.agree:
        lines += ["", "the one row agrees" if len(result.rows) == 1 else f"all {len(result.rows)} rows agree"]
        return "\n".join(lines) + "\n"
    deviate = sum(1 for row in result.rows if not row.agrees)
    lines += ["", "the one row deviates" if len(result.rows) == 1 else f"{deviate} of {len(result.rows)} rows deviate"]
    if result.used not in (0, len(result.rows)):
        rows = "row" if result.used == 1 else f"{result.used} rows"
        lines.append(f"the diagnosis is made from the cheapest {rows}; further ones would cost too much")
    lines += ["", "diagnosis" if len(result.diagnosis) == 1 else "diagnosis, the simplest first"]
    for number, one in enumerate(result.diagnosis, 1):
        lines += _explanation(number, one, result.quantity)
    return "\n".join(lines) + "\n"


def _cells(row: Row) -> list[str]:
    given = "exact" if row.given_digits is None else str(row.given_digits)
    exact = shortened(number_text(row.exact), LONGEST_CELL)
    digits = given if row.given_digits is None and row.agrees else f"{row.digits} of {given}"
    verdict = "agrees" if row.agrees else "deviates"
    return [charge_word(row.charge), shortened(row.given), digits, verdict, f"~{approximate_text(row.exact)}", exact]


def _explanation(number: int, one: Explanation, quantity: str) -> list[str]:
    lines = [f"  {number}. {one.kind}: {one.sentence}"]
    if one.quantity != quantity:
        lines.append(f"     read as {MEANING[one.quantity]}")
    lines += [f"     edit  {edit}" for edit in one.edits]
    lines += [f"     the same numbers: {' and '.join(words)}" for words in one.equal]
    return lines
