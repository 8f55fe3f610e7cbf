"""Closed forms against the plain reference and against published tables, at singular points of either sign.

The plain reference (tests/plain.py) expands every weight on the path and imports nothing from the package; it is given
the path of the setting, number by number. Where the reference keeps no negative power, its t^0 term is the value.
"""

import ast
from functools import cache
from itertools import permutations, product
from pathlib import Path
from random import Random

import pytest
from plain import Line, coefficient, laurent_coefficient

import ratomega.validator.closed_forms as module
from ratomega.case.affine import Affine
from ratomega.case.background import Background
from ratomega.case.case import Case
from ratomega.case.setting import Setting, own_setting, resonances
from ratomega.case.theory import Edge, Node, Theory
from ratomega.exact.rational import ONE, Rational, as_rational
from ratomega.validator.closed_forms import ClosedForm, closed_forms
from ratomega.validator.qseries import binomial

R = Rational
E1, E2, T = Affine(eps1=ONE), Affine(eps2=ONE), Affine(t=ONE)
EPS = E1 + E2
POINTS = [(1, -1), (1, 1), (1, 2), (2, 3), (3, -2)]
QUIVER_POINTS = [(7, 5), (1, 1), (1, 2), (2, -3)]


def affine(x) -> Affine:
    """A number as text, int or fmpq, or an affine expression."""
    return x if isinstance(x, Affine) else Affine(as_rational(x))


def node(coulomb, antifundamental=(), fundamental=(), adjoint=(), name="gauge") -> Node:
    lists = ([affine(x) for x in xs] for xs in (coulomb, antifundamental, fundamental, adjoint))
    return Node(name, *(tuple(xs) for xs in lists))


def case(point, nodes, charge, edges=()) -> Case:
    nodes = [nodes] if isinstance(nodes, Node) else nodes
    named = [Node(f"n{i}", *(getattr(n, k) for k in KINDS)) for i, n in enumerate(nodes)]
    theory = Theory.make(named, [Edge(s, t, affine(m)) for s, t, m in edges])
    return Case.make(theory, Background.make(*(affine(x) for x in point)), charge)


KINDS = ("coulomb", "antifundamental", "fundamental", "adjoint")


def plain_theory(setting: Setting) -> dict:
    def line(x):
        return Line(x.constant, x.slope)

    return {
        "eps1": line(setting.eps1),
        "eps2": line(setting.eps2),
        "nodes": [{kind: [line(x) for x in getattr(n, kind)] for kind in KINDS} for n in setting.nodes],
        "edges": [(s, t, line(m)) for s, t, m in setting.edges],
    }


def forms_of(one: Case) -> tuple[ClosedForm, ...]:
    return closed_forms(one, own_setting(one))


def names_of(one: Case) -> list[str]:
    return [form.name for form in forms_of(one)]


def check(one: Case, *fragments: str) -> None:
    """The forms found carry exactly these names (fragments, in order), and every value is that of the reference."""
    setting = own_setting(one)
    theory = plain_theory(setting)

    @cache
    def reference(charge):
        return laurent_coefficient(theory, charge)

    forms = closed_forms(one, setting)
    assert len(forms) == len(fragments), [form.name for form in forms]
    for form, fragment in zip(forms, fragments, strict=True):
        assert fragment in form.name
        for charge, value in form.values.items():
            assert reference(charge) == ({0: value} if value != 0 else {}), (form.name, charge)


def full(one: Case, fragment: str) -> None:
    """As ``check``, and the only form covers every charge of the case."""
    check(one, fragment)
    assert set(forms_of(one)[0].values) == set(one.charges)


# ---- U(1), one node


@pytest.mark.parametrize("point", POINTS)
def test_u1_without_matter_to_charge_12(point) -> None:
    full(case(point, node(["2/7"]), 12), "U(1) without matter")


