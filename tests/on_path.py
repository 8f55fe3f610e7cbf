"""From the path that stands beside a result back to a plain theory, without the package's own settings.

A path is read from its text, "3/2 - 2*t/7" and the like; masses keep the expressions of the case and are put on the
path here once more.
"""

from __future__ import annotations

import re

import plain
from building import plain_number
from flint import fmpq

NUMBER = re.compile(r"-?\d+(?:/\d+)?")
MOVING = re.compile(r"(?:(?P<constant>.+) (?P<sign>[+-]) |(?P<minus>-)?)(?:(?P<top>\d+)\*)?t(?:/(?P<bottom>\d+))?")


def number(text: str) -> fmpq:
    if "sqrt" in text:
        return plain_number(text)
    assert NUMBER.fullmatch(text), text
    top, _, bottom = text.partition("/")
    return fmpq(int(top), int(bottom or 1))


def line(text: str) -> plain.Line:
    """Read c + d*t."""
    match = MOVING.fullmatch(text)
    if match is None:
        return plain.Line(number(text))
    size = fmpq(int(match["top"] or 1), int(match["bottom"] or 1))
    return plain.Line(number(match["constant"] or "0"), -size if "-" in (match["sign"], match["minus"]) else size)


def theory_on(case, path: str):
    """The plain theory of a case on a path such as "eps1 = 1; eps2 = 1 + t; gauge: a = (1/3, -1/3 + t/7)"."""
    first, second, *nodes = path.split("; ")
    eps1, eps2 = line(first.removeprefix("eps1 = ")), line(second.removeprefix("eps2 = "))
    coulomb = {}
    for text in nodes:
        name, _, values = text.partition(": a = ")
        coulomb[name] = [line(x) for x in values.removeprefix("(").removesuffix(")").split(", ")]

    def mass(expression):
        constant, first, second, slope = (plain_number(x) for x in expression.numbers())
        return plain.Line(constant, slope) + eps1 * first + eps2 * second

    return {
        "eps1": eps1,
        "eps2": eps2,
        "nodes": [
            {
                "coulomb": coulomb[node.name],
                "antifundamental": [mass(m) for m in node.antifundamental],
                "fundamental": [mass(m) for m in node.fundamental],
                "adjoint": [mass(m) for m in node.adjoint],
            }
            for node in case.theory.nodes
        ],
        "edges": [(e.source, e.target, mass(e.mass)) for e in case.theory.edges],
    }


def check_result(result, *, last=0) -> None:
    """Every coefficient of a result against the plain reference on the one path of the result.

    Status, value, order and leading coefficient, and the values on the further paths where they are given.
    """
    case, own = result.header.case, result.header.path.text()
    theory = theory_on(case, own)
    for c in result:
        expected = plain.laurent_coefficient(theory, c.charge, last)
        order = max((-power for power in expected), default=0)
        if order > 0:
            assert (c.status, c.order, c.leading) == ("pole", order, expected[-order]), c.charge
        else:
            value = c.value if c.status == "finite" else c.values[0].value
            assert c.status in ("finite", "path-dependent")
            assert value == expected.get(0, 0), c.charge
        if c.values:
            assert c.values[0].path == own
            assert len({(v.order, str(v.value)) for v in c.values}) > 1
        for v in c.values[1:]:
            further = plain.laurent_coefficient(theory_on(case, v.path), c.charge)
            deepest = max(0, -min(further, default=0))
            assert (v.order, v.value) == (deepest, further.get(-deepest, 0)), (c.charge, v.path)
        if c.terms is not None:
            assert {power: value for power, value in c.terms if value != 0} == expected, c.charge
            assert [power for power, _ in c.terms] == list(range(min(0, min(expected, default=0)), last + 1))
