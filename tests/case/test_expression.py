"""Reading expressions: the grammar against plain Fractions and Python's own arithmetic, and what is refused."""

from __future__ import annotations

import re
from decimal import Decimal
from fractions import Fraction

import flint
import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st

from ratomega.case.affine import Affine
from ratomega.case.expression import DEEPEST_NESTING, LONGEST_EXPRESSION, MOST_DIGITS, as_affine, parse_affine
from ratomega.errors import InputError
from ratomega.exact.rational import Rational, as_fraction

TIMES = {"deadline": None, "max_examples": 100}


def values(x):
    """An expression as four Fractions: constant, eps1, eps2, t."""
    return tuple(as_fraction(c) for c in (x.constant, x.eps1, x.eps2, x.t))


@pytest.mark.parametrize(
    ("text", "constant", "eps1", "eps2", "t"),
    [
        ("3/11", "3/11", 0, 0, 0),
        ("eps1/2 + 2*eps2 - t/7", 0, "1/2", 2, "-1/7"),
        ("0.25", "1/4", 0, 0, 0),
        ("1e-3", "1/1000", 0, 0, 0),
        ("2.5E2", 250, 0, 0, 0),
        (".5", "1/2", 0, 0, 0),
        ("7.", 7, 0, 0, 0),
        ("2e1", 20, 0, 0, 0),
        ("-(eps1+eps2)/2", 0, "-1/2", "-1/2", 0),
        ("eps1*2/3", 0, "2/3", 0, 0),
        ("2*3*t*(1/4)", 0, 0, 0, "3/2"),
        ("8/4/2", 1, 0, 0, 0),
        ("1 - 2 - 3", -4, 0, 0, 0),
        ("1 - (2 - 3)", 2, 0, 0, 0),
        ("-1/2*t", 0, 0, 0, "-1/2"),
        ("--1", 1, 0, 0, 0),
        ("2*-t", 0, 0, 0, -2),
        ("+eps2", 0, 0, 1, 0),
        ("\teps1\n +1 ", 1, 1, 0, 0),
        ("0*eps1*eps2", 0, 0, 0, 0),
        ("(eps1 - eps1 + 2)*eps2", 0, 0, 2, 0),
        ("007", 7, 0, 0, 0),
    ],
)
def test_what_is_read(text, constant, eps1, eps2, t):
    assert values(parse_affine(text)) == tuple(Fraction(x) for x in (constant, eps1, eps2, t))


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("", "is empty"),
        (" \t\n", "is empty"),
        ("2eps1", 'write "2*eps1"'),
        ("2 t", 'write "2*t"'),
        ("1e3eps2", 'write "1e3*eps2"'),
        ("2(eps1 + t)", 'write "2*(...)"'),
        ("(eps1)(2)", 'write "(...)*(...)"'),
        ("eps1 eps2", 'write "eps1*eps2"'),
        ("eps1(2)", 'write "eps1*(...)"'),
        ("9**9**9", "power"),
        ("2^3", "power"),
        ("eps1**2", "power"),
        ("sqrt", 'has "sqrt" without "("'),
        ("sqrt 2", 'has "sqrt" without "("'),
        ("sqrt()", "nothing inside"),
        ("sqrt(2", "never closed"),
        ("sqrt(8)", "write 2*sqrt(2)"),
        ("sqrt(-12)", "write 2*sqrt(-3)"),
        ("sqrt(-4)", "write 2*sqrt(-1)"),
        ("sqrt(49)", "write 7"),
        ("sqrt(0)", "write 0"),
        ("sqrt(1/2)", "write 1/2*sqrt(2)"),
        ("sqrt(4/9)", "write 2/3"),
        ("sqrt(eps1)", "takes the root of eps1"),
        ("sqrt(sqrt(2))", "takes the root of 1*sqrt(2)"),
        ("sqrt(10000000000001)", "numbers under a root go up to"),
        ("sqrt(" + "*".join(["1e399"] * 100) + ")", "numbers under a root go up to"),
        ("sqrt(2) + sqrt(3)", "sqrt(2) and sqrt(3) occur together"),
        ("i*sqrt(3)", "i and sqrt(3) occur together"),
        ("2i", 'write "2*i"'),
        ("2sqrt(2)", 'write "2*sqrt"'),
        ("i(2)", 'write "i*(...)"'),
        ("1 + I", "the imaginary unit is written i"),
        ("2j", "the imaginary unit is written i"),
        ("1/(i*i + 1)", "divides by zero"),
        ("i*t/t", "divides by t"),
        ("2 + sin(t)", 'calls the function "sin"'),
        ("max(1,2)", 'calls the function "max"'),
        ("__import__('os').system('true')", 'calls the function "__import__"'),
        ("esp1/2", 'the nearest known one is "eps1"'),
        ("epsilon2", 'the nearest known one is "eps2"'),
        ("T/7", 'the nearest known one is "t"'),
        ("pi", 'unknown name "pi"; the names known here: eps1, eps2, t'),
        ("2e", 'unknown name "e"'),
        ("0x10", 'unknown name "x10"'),
        ("inf", 'unknown name "inf"'),
        ("eps1*eps2", "multiplies eps1 by eps2"),
        ("t*(1 + t)", "multiplies t by 1 + t"),
        ("1/eps1", "divides by eps1"),
        ("eps1/eps1", "divides by eps1"),
        ("1/0", "divides by zero"),
        ("3/(1 - 1)", "divides by zero"),
        ("eps1/0.0", "divides by zero"),
        ("()", "nothing inside"),
        ("(1 + t", "never closed"),
        ("1 + t)", '")" without "("'),
        ("1 +", "ends where a number or a name is expected"),
        ("*3", 'has "*"'),
        ("2 * * 3", 'has "*"'),
        ("1.2.3", "one number"),
        ("1 2", "one number"),
        ("1_000", 'contains "_"'),
        ("1,5", 'write "." instead'),
        ("1 − t", 'write "-" instead'),
        ("2·t", 'write "*" instead'),
        ("ε1", 'write "eps" instead'),
        ("٣/7", "the digits are 0 to 9"),
        ("1٣", "the digits are 0 to 9"),
        ("１", "the digits are 0 to 9"),
        ("²", "the digits are 0 to 9"),
        ("'1'", "contains \"'\""),
        ("1\x00", r"\x00"),
        ("\x1b[31m", r"\x1b"),
        ("1e999", "exponent"),
        ("1e99999999", "exponent"),
        ("1e-300", "digits"),
    ],
)
def test_what_is_refused(text, said):
    with pytest.raises(InputError) as caught:
        parse_affine(text, where="demo.toml: node[1].coulomb[2]")
    (problem,) = caught.value.problems
    assert said in problem.message
    assert problem.where == "demo.toml: node[1].coulomb[2]"


