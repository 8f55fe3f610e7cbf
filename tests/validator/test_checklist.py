"""What ``validate`` says on whole cases: how many routes a case has, and that nothing is proved which did not run."""

from __future__ import annotations

from dataclasses import replace

import pytest
from building import make_case

import ratomega
from ratomega.chain.job import Job
from ratomega.chain.pipeline import validate_checks
from ratomega.validator import checklist
from ratomega.validator.depth import DEPTHS, FULL, Depth, depth_of
from ratomega.validator.finiteness import CANCELLATION, FORESIGHT, ORDERS, PATHS
from ratomega.validator.identities.prepotential import check_one_instanton
from ratomega.validator.verdict import Kind, Verdict

# What may be proved: all of it is computed before any other check begins.
PROVABLE = {CANCELLATION, PATHS, FORESIGHT, ORDERS}
NOTHING = Depth("nothing", 0, 1, 0)


def routes_wanted(case) -> int:
    """Two for one node of two colours with 0 to 4 flavours or an adjoint, one for nodes of one colour, else none."""
    if all(node.rank == 1 for node in case.theory.nodes):
        return 1
    node = case.theory.nodes[0]
    flavours = len(node.antifundamental) + len(node.fundamental)
    matter = flavours <= 4 and (len(node.adjoint), flavours > 0) in ((0, False), (0, True), (1, False))
    return 2 if len(case.theory.nodes) == 1 and node.rank == 2 and matter else 0


@pytest.mark.parametrize("name", ratomega.bundled_names())
def test_bundled_cases_have_their_routes(name):
    """To charge 3; to their own charge in the long run."""
    case = ratomega.load_case(name)
    lower = min(case.charge, 3) if isinstance(case.charge, int) else case.charge
    check_case(case.with_charge(lower), probes=1)


@pytest.mark.long
@pytest.mark.parametrize("name", ratomega.bundled_names())
def test_bundled_cases_have_their_routes_to_their_own_charge(name):
    check_case(ratomega.load_case(name), probes=3)


def check_case(case, *, probes):
    # A limit inside the limit has no further paths to ask for.
    result = ratomega.validate(case) if case.nested else ratomega.validate(case, probes=probes)
    assert len(result.routes) >= routes_wanted(case)
    for check in result.routes:
        assert (check.kind, check.verdict, check.complete) == (Kind.INDEPENDENT, Verdict.AGREES, True)
    names = [check.name for check in result.checks]
    assert len(set(names)) == len(names)
    for check in result.checks:
        assert check.verdict is not Verdict.PROVED or check.name in PROVABLE
        assert check.evidence
        assert check.source
        if check.verdict is Verdict.UNDECIDED:
            # Either it did not run, or nothing was foreseen and what happened is said.
            assert "not run: " in check.evidence or (check.name == FORESIGHT and "what happened" in check.evidence)
    refuted = {check.name for check in result.checks if check.verdict is Verdict.REFUTED}
    assert refuted <= {CANCELLATION, PATHS}
    assert f"{len(result.routes)} independent route" in result.summary or "no independent route" in result.summary


def test_the_bundle_has_every_theory_that_is_promised_routes():
    wanted = [routes_wanted(ratomega.load_case(name)) for name in ratomega.bundled_names()]
    assert wanted.count(2) >= 15
    assert wanted.count(1) >= 4


# ---- what did not run is not proved


COSTLY = {
    "pure": {"coulomb": ["1/3", "-1/5"]},
    "flavours": {"coulomb": ["1/3", "-1/5"], "antifundamental": ["1/2", "2/7"]},
    "adjoint": {"coulomb": ["1/3", "-1/5"], "adjoint": ["2/7"]},
    "ising": {"coulomb": ["(eps1+eps2)/2", "-(eps1+eps2)/2"]},
}
BOUNDED = {
    "one-instanton prepotential of U(2)",
    "Seiberg-Witten prepotential and first gravitational terms of U(2)",
    "blow-up relations of U(2)",
    "U(2) with an adjoint of special mass on the path",
    "rectangles: U(2) with an adjoint near mass eps1",
    "cells of the components",
    "Poincaré polynomials of all components",
    "regularity in x",
    "coefficients of the regular average",
    "first Dyson-Schwinger identity",
    "second chiral trace",
    "Euler numbers of the clusters at adjoint mass t/5",
    "Burge pairs",
    "sum over Burge pairs",
}


