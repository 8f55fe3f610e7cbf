"""From a table of numbers, as CSV or JSON or Python values, to ``Given`` rows.

CSV: one column for the charge of every node, one for the value, one for an uncertainty if there is one; separated by
commas, semicolons or tabs. A header may name the columns; lines that begin with # and empty lines are passed over.
JSON: a list of rows, or an object with the key "rows". A row is {"charge": [1], "value": "0.5625"}, with "uncertainty"
if there is one, or the list [1, "0.5625"]; an object {"1": "0.5625"} gives values by charge.

All mistakes are collected, each with its row (in CSV the line) and column.
"""

from __future__ import annotations

import csv
import json
import os
import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from ratomega.case.case import HIGHEST_CHARGE
from ratomega.case.tables import bounded_text, file_name
from ratomega.case.wording import kind, quoted, shortened
from ratomega.diagrams.tuples import Charge
from ratomega.errors import InputError, Problem
from ratomega.exact.rational import Rational
from ratomega.verify.given import Given, given_number, is_fraction, read_number

__all__ = ["NumbersSource", "read_table"]

NumbersSource = str | os.PathLike[str] | Mapping[Any, Any] | Sequence[Any]

LARGEST_FILE = 4 * 1024 * 1024
MOST_ROWS = 10_000
MOST_PROBLEMS = 100
LONGEST_FIELD = 2000
MANY_DIGITS = 7

SEPARATORS = (";", ",", "\t")
VALUE, UNCERTAINTY = "value", "uncertainty"
_CHARGE = re.compile(r"\+?\d{1,6}")
_NUMBERLIKE = re.compile(r"\s*[+-]?\.?\d")


class _Literal(str):
    """A number as it stands in a JSON text: its digits count."""


@dataclass(frozen=True, slots=True)
class _Raw:
    """One row before it is checked: its place in words, the charges, the value and the uncertainty."""

    row: int
    charges: Sequence[object]
    value: object
    uncertainty: object | None


def read_table(source: NumbersSource, nodes: Sequence[str]) -> tuple[Given, ...]:
    """The rows of a table for a theory with these nodes, in their order.

    ``source`` is a file, a JSON text, a mapping from charges to values, or a sequence of rows. Floats are accepted in
    Python, as numbers of double precision. Raises ``InputError`` with every mistake, row and column named.

    >>> [(g.charge, g.digits) for g in read_table({1: "0.5625", 2: "0.12"}, ["gauge"])]
    [((1,), 4), ((2,), 2)]
    """
    label, raw = _rows_of(source, nodes)
    problems: list[Problem] = []
    checked: list[tuple[int, Charge, str, Rational, Rational | None, bool]] = []
    first: dict[Charge, int] = {}
    for one in raw:
        where = f"{label}: row {one.row}"
        found = _checked(one, where, nodes, problems)
        if found is not None:
            charge = found[1]
            if first.setdefault(charge, one.row) != one.row:
                shown = ",".join(str(k) for k in charge)
                message = f"the charge {shown} has a value in row {first[charge]} already"
                problems.append(Problem(message, f"{where}, column charge"))
            checked.append(found)
        if len(problems) >= MOST_PROBLEMS:
            break
    if problems:
        raise InputError(problems)
    if not checked:
        raise InputError.single("the table has no row with a number", label)
    texts = [text for _, _, text, _, _, _ in checked]
    exact_integers = any(is_fraction(text) for text in texts) and not any("." in text for text in texts)
    many_digits = any(len(text) > MANY_DIGITS for text in texts)
    return tuple(
        given_number(
            charge, text, value, uncertainty, row,
            exact_integers=exact_integers, double=double, many_digits=many_digits,
        )
        for row, charge, text, value, uncertainty, double in checked
    )


