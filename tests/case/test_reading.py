"""Tables to a case and back: what is read, every mistake with its place, all mistakes at once."""

from __future__ import annotations

import copy
import json
from fractions import Fraction

import flint
import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st

from ratomega.case.affine import Affine
from ratomega.case.background import Background
from ratomega.case.expression import parse_affine
from ratomega.case.reading import MOST_PROBLEMS, case_from_mapping, case_from_text, case_to_mapping, load_case
from ratomega.case.theory import Edge, Node, Theory
from ratomega.errors import InputError

TEXT = """
title = "two nodes"
charge = [3, 2]

[background]
eps1 = "2"
eps2 = "-3/2 + t/2"

[[node]]
name = "left"
coulomb = ["1/3", "-1/3 + t"]
antifundamental = ["eps1/2 + 0.25", 4]
fundamental = []

[[node]]
name = "right"
coulomb = [0]
adjoint = ["t/5"]

[[edge]]
from = "left"
to = "right"
mass = "1/7"

[[edge]]
from = "right"
to = "right"
mass = "eps2"
"""


def read(text):
    return parse_affine(text)


def test_a_file_with_everything():
    case = case_from_text(TEXT, "demo.toml")
    left = Node("left", (read("1/3"), read("t-1/3")), antifundamental=(read("1/4 + eps1/2"), read("4")))
    right = Node("right", (Affine(),), adjoint=(read("t/5"), read("eps2")))
    assert case.theory == Theory((left, right), (Edge(0, 1, read("1/7")),))
    assert case.background == Background.make(read("2"), read("t/2 - 3/2"))
    assert (case.title, case.charge, case.bounds) == ("two nodes", (3, 2), (3, 2))


def smallest(**changes):
    data = {"charge": 2, "background": {"eps1": "1", "eps2": "1"}, "node": [{"coulomb": ["1/3", "-1/3"]}]}
    return data | changes


def test_what_may_be_left_out():
    case = case_from_mapping(smallest())
    assert (case.title, case.theory.nodes[0].name, case.theory.edges) == ("", "gauge", ())
    assert str(case.background.eps2) == "1 + t"
    assert load_case(case) is case


def test_the_default_name_can_be_named():
    loop = case_from_mapping(smallest(edge=[{"from": "gauge", "to": "gauge", "mass": "1/5"}]))
    assert loop.theory.nodes[0].adjoint == (read("1/5"),)


def test_numbers_of_every_exact_kind():
    numbers = (Fraction(1, 3), flint.fmpq(1, 3), sympy.Rational(1, 3), "1/3", read("1/3"))
    assert len({case_from_mapping(smallest(node=({"coulomb": (x, 2)},))) for x in numbers}) == 1


def problems(data):
    with pytest.raises(InputError) as caught:
        case_from_mapping(data, where="demo.toml")
    found = caught.value.problems
    for problem in found:
        assert problem.message.isprintable()
        assert len(problem.message) < 400
    return [(problem.where, problem.message) for problem in found]


def two_nodes(**changes):
    return smallest(node=[{"name": "left", "coulomb": ["1"]}, {"name": "right", "coulomb": ["2"]}], **changes)


def edge(**changes):
    return two_nodes(edge=[{"from": "left", "to": "right", "mass": "1/7"} | changes])


def good():
    return edge() | {"charge": [1, 2]}


def node(**changes):
    return smallest(node=[{"coulomb": ["1/3"]} | changes])


LONG = "x" * 65
LOOP = {"from": "gauge", "to": "gauge", "mass": 1}


