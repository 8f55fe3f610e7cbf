"""The direct sum against the plain reference: Laurent expansions, clusters, quivers, symmetries.

The plain reference multiplies the factors of every weight one by one into a list of coefficients and imports nothing
from the package; it is given the numbers of the path.
"""

from __future__ import annotations

import re
from collections import Counter

import plain
import pytest
from building import make_case, plain_theory, plain_values
from census import Entry, census

import ratomega
from ratomega.case.setting import own_setting, probe_setting
from ratomega.detector.clusters import find_clusters
from ratomega.detector.zeros import scan
from ratomega.exact.laurent import Laurent, total
from ratomega.exact.rational import Rational
from ratomega.regulator.direct import direct_sum, direct_total
from ratomega.weights import Weights

LAST = 2


def check_against_plain(setting, charges, last=LAST) -> None:
    """Every coefficient from the deepest pole to t^last, at every charge."""
    weights, theory = Weights(setting), plain_theory(setting)
    for charge in charges:
        expected = plain.laurent_coefficient(theory, charge, last)
        found = direct_sum(weights, charge, last=last)
        assert found.series.coefficients() == expected, charge
        assert found.series.precision == last + 1
        assert direct_total(weights, charge, last=last) == found.series
        assert total((c.series for c in found.clusters.values()), precision=last + 1) == found.series


# ---- the census


@pytest.mark.parametrize("entry", census(), ids=str)
def test_laurent_expansions_on_the_census(entry: Entry) -> None:
    top = {1: 6, 2: 4, 3: 3}[entry.rank]
    check_against_plain(entry.setting, [(k,) for k in range(top + 1)])


@pytest.mark.long
@pytest.mark.parametrize("entry", [*census(ranks=(1, 2)), *census(ranks=(3,), further=1)], ids=str)
def test_laurent_expansions_on_the_whole_census(entry: Entry) -> None:
    check_against_plain(entry.setting, [(k,) for k in range(entry.top + 1)], last=4)


@pytest.mark.parametrize("entry", census(coulomb=["generic"]), ids=str)
def test_values_where_nothing_vanishes(entry: Entry) -> None:
    """At charges without a vanishing denominator the limit is the plain sum of numbers."""
    seen = 0
    for k in range(entry.top + 1):
        found = direct_sum(entry.weights, (k,))
        if found.singular or found.indeterminate:
            continue
        assert found.series.coefficient(0) == plain.coefficient(entry.values, (k,))
        seen += 1
    # All of them at a negative ratio, and the charges below alpha + beta at a positive one.
    assert seen == (entry.top + 1 if entry.steps[1] < 0 else min(entry.top + 1, sum(entry.steps)))


def test_values_at_a_generic_ratio() -> None:
    matter = {"antifundamental": ["1/2", "3/11"], "fundamental": ["eps2/3"], "adjoint": ["1/5 - eps1"]}
    for coulomb in (["1/3"], ["1/3", "-1/5"], ["1/3", "-1/5", "2/7"]):
        case = make_case("7", "5", [{"coulomb": coulomb, **matter}], charge=4)
        setting = own_setting(case)
        for k in range(5):
            expected = plain.coefficient(plain_values(setting), (k,))
            assert direct_sum(Weights(setting), (k,)).series.coefficient(0) == expected


def test_the_path_may_move_everything() -> None:
    """t in both eps1 and eps2, in Coulomb parameters and in masses of every kind; both signs of the ratio."""
    nodes = [
        {"coulomb": ["1/3 + 2*t", "-1/5 - t/3"], "antifundamental": ["1/2 - t"], "fundamental": ["3/7 + 5*t/2"]},
        {"coulomb": ["2/7 - eps1/2"], "adjoint": ["eps1/3 + t"]},
    ]
    for eps1, eps2 in (("1 + t/3", "1 - 2*t"), ("2 - t", "1 + t"), ("3 + t", "-2 + t/5"), ("1 + t", "2")):
        case = make_case(eps1, eps2, nodes, charge=3, edges=[(1, 2, "1/9 - eps2 + t/7")])
        check_against_plain(own_setting(case), case.charges)


# ---- clusters alone

ADJOINTS = ["adjoint", "soft adjoint"]