def checks_at(depth: Depth, case):
    job = Job.prepare(case, clusterwise=True)
    return list(validate_checks(job, list(job.limits(probes=1, always_probe=True)), depth))


def costly_cases():
    for node in COSTLY.values():
        yield make_case("4", "-3", [node], charge=2)
    yield ratomega.load_case("ising-identity").with_charge(2)
    yield ratomega.load_case("two-ranks").with_charge(1)


def test_checks_that_are_too_costly_are_undecided_and_say_how_to_ask():
    seen = set()
    for case in costly_cases():
        for check in checks_at(NOTHING, case):
            assert check.verdict is not Verdict.PROVED or check.name in PROVABLE
            bounded = check.name.split(", node")[0] in BOUNDED or "of a bifundamental" in check.name
            if bounded:
                seen.add(check.name.split(", ")[0])
                assert check.verdict is Verdict.UNDECIDED, check.name
                assert "not run: too costly: " in check.evidence
                assert "more than 0" in check.evidence
                assert 'ask for it with --depth full (depth="full" from Python)' in check.evidence
    assert seen >= BOUNDED | {"zeros of a bifundamental"}


def test_at_full_depth_the_advice_is_another_one():
    """U(32) has 33 configurations up to charge 1, and its prepotential asks for about 32^2 limits."""

    def never(case):
        raise AssertionError("work begun")

    case = make_case("1", "1", [{"coulomb": [f"{n * n}/211" for n in range(1, 33)]}], charge=1)
    quick, full = (check_one_instanton(case, never, most=depth.configurations) for depth in DEPTHS)
    assert quick.verdict is full.verdict is Verdict.UNDECIDED
    assert quick.evidence.endswith('ask for it with --depth full (depth="full" from Python)')
    assert full.evidence.endswith("--depth full does not allow more: take fewer colours")


def test_full_allows_more_than_quick():
    quick, full = DEPTHS
    assert (quick.name, full) == ("quick", FULL)
    assert depth_of("quick") is quick
    assert all(getattr(full, bound) > getattr(quick, bound) for bound in ("configurations", "level", "effort"))
    with pytest.raises(ratomega.InputError, match="the depths are quick, full"):
        depth_of("deep")
    case = ratomega.load_case("u2-unrefined").with_charge(9)
    reached = {}
    for depth in DEPTHS:
        checks = {check.name: check for check in checks_at(replace(depth, configurations=0, effort=0), case)}
        reached[depth.name] = checks["Gram matrix of Virasoro descendants"]
    assert "to level 8 here, to level 10 with --depth full" in reached["quick"].evidence
    assert (reached["quick"].complete, reached["full"].complete) == (False, True)


def test_an_interrupted_run_begins_no_other_check(monkeypatch):
    def begun(*_, **__):
        raise AssertionError("no further work after an interruption")

    case = ratomega.load_case("b1-four-flavours")
    job = Job.prepare(case, clusterwise=True)
    found = list(job.limits(probes=0, always_probe=True))
    monkeypatch.setattr(checklist, "_routes", begun)
    with pytest.raises(AssertionError, match="no further work"):
        list(validate_checks(job, found, FULL))
    for finished in range(1, len(found)):
        checks = list(validate_checks(job, found[:finished], FULL))
        assert {check.name for check in checks} == PROVABLE
    assert list(validate_checks(job, [], FULL)) == []


def test_without_a_further_path_nothing_is_said_of_paths():
    case = ratomega.load_case("ising-identity").with_charge(1)
    paths = {check.name: check for check in ratomega.validate(case, probes=0).checks}[PATHS]
    assert paths.verdict is Verdict.UNDECIDED
    assert paths.evidence.endswith("no further path was probed; ask for some with --probes")


def test_routes_are_those_that_cover_all_charges():
    """A closed form at charge 1 alone is an independent check, and no route for charge 2."""
    result = ratomega.validate(ratomega.load_case("u2-pure").with_charge(3))
    partial = [c for c in result.checks if c.kind is Kind.INDEPENDENT and not c.complete]
    assert [check.name for check in partial] == ["U(2) at charge 1", "U(2) without matter at charge 2"]
    assert not set(partial) & set(result.routes)
    summary = ratomega.validate("u3-pure").summary
    assert "no independent route covers all charges of this case; 1 check on a relative of it agrees, " in summary
