"""The gate for numbers against Python's fractions and decimal modules."""

from __future__ import annotations

from decimal import MAX_EMAX, MIN_EMIN, ROUND_HALF_EVEN, Context, Decimal
from fractions import Fraction
from math import lcm

import flint
import pytest
import sympy
from hypothesis import example, given, settings
from hypothesis import strategies as st

from ratomega.errors import InputError
from ratomega.exact.rational import (
    LARGEST_EXPONENT,
    LONGEST_TEXT,
    Rational,
    as_fraction,
    as_rational,
    common_denominator,
    decimal_text,
    exact_text,
    from_exact_text,
)

MANY = settings(deadline=None, max_examples=100)

fractions = st.builds(Fraction, st.integers(-(10**30), 10**30), st.integers(1, 10**30))


def rational(x):
    return Rational(x.numerator, x.denominator)


@MANY
@given(fractions)
def test_numbers_come_in_and_go_out_unchanged(x):
    value = as_rational(x)
    assert (int(value.p), int(value.q)) == (x.numerator, x.denominator)
    assert as_fraction(value) == x
    assert exact_text(value) == str(x)
    assert from_exact_text(str(x)) == as_rational(str(x)) == value
    assert as_rational(sympy.Rational(x.numerator, x.denominator)) == value
    assert as_rational(value) is value


@MANY
@given(st.from_regex(r"[+-]?([0-9]{1,6}(\.[0-9]{0,6})?|\.[0-9]{1,6})([eE][+-]?[0-9]{1,2})?", fullmatch=True))
def test_decimal_literals_mean_what_fractions_say(text):
    assert as_fraction(as_rational(text)) == Fraction(text)


@MANY
@given(st.from_regex(r" ?[+-]?[0-9]{1,9} ?/ ?[0-9]{1,9} ?", fullmatch=True))
def test_quotients_mean_what_fractions_say(text):
    top, bottom = text.split("/")
    if int(bottom) == 0:
        with pytest.raises(InputError, match="divides by zero"):
            as_rational(text)
    else:
        assert as_fraction(as_rational(text)) == Fraction(int(top), int(bottom))


SEVEN = [7, flint.fmpz(7), Fraction(7), Decimal("7.00"), sympy.Integer(7), "7", " +7 ", "14/2", "0.7e1"]


@pytest.mark.parametrize("value", SEVEN)
def test_seven_in_every_form(value):
    assert as_rational(value) == Rational(7)


@pytest.mark.parametrize(
    ("value", "said"),
    [
        (0.1, '"1/10" or "0.1"'),
        (0.3333333333333333, '"1/3" or "0.3333333333333333"'),
        (float("nan"), '"1/3"'),
        (float("-inf"), '"1/3"'),
        (True, "truth value"),
        (None, "exact number, not null"),
        (1j, "complex"),
        (Decimal("Infinity"), "Decimal"),
        (sympy.pi, "Pi"),
        (sympy.Float("0.5"), "Float"),
        (b"1", "bytes"),
        ("", "not an exact number"),
        ("1/", "not an exact number"),
        ("/2", "not an exact number"),
        ("1/2/3", "not an exact number"),
        ("1 2", "not an exact number"),
        ("--1", "not an exact number"),
        ("1/-2", "not an exact number"),
        ("1_000", "not an exact number"),
        ("0x10", "not an exact number"),
        ("٣", "not an exact number"),
        ("½", "not an exact number"),
        ("nan", "not an exact number"),
        ("inf", "not an exact number"),
        ("1/0", "divides by zero"),
        ("1/0.0e5", "divides by zero"),
        ("1e401", "exponent"),
        ("1e-999999999999", "exponent"),
        ("1" * (LONGEST_TEXT + 1), "characters"),
    ],
)
def test_what_is_refused(value, said):
    with pytest.raises(InputError) as caught:
        as_rational(value, "case.toml: charge")
    (problem,) = caught.value.problems
    assert said in problem.message
    assert problem.where == "case.toml: charge"


def test_the_largest_that_is_read():
    assert as_rational("1" * LONGEST_TEXT) == Rational((10**LONGEST_TEXT - 1) // 9)
    assert as_rational(f"1e{LARGEST_EXPONENT}") == Rational(10) ** LARGEST_EXPONENT
    assert as_rational(f"1e-{LARGEST_EXPONENT}") == 1 / Rational(10) ** LARGEST_EXPONENT


@MANY
@given(st.text(max_size=30) | st.text(alphabet="0123456789./eE+- ", max_size=15))
def test_any_text_is_a_number_or_refused(text):
    try:
        value = as_rational(text)
    except InputError:
        return
    assert as_fraction(value) == Fraction(text.replace(" ", "")) if "/" not in text else value.q >= 1


NOT_EXACT = ["2/4", "1/1", "1/0", "1/-2", "+1", "1.0", " 1", "", "-", "/", "x", "1/", "0/5", "-0", "01", "٣", "1\n"]


@pytest.mark.parametrize("text", NOT_EXACT)
def test_only_the_exact_form_reads_back(text):
    with pytest.raises(ValueError, match=r"exact number|lowest terms"):
        from_exact_text(text)


def test_exact_text_of_any_length():
    huge = Rational(10**20_000 + 1, 3)
    assert from_exact_text(exact_text(huge)) == huge


CONTEXTS = {n: Context(prec=n, rounding=ROUND_HALF_EVEN, Emin=MIN_EMIN, Emax=MAX_EMAX) for n in (1, 2, 3, 5, 12, 30)}


@settings(deadline=None, max_examples=250)
@given(fractions, st.sampled_from(sorted(CONTEXTS)))
@example(Fraction(25, 100), 1)
@example(Fraction(35, 100), 1)
@example(Fraction(-125, 1000), 2)
@example(Fraction(9995, 1000), 3)
@example(Fraction(999_999_999_999_5, 10), 12)
@example(Fraction(99999, 10**9), 3)
@example(Fraction(10**40), 12)
@example(Fraction(1, 10**40), 12)
@example(Fraction(0), 12)
def test_rounding_against_decimal(x, digits):
    text = decimal_text(rational(x), digits)
    expected = CONTEXTS[digits].divide(Decimal(x.numerator), Decimal(x.denominator))
    assert Decimal(text) == expected
    assert text.startswith("-") == (x < 0)
    mantissa = text.lstrip("-").split("e")[0]
    # No zeros that say nothing, and no more digits than asked.
    assert not ("." in mantissa and mantissa.endswith(("0", ".")))
    assert len(mantissa.replace(".", "").strip("0")) <= digits


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (Rational(0), "0"),
        (Rational(5), "5"),
        (Rational(-1, 8), "-0.125"),
        (Rational(2, 3), "0.666666666667"),
        (Rational(123456789012), "123456789012"),
        (Rational(1234567890123), "1.23456789012e+12"),
        (Rational(1, 10**5), "0.00001"),
        (Rational(1, 10**6), "1e-06"),
        (Rational(-(10**12)), "-1e+12"),
        (Rational(1999999999999, 2), "1e+12"),
    ],
)
def test_the_look_of_a_decimal(value, text):
    assert decimal_text(value) == text


def test_a_decimal_of_a_huge_number():
    assert decimal_text(Rational(10) ** 30_000 / 7) == "1.42857142857e+29999"
    assert decimal_text(1 / (Rational(10) ** 30_000 * 7)) == "1.42857142857e-30001"


@MANY
@given(st.lists(fractions, max_size=6))
def test_common_denominator(values):
    assert common_denominator(rational(x) for x in values) == lcm(*(x.denominator for x in values))
