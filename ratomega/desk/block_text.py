"""A conformal block as plain text for a terminal: the dictionary, the coefficients, the checks."""

from __future__ import annotations

from ratomega.case.case import Case
from ratomega.case.conformal import PLACES
from ratomega.desk.text import check_lines, table, theory_text
from ratomega.exact.quadratic import Number, number_text
from ratomega.results.blocks import BlockCoefficient, BlockResult

__all__ = ["block_text"]


def block_text(result: BlockResult) -> str:
    """Heading, dictionary, three forms of the coefficients, paths where they matter, checks, one sentence."""
    lines = [*_heading(result), "", *_dictionary(result), "", *_coefficients(result)]
    for one in result:
        if one.values:
            lines += ["", f"{_power(result, one)}, path by path (the own path first)"]
            rows = [[str(v.order), number_text(v.value), v.path] for v in one.values]
            lines += table(["order", "value", "path"], rows, left=[1, 2])
    return "\n".join([*lines, "", "checks", *check_lines(result.checks), "", result.summary]) + "\n"


def _heading(result: BlockResult) -> list[str]:
    case = result.case
    lines = [case.title] if case.title else []
    if isinstance(case, Case):
        lines.append(f"theory   {theory_text(case)}")
    elif result.torus:
        lines.append(f"fields   on the torus: {case.external[0].text()}; internal: {case.internal.text()}")
    else:
        fields = ", ".join(f"{place}: {one.text()}" for place, one in zip(PLACES, case.external, strict=True))
        lines.append(f"fields   {fields}; internal: {case.internal.text()}")
    lines.append(f"hash     {result.hash}")
    if not result.degenerate:
        return [*lines, "point    the internal weight is not degenerate up to this order: taken at the limit point"]
    labels = ", ".join(f"({r},{s})" for r, s in result.degenerate)
    return [
        *lines,
        f"point    the internal weight is degenerate: h_(r,s) with (r,s) = {labels}; from order "
        f"{result.degenerate[0][0] * result.degenerate[0][1]} on limits t -> 0 on the path, "
        "where the central charge moves and momenta without t are held",
        f"path     {result.path}",
    ]


def _dictionary(result: BlockResult) -> list[str]:
    d = result.dictionary
    rows = [["c", number_text(d.central_charge)], ["b^2 = eps1/eps2", number_text(d.b_squared)]]
    rows += [["eps1, eps2", f"{number_text(d.eps1)}, {number_text(d.eps2)}"]]
    for one in (*d.external, d.internal):
        momentum = f"a root of {number_text(one.square)}" if one.momentum is None else number_text(one.momentum)
        rows.append([f"{one.place}: weight; momentum", f"{number_text(one.weight)}; {momentum}"])
    a = "not an exact number" if d.coulomb is None else number_text(d.coulomb)
    rows.append(["Coulomb parameters a, -a", f"a = {a}"])
    name = "adjoint mass" if result.torus else "antifundamental masses"
    rows.append([name, ", ".join(number_text(m) for m in d.masses) or f"none: {result.gauge_reason}"])
    factor = "prod (1 - q^n)" if result.torus else "(1 - x)"
    exponent = "not an exact number" if d.exponent is None else number_text(d.exponent)
    rows.append(["U(1) factor Z/block", f"{factor}^({exponent})"])
    return table(["dictionary", ""], rows, left=[0, 1])


def _coefficients(result: BlockResult) -> list[str]:
    variable = "q" if result.torus else "x"
    elliptic = "q" if result.torus else "(16 q_e)"
    head = ["order", "status", "independence", f"block, of {variable}^n", f"H, of {elliptic}^n"]
    head += [] if result.z_reason else ["Z, of q^n"]
    rows = []
    for one in result:
        row = [str(one.order), _status(one), one.independence or "paths differ", _shown(one), _number(one.elliptic)]
        rows.append([*row, *([] if result.z_reason else [_number(one.gauge)])])
    lines = table(head, rows, left=range(1, len(head)))
    if result.z_reason:
        lines.append(f"Z is left out: {result.z_reason}")
    return lines


def _status(one: BlockCoefficient) -> str:
    return f"pole t^-{one.pole_order}" if one.status == "pole" else one.status


def _shown(one: BlockCoefficient) -> str:
    if one.block is not None:
        return number_text(one.block)
    return number_text(one.values[0].value if one.leading is None else one.leading)


def _number(value: Number | None) -> str:
    return "-" if value is None else number_text(value)


def _power(result: BlockResult, one: BlockCoefficient) -> str:
    return f"{'q' if result.torus else 'x'}^{one.order}"