@pytest.mark.parametrize("point", POINTS)
@pytest.mark.parametrize(
    ("matter", "name"),
    [
        ({"antifundamental": ["1/5"]}, "one flavour"),
        ({"fundamental": ["1/5"]}, "one flavour"),
        ({"antifundamental": ["1/5", "3/11"]}, "two flavours"),
        ({"antifundamental": ["1/5"], "fundamental": ["3/11"]}, "two flavours"),
        ({"fundamental": [EPS.times(R(1, 3)), E2]}, "two flavours"),
        ({"adjoint": ["1/5"]}, "U(1) with an adjoint"),
        ({"adjoint": [T.times(R(1, 5))]}, "U(1) with an adjoint"),
    ],
)
def test_u1_with_matter(point, matter, name) -> None:
    full(case(point, node(["2/7"], **matter), 8), name)


def test_u1_at_a_point_without_singular_weights() -> None:
    # 7/5: the plain sum itself, no path.
    theory = {"eps1": R(7), "eps2": R(5), "nodes": [{"coulomb": [R(2, 7)], "antifundamental": [R(1, 5), R(3, 11)]}]}
    form = forms_of(case((7, 5), node(["2/7"], ["1/5", "3/11"]), 5))[0]
    assert all(coefficient(theory, charge) == value for charge, value in form.values.items())


def test_u1_adjoint_at_half_the_shift_is_a_table() -> None:
    # eps = 0, m = 2: prod (1 - q^n)^3, Jacobi's 1 - 3q + 5q^3 - 7q^6; Nekrasov, Okounkov hep-th/0306238 with
    # exponent m^2 - 1 = 3.
    form = forms_of(case((1, -1), node(["2/7"], adjoint=[2]), 7))[0]
    assert [form.values[(k,)] for k in range(8)] == [1, -3, 0, 5, 0, 0, -7, 0]


# ---- U(1) quivers


def chain(point, count, ends, flips=(), order=None, charge=4) -> Case:
    """A chain; ``flips`` are the edges written backwards, ``order[i]`` the place of chain node i in the list."""
    order = order or list(range(count))
    a = ["2/7", "-1/3", "3/5", "1/11"][:count]
    nodes = [node([x]) for x in a]
    first, last = ends
    if first:
        nodes[0] = node([a[0]], ["1/5"])
    if last == "fundamental":
        nodes[-1] = node([a[-1]], fundamental=["3/4"])
    if last == "antifundamental":
        nodes[-1] = node([a[-1]], ["3/4"])
    listed = [nodes[order.index(place)] for place in range(count)]
    edges = []
    for i, mass in enumerate(["1/9", "-2/5", "5/8"][: count - 1]):
        edges.append((order[i + 1], order[i], mass) if i in flips else (order[i], order[i + 1], mass))
    return case(point, listed, charge, edges)


ENDS = [(True, "fundamental"), (True, None), (False, "fundamental"), (False, None), (True, "antifundamental")]


@pytest.mark.parametrize("point", QUIVER_POINTS)
@pytest.mark.parametrize("ends", ENDS)
@pytest.mark.parametrize("flips", [(), (0,)])
def test_u1_chain_of_two(point, ends, flips) -> None:
    full(chain(point, 2, ends, flips), "U(1) linear quiver of 2 nodes")


@pytest.mark.parametrize("point", QUIVER_POINTS)
@pytest.mark.parametrize("ends", ENDS[:4])
def test_u1_chain_of_three(point, ends) -> None:
    full(chain(point, 3, ends), "U(1) linear quiver of 3 nodes")


@pytest.mark.parametrize("order", list(permutations(range(3))))
@pytest.mark.parametrize("flips", [(), (0,), (1,), (0, 1)])
def test_u1_chain_of_three_in_any_order_and_orientation(order, flips) -> None:
    full(chain((1, 2), 3, ENDS[0], flips, list(order), charge=3), "U(1) linear quiver of 3 nodes")


def test_u1_chain_of_four() -> None:
    full(chain((1, 1), 4, ENDS[0], (1,), [2, 0, 3, 1], charge=3), "U(1) linear quiver of 4 nodes")
    full(chain((1, 1), 4, ENDS[3], (2,), charge=[1, 2, 0, 1]), "U(1) linear quiver of 4 nodes")