@pytest.mark.parametrize(
    ("text", "canonical"),
    [
        ("i", "1*sqrt(-1)"),
        ("sqrt(-1)", "1*sqrt(-1)"),
        ("1+2*i/3", "1 + 2/3*sqrt(-1)"),
        ("i*i", "-1"),
        ("sqrt(21)/7", "1/7*sqrt(21)"),
        ("-sqrt(2)*(1 - sqrt(2)/4)", "1/2 - 1*sqrt(2)"),
        ("1/(1 + sqrt(2))", "-1 + 1*sqrt(2)"),
        ("sqrt(-7)*eps1 - eps2/2 + (1 + sqrt(-7))*t", "1*sqrt(-7)*eps1 - eps2/2 + (1 + 1*sqrt(-7))*t"),
        ("sqrt(5)*eps1*sqrt(5)", "5*eps1"),
        ("sqrt(3*7)", "1*sqrt(21)"),
        ("-i*eps2", "-1*sqrt(-1)*eps2"),
    ],
)
def test_numbers_of_a_quadratic_field_are_read_and_written(text, canonical):
    expression = parse_affine(text)
    assert str(expression) == canonical
    assert parse_affine(canonical) == expression
    assert sympy.simplify(sympy.sympify(canonical) - sympy.sympify(text.replace("i", "I"))) == 0


