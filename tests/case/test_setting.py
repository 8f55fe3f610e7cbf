"""Paths: when the Coulomb parameters are tilted, with what, further paths, resonances; all against brute force."""

from __future__ import annotations

import re
from itertools import combinations, islice, permutations

import pytest
from building import make_case

import ratomega.case.setting as setting_module
from ratomega.case.expression import parse_affine
from ratomega.case.reading import case_from_mapping, case_to_mapping, load_case
from ratomega.case.setting import MOST_PROBES, frozen_pairs, own_setting, probe_setting, resonances
from ratomega.errors import PathError
from ratomega.exact.path import leaves_the_ratio
from ratomega.exact.rational import Rational

REACH = range(-40, 41)


@pytest.fixture(autouse=True)
def _few_attempts(monkeypatch):
    """A search for a tilt that goes on for ever ends here instead."""
    left = [100]
    settle = setting_module._settle

    def counted(*arguments):
        left[0] -= 1
        assert left[0] > 0, "too many attempts at a tilt"
        return settle(*arguments)

    monkeypatch.setattr(setting_module, "_settle", counted)


def on_the_lattice(form, eps1, eps2):
    """Is the form m*eps1 + n*eps2 all along the path, for some small integers? By trying them."""
    return any(
        form.constant == m * eps1.constant + n * eps2.constant and form.slope == m * eps1.slope + n * eps2.slope
        for m in REACH
        for n in REACH
    )


def stuck(setting):
    """(node, colour, colour) wherever a Coulomb difference stays on the lattice, by trying."""
    return {
        (index, alpha, beta)
        for index, node in enumerate(setting.nodes)
        for alpha, beta in combinations(range(node.rank), 2)
        if on_the_lattice(node.coulomb[alpha] - node.coulomb[beta], setting.eps1, setting.eps2)
    }


PATHS = [
    ("1", "1"),
    ("1", "2"),
    ("3", "2"),
    ("1", "-1"),
    ("4", "-3"),
    ("1/2", "3/4"),
    ("1 + t", "1"),
    ("2 - t/3", "1 + t"),
    ("1", "1 + t/13"),
]
COULOMB = [
    (["1/3", "-1/3"], False),
    (["0", "0"], True),
    (["1/7", "1/7"], True),
    (["eps1", "0"], True),
    (["(eps1 + eps2)/2", "-(eps1 + eps2)/2"], True),
    (["2*eps1 - 3*eps2 + 1/5", "1/5"], True),
    (["eps1/2", "-eps2/3"], False),
    (["eps1 + t/7", "0"], False),
    (["t/3", "-t/3"], False),
    (["1/3", "1/5", "1/3"], True),
    (["1/3", "1/5", "1/7"], False),
]


@pytest.mark.parametrize(("eps1", "eps2"), PATHS)
@pytest.mark.parametrize(("coulomb", "expected"), COULOMB)
def test_a_tilt_exactly_when_a_difference_stays_on_the_lattice(eps1, eps2, coulomb, expected):
    case = make_case(eps1, eps2, [{"coulomb": coulomb}])
    untilted = [a.on(case.background.eps1, case.background.eps2) for a in case.theory.nodes[0].coulomb]
    pairs = combinations(range(len(coulomb)), 2)
    needed = any(
        on_the_lattice(untilted[x] - untilted[y], case.background.eps1, case.background.eps2) for x, y in pairs
    )
    assert needed == expected
    setting = own_setting(case)
    assert setting.tilted == needed
    assert not stuck(setting)
    if not needed:
        assert list(setting.nodes[0].coulomb) == untilted


