"""Tables of numbers: what is read, and that every mistake is named with its row and column."""

from __future__ import annotations

from decimal import Decimal
from fractions import Fraction

import pytest

from ratomega.errors import InputError
from ratomega.verify.table import read_table

ONE, TWO = ["gauge"], ["left", "right"]


def written(tmp_path, text):
    path = tmp_path / "table.csv"
    path.write_text(text, encoding="utf-8")
    return path


def summary(rows):
    return [(row.charge, str(row.value), row.digits) for row in rows]


def test_csv_with_header_comments_and_uncertainty(tmp_path):
    text = "# made up\ncharge,value,uncertainty\n\n1,0.50,0.01\n2,-3/4,\n"
    assert summary(read_table(written(tmp_path, text), ONE)) == [((1,), "1/2", 2), ((2,), "-3/4", None)]


@pytest.mark.parametrize(
    "text", ["1,0.5\n2,1e-3\n", "k,Z\n1,0.5\n2,1e-3\n", "value;charge\n0.5;1\n1e-3;2\n", "1\t.5\n2\t1e-3"]
)
def test_separators_headers_and_the_order_of_columns(tmp_path, text):
    rows = read_table(written(tmp_path, text), ONE)
    assert [(r.charge, str(r.value)) for r in rows] == [((1,), "1/2"), ((2,), "1/1000")]


def test_quivers_have_a_column_a_node(tmp_path):
    text = "right,left,value\n0,1,0.5\n2,1,0.25\n"
    assert [row.charge for row in read_table(written(tmp_path, text), TWO)] == [(1, 0), (1, 2)]
    assert [row.charge for row in read_table({"1,2": "0.5", "0,1": "1"}, TWO)] == [(1, 2), (0, 1)]


def test_json_and_python_values():
    text = '{"rows": [{"charge": [1], "value": 0.50}, {"charge": 2, "value": "1/3"}, [3, "7"]]}'
    assert summary(read_table(text, ONE)) == [((1,), "1/2", 2), ((2,), "1/3", None), ((3,), "7", 1)]
    rows = read_table({1: 0.5, 2: Fraction(1, 3), 3: Decimal("0.250"), 4: 2}, ONE)
    assert summary(rows) == [((1,), "1/2", 16), ((2,), "1/3", None), ((3,), "1/4", 3), ((4,), "2", 1)]


def test_a_typeset_minus_is_a_minus(tmp_path):
    rows = read_table(written(tmp_path, "1,\u22120.5,1e\u22123\n2,\u22123/4,\n"), ONE)
    assert summary(rows) == [((1,), "-1/2", 1), ((2,), "-3/4", None)]


def test_rounding_and_cutting_off_pass_and_a_unit_more_does_not():
    (row,) = read_table({1: "0.667"}, ONE)
    exact = row.value.__class__(2, 3)
    assert row.agrees(exact)
    assert read_table({1: "0.666"}, ONE)[0].agrees(exact)
    assert not read_table({1: "0.668"}, ONE)[0].agrees(exact)
    assert not read_table({1: "0.665"}, ONE)[0].agrees(exact)


@pytest.mark.parametrize(
    ("text", "where", "message"),
    [
        ("charge,value\n1,abc\n", "row 2, column value", "not a number"),
        ("charge,value\n1,nan\n", "row 2, column value", "not a number"),
        ("charge,value\n1,=1+1\n", "row 2, column value", "not a number"),
        ("charge,value\n1,1/0\n", "row 2, column value", "divides by zero"),
        ("charge,value\n1,1e999999\n", "row 2, column value", "exponent"),
        ("charge,value\nx,1\n", "row 2, column charge", "not a charge"),
        ("charge,value\n-1,1\n", "row 2, column charge", "not a charge"),
        ("charge,value\n501,1\n", "row 2, column charge", "beyond"),
        ("charge,value\n1,1\n1,2\n", "row 3, column charge", "row 2 already"),
        ("charge,value\n1\n", "row 2, column 2", "columns"),
        ("charge,value\n1,2,3,4\n", "row 2, column 3", "columns"),
        ("1,0.5,-1\n", "row 1, column uncertainty", "zero or more"),
        ("charge value\n1 0.5\n", "row 2, column 2", "separated by commas, not by blanks"),
        ("charge;value\n1;0,5\n", "row 2, column value", "a point, not a comma"),
        ('1,"0.5\n', "row 1", "no row of a CSV table"),
        ("", "table.csv", "no row"),
        ("charge,value\n", "table.csv", "no row"),
        ("[1, 2", "table.csv", "not a JSON document"),
        ('{"rows": 3}', "rows", "is a list"),
        ('[{"charge": 1}]', "row 1", "missing"),
        ('[{"charge": 1, "value": 1, "wert": 2}]', "row 1", "no column"),
        ('[{"charge": true, "value": 1}]', "row 1, column charge", "integer"),
        ('[{"charge": 1, "value": [1]}]', "row 1, column value", "decimal text"),
        ('[{"charge": 1, "value": NaN}]', "row 1, column value", "not a number"),
    ],
)
def test_mistakes_are_named(tmp_path, text, where, message):
    with pytest.raises(InputError) as caught:
        read_table(written(tmp_path, text), ONE)
    problem = caught.value.problems[0]
    assert problem.where.endswith(where), problem
    assert message in problem.message


def test_all_mistakes_of_a_table_are_collected(tmp_path):
    with pytest.raises(InputError) as caught:
        read_table(written(tmp_path, "x,y\n1,a\n2,0.5\nb,c\n"), ONE)
    assert len(caught.value.problems) == 3


def test_files_that_are_too_large_missing_or_no_text(tmp_path):
    large = tmp_path / "large.csv"
    large.write_bytes(b"1,0.5\n" * 800_000)
    binary = tmp_path / "binary.csv"
    binary.write_bytes(b"\xff\xfe\x00")
    sources = [(large, "larger"), (tmp_path / "none.csv", "cannot be read"), (binary, "not UTF-8")]
    # A file that has no size and no end.
    for path, message in (*sources, ("/dev/zero", "larger"), ("a\0b", "cannot be read")):
        with pytest.raises(InputError, match=message):
            read_table(path, ONE)
    with pytest.raises(InputError, match="at most 10000 rows"):
        read_table([[k, "1"] for k in range(10_001)], ONE)
    with pytest.raises(InputError, match="mapping or a list"):
        read_table(3, ONE)
