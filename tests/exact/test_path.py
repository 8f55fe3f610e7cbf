"""Linear forms on the path, and the search for integer combinations, against brute force and sympy."""

from __future__ import annotations

from fractions import Fraction

import sympy
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from ratomega.exact.path import Linear, integer_combination, leaves_the_ratio
from ratomega.exact.rational import Rational

MANY = settings(deadline=None, max_examples=60)
small = st.builds(Fraction, st.integers(-4, 4), st.integers(1, 2))
nonzero = small.filter(bool)


def line(c, d):
    return Linear(Rational(c.numerator, c.denominator), Rational(d.numerator, d.denominator))


@MANY
@given(small, small, small, small, st.integers(-5, 5))
def test_arithmetic_and_text_against_sympy(a, b, c, d, k):
    t = sympy.Symbol("t")
    x, y = line(a, b), line(c, d)

    def by_sympy(c, d):
        return sympy.Rational(c.numerator, c.denominator) + sympy.Rational(d.numerator, d.denominator) * t

    p, q = by_sympy(a, b), by_sympy(c, d)
    for value, expected in [(x + y, p + q), (x - y, p - q), (-x, -p), (x.scaled(k), k * p)]:
        assert sympy.expand(sympy.sympify(str(value), rational=True) - expected) == 0
        assert value.is_zero() == (sympy.expand(expected) == 0)


REACH = range(-40, 41)


def tried(form, e1, e2):
    """All integer pairs within reach, by trying them; 4 clears every denominator that occurs here."""
    (x, y), (c1, d1), (c2, d2) = ([int(4 * number) for number in pair] for pair in (form, e1, e2))
    return [(m, n) for m in REACH for n in REACH if x == m * c1 + n * c2 and y == m * d1 + n * d2]


@settings(deadline=None, max_examples=60)
@given(nonzero, small, nonzero, small, st.integers(-6, 6), st.integers(-6, 6))
def test_a_combination_is_found(c1, d1, c2, d2, m, n):
    form = (m * c1 + n * c2, m * d1 + n * d2)
    e1, e2 = line(c1, d1), line(c2, d2)
    found = integer_combination(line(*form), e1, e2)
    assert found is not None
    assert e1.scaled(found[0]) + e2.scaled(found[1]) == line(*form)
    if leaves_the_ratio(e1, e2):
        assert found == (m, n)
    else:
        assert abs(found[0]) + abs(found[1]) == min(abs(x) + abs(y) for x, y in tried(form, (c1, d1), (c2, d2)))


@settings(deadline=None, max_examples=60)
@given(nonzero, small, nonzero, small, small, small, st.booleans())
def test_what_is_none_against_trying(c1, d1, c2, d2, a, b, same_ratio):
    if same_ratio:
        # A path that stays on the ratio, and a form that moves with it.
        c1, a = Fraction(1), a * 2
        d2, b = d1 * c2, d1 * a
    found = integer_combination(line(a, b), line(c1, d1), line(c2, d2))
    pairs = tried((a, b), (c1, d1), (c2, d2))
    if found is None:
        assert pairs == []
    else:
        assert line(c1, d1).scaled(found[0]) + line(c2, d2).scaled(found[1]) == line(a, b)


@MANY
@given(nonzero, small, nonzero, small)
def test_leaving_the_ratio_is_a_derivative(c1, d1, c2, d2):
    t = sympy.Symbol("t")
    ratio = sum(sympy.Rational(str(x)) * t**k for k, x in enumerate((c2, d2))) / sum(
        sympy.Rational(str(x)) * t**k for k, x in enumerate((c1, d1))
    )
    assert leaves_the_ratio(line(c1, d1), line(c2, d2)) == (sympy.diff(ratio, t).subs(t, 0) != 0)


@MANY
@given(st.integers(-300, 300), st.integers(1, 60), st.integers(1, 60))
def test_the_shortest_pair_on_a_fixed_ratio(target, alpha, beta):
    # Constants only: the classical problem of m alpha + n beta = target.
    assume(alpha != beta)
    form, e1, e2 = (line(Fraction(x), Fraction(0)) for x in (target, alpha, beta))
    found = integer_combination(form, e1, e2)
    pairs = [(m, (target - m * alpha) // beta) for m in range(-400, 401) if (target - m * alpha) % beta == 0]
    if found is None:
        assert pairs == []
    else:
        assert found[0] * alpha + found[1] * beta == target
        assert abs(found[0]) + abs(found[1]) == min(abs(m) + abs(n) for m, n in pairs)
