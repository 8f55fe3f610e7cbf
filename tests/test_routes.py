"""The ways to the coefficients: the rule, the evidence each carries, and that all of them give the same numbers.

The recursion (Al. Zamolodchikov 1984; Poghossian 0909.3412) shares no code with the sums above exact arithmetic, so
each is an outside value for the other.
"""

from __future__ import annotations

import json

import pytest
from building import make_case

import ratomega
from ratomega.case.setting import own_setting
from ratomega.chain.job import Job
from ratomega.regulator.routes import choose

MATTER = {
    "none": {},
    "three flavours": {"antifundamental": ["1/2", "1/4"], "fundamental": ["1/5"]},
    "four flavours": {"antifundamental": ["1/2", "1/4", "1/5", "1/7"]},
    "adjoint": {"adjoint": ["2/7"]},
}


def u2(eps2, matter="none", *, charge, coulomb=("3/11", "-3/11"), eps1="1"):
    return make_case(eps1, eps2, [{"coulomb": list(coulomb), **MATTER[matter]}], charge=charge)


def values(result):
    return [c.value for c in result]


@pytest.mark.parametrize("matter", MATTER)
@pytest.mark.parametrize("eps2", ["1", "2", "2/3", "-1", "-3/4"])
def test_both_routes_give_the_same(eps2, matter):
    case = u2(eps2, matter, charge=5)
    direct, poles = (ratomega.limit(case, route=route) for route in ("direct", "poles"))
    assert values(direct) == values(poles)
    assert (direct.route.route, poles.route.route) == ("direct", "poles")
    assert (direct.exit_status, poles.exit_status) == (0, 0)


@pytest.mark.parametrize(("eps2", "charge"), [("1", 20), ("2", 16), ("-2/3", 16)])
def test_many_configurations_take_short_cuts_that_agree(eps2, charge):
    case = u2(eps2, charge=charge)
    by_poles, by_residues = ratomega.limit(case), ratomega.limit(case, route="direct")
    assert values(by_poles) == values(by_residues)
    assert (by_poles.route.route, by_residues.route.route) == ("poles", "direct")
    for result in (by_poles, by_residues):
        assert result.route.method == "residues"
        assert result.route.spare_bits >= 45
        assert result.route.primes > 1
        assert {c.independence for c in result} == {"theorem"}
        assert {c.configurations for c in result} == {None}
        assert [check.verdict.value for check in result.checks] == ["proved"] * 3


def test_certify_proves_what_residues_gave():
    case = u2("1", charge=16)
    found = ratomega.limit(case, route="direct")
    proved = ratomega.limit(case, route="direct", certify=True)
    assert (proved.route.method, values(proved)) == ("proved", values(found))
    assert proved.route.primes > found.route.primes
    assert ratomega.limit(u2("1", charge=12), route="poles", certify=True).route.method == "proved"


@pytest.mark.parametrize(
    ("case", "route", "options", "way"),
    [
        (u2("1", charge=10), "auto", {}, ("direct", "")),
        (u2("1", charge=14), "auto", {}, ("poles", "poles")),
        (u2("1", charge=14), "direct", {}, ("direct", "fast")),
        (u2("1", charge=14), "auto", {"clusterwise": True}, ("direct", "")),
        (u2("1", charge=14, coulomb=("0", "0")), "auto", {}, ("poles", "poles")),
        (u2("1", charge=14, coulomb=("0", "0")), "direct", {}, ("direct", "")),
        (u2("1", charge=14, coulomb=("1", "-1")), "auto", {}, ("direct", "")),
        (make_case("1", "1", [{"coulomb": ["1/3", "1/7", "0"]}], charge=11), "auto", {}, ("direct", "fast")),
        (make_case("1", "1", [{"coulomb": ["1/3", "1/7"]}] * 2, charge=7), "auto", {}, ("direct", "")),
    ],
)
def test_the_rule(case, route, options, way):
    chosen = choose(case, own_setting(case), route, **options)
    assert (chosen.route, chosen.short_cut) == way


@pytest.mark.parametrize(
    ("case", "options", "said"),
    [
        (make_case("1", "1", [{"coulomb": ["1/3", "1/7", "0"]}]), {}, r"covers U\(2\)"),
        (u2("1", charge=2, coulomb=("1", "-1")), {}, "a pole of the recursion at charge 1"),
        (u2("1", charge=2), {"terms": 1}, "needs the direct sum"),
        (u2("1", charge=200), {}, "limited to charge 150"),
    ],
)
def test_a_route_that_does_not_apply_is_refused(case, options, said):
    with pytest.raises(ratomega.InputError, match=said):
        ratomega.limit(case, route="poles", **options)


def test_a_job_for_a_short_cut_does_nothing_else():
    job = Job.prepare(u2("1", charge=14))
    for options in ({"terms": 1}, {"always_probe": True}):
        with pytest.raises(ValueError, match="clusterwise=True"):
            list(job.limits(probes=0, **options))


def test_an_unknown_route_is_refused():
    with pytest.raises(ratomega.InputError, match="the routes are auto, direct, poles"):
        ratomega.limit("u2-pure", route="fast")


# Values confirmed by both routes; (a1 - a2)^2 is rational, a itself is not.
@pytest.mark.parametrize(
    ("a", "expected"),
    [("i/2", ["1", "2/5", "7/100", "313/43350", "498379/996356400"]), ("sqrt(21)/7", None)],
)
def test_rational_squares_of_momenta_beyond_q(a, expected):
    case = u2("1", charge=4, coulomb=(a, f"-{a}"))
    direct, poles = (ratomega.limit(case, route=route) for route in ("direct", "poles"))
    assert values(direct) == values(poles)
    if expected is not None:
        assert [str(value) for value in values(direct)] == expected


@pytest.mark.parametrize("route", ["direct", "poles"])
def test_short_cuts_travel_as_json(route):
    result = ratomega.limit(u2("1", charge=14), route=route)
    text = ratomega.to_json(result)
    document = json.loads(text)
    assert document["route"]["name"] == route
    assert document["route"]["spare_bits"] >= 45
    assert "singular" not in document["coefficients"][1]
    assert ratomega.load_result(text) == result


def test_validate_lets_the_recursion_check_the_sum():
    checks = {check.name: check for check in ratomega.validate(u2("1", "four flavours", charge=4)).checks}
    check = checks["pole recursion in the Coulomb parameter"]
    assert (check.verdict.value, check.kind.value) == ("agrees", "independent")
    assert "equal up to charge 4" in check.evidence