@pytest.mark.parametrize(("eps1", "eps2"), [("1", "1"), ("1", "2"), ("2", "1"), ("1", "-1"), ("2/3", "1")])
@pytest.mark.parametrize("difference", ["1", "2", "-3", "1/3", "2/3", "5"])
def test_a_typed_number_that_meets_the_lattice(eps1, eps2, difference):
    # On the path eps2 + t a number stays on the lattice exactly when it is a multiple of eps1.
    case = make_case(eps1, eps2, [{"coulomb": [difference, "0"]}])
    multiple = (Rational(*map(int, difference.split("/"))) / case.background.eps1.constant).q == 1
    setting = own_setting(case)
    assert setting.tilted == multiple
    assert not stuck(setting)


def test_frozen_pairs_against_trying():
    case = make_case("1", "1", [{"coulomb": ["0", "eps1", "1/3", "1/3 + 2*eps2", "7/2"]}, {"coulomb": ["0"]}])
    tilted = own_setting(case)
    assert not list(frozen_pairs(tilted))
    # The same parameters without a tilt, taken back by hand.
    nodes = tuple(
        type(node)(
            node.name,
            tuple(a.on(tilted.eps1, tilted.eps2) for a in written.coulomb),
            node.antifundamental,
            node.fundamental,
            node.adjoint,
        )
        for node, written in zip(tilted.nodes, case.theory.nodes, strict=True)
    )
    flat = type(tilted)(tilted.eps1, tilted.eps2, nodes, tilted.edges)
    found = list(frozen_pairs(flat))
    assert {(index, alpha, beta) for index, alpha, beta, _ in found} == stuck(flat) == {(0, 0, 1), (0, 2, 3)}
    for index, alpha, beta, (m, n) in found:
        difference = flat.nodes[index].coulomb[alpha] - flat.nodes[index].coulomb[beta]
        assert difference == flat.eps1.scaled(m) + flat.eps2.scaled(n)


CASES = [
    make_case("1", "1", [{"coulomb": ["0"] * rank} for rank in ranks])
    for ranks in [(2,), (3,), (5,), (2, 3), (1, 2), (2, 2)]
]


@pytest.mark.parametrize("case", CASES, ids=lambda c: str(c.theory.ranks))
def test_tilts_are_traceless_deterministic_and_no_mirror_images(case):
    setting = own_setting(case)
    again = own_setting(case_from_mapping(case_to_mapping(case)))
    assert again == setting
    assert {name for name, _ in setting.tilts} == {n.name for n in case.theory.nodes if n.rank > 1}
    for _, tilt in setting.tilts:
        assert sum(tilt, Rational(0)) == 0
        assert all(s.q != 1 for s in tilt)
        # No entry is another one up to sign, so that no exchange of colours and no reflection maps the tilt to itself.
        assert len(tilt) == 2 or len({abs(s) for s in tilt}) == len(tilt)
    for written, node in zip(case.theory.nodes, setting.nodes, strict=True):
        moved = [b - a.on(setting.eps1, setting.eps2) for a, b in zip(written.coulomb, node.coulomb, strict=True)]
        assert all(x.constant == 0 for x in moved)
        assert tuple(x.slope for x in moved) == dict(setting.tilts).get(node.name, (0,) * node.rank)


def reduced(setting):
    """The tilts of every node in units of how fast the path leaves the ratio; the sign of the speed is left open."""
    e1, e2 = setting.eps1, setting.eps2
    speed = e1.constant * e2.slope - e2.constant * e1.slope
    return [tuple(s / speed for s in tilt) for _, tilt in setting.tilts]


@pytest.mark.parametrize("case", CASES, ids=lambda c: str(c.theory.ranks))
def test_no_symmetry_relates_two_paths(case):
    # At equal Coulomb parameters a permutation of the colours and a common sign leave Z alone.
    paths = [own_setting(case)] + [probe_setting(case, number) for number in range(1, 8)]
    for one, other in combinations(paths, 2):
        for mine, theirs in zip(reduced(one), reduced(other), strict=True):
            if len(mine) <= 3:
                for order in permutations(theirs):
                    assert mine != order
                    assert mine != tuple(-s for s in order)
            else:
                assert sorted(abs(s) for s in mine) != sorted(abs(s) for s in theirs)


