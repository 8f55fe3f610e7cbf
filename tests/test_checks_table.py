"""README's table of checks against what ``validate`` runs: theory by theory, at ratios of both signs."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from building import make_case

import ratomega
from ratomega.validator.finiteness import CANCELLATION, FORESIGHT, ORDERS, PATHS
from ratomega.validator.verdict import Kind, Verdict

README = (Path(__file__).resolve().parent.parent / "README.md").read_text(encoding="utf-8")
COLUMNS = (Kind.INDEPENDENT, Kind.SIBLING, Kind.CONSISTENCY)
EVERYWHERE = {CANCELLATION, PATHS, FORESIGHT, ORDERS, "cells of the components", "second chiral trace"}
PRODUCT = "Poincaré polynomials of all components"
BLOW_UP = "blow-up relations of U(2)"

RATIOS = {"1": ("1", "1"), "2": ("1", "2"), "−1": ("1", "-1"), "−3/2": ("2", "-3")}
ONE, TWO, THREE, FOUR = ["2/7"], ["2/7", "-1/3"], ["2/7", "-1/3", "1/11"], ["2/7", "-1/3", "1/11", "3/5"]
MASSES = ["1/5", "3/11", "5/7", "4/9"]


def flavours(colours, number):
    half = number // 2
    return [{"coulomb": colours, "antifundamental": MASSES[: number - half], "fundamental": MASSES[2 : 2 + half]}]


def chain(*ranks):
    """Nodes of these ranks in a line, without flavours."""
    return [{"coulomb": [f"{n}/13 + {k + 1}/17" for k in range(rank)]} for n, rank in enumerate(ranks)]


HALVES = ["(eps1 + eps2)/2", "eps1 + eps2/2", "eps1/2 + eps2", "eps1 + eps2"]
ELEMENTARY = {"coulomb": ["2/7", "-2/7"], "antifundamental": HALVES}
TRUNCATED = {"coulomb": THREE, "antifundamental": ["-2/7 - eps1", "1/3", "-1/11", "1/2", "2/5"]}
EDGE = [(1, 2, "1/9")]

# The theories of every row: nodes and edges.
THEORIES = {
    "U(1), no matter": [(flavours(ONE, 0), ())],
    "U(1), one flavour": [(flavours(ONE, 1), ())],
    "U(1), two flavours": [(flavours(ONE, 2), ())],
    "U(1), adjoint": [([{"coulomb": ONE, "adjoint": ["1/5"]}], ())],
    "U(1), linear quiver": [([*flavours(ONE, 1), {"coulomb": ["-1/3"]}], EDGE)],
    "U(1), necklace": [([{"coulomb": ONE}, {"coulomb": ["-1/3"]}], [*EDGE, (2, 1, "1/6")])],
    "U(2), no matter": [(flavours(TWO, 0), ())],
    "U(2), one to four flavours": [(flavours(TWO, number), ()) for number in (1, 2, 3, 4)],
    "U(2), four flavours, elementary block": [([ELEMENTARY], ())],
    "U(2), adjoint": [([{"coulomb": TWO, "adjoint": ["1/5"]}], ())],
    "U(N), N ≥ 3, with flavours or without": [(flavours(THREE, 0), ()), (flavours(FOUR, 2), ())],
    "U(N), N ≥ 3, masses −a_1−ε1, −a_2, …, −a_N and more": [([TRUNCATED], ())],
    "U(N), N ≥ 3, adjoint": [([{"coulomb": THREE, "adjoint": ["1/5"]}], ())],
    "linear quivers, equal ranks": [(chain(2, 2), EDGE)],
    "linear quivers, different ranks": [(chain(2, 1), EDGE), (chain(1, 2), EDGE)],
}


def rows():
    lines = re.search(r"<!-- checks -->\n(.*?)\n\n", README, re.DOTALL)[1].splitlines()
    assert lines[0].endswith(f"| routes at {', '.join(RATIOS)} |")
    cells = [[cell.strip() for cell in line.strip("|").split("|")] for line in lines[2:]]
    return {row[0]: row[1:] for row in cells}


TABLE = rows()


def expected(cell, ratio):
    """The names in a cell at a ratio: `name` (only at 1) and `name` (not at 1) are conditions."""
    names = set()
    for name, word, where in re.findall(r"`([^`]+)`(?: \((only|not) at ([^)]+)\))?", cell):
        assert where in {"", *RATIOS}
        if not word or (word == "only") == (ratio == where):
            names.add(name)
    return names


def plain_name(name, nodes):
    """Without the node or edge that it belongs to; U(N) for three colours and more."""
    name = re.sub(r", (node n|edge n).*", "", name)
    rank = len(nodes[0]["coulomb"])
    return name.replace(f"U({rank})", "U(N)") if rank >= 3 else name


def test_the_table_has_exactly_these_theories():
    assert list(TABLE) == list(THEORIES)


@pytest.mark.parametrize("row", THEORIES)
def test_the_table_says_what_validate_runs(row):
    *cells, routes = TABLE[row]
    for (ratio, eps), number in zip(RATIOS.items(), routes.split(", "), strict=True):
        for nodes, edges in THEORIES[row]:
            result = ratomega.validate(make_case(*eps, nodes, charge=2, edges=edges), probes=1)
            found = {kind: set() for kind in Kind}
            for check in result.checks:
                name = plain_name(check.name, nodes)
                if check.verdict is Verdict.UNDECIDED:
                    # The only check that does not exist at a ratio of its theory.
                    assert (name, ratio) == (BLOW_UP, "1")
                    continue
                assert check.verdict in (Verdict.AGREES, Verdict.PROVED)
                found[check.kind].add(name)
            assert found[Kind.THEOREM] | found[Kind.CONSISTENCY] >= EVERYWHERE
            assert found[Kind.GEOMETRY] == {PRODUCT}
            for kind, cell in zip(COLUMNS, cells, strict=True):
                assert found[kind] - EVERYWHERE == expected(cell, ratio), (ratio, kind)
            assert len(result.routes) == int(number), ratio


def test_every_check_of_all_theories_stands_in_the_table_once_a_row():
    for cells in TABLE.values():
        names = re.findall(r"`([^`]+)`", " ".join(cells))
        assert len(set(names)) == len(names)


@pytest.mark.parametrize("name", ["ising-energy", "lee-yang-field"])
def test_minimal_model_values_have_what_the_text_says(name):
    assert f"`{name}`" in README
    result = ratomega.validate(ratomega.load_case(name).with_charge(3), probes=1)
    names = {check.name for check in result.routes}
    assert {"pole recursion in the Coulomb parameter", "Gram matrix of Virasoro descendants"} < names
    assert len(names) == 3
    consistency = {check.name for check in result.checks if check.kind is Kind.CONSISTENCY}
    assert {"Burge pairs", "sum over Burge pairs"} < consistency
    assert PRODUCT not in {check.name for check in result.checks}