@pytest.mark.parametrize("entry", census(matter=["none", "flavours", "cutting"]), ids=str)
def test_compact_clusters_are_finite_and_independent_of_the_path(entry: Entry) -> None:
    check_compact_clusters(entry)


@pytest.mark.long
@pytest.mark.parametrize("entry", [*census(ranks=(1, 2), matter=ADJOINTS), *census(ranks=(3,), further=1)], ids=str)
def test_more_compact_clusters(entry: Entry) -> None:
    check_compact_clusters(entry)


def check_compact_clusters(entry: Entry) -> None:
    paths = (entry.weights, *entry.probes)
    for k in range(entry.top + 1):
        for cluster in find_clusters(entry.weights, (k,), scan(entry.weights, (k,))):
            if not cluster.compactness.compact:
                continue
            members = [member.configuration for member in cluster.members]
            sums = [total((w.weight(c).laurent(0) for c in members), precision=1) for w in paths]
            assert all(series.valuation >= 0 for series in sums), (k, members)
            assert len({str(series.coefficient(0)) for series in sums}) == 1, (k, members)


@pytest.mark.parametrize(("ratio", "eps"), [("1:1", (1, 1)), ("1:2", (1, 2)), ("2:3", (2, 3)), ("-1", (1, -1))])
@pytest.mark.parametrize("mass", ["t/5", "eps1 + eps2 - t/5"])
def test_a_soft_adjoint_counts_the_members_of_each_cluster(ratio, eps, mass) -> None:
    """U(2): members are not 1 one by one, each cluster sums to its Euler number; totals 1, 2, 5, 10, 20, 36
    (Vafa, Witten hep-th/9408074)."""
    node = {"coulomb": ["1/3", "-1/5"], "adjoint": [mass]}
    weights = Weights(own_setting(make_case(str(eps[0]), str(eps[1]), [node], charge=5)))
    uneven = 0
    for k, members in enumerate([1, 2, 5, 10, 20, 36]):
        found = direct_sum(weights, (k,))
        assert found.series.coefficients() == {0: members}
        for cluster in found.clusters.values():
            assert cluster.series.coefficients() == {0: cluster.size}
            uneven += cluster.size > 1
    assert uneven or ratio == "-1"


@pytest.mark.parametrize("entry", census(ranks=(2,), matter=["none", "cutting"]), ids=str)
def test_counts_on_the_way(entry: Entry) -> None:
    """The counts of the sum are those of the plain factors, cluster by cluster."""
    for k in range(min(entry.top, 4) + 1):
        found = direct_sum(entry.weights, (k,), sinks=True)
        singular, indeterminate, worst = 0, 0, 0
        by_cluster = Counter()
        for configuration in plain.configurations([entry.rank], (k,)):
            factors = list(plain.factors(entry.theory, configuration))
            down = sum(1 for f, exponent in factors if exponent < 0 and f.c == 0)
            up = sum(1 for f, exponent in factors if exponent > 0 and f.c == 0)
            dead = any(exponent > 0 and f.c == 0 and f.d == 0 for f, exponent in factors)
            diverges = down > up and not dead
            singular, indeterminate = singular + diverges, indeterminate + (down > 0 and not diverges)
            worst = max(worst, down - up if diverges else 0)
            by_cluster[entry.weights.contents(configuration), "size"] += 1
            by_cluster[entry.weights.contents(configuration), "singular"] += diverges
        assert (found.singular, found.indeterminate, found.worst_order) == (singular, indeterminate, worst)
        for key, cluster in found.clusters.items():
            assert cluster.size == by_cluster[key, "size"]
            assert cluster.singular_members == by_cluster[key, "singular"]
            assert cluster.order == cluster.lowest_order


# ---- quivers at singular points


TWO_LINEAR = [(1, 2, "1/7")]
TWO_CIRCULAR = [(1, 2, "1/7"), (2, 1, "eps1/3 - 1/5")]
TWO_DOUBLE = [(1, 2, "1/7"), (1, 2, "-2/9")]
LOOP_AND_EDGE = [(1, 1, "1/7"), (1, 2, "t/3"), (2, 2, "eps1 + t/5")]
THREE_LINEAR = [(1, 2, "1/7"), (2, 3, "2/9")]
THREE_BACK = [(2, 1, "1/7"), (2, 3, "2/9")]
THREE_CIRCULAR = [(1, 2, "1/7"), (2, 3, "2/9"), (3, 1, "eps2/2")]

