"""Tables of numbers, as CSV, JSON or Python values: rows, or a refusal that names row and column."""

from __future__ import annotations

import json

import pytest
from fuzzing import outcome, searches
from hypothesis import strategies as st

from ratomega.errors import InputError
from ratomega.exact.rational import Rational
from ratomega.verify.table import read_table

pytestmark = pytest.mark.fuzz

nodes = st.sampled_from([["gauge"], ["left", "right"], ["charge", "value", "x" * 64]])


def read_or_refused(source, names, at):
    rows = outcome(read_table, source, names, at=at)
    if isinstance(rows, InputError):
        return
    assert rows
    assert len({row.charge for row in rows}) == len(rows)
    for row in rows:
        assert len(row.charge) == len(names)
        assert isinstance(row.value, Rational)


WORDS = ["charge", "value", "uncertainty", "left", "right", "gauge", "1/3", "-0.5", "1e-3", "1e999999999", "nan", "inf"]
cell = (
    st.integers(-1, 600).map(str)
    | st.floats().map(repr)
    | st.sampled_from([*WORDS, "1/0", "=1+1", '"', '""', "0x1", "²", "٣", "9" * 2001, "\x00", "#", "\u2028"])
    | st.text(alphabet="0123456789.,;/eE+-_\" \t#abnif=<>", max_size=12)
)
line = st.builds(lambda cells, by: by.join(cells), st.lists(cell, max_size=4), st.sampled_from([",", ";", "\t", ", "]))
csv_text = st.builds(lambda lines, end: end.join(lines), st.lists(line, max_size=6), st.sampled_from(["\n", "\r\n"]))


@searches(120)
def test_any_csv_file(search, tmp_path):
    path = tmp_path / "t.csv"

    def work(example):
        data, names = example
        path.write_bytes(data)
        read_or_refused(path, names, str(path))

    files = csv_text.map(lambda text: text.encode("utf-8", "surrogatepass")) | st.binary(max_size=30)
    search(work, st.tuples(files, nodes))


leaves = st.none() | st.booleans() | st.integers(-2, 600) | st.floats() | st.text(max_size=4) | st.sampled_from(WORDS)
values = st.recursive(
    leaves,
    lambda inner: st.lists(inner, max_size=3)
    | st.dictionaries(st.sampled_from(["charge", "value", "uncertainty", "rows", "1", "1,2", "x"]), inner, max_size=3),
    max_leaves=8,
)
row = st.fixed_dictionaries({"charge": st.integers(-1, 4) | values, "value": values}, optional={"uncertainty": values})
document = (
    st.lists(row | st.lists(values, max_size=4), max_size=4)
    | st.dictionaries(st.sampled_from(["1", "2", "2,1", "rows", "", ","]), values, max_size=3)
    | st.fixed_dictionaries({"rows": st.lists(row, max_size=3) | values})
)


@searches(80)
def test_any_python_value(search):
    search(lambda example: read_or_refused(*example, "numbers"), st.tuples(document, nodes))


PIECES = ["", "[", "{", "}", '"', ",", "1" * 5000, "1e99999", "NaN", "\\ud800", "\x00", "[" * 3000]


@st.composite
def json_text(draw):
    """A JSON text, whole or with a few characters replaced."""
    text = json.dumps(draw(document))
    for _ in range(draw(st.integers(0, 2))):
        start, length = draw(st.integers(0, len(text))), draw(st.integers(0, 3))
        piece = draw(st.sampled_from(PIECES))
        text = text[:start] + piece + text[start + length :]
    return text


@searches(80)
def test_any_json_text(search):
    def work(example):
        text, names = example
        # Other texts are names of files.
        if text.lstrip()[:1] in ("{", "["):
            read_or_refused(text, names, "numbers")

    search(work, st.tuples(json_text(), nodes))
