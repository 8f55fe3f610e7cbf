"""Identities without an adjoint: prepotentials, blow-up, Painlevé III_3."""

from __future__ import annotations

import pytest
from asking import FAULTS, Counting, by_plain, clusterwise, engine
from building import make_case
from flint import fmpq

import ratomega
from ratomega.case.setting import own_setting
from ratomega.validator.comparison import compare
from ratomega.validator.identities import blow_up, painleve
from ratomega.validator.identities.blow_up import blow_up_factor, check_blow_up
from ratomega.validator.identities.painleve import painleve_coefficients, painleve_forms
from ratomega.validator.identities.prepotential import (
    check_one_instanton,
    check_seiberg_witten,
    one_instanton,
    seiberg_witten_terms,
)
from ratomega.validator.identities.siblings import Identity
from ratomega.validator.limit_point import limit_point
from ratomega.validator.verdict import Kind, Verdict

TWO, THREE = ["1/3", "-1/5"], ["1/3", "-1/5", "3/8"]


def pure(eps1, eps2, coulomb, charge):
    return make_case(eps1, eps2, [{"coulomb": coulomb}], charge=charge)


# ---- U(2) without matter: prepotential


def test_the_curve_against_published_values():
    """F: Klemm, Lerche, Theisen hep-th/9505150 (times 2^(4k)); Matone hep-th/9506102. A, B: Nakajima, Yoshioka
    math/0311058, their expansion recomputed from the sum over diagrams."""
    prepotential, first, second = (list(series.coefficients) for series in seiberg_witten_terms(7))
    numbers = [(1, 2), (5, 64), (3, 64), (1469, 32768), (4471, 81920), (40397, 524288), (441325, 3670016)]
    assert prepotential == [0, *(fmpq(p, q) for p, q in numbers)]
    assert first[:5] == [0, fmpq(1, 4), fmpq(19, 64), fmpq(47, 96), fmpq(15151, 16384)]
    assert second[:5] == [0, fmpq(3, 8), fmpq(63, 128), fmpq(55, 64), fmpq(55335, 32768)]


@pytest.mark.parametrize(
    ("eps1", "eps2", "coulomb", "charge"),
    [
        ("1", "1", TWO, 5),
        ("1", "2", TWO, 3),
        ("2", "3", TWO, 3),
        ("3", "-2", TWO, 4),
        ("1", "-1", TWO, 4),
        ("1", "1", ["0", "0"], 3),
        ("1", "1", ["2/5*i", "-2/5*i"], 3),
        ("1", "1", ["1/5", "-1/5"], 3),
    ],
)
def test_the_prepotential_from_limits(eps1, eps2, coulomb, charge):
    check = check_seiberg_witten(pure(eps1, eps2, coulomb, charge), engine)
    assert (check.verdict, check.kind) == (Verdict.AGREES, Kind.SIBLING)
    assert check.evidence.endswith(f"equal up to charge {charge}")


def test_the_prepotential_from_the_plain_sum_at_a_generic_ratio():
    assert check_seiberg_witten(pure("7", "5", TWO, 3), by_plain).verdict is Verdict.AGREES


# ---- U(N), one instanton


def test_one_instanton_against_hand():
    """(-1)^N sum_k prod_f (a_k + m_f) prod_{j != k} (a_k - a_j)^(-2) (D'Hoker, Krichever, Phong hep-th/9609041), by
    hand: U(2) at 1, -1 without matter 1/4 + 1/4; with one flavour m: ((1 + m) + (-1 + m))/4; U(3) at 1, 0, -1:
    -(1/4 + 1 + 1/4)."""
    one = fmpq(1)
    assert one_instanton([one, -one], []) == fmpq(1, 2)
    assert one_instanton([one, -one], [fmpq(3, 7)]) == fmpq(3, 14)
    assert one_instanton([one, 0 * one, -one], []) == -fmpq(3, 2)


@pytest.mark.parametrize(
    ("eps1", "eps2", "coulomb", "flavours"),
    [
        ("1", "1", TWO, ["1/7", "2/5", "1/9"]),
        ("2", "1", THREE, []),
        ("1", "-1", THREE, ["1/7"]),
        ("1", "1", ["1/3", "-1/5", "3/8", "7/11"], ["1/2", "1/6"]),
        ("3", "-2", THREE, ["1/7", "1", "2", "3", "5", "1/2"]),
        ("1", "1", ["1", "-1"], ["1/7"]),
    ],
)
def test_one_instanton_from_limits(eps1, eps2, coulomb, flavours):
    node = {"coulomb": coulomb, "antifundamental": flavours[:1], "fundamental": flavours[1:]}
    check = check_one_instanton(make_case(eps1, eps2, [node], charge=1), engine)
    assert (check.verdict, check.kind) == (Verdict.AGREES, Kind.SIBLING)
    # At a1 - a2 = 2 = eps1 + eps2 the case itself has a pole, and scaled parameters speak for the others.
    assert ("the case's own among them" in check.evidence) == (coulomb != ["1", "-1"])


