"""Identities of the adjoint: rectangles, special masses on the path, one pole in the Coulomb parameter."""

from __future__ import annotations

import pytest
from asking import FAULTS, Counting, by_plain, clusterwise, engine
from building import make_case
from flint import fmpq

import ratomega
from ratomega.case.setting import own_setting
from ratomega.validator.comparison import compare
from ratomega.validator.identities.finite_poles import eisenstein_2, finite_pole_forms
from ratomega.validator.identities.rectangles import check_rectangles, rectangle_slope
from ratomega.validator.identities.special_adjoint import check_special_adjoint
from ratomega.validator.identities.special_clusters import check_special_clusters
from ratomega.validator.limit_point import limit_point
from ratomega.validator.verdict import Kind, Verdict

TWO, THREE = ["1/3", "-1/3"], ["1/3", "-1/5", "2/7"]


def adjoint_case(eps1, eps2, coulomb, *, mass="2/9", charge=4, **matter):
    return make_case(eps1, eps2, [{"coulomb": coulomb, "adjoint": [mass], **matter}], charge=charge)


# ---- rectangles


def test_rectangles_against_published_values():
    """The mu^2 coefficients of U(2), a = 1/3, at 1:1 and m = 1 + mu (S. Chester, S. Pufu 2020, from memory; the numbers
    were recomputed from the sum over diagrams). u = m (2 - m) = 1 - mu^2, so the slope in u is minus them."""
    found = [rectangle_slope([fmpq(1, 3), fmpq(-1, 3)], fmpq(1), fmpq(1), k) for k in range(1, 6)]
    numbers = [(23, 16), (14601, 5929), (8882, 3675), (10715207, 3418870), (1893, 800)]
    assert found == [-fmpq(p, q) for p, q in numbers]


def test_rectangles_of_one_colour():
    """Z = prod (1 - q^n)^(-(m-eps1)(m-eps2)/(eps1 eps2)) (Nekrasov, Okounkov hep-th/0306238) gives dZ_k/dm at m = eps1:
    (eps1 - eps2)/(eps1 eps2) sigma_1(k)/k; in u = m (eps - m) it is divided by eps2 - eps1, at eps1 = eps2 as well."""
    for e1, e2 in ((fmpq(7), fmpq(5)), (fmpq(2), fmpq(-3)), (fmpq(3), fmpq(3))):
        for k in range(1, 8):
            sigma = sum(d for d in range(1, k + 1) if k % d == 0)
            assert rectangle_slope([fmpq(2, 3)], e1, e2, k) == -fmpq(sigma, k) / (e1 * e2)


@pytest.mark.parametrize(
    ("eps1", "eps2", "coulomb", "charge"),
    [
        ("1", "1", TWO, 5),
        ("1", "1", THREE, 3),
        ("1", "2", TWO, 4),
        ("1", "2", THREE, 2),
        ("2", "-3", TWO, 4),
        ("2", "-3", THREE, 2),
        ("3", "2", TWO, 3),
        ("1", "1", ["1/3", "1/3"], 4),
        ("1", "1", ["sqrt(3)/5", "0"], 3),
        ("1", "1", ["1/3"], 5),
    ],
)
def test_rectangles_hold(eps1, eps2, coulomb, charge):
    asked = Counting()
    check = check_rectangles(adjoint_case(eps1, eps2, coulomb, charge=charge), asked)
    assert (check.verdict, check.kind) == (Verdict.AGREES, Kind.SIBLING)
    assert len(asked.cases) == len(coulomb) * charge + 1
    assert check.evidence.endswith(f"equal up to charge {charge}")


def test_rectangles_hold_for_the_plain_sum_at_a_generic_ratio():
    check = check_rectangles(adjoint_case("7", "5", TWO, charge=3), by_plain)
    assert check.verdict is Verdict.AGREES


@pytest.mark.parametrize("fault", FAULTS)
@pytest.mark.parametrize("eps2", ["1", "2"])
def test_rectangles_catch(fault, eps2):
    asked = Counting(spoil=fault)
    check = check_rectangles(adjoint_case("1", eps2, TWO, charge=3), asked)
    assert check.verdict is Verdict.REFUTED
    assert "first difference: " in check.evidence


