"""Averages against the plain evaluation, published limits, and closed forms of small cases."""

from __future__ import annotations

from fractions import Fraction as F

import plain_averages as reference
import pytest
from building import make_case, plain_number, plain_theory
from flint import fmpq
from on_path import theory_on

import ratomega
from ratomega.case.setting import own_setting
from ratomega.exact.rational import as_fraction

GENERIC, SINGULAR = ("7/5", "1"), [("1", "1"), ("2", "1"), ("1", "-1"), ("2", "-3")]
ONE = [{"coulomb": ["1/3"], "antifundamental": ["1/2"], "fundamental": ["2/11"]}]
TWO = [{"coulomb": ["1/3", "-2/5"], "antifundamental": ["1/2", "3/11"], "fundamental": ["2/13"]}]
THREE = [{"coulomb": ["1/3", "-2/5", "4/7"], "fundamental": ["2/13"]}]
ADJOINT = [{"coulomb": ["1/3", "-2/5"], "adjoint": ["3/11"]}]
EDGE = [{"coulomb": ["1/3", "1/11"], "antifundamental": ["1/2"]}, {"coulomb": ["-2/5"], "fundamental": ["2/13"]}]
THEORIES = {
    "one colour": (ONE, (), 4),
    "two colours": (TWO, (), 3),
    "three colours": (THREE, (), 2),
    "adjoint": (ADJOINT, (), 2),
    "two nodes": (EDGE, [(1, 2, "1/17")], 2),
}
# No root of any Y is among them; x = 2 would not do at every ratio.
POINTS = [F(29, 3), F(-31, 5)]


def case_of(name, eps):
    nodes, edges, charge = THEORIES[name]
    return make_case(*eps, nodes, edges=edges, charge=charge)


def check(case, *, of, points=POINTS, powers=5):
    """Every coefficient of every node against the plain evaluation on the case's own path."""
    theory = plain_theory(own_setting(case))
    result = ratomega.average(case, of=of, powers=powers)
    assert {c.status for a in result for c in a} == {"finite"}
    several = len(case.theory.nodes) > 1
    for v, node in enumerate(case.theory.nodes):
        prefix = f"{node.name}: " if several else ""
        for charge in case.charges:
            if of == "trace-powers":
                for n in range(1, powers + 1):
                    expected = reference.average(theory, charge, reference.trace_sums(theory, v, n))
                    found = plain_number(result[f"{prefix}Tr phi^{n}"][charge].value)
                    assert found == reference.value(expected), (charge, n)
            elif of == "size":
                expected = reference.average(theory, charge, reference.size_sums(theory, v))
                assert result[f"{prefix}size"][charge].value == reference.value(expected), charge
            else:
                for x in points:
                    exact, sign = fmpq(x.numerator, x.denominator), 1 if of == "Y(x)" else -1
                    sums = reference.product_sums(
                        theory, lambda c, v=v, x=exact, sign=sign: reference.y_factors(theory, c, v, x, sign)
                    )
                    expected = reference.value(reference.average(theory, charge, sums))
                    assert plain_number(result[f"{prefix}{of}"][charge].value.at(x=exact)) == expected, (charge, x)


@pytest.mark.parametrize("of", ["Y(x)", "1/Y(x)", "trace-powers", "size"])
@pytest.mark.parametrize("name", THEORIES)
def test_averages_at_a_generic_ratio(name, of):
    check(case_of(name, GENERIC), of=of)


@pytest.mark.parametrize("of", ["Y(x)", "trace-powers"])
@pytest.mark.parametrize("eps", SINGULAR)
def test_averages_where_single_weights_are_singular(eps, of):
    check(case_of("two colours", eps), of=of, points=POINTS[:1])


@pytest.mark.parametrize("name", ["one colour", "three colours", "adjoint", "two nodes"])
@pytest.mark.parametrize("eps", [("1", "1"), ("1", "2")])
def test_averages_of_other_theories_where_single_weights_are_singular(name, eps):
    case = case_of(name, eps)
    check(case, of="Y(x)", points=POINTS[:1])
    check(case, of="trace-powers", powers=3)


def test_the_path_of_the_case_is_followed():
    """Coulomb parameters, masses and both eps move; the limit is that of the standing case, for all is compact."""
    moving = [{"coulomb": ["1/3 + t/7", "-2/5 - 3*t"], "antifundamental": ["1/2 + t", "eps1/5"]}]
    case = make_case("1 + t/2", "1 - t/3", moving, charge=2)
    check(case, of="Y(x)", points=POINTS[:1])
    check(case, of="trace-powers")
    standing = make_case("1", "1", [{"coulomb": ["1/3", "-2/5"], "antifundamental": ["1/2", "1/5"]}], charge=2)
    assert [c.value for c in ratomega.average(case)["Y(x)"]] == [c.value for c in ratomega.average(standing)["Y(x)"]]


