"""What does the exact limit cost, against a plain evaluation at a nearby point where nothing is singular?

Same configurations on both sides: the engine at the rational ratio, exactly; the plain per-box reference of the tests,
unchanged, at eps2 shifted by 1/1009 of its value. The shifted sum is the usual way round the singular weights; the last
column says how many digits it gets right at the highest charge.
"""

from __future__ import annotations

import math
import sys
import time
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from statistics import median
from typing import Any

import ratomega
from ratomega.case.setting import own_setting
from ratomega.exact.path import Linear
from ratomega.exact.rational import ONE, Rational

sys.path.insert(0, str(Path(__file__).resolve().parent.parent / "tests"))

import plain

SHIFT = Rational(1, 1009)


@dataclass(frozen=True, slots=True)
class Row:
    """One line of the table."""

    name: str
    configurations: int
    plain_seconds: float
    engine_seconds: float
    digits: float

    @property
    def ratio(self) -> float:
        return self.plain_seconds / self.engine_seconds


CASES: tuple[tuple[str, dict[str, Any]], ...] = (
    (
        "U(2), no matter, ratio 1, charges <= 8",
        {"charge": 8, "background": {"eps1": "1", "eps2": "1"}, "node": [{"coulomb": ["3/11", "-3/11"]}]},
    ),
    (
        "U(2), four flavours, ratio 1, charges <= 7",
        {
            "charge": 7,
            "background": {"eps1": "1", "eps2": "1"},
            "node": [{"coulomb": ["3/11", "-3/11"], "antifundamental": ["1/2", "1/4", "1/5", "1/7"]}],
        },
    ),
    (
        "U(2), no matter, ratio 2, charges <= 8",
        {"charge": 8, "background": {"eps1": "1", "eps2": "2"}, "node": [{"coulomb": ["3/11", "-3/11"]}]},
    ),
    (
        "U(3), no matter, ratio 1, charges <= 5",
        {"charge": 5, "background": {"eps1": "1", "eps2": "1"}, "node": [{"coulomb": ["3/11", "1/7", "-2/5"]}]},
    ),
)


def seconds(work: Callable[[], object], runs: int) -> float:
    """The median time of several runs."""
    times = []
    for _ in range(runs):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return median(times)


def shifted_theory(case: ratomega.Case) -> dict[str, Any]:
    """The case with eps2 moved off the ratio, as plain numbers."""
    setting = own_setting(case)

    def at(value: Linear) -> Rational:
        return value.constant

    nodes = [
        {
            "coulomb": [at(x) for x in node.coulomb],
            "antifundamental": [at(x) for x in node.antifundamental],
            "fundamental": [at(x) for x in node.fundamental],
            "adjoint": [at(x) for x in node.adjoint],
        }
        for node in setting.nodes
    ]
    eps2 = setting.eps2.constant * (ONE + SHIFT)
    return {"eps1": setting.eps1.constant, "eps2": eps2, "nodes": nodes, "edges": []}


def measure(runs: int = 3) -> list[Row]:
    """Time every case on both sides, in turn."""
    rows = []
    for name, mapping in CASES:
        case = ratomega.load_case(mapping)
        theory = shifted_theory(case)
        plain_seconds = seconds(lambda t=theory, c=case: [plain.coefficient(t, k) for k in c.charges], runs)
        engine_seconds = seconds(lambda c=case: ratomega.limit(c), runs)
        exact = ratomega.limit(case).coefficients
        error = abs(plain.coefficient(theory, exact[-1].charge) / exact[-1].value - 1)
        digits = -math.log10(int(error.p) / int(error.q)) if error else math.inf
        rows.append(Row(name, sum(c.configurations for c in exact), plain_seconds, engine_seconds, digits))
    return rows


def text(rows: list[Row]) -> str:
    """The table as it is printed."""
    lines = [f"{'case':<46}{'weights':>9}{'plain s':>10}{'engine s':>10}{'plain/engine':>14}{'digits right':>14}"]
    for row in rows:
        lines.append(
            f"{row.name:<46}{row.configurations:>9}{row.plain_seconds:>10.3f}{row.engine_seconds:>10.3f}"
            f"{row.ratio:>14.1f}{row.digits:>14.1f}"
        )
    return "\n".join(lines)
