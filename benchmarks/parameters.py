"""What a free parameter costs: coefficients as rational functions, against as exact numbers at one point.

The ratio says which part of one function one number is: its inverse is how many numbers the function costs.
"""

from __future__ import annotations

from functools import partial
from typing import Any

import ratomega
from benchmarks.measure import Pace, Report, Row, in_turn
from ratomega.regulator.routes import point_values
from ratomega.symbolic.by_poles import pole_way
from ratomega.symbolic.functions import Functions

QUESTION = "coefficients as functions of free parameters, against numbers at one point"
POINT = {"a": "3/11", "m": "2/7"}
MASSES = ["1/3", "2/5", "3/7", "1/2"]
# name, charge, quick charge, ratio, Coulomb parameters, antifundamental masses
LINES: tuple[tuple[str, int, int, str, list[str], list[str]], ...] = (
    ("U(2), no matter, a", 10, 4, "1", ["a", "-a"], []),
    ("U(2), no matter, a", 10, 0, "2", ["a", "-a"], []),
    ("U(2), four flavours, a", 10, 0, "1", ["a", "-a"], MASSES),
    ("U(2), four flavours, a", 10, 0, "2", ["a", "-a"], MASSES),
    ("U(3), no matter, a", 4, 2, "1", ["a", "1/7 - a", "-1/7"], []),
    ("U(2), one flavour, a and m", 4, 2, "1", ["a", "-a"], ["m"]),
)


def ask(pace: Pace, report: Report) -> None:
    for name, charge, quick, ratio, coulomb, masses in LINES:
        bound = quick if pace.quick else charge
        if not bound:
            continue
        symbols = sorted({x for x in POINT if x in coulomb or x in masses})
        node = {"coulomb": coulomb, "antifundamental": masses}
        mapping: dict[str, Any] = {"charge": bound, "background": {"eps1": "1", "eps2": ratio}, "node": [node]}
        functions = ratomega.load_case(mapping | {"symbols": symbols})
        numbers = functions.at(**{x: POINT[x] for x in symbols})
        found = in_turn(
            {
                "functions": partial(ratomega.limit, functions),
                "numbers": partial(ratomega.limit, numbers, route="direct"),
            }
        )
        check(functions, numbers, symbols)
        row = Row(
            f"{name}, ratio {ratio}",
            bound,
            f"functions of {' and '.join(symbols)}",
            found["functions"],
            "numbers at one point",
            found["numbers"],
            headline=True,
        )
        report.row(row)
        if pole_way(functions) is not None:
            ways(report, functions, f"{name}, ratio {ratio}", bound)


def ways(report: Report, case: ratomega.Case, name: str, charge: int) -> None:
    """The two ways to the functions, each with its two limits that confirm them."""
    recursion, interpolation = (partial(_functions, case, interpolate) for interpolate in (False, True))
    found = in_turn({"recursion": recursion, "interpolation": interpolation})
    if recursion() != interpolation():
        raise RuntimeError("the pole recursion and interpolation give different functions")
    row = Row(
        f"{name}, way", charge, "pole recursion", found["recursion"], "interpolation", found["interpolation"]
    )
    report.row(row)


def _functions(case: ratomega.Case, interpolate: bool) -> list[object]:
    functions = Functions(case, most_configurations=10**8, evaluator=point_values, interpolate=interpolate)
    return [functions.at(charge).function for charge in case.charges]


def check(functions: ratomega.Case, numbers: ratomega.Case, symbols: list[str]) -> None:
    """The functions at the point are the numbers."""
    point = {x: POINT[x] for x in symbols}
    for one, other in zip(ratomega.limit(functions), ratomega.limit(numbers), strict=True):
        if not isinstance(one.value, ratomega.RationalFunction) or one.value.at(**point) != other.value:
            raise RuntimeError("a function disagrees with the number at a point")
