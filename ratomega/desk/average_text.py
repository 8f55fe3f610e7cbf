"""Averages as plain text tables for a terminal."""

from __future__ import annotations

from ratomega.averages.limits import AverageLimit, AverageValue
from ratomega.desk.text import charge_word, heading, table
from ratomega.exact.function_text import function_text
from ratomega.exact.quadratic import approximate_text, number_text
from ratomega.exact.rational_function import RationalFunction
from ratomega.results.averages import Average, AverageResult

__all__ = ["average_text"]

MEANING = {
    "Y(x)": "prod (x - phi) over addable boxes / prod (x - phi - eps1 - eps2) over removable boxes",
    "1/Y(x)": "the inverse of Y(x), configuration by configuration",
    "trace-powers": "Tr phi^n = sum a^n - n! [z^n] (1 - e^(z eps1)) (1 - e^(z eps2)) sum over boxes e^(z phi)",
    "size": "the number of boxes; as a series in q it is q d/dq log Z",
}


def average_text(result: AverageResult) -> str:
    """The averages one by one, and the paths where they matter."""
    lines = [*heading(result.header, result.partial)[:-1], f"average  {result.of}: {MEANING[result.of]}"]
    for average in result.averages:
        lines += ["", f"<{average.name}>", *_table(average)]
    return "\n".join(lines) + "\n"


def _table(average: Average) -> list[str]:
    numbers = not any(isinstance(_shown(c), RationalFunction) for c in average)
    head = ["charge", "status", "independence", *(["approx."] if numbers else []), "exact"]
    lines = table(head, [_row(c, numbers) for c in average], left=range(1, len(head)))
    for c in average:
        if c.values:
            lines += ["", f"charge {charge_word(c.charge)}, path by path (the case's own path first)"]
            rows = [[str(v.order), _text(v.value), v.path] for v in c.values]
            lines += table(["order", "value", "path"], rows, left=[1, 2])
    return lines


def _shown(c: AverageLimit) -> AverageValue:
    if c.value is not None:
        return c.value
    return c.leading if c.leading is not None else c.values[0].value


def _row(c: AverageLimit, numbers: bool) -> list[str]:
    status = f"pole t^-{c.order}" if c.status == "pole" else c.status
    value = _shown(c)
    row = [charge_word(c.charge), status, c.independence or "paths differ"]
    if numbers and not isinstance(value, RationalFunction):
        row.append(f"~{approximate_text(value)}")
    return [*row, _text(value)]


def _text(value: AverageValue) -> str:
    return function_text(value) if isinstance(value, RationalFunction) else number_text(value)
