"""Faults put into the engine one at a time: each is refuted by at least two checks that hold outside values.

Such a check is an independent route, a statement on a relative or on the geometry, or the one consistency check that
compares with known coefficients. The faults are those that people make: they change no type and raise no error.
"""

from __future__ import annotations

from dataclasses import replace

import pytest
from building import make_case

import ratomega
from ratomega.case.setting import own_setting, probe_setting
from ratomega.chain import job
from ratomega.conformal import dressing as gram_dressing
from ratomega.regulator import limits, routes
from ratomega.regulator.poles import dressing as pole_dressing
from ratomega.regulator.poles import series
from ratomega.validator.verdict import Kind, Verdict
from ratomega.weights import Weights

OUTSIDE = (Kind.INDEPENDENT, Kind.SIBLING, Kind.GEOMETRY)
RECURSION, GRAM = "pole recursion in the Coulomb parameter", "Gram matrix of Virasoro descendants"
KNOWN = "coefficients of the regular average"
ONE_INSTANTON = "one-instanton prepotential of U(2)"
SPECIAL = "U(2) with an adjoint of special mass on the path"
RECTANGLES = "rectangles: U(2) with an adjoint near mass eps1"

COLOURS = ["1/3", "-1/5"]
PURE = {"coulomb": COLOURS}
FOUR = {"coulomb": COLOURS, "antifundamental": ["1/2", "2/7", "3/11"], "fundamental": ["1/13"]}
ADJOINT = {"coulomb": COLOURS, "adjoint": ["2/7"]}
U1_CHAIN = [{"coulomb": ["2/7"], "antifundamental": ["1/5"]}, {"coulomb": ["-1/3"], "fundamental": ["3/11"]}]


def caught(case):
    """The names of the refuted checks that hold outside values."""
    refuted = [check for check in ratomega.validate(case).checks if check.verdict is Verdict.REFUTED]
    return {check.name for check in refuted if check.kind in OUTSIDE or check.name == KNOWN}


def sound(case):
    """Without the fault nothing is refuted: what is caught later is the fault."""
    checks = ratomega.validate(case).checks
    return not [check.name for check in checks if check.verdict is Verdict.REFUTED]


# ---- a sign in one factor


def one_flavour_minus_m(weights):
    """phi - m instead of phi + m for the first antifundamental of every colour."""
    contents, pairs = true_links(weights)
    node = weights.setting.nodes[0]
    for slot, links in contents.items():
        a, m = node.coulomb[weights.slots[slot][1]], node.antifundamental[0]
        contents[slot] = [replace(links[0], root=weights._form(a - m)), *links[1:]]
    return contents, pairs


def fundamental_without_eps(weights):
    """phi - m instead of phi - m + eps."""
    contents, pairs = true_links(weights)
    node = weights.setting.nodes[0]
    # Relatives of the case have antifundamentals alone.
    for m in node.fundamental[:1]:
        for slot, links in contents.items():
            a = node.coulomb[weights.slots[slot][1]]
            contents[slot] = [*links[:-1], replace(links[-1], root=weights._form(a - m))]
    return contents, pairs


def crossed_colours(weights):
    """a_2 - a_1 where a_1 - a_2 should stand in one of the two cross factors of the vector multiplet."""
    contents, pairs = true_links(weights)
    first, *others = pairs[0, 1]
    pairs[0, 1] = [replace(first, root=(-first.root[0], -first.root[1])), *others]
    return contents, pairs


def adjoint_plus_m(weights):
    """E + m instead of E - m between different colours."""
    contents, pairs = true_links(weights)
    node = weights.setting.nodes[0]
    a, b, m = *node.coulomb, node.adjoint[0]
    pairs[0, 1] = [
        replace(link, root=weights._form(a - b + m)) if link.multiplet == "adjoint" and not link.reverse else link
        for link in pairs[0, 1]
    ]
    return contents, pairs


true_links = Weights._links