@pytest.mark.parametrize("name", ["surviving-pole", "path-dependent", "unrefined-vacuum"])
def test_poles_and_paths_of_averages(name):
    """Where compactness does not decide: status, order and value on every path that is shown."""
    case = ratomega.load_case(name).with_charge(2)
    x = fmpq(29, 3)
    for of in ("Y(x)", "size", "trace-powers"):
        result = ratomega.average(case, of=of, powers=2)
        own = result.header.path.text()
        average = result.averages[-1]
        for c in average:
            shown = c.value if c.value is not None else c.leading if c.leading is not None else c.values[0].value
            for path, order, found in [(own, c.order, shown), *((v.path, v.order, v.value) for v in c.values)]:
                theory = theory_on(case, path)
                if of == "Y(x)":
                    sums = reference.product_sums(
                        theory, lambda f, theory=theory: reference.y_factors(theory, f, 0, x)
                    )
                    found = found.at(x=x)
                elif of == "size":
                    sums = reference.size_sums(theory, 0)
                else:
                    sums = reference.trace_sums(theory, 0, 2)
                expected = reference.average(theory, c.charge, sums, depth=6)
                assert order == max(0, -min(expected, default=0)), (of, c.charge, path)
                assert found == expected.get(-order, 0), (of, c.charge, path)
            assert (c.status == "path-dependent") == (bool(c.values) and c.order == 0)


def test_the_statuses_of_averages():
    def statuses(name, of):
        (average,) = ratomega.average(ratomega.load_case(name).with_charge(2), of=of)
        return [(c.status, c.independence) for c in average]

    assert statuses("surviving-pole", "Y(x)") == [("finite", "theorem"), ("pole", None), ("pole", None)]
    assert statuses("path-dependent", "Y(x)")[1:] == [("finite", "theorem"), ("path-dependent", None)]
    assert statuses("u2-pure", "Y(x)") == [("finite", "theorem")] * 3


def test_averages_beyond_the_rationals():
    case = ratomega.load_case("imaginary-momenta").with_charge(2)
    check(case, of="Y(x)", points=POINTS[:1])
    check(case, of="trace-powers", powers=3)
    assert "sqrt(-1)" in str(ratomega.average(case)["Y(x)"][1].value)


# ---- closed forms and published limits


@pytest.mark.parametrize("eps", [GENERIC, *SINGULAR])
def test_the_first_coefficient_of_y_without_matter(eps):
    """One box: (u - e1)(u - e2)/(u - e) - u = e1 e2/(u - e) with u = x - a, and the weight is 1/(e1 e2)."""
    y = ratomega.average(make_case(*eps, [{"coulomb": ["1/3"]}], charge=1))["Y(x)"]
    e = sum(F(x) for x in eps)
    for x in POINTS:
        assert as_fraction(y[0].value.at(x=x)) == x - F(1, 3)
        assert as_fraction(y[1].value.at(x=x)) == 1 / (x - F(1, 3) - e)


@pytest.mark.parametrize("eps", [GENERIC, *SINGULAR])
def test_the_size_of_one_colour_with_two_flavours(eps):
    """Z = (1 + q)^((a+m1)(a+m2)/(e1 e2)) (Carlsson, Okounkov 0801.2565; from memory), so <k> = (...) q/(1 + q)."""
    node = {"coulomb": ["1/3"], "antifundamental": ["1/2", "3/11"]}
    size = ratomega.average(make_case(*eps, [node], charge=4), of="size")["size"]
    expected = F(1, 3) + F(1, 2)
    expected *= (F(1, 3) + F(3, 11)) / (F(eps[0]) * F(eps[1]))
    assert [as_fraction(c.value) for c in size] == [0, expected, -expected, expected, -expected]


@pytest.mark.parametrize("eps", [("1", "1"), ("1", "-1"), ("2", "1")])
def test_the_seiberg_witten_limit_of_traces(eps):
    """Far out, a >> eps. u = <Tr phi^2>/2 = a^2 + q/(2 a^2) + 5 q^2/(32 a^6) + 9 q^3/(64 a^10) + ... (Klemm, Lerche,
    Theisen hep-th/9505150; Matone hep-th/9506102), and <Tr phi^4> = 2 u^2 + 4 q from the curve Y + q/Y = x^2 - u.
    """
    a = 10**8
    case = make_case(*eps, [{"coulomb": [str(a), str(-a)]}], charge=3)
    result = ratomega.average(case, of="trace-powers")
    u = [F(1), F(1, 2), F(5, 32), F(9, 64)]
    fourth = [2 * sum(u[j] * u[k - j] for j in range(k + 1)) + (4 if k == 1 else 0) for k in range(4)]
    for k in range(4):
        assert abs(as_fraction(result["Tr phi^2"][k].value) * F(a) ** (4 * k - 2) - 2 * u[k]) < F(1, 10**12)
        assert abs(as_fraction(result["Tr phi^4"][k].value) * F(a) ** (4 * k - 4) - fourth[k]) < F(1, 10**12)
    assert [str(c.value) for c in result["Tr phi^1"]] == ["0"] * 4


def test_the_traces_of_one_box_by_hand():
    """Tr phi^n = a^n - [a^n - (a+1)^n - (a+2)^n + (a+3)^n] at (1, 2), and the weight is 1/2."""
    case = make_case("1", "2", [{"coulomb": ["1/3"]}], charge=1)
    traces = ratomega.average(case, of="trace-powers", powers=6)
    a = F(1, 3)
    for n in range(1, 7):
        expected = -(a**n - (a + 1) ** n - (a + 2) ** n + (a + 3) ** n) / 2
        assert as_fraction(traces[f"Tr phi^{n}"][1].value) == expected
