"""The detector on the census, against the plain reference and against published counts of components.

What the detector says is recomputed here from the factors of the plain reference, configuration by configuration:
vanishing factors, limiting contents, tangent weights of the fixed locus.
"""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass
from functools import cache
from itertools import permutations
from math import prod

import networkx
import plain
import pytest
from building import make_case, plain_theory, plain_values
from census import RATIOS, Entry, census
from sympy import Rational as SympyRational
from sympy import sympify

import ratomega
from ratomega.case.setting import own_setting
from ratomega.detector.clusters import Cluster, cluster_graph, find_clusters
from ratomega.detector.geometry import compact_by_parameters, is_sink
from ratomega.detector.zeros import Zeros, guilty_factors, scan
from ratomega.exact.rational import as_fraction
from ratomega.weights import Weights

ALL = census()
VECTORS = census(matter=["none"])
PLURAL = census(ranks=(2, 3), matter=["none", "cutting"])


# ---- the plain side


@dataclass(frozen=True)
class Plain:
    """What the plain factors say about one configuration."""

    down: int
    up: int
    dead: bool
    contents: tuple
    tangents: tuple


def plain_contents(values, configuration):
    """Node by node the sorted limiting contents."""
    e1, e2 = values["eps1"], values["eps2"]
    key = []
    for node, diagrams in zip(values["nodes"], configuration, strict=True):
        found = []
        for a, diagram in zip(node["coulomb"], diagrams, strict=True):
            found += [a + (i - 1) * e1 + (j - 1) * e2 for i, j in plain.boxes(diagram)]
        key.append(tuple(sorted(as_fraction(x) for x in found)))
    return tuple(key)


def plain_tangents(values, configuration):
    """(node, alpha, beta, p, q) of the tangent weights a_alpha - a_beta + p eps1 + q eps2 that vanish at the limit."""
    e1, e2 = values["eps1"], values["eps2"]
    for v, (node, diagrams) in enumerate(zip(values["nodes"], configuration, strict=True)):
        a = node["coulomb"]
        for alpha, lam in enumerate(diagrams):
            for beta, mu in enumerate(diagrams):
                for s in plain.boxes(lam):
                    p, q = -plain.leg(mu, s), plain.arm(lam, s) + 1
                    if a[alpha] - a[beta] + p * e1 + q * e2 == 0:
                        yield v, alpha, beta, p, q
                    # eps minus the weight before: the other half of the tangent space.
                    if a[beta] - a[alpha] + (1 - p) * e1 + (1 - q) * e2 == 0:
                        yield v, beta, alpha, 1 - p, 1 - q


def sign(tangent):
    """The sign of a tangent weight under a one-parameter group with eps1 >> eps2 >> a_1 >> a_2 >> ... > 0."""
    _, alpha, beta, p, q = tangent
    for number in (p, q, beta - alpha):
        if number:
            return 1 if number > 0 else -1
    raise AssertionError("a tangent weight that vanishes identically")


def look(theory, values, configuration):
    down = up = 0
    dead = False
    for factor, exponent in plain.factors(theory, configuration):
        if factor.c == 0:
            down, up = down + (exponent < 0), up + (exponent > 0)
            dead = dead or (exponent > 0 and factor.d == 0)
    tangents = tuple(sorted(plain_tangents(values, configuration)))
    return Plain(down, up, dead, plain_contents(values, configuration), tangents)


@dataclass(frozen=True)
class Scan:
    """One charge, seen by the detector and by the plain reference."""

    charge: tuple
    found: tuple[Zeros, ...]
    clusters: tuple[Cluster, ...]
    plain: dict


def scan_charge(weights, theory, values, charge):
    found = tuple(scan(weights, charge))
    ranks = [len(node["coulomb"]) for node in theory["nodes"]]
    seen = {c: look(theory, values, c) for c in plain.configurations(ranks, charge)}
    return Scan(charge, found, find_clusters(weights, charge, found), seen)


@cache
def scans(entry: Entry) -> tuple[Scan, ...]:
    return tuple(scan_charge(entry.weights, entry.theory, entry.values, (k,)) for k in range(entry.top + 1))