def test_the_charge_and_the_title_do_not_move_the_path():
    case = load_case("equal-coulomb")
    assert own_setting(case) == own_setting(case.with_charge(9))
    other = make_case("1", "1", [{"coulomb": ["0", "0"], "antifundamental": ["1/2"]}])
    assert own_setting(other).tilts != own_setting(case).tilts


def test_only_the_nodes_that_need_it_are_tilted():
    case = make_case("1", "1", [{"coulomb": ["1/3", "-1/3"]}, {"coulomb": ["1/5", "1/5"]}, {"coulomb": ["0"]}])
    assert [name for name, _ in own_setting(case).tilts] == ["n2"]


@pytest.mark.parametrize("rank", [2, 3, 8, 12, 64])
def test_tilts_exist_up_to_the_highest_rank(rank):
    # With fewer classes of denominators than colours two colours would always differ by a lattice vector.
    case = make_case("1", "1", [{"coulomb": ["1/3"] * rank}], charge=1)
    for setting in (own_setting(case), probe_setting(case, 1), probe_setting(case, 2)):
        assert len({str(a) for a in setting.nodes[0].coulomb}) == rank
        assert not list(frozen_pairs(setting))


@pytest.mark.parametrize("denominator", [13, 17, 13 * 17 * 19, 10**6])
@pytest.mark.parametrize("place", ["eps1", "eps2"])
def test_a_background_whose_numbers_swallow_the_denominator_of_a_tilt(denominator, place):
    # At the slope 1/13 every tilt by k/13 is an integer combination of eps1 and eps2 on the path.
    slow = f"1 + t/{denominator}"
    case = make_case(*(("1", slow) if place == "eps2" else (slow, "1")), [{"coulomb": ["0", "0"]}])
    for setting in (own_setting(case), probe_setting(case, 1)):
        assert not stuck(setting)
        assert not list(frozen_pairs(setting))


def test_a_path_that_stays_on_the_ratio_is_tilted_as_well():
    case = make_case("1 + t", "2 + 2*t", [{"coulomb": ["0", "3 + 3*t"]}])
    setting = own_setting(case)
    assert not leaves_the_ratio(setting.eps1, setting.eps2)
    assert setting.tilted
    assert not stuck(setting)
    fine = own_setting(make_case("1 + t", "2 + 2*t", [{"coulomb": ["0", "3"]}]))
    assert not fine.tilted
    assert not stuck(fine)


@pytest.mark.parametrize(
    ("eps", "coulomb", "pair"),
    [
        (("1", "1"), ["0", "0"], (0, 0)),
        (("1", "2"), ["1", "-1"], (2, 0)),
        (("4", "-3"), ["(eps1 + eps2)/2", "-(eps1 + eps2)/2"], (1, 1)),
        (("1", "1"), ["1/5", "2*eps1 - 3*eps2 + 1/5"], (-2, 3)),
    ],
)
def test_a_forbidden_tilt_names_the_factor_and_a_cure(eps, coulomb, pair):
    case = make_case(*eps, [{"coulomb": coulomb}])
    with pytest.raises(PathError) as caught:
        own_setting(case, allow_tilt=False)
    (problem,) = caught.value.problems
    m, n = pair
    said = re.search(r"a1 - a2 is (.*) all along the path", problem.message)[1]
    assert parse_affine(said) == parse_affine(f"{m}*eps1 + {n}*eps2")
    assert "colours 1, 2" in problem.message
    assert problem.where == "node n1"
    # The cure is one: written into the case it needs no tilt, and gives the path that the engine would take.
    cure = re.findall(r'"([^"]*)"', re.search(r"coulomb = \[(.*)\]", problem.message)[1])
    cured = own_setting(make_case(*eps, [{"coulomb": cure}]), allow_tilt=False)
    assert not cured.tilted
    assert cured.nodes == own_setting(case).nodes


