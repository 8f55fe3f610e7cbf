"""Values on a grid as comma-separated values.

Symbols and charges, then the value or its decimals, then a note where there is no value. Plain numbers stay numbers,
negative ones too; other text that a spreadsheet would take for a formula gets an apostrophe in front.
"""

from __future__ import annotations

import csv
import io
import re

from ratomega.desk.csv_text import guarded
from ratomega.exact.decimals import decimals
from ratomega.exact.quadratic import Number, number_text
from ratomega.results.grids import GridResult, GridRow

__all__ = ["grid_csv"]

_PLAIN = re.compile(r"-?[0-9]+(/[0-9]+)?")


def grid_csv(result: GridResult) -> str:
    """One row for every row of the result, under a header.

    Exact: the symbols, ``charge`` (one a node), ``value``, ``note``. With digits: the symbols, each with its real and
    imaginary part in decimals, ``charge``, ``real``, ``imaginary``, ``radius``, ``note``. Of sums: ``sum`` in place of
    charge and value, and ``last terms``.
    """
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(_head(result))
    for row in result.rows:
        writer.writerow([*_point(result, row), *_charges(row), *_value(result, row), guarded(row.note)])
    return out.getvalue()


def _head(result: GridResult) -> list[str]:
    head: list[str] = []
    for name in result.header.case.symbols:
        head += [name] if result.digits is None else [name, f"{name} real", f"{name} imaginary"]
    names = [node.name for node in result.header.case.theory.nodes]
    if result.q is None:
        head += ["charge"] if len(names) == 1 else [guarded(f"charge {name}") for name in names]
    exact = "value" if result.q is None else "sum"
    head += [exact] if result.digits is None else ["real", "imaginary", "radius"]
    return [*head, *([] if result.q is None else ["last terms"]), "note"]


def _point(result: GridResult, row: GridRow) -> list[str]:
    cells: list[str] = []
    for value in row.point:
        cells.append(_number(value))
        if result.digits is not None:
            near = decimals(value, result.digits)
            cells += [near.real, near.imaginary]
    return cells


def _charges(row: GridRow) -> list[str]:
    return [] if row.charge is None else [str(k) for k in row.charge]


def _value(result: GridResult, row: GridRow) -> list[str]:
    last = [] if result.q is None else [row.last or ""]
    if result.digits is None:
        return ["" if row.value is None else _number(row.value), *last]
    near = row.decimals
    return [*(("", "", "") if near is None else (near.real, near.imaginary, near.radius)), *last]


def _number(value: Number) -> str:
    """
    >>> from ratomega.exact.quadratic import square_root
    >>> from ratomega.exact.rational import Rational
    >>> _number(Rational(-1, 2)), _number(-square_root(-1))
    ('-1/2', "'-1*sqrt(-1)")
    """
    text = number_text(value)
    return text if _PLAIN.fullmatch(text) else guarded(text)