def outcome(text, **options):
    """The expression, or the message of its refusal; anything but ``InputError`` goes through."""
    try:
        return parse_affine(text, **options)
    except InputError as error:
        (problem,) = error.problems
        assert problem.message.isprintable()
        assert len(problem.message) < 400
        return problem.message


def test_bounds_are_where_they_are_said_to_be():
    assert outcome("-" * (LONGEST_EXPRESSION - 1) + "1") == Affine(Rational((-1) ** (LONGEST_EXPRESSION - 1)))
    assert f"{LONGEST_EXPRESSION + 1} characters" in outcome("-" * LONGEST_EXPRESSION + "1")
    assert "100000 characters" in outcome("1+" * 50_000)
    assert outcome("(" * DEEPEST_NESTING + "t" + ")" * DEEPEST_NESTING) == Affine(t=Rational(1))
    assert "nested deeper" in outcome("(" * (DEEPEST_NESTING + 1) + "t" + ")" * (DEEPEST_NESTING + 1))
    # Nesting counts what is open at a time, not how many parentheses there are.
    assert outcome("+".join(["(1)"] * 300)) == Affine(Rational(300))
    assert values(outcome("9" * MOST_DIGITS)) == (10**MOST_DIGITS - 1, 0, 0, 0)
    assert "digits" in outcome("1" + "0" * MOST_DIGITS)
    assert "digits" in outcome("*".join(["1e150"] * 300))
    assert "digits" in outcome("t/1" + "0" * MOST_DIGITS)
    assert "characters" in outcome("1" * 1000)


@pytest.mark.parametrize("text", ["eps1", "1 + eps2", "2eps1", "eps2*0 + 1"])
def test_only_t_moves_the_background(text):
    message = outcome(text, symbols=("t",))
    assert "in eps1 and eps2 themselves only t may occur" in message


def test_other_symbols():
    assert outcome("1 + t/2", symbols=("t",)) == Affine(Rational(1), t=Rational(1, 2))
    assert "unknown name" in outcome("s", symbols=("t",))
    assert "no symbol at all" in outcome("t", symbols=())


def test_numbers_from_python():
    third = Affine(Rational(1, 3))
    for value in (Fraction(1, 3), flint.fmpq(1, 3), sympy.Rational(1, 3), "1/3", third):
        assert as_affine(value) == third
    assert as_affine(sympy.I / 2 - 1) == as_affine("-1 + i/2")
    assert as_affine(sympy.sqrt(-3)) == as_affine("sqrt(-3)")
    assert as_affine(7) == as_affine(flint.fmpz(7)) == as_affine(Decimal("7.0")) == Affine(Rational(7))


@pytest.mark.parametrize(
    ("value", "said"),
    [
        (0.5, '"1/2" or "0.5"'),
        (0.1, '"1/10" or "0.1"'),
        (float("nan"), "not exact"),
        (float("inf"), "not exact"),
        (True, "truth value"),
        (None, "exact number, not null"),
        (1j, "the complex 1j is not exact"),
        (sympy.pi, "not an exact number"),
        (sympy.sqrt(2) + sympy.sqrt(3), "does not lie in one quadratic field"),
        (sympy.root(2, 3), "not an exact number"),
        ([1], "list"),
        (sympy.Symbol("x"), "Symbol"),
        (sympy.Float(0.5), "Float"),
        (Decimal("NaN"), "Decimal"),
        (10**MOST_DIGITS, "digits"),
        (Rational(10) ** 100_000, "digits"),
        pytest.param(10**100_000, "digits", id="a huge int"),
        (Fraction(1, 10**MOST_DIGITS), "digits"),
    ],
)
def test_what_is_refused_from_python(value, said):
    with pytest.raises(InputError, match=re.escape(said)) as caught:
        as_affine(value, where="here")
    assert caught.value.problems[0].where == "here"


def test_an_expression_object_obeys_the_same_symbols():
    with pytest.raises(InputError, match="only t may occur"):
        as_affine(Affine(eps1=Rational(1)), symbols=("t",))