def _checked(
    one: _Raw, where: str, nodes: Sequence[str], problems: list[Problem]
) -> tuple[int, Charge, str, Rational, Rational | None, bool] | None:
    before = len(problems)
    charge: list[int] = []
    if len(one.charges) != len(nodes):
        message = f"a charge has one number per node: {len(nodes)} expected, {len(one.charges)} given"
        problems.append(Problem(message, f"{where}, column charge"))
    else:
        for name, k in zip(nodes, one.charges, strict=True):
            column = "charge" if len(nodes) == 1 else f"charge of {shortened(name)}"
            mistake = _charge_mistake(k)
            if mistake:
                problems.append(Problem(mistake, f"{where}, column {column}"))
            else:
                charge.append(int(str(k)))
    value, uncertainty = None, None
    try:
        value = read_number(one.value, f"{where}, column {VALUE}")
    except InputError as error:
        problems.extend(error.problems)
    if one.uncertainty is not None and one.uncertainty != "":
        try:
            uncertainty = read_number(one.uncertainty, f"{where}, column {UNCERTAINTY}")[1]
            if uncertainty < 0:
                problems.append(Problem("an uncertainty is zero or more", f"{where}, column {UNCERTAINTY}"))
        except InputError as error:
            problems.extend(error.problems)
    if len(problems) > before or value is None:
        return None
    return one.row, tuple(charge), *value, uncertainty, isinstance(one.value, float)


def _charge_mistake(k: object) -> str:
    if isinstance(k, bool) or not isinstance(k, (int, str)):
        return f"a charge is an integer, not {kind(k)}"
    text = str(k).strip()
    if not _CHARGE.fullmatch(text) or not text.isascii():
        return f"{quoted(text)} is not a charge; a charge is an integer, zero or more"
    if int(text) > HIGHEST_CHARGE:
        return f"the charge {int(text)} is beyond {HIGHEST_CHARGE}"
    return ""


# ---- where rows come from ----


def _rows_of(source: NumbersSource, nodes: Sequence[str]) -> tuple[str, list[_Raw]]:
    if isinstance(source, Mapping):
        return "numbers", _from_json(source, "numbers", nodes)
    if isinstance(source, (str, os.PathLike)):
        text, label = _text_of(source)
        if text.lstrip()[:1] in ("{", "["):
            return label, _from_json(_parsed(text, label), label, nodes)
        return label, list(_from_csv(text, label, nodes))
    if isinstance(source, Sequence):
        return "numbers", _from_json(source, "numbers", nodes)
    message = f"numbers are a file, a JSON text, a mapping or a list of rows, not {kind(source)}"
    raise InputError.single(message, "numbers")


def _text_of(source: str | os.PathLike[str]) -> tuple[str, str]:
    if isinstance(source, str) and source.lstrip()[:1] in ("{", "["):
        if len(source) > LARGEST_FILE:
            raise InputError.single(f"the text is longer than {LARGEST_FILE} characters", "numbers")
        return source, "numbers"
    return bounded_text(source, LARGEST_FILE, "table"), file_name(source)


def _parsed(text: str, label: str) -> object:
    try:
        return json.loads(text, parse_float=_Literal, parse_int=_Literal, parse_constant=_Literal)
    except (json.JSONDecodeError, RecursionError) as error:
        raise InputError.single(f"this is not a JSON document: {error}", label) from error


def _from_json(data: object, label: str, nodes: Sequence[str]) -> list[_Raw]:
    if isinstance(data, Mapping) and "rows" in data:
        data = data["rows"]
        if not isinstance(data, Sequence) or isinstance(data, str):
            raise InputError.single(f"rows is a list, not {kind(data)}", f"{label}: rows")
    if isinstance(data, Mapping):
        pairs = [(key.split(",") if isinstance(key, str) else key, value) for key, value in data.items()]
        data = [{"charge": key, "value": value} for key, value in pairs]
    assert isinstance(data, Sequence)
    if len(data) > MOST_ROWS:
        raise InputError.single(f"a table has at most {MOST_ROWS} rows", label)
    return [_json_row(row, number, label, nodes) for number, row in enumerate(data, 1)]


def _json_row(row: object, number: int, label: str, nodes: Sequence[str]) -> _Raw:
    where = f"{label}: row {number}"
    if isinstance(row, Mapping):
        unknown = [str(key) for key in row if key not in ("charge", VALUE, UNCERTAINTY)]
        missing = [key for key in ("charge", VALUE) if key not in row]
        if unknown or missing:
            what = f"there is no column {quoted(unknown[0])}" if unknown else f"the column {missing[0]} is missing"
            raise InputError.single(f"{what}; a row has charge, value and perhaps uncertainty", where)
        return _Raw(number, _charges(row["charge"]), row[VALUE], row.get(UNCERTAINTY))
    if isinstance(row, Sequence) and not isinstance(row, str):
        cells = list(row)
        if cells and isinstance(cells[0], (list, tuple)):
            cells = [*cells[0], *cells[1:]]
        return _cells(cells, number, where, nodes)
    raise InputError.single(f"a row is an object or a list, not {kind(row)}", where)