def necklace(point, count, flips=(), charge=4, order=None) -> Case:
    order = order or list(range(count))
    a = ["2/7", "-1/3", "3/5", "1/11"][:count]
    masses = ["1/9", "-2/5", "5/8", "4/3"][:count]
    edges = []
    for i, mass in enumerate(masses):
        ends = order[i], order[(i + 1) % count]
        edges.append((*(reversed(ends) if i in flips else ends), mass))
    return case(point, [node([a[order.index(place)]]) for place in range(count)], charge, edges)


@pytest.mark.parametrize("point", QUIVER_POINTS)
def test_u1_necklaces(point) -> None:
    full(necklace(point, 1), "U(1) with an adjoint")
    full(necklace(point, 2), "U(1) necklace of 2 nodes")
    full(necklace(point, 3), "U(1) necklace of 3 nodes")


def test_u1_necklaces_in_any_orientation() -> None:
    for flips in ((0,), (1,), (0, 1)):
        full(necklace((1, 2), 2, flips), "U(1) necklace of 2 nodes")
    for flips in ((0,), (1,), (2,), (0, 2), (0, 1, 2)):
        full(necklace((1, 1), 3, flips, charge=3), "U(1) necklace of 3 nodes")
    full(necklace((2, -3), 3, (1,), 3, [2, 0, 1]), "U(1) necklace of 3 nodes")
    full(necklace((1, 1), 4, (1, 2), [2, 1, 1, 1], [0, 2, 1, 3]), "U(1) necklace of 4 nodes")


# ---- U(N) at special masses


@pytest.mark.parametrize("point", [(1, 1), (1, 2), (2, 3), (1, -1), (3, -2)])
@pytest.mark.parametrize(
    ("mass", "name"),
    [(0, "0 or eps"), (EPS, "0 or eps"), (T.times(R(1, 5)), "0 or eps"), (E1, "eps1 or eps2"), (E2, "eps1 or eps2")],
)
def test_adjoint_at_special_masses(point, mass, name) -> None:
    check(case(point, node(["1/3", "-2/7"], adjoint=[mass]), 4), f"mass {name}", "U(2) with an adjoint at charge 1")
    full(case(point, node(["1/3", "-2/7", "4/5"], adjoint=[mass]), 3), f"mass {name}")


def test_adjoint_of_mass_zero_is_the_published_table() -> None:
    # Vafa, Witten hep-th/9408074: Euler numbers 1, 2, 5, 10, 20, 36 for U(2), 1, 3, 9, 22 for U(3); here as limits on
    # the path m = t/5.
    mass = [T.times(R(1, 5))]
    two = forms_of(case((1, 1), node(["1/3", "-1/3"], adjoint=mass), 5))[0]
    assert [two.values[(k,)] for k in range(6)] == [1, 2, 5, 10, 20, 36]
    three = forms_of(case((1, 2), node(["1/3", "-1/3", "1/5"], adjoint=mass), 3))[0]
    assert [three.values[(k,)] for k in range(4)] == [1, 3, 9, 22]


def truncating(coulomb, colour, killer, further) -> Node:
    masses = [-affine(a) for a in coulomb]
    masses[colour] = masses[colour] - killer
    return node(coulomb, [*further, *reversed(masses)])


U2 = ["1/3", "-2/7"]
U3 = ["1/3", "-2/7", "4/5"]


@pytest.mark.parametrize("point", [(1, 1), (1, 2), (2, 1), (7, 5), (1, -1), (3, -2)])
@pytest.mark.parametrize("colour", [0, 1])
@pytest.mark.parametrize("killer", [E1, E2])
def test_truncation_of_u2(point, colour, killer) -> None:
    for further in (["1/5", "3/11"], ["1/5"], []):
        one = case(point, truncating(U2, colour, killer, further), 4)
        along = "eps2" if killer == E1 or point[0] == point[1] else "eps1"
        check(one, f"U(2) truncated to a hypergeometric series along {along}", "U(2) at charge 1")
        assert set(forms_of(one)[0].values) == set(one.charges)