# The grammar, generated together with its value in plain Fractions: (text, [constant, eps1, eps2, t]).
UNITS = {"eps1": 1, "eps2": 2, "t": 3}


def _constant(x):
    return [x, Fraction(0), Fraction(0), Fraction(0)]


def _literal(whole, decimals, exponent):
    tail = "" if exponent is None else f"e{exponent}"
    text = f"{whole}{tail}" if decimals is None else f"{whole}.{decimals}{tail}"
    return text, _constant(Fraction(text))


literals = st.builds(
    _literal,
    st.integers(0, 99),
    st.none() | st.from_regex("[0-9]{1,3}", fullmatch=True),
    st.none() | st.integers(-4, 4),
)
names = st.sampled_from(sorted(UNITS)).map(lambda n: (n, [Fraction(k == UNITS[n]) for k in range(4)]))


def _extend(inner):
    space = st.sampled_from(["", " ", "  "])
    sign = st.sampled_from("+-")
    signed = st.builds(lambda s, x: (f"{s}({x[0]})", [-c if s == "-" else c for c in x[1]]), sign, inner)
    added = st.builds(
        lambda x, s, y, gap: (
            f"({x[0]}){gap}{s}{gap}({y[0]})",
            [a + b if s == "+" else a - b for a, b in zip(x[1], y[1], strict=True)],
        ),
        inner,
        sign,
        inner,
        space,
    )
    left = st.builds(lambda n, x, g: (f"{n[0]}{g}*{g}({x[0]})", [n[1][0] * c for c in x[1]]), literals, inner, space)
    right = st.builds(lambda x, n, g: (f"({x[0]}){g}*{g}{n[0]}", [n[1][0] * c for c in x[1]]), inner, literals, space)
    over = st.builds(
        lambda x, n: (f"({x[0]})/{n[0]}", [c / n[1][0] for c in x[1]]), inner, literals.filter(lambda n: n[1][0] != 0)
    )
    return signed | added | left | right | over


@settings(**TIMES)
@given(st.recursive(literals | names, _extend, max_leaves=12))
def test_grammar_against_fractions(made):
    text, expected = made
    assert values(parse_affine(text)) == tuple(expected)


rationals = st.fractions(max_denominator=10**6).map(lambda x: Rational(x.numerator, x.denominator))


@settings(**TIMES)
@given(st.builds(Affine, rationals, rationals, rationals, rationals))
def test_canonical_text_reads_back(x):
    assert parse_affine(str(x)) == x


def test_the_largest_numbers_read_back():
    top = Rational(-(10**MOST_DIGITS) + 1, 10**MOST_DIGITS - 2)
    x = Affine(top, top, top, top)
    assert parse_affine(str(x)) == x


NUMBER = re.compile(r"(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")


def by_python(text, eps1, eps2, t):
    """The text evaluated by Python's own grammar in Fractions."""
    # Names first, since "eps1" contains a digit.
    named = re.sub(r"eps1|eps2|t", lambda m: {"eps1": "A", "eps2": "B", "t": "C"}[m[0]], text)
    code = NUMBER.sub(lambda m: f"F('{m[0]}')", named).strip().replace("\n", " ")
    return eval(code, {"F": Fraction, "A": eps1, "B": eps2, "C": t})


pieces = st.sampled_from(
    ["eps1", "eps2", "t", "1", "2", "0", "3/7", "0.5", "1e-2", ".", "e", "+", "-", "*", "/", "(", ")", " ", "**", "^"]
)


@settings(deadline=None, max_examples=500)
@given(st.lists(pieces, max_size=9).map("".join))
def test_whatever_is_accepted_means_what_python_says(text):
    read = outcome(text)
    if isinstance(read, Affine):
        constant, *slopes = values(read)
        for point in ((Fraction(2), Fraction(-3, 5), Fraction(7)), (Fraction(1, 9), Fraction(4), Fraction(-1, 3))):
            assert constant + sum(s * x for s, x in zip(slopes, point, strict=True)) == by_python(text, *point)