@pytest.mark.parametrize("eps", [("1", "1"), ("2", "-3")])
@pytest.mark.parametrize(
    ("fault", "node", "expected"),
    [
        (one_flavour_minus_m, FOUR, {RECURSION, GRAM, KNOWN, ONE_INSTANTON, "U(2) at charge 1"}),
        (fundamental_without_eps, FOUR, {RECURSION, GRAM, KNOWN, "U(2) at charge 1"}),
        (crossed_colours, PURE, {RECURSION, GRAM, "U(2) at charge 1", KNOWN}),
        (adjoint_plus_m, ADJOINT, {RECURSION, GRAM, "U(2) with an adjoint at charge 1"}),
    ],
)
def test_a_sign_in_one_factor(monkeypatch, eps, fault, node, expected):
    case = make_case(*eps, [node], charge=2)
    assert sound(case)
    monkeypatch.setattr(Weights, "_links", fault)
    found = caught(case)
    assert found >= expected, found


# ---- a cluster is dropped


def without_a_cluster(true):
    """The sum without the last of its clusters, from charge 2 on."""

    def dropped(weights, charge, **options):
        found = true(weights, charge, **options)
        if sum(charge) < 2:
            return found
        *kept, last = found.clusters
        rest = found.series - found.clusters[last].series
        return replace(found, clusters={key: found.clusters[key] for key in kept}, series=rest)

    return dropped


@pytest.mark.parametrize("eps", [("1", "1"), ("2", "-3")])
@pytest.mark.parametrize("node", [PURE, FOUR, ADJOINT])
def test_a_dropped_cluster(monkeypatch, eps, node):
    case = make_case(*eps, [node], charge=2)
    monkeypatch.setattr(limits, "direct_sum", without_a_cluster(limits.direct_sum))
    found = caught(case)
    assert found >= {RECURSION, GRAM}, found
    if node is ADJOINT:
        assert found >= {SPECIAL, RECTANGLES}, found


# ---- a wrong U(1) factor


@pytest.mark.parametrize("eps", [("1", "1"), ("2", "-3")])
@pytest.mark.parametrize("flavours", [2, 3, 4])
def test_a_wrong_u1_factor_of_the_recursion(monkeypatch, eps, flavours):
    """Limits of relatives go by the recursion here, as they do by themselves at high charge."""
    node = {"coulomb": COLOURS, "antifundamental": ["1/2", "2/7", "3/11", "1/13"][:flavours]}
    case = make_case(*eps, [node], charge=2)
    monkeypatch.setattr(routes, "CLUSTERWISE", 0)
    assert sound(case)
    monkeypatch.setattr(pole_dressing.Dressing, "dressed", lambda self, regular: list(regular))
    found = caught(case)
    assert found == {RECURSION, ONE_INSTANTON}, found


@pytest.mark.parametrize("eps", [("1", "1"), ("2", "-3")])
def test_a_wrong_u1_factor_of_the_recursion_with_an_adjoint(monkeypatch, eps):
    case = make_case(*eps, [ADJOINT], charge=2)
    monkeypatch.setattr(routes, "CLUSTERWISE", 0)
    assert sound(case)
    monkeypatch.setattr(pole_dressing.Dressing, "dressed", lambda self, regular: list(regular))
    found = caught(case)
    assert found == {RECURSION, SPECIAL, RECTANGLES}, found


def times_one_minus_q(true):
    """Z_k - Z_(k-1) in the place of Z_k."""

    def multiplied(weights, charge, **options):
        found = true(weights, charge, **options)
        if not sum(charge):
            return found
        lower = true(weights, (charge[0] - 1,), **options)
        return replace(found, series=found.series - lower.series)

    return multiplied


@pytest.mark.parametrize("name", ["ising-identity", "lee-yang-field", "c25-closed-form"])
def test_a_wrong_u1_factor_of_the_sum(monkeypatch, name):
    """Block and partition function are taken for one another: a power of 1 - q too much."""
    case = ratomega.load_case(name).with_charge(2)
    assert sound(case)
    monkeypatch.setattr(limits, "direct_sum", times_one_minus_q(limits.direct_sum))
    found = caught(case)
    # And the known function of this block.
    assert len(found - {RECURSION, GRAM}) >= 1, found
    assert found >= {RECURSION, GRAM}, found


@pytest.mark.parametrize("name", ["b1-four-flavours", "adjoint-on-the-path"])
def test_a_wrong_u1_factor_of_gram_matrices_is_seen_to_be_there(monkeypatch, name):
    """Here a route is wrong and the limits are right: it alone is refuted, and the others stand."""
    case = ratomega.load_case(name).with_charge(2)
    monkeypatch.setattr(gram_dressing.Dressing, "_slope", lambda self, n: self.linear)
    assert caught(case) == {GRAM}
    assert RECURSION in {check.name for check in ratomega.validate(case).routes}