def test_the_slope_alone_is_compared_too():
    """A polynomial that vanishes at m = 0 and m = eps1 is added to Z_2: u (u - eps1 eps2), at 1:1 u (u - 1)."""
    case = adjoint_case("1", "1", TWO, charge=2)

    def bent(one, values):
        m = limit_point(own_setting(one)).nodes[0].adjoint[0]
        u = m * (2 - m)
        return [*values[:2], values[2] + u * (u - 1)]

    check = check_rectangles(case, Counting(spoil=bent))
    assert check.verdict is Verdict.REFUTED
    assert "first difference: the slope of Z_2 in m (eps - m) at m = eps1 is" in check.evidence
    assert "should be -14601/5929" in check.evidence


def test_rectangles_take_the_mass_of_the_case_among_their_points():
    case = adjoint_case("1", "1", TWO, charge=2)

    def own_alone(one, values):
        return [values[0], values[1], values[2] + 1] if one.theory == case.theory else values

    check = check_rectangles(case, Counting(spoil=own_alone))
    assert check.verdict is Verdict.REFUTED
    assert "first difference: Z_2 at m = 0" in check.evidence


# ---- special masses on the path


@pytest.mark.parametrize(
    ("eps1", "eps2", "coulomb", "charge"),
    [("1", "1", TWO, 5), ("1", "2", TWO, 5), ("2", "3", TWO, 5), ("1", "1", THREE, 3), ("1", "1", ["0", "0"], 4)],
)
def test_special_masses(eps1, eps2, coulomb, charge):
    case = adjoint_case(eps1, eps2, coulomb, charge=charge)
    asked = Counting()
    check = check_special_adjoint(case, asked)
    assert (check.verdict, check.kind) == (Verdict.AGREES, Kind.SIBLING)
    assert "does not prove the case" in check.evidence
    # Vafa, Witten hep-th/9408074: U(2) 1, 2, 5, 10, 20, 36; U(3) 1, 3, 9, 22.
    numbers = [1, 2, 5, 10, 20, 36] if len(coulomb) == 2 else [1, 3, 9, 22]
    assert engine(asked.cases[0]) == numbers[: charge + 1]
    assert [str(one.theory.nodes[0].adjoint[0]) for one in asked.cases] == ["t/5", "eps1 + t/7", "eps2 - t/3"]


@pytest.mark.parametrize("fault", [fault for fault in FAULTS if fault.__name__ != "other_ratio"])
def test_special_masses_catch(fault):
    """Values of another ratio are the same here, by theory: that fault is for the others."""
    check = check_special_adjoint(adjoint_case("1", "1", TWO), Counting(spoil=fault))
    assert check.verdict is Verdict.REFUTED


def test_clusters_of_the_soft_sibling_sum_to_their_numbers():
    case = adjoint_case("1", "1", TWO, charge=4)
    check = check_special_clusters(case, clusterwise)
    assert check.verdict is Verdict.AGREES
    assert check.name == "Euler numbers of the clusters at adjoint mass t/5"
    assert "each of 21 compact clusters" in check.evidence
    # Another mass than was asked for: some cluster does not sum to a number of members.
    assert check_special_clusters(case, lambda one: clusterwise(case)).verdict is Verdict.REFUTED
    # The case has that mass itself, or nothing is allowed.
    assert check_special_clusters(adjoint_case("1", "1", TWO, mass="t/5"), clusterwise) is None
    assert check_special_clusters(case, clusterwise, most=0).verdict is Verdict.UNDECIDED


# ---- one pole


@pytest.mark.parametrize(
    ("eps1", "eps2", "mass"),
    [("1", "-2", "-3"), ("1", "-2", "2"), ("-4", "2", "4"), ("-4", "2", "-6"), ("3/2", "-3", "3")],
)
def test_one_pole_against_the_plain_sum(eps1, eps2, mass):
    """M. Beccaria, G. Macorini 1606.00179, from memory; recomputed here by the plain sum, whose weights are regular."""
    case = adjoint_case(eps1, eps2, ["3/7", "-2/5"], mass=mass)
    (form,) = finite_pole_forms(limit_point(own_setting(case)), case.charges)
    assert [form.values[charge] for charge in case.charges] == by_plain(case)