def plain_groups(one: Scan):
    groups = {}
    for configuration, seen in one.plain.items():
        groups.setdefault(seen.contents, set()).add(configuration)
    return {frozenset(members) for members in groups.values()}


def check_scan(one: Scan, generating: int) -> None:
    """Everything that holds for every theory at every point."""
    assert len(one.found) == len(one.plain) == generating
    for zeros in one.found:
        seen = one.plain[zeros.configuration]
        bookkeeping = (zeros.vanishing_denominators, zeros.vanishing_numerators, zeros.dead)
        assert bookkeeping == (seen.down, seen.up, seen.dead)
        assert zeros.order == seen.down - seen.up
        assert zeros.singular == (seen.down > seen.up and not seen.dead)
        assert zeros.indeterminate == (seen.down > 0 and (seen.down <= seen.up or seen.dead))
        assert zeros.vanishing == (seen.dead or seen.down < seen.up)
    assert {frozenset(m.configuration for m in cluster.members) for cluster in one.clusters} == plain_groups(one)
    for cluster in one.clusters:
        members = [one.plain[m.configuration] for m in cluster.members]
        # One order for all members, also for those that a numerator removes from the path.
        assert {seen.down - seen.up for seen in members} == {cluster.order}
        assert cluster.orders_agree
        assert {len(seen.tangents) for seen in members} == {cluster.dimension}
        assert cluster.euler_number == len(members)
        assert cluster.singular == any(seen.down > seen.up and not seen.dead for seen in members)
        # A smooth connected component from which every point flows to a limit has exactly one member of which a
        # neighbourhood is attracted (Bialynicki-Birula 1973).
        sources = [seen for seen in members if all(sign(x) > 0 for x in seen.tangents)]
        assert len(sources) == 1
        # ... and one that repels a neighbourhood exactly when it is compact.
        sinks = [seen for seen in members if all(sign(x) < 0 for x in seen.tangents)]
        assert cluster.compactness.compact == (len(sinks) == 1)
        assert len(sinks) <= 1


def generating_function(rank: int, top: int) -> list[int]:
    """The coefficients of prod 1/(1 - q^n)^rank, factor by factor."""
    counts = [1] + [0] * top
    for n in range(1, top + 1):
        for _ in range(rank):
            for k in range(n, top + 1):
                counts[k] += counts[k - n]
    return counts


# ---- the census


@pytest.mark.parametrize("entry", ALL, ids=str)
def test_bookkeeping_and_clusters(entry: Entry) -> None:
    expected = generating_function(entry.rank, entry.top)
    for one in scans(entry):
        check_scan(one, expected[one.charge[0]])


@pytest.mark.long
@pytest.mark.parametrize("entry", census(ranks=(3,), further=1), ids=str)
def test_bookkeeping_and_clusters_of_three_colours_further(entry: Entry) -> None:
    test_bookkeeping_and_clusters(entry)


def test_the_census_meets_what_it_is_for() -> None:
    """Dead members beside living ones, indeterminate weights, non-compact clusters: all occur, on every rank > 1."""
    for rank in (2, 3):
        tally = Counter()
        for entry in census(ranks=(rank,)):
            for one in scans(entry):
                for cluster in one.clusters:
                    dead = {member.dead for member in cluster.members}
                    tally["mixed"] += len(dead) == 2
                    tally["singular"] += cluster.singular
                    tally["non-compact"] += not cluster.compactness.compact
                tally["indeterminate"] += any(zeros.indeterminate for zeros in one.found)
                tally["cancelled"] += any(z.vanishing_denominators == z.vanishing_numerators > 0 for z in one.found)
        assert all(tally[word] for word in ("mixed", "singular", "non-compact", "indeterminate", "cancelled")), tally


@pytest.mark.parametrize("entry", VECTORS, ids=str)
def test_the_order_of_vectors_alone_is_the_dimension(entry: Entry) -> None:
    for one in scans(entry):
        assert all(cluster.order == cluster.dimension for cluster in one.clusters)