ONE = {"coulomb": ["2/7"], "antifundamental": ["1/5"]}
ONE_MORE = {"coulomb": ["-1/3"], "fundamental": ["eps1/2"]}
ONE_BARE = {"coulomb": ["3/5"]}
TWO = {"coulomb": ["1/3", "-1/5"], "antifundamental": ["1/2"], "fundamental": ["3/11"]}
TWO_MORE = {"coulomb": ["2/7", "-3/8"]}
TWO_EQUAL = {"coulomb": ["1/3", "1/3"], "antifundamental": ["1/2"]}
TWO_RESONANT = {"coulomb": ["1/3 + eps2", "1/3"]}
# A pole value, and an edge whose mass meets the contents: bifundamental numerators vanish at the limit.
TWO_POLE = {"coulomb": ["(eps1 + eps2)/2 + t/7", "-(eps1 + eps2)/2"], "antifundamental": ["1/2"]}
MEETING = [(1, 2, "1/3 - 1/5 + eps1")]

QUIVERS = [
    ("two linear, ranks 1 1", [ONE, ONE_MORE], TWO_LINEAR, 4),
    ("two linear, ranks 1 2", [ONE, TWO], TWO_LINEAR, 3),
    ("two linear, ranks 2 1", [TWO, ONE_MORE], TWO_LINEAR, 3),
    ("two linear, ranks 2 2", [TWO, TWO_MORE], TWO_LINEAR, 3),
    ("two linear, equal and resonant", [TWO_EQUAL, TWO_RESONANT], TWO_LINEAR, 3),
    ("two linear, at a pole value", [TWO_POLE, ONE_MORE], TWO_LINEAR, 3),
    ("two linear, mass on the lattice", [TWO, TWO], MEETING, 3),
    ("two circular, ranks 1 1", [ONE, ONE_BARE], TWO_CIRCULAR, 4),
    ("two circular, ranks 2 1", [TWO_EQUAL, ONE], TWO_CIRCULAR, 3),
    ("two circular, ranks 2 2", [TWO, TWO_MORE], TWO_CIRCULAR, 3),
    ("double edge", [ONE, TWO_MORE], TWO_DOUBLE, 3),
    ("loops and an edge", [TWO_MORE, ONE_BARE], LOOP_AND_EDGE, 3),
    ("three linear, ranks 1 1 1", [ONE, ONE_MORE, ONE_BARE], THREE_LINEAR, 4),
    ("three linear, ranks 1 2 1", [ONE, TWO, ONE_MORE], THREE_LINEAR, 3),
    ("three linear, ranks 2 1 2", [TWO_RESONANT, ONE, TWO_MORE], THREE_BACK, 3),
    ("three circular, ranks 1 1 1", [ONE_BARE, ONE_MORE, ONE], THREE_CIRCULAR, 4),
    ("three circular, ranks 1 2 1", [ONE, TWO_EQUAL, ONE_MORE], THREE_CIRCULAR, 3),
]


@pytest.mark.parametrize("point", [(1, 1), (1, 2), (3, -2)], ids=str)
@pytest.mark.parametrize(("nodes", "edges", "top"), [q[1:] for q in QUIVERS], ids=[q[0] for q in QUIVERS])
def test_quivers_at_singular_points(point, nodes, edges, top) -> None:
    case = make_case(str(point[0]), str(point[1]), nodes, charge=top, edges=edges)
    check_against_plain(own_setting(case), case.charges, last=1)


def test_quivers_meet_singular_weights() -> None:
    """The quivers above are singular where they should be, also because of the Coulomb parameters."""
    for name, nodes, edges, top in QUIVERS:
        case = make_case("1", "1", nodes, charge=top, edges=edges)
        weights = Weights(own_setting(case))
        assert any(direct_sum(weights, charge).singular for charge in case.charges), name


def test_compact_clusters_of_quivers() -> None:
    for _, nodes, edges, _ in QUIVERS:
        case = make_case("1", "1", nodes, charge=2, edges=edges)
        paths = [Weights(own_setting(case)), *(Weights(probe_setting(case, n)) for n in (1, 2))]
        for charge in case.charges:
            for cluster in find_clusters(paths[0], charge, scan(paths[0], charge)):
                members = [member.configuration for member in cluster.members]
                sums = [total((w.weight(c).laurent(0) for c in members), precision=1) for w in paths]
                if cluster.compactness.compact:
                    assert all(series.valuation >= 0 for series in sums)
                    assert len({str(series.coefficient(0)) for series in sums}) == 1