def _charges(value: object) -> Sequence[object]:
    return value if isinstance(value, Sequence) and not isinstance(value, str) else [value]


def _cells(cells: Sequence[object], number: int, where: str, nodes: Sequence[str], hint: str = "") -> _Raw:
    n = len(nodes)
    if not n + 1 <= len(cells) <= n + 2:
        charges = "the charge" if n == 1 else f"{n} charges"
        columns = "1 column" if len(cells) == 1 else f"{len(cells)} columns"
        message = f"{columns}; expected are {charges}, the value and perhaps an uncertainty{hint}"
        raise InputError.single(message, f"{where}, column {min(len(cells), n + 2) + 1}")
    return _Raw(number, cells[:n], cells[n], cells[n + 1] if len(cells) > n + 1 else None)


def _from_csv(text: str, label: str, nodes: Sequence[str]) -> Iterator[_Raw]:
    order: list[int] | None = None
    seen = 0
    for number, line in enumerate(text.splitlines(), 1):
        if not line.strip() or line.lstrip().startswith("#"):
            continue
        where = f"{label}: row {number}"
        cells = _split(line, where)
        if order is None:
            order = _header(cells, where, nodes)
            if not _NUMBERLIKE.match(cells[0]) and not any(_NUMBERLIKE.match(cell) for cell in cells):
                continue
        seen += 1
        if seen > MOST_ROWS:
            raise InputError.single(f"a table has at most {MOST_ROWS} rows", label)
        if order and len(cells) != len(order):
            message = f"{len(cells)} columns where the header has {len(order)}{_hint(line)}"
            raise InputError.single(message, f"{where}, column {min(len(cells), len(order)) + 1}")
        yield _cells([cells[n] for n in order] if order else cells, number, where, nodes, _hint(line))


def _hint(line: str) -> str:
    """What to say where the columns do not come out: are there blanks between them?"""
    if not any(separator in line for separator in SEPARATORS) and len(line.split()) > 1:
        return "; columns are separated by commas, not by blanks"
    return ""


def _split(line: str, where: str) -> list[str]:
    # Commas beside semicolons are decimal ones, which are refused as numbers.
    separator = next((s for s in SEPARATORS if s in line), ",")
    try:
        cells = next(csv.reader([line], delimiter=separator, strict=True))
    except csv.Error as error:
        raise InputError.single(f"this is no row of a CSV table: {error}", where) from error
    if any(len(cell) > LONGEST_FIELD for cell in cells):
        column = next(n for n, cell in enumerate(cells, 1) if len(cell) > LONGEST_FIELD)
        raise InputError.single(f"a cell has at most {LONGEST_FIELD} characters", f"{where}, column {column}")
    return [cell.strip() for cell in cells]


def _header(cells: Sequence[str], where: str, nodes: Sequence[str]) -> list[int]:
    """The columns in the order charge(s), value, uncertainty, by their names; empty where names do not say."""
    names = [cell.lower() for cell in cells]
    if VALUE not in names:
        return []
    rest = [n for n, name in enumerate(names) if name not in (VALUE, UNCERTAINTY)]
    wanted = [name.lower() for name in nodes]
    if sorted(names[n] for n in rest) == sorted(wanted):
        rest = [names.index(name) for name in wanted]
    if len(rest) != len(nodes):
        expected = "charge" if len(nodes) == 1 else ", ".join(quoted(name) for name in nodes)
        message = f"the header has {len(rest)} columns for charges; expected are {expected}"
        raise InputError.single(message, f"{where}, column {rest[-1] + 1 if rest else 1}")
    order = [*rest, names.index(VALUE)]
    return [*order, names.index(UNCERTAINTY)] if UNCERTAINTY in names else order