def test_one_pole_is_compared_and_a_fault_is_caught():
    case = adjoint_case("1", "-2", ["3/7", "-2/5"], mass="2", charge=3)
    (form,) = finite_pole_forms(limit_point(own_setting(case)), case.charges)
    assert compare(form, clusterwise(case)).verdict is Verdict.AGREES
    other = adjoint_case("1", "-2", ["3/7", "-2/5"], mass="2 + 1/1000", charge=3)
    assert compare(form, clusterwise(other)).verdict is Verdict.REFUTED


def test_the_eisenstein_series():
    """The first divisor sums: 1, 3, 4, 7, 6, 12."""
    assert list(eisenstein_2(6).coefficients) == [1, -24, -72, -96, -168, -144, -288]


@pytest.mark.parametrize(
    ("eps1", "eps2", "node", "charge"),
    [
        ("1", "-2", {"coulomb": TWO, "adjoint": ["-2"]}, 3),
        ("1", "-3", {"coulomb": TWO, "adjoint": ["-3"]}, 3),
        ("1", "2", {"coulomb": TWO, "adjoint": ["2"]}, 3),
        ("1", "-2", {"coulomb": THREE, "adjoint": ["2"]}, 2),
        ("1", "-2", {"coulomb": TWO, "adjoint": ["2"], "fundamental": ["1/3"]}, 3),
        ("1", "-2", {"coulomb": ["1/2", "-1/2"], "adjoint": ["2"]}, 3),
    ],
)
def test_one_pole_is_not_offered_elsewhere(eps1, eps2, node, charge):
    case = make_case(eps1, eps2, [node], charge=charge)
    point = limit_point(own_setting(case))
    compact = [(0,)] if node["coulomb"][0] == "1/2" else case.charges
    assert list(finite_pole_forms(point, compact)) == []


# ---- where they apply, and what they cost

CHECKS = [check_rectangles, check_special_adjoint]


@pytest.mark.parametrize("check", CHECKS)
@pytest.mark.parametrize(
    "nodes",
    [
        [{"coulomb": TWO}],
        [{"coulomb": TWO, "adjoint": ["1/3", "1/7"]}],
        [{"coulomb": TWO, "adjoint": ["1/3"], "fundamental": ["1/7"]}],
        [{"coulomb": TWO, "adjoint": ["1/3"]}, {"coulomb": TWO}],
        [{"coulomb": ["1", "-1"], "adjoint": ["1/3"]}],
    ],
    ids=["no adjoint", "two", "flavour", "two nodes", "resonance at charge 1"],
)
def test_no_other_theory(check, nodes):
    assert check(make_case("1", "1", nodes), engine) is None


@pytest.mark.parametrize("check", CHECKS)
def test_symbols_and_charge_zero_are_left_to_others(check):
    case = ratomega.load_case(
        {
            "charge": 2,
            "symbols": ["m"],
            "background": {"eps1": 1, "eps2": 1},
            "node": [{"coulomb": TWO, "adjoint": ["m"]}],
        }
    )
    assert check(case, engine) is None
    assert check(adjoint_case("1", "1", TWO, charge=0), engine) is None


@pytest.mark.parametrize("check", CHECKS)
def test_work_is_bounded_before_it_starts(check):
    case = adjoint_case("1", "1", TWO, charge=6)
    asked = Counting()
    lowered = check(case, asked, most=200)
    assert asked.configurations <= 200
    assert lowered.verdict is Verdict.AGREES
    assert "(of 6: more is too costly; --depth full allows more)" in lowered.evidence
    nothing = Counting()
    refused = check(case, nothing, most=3)
    assert refused.verdict is Verdict.UNDECIDED
    assert "more than 3 configurations" in refused.evidence
    assert "ask for it with --depth full" in refused.evidence
    assert nothing.cases == []


@pytest.mark.parametrize("check", CHECKS)
def test_only_charges_without_resonance_are_asked_for(check):
    """a1 - a2 = eps1 + 2 eps2 at charge 2: up to charge 1 every component is compact, and engine() insists on it."""
    asked = Counting()
    found = check(adjoint_case("1", "1/3", ["5/3", "0"], charge=4), asked)
    assert found.verdict is Verdict.AGREES
    assert {case.charge for case in asked.cases} == {1}