# ---- identities between theories


@pytest.mark.parametrize("point", [("1", "1"), ("1", "2"), ("2", "3"), ("3", "-2")])
@pytest.mark.parametrize("shift", ["0", "eps1", "1"])
def test_diagonal_collapse(point, shift) -> None:
    """A massless edge between equal Coulomb parameters: Z vanishes for k2 > k1, and on the diagonal it is Z of one node
    with all flavours."""
    eps1, eps2 = point
    coulomb = [f"1/3 + {shift} + t/7", "1/3 - t/7"]
    left, right = ["1/2", "3/11"], ["2/9"]
    nodes = [{"coulomb": coulomb, "antifundamental": left}, {"coulomb": coulomb, "antifundamental": right}]
    quiver = Weights(own_setting(make_case(eps1, eps2, nodes, charge=4, edges=[(1, 2, "0")])))
    single = Weights(own_setting(make_case(eps1, eps2, [{"coulomb": coulomb, "antifundamental": left + right}])))
    for k2 in range(3):
        for k1 in range(k2):
            assert direct_sum(quiver, (k1, k2), last=LAST).series.is_zero()
        found = direct_sum(quiver, (k2, k2), last=LAST).series
        assert found == direct_sum(single, (k2,), last=LAST).series
        assert not found.is_zero()


@pytest.mark.parametrize("ranks", [(1, 1), (1, 2), (2, 1), (2, 2)], ids=str)
@pytest.mark.parametrize("point", [("1", "1"), ("1", "2"), ("3", "-2")])
def test_edge_reversal(point, ranks) -> None:
    """Reversing an edge with m -> eps - m flips the sign of each of its factors: q_from takes (-1)^N_to, and q_to takes
    (-1)^N_from."""
    coulomb = (["1/3", "-1/5"][: ranks[0]], ["2/7", "3/8"][: ranks[1]])
    nodes = [{"coulomb": a, "antifundamental": ["1/2"]} for a in coulomb]
    case = make_case(*point, nodes, charge=3, edges=[(1, 2, "1/7 + t")])
    there = Weights(own_setting(case))
    back = Weights(own_setting(make_case(*point, nodes, charge=3, edges=[(2, 1, "eps1 + eps2 - 1/7 - t")])))
    signs = set()
    for charge in case.charges:
        sign = (-1) ** (ranks[1] * charge[0] + ranks[0] * charge[1])
        signs.add(sign)
        series = direct_sum(there, charge, last=LAST).series
        assert direct_sum(back, charge, last=LAST).series == series.scaled(sign)
        assert not series.is_zero()
    assert len(signs) == (1 if ranks == (2, 2) else 2)


def test_a_loop_is_an_adjoint() -> None:
    looped = make_case("1", "1", [{"coulomb": ["1/3", "-1/5"]}], charge=3, edges=[(1, 1, "1/7")])
    adjoint = make_case("1", "1", [{"coulomb": ["1/3", "-1/5"], "adjoint": ["1/7"]}], charge=3)
    assert looped.hash == adjoint.hash
    theory = plain_theory(own_setting(adjoint))
    masses = theory["nodes"][0].pop("adjoint")
    theory["edges"] = [(0, 0, masses[0])]
    for k in range(4):
        found = direct_sum(Weights(own_setting(looped)), (k,), last=LAST).series
        assert found.coefficients() == plain.laurent_coefficient(theory, (k,), LAST)


SWAPPED = {
    "none": ({}, {}),
    "flavours": ({"antifundamental": ["1/2 - eps1/3"], "fundamental": ["eps2/5"]},) * 2,
    "adjoint": ({"adjoint": ["1/5 + eps2"]},) * 2,
}


