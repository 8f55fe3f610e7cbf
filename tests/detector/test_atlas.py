"""The atlas against a brute census at every ratio, by the detector and by the plain reference."""

from __future__ import annotations

import json
from math import gcd

import plain
import pytest
import sympy
from building import make_case

import ratomega
from ratomega.case.setting import own_setting
from ratomega.cli.main import cli
from ratomega.detector.coulomb_poles import coulomb_poles
from ratomega.detector.one_colour import one_colour_census
from ratomega.detector.zeros import scan
from ratomega.errors import InputError
from ratomega.exact.rational import Rational, as_rational
from ratomega.weights import Weights

# Generic at every ratio of small integers: no difference is a multiple of 1/30 short of an integer.
COULOMB = ["1/7", "-3/11", "5/13"]


def all_steps(top):
    """Every eps1 : eps2 in lowest terms with |eps1| + |eps2| <= top, of both signs."""
    return [
        (alpha, sign * beta)
        for alpha in range(1, top)
        for beta in range(1, top - alpha + 1)
        for sign in (1, -1)
        if gcd(alpha, beta) == 1
    ]


def brute(nodes, charge, steps, edges=()):
    """(first total charge, worst order, singular configurations), seen configuration by configuration."""
    alpha, beta = steps
    case = make_case(str(alpha), str(beta), nodes, charge=charge, edges=edges)
    weights = Weights(own_setting(case))
    found = [(sum(k), zeros.order) for k in case.charges for zeros in scan(weights, k) if zeros.singular]
    return (min(k for k, _ in found), max(order for _, order in found), len(found)) if found else None


def seen(atlas, steps):
    entries = [entry for entry in atlas.ratios if entry.steps == steps]
    return (entries[0].first_charge, entries[0].worst_order, entries[0].singular) if entries else None


@pytest.mark.parametrize(("rank", "charge"), [(1, 8), (2, 5), (3, 4)])
def test_one_node_at_every_ratio(rank, charge):
    atlas = ratomega.atlas(ranks=rank, charge=charge)
    for steps in all_steps(charge + 2):
        assert seen(atlas, steps) == brute([{"coulomb": COULOMB[:rank]}], charge, steps)


@pytest.mark.parametrize("charge", [4, [3, 2], [0, 4]])
def test_two_nodes_with_matter_at_every_ratio(charge):
    """Matter with generic masses changes nothing; a bound on the total and bounds node by node."""
    nodes = [
        {"coulomb": COULOMB[:2], "antifundamental": ["1/17"], "adjoint": ["2/19"]},
        {"coulomb": COULOMB[2:], "fundamental": ["3/23"]},
    ]
    edges = [(1, 2, "4/29")]
    atlas = ratomega.atlas(make_case("1", "-1", nodes, charge=charge, edges=edges))
    for steps in all_steps(6):
        assert seen(atlas, steps) == brute(nodes, charge, steps, edges)


def test_by_charge_against_the_plain_reference():
    """One colour to six boxes and two to four: singular weights and largest order at every charge, from the factors."""
    for rank, top in ((1, 6), (2, 4)):
        atlas = ratomega.atlas(ranks=rank, charge=top)
        for alpha, beta in all_steps(top + 2):
            coulomb = [plain.fmpq(p, q) for p, q in ((1, 7), (-3, 11))[:rank]]
            theory = {"eps1": plain.fmpq(alpha), "eps2": plain.fmpq(beta), "nodes": [{"coulomb": coulomb}]}
            rows = []
            for k in range(top + 1):
                orders = [
                    sum(1 for factor, _ in plain.factors(theory, c) if factor == 0)
                    for c in plain.configurations([rank], (k,))
                ]
                if any(orders):
                    rows.append((k, max(orders), sum(1 for order in orders if order)))
            entries = [entry for entry in atlas.ratios if entry.steps == (alpha, beta)]
            assert (list(entries[0].by_charge) if entries else []) == rows