@pytest.mark.parametrize("point", [(1, 1), (1, 2), (2, 1), (2, -3)])
@pytest.mark.parametrize(("colour", "killer"), [(0, E1), (2, E2)])
def test_truncation_of_u3(point, colour, killer) -> None:
    full(case(point, truncating(U3, colour, killer, ["1/5", "3/11", "-1/2"]), 4), "U(3) truncated")
    full(case(point, truncating(U3, colour, killer, ["1/5"]), 3), "U(3) truncated")


def test_truncation_with_more_masses_than_a_superconformal_theory_and_with_fundamentals() -> None:
    check(case((1, 2), truncating(U2, 0, E1, ["1/5", "3/11", "2/3"]), 3), "U(2) truncated", "U(2) at charge 1")
    # -a - eps1 written as the fundamental mass eps + a + eps1.
    one = node(U2, ["2/7"], [EPS + E1 + affine("1/3"), "1/2"])
    check(case((1, 1), one, 3), "U(2) truncated", "U(2) at charge 1")
    # One colour: the binomial series once more, by another formula.
    check(case((1, 2), truncating(["1/3"], 0, E2, ["1/5"]), 5), "two flavours", "U(1) truncated")


def test_truncation_written_out() -> None:
    # U(2) at (1, 1), a = (0, 1/2): 2F1(1/3, 1/5; 1 + (0 - 1/2 + 1); q), coefficients from its Pochhammer symbols.
    form = forms_of(case((1, 1), node([0, "1/2"], [-1, "-1/2", "1/3", "1/5"]), 2))[0]
    first = R(1, 3) * R(1, 5) / R(3, 2)
    assert [form.values[(k,)] for k in range(3)] == [1, first, first * R(4, 3) * R(6, 5) / (R(5, 2) * 2)]


def test_truncation_at_coincidences() -> None:
    # Both directions at once: only the empty diagram and one box are left.
    both = node(U2, [-affine("1/3") - E1, -affine("1/3") - E2, "2/7", "1/5"])
    for point in ((1, 2), (3, -2)):
        check(case(point, both, 4), "along eps2", "along eps1", "U(2) at charge 1")
    # Both colours at once: their masses -a - eps1 and -a.
    masses = ["2/7", "-1/3", -affine("1/3") - E1, affine("2/7") - E1]
    check(
        case((1, 2), node(U2, masses), 3),
        "masses -a",
        "along eps2, colour 1",
        "along eps2, colour 2",
        "U(2) at charge 1",
    )
    # Equal Coulomb parameters are one colour for the form; the path is tilted, the masses are not.
    one = case((1, 1), node(["1/3", "1/3"], ["-4/3", "-1/3", "1/5", "1/2"]), 4)
    assert own_setting(one).tilted
    check(one, "U(2) truncated", "U(2) at charge 1")


@pytest.mark.parametrize("point", [(1, 1), (1, 2), (2, -3)])
def test_flavours_that_stop_every_colour(point) -> None:
    check(case(point, node(U2, ["2/7", "-1/3", "1/5", "3/11"]), 3), "masses -a", "U(2) at charge 1")
    full(case(point, node(U3, ["2/7", "-1/3"], [EPS + affine("4/5")], ["1/5"]), 3), "masses -a")
    full(case(point, node(["1/3"], ["-1/3", 2, 3]), 4), "masses -a")


# ---- U(2)


def family(r, s, u, v) -> list[Affine]:
    """Masses with mu = 0, r eps1/2, s eps2/2, u eps1/2 + v eps2/2."""
    half = EPS.times(R(1, 2))
    return [half + E1.times(R(i, 2)) + E2.times(R(j, 2)) for i, j in ((0, 0), (r, 0), (0, s), (u, v))]


@pytest.mark.parametrize("signs", list(product((1, -1), repeat=4)))
@pytest.mark.parametrize("point", [(7, 5), (1, 2), (3, -2)])
def test_four_flavours_with_an_elementary_block(point, signs) -> None:
    one = case(point, node(["1/5", "-1/5"], family(*signs)), 3)
    check(one, "elementary block", "U(2) at charge 1")
    assert set(forms_of(one)[0].values) == set(one.charges)