@pytest.mark.parametrize(
    ("data", "where", "said"),
    [
        (smallest(colour=1), "", 'unknown key "colour"; known are title, charge'),
        (smallest(nodes=[]), "", 'unknown key "nodes"; the nearest known one is "node"'),
        (smallest(Title="x"), "", 'the nearest known one is "title"'),
        ({1: 2} | smallest(), "", 'unknown key "an integer"'),
        (smallest(background={"eps1": 1, "eps2": 1, "eps3": 1}), "background", 'unknown key "eps3"'),
        (node(colomb=["1"]), "node[1]", 'unknown key "colomb"; the nearest known one is "coulomb"'),
        (edge(mas="1"), "edge[1]", 'unknown key "mas"; the nearest known one is "mass"'),
        (smallest(title=3), "title", "a title is text, not an integer"),
        (smallest(title="two\nlines"), "title", "one line"),
        (smallest(title="x" * 201), "title", "at most 200"),
        (smallest(charge=-1), "charge", "zero or more, not -1"),
        (smallest(charge=501), "charge", "beyond 500"),
        (smallest(charge="4"), "charge", "not text"),
        (smallest(charge=4.0), "charge", "not a float"),
        (smallest(charge=True), "charge", "not a truth value"),
        (smallest(charge=b"\1"), "charge", "not a list"),
        (smallest(charge=[1, 2]), "charge", "1 expected, 2 given"),
        (smallest(charge=[]), "charge", "1 expected, 0 given"),
        (two_nodes(charge=[1, -2]), "charge[2]", "zero or more, not -2"),
        (two_nodes(charge=[1, "2"]), "charge[2]", "not text"),
        pytest.param(smallest(charge=10**5000), "charge", "beyond 500", id="a huge charge"),
        pytest.param(smallest(charge=-(10**5000)), "charge", "zero or more", id="a huge negative charge"),
        (smallest(background=["1", "1"]), "background", "expected a table with eps1 and eps2, not a list"),
        (smallest(background={"eps1": "0", "eps2": 1}), "background.eps1", "zero at the limit point"),
        (smallest(background={"eps1": 1, "eps2": "t"}), "background.eps2", "zero at the limit point"),
        (smallest(background={"eps1": 1, "eps2": "2*eps1"}), "background.eps2", "only numbers and t, u may occur"),
        (smallest(background={"eps1": 1.5, "eps2": 1}), "background.eps1", '"3/2" or "1.5"'),
        (smallest(background={"eps1": None, "eps2": 1}), "background.eps1", "exact number, not null"),
        (smallest(node=[]), "node", "at least one gauge node"),
        (smallest(node={"coulomb": ["1"]}), "node", "a list of tables, written [[node]] in TOML, not a table"),
        (smallest(node="left"), "node", "not text"),
        (smallest(node=["left"]), "node[1]", "expected a table, not text"),
        (node(coulomb=[]), "node[1].coulomb", "at least one Coulomb parameter"),
        (node(coulomb="1/3"), "node[1].coulomb", "expected a list"),
        (node(coulomb={"a": 1}), "node[1].coulomb", "expected a list"),
        (node(coulomb=["1", "1/0"]), "node[1].coulomb[2]", "divides by zero"),
        (node(coulomb=["1", ["2"]]), "node[1].coulomb[2]", "not list"),
        (node(coulomb=["1"] * 65), "node[1].coulomb", "at most 64 are read, 65 given"),
        (node(adjoint=["1"] * 257), "node[1].adjoint", "at most 256 are read, 257 given"),
        (node(fundamental=[0.1]), "node[1].fundamental[1]", '"1/10" or "0.1"'),
        (node(antifundamental=["9**9**9"]), "node[1].antifundamental[1]", "power"),
        (node(name=""), "node[1].name", "at least one character"),
        (node(name=LONG), "node[1].name", "65 characters"),
        (node(name="a\nb"), "node[1].name", r"a\nb"),
        (node(name=" a"), "node[1].name", "without spaces at its ends"),
        (node(name="a\u202eb"), "node[1].name", "printable"),
        (node(name=7), "node[1].name", "a name is text, not an integer"),
        (smallest(node=[{"name": "g", "coulomb": [0]}] * 2), "node[2].name", 'node[1] is already called "g"'),
        (smallest(node=[{"name": f"n{k}", "coulomb": [0]} for k in range(17)]), "node", "at most 16 are read"),
        (smallest(edge={}), "edge", "written [[edge]]"),
        (smallest(edge=[3]), "edge[1]", "expected a table, not an integer"),
        (edge(to="middle"), "edge[1].to", 'there is no node "middle"; the nodes are "left", "right"'),
        (edge(**{"from": 1}), "edge[1].from", "by text, not an integer"),
        (edge(mass="1/eps1"), "edge[1].mass", "divides by eps1"),
        (two_nodes(edge=edge()["edge"] * 257), "edge", "at most 256 are read, 257 given"),
        # A loop counts as an adjoint.
        (node(adjoint=[1]) | {"edge": [LOOP] * 256}, "node[1].adjoint", "at most 256"),
    ],
)
def test_one_mistake(data, where, said):
    ((found, message),) = problems(data)
    assert found == (f"demo.toml: {where}" if where else "demo.toml")
    assert said in message


