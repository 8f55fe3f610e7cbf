"""Values of symbols as they are typed: progressions, lists, counting parameters; whatever else is one sentence."""

from __future__ import annotations

from fractions import Fraction

import flint
import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st

from ratomega.case.affine import Affine
from ratomega.case.background import Background
from ratomega.case.progression import MOST_VALUES, Counting, points_of, read_axes, read_counting, split_axis
from ratomega.errors import InputError
from ratomega.exact.quadratic import Quadratic, number_text
from ratomega.exact.rational import ONE, ZERO, Rational

TWO_ONE = Background.make(Affine(Rational(2)), Affine(Rational(1)))


def values(given):
    (axis,) = read_axes({"a": given}, ("a",), TWO_ONE)
    return [number_text(x) for x in axis]


@pytest.mark.parametrize(
    ("given", "expected"),
    [
        ("0 to 1 in 3", ["0", "1/2", "1"]),
        ("1 to -1 in 3", ["1", "0", "-1"]),
        ("0 to 2*i in 5", ["0", "1/2*sqrt(-1)", "1*sqrt(-1)", "3/2*sqrt(-1)", "2*sqrt(-1)"]),
        ("  1/7   to 3/7\tby 1/7 ", ["1/7", "2/7", "3/7"]),
        ("i to -i by -i/2", ["1*sqrt(-1)", "1/2*sqrt(-1)", "0", "-1/2*sqrt(-1)", "-1*sqrt(-1)"]),
        ("eps1/4 to eps1/4 + i in 2", ["1/2", "1/2 + 1*sqrt(-1)"]),
        ("(eps1 + eps2)/2, 0.05*i, 1e-2", ["3/2", "1/20*sqrt(-1)", "1/100"]),
        ("-1/3", ["-1/3"]),
        ([Fraction(1, 3), 2, "i", sympy.sqrt(5), flint.fmpq(1, 7)], ["1/3", "2", "1*sqrt(-1)", "1*sqrt(5)", "1/7"]),
        (("0.5",), ["1/2"]),
    ],
)
def test_what_is_read(given, expected):
    assert values(given) == expected


def test_a_product_has_the_last_symbol_fastest():
    axes = read_axes({"m": "1, 2", "a": "0 to i in 2"}, ("a", "m"), TWO_ONE)
    i = Quadratic(ZERO, ONE, -1)
    assert list(points_of(axes, ("a", "m"))) == [(ZERO, 1), (ZERO, 2), (i, 1), (i, 2)]


@pytest.mark.parametrize(
    ("given", "said"),
    [
        ("", "a value is missing"),
        ("1,,2", "a value is missing"),
        ("1, 1.0", "listed twice"),
        ("0 to 1", "does not say how many"),
        ("0 to 1 in x", "is no number of values"),
        ("0 to 1 in 1", "is no number of values"),
        ("0 to 1 in 2.5", "is no number of values"),
        ("0 to 1 in ²", "is no number of values"),
        ("0 to 1 in 20001", f"between 1 and {MOST_VALUES}"),
        ("0 to 1 in 999999999", f"between 1 and {MOST_VALUES}"),
        ("0 to 1 in 9999999999999", "is no number of values"),
        ("0 to 1 by 1e-9", f"between 1 and {MOST_VALUES}"),
        ("2 to 2 in 5", "begin and end at 2"),
        ("0 to 1 by 0", "the step is zero"),
        ("0 to 1 by 2/7", "the last value before it is 6/7"),
        ("0 to 1 by -1/2", "do not lead to 1"),
        ("0 to 1 by i", "do not lead to 1"),
        ("0 to i by 1", "do not lead to"),
        ("i to sqrt(2) in 4", "do not lie in one quadratic field"),
        ("0 to 1 to 2 in 3", "unknown name"),
        ("0 to t in 3", "contains t"),
        ("0 to b in 3", 'unknown name "b"'),
        ("1; 2", "contains"),
        ("__import__('os')", "not read"),
        ("0 to 9**9 in 3", "power"),
        ("1e401", "beyond 400"),
        ("1/" + "9" * 150 + " to 1/1" + "0" * 148 + "7 in 3", "more than 200 digits"),
        ("1," * 600_000 + "2", "at most 1000000 characters"),
        (["1"] * (MOST_VALUES + 1), f"between 1 and {MOST_VALUES}"),
        ([], f"between 1 and {MOST_VALUES}"),
        ([0.5], "the float 0.5 is not exact"),
        ([1j], "is not exact"),
        ([None], "exact number, not null"),
        (3, "text or a list"),
        (b"12", "text or a list"),
        ({"x": 1}, "text or a list"),
    ],
)
def test_mistakes_are_one_sentence(given, said):
    with pytest.raises(InputError) as caught:
        values(given)
    (problem,) = caught.value.problems
    assert said in problem.message
    assert problem.where.startswith("at.a")
    assert len(problem.message) < 400
    assert problem.message.isprintable()


