"""LaTeX and CSV: tables that a parser reads, exact numbers that come back, hostile text that stays text."""

from __future__ import annotations

import csv
import io
import re
import shutil
import subprocess
from fractions import Fraction

import pytest
from click.testing import CliRunner

import ratomega
from ratomega.case.bundled import bundled_names
from ratomega.cli.main import cli
from ratomega.desk.csv_text import limit_csv
from ratomega.desk.latex import detect_latex, escaped, limit_latex, number_latex, validate_latex
from ratomega.errors import InputError
from ratomega.exact.quadratic import quadratic
from ratomega.exact.rational import Rational

HOSTILE = r"\\input{/etc/passwd} & 50% $x_1^2$ # ~ {<script>} ε é 中"
KNOWN = {
    "allowbreak",
    "begin",
    "endhead",
    "end",
    "ensuremath",
    "epsilon",
    "frac",
    "hline",
    "linewidth",
    "mathrm",
    "noindent",
    "par",
    "pm",
    "sqrt",
    "textasciicircum",
    "textasciitilde",
    "textbackslash",
    "textbar",
    "textbf",
    "textgreater",
    "textless",
    "texttt",
    "to",
    "left",
    "right",
    "cdot",
}


def read_tables(text):
    """The rows of every longtable. Braces, mathematics and environments are balanced, and commands are known ones."""
    body = re.sub(r"(?m)^%.*$", "", text)
    bare = re.sub(r"\\[{}$&#%_\\'^]", "", body)
    assert bare.count("{") == bare.count("}")
    assert bare.count("$") % 2 == 0
    depth = 0
    for c in bare:
        depth += (c == "{") - (c == "}")
        assert depth >= 0
    assert re.search(r"[%#~]", bare) is None
    assert set(re.findall(r"\\([A-Za-z]+)", body)) <= KNOWN
    assert all(" " <= c <= "~" or c == "\n" for c in body)
    tables = []
    for columns, inside in re.findall(r"\\begin{longtable}{([^\n]*)}\n(.*?)\\end{longtable}", body, re.S):
        count = len(re.findall(r"[rl]|p{[^{}]*}", columns))
        rows = [re.split(r"(?<!\\)&", row) for row in inside.split(r"\\")]
        rows = [[cell.strip() for cell in row] for row in rows if "".join(row).strip()]
        assert all(len(row) == count for row in rows if row != [r"\hline \endhead"] and len(row) > 1), columns
        tables.append([row for row in rows if len(row) > 1])
    assert tables
    assert body.count(r"\begin{") == body.count(r"\end{")
    return tables


def exact(cell):
    """The number in a cell."""
    text = cell.replace("$", "").replace(r"\allowbreak ", "")
    text = re.sub(r"\\frac{(\d+)}{(\d+)}", r"\1/\2", text)
    return Fraction(text.replace(" ", ""))


def test_the_coefficients_come_back():
    result = ratomega.limit("b1-four-flavours")
    (rows,) = read_tables(limit_latex(result))
    assert rows[0] == ["charge", "status", "independence", "value"]
    values = [exact(row[3].replace(r"\hline \endhead", "")) for row in rows[1:]]
    assert values == [Fraction(str(c.value)) for c in result]


@pytest.mark.parametrize("name", [name for name in bundled_names() if not name.startswith("vacuum-")])
def test_every_bundled_case_makes_tables(name):
    case = ratomega.load_case(name)
    case = case.with_charge(min(case.charge, 2)) if isinstance(case.charge, int) else case
    assert read_tables(limit_latex(ratomega.limit(case)))
    assert len(read_tables(detect_latex(ratomega.detect(case)))) == 3
    ((*_, last),) = read_tables(validate_latex(ratomega.validate(case)))
    assert len(last) == 5


def test_hostile_text_stays_text():
    title = HOSTILE
    case = ratomega.load_case(
        {
            "title": title,
            "charge": 1,
            "background": {"eps1": 1, "eps2": 1},
            "node": [{"name": "=cmd|' /C calc'!A0", "coulomb": ["1/3"]}, {"name": "&_%", "coulomb": ["1/5"]}],
        }
    )
    text = limit_latex(ratomega.limit(case))
    assert read_tables(text)
    assert r"\input" not in text
    rows = list(csv.reader(io.StringIO(limit_csv(ratomega.limit(case)))))
    assert rows[0][:2] == ["charge =cmd|' /C calc'!A0", "charge &_%"]
    assert escaped("ε é 中") == r"\ensuremath{\epsilon} \'e \texttt{U+4E2D}"


def test_numbers():
    assert number_latex(Rational(5)) == "$5$"
    assert number_latex(quadratic(Rational(1, 2), Rational(-3), -1)) == r"$\frac{1}{2}$ $+$ $-3$ $\mathrm{i}$"
    long = Rational(10**40 + 1, 3**50)
    assert exact(number_latex(long)) == Fraction(10**40 + 1, 3**50)
    assert r"\allowbreak" in number_latex(-long)


def test_csv_comes_back_and_factors():
    result = ratomega.limit("b1-four-flavours")
    rows = list(csv.DictReader(io.StringIO(limit_csv(result, factored=True))))
    assert [Fraction(int(r["numerator"]), int(r["denominator"])) for r in rows] == [
        Fraction(str(c.value)) for c in result
    ]
    for row in rows:
        product = 1
        for power in row["denominator factored"].split("*"):
            base, _, exponent = power.partition("^")
            product *= int(base) ** int(exponent or 1)
        assert product == int(row["denominator"])
    functions = list(csv.DictReader(io.StringIO(limit_csv(ratomega.limit("free-momentum")))))
    assert functions[1]["numerator"].startswith("'-(") or functions[1]["numerator"][0] not in "=+-@"


def test_one_form_at_a_time():
    for words in (["--json", "--latex"], ["--csv", "--latex"], ["--csv", "--json"]):
        with pytest.raises(InputError, match="one form of output at a time"):
            CliRunner().invoke(cli, ["limit", "u1-pure", *words], standalone_mode=False, catch_exceptions=False)


@pytest.mark.skipif(shutil.which("pdflatex") is None, reason="no LaTeX is installed here")
def test_a_real_latex_takes_them(tmp_path):
    body = "\n".join(
        [
            limit_latex(ratomega.limit("b1-four-flavours")),
            detect_latex(ratomega.detect("b1-four-flavours")),
            validate_latex(ratomega.validate("u1-adjoint")),
        ]
    )
    document = "\\documentclass{article}\n\\usepackage{longtable}\n\\begin{document}\n"
    document += body + "\n\\end{document}\n"
    (tmp_path / "t.tex").write_text(document)
    command = ["pdflatex", "-interaction=nonstopmode", "-halt-on-error", "t.tex"]
    done = subprocess.run(command, cwd=tmp_path, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stdout[-2000:]