@pytest.mark.parametrize(
    ("path", "where"),
    [
        (("charge",), "charge"),
        (("background",), "background"),
        (("background", "eps1"), "background.eps1"),
        (("background", "eps2"), "background.eps2"),
        (("node",), "node"),
        (("node", 0, "coulomb"), "node[1].coulomb"),
        (("node", 1, "name"), "node[2].name"),
        (("edge", 0, "from"), "edge[1].from"),
        (("edge", 0, "to"), "edge[1].to"),
        (("edge", 0, "mass"), "edge[1].mass"),
    ],
)
def test_a_missing_key(path, where):
    data = copy.deepcopy(edge())
    inner = data
    for step in path[:-1]:
        inner = inner[step]
    del inner[path[-1]]
    ((found, message),) = problems(data)
    assert found == f"demo.toml: {where}"
    assert message.startswith("this key is missing: ")


def test_all_mistakes_at_once():
    text = """
    titel = "x"
    charge = [1, -1]
    [background]
    eps1 = 0.5
    eps2 = "t"
    [[node]]
    name = "left"
    coulomb = ["1/3", "1/0", "2eps1"]
    fundamental = [1.5]
    [[node]]
    name = "left"
    coulomb = []
    flavour = 3
    [[edge]]
    from = "left"
    to = "right"
    """
    with pytest.raises(InputError) as caught:
        case_from_text(text, "demo.toml")
    assert [problem.where.removeprefix("demo.toml").removeprefix(": ") for problem in caught.value.problems] == [
        "",
        "charge[2]",
        "background.eps1",
        "background.eps2",
        "node[1].coulomb[2]",
        "node[1].coulomb[3]",
        "node[1].fundamental[1]",
        "node[2]",
        "edge[1].mass",
        "edge[1].to",
        "node[2].name",
        "node[2].coulomb",
    ]
    assert str(caught.value).count("\n") == 11


def test_both_rotations_are_looked_at():
    found = problems(smallest(background={"eps1": "t", "eps2": 0}))
    assert [where for where, _ in found] == ["demo.toml: background.eps1", "demo.toml: background.eps2"]


def test_one_mistake_brings_no_others():
    # What depends on something that could not be read is not judged.
    assert len(problems(smallest(node=3, charge=[1, 2], edge=[{"from": "a", "to": "b", "mass": 1}]))) == 1
    nodes = [{"coulomb": [1]}, {"name": "b", "coulomb": [1]}]
    assert len(problems(smallest(node=nodes, edge=[{"from": "a", "to": "b", "mass": 1}]))) == 1


def test_the_list_of_mistakes_is_bounded():
    found = problems(smallest(**{f"key{k}": k for k in range(5000)}))
    assert len(found) == MOST_PROBLEMS + 1
    assert found[-1] == ("demo.toml", f"{5000 - MOST_PROBLEMS} more mistakes are not listed")


def test_a_huge_key_is_shortened():
    ((_, message),) = problems(smallest(**{"k" * 100_000: 1}))
    assert "..." in message


