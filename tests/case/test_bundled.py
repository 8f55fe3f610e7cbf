"""The bundled cases: each loads, says what it is, is small, agrees with the plain reference, shows what it claims."""

from __future__ import annotations

from fractions import Fraction
from math import factorial

import plain
import pytest
import sympy
from building import plain_number, plain_theory

import ratomega
from ratomega.case.bundled import bundled_names, bundled_text
from ratomega.case.reading import case_from_mapping, case_from_text, case_to_mapping, load_case
from ratomega.case.setting import own_setting
from ratomega.diagrams.tuples import count_all
from ratomega.exact.rational import as_fraction

NAMES = bundled_names()


def test_there_are_enough_and_in_order():
    assert len(NAMES) >= 14
    assert list(NAMES) == sorted(NAMES)
    ratios = {str(load_case(name).background.ratio) for name in NAMES}
    assert {"1", "2", "2/3", "-1", "-3/4"} <= ratios
    ranks = {load_case(name).theory.ranks for name in NAMES}
    assert {(1,), (2,), (3,), (1, 1), (2, 1), (1, 2, 1)} <= ranks


@pytest.mark.parametrize("name", NAMES)
def test_a_case_says_what_it_is(name):
    text = bundled_text(name)
    assert text.startswith("# An invented demo case: ")
    assert text.isascii()
    assert max(len(line) for line in text.splitlines()) <= 120
    case = case_from_text(text, name)
    assert case.title
    nodes = case.theory.nodes
    masses = {
        "an antifundamental of mass m contributes (content + m)": any(n.antifundamental for n in nodes),
        "a fundamental of mass m contributes (content - m + eps1 + eps2)": any(n.fundamental for n in nodes),
        "an adjoint of mass m contributes": any(n.adjoint for n in nodes),
        "Sign of an edge's mass m: (E - m)": bool(case.theory.edges),
    }
    for convention, needed in masses.items():
        assert (convention in text.replace("\n# ", " ")) == needed
    assert case_from_mapping(case_to_mapping(case)) == case


def test_the_charges_are_modest():
    for name in NAMES:
        case = load_case(name)
        assert count_all(case.theory.ranks, case.charge) <= 1500


def test_no_two_are_the_same_theory():
    assert len({load_case(name).hash for name in NAMES}) == len(NAMES)


@pytest.mark.parametrize("name", [name for name in NAMES if not load_case(name).nested])
def test_the_engine_agrees_with_the_plain_reference(name):
    """Limits inside limits have their own comparison, in test_nesting."""
    case = load_case(name)
    point = {symbol: f"{n}/23" for n, symbol in enumerate(case.symbols, 7)}
    theory = plain_theory(own_setting(case.at(**point)))
    for coefficient in ratomega.limit(case):
        if sum(coefficient.charge) > 4:
            break
        expected = plain.laurent_coefficient(theory, coefficient.charge)
        if coefficient.status == "pole":
            assert (-coefficient.order, coefficient.leading) == min(expected.items())
        else:
            value = coefficient.value if coefficient.status == "finite" else coefficient.values[0].value
            assert set(expected) <= {0}
            value = plain_number(value.at(**point) if case.symbols else value)
            assert value == expected.get(0, 0)


def finite(name):
    """{charge: value} of a case whose coefficients are all finite."""
    result = {}
    for coefficient in ratomega.limit(name):
        assert coefficient.status == "finite"
        result[coefficient.charge] = as_fraction(coefficient.value)
    return result


q = sympy.Symbol("q")


def series(expression, order):
    """Taylor coefficients at q = 0 up to the given order, by sympy."""
    polynomial = sympy.Poly(sympy.series(expression, q, 0, order + 1).removeO(), q)
    return {(n,): Fraction(str(polynomial.coeff_monomial(q**n))) for n in range(order + 1)}


