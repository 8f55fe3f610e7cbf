"""Regularity in x: T(x) is a polynomial at rational points and the plain average; wrong weights are noticed."""

from __future__ import annotations

from fractions import Fraction as F

import plain
import plain_averages as reference
import pytest
from building import make_case, plain_theory, plain_values
from flint import fmpq

import ratomega
from ratomega import weights as weights_module
from ratomega.averages import functions
from ratomega.averages.characters import character_terms, is_linear
from ratomega.case.setting import own_setting
from ratomega.exact.rational import as_fraction
from ratomega.validator import regularity
from ratomega.validator.regularity import (
    Regular,
    check_dyson_schwinger,
    check_regular_coefficients,
    check_regularity,
    check_trace_square,
    regularity_checks,
)
from ratomega.validator.verdict import Kind, Verdict
from ratomega.weights import Weights

RATIOS = [("1", "1"), ("2", "1"), ("1", "-1")]
COULOMB = ["1/3", "-2/5", "4/7"]
MASSES = ["1/2", "3/11", "-5/13", "2/17", "7/9", "-1/4"]
NAMES = ["regularity in x", "coefficients of the regular average", "first Dyson-Schwinger identity"]


def one_node(eps, rank, flavours, charge, *, fundamental=1):
    """The last ``fundamental`` of the flavours are fundamentals, the others antifundamentals."""
    cut = max(flavours - fundamental, 0)
    node = {
        "coulomb": COULOMB[:rank],
        "antifundamental": MASSES[:cut],
        "fundamental": MASSES[cut:flavours],
    }
    return make_case(*eps, [node], charge=charge)


def two_nodes(eps, ranks, charge=3):
    """An edge from the first to the second; as many flavours as make both nodes conformal, up to three each."""
    nodes = []
    for rank, other, shift in ((ranks[0], ranks[1], 0), (ranks[1], ranks[0], 1)):
        flavours = MASSES[3 * shift : 3 * shift + min(3, 2 * rank - other)]
        nodes.append({"coulomb": ["1/3", "-2/5"][:rank] if not shift else ["4/7", "1/11"][:rank],
                      "antifundamental": flavours[:1], "fundamental": flavours[1:]})
    return make_case(*eps, nodes, edges=[(1, 2, "1/19")], charge=charge)


def weights_of(case):
    return Weights(own_setting(case))


def verdicts(checks):
    return {check.name: check.verdict for check in checks}


def all_agree(case, names):
    checks = regularity_checks(weights_of(case), case.charges)
    assert all(check.verdict is Verdict.AGREES and check.kind is Kind.CONSISTENCY for check in checks), checks
    assert [check.name for check in checks] == names
    return checks


def polynomials(case, node=0):
    """T by charge, all of them finite."""
    regular = Regular(weights_of(case), case.charges, node)
    found = {charge: regular.at(charge) for charge in case.charges}
    assert regular.reach == case.charges
    assert all(series.order == 0 for series in found.values())
    return {charge: series.leading for charge, series in found.items()}


GRID = [(1, f) for f in range(3)] + [(2, f) for f in range(5)]
HEAVY = [(3, f) for f in range(7)]


def check_one_node(eps, rank, flavours):
    case = one_node(eps, rank, flavours, 4)
    weights = weights_of(case)
    regular = Regular(weights, case.charges, 0)
    checks = [
        check_regularity(regular),
        check_regular_coefficients(regular),
        check_dyson_schwinger(weights, case.charges, 0),
        check_trace_square(weights, case.charges, 0),
    ]
    if rank == 3:
        # No closed coefficients are claimed for three colours.
        assert checks.pop(1) is None
    for check in checks:
        assert (check.verdict, check.kind) == (Verdict.AGREES, Kind.CONSISTENCY), check
        assert "up to charge 4" in check.evidence
    for charge in case.charges:
        function = regular.at(charge).leading
        # The denominator is a number, and the degree is that of x^N at charge 0, below or at it later.
        assert function.is_polynomial()
        assert function.degree("x") <= rank - (0 if charge == (0,) or (charge == (1,) and flavours == 2 * rank) else 1)


@pytest.mark.parametrize(("rank", "flavours"), GRID)
@pytest.mark.parametrize("eps", RATIOS)
def test_one_node_with_every_number_of_flavours(eps, rank, flavours):
    check_one_node(eps, rank, flavours)


@pytest.mark.parametrize(("eps", "flavours"), [(("1", "1"), 6), (("2", "1"), 1), (("1", "-1"), 4)])
def test_three_colours(eps, flavours):
    check_one_node(eps, 3, flavours)