@pytest.mark.parametrize("coulomb", [["1/3"], ["1/3", "-1/5"], ["1/3", "1/3 - eps1"], ["1/3", "1/3", "2/7"]], ids=str)
@pytest.mark.parametrize("matter", SWAPPED)
@pytest.mark.parametrize("point", [("1 + t", "1"), ("2", "1 + t"), ("2 + t/3", "3"), ("3", "-2 + t")])
def test_transposition(point, matter, coulomb) -> None:
    """Exchanging eps1 and eps2 transposes all diagrams and changes nothing, power by power of t."""

    def exchanged(text: str) -> str:
        return re.sub(r"eps([12])", lambda match: f"eps{3 - int(match[1])}", text)

    tilted = [f"{a} + {n}*t/7" for n, a in enumerate(coulomb)]
    node = {"coulomb": tilted, **SWAPPED[matter][0]}
    mirror = {kind: [exchanged(x) for x in values] for kind, values in node.items()}
    first = own_setting(make_case(point[0], point[1], [node]))
    second = own_setting(make_case(point[1], point[0], [mirror]))
    assert not first.tilted
    for k in range(5 if len(coulomb) < 3 else 4):
        one = direct_sum(Weights(first), (k,), last=LAST)
        other = direct_sum(Weights(second), (k,), last=LAST)
        assert one.series == other.series
        sizes = [Counter((c.order, c.size) for c in x.clusters.values()) for x in (one, other)]
        assert sizes[0] == sizes[1]
        assert not one.series.is_zero()


def test_a_common_shift_of_coulomb_parameters_and_masses_changes_nothing() -> None:
    base = {"coulomb": ["1/3", "-1/5"], "antifundamental": ["1/2", "2/9"], "fundamental": ["1/7"]}
    moved = {"coulomb": ["4/3", "4/5"], "antifundamental": ["-1/2", "-7/9"], "fundamental": ["8/7"]}
    one, other = (Weights(own_setting(make_case("1", "1", [node]))) for node in (base, moved))
    for k in range(5):
        assert direct_sum(one, (k,), last=LAST).series == direct_sum(other, (k,), last=LAST).series


def test_without_edges_the_nodes_multiply() -> None:
    case = make_case("1", "1", [TWO, ONE_MORE], charge=4)
    weights = Weights(own_setting(case))
    left, right = (Weights(own_setting(make_case("1", "1", [node]))) for node in (TWO, ONE_MORE))
    for charge in [(2, 2), (3, 1), (0, 3)]:
        parts = [direct_sum(w, (k,), last=LAST).series for w, k in zip((left, right), charge, strict=True)]
        assert direct_sum(weights, charge, last=LAST).series == parts[0] * parts[1]


# ---- raising the charge


@pytest.mark.parametrize(
    ("eps", "nodes", "edges"),
    [
        (("1", "1"), [{"coulomb": ["0", "0"]}], []),
        (("2", "1"), [{"coulomb": ["3/2", "-3/2"], "antifundamental": ["7/2", "5/2"]}], []),
        (("1", "-1"), [{"coulomb": ["0", "0"], "antifundamental": ["1/2", "1/2", "0", "0"]}], []),
        (("1", "2"), [TWO_EQUAL, ONE_MORE], TWO_LINEAR),
    ],
)
def test_raising_the_charge_changes_nothing_before(eps, nodes, edges) -> None:
    results = [ratomega.limit(make_case(*eps, nodes, charge=k, edges=edges), terms=1) for k in range(5)]
    last = results[-1]
    for k, result in enumerate(results):
        assert result.header.path == last.header.path
        assert result.coefficients == last.coefficients[: len(result.coefficients)]
        assert result.header.hash == last.header.hash
        if len(nodes) == 1:
            assert len(result.coefficients) == k + 1
    if len(nodes) > 1:
        listed = ratomega.limit(make_case(*eps, nodes, charge=[2, 1], edges=edges), terms=1)
        assert [c.charge for c in listed] == [(0, 0), (1, 0), (0, 1), (2, 0), (1, 1), (2, 1)]
        assert all(c == last[c.charge] for c in listed)


def test_depth_is_exactly_what_is_asked() -> None:
    entry = Entry(2, "1:1", "equal", "flavours")
    long = direct_sum(entry.weights, (3,), last=6).series
    assert long.valuation == 0
    for last in range(6):
        short = direct_sum(entry.weights, (3,), last=last).series
        assert short == long.truncated(last + 1)
        assert short.precision == last + 1
    expected = plain.laurent_coefficient(entry.theory, (3,), 6)
    assert long == Laurent.from_coefficients(0, [expected.get(n, Rational(0)) for n in range(7)], precision=7)