def power(base, exponent, top):
    """{n: coefficient} of (1 + base*x)^exponent."""
    return [Fraction(str(sympy.binomial(sympy.Rational(str(exponent)), n) * base**n)) for n in range(top + 1)]


def test_u1_closed_forms():
    # Nekrasov hep-th/0206161 for the first; the binomial for two flavours and the product for an adjoint
    # (Nekrasov, Okounkov hep-th/0306238 at eps1 = -eps2) in general.
    assert finite("u1-pure") == {(k,): Fraction(1, factorial(k)) for k in range(11)}
    exponent = Fraction(5, 6) * Fraction(13, 21) / 2
    assert list(finite("u1-two-flavours").values()) == power(1, exponent, 8)
    m, e1, e2 = Fraction(3, 5), 2, 3
    product = [Fraction(1)] + [Fraction(0)] * 8
    for n in range(1, 9):
        binomial = power(-1, -(m - e1) * (m - e2) / (e1 * e2), 8 // n)
        product = [sum(product[k - n * j] * c for j, c in enumerate(binomial) if n * j <= k) for k in range(9)]
    assert list(finite("u1-adjoint").values()) == product


def pure_u2(e1, e2, a):
    """The coefficients of charge 1 and 2: Nekrasov hep-th/0206161; Flume, Poghossian hep-th/0208176."""
    e = e1 + e2
    first = Fraction(-2) / (e1 * e2 * (4 * a**2 - e**2))
    bottom = (4 * a**2 - e**2) * (4 * a**2 - (2 * e1 + e2) ** 2) * (4 * a**2 - (e1 + 2 * e2) ** 2)
    return first, Fraction(8 * a**2 - 8 * e**2 - e1 * e2) / (e1**2 * e2**2 * bottom)


@pytest.mark.parametrize(("name", "a"), [("u2-pure", Fraction(1, 3)), ("equal-coulomb", 0)])
def test_u2_without_matter(name, a):
    found = finite(name)
    assert (found[1,], found[2,]) == pure_u2(1, 1, a)


def test_four_flavours_at_charge_one():
    # The charge-1 coefficient of U(2) with four flavours through the symmetric functions of the masses.
    e, a = 2, Fraction(1, 3)
    masses = [Fraction(1, n) for n in (2, 4, 5, 7)]
    polynomial = sympy.Poly.from_list([1], q)
    for m in masses:
        polynomial *= sympy.Poly([1, sympy.Rational(str(m))], q)
    s1, s2, s3, s4 = (Fraction(str(c)) for c in polynomial.all_coeffs()[1:])
    top = -2 * (s4 + s2 * a**2 + a**4) + e * (s3 + s1 * a**2)
    assert finite("b1-four-flavours")[1,] == top / (4 * a**2 - e**2)


def test_ising_blocks():
    # Belavin, Polyakov, Zamolodchikov 1984, times (1 - q)^(-1/24).
    root = sympy.sqrt(1 - q)
    factor = (1 - q) ** (-sympy.Rational(1, 24) - sympy.Rational(1, 8))
    assert finite("ising-identity") == series(factor * sympy.sqrt((1 + root) / 2), 6)
    assert finite("ising-energy") == series(factor / sympy.sqrt((1 + root) / 2), 6)


def test_hypergeometric_series():
    # 2F1((a1+m3)/e2, (a1+m4)/e2; 1 + (a1-a2+e1)/e2; q) at (e1, e2) = (2, 1).
    a1, a2, e1, e2 = Fraction(1, 3), Fraction(-1, 3), 2, 1
    x, y, z = (a1 + Fraction(2, 5)) / e2, (a1 + Fraction(3, 7)) / e2, 1 + (a1 - a2 + e1) / e2
    expected = [Fraction(1)]
    for n in range(6):
        expected.append(expected[-1] * (x + n) * (y + n) / ((z + n) * (n + 1)))
    assert list(finite("hypergeometric").values()) == expected


def test_central_charge_25():
    # Al. Zamolodchikov 1986: elliptic block with H = 1; nome and theta functions by sympy-free series reversion.
    nome = sympy.Symbol("n")
    theta2_4 = 16 * nome * (1 + nome**2) ** 4
    theta3 = 1 + 2 * nome + 2 * nome**4
    modulus = sympy.series(theta2_4 / theta3**4, nome, 0, 5).removeO()
    # q = modulus(nome), reverted term by term.
    inverse = q / 16
    for _ in range(4):
        inverse = sympy.series(inverse - (modulus.subs(nome, inverse) - q) / 16, q, 0, 5).removeO()
    a2, e = sympy.Rational(4, 49), 2
    sum_mu, sum_mu2 = 1, sympy.Rational(1, 2)
    z = (
        sympy.expand(16 * inverse / q) ** (-a2)
        * (1 - q) ** (sympy.Rational((sum_mu + e) ** 2, 4))
        * theta3.subs(nome, inverse) ** (2 * sum_mu2 - e**2)
    )
    found = finite("c25-closed-form")
    for charge, value in series(z, 3).items():
        assert found[charge] == value


def test_adjoint_on_the_path():
    # Each cluster sums to its number of members: pairs of partitions, by sympy's count of partitions.
    counts = [int(sympy.functions.combinatorial.numbers.partition(n)) for n in range(6)]
    pairs = [sum(counts[i] * counts[k - i] for i in range(k + 1)) for k in range(6)]
    assert list(finite("adjoint-on-the-path").values()) == pairs


def test_linear_quiver():
    # prod over i <= j of (1 + s_i q_i...q_j)^(l_i r_j/(e1 e2)), s_1 = +1, s_2 = -1, at (1, 1).
    a1, a2, m, left, right, e = Fraction(1, 3), Fraction(-1, 5), Fraction(1, 7), Fraction(1, 2), Fraction(2, 7), 2
    l1, l2 = a1 + left, a2 - a1 + m
    r1, r2 = a1 - a2 + e - m, a2 + e - right
    first, both, second = power(1, l1 * r1, 4), power(1, l1 * r2, 4), power(-1, l2 * r2, 4)
    for (k1, k2), value in finite("linear-quiver").items():
        assert value == sum(first[k1 - n] * second[k2 - n] * both[n] for n in range(min(k1, k2) + 1))


def test_a_surviving_pole():
    # Charge 1 of U(2) with two flavours is (e s1 - 2 (s2 + a^2))/(e1 e2 (4 a^2 - e^2)), s1 and s2 the symmetric
    # functions of the masses; here a = 3/2 + t/7 and e = 3 + t, so that the bracket vanishes like its derivative.
    a, e, s1, s2 = Fraction(3, 2), 3, 6, Fraction(35, 4)
    slope = 2 * (8 * a * Fraction(1, 7) - 2 * e)
    expected = (e * s1 - 2 * (s2 + a**2)) / slope
    pole, second = list(ratomega.limit("surviving-pole"))[1:]
    assert (pole.status, pole.order, as_fraction(pole.leading)) == ("pole", 1, expected)
    assert second.status == "path-dependent"


def test_limits_that_depend_on_the_path():
    statuses = {c.charge[0]: c.status for c in ratomega.limit("path-dependent")}
    assert statuses == {0: "finite", 1: "finite", 2: "path-dependent", 3: "path-dependent", 4: "finite"}


def test_the_unrefined_vacuum():
    # 1559/32768 + 1/(131072 (kappa^2 - 1)) with a = kappa t, here kappa = 1/3.
    *lower, last = ratomega.limit("unrefined-vacuum")
    assert [str(c.value) for c in lower] == ["1", "1/8", "5/64", "15/256"]
    assert last.status == "path-dependent"
    own = as_fraction(last.values[0].value)
    assert own == Fraction(1559, 32768) + 1 / (131072 * (Fraction(1, 9) - 1))