# ---- blow-up


def test_blow_up_factors_by_hand():
    """k = 1, x = 2a: (x + e) for p = 2, and (-x)(-x - eps1)(-x - eps2) for p = -2; k and -k exchange a and -a."""
    a, e1, e2 = fmpq(1, 3), fmpq(1), fmpq(2)
    x = 2 * a
    assert blow_up_factor(1, a, e1, e2) == (x + e1 + e2) * (-x) * (-x - e1) * (-x - e2)
    assert blow_up_factor(-1, -a, e1, e2) == blow_up_factor(1, a, e1, e2)
    assert blow_up_factor(0, a, e1, e2) == 1


@pytest.mark.parametrize(
    ("eps1", "eps2", "charge"),
    [("1", "2", 5), ("2", "1", 4), ("1", "-1", 4), ("2", "3", 4), ("3", "-2", 4), ("-1", "3", 3)],
)
def test_blow_up_holds(eps1, eps2, charge):
    """Nakajima, Yoshioka math/0306198. (1, 2) has a patch at (1, 1), where weights are singular."""
    check = check_blow_up(pure(eps1, eps2, TWO, charge), engine)
    assert (check.verdict, check.kind) == (Verdict.AGREES, Kind.CONSISTENCY)
    assert check.evidence.endswith(f"equal up to charge {charge}")


def test_blow_up_holds_for_the_plain_sum_at_a_generic_ratio():
    assert check_blow_up(pure("12", "5", TWO, 3), by_plain).verdict is Verdict.AGREES


def test_blow_up_is_violated_first_at_u4(monkeypatch):
    """The first violation is -u^4 q/12 (recomputed; Nakajima, Yoshioka state the order)."""
    monkeypatch.setattr(blow_up, "ORDERS", 5)
    check = check_blow_up(pure("1", "2", TWO, 2), engine)
    assert check.verdict is Verdict.REFUTED
    assert "the coefficient of q^1 u^4 is -1/12 and should be 0" in check.evidence


def test_blow_up_says_where_it_does_not_exist():
    nothing = Counting()
    equal = check_blow_up(pure("1", "1", TWO, 3), nothing)
    assert equal.verdict is Verdict.UNDECIDED
    assert "at eps1 = eps2 a patch of the blow-up has a vanishing rotation" in equal.evidence
    # 2a = -eps1: l_1 contains -2a - eps1.
    resonant = check_blow_up(pure("1/3", "1/5", ["-1/6", "1/6"], 3), nothing)
    assert resonant.verdict is Verdict.UNDECIDED
    assert "resonant at a patch" in resonant.evidence
    assert nothing.cases == []


# ---- Painlevé III_3


@pytest.mark.parametrize(
    ("eps1", "coulomb"), [("1", ["3/11", "-3/11"]), ("2", TWO), ("-1", ["sqrt(3)/5", "0"]), ("1", ["1/5", "-1/3"])]
)
def test_painleve_against_the_plain_sum(eps1, coulomb):
    """Gamayun, Iorgov, Lisovyy 1302.1832; Bershtein, Shchechkin 1406.3008. At eps1 + eps2 = 0 no weight is singular."""
    case = pure(eps1, str(-int(eps1)), coulomb, 4)
    (form,) = painleve_forms(limit_point(own_setting(case)), case.charges)
    assert all(form.values[(k,)] == value for k, value in enumerate(by_plain(case)))


def test_painleve_against_the_published_second_coefficient():
    """Z_2 = (8a^2 - 8e^2 - eps1 eps2)/(eps1^2 eps2^2 (4a^2 - e^2)(4a^2 - (2 eps1 + eps2)^2)(4a^2 - (eps1 + 2 eps2)^2))
    at (1, -1) (Nekrasov hep-th/0206161; Flume, Poghossian hep-th/0208176)."""
    a = fmpq(5, 13)
    x = 4 * a**2
    assert painleve_coefficients(a, 2) == [1, 2 / x, (2 * x + 1) / (x * (x - 1) ** 2)]