@pytest.mark.long
@pytest.mark.parametrize(("rank", "flavours"), HEAVY)
@pytest.mark.parametrize("eps", RATIOS)
def test_three_colours_with_every_number_of_flavours(eps, rank, flavours):
    check_one_node(eps, rank, flavours)


def check_two_nodes(eps, ranks):
    case = two_nodes(eps, ranks)
    names = [name.format(v) for v in ("n1", "n2") for name in (
        "regularity in x, node {}", "first Dyson-Schwinger identity, node {}", "second chiral trace, node {}")]
    checks = all_agree(case, names)
    assert all("up to total charge 3" in check.evidence for check in checks)
    assert [f"a polynomial of degree {ranks[v]} at most" in checks[3 * v].evidence for v in (0, 1)] == [True, True]


@pytest.mark.parametrize(("eps", "ranks"), [(e, r) for e in RATIOS for r in ((1, 1), (2, 1))] + [(RATIOS[0], (2, 2))])
def test_two_nodes(eps, ranks):
    check_two_nodes(eps, ranks)


@pytest.mark.long
@pytest.mark.parametrize("ranks", [(1, 2), (2, 2)])
@pytest.mark.parametrize("eps", RATIOS)
def test_two_nodes_of_two_colours(eps, ranks):
    check_two_nodes(eps, ranks)


def test_three_nodes_in_a_line_with_the_middle_one():
    """The middle node has the six terms of the antisymmetric tensor of A_3."""
    case = ratomega.load_case("three-nodes").with_charge(2)
    setting = own_setting(case)
    assert [len(character_terms(setting, v, [(3, 3, 3)])) for v in range(3)] == [4, 6, 4]
    all_agree(case, [check.name for check in regularity_checks(Weights(setting), case.charges)])


# ---- against the plain evaluation, and closed formulas


@pytest.mark.parametrize("eps", [("7/5", "1"), ("1", "1"), ("2", "1")])
def test_the_polynomial_of_one_node_is_the_plain_average(eps):
    """T(x) = <Y(x + eps) + (-1)^N q P(x)/Y(x)>, Nekrasov 1512.05388, written out in the test."""
    case = one_node(eps, 2, 3, 2)
    theory = plain_theory(own_setting(case))
    shift = theory["eps1"] + theory["eps2"]
    for x in (fmpq(29, 3), fmpq(-31, 5)):
        above = reference.product_sums(theory, lambda c, x=x: reference.y_factors(theory, c, 0, plain.Line(x) + shift))

        def below(c, x=x):
            node = theory["nodes"][0]
            masses = [*node["antifundamental"], *(shift - m for m in node["fundamental"])]
            return [*reference.y_factors(theory, c, 0, x, -1), *((plain.Line(x) + m, 1) for m in masses)]

        inverse = reference.product_sums(theory, below)
        for charge, function in polynomials(case).items():
            expected = reference.average(theory, charge, above)
            if charge[0]:
                lower = reference.average(theory, (charge[0] - 1,), inverse)
                expected = reference.add(expected, lower)
            assert function.at(x=x) == reference.value({p: v for p, v in expected.items() if v != 0}), charge


@pytest.mark.parametrize("eps", RATIOS)
@pytest.mark.parametrize("node", [0, 1])
def test_the_polynomials_of_two_nodes_are_the_plain_averages(eps, node):
    """Edge 1 -> 2 of mass m: T_1 = <Y1(x+e) + (-)^N1 q1 P1(x) Y2(x+e-m)/Y1(x) + (-)^N2 q1 q2 P1(x) P2(x-m)/Y2(x-m)>;
    T_2 from it by reversing the edge, m -> e - m, with q1 -> (-)^N2 q1 and q2 -> (-)^N1 q2.
    """
    ranks = (2, 1)
    case = two_nodes(eps, ranks, charge=2)
    theory = plain_theory(own_setting(case))
    e, m = theory["eps1"] + theory["eps2"], theory["edges"][0][2]
    x, other = plain.Line(fmpq(29, 3)), 1 - node
    m = m if node == 0 else e - m
    # Factors by which a term with q1 or with q1 q2 changes sign when the edge is reversed.
    flip = 1 if node == 0 else (-1) ** ranks[other]
    flip_both = 1 if node == 0 else (-1) ** (ranks[0] + ranks[1])

    def flavours(v, y):
        masses = theory["nodes"][v]
        return [(y + f, 1) for f in masses["antifundamental"]] + [(y + e - f, 1) for f in masses["fundamental"]]

    def y(c, v, at, exponent=1):
        return [*reference.y_factors(theory, c, v, at, exponent)]

    unit = tuple(int(v == node) for v in range(2))
    terms = [
        (1, (0, 0), lambda c: y(c, node, x + e)),
        (
            flip * (-1) ** ranks[node],
            unit,
            lambda c: [*flavours(node, x), *y(c, other, x + e - m), *y(c, node, x, -1)],
        ),
        (
            flip_both * (-1) ** ranks[other],
            (1, 1),
            lambda c: [*flavours(node, x), *flavours(other, x - m), *y(c, other, x - m, -1)],
        ),
    ]
    for charge, function in polynomials(case, node).items():
        expected = {}
        for sign, shift, factors in terms:
            rest = tuple(a - b for a, b in zip(charge, shift, strict=True))
            if min(rest) >= 0:
                part = reference.average(theory, rest, reference.product_sums(theory, factors))
                expected = reference.add(expected, part, sign)
        assert function.at(x=x.c) == reference.value({p: v for p, v in expected.items() if v != 0}), charge