def test_a_theory_made_by_hand_obeys_the_same_bounds():
    zero = (Affine(),)
    for nodes, edges, said in [
        ([], [], "at least one gauge node"),
        ([Node(f"n{k}", zero) for k in range(17)], [], "at most 16 nodes"),
        ([Node("g", zero * 65)], [], "at most 64"),
        ([Node("g", zero, fundamental=zero * 257)], [], "at most 256 masses"),
        ([Node("g", zero)], [Edge(0, 0, Affine())] * 257, "at most 256 edges"),
        ([Node("g", zero)], [Edge(0, 1, Affine())], "no node number 1"),
        ([Node("g", zero)], [Edge(-1, 0, Affine())], "no node number -1"),
        ([Node("", zero)], [], "at least one character"),
    ]:
        with pytest.raises(InputError, match=said):
            Theory.make(nodes, edges)


# Valid cases of every shape, as tables.
fractions = st.builds(Fraction, st.integers(-30, 30), st.integers(1, 20))
NAMES = ["left", "right", "β", "node 3", "[x]", '"', "€"]
names_of_nodes = st.lists(st.sampled_from(NAMES), min_size=1, max_size=3, unique=True)
nonzero = fractions.filter(bool)


@st.composite
def expressions(draw, symbols=("eps1", "eps2", "t")):
    terms = [str(draw(fractions))]
    for name in symbols:
        if draw(st.booleans()):
            terms.append(f"({draw(fractions)})*{name}")
    return " + ".join(terms)


@st.composite
def cases(draw):
    names = draw(names_of_nodes)
    masses = st.lists(expressions(), max_size=2)
    eps = [f"{draw(nonzero)} + ({draw(fractions)})*t" if draw(st.booleans()) else str(draw(nonzero)) for _ in range(2)]
    kinds = ("antifundamental", "fundamental", "adjoint")
    coulomb = st.lists(expressions(), min_size=1, max_size=3)
    nodes = [{"name": name, "coulomb": draw(coulomb)} | {k: draw(masses) for k in kinds} for name in names]
    ends = st.sampled_from(names)
    edges = draw(st.lists(st.fixed_dictionaries({"from": ends, "to": ends, "mass": expressions()}), max_size=3))
    charge = draw(st.integers(0, 9) | st.lists(st.integers(0, 5), min_size=len(names), max_size=len(names)))
    title = draw(st.sampled_from(["", "two colours", "ε₁ = ε₂", '"quoted"']))
    return {
        "title": title,
        "charge": charge,
        "background": dict(zip(("eps1", "eps2"), eps, strict=True)),
        "node": nodes,
        "edge": edges,
    }


@settings(deadline=None, max_examples=80)
@given(cases())
def test_the_canonical_tables_read_back_to_an_equal_case(data):
    case = case_from_mapping(data)
    tables = json.loads(json.dumps(case_to_mapping(case)))
    again = case_from_mapping(tables)
    assert again == case
    assert hash(again) == hash(case)
    assert again.hash == case.hash
    assert case_to_mapping(again) == tables


@settings(deadline=None, max_examples=40)
@given(cases())
def test_an_expression_keeps_its_value_on_the_path(data):
    # Every number of the case on the path, against sympy's reading of the same text.
    case = case_from_mapping(data)
    t = sympy.Symbol("t")
    eps1, eps2 = (sympy.sympify(data["background"][name], rational=True) for name in ("eps1", "eps2"))
    if not (eps1.has(t) or eps2.has(t)):
        eps2 += t
    texts = [x for node in data["node"] for x in node["coulomb"]]
    read = [x for node in case.theory.nodes for x in node.coulomb]
    for text, value in zip(texts, read, strict=True):
        on_path = value.on(case.background.eps1, case.background.eps2)
        expected = sympy.sympify(text, rational=True, locals={"eps1": eps1, "eps2": eps2})
        assert sympy.sympify(str(on_path), rational=True) - expected.expand() == 0


def test_the_colours_of_all_nodes_are_bounded():
    zero = (Affine(),)
    with pytest.raises(InputError, match="at most 128 Coulomb parameters in all, not 192"):
        Theory.make([Node(name, zero * 64) for name in "abc"])