def test_painleve_to_charge_twelve():
    case = pure("1", "-1", ["3/11", "-3/11"], 12)
    assert painleve_coefficients(fmpq(3, 11), 12) == [c.value for c in ratomega.limit(case, route="poles")]


def test_painleve_is_compared_and_a_fault_is_caught():
    case, other = pure("1", "-1", TWO, 3), pure("1", "-1", ["1/3", "-1/7"], 3)
    (form,) = painleve_forms(limit_point(own_setting(case)), case.charges)
    assert compare(form, clusterwise(case)).verdict is Verdict.AGREES
    assert compare(form, clusterwise(other)).verdict is Verdict.REFUTED


@pytest.mark.parametrize(
    ("eps1", "eps2", "node"),
    [
        ("1", "-2", {"coulomb": TWO}),
        ("1", "1", {"coulomb": TWO}),
        ("1", "-1", {"coulomb": ["1", "-1"]}),
        ("1", "-1", {"coulomb": ["1/4", "-1/4"], "fundamental": ["1/3"]}),
        ("1", "-1", {"coulomb": THREE}),
        ("2", "-2", {"coulomb": ["1", "-1"]}),
    ],
)
def test_painleve_is_not_offered_elsewhere(eps1, eps2, node):
    case = make_case(eps1, eps2, [node], charge=2)
    assert list(painleve_forms(limit_point(own_setting(case)), case.charges)) == []


def test_painleve_stops_at_its_bound(monkeypatch):
    monkeypatch.setattr(painleve, "HIGHEST_CHARGE", 5)
    (form,) = painleve_forms(limit_point(own_setting(pure("1", "-1", TWO, 2))), [(k,) for k in (0, 1, 5, 6, 400)])
    assert sorted(form.values) == [(0,), (1,), (5,)]


# ---- faults, theories, cost

CHECKS = [check_seiberg_witten, check_blow_up, check_one_instanton]


@pytest.mark.parametrize("fault", FAULTS)
@pytest.mark.parametrize("check", CHECKS)
def test_faults_are_caught(check, fault):
    found = check(pure("1", "2", TWO, 2), Counting(spoil=fault))
    assert found.verdict is Verdict.REFUTED
    assert "first difference: " in found.evidence


@pytest.mark.parametrize("check", CHECKS)
def test_the_value_of_the_case_itself_counts(check):
    case = pure("1", "2", TWO, 3)

    def own_alone(one, values):
        return [*values[:-1], values[-1] + 1] if one.theory == case.theory else values

    assert check(case, Counting(spoil=own_alone)).verdict is Verdict.REFUTED


@pytest.mark.parametrize("check", CHECKS)
@pytest.mark.parametrize(
    "nodes",
    [
        [{"coulomb": TWO, "adjoint": ["1/3"]}],
        [{"coulomb": TWO}, {"coulomb": TWO}],
        [{"coulomb": ["1/3"]}],
    ],
    ids=["adjoint", "two nodes", "one colour"],
)
def test_no_other_theory(check, nodes):
    assert check(make_case("1", "2", nodes), engine) is None


def test_where_single_checks_do_not_apply():
    flavoured = make_case("1", "2", [{"coulomb": TWO, "fundamental": ["1/3"]}])
    assert check_seiberg_witten(flavoured, engine) is None
    assert check_blow_up(flavoured, engine) is None
    assert check_one_instanton(pure("1", "1", ["1/3", "1/3"], 2), engine) is None
    for check in (check_seiberg_witten, check_blow_up):
        assert check(pure("1", "1", ["1", "-1"], 2), engine) is None
        assert check(pure("1", "2", TWO, 0), engine) is None


@pytest.mark.parametrize("check", CHECKS)
def test_work_is_bounded_before_it_starts(check):
    case = pure("1", "2", TWO, 6)
    asked = Counting()
    lowered = check(case, asked, most=150)
    assert asked.configurations <= 150
    assert lowered.verdict is Verdict.AGREES
    assert ("(of 6: more is too costly; --depth full" in lowered.evidence) == (check is not check_one_instanton)
    nothing = Counting()
    refused = check(case, nothing, most=2)
    assert refused.verdict is Verdict.UNDECIDED
    assert "more than 2 configurations" in refused.evidence
    assert "ask for it with --depth full" in refused.evidence
    assert nothing.cases == []


def test_an_identity_that_compared_nothing_does_not_pass():
    identity = Identity("name", Kind.SIBLING, "statement", "source")
    with pytest.raises(ValueError, match="nothing was compared"):
        identity.judged([], "equal")
