"""The arithmetic of the benchmarks' baselines: each gives the limit that it is compared on. Nothing is timed."""

from __future__ import annotations

import ast
import json
import os
import platform
from pathlib import Path

import numpy
import pytest
from flint import arb, fmpq

import ratomega
from benchmarks import ball, by_sympy
from benchmarks.measure import Report, Row, Times, environment, plain_reference, slope
from benchmarks.theories import FLAVOURED, PURE

PLAIN = plain_reference()
FOLDER = Path(ball.__file__).parent


def exact(theory, charge, ratio="1"):
    return [c.value for c in ratomega.limit(theory.case(charge, ratio))]


def test_the_limit_is_recovered_from_balls():
    values = exact(PURE, 4)
    assert [ball.by_balls(PLAIN, PURE, k, value) for k, value in enumerate(values)] == values


def test_too_low_a_precision_is_noticed():
    near = ball.nearby_ball(PLAIN, PURE, 2, 100, 150)
    with pytest.raises(RuntimeError, match="precision"):
        ball.recovered(near, 70)


def test_too_large_a_delta_is_noticed():
    value = exact(PURE, 3)[3]
    near = ball.nearby_ball(PLAIN, PURE, 3, 40, 400)
    with pytest.raises(RuntimeError, match="delta"):
        ball.recovered(near, 30)
    assert abs(near - arb(value)) < arb(2) ** -30


def test_what_is_recovered_is_the_first_convergent_within_the_tolerance():
    # 22/7 is the convergent of pi after 3.
    assert ball.recovered(arb(fmpq(22, 7) + fmpq(1, 2**60)), 40) == fmpq(22, 7)
    assert ball.recovered(arb(-3), 20) == -3


@pytest.mark.parametrize("theory", [PURE, FLAVOURED], ids=lambda theory: theory.name)
@pytest.mark.parametrize("ratio", [1, 2])
def test_the_algebraic_limit_is_the_limit(theory, ratio):
    values = exact(theory, 2, str(ratio))
    assert [by_sympy.algebraic_limit(PLAIN, theory, k, ratio) for k in range(3)] == values


def test_the_plain_reference_is_the_tests_own():
    assert Path(PLAIN.__file__) == Path(__file__).parent / "plain.py"


def test_the_slope_is_that_of_numpy():
    x, y = [0.3, 1.1, 2.0, 4.5], [1.0, -2.0, 0.5, 7.0]
    assert slope(x, y) == pytest.approx(numpy.polyfit(x, y, 1)[0])


def test_report_prints_and_keeps_the_ratio():
    lines = []
    report = Report(lines.append)
    report.question("name", "why")
    report.row(Row("case", 3, "ours", Times(0.5, 4, 3), "theirs", Times(10, 12, 3), headline=True))
    report.row(Row("other", 3, "ours", Times(0.5, 4, 3), "theirs", Times(10, 12, 3), elapsed=True))
    report.summary()
    document = json.loads(json.dumps(report.document({"load": "0"})))
    assert [row["ratio"] for row in document["questions"]["name"]["rows"]] == [20, 3]
    tables = [line for line in lines if line.startswith("|")]
    assert len({len(line) for line in tables}) == 1
    assert sum("case " in line and "20.0" in line for line in tables) == 2
    assert sum("other" in line for line in tables) == 1


def test_the_environment_names_no_host_and_no_folder():
    given = environment()
    assert given["python"] == platform.python_version()
    assert os.uname().nodename not in given.values()
    assert not any(os.sep in value for value in given.values())


def test_every_file_is_a_question_or_shared():
    main = ast.parse((FOLDER / "questions.py").read_text(encoding="utf-8"))
    asked = {alias.name for node in ast.walk(main) if isinstance(node, ast.ImportFrom) for alias in node.names}
    files = {path.stem for path in FOLDER.glob("*.py")} - {"__init__", "__main__", "questions"}
    assert files - asked == {"alone", "measure", "one_core", "theories"}