@pytest.mark.parametrize("second", [-1, 1])
def test_four_flavours_at_c_1_and_c_25(second) -> None:
    # mu = (1/2, 0, 1/2, 0) at eps1 = 1: Al. Zamolodchikov 1986 at eps2 = -1. Coulomb parameters off centre, masses
    # in another order, one of them a fundamental.
    half = EPS.times(R(1, 2)) - affine("1/7")
    raised = half + affine("1/2")
    one = node(["1/3", "-1/21"], [raised, half, half], [EPS - raised])
    full_case = case((1, second), one, 6)
    check(full_case, "elementary block", "U(2) at charge 1")
    assert set(forms_of(full_case)[0].values) == set(full_case.charges)


def test_four_flavours_at_c_1_towards_the_vacuum() -> None:
    # c = 1, weights 1/16, h -> 0: the block 1, 0, 1/128, 1/128, 117/16384, recomputed from Zamolodchikov's formula.
    # Here at h = 1/10^12, times (1-x)^(2 m0 m1/(eps1 eps2)) = (1-x)^(-1/8), m0 = m1 = 1/4 (Alday, Gaiotto, Tachikawa
    # 0906.3219); the difference is of the order of h.
    small = R(1, 10**6)
    one = case((1, -1), node([small, -small], family(1, -1, 1, 1)), 4)
    block = [R(1), R(0), R(1, 128), R(1, 128), R(117, 16384)]
    power = binomial(-ONE, R(-1, 8), 4).coefficients
    form = forms_of(one)[0]
    for k in range(5):
        expected = sum((block[j] * power[k - j] for j in range(k + 1)), R(0))
        assert abs(form.values[(k,)] - expected) < R(1, 10**11)


@pytest.mark.parametrize("point", [(1, 1), (1, 2), (3, -2), (1, -1)])
def test_u2_at_low_charge(point) -> None:
    a, masses = ["5/7", "-1/3"], ["1/5", "3/11", "-1/2", "2/9", "3/13"]
    for count in range(1, 6):
        check(case(point, node(a, masses[:count]), 2), "U(2) at charge 1")
    check(case(point, node(a, masses[:2], masses[2:4]), 1), "U(2) at charge 1")
    check(case(point, node(a, adjoint=["1/5"]), 2), "U(2) with an adjoint at charge 1")
    painleve = ["Painlevé III_3"] if point == (1, -1) else []
    check(case(point, node(a), 2), "U(2) at charge 1", "U(2) without matter at charge 2", *painleve)


def test_u2_with_equal_coulomb_parameters_is_a_table() -> None:
    # Equal Coulomb parameters at (1, 1): 1/2 and 11/108, from the closed formulas of Nekrasov hep-th/0206161 and
    # Flume, Poghossian hep-th/0208176 by hand; the path is tilted, the values are limits.
    one = case((1, 1), node([0, 0]), 2)
    assert own_setting(one).tilted
    check(one, "U(2) at charge 1", "U(2) without matter at charge 2")
    assert [next(iter(form.values.values())) for form in forms_of(one)] == [R(1, 2), R(11, 108)]


# ---- several parts


def test_parts_without_edges_factorise() -> None:
    u1, u2 = node(["2/7"], ["1/5"]), node(["1/3", "-2/7"])
    check(case((1, 1), [u1, u2], 3), "one flavour", "charge 1", "charge 2", "product over the parts")
    product_form = forms_of(case((1, 1), [u1, u2], 3))[-1]
    assert set(product_form.values) == {(1, 1), (2, 1), (1, 2)}
    check(
        case((1, 2), [u1, node(["1/3"]), node(["1/4"], adjoint=["1/6"]), node(["1/2"])], 3, [(0, 3, "1/9")]),
        "linear quiver of 2 nodes",
        "without matter",
        "U(1) with an adjoint",
        "product over the parts",
    )
    # A part without a form leaves the others theirs.
    check(case((1, 2), [node(U3), u1], 2), "one flavour")


# ---- where a form does not apply