def test_symbols_that_are_missing_or_unknown():
    with pytest.raises(InputError) as caught:
        read_axes({"b": "1", 3: "1"}, ("a", "m"), TWO_ONE)
    assert [problem.message.partition(";")[0] for problem in caught.value.problems] == [
        'there is no symbol "b"',
        'there is no symbol "3"',
        "no values are given for a",
        "no values are given for m",
    ]
    with pytest.raises(InputError, match="by symbol"):
        read_axes("a = 1", ("a",), TWO_ONE)
    axes = read_axes({"a": "i", "m": "sqrt(2)"}, ("a", "m"), TWO_ONE)
    with pytest.raises(InputError, match="lie in one quadratic field"):
        list(points_of(axes, ("a", "m")))


def test_a_symbol_and_its_values():
    assert split_axis(" a=1 , 2 ") == ("a", "1 , 2")
    for text in ("0 to 1 in 3", "= 3", ""):
        with pytest.raises(InputError, match="names no symbol"):
            split_axis(text)


@pytest.mark.parametrize(
    ("given", "nodes", "expected"),
    [
        ("1/3", 1, [("1/3", "0")]),
        ("0.1 + 0.2*i +/- 1e-10", 1, [("1/10 + 1/5*sqrt(-1)", "1/10000000000")]),
        (str(flint.arb("0.25 +/- 1e-9")), 1, None),
        ("[+/- 0.376]", 1, [("0", "47/125")]),
        ("eps1/10", 2, [("1/5", "0"), ("1/5", "0")]),
        ("1/2, 1/3", 2, [("1/2", "0"), ("1/3", "0")]),
        ([Fraction(1, 2), "1/3 +/- 1/8"], 2, [("1/2", "0"), ("1/3", "1/8")]),
    ],
)
def test_counting_parameters(given, nodes, expected):
    read = read_counting(given, nodes, TWO_ONE)
    if expected is None:
        assert abs(read[0].value - Rational(1, 4)) < read[0].radius < Rational(1, 10**8)
        return
    assert [(number_text(x.value), str(x.radius)) for x in read] == expected
    assert all(isinstance(x, Counting) for x in read)


@pytest.mark.parametrize(
    ("given", "said"),
    [
        ("1,2,3", "2 expected, 3 given"),
        ("", "empty"),
        ("x", "unknown name"),
        ("1 +/- x", "not an exact number"),
        ("1 +/- -1", "below zero"),
        ("1 +- 1/10", "side by side"),
        ("1 +/- 1 +/- 1", "not an exact number"),
        (0.5, "is not exact"),
        (True, "truth value"),
        ({}, "expected an exact number"),
    ],
)
def test_counting_parameters_that_are_none(given, said):
    with pytest.raises(InputError, match=said) as caught:
        read_counting(given, 2, TWO_ONE)
    assert caught.value.problems[0].where == "q"


TEXT = st.lists(
    st.sampled_from([*"0123456789+-*/(),=. ", "to", " in ", " by ", "i", "sqrt(2)", "eps1", "t", "²", "\0", "é"]),
    max_size=12,
).map("".join)


@settings(deadline=None, max_examples=150)
@given(TEXT)
def test_any_text_is_read_or_refused(text):
    assert read_or_said(lambda: values(text))
    assert read_or_said(lambda: read_counting(text, 1, TWO_ONE))


def read_or_said(read):
    """What was read, or the sentences that say why not: no other exception."""
    try:
        return read()
    except InputError as error:
        return [problem.message for problem in error.problems if problem.message.isprintable()]