@pytest.mark.parametrize("eps", RATIOS)
def test_the_closed_polynomial_of_one_colour(eps):
    """T = x + e - a - q (x + a + m1 + m2), Nekrasov 1512.05388 (the formula rederived)."""
    e1, e2 = (F(x) for x in eps)
    found = polynomials(one_node(eps, 1, 2, 3, fundamental=0))
    a, masses = F(1, 3), F(1, 2) + F(3, 11)
    for x in (F(2), F(-7, 3)):
        values = [as_fraction(function.at(x=fmpq(x.numerator, x.denominator))) for function in found.values()]
        assert values == [x + e1 + e2 - a, -(x + a + masses), 0, 0]


def test_the_closed_polynomial_of_two_colours_with_four_flavours():
    """T = A(x + e) + q [P/A]_+ + e1 e2 (1 - q) q d/dq log Z, with Z of U(2) at charge 1 in closed form."""
    found = polynomials(one_node(("1", "1"), 2, 4, 1, fundamental=0))
    a1, a2 = F(1, 3), F(-2, 5)
    masses = [F(1, 2), F(3, 11), F(-5, 13), F(2, 17)]

    # One box in colour 1: 1/(e1 e2) prod (a1 + m)/((a2 - a1) (a1 - a2 + e)).
    z = sum(
        (a + masses[0]) * (a + masses[1]) * (a + masses[2]) * (a + masses[3]) / ((b - a) * (a - b + 2))
        for a, b in ((a1, a2), (a2, a1))
    )
    s1 = sum(masses)
    s2 = sum(m * n for i, m in enumerate(masses) for n in masses[:i])
    x = F(5, 3)
    part = x**2 + (s1 + a1 + a2) * x + s2 + s1 * (a1 + a2) + a1**2 + a1 * a2 + a2**2
    assert as_fraction(found[(0,)].at(x=fmpq(5, 3))) == (x + 2 - a1) * (x + 2 - a2)
    assert as_fraction(found[(1,)].at(x=fmpq(5, 3))) == part + z


# ---- where it applies, and what is said


def test_poles_in_t_leave_every_coefficient_a_polynomial():
    case = ratomega.load_case("surviving-pole").with_charge(2)
    found = verdicts(regularity_checks(weights_of(case), case.charges))
    assert found == {
        "regularity in x": Verdict.AGREES,
        "first Dyson-Schwinger identity": Verdict.AGREES,
        "second chiral trace": Verdict.AGREES,
    }
    regular = Regular(weights_of(case), case.charges, 0)
    assert [regular.at(charge).order for charge in case.charges] == [0, 1, 2]


def test_beyond_the_rationals():
    case = ratomega.load_case("imaginary-momenta").with_charge(2)
    all_agree(case, [*NAMES, "second chiral trace"])


@pytest.mark.parametrize("name", ["u1-adjoint", "necklace"])
def test_there_is_no_t_for_adjoints_and_circles(name):
    case = ratomega.load_case(name).with_charge(2)
    assert {check.name.split(",")[0] for check in regularity_checks(weights_of(case), case.charges)} == {
        "second chiral trace"
    }
    assert not is_linear(own_setting(case), 0)
    with pytest.raises(ValueError, match="not a line"):
        character_terms(own_setting(case), 0, case.charges)


def test_charge_zero_alone_is_no_check():
    case = one_node(("1", "1"), 2, 4, 0)
    assert regularity_checks(weights_of(case), case.charges) == ()