@pytest.mark.parametrize("point", POINTS)
def test_a_wrong_mass_is_no_special_mass(point) -> None:
    off = affine("1/7")
    for mass in (affine(0), EPS, E1, E2):
        assert names_of(case(point, node(U3, adjoint=[mass + off]), 2)) == []
    assert names_of(case(point, node(U3, ["-1/3", "2/7", affine("-4/5") + off]), 2)) == []
    for number in range(3):
        masses = [-affine(a) for a in U3]
        masses[0] = masses[0] - E1
        masses[number] = masses[number] + off
        assert names_of(case(point, node(U3, [*masses, "1/5", "3/11", "1/2"]), 2)) == []


@pytest.mark.parametrize("point", [(7, 5), (1, 2), (1, -1), (1, 1)])
@pytest.mark.parametrize("number", range(4))
def test_a_wrong_mass_has_no_elementary_block(point, number) -> None:
    masses = family(1, 1, 1, -1)
    masses[number] = masses[number] + affine("1/7")
    assert names_of(case(point, node(["1/5", "-1/5"], masses), 2)) == ["U(2) at charge 1"]
    # The right masses around the wrong centre.
    assert names_of(case(point, node(["2/5", "-1/5"], family(1, 1, 1, -1)), 2)) == ["U(2) at charge 1"]


def test_a_wrong_number_of_flavours() -> None:
    assert names_of(case((1, 1), node(["1/3"], ["1/5", "3/11", "1/2"]), 3)) == []
    assert names_of(case((1, 1), node(["1/3"], ["1/5"], adjoint=["1/5"]), 3)) == []
    assert names_of(case((1, 1), node(["1/3"], adjoint=["1/5", "1/6"]), 3)) == []
    assert names_of(case((1, 1), node(["1/3", "-1/5"], ["1/5"], adjoint=["1/5"]), 3)) == []
    assert names_of(case((1, 1), node(["1/5", "-1/5"], family(1, 1, 1, 1)[:3]), 3)) == ["U(2) at charge 1"]
    assert names_of(case((1, 1), node(["1/5", "-1/5"], [*family(1, 1, 1, 1), "1/9"]), 3)) == ["U(2) at charge 1"]
    # One multiplet more than the form has.
    assert names_of(case((1, 1), node(U2, ["1/5"], adjoint=[0]), 3)) == []
    assert names_of(case((1, 1), node(["1/5", "-1/5"], family(1, 1, 1, 1), adjoint=["1/9"]), 3)) == []
    more = Node("g", *(getattr(truncating(U2, 0, E1, ["1/5"]), kind) for kind in KINDS[:3]), (affine("1/9"),))
    assert names_of(case((1, 1), more, 3)) == []
    # Masses that must all be there, each as often as its colour.
    assert names_of(case((1, 1), node(["1/3", "1/3", "1/2"], ["-1/3", "-1/2", "1/5"]), 2)) == []


def test_quivers_that_are_no_chain_and_no_necklace() -> None:
    a, b, c = node(["2/7"]), node(["-1/3"]), node(["3/5"])
    flavoured = node(["-1/3"], ["1/5"])
    twice = node(["2/7"], ["1/5"], ["1/6"])
    dressed = node(["-1/3"], adjoint=["1/6"])
    line, circle = [(0, 1, "1/9"), (1, 2, "1/8")], [(0, 1, "1/9"), (1, 2, "1/8"), (2, 0, "1/6")]
    assert names_of(case((1, 1), [a, flavoured, c], 2, line)) == []
    assert names_of(case((1, 1), [twice, b], 2, line[:1])) == []
    assert names_of(case((1, 1), [node(["2/7"], ["-2/7", "1/6"]), b], 2, line[:1])) == []
    assert names_of(case((1, 1), [a, dressed], 2, line[:1])) == []
    assert names_of(case((1, 1), [a, node(["-1/3", "1/2"])], 2, line[:1])) == []
    assert names_of(case((1, 1), [a, flavoured, c], 2, circle)) == []
    assert names_of(case((1, 1), [a, dressed, c], 2, circle)) == []
    assert names_of(case((1, 1), [a, b, c], 2, [*circle, (0, 1, "1/5")])) == []
    assert names_of(case((1, 1), [a, b, c, node(["1/2"])], 2, [*line, (1, 3, "1/5")])) == []
    assert names_of(case((1, 1), [a, b], 2, [line[0]] * 3)) == []


