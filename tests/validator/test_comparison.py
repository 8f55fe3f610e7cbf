"""Closed forms against limits: what agrees is said to agree, and a wrong number on either side is found.

The values of the forms themselves are checked elsewhere; here the cases are those whose Z is known in print.
"""

from __future__ import annotations

from dataclasses import replace

import pytest
from building import make_case
from flint import fmpq

import ratomega
from ratomega.case.setting import own_setting
from ratomega.regulator.limits import charge_limit
from ratomega.validator.closed_forms import closed_forms
from ratomega.validator.comparison import check_adjoint_clusters, check_closed_forms, compare
from ratomega.validator.verdict import Kind, Verdict
from ratomega.weights import Weights

POINTS = [("1", "-1"), ("1", "1"), ("1", "2"), ("2", "3"), ("3", "-2")]
QUIVER_POINTS = [("7", "5"), ("1", "1"), ("1", "2"), ("2", "-3")]
U1 = ["2/7"]


def limits_of(case):
    weights = Weights(own_setting(case))
    return [charge_limit(weights, charge) for charge in case.charges]


def agreeing(case) -> list[str]:
    """The names of the independent checks of ``validate``, all of which agree."""
    result = ratomega.validate(case)
    checks = [check for check in result.checks if check.kind is Kind.INDEPENDENT]
    assert {check.verdict for check in checks} <= {Verdict.AGREES}
    assert all(check.source and check.evidence for check in checks)
    assert result.exit_status == 0
    return [check.name for check in checks]


@pytest.mark.parametrize("point", POINTS)
@pytest.mark.parametrize(
    ("matter", "charge"),
    [
        ({}, 12),
        ({"antifundamental": ["1/5"]}, 8),
        ({"fundamental": ["1/5"]}, 8),
        ({"antifundamental": ["1/5"], "fundamental": ["3/11"]}, 8),
        ({"adjoint": ["1/5"]}, 8),
    ],
)
def test_u1_is_confirmed_by_its_closed_form(point, matter, charge) -> None:
    (name,) = agreeing(make_case(*point, [{"coulomb": U1, **matter}], charge=charge))
    assert "U(1)" in name


@pytest.mark.parametrize("point", QUIVER_POINTS)
@pytest.mark.parametrize("nodes", [2, 3])
def test_u1_quivers_are_confirmed_by_theirs(point, nodes) -> None:
    chain = [{"coulomb": [a]} for a in ["2/7", "-1/3", "3/5"][:nodes]]
    edges = [(n + 1, n + 2, "1/9") for n in range(nodes - 1)]
    assert len(agreeing(make_case(*point, chain, charge=3, edges=[*edges, (nodes, 1, "1/6")]))) == 1
    chain[0] |= {"antifundamental": ["1/5"]}
    assert len(agreeing(make_case(*point, chain, charge=3, edges=edges))) == 1


@pytest.mark.parametrize("point", [("1", "1"), ("1", "2"), ("2", "3")])
def test_clusters_of_a_soft_adjoint_are_counted(point) -> None:
    """U(2), mass t/5: each cluster sums to its number of members (Vafa, Witten hep-th/9408074)."""
    case = make_case(*point, [{"coulomb": ["1/3", "-1/5"], "adjoint": ["t/5"]}], charge=5)
    agreeing(case)
    check = check_adjoint_clusters(own_setting(case), limits_of(case))
    # The numbers of members are our own, so this is no independent route.
    assert (check.verdict, check.kind, check.complete) == (Verdict.AGREES, Kind.CONSISTENCY, False)
    # Not where the mass stays away from 0 and eps, and not with other matter.
    for node in (
        {"coulomb": ["1/3", "-1/5"], "adjoint": ["1/5"]},
        {"coulomb": ["1/3", "-1/5"], "adjoint": ["t/5"], "antifundamental": ["1/2"]},
        {"coulomb": ["1/3", "-1/5"], "adjoint": ["t/5", "t/7"]},
    ):
        case = make_case(*point, [node], charge=3)
        assert check_adjoint_clusters(own_setting(case), limits_of(case)) is None


def test_a_cluster_that_sums_to_something_else_is_refuted() -> None:
    """Limits of another theory, offered as those of a soft adjoint."""
    soft = make_case("1", "1", [{"coulomb": ["1/3", "-1/5"], "adjoint": ["t/5"]}], charge=2)
    other = make_case("1", "1", [{"coulomb": ["1/3", "-1/5"], "adjoint": ["1/5"]}], charge=2)
    assert check_adjoint_clusters(own_setting(soft), limits_of(soft)).verdict is Verdict.AGREES
    check = check_adjoint_clusters(own_setting(soft), limits_of(other))
    assert check.verdict is Verdict.REFUTED
    assert "charge 1: a cluster of 1 members" in check.evidence


@pytest.mark.parametrize("wrong", [1, 2, 3])
def test_the_first_difference_is_named(wrong) -> None:
    """exp(q/2) with one coefficient off, at every charge in turn."""
    case = make_case("1", "2", [{"coulomb": U1}], charge=3)
    limits = limits_of(case)
    (form,) = closed_forms(case, own_setting(case))
    assert compare(form, limits).verdict is Verdict.AGREES
    spoilt = replace(form, values={**form.values, (wrong,): form.values[wrong,] + fmpq(1, 10**30)})
    check = compare(spoilt, limits)
    assert check.verdict is Verdict.REFUTED
    assert f"first difference at charge {wrong}" in check.evidence
    assert str(form.values[wrong,]) in check.evidence
    # Beyond what was computed nothing is compared, and charge 0 alone is no agreement.
    assert compare(spoilt, limits[:wrong]) is None or compare(spoilt, limits[:wrong]).verdict is Verdict.AGREES
    assert compare(form, limits[:1]) is None


def test_a_limit_that_does_not_exist_agrees_with_no_value() -> None:
    case = make_case("1", "1 + t", [{"coulomb": ["1 + t/7", "-1 - t/7"]}], charge=1)
    generic = make_case("1", "1", [{"coulomb": ["1/3", "-1/3"]}], charge=1)
    (form,) = [f for f in closed_forms(generic, own_setting(generic)) if "charge 1" in f.name]
    check = compare(form, limits_of(case))
    assert check.verdict is Verdict.REFUTED
    assert "limit pole" in check.evidence


def test_no_form_no_check() -> None:
    case = make_case("1", "1", [{"coulomb": ["1/3", "-1/5", "2/7"], "antifundamental": ["1/2"]}], charge=2)
    assert check_closed_forms(case, own_setting(case), limits_of(case)) == ()