def test_a_case_without_need_is_not_refused():
    case = load_case("b1-four-flavours")
    assert own_setting(case, allow_tilt=False) == own_setting(case)


NAMES = ["b1-four-flavours", "ising-identity", "equal-coulomb", "three-nodes", "unrefined-vacuum"]


@pytest.mark.parametrize("name", NAMES)
def test_further_paths(name):
    case = load_case(name)
    own = own_setting(case)
    seen = [own]
    for number in range(1, 7):
        path = probe_setting(case, number)
        assert probe_setting(case, number) == path
        # The same limit point, left in another direction, with masses that keep their expressions.
        assert (path.eps1.constant, path.eps2.constant) == (own.eps1.constant, own.eps2.constant)
        assert path.eps1.constant * path.eps2.slope != path.eps2.constant * path.eps1.slope
        assert not stuck(path)
        for written, node, before in zip(case.theory.nodes, path.nodes, own.nodes, strict=True):
            assert [a.constant for a in node.coulomb] == [a.constant for a in before.coulomb]
            assert [m.on(path.eps1, path.eps2) for m in written.antifundamental] == list(node.antifundamental)
            assert [m.on(path.eps1, path.eps2) for m in written.fundamental] == list(node.fundamental)
            assert [m.on(path.eps1, path.eps2) for m in written.adjoint] == list(node.adjoint)
            total = sum((a.on(path.eps1, path.eps2).slope for a in written.coulomb), Rational(0))
            assert sum((a.slope for a in node.coulomb), Rational(0)) == total
        assert all(path != other for other in seen)
        seen.append(path)


@pytest.mark.parametrize("number", [0, -1, MOST_PROBES + 1, 1000])
def test_there_are_only_so_many_further_paths(number):
    with pytest.raises(ValueError, match=f"between 1 and {MOST_PROBES}"):
        probe_setting(load_case("u2-pure"), number)


def test_the_path_in_one_line():
    setting = own_setting(make_case("1", "2/3", [{"coulomb": ["eps2", "-1/3 - t"]}]))
    assert setting.text() == "eps1 = 1; eps2 = 2/3 + t; n1: a = (2/3 + t, -1/3 - t)"


@pytest.mark.parametrize(
    ("eps1", "eps2"), [("1", "1"), ("2", "1"), ("1", "2"), ("1", "-1"), ("3", "-2"), ("-1", "-2"), ("1/2", "3/4")]
)
@pytest.mark.parametrize(
    "coulomb",
    [
        ["0", "2"],
        ["3/2", "-3/2"],
        ["0", "0"],
        ["1/3", "4/3", "10/3"],
        ["5/4", "0"],
        ["1/3", "1/5"],
        ["eps1 + 2*eps2", "0"],
    ],
)
def test_resonances_against_trying(eps1, eps2, coulomb):
    case = make_case(eps1, eps2, [{"coulomb": coulomb}, {"coulomb": ["0", "3"]}])
    setting = own_setting(case)
    charge = (6, 3)
    expected = set()
    for index, node in enumerate(setting.nodes):
        for alpha, beta in permutations(range(node.rank), 2):
            for m in range(1, 8):
                for n in range(1, 8):
                    value = m * setting.eps1.constant + n * setting.eps2.constant
                    difference = node.coulomb[alpha].constant - node.coulomb[beta].constant
                    if difference == value and m * n <= charge[index]:
                        expected.add((index, alpha, beta, m, n))
    found = list(resonances(setting, charge))
    assert set(found) == expected
    assert len(found) == len(expected)


def test_the_stream_of_choices_differs_between_cases():
    # Two cases with the same shape and other masses get other tilts: the choice is seeded by the hash.
    masses = islice((f"1/{n}" for n in range(2, 50)), 6)
    tilts = {own_setting(make_case("1", "1", [{"coulomb": ["0", "0"], "adjoint": [m]}])).tilts for m in masses}
    assert len(tilts) == 6