def test_a_resonance_ends_every_form() -> None:
    # 2a = 3 = eps1 + eps2 at (1, 2): no charge is left.
    for matter in ({}, {"adjoint": [0]}, {"antifundamental": family(1, 1, 1, 1)}, {"adjoint": ["1/5"]}):
        assert names_of(case((1, 2), node(["3/2", "-3/2"], **matter), 3)) == []
    # 2a = 4 = 2 eps1 + eps2 at (1, 2), a resonance from charge 2 on.
    one = case((1, 2), node([2, -2], adjoint=[0]), 3)
    assert not list(resonances(own_setting(one), (1,)))
    assert [set(form.values) for form in forms_of(one)] == [{(0,), (1,)}, {(1,)}]
    assert [set(form.values) for form in forms_of(case((1, 2), node([2, -2]), 3))] == [{(1,)}]
    assert names_of(case((1, -1), node([0, 0]), 3)) == []
    # a_b - a_1 = eps1 + 2 eps2: the lower parameter of the series reaches zero at charge 2, the colours in this order.
    one = case((1, 2), truncating(["1/7", "36/7"], 0, E1, ["1/5", "3/11"]), 4)
    assert set(forms_of(one)[0].values) == {(0,), (1,)}
    # Two parts: a resonance in one leaves the other alone.
    one = case((1, 2), [node(["1/5"]), node(["3/2", "-3/2"])], 2)
    assert [set(form.values) for form in forms_of(one)] == [{(0, 0), (1, 0), (2, 0)}]


def test_no_charge_no_form() -> None:
    assert names_of(case((1, 1), node(["1/3"]), 0)) == []
    assert names_of(case((1, 1), [node(["1/3"]), node(["1/4"])], [0, 1])) == ["U(1) without matter"]


@pytest.mark.parametrize("seed", range(12))
def test_no_form_is_wrong_among_crowded_parameters(seed) -> None:
    """Small integers and halves everywhere: resonances, coincident masses, several special masses at once."""
    dice, offered = Random(f"crowded {seed}"), 0
    for _ in range(12):
        point = dice.choice([(1, 1), (1, 2), (2, 1), (1, -1), (2, -1), (3, -2), (2, 3)])
        rank = dice.choice([1, 2, 2, 3])
        coulomb = [R(dice.randrange(-4, 5), 2) for _ in range(rank)]
        count = dice.choice([0, 0, 1, 2, 4]) + rank // 2
        masses = [-dice.choice(coulomb) - dice.choice([0, 0, point[0], point[1]]) for _ in range(count)]
        masses += [R(dice.randrange(-4, 5), 2) for _ in range(dice.randrange(3))]
        adjoint = [dice.choice([0, E1, E2, EPS, 1, T])] if dice.random() < 0.3 else []
        one = case(point, node(coulomb, [] if adjoint else masses, adjoint=adjoint), 3)
        forms = forms_of(one)
        check(one, *(form.name for form in forms))
        offered += len(forms)
    assert offered >= 5


# ---- independence


def test_closed_forms_share_only_numbers_and_the_case() -> None:
    folder = Path(module.__file__).parent
    numbers, case = {"exact.quadratic", "exact.rational"}, {"case.case", "case.setting"}
    conformal = {"conformal.exact_blocks", "conformal.known_blocks", "conformal.minimal"}
    allowed = numbers | case | conformal | {"validator.limit_point", "validator.qseries"}
    identities = [folder / "identities" / name for name in ("finite_poles.py", "painleve.py")]
    allowed |= {f"validator.identities.{file.stem}" for file in identities}
    files = [*folder.glob("closed_forms*.py"), *identities, folder / "qseries.py", folder / "limit_point.py"]
    assert len(files) >= 6
    for file in files:
        for entry in ast.walk(ast.parse(file.read_text())):
            assert not (isinstance(entry, ast.Import) and any(x.name.startswith("ratomega") for x in entry.names))
            if isinstance(entry, ast.ImportFrom) and entry.module.startswith("ratomega"):
                name = entry.module.removeprefix("ratomega.")
                assert name in allowed or name.startswith("validator.closed_forms_"), (file.name, name)