@pytest.mark.parametrize(("ranks", "charge"), [(1, 14), (2, 12), ([2, 3], 9)])
def test_first_charge_and_worst_order_by_theory(ranks, charge):
    """Singular from charge alpha + beta on, worst order floor(k / (alpha + beta)): the components of Hilbert schemes of
    points have dimension at most that (degree in q of the product formula of Buryak and Feigin 1206.5640)."""
    atlas = ratomega.atlas(ranks=ranks, charge=charge)
    expected = [(a, b) for a, b in all_steps(charge) if b > 0]
    assert sorted(entry.steps for entry in atlas.ratios) == sorted(expected)
    for entry in atlas.ratios:
        alpha, beta = entry.steps
        assert entry.first_charge == alpha + beta
        assert entry.by_charge[0][0] == alpha + beta
        assert [row[1] for row in entry.by_charge] == [k // (alpha + beta) for k in range(alpha + beta, charge + 1)]
        assert sum(row[2] for row in entry.by_charge) == entry.singular <= atlas.configurations
        assert atlas[entry.ratio] == entry


def test_regular_diagrams_of_one_colour_at_equal_rotations():
    """At 1:1 a diagram is regular exactly when no arm and leg differ by one. By hand to six boxes: with two boxes none,
    with three (2,1), with six (3,2,1): the triangles and nothing else."""
    singular = one_colour_census(6)[1, 1].singular
    assert [n - bad for n, bad in zip([1, 1, 2, 3, 5, 7, 11], singular, strict=True)] == [1, 1, 0, 1, 0, 0, 1]


# ---- the poles in the Coulomb parameter


@pytest.mark.parametrize("steps", [(1, 1), (2, 1), (1, 2), (2, 3), (1, -1), (2, -1), (1, -3), (3, -2)])
def test_poles_of_two_colours_at_charge_two(steps):
    """Pure U(2) (Nekrasov hep-th/0206161; Flume, Poghossian hep-th/0208176), x = a1 - a2 = 2a:
    Z_2 = (2x^2 - 8e^2 - eps1 eps2)/(eps1^2 eps2^2 (x^2 - e^2)(x^2 - (2 eps1 + eps2)^2)(x^2 - (eps1 + 2 eps2)^2))."""
    x, (e1, e2) = sympy.Symbol("x"), steps
    upper = 2 * x**2 - 8 * (e1 + e2) ** 2 - e1 * e2
    lower = (x**2 - (e1 + e2) ** 2) * (x**2 - (2 * e1 + e2) ** 2) * (x**2 - (e1 + 2 * e2) ** 2)
    _, reduced = sympy.fraction(sympy.cancel(upper / lower))
    expected = {int(root): order for root, order in sympy.roots(reduced, x).items()}
    found = {}
    for pole in coulomb_poles(Rational(e1), Rational(e2), 2):
        for place in {int(pole.difference.p), -int(pole.difference.p)}:
            found[place] = pole.multiplicity
    if steps == (3, -2):
        # Two poles meet at x = ±1, a value of the minimal model M(2, 3), and the numerator vanishes there.
        assert (found.pop(1), found.pop(-1), expected.pop(1), expected.pop(-1)) == (2, 2, 1, 1)
    assert found == expected


def test_poles_of_functions_stay_within_the_map():
    """Pure U(2) at 1:1 to charge 4, as a function of a: poles exactly there, of orders at most the multiplicities."""
    case = {"charge": 4, "symbols": ["a"], "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["a", "-a"]}]}
    found = {as_rational(2 * pole.location): pole.order for pole in ratomega.limit(case)[4].value.poles()}
    places = {pole.difference: pole.multiplicity for pole in ratomega.atlas(case).poles.poles}
    assert {abs(x) for x in found} == set(places)
    assert all(order <= places[abs(x)] for x, order in found.items())


def test_the_case_says_which_pole_it_sits_on():
    met = ratomega.atlas(make_case("1", "1/2", [{"coulomb": ["5/2", "0", "1/3"]}], charge=3)).poles.met
    assert met == ("n1: a1 - a2 = ±5/2, from charge 2 on",)
    assert ratomega.atlas(make_case("1", "1/2", [{"coulomb": ["5/2", "0"]}], charge=1)).poles.met == ()
    # The same differences at another ratio, and a difference that moves with the background.
    case = make_case("1", "1/2", [{"coulomb": ["3", "0"]}, {"coulomb": ["eps1 + eps2", "0"]}], charge=2)
    assert ratomega.atlas(case, ratio=1).poles.met == (
        "n1: a1 - a2 = ±3, from charge 2 on",
        "n2: a1 - a2 = ±2, from charge 1 on",
    )
    # u goes to 0 before t does: eps1 + eps2 + 2u/3 ends at the pole eps1 + eps2 = 0, where a symbol would be free.
    assert ratomega.atlas("vacuum-degenerate").poles.met == ("gauge: a1 - a2 = 0, from charge 1 on",)


# ---- documents, command line, mistakes


def test_documents_read_back_equal():
    for atlas in (
        ratomega.atlas(ranks=2, charge=5),
        ratomega.atlas(ranks=[2, 1], charge=[3, 2], ratio="-2/3"),
        ratomega.atlas("path-dependent"),
        ratomega.atlas("free-momentum", charge=2),
    ):
        text = ratomega.to_json(atlas)
        assert ratomega.load_result(text) == atlas
        assert ratomega.to_json(ratomega.load_result(text)) == text
        document = json.loads(text)
        document["ratios"][0]["ratio"] = "7"
        with pytest.raises(InputError, match="does not belong to the steps 1:1"):
            ratomega.load_result(json.dumps(document))


def typed(*words):
    return cli.main(args=["atlas", *words], prog_name="ratomega", standalone_mode=False)


def test_the_command_prints_text_and_json(capsys):
    assert typed("--ranks", "2", "--charge", "5", "--ratio", "-3/4") == 0
    text = capsys.readouterr().out
    assert "      3/2        2:3             5            1                 4\n" in text
    assert "    ±1/4             1             1  (1,1)\n" in text
    assert typed("path-dependent", "--charge", "3", "--json") == 0
    assert ratomega.load_result(capsys.readouterr().out) == ratomega.atlas("path-dependent", charge=3)
    assert typed("--ranks", "2", "--charge", "1") == 0
    assert "no weight is singular at any ratio up to this charge" in capsys.readouterr().out
    assert typed("--ranks", "2", "--charge", "14") == 0
    assert "and 23 more ratios (--json lists all)" in capsys.readouterr().out


@pytest.mark.parametrize(
    ("words", "message"),
    [
        ([], "an atlas takes a case or ranks, one of them"),
        (["u2-pure", "--ranks", "2"], "an atlas takes a case or ranks, one of them"),
        (["--ranks", "2"], "ranks need a charge beside them"),
        (["--ranks", "two", "--charge", "2"], '"two" is not a list of ranks'),
        (["--ranks", "0", "--charge", "2"], "a rank is an integer between 1 and 64, not 0"),
        (["--ranks", "1," * 16 + "1", "--charge", "2"], "ranks are one to 16 integers"),
        (["--ranks", "2", "--charge", "41"], "an atlas reaches to charge 40 a node"),
        (["--ranks", "1,1,1,1,1", "--charge", "40,40,40,40,1"], "an atlas reaches to charge 40 a node and 160 in all"),
        (["--ranks", "2", "--charge", "2,2"], "one bound per node: 1 expected, 2 given"),
        (["--ranks", "2", "--charge", "x"], '"x" is not a charge'),
        (["--ranks", "2", "--charge", "2", "--ratio", "0"], "a ratio eps2/eps1 is not zero"),
        (["--ranks", "2", "--charge", "2", "--ratio", "sqrt(2)"], '"sqrt(2)" is not an exact number'),
    ],
)
def test_mistakes_are_one_sentence(words, message):
    with pytest.raises(InputError) as caught:
        typed(*words)
    assert len(caught.value.problems) == 1
    assert message in str(caught.value)
    assert caught.value.exit_status == 2


@pytest.mark.parametrize("ranks", ["2", 2.0, [True], None, []])
def test_ranks_that_are_none(ranks):
    with pytest.raises(InputError):
        ratomega.atlas(ranks=ranks, charge=2)


def test_no_entry_for_a_ratio_without_singular_weights():
    atlas = ratomega.atlas(ranks=2, charge=4)
    with pytest.raises(KeyError):
        atlas["3/2"]
    with pytest.raises(KeyError):
        atlas[-1]