# ---- adjoint numerators in steps of 1


def steps_of_one(m, n, *, adjoint):
    """p = 1-2m, 2-2m, ..., 2m-1 and r likewise, in steps of 1; one half under reflection, the centre left out."""
    assert adjoint
    half = [(p, r) for r in range(2 * n) for p in range(1 - 2 * m, 2 * m)]
    return [(p, r) for p, r in half if r > 0 or p > 0]


def steps_of_flavours(m, n, *, adjoint):
    """p = 1-m, 3-m, ..., m-1 as for a flavour."""
    assert adjoint
    return true_points(m, n, adjoint=False)


true_points = series.numerator_points


@pytest.mark.parametrize("eps", [("1", "1"), ("2", "-3")])
@pytest.mark.parametrize(
    ("fault", "expected"),
    [(steps_of_one, {RECURSION, RECTANGLES}), (steps_of_flavours, {RECURSION, RECTANGLES, SPECIAL})],
)
def test_adjoint_numerators_in_wrong_steps(monkeypatch, eps, fault, expected):
    case = make_case(*eps, [ADJOINT], charge=2)
    monkeypatch.setattr(routes, "CLUSTERWISE", 0)
    assert sound(case)
    monkeypatch.setattr(series, "numerator_points", fault)
    found = caught(case)
    assert found == expected, found


# ---- an edge is read the wrong way round


def reversed_edges(weights):
    """The bifundamental of every edge from its target to its source, with the same mass."""
    right = weights.setting
    weights.setting = replace(right, edges=tuple((target, source, mass) for source, target, mass in right.edges))
    try:
        return true_links(weights)
    finally:
        weights.setting = right


@pytest.mark.parametrize("eps", [("1", "1"), ("1", "2"), ("2", "-3")])
def test_a_reversed_edge_of_one_colour(monkeypatch, eps):
    case = make_case(*eps, U1_CHAIN, charge=2, edges=[(1, 2, "1/9")])
    assert sound(case)
    monkeypatch.setattr(Weights, "_links", reversed_edges)
    found = caught(case)
    assert found == {"U(1) linear quiver of 2 nodes", "zeros of a bifundamental, edge n1 -> n2"}, found


@pytest.mark.parametrize("eps", [("1", "1"), ("2", "-3")])
def test_a_reversed_edge_of_more_colours(monkeypatch, eps):
    """No independent route covers these; every edge has zeros of its own."""
    nodes = [{"coulomb": ["2/7"]}, {"coulomb": COLOURS}, {"coulomb": ["3/5"]}]
    case = make_case(*eps, nodes, charge=2, edges=[(1, 2, "1/9"), (2, 3, "1/7")])
    assert sound(case)
    monkeypatch.setattr(Weights, "_links", reversed_edges)
    found = caught(case)
    assert found == {f"zeros of a bifundamental, edge {edge}" for edge in ("n1 -> n2", "n2 -> n3")}, found


# ---- another path for every other charge


def paths_by_charge(case):
    """Odd charges of this case on another path."""
    true = limits.charge_limit
    own, other = own_setting(case), Weights(probe_setting(case, 1))

    def limit_on(weights, charge, *rest, **options):
        moved = weights.setting == own and charge[0] % 2
        return true(other if moved else weights, charge, *rest, **options)

    return limit_on


@pytest.mark.parametrize("name", ["path-dependent", "surviving-pole"])
def test_a_path_that_changes_between_charges(monkeypatch, name):
    """Where the limit depends on the path, the coefficients have to belong to one."""
    case = ratomega.load_case(name)
    assert not caught(case)
    monkeypatch.setattr(job, "charge_limit", paths_by_charge(case))
    found = caught(case)
    assert found == {RECURSION, GRAM}, found


def test_a_path_that_changes_between_charges_does_no_harm_where_every_component_is_compact(monkeypatch):
    case = make_case("1", "1", [FOUR], charge=3)
    monkeypatch.setattr(job, "charge_limit", paths_by_charge(case))
    assert sound(case)