@pytest.mark.parametrize("entry", census(coulomb=["generic"], matter=["none", "flavours", "adjoint"]), ids=str)
def test_worst_order_at_generic_coulomb_parameters(entry: Entry) -> None:
    """floor(k / (alpha + beta)) at the positive ratio alpha:beta; nothing is singular at a negative one."""
    alpha, beta = entry.steps
    for one in scans(entry):
        worst = max(zeros.order for zeros in one.found)
        assert worst == (one.charge[0] // (alpha + beta) if beta > 0 else 0)
        if beta < 0:
            assert not any(zeros.singular or zeros.indeterminate for zeros in one.found)


@pytest.mark.parametrize("rank", [2, 3])
def test_equal_coulomb_parameters_have_larger_orders(rank: int) -> None:
    """Order k for U(2) with equal Coulomb parameters at eps1 = eps2; more for U(3)."""
    for one in scans(Entry(rank, "1:1", "equal", "none")):
        worst = max(zeros.order for zeros in one.found)
        assert worst == one.charge[0] if rank == 2 else worst >= one.charge[0]


# ---- compactness by other criteria


@pytest.mark.parametrize("entry", PLURAL, ids=str)
def test_compactness_against_the_poles_in_the_coulomb_parameters(entry: Entry) -> None:
    """The poles of Z in a Coulomb difference sit at ±(m eps1 + n eps2), m, n >= 1, from charge m n on (U(2):
    Al. Zamolodchikov 1984, Poghossian 2009): below the first such charge all components are compact, then not."""
    values = entry.values
    a, e1, e2 = values["nodes"][0]["coulomb"], values["eps1"], values["eps2"]
    charges = [
        m * n
        for x, y in permutations(a, 2)
        for m in range(1, entry.top + 1)
        for n in range(1, entry.top + 1)
        if x - y == m * e1 + n * e2
    ]
    first = min(charges, default=entry.top + 1)
    for one in scans(entry):
        compact = all(cluster.compactness.compact for cluster in one.clusters)
        assert compact == (one.charge[0] < first)
        assert compact_by_parameters(entry.setting, one.charge) == compact


@pytest.mark.parametrize("ratio", ["1:1", "2:1", "-1", "-2/3"])
def test_a_simple_pole_value_has_one_non_compact_cluster(ratio: str) -> None:
    """At 2a = eps1 + eps2 and charge 1 the component that carries the pole is the one non-compact cluster."""
    eps1, eps2 = RATIOS[ratio]
    case = make_case(str(eps1), str(eps2), [{"coulomb": ["(eps1 + eps2)/2 + t/7", "-(eps1 + eps2)/2 - t/7"]}], charge=1)
    weights = Weights(own_setting(case))
    clusters = find_clusters(weights, (1,), scan(weights, (1,)))
    compact = [cluster.compactness.compact for cluster in clusters]
    if eps1 + eps2 == 0:
        # Both colours share their content: one cluster, the resolved A1 singularity, with the pole.
        assert compact == [False]
    else:
        assert sorted(compact) == [False, True]
        guilty = next(cluster for cluster in clusters if not cluster.compactness.compact)
        # The pole sits in the weight with a box in the second colour: E_21 = -2a + eps1 + eps2.
        assert [member.configuration for member in guilty.members] == [(((), (1,)),)]
        assert "a1 - a2 = eps1 + eps2" in guilty.compactness.why


@pytest.mark.parametrize("entry", census(ranks=(2,), matter=["none"]), ids=str)
def test_a_non_compact_cluster_shows_in_its_integral(entry: Entry) -> None:
    """The sum over a compact component is finite and the same on every path; over a non-compact one with vectors alone
    (the equivariant volume) it diverges or depends on the path. Summed by the plain reference."""
    paths = [entry.theory, *(plain_theory(probe.setting) for probe in entry.probes)]
    for one in scans(entry):
        for cluster in one.clusters:
            sums = []
            for theory in paths:
                total = Counter()
                for member in cluster.members:
                    total.update(plain.laurent_weight(theory, member.configuration, 0))
                sums.append({power: value for power, value in total.items() if value != 0})
            finite = not any(power < 0 for found in sums for power in found)
            tame = finite and all(found == sums[0] for found in sums)
            assert tame == (cluster.compactness.compact or cluster.dimension == 0)


# ---- published counts


@pytest.mark.parametrize("ratio", ["1:1", "2:1", "1:2", "3:2", "2:3"])
def test_poincare_polynomials_of_one_colour(ratio: str) -> None:
    """prod_{(alpha+beta) not dividing i} 1/(1 - t^i) prod_i 1/(1 - q t^((alpha+beta) i)) sums the Poincaré polynomials
    in q^(dim/2) of all components (Buryak, Feigin 1206.5640); a cell per member, its dimension the number of attracting
    weights."""
    top, step = 10, sum(RATIOS[ratio])
    expected = [Counter() for _ in range(top + 1)]
    expected[0][0] = 1
    for i in range(1, top + 1):
        for n in range(i, top + 1):
            for power, count in list(expected[n - i].items()):
                expected[n][power + (i % step == 0)] += count
    entry = Entry(1, ratio, "generic", "none")
    for one, polynomial in zip(scans(entry), expected, strict=True):
        found = Counter()
        for cluster in one.clusters:
            cells = [sum(1 for x in one.plain[m.configuration].tangents if sign(x) < 0) for m in cluster.members]
            # Compact: Poincaré duality within the cluster.
            assert Counter(cells) == Counter(cluster.dimension - cell for cell in cells)
            found.update(cells)
        assert found == polynomial
        # One cell of dimension zero in each component: the number of clusters.
        assert len(one.clusters) == polynomial[0]


def test_poincare_polynomials_that_were_tabulated() -> None:
    """The same by components, ratio 1:1: n = 2..6; ratio 2:3: n = 5, 6 (Buryak, Feigin 1206.5640, expanded by hand)."""
    tables = {
        "1:1": {2: [1, 1], 3: [2, 1], 4: [2, 2, 1], 5: [3, 3, 1], 6: [4, 4, 2, 1]},
        "2:3": {5: [6, 1], 6: [10, 1]},
    }
    for ratio, table in tables.items():
        entry = Entry(1, ratio, "generic", "none")
        for n, polynomial in table.items():
            clusters = find_clusters(entry.weights, (n,), scan(entry.weights, (n,)))
            found = Counter()
            for cluster in clusters:
                for member in cluster.members:
                    points = entry.weights.tangent_points(member.configuration)
                    found[sum(1 for _, _, p, q in points if (p, q) < (0, 0))] += 1
            assert [found[power] for power in range(len(found))] == polynomial


@pytest.mark.parametrize(
    ("shift", "expected"), [("0", [1, 1, 2, 3, 4, 6, 9, 12]), ("eps1", [1, 2, 2, 4, 6, 8, 12, 16])]
)
def test_numbers_of_clusters_at_a_resonance(shift: str, expected: list[int]) -> None:
    """Two colours with equal contents, ratio 1:1: counted once by the plain reference, and counted again here."""
    case = make_case("1", "1", [{"coulomb": [f"1/3 + {shift}", "1/3"]}], charge=7)
    setting = own_setting(case)
    weights, values = Weights(setting), plain_values(setting)
    again = [{plain_contents(values, c) for c in plain.configurations([2], (k,))} for k in range(8)]
    assert [len(found) for found in again] == expected
    found = [len(find_clusters(weights, (k,), scan(weights, (k,)))) for k in range(8)]
    assert found == expected


def rocha_caridi(p: int, pp: int, r: int, s: int, top: int) -> list[int]:
    """The character of M(p, p') without its leading power: prod 1/(1 - q^n) times an alternating sum."""
    numerator = [0] * (top + 1)
    for k in range(-top - 1, top + 2):
        for power, coefficient in ((k * (k * p * pp + r * pp - s * p), 1), ((k * p + r) * (k * pp + s), -1)):
            if power <= top:
                numerator[power] += coefficient
    one_colour = generating_function(1, top)
    return [sum(numerator[j] * one_colour[n - j] for j in range(n + 1)) for n in range(top + 1)]


@pytest.mark.parametrize(
    ("model", "field", "expected"),
    [
        ((2, 5), (1, 1), [1, 1, 3, 5, 9, 14, 24]),
        ((2, 5), (1, 2), [1, 2, 4, 7, 13, 21, 35]),
        ((3, 4), (1, 1), [1, 1, 3, 5, 10, 16, 28]),
        ((3, 4), (1, 2), [1, 2, 4, 8, 14, 24, 40]),
    ],
)
def test_regular_configurations_of_minimal_models(model, field, expected) -> None:
    """At minimal-model values the configurations without a vanishing denominator are counted by the Virasoro character
    times one free boson (Rocha-Caridi 1985; Bershtein, Foda 1404.7075)."""
    (p, pp), (r, s) = model, field
    half = f"({r}*eps1 + {s}*eps2)/2"
    case = make_case(str(pp), str(-p), [{"coulomb": [half, f"-{half}"]}], charge=6)
    weights = Weights(own_setting(case))
    boson, character = generating_function(1, 6), rocha_caridi(p, pp, r, s, 6)
    counted = [sum(character[j] * boson[n - j] for j in range(n + 1)) for n in range(7)]
    assert counted == expected
    found = [sum(1 for zeros in scan(weights, (k,)) if zeros.vanishing_denominators == 0) for k in range(7)]
    assert found == expected


# ---- names of factors


QUIVER = make_case(
    "1",
    "1",
    [
        {"coulomb": ["1/3", "1/3 + eps1"], "antifundamental": ["-4/3", "1/7"], "fundamental": ["1/3 + 2*eps1"]},
        {"coulomb": ["1/5"], "adjoint": ["t/3"]},
        {"coulomb": ["1/5", "-1/4"]},
    ],
    charge=3,
    edges=[(1, 2, "2/15"), (2, 3, "0"), (3, 1, "eps2")],
)


def named(case, charge):
    """(theory, weights, configuration, named factors) of every configuration of a charge."""
    setting = own_setting(case)
    weights, theory = Weights(setting), plain_theory(setting)
    for configuration in plain.configurations(list(setting.ranks), charge):
        yield setting, theory, weights, configuration, list(weights.named_factors(configuration))


@pytest.mark.parametrize("charge", [(1, 0, 0), (2, 0, 0), (1, 1, 1), (0, 2, 1), (2, 1, 0), (0, 0, 3)])
def test_named_factors_are_those_of_the_plain_reference(charge) -> None:
    for _, theory, weights, configuration, factors in named(QUIVER, charge):
        expected = Counter((str(f.c), str(f.d), exponent) for f, exponent in plain.factors(theory, configuration))
        assert Counter((str(f.value.constant), str(f.value.slope), f.exponent) for f in factors) == expected
        down, up = guilty_factors(weights, configuration)
        assert all(f.exponent == -1 for f in down)
        assert all(f.exponent == 1 for f in up)
        assert Counter((str(f.value.constant), str(f.value.slope), f.exponent) for f in (*down, *up)) == Counter(
            {key: count for key, count in expected.items() if key[0] == "0"}
        )


@pytest.mark.parametrize("charge", [(2, 1, 0), (1, 1, 1), (0, 2, 1), (3, 0, 0)])
def test_names_say_what_vanishes(charge) -> None:
    """Colours, box, arm and leg give the value of the factor back, and so does the written form."""
    for setting, _, _, configuration, factors in named(QUIVER, charge):
        names = {node.name: (node, diagrams) for node, diagrams in zip(setting.nodes, configuration, strict=True)}
        e1, e2 = setting.eps1, setting.eps2
        for f in factors:
            left, _, right = f.place.partition(" -> ")
            (one, first), (two, second) = names[left], names[right or left]
            a, lam = one.coulomb[f.colours[0] - 1], first[f.colours[0] - 1]
            i, j = f.box
            if f.arm is None:
                assert f.leg is None
                assert f.box in plain.boxes(lam)
                assert f.within == (number_of(setting, left, right)[0] + 1, f.colours[0])
                assert len(f.colours) == 1
                phi = a + e1.scaled(i - 1) + e2.scaled(j - 1)
                mass = [phi + m for m in one.antifundamental] + [phi - m + e1 + e2 for m in one.fundamental]
                assert f.value in mass
            else:
                b, mu = two.coulomb[f.colours[1] - 1], second[f.colours[1] - 1]
                masses = {
                    "vector": [None],
                    "adjoint": one.adjoint,
                    "bifundamental": [m for s, t, m in setting.edges if (s, t) == number_of(setting, left, right)],
                }[f.multiplet]
                homes = [(number_of(setting, left, right)[side] + 1, f.colours[side]) for side in (0, 1)]
                assert f.within in homes
                sides = []
                hook = (plain.arm(lam, f.box), plain.leg(mu, f.box))
                if f.within == homes[0] and f.box in plain.boxes(lam) and (f.arm, f.leg) == hook:
                    sides.append(a - b - e1.scaled(f.leg) + e2.scaled(f.arm + 1))
                hook = (plain.arm(mu, f.box), plain.leg(lam, f.box))
                if f.within == homes[1] and f.box in plain.boxes(mu) and (f.arm, f.leg) == hook:
                    sides.append(a - b + e1.scaled(f.leg + 1) - e2.scaled(f.arm))
                assert f.value in [side if m is None else side - m for side in sides for m in masses]
            assert written(f, one, two, e1, e2) == (f.value.constant, f.value.slope)


def number_of(setting, left, right):
    names = [node.name for node in setting.nodes]
    return names.index(left), names.index(right or left)


def written(factor, one, two, e1, e2):
    """The value of the written form, read by sympy."""
    t = sympify("t")

    def value(x):
        return SympyRational(as_fraction(x.constant)) + SympyRational(as_fraction(x.slope)) * t

    parameters = {"eps1": value(e1), "eps2": value(e2)}
    parameters |= {f"a{n}": value(a) for n, a in enumerate(one.coulomb, 1)}
    parameters |= {f"b{n}": value(a) for n, a in enumerate(two.coulomb, 1)}
    read = sympify(factor.form, locals=parameters).expand()
    return SympyRational(read.coeff(t, 0)), SympyRational(read.coeff(t, 1))


# ---- the graph of exchanges


def between(first, second, third) -> bool:
    """Does the third configuration contain the common boxes of the others, within their union?"""
    a, b, c = (
        {(v, n, s) for v, node in enumerate(x) for n, diagram in enumerate(node) for s in plain.boxes(diagram)}
        for x in (first, second, third)
    )
    return a & b <= c <= a | b


@pytest.mark.parametrize(
    ("entry", "charge"),
    [
        (Entry(1, "1:1", "generic", "none"), 8),
        (Entry(1, "1:2", "generic", "none"), 9),
        (Entry(2, "1:1", "generic", "flavours"), 4),
        (Entry(2, "1:1", "equal", "none"), 4),
        (Entry(2, "-1", "equal", "none"), 4),
        (Entry(3, "2:1", "by eps1", "none"), 3),
    ],
    ids=str,
)
def test_exchanges_join_members_with_no_third_between(entry: Entry, charge: int) -> None:
    graph = ratomega.clusters(entry.case, charge, exchanges=True, largest=100)
    clusters = [frozenset(c) for c in networkx.connected_components(graph)]
    one = scan_charge(entry.weights, entry.theory, entry.values, (charge,))
    assert set(clusters) == plain_groups(one)
    joined = 0
    for members in clusters:
        for first in members:
            for second in members:
                if first >= second:
                    continue
                free = not any(between(first, second, x) for x in members if x not in (first, second))
                assert graph.has_edge(first, second) == free
                joined += free
    assert joined == graph.number_of_edges() > 0
    for first, second, data in graph.edges(data=True):
        a, b = ({(0, n, *s) for n, diagram in enumerate(x[0]) for s in plain.boxes(diagram)} for x in (first, second))
        assert {frozenset(data["leaves"]), frozenset(data["enters"])} == {frozenset(a - b), frozenset(b - a)}
        assert graph.nodes[first]["order"] == graph.nodes[second]["order"]


def test_without_exchanges_the_components_are_the_clusters_too() -> None:
    entry = Entry(2, "1:1", "equal", "cutting")
    one = scans(entry)[5]
    for largest in (0, 3, 100):
        graph = cluster_graph(one.clusters, exchanges=True, largest=largest)
        assert {frozenset(c) for c in networkx.connected_components(graph)} == plain_groups(one)
    graph = cluster_graph(one.clusters)
    assert {frozenset(c) for c in networkx.connected_components(graph)} == plain_groups(one)
    for index, cluster in enumerate(one.clusters):
        for member in cluster.members:
            data = graph.nodes[member.configuration]
            seen = one.plain[member.configuration]
            assert data == {"order": seen.down - seen.up, "dead": seen.dead, "cluster": index}


# ---- the report


@pytest.mark.parametrize(
    "entry",
    [
        Entry(1, "2:1", "generic", "cutting"),
        Entry(2, "1:1", "equal", "cutting"),
        Entry(2, "-1", "by 2", "none"),
        Entry(3, "1:2", "by 2", "soft adjoint"),
    ],
    ids=str,
)
def test_detect_reports_what_the_plain_reference_sees(entry: Entry) -> None:
    result = ratomega.detect(entry.case, exchanges=12)
    assert result.exit_status == 0
    for one, report in zip(scans(entry), result.charges, strict=True):
        seen = one.plain
        assert report.charge == one.charge
        assert report.configurations == len(seen)
        singular = {c for c, x in seen.items() if x.down > x.up and not x.dead}
        indeterminate = {c for c, x in seen.items() if x.down > 0} - singular
        vanishing = {c for c, x in seen.items() if x.dead or x.down < x.up}
        assert {s.diagrams for s in report.singular_configurations} == singular
        assert {s.diagrams for s in report.indeterminate_configurations} == indeterminate
        assert set(report.vanishing_configurations) == vanishing
        counts = (report.singular, report.indeterminate, report.vanishing)
        assert counts == (len(singular), len(indeterminate), len(vanishing))
        assert report.worst_order == max((seen[c].down - seen[c].up for c in singular), default=0)
        assert report.all_clusters == len(plain_groups(one))
        guilty = {group for group in plain_groups(one) if group & singular}
        assert {frozenset(cluster.members) for cluster in report.clusters} == guilty
        for s in (*report.singular_configurations, *report.indeterminate_configurations):
            assert (len(s.factors), len(s.compensating)) == (seen[s.diagrams].down, seen[s.diagrams].up)
            assert s.dead == seen[s.diagrams].dead
            if s.cluster is None:
                assert not any(s.diagrams in group for group in guilty)
            else:
                assert s.diagrams in report.clusters[s.cluster].members
        for cluster in report.clusters:
            assert (cluster.exchanges is None) == (len(cluster.members) > 12)
            for exchange in cluster.exchanges or ():
                first, second = (
                    {(1, n, *s) for n, diagram in enumerate(cluster.members[x][0], 1) for s in plain.boxes(diagram)}
                    for x in exchange.members
                )
                assert (set(exchange.leaves), set(exchange.enters)) == (first - second, second - first)


# The same contents are within reach of both nodes: a box at 1/3 in the first and at -1/5 in the second is one cluster,
# the other way round another.
TWINS = make_case("1", "1", [{"coulomb": ["1/3", "-1/5"]}] * 2, charge=3, edges=[(1, 2, "8/15")])


@pytest.mark.parametrize("case", [QUIVER, TWINS], ids=["three nodes", "twins"])
def test_quivers_have_clusters_node_by_node(case) -> None:
    """The census in small for quivers: bookkeeping, orders, clusters, sources and sinks."""
    setting = own_setting(case)
    weights, theory, values = Weights(setting), plain_theory(setting), plain_values(setting)
    counts = [generating_function(rank, 3) for rank in setting.ranks]
    for charge in case.charges:
        one = scan_charge(weights, theory, values, charge)
        check_scan(one, prod(counts[v][k] for v, k in enumerate(charge)))
        for cluster in one.clusters:
            for member in cluster.members:
                tangents = one.plain[member.configuration].tangents
                assert is_sink(weights, member.configuration) == all(sign(x) < 0 for x in tangents)