def test_what_costs_too_much_is_undecided_and_says_so():
    case = one_node(("1", "1"), 2, 4, 4)
    weights = weights_of(case)
    short = Regular(weights, case.charges, 0, most=20)
    assert short.reach == ((0,), (1,), (2,))
    check = check_regularity(short)
    assert check.verdict is Verdict.AGREES
    assert "up to charge 2 (more is too costly; --depth full allows more)" in check.evidence
    none = Regular(weights, case.charges, 0, most=2)
    found = [check_regularity(none), check_regular_coefficients(none)]
    found += [check(weights, case.charges, 0, most=2) for check in (check_dyson_schwinger, check_trace_square)]
    assert {check.verdict for check in found} == {Verdict.UNDECIDED}
    assert all("more than 2 values" in check.evidence for check in found)
    assert all("ask for it with --depth full" in check.evidence for check in found)


# ---- faults: each must turn the checks red


def tampered(case, wrong):
    """The weights of ``wrong`` with everything else of ``case``: what a fault in a factor would give."""
    weights = weights_of(wrong)
    weights.setting = own_setting(case)
    return weights


def refuted(weights, case):
    checks = regularity_checks(weights, case.charges)
    return {check.name.split(",")[0] for check in checks if check.verdict is Verdict.REFUTED}


def test_a_fundamental_without_eps_is_noticed():
    """phi - m in place of phi - m + eps: the antifundamental of mass -m."""
    others = ["1/2", "2/17"]
    right = {"coulomb": COULOMB[:2], "antifundamental": others, "fundamental": ["3/11"]}
    case = make_case("1", "1", [right], charge=2)
    wrong = make_case("1", "1", [{"coulomb": COULOMB[:2], "antifundamental": [*others, "-3/11"]}], charge=2)
    assert refuted(tampered(case, wrong), case) == set(NAMES)
    assert refuted(weights_of(case), case) == set()


def test_a_reversed_edge_is_noticed():
    case = two_nodes(("2", "1"), (2, 1), charge=2)
    mapping = {
        "charge": 2,
        "background": {"eps1": "2", "eps2": "1"},
        "node": [
            {"name": node.name, "coulomb": [str(a) for a in node.coulomb],
             "antifundamental": [str(m) for m in node.antifundamental],
             "fundamental": [str(m) for m in node.fundamental]}
            for node in case.theory.nodes
        ],
        "edge": [{"from": "n2", "to": "n1", "mass": "1/19"}],
    }
    wrong = ratomega.load_case(mapping)
    assert refuted(tampered(case, wrong), case) == {"regularity in x", "first Dyson-Schwinger identity"}


def test_arms_and_legs_exchanged_are_noticed(monkeypatch):
    case = one_node(("2", "1"), 2, 1, 2)
    right = weights_module.pair_points
    monkeypatch.setattr(
        weights_module,
        "pair_points",
        lambda lam, mu, lam_columns, mu_columns: right(lam_columns, mu_columns, lam, mu),
    )
    found = refuted(weights_of(case), case)
    assert {"regularity in x", "first Dyson-Schwinger identity"} <= found


def test_a_dropped_configuration_is_noticed(monkeypatch):
    case = one_node(("1", "1"), 2, 1, 2)
    right = functions.configurations
    monkeypatch.setattr(functions, "configurations", lambda ranks, charge: list(right(ranks, charge))[:3])
    assert "regularity in x" in refuted(weights_of(case), case)


def test_a_wrong_sign_of_one_mass_is_noticed():
    case = one_node(("1", "1"), 1, 2, 2, fundamental=0)
    wrong = make_case("1", "1", [{"coulomb": COULOMB[:1], "antifundamental": ["1/2", "-3/11"]}], charge=2)
    assert refuted(tampered(case, wrong), case) == set(NAMES)
    # The second trace holds configuration by configuration: it looks at no weight.
    assert check_trace_square(tampered(case, wrong), case.charges, 0).verdict is Verdict.AGREES


def test_a_wrong_coefficient_of_a_polynomial_is_noticed(monkeypatch):
    """T without poles, and not what log Z says: here log Z is off by a factor."""
    case = one_node(("1", "1"), 2, 4, 2)
    regular = Regular(weights_of(case), case.charges, 0)
    assert check_regular_coefficients(regular).verdict is Verdict.AGREES
    right = regularity.size_sums
    monkeypatch.setattr(
        regularity, "size_sums", lambda *known: lambda k, last: [z.scaled(2) for z in right(*known)(k, last)]
    )
    check = check_regular_coefficients(regular)
    assert check.verdict is Verdict.REFUTED
    value, size = regular.at((1,)).leading.at(x=fmpq(0)), plain.coefficient(plain_values(own_setting(case)), (1,))
    assert check.evidence == f"charge 1: T(0) is {value}, not {value + size}"
