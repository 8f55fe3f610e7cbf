"""The canonical hash covers the physics and nothing else."""

from __future__ import annotations

import json
import os
import subprocess
import sys

import pytest

from ratomega.case.reading import load_case

BASE = {
    "title": "one",
    "charge": 2,
    "background": {"eps1": "1", "eps2": "2/3"},
    "node": [
        {
            "name": "left",
            "coulomb": ["1/3", "-1/5"],
            "antifundamental": ["1/2", "1/7"],
            "fundamental": ["1/4", "eps1"],
            "adjoint": ["2/9", "3/11"],
        },
        {"name": "right", "coulomb": ["2/7"]},
    ],
    "edge": [
        {"from": "left", "to": "right", "mass": "1/13"},
        {"from": "left", "to": "right", "mass": "1/17"},
        {"from": "right", "to": "left", "mass": "1/19"},
    ],
}


def hashed(change=None):
    data = json.loads(json.dumps(BASE))
    if change:
        change(data)
    return load_case(data).hash


def swap(values):
    values[0], values[1] = values[1], values[0]


def put(*path_and_value):
    *path, key, value = path_and_value

    def change(data):
        for step in path:
            data = data[step]
        data[key] = value

    return change


def renamed(data):
    text = json.dumps(data).replace("left", "A").replace("right", "B")
    data.clear()
    data.update(json.loads(text))


def loops(data):
    masses = data["node"][0].pop("adjoint")
    data["edge"] += [{"from": "left", "to": "left", "mass": mass} for mass in masses]


@pytest.mark.parametrize(
    "change",
    [
        put("title", "another"),
        put("charge", 5),
        put("charge", [1, 2]),
        renamed,
        loops,
        lambda d: swap(d["node"][0]["antifundamental"]),
        lambda d: swap(d["node"][0]["fundamental"]),
        lambda d: swap(d["node"][0]["adjoint"]),
        lambda d: swap(d["edge"]),
        lambda d: d["edge"].reverse(),
        # The same numbers written otherwise, and the path that is taken when none is written.
        put("node", 0, "antifundamental", ["0.5", "2/14"]),
        put("background", "eps2", "2/3 + t"),
    ],
)
def test_what_is_not_in_the_hash(change):
    assert hashed(change) == hashed()


CHANGES = [
    lambda d: swap(d["node"][0]["coulomb"]),
    put("node", 0, "coulomb", 0, "1/4"),
    put("node", 0, "coulomb", 0, "1/3 + t"),
    put("node", 0, "coulomb", ["1/3"]),
    put("node", 0, "antifundamental", 0, "1/3"),
    put("node", 0, "antifundamental", 0, "eps1/2"),
    put("node", 0, "antifundamental", ["1/2"]),
    put("node", 0, "antifundamental", ["1/2", "1/7", "1/7"]),
    put("node", 0, "fundamental", 0, "1/3"),
    put("node", 0, "adjoint", 0, "1/3"),
    put("background", "eps1", "2"),
    put("background", "eps2", "2/3 + 2*t"),
    put("background", "eps1", "1 + t"),
    put("edge", 0, "mass", "1/3"),
    lambda d: d["edge"].pop(),
    lambda d: d["edge"][0].update({"from": "right", "to": "left"}),
    lambda d: d["node"][1].update(adjoint=d["node"][0].pop("adjoint")),
    lambda d: d["node"][0].update(
        antifundamental=d["node"][0]["fundamental"], fundamental=d["node"][0]["antifundamental"]
    ),
    # The order of the nodes is part of the case: a charge has one entry per node, in this order.
    lambda d: swap(d["node"]),
]


@pytest.mark.parametrize("change", CHANGES)
def test_what_is_in_the_hash(change):
    assert hashed(change) != hashed()


def test_no_two_of_them_agree():
    assert len({hashed(change) for change in CHANGES} | {hashed()}) == len(CHANGES) + 1


def test_each_end_of_an_edge_counts():
    nodes = [{"name": name, "coulomb": ["1/3"]} for name in "abc"]
    ends = [(x, y) for x in "abc" for y in "abc"]
    cases = [BASE | {"node": nodes, "edge": [{"from": x, "to": y, "mass": "1/7"}]} for x, y in ends]
    assert len({load_case(case).hash for case in cases}) == 9


def test_a_loop_and_an_adjoint_are_one_theory():
    looped = json.loads(json.dumps(BASE))
    loops(looped)
    assert load_case(looped) == load_case(BASE)


def test_the_hash_is_the_same_in_another_process():
    code = f"import json, ratomega; print(ratomega.load_case(json.loads({json.dumps(BASE)!r})).hash)"
    environment = os.environ | {"PYTHONHASHSEED": "7"}
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, env=environment)
    assert done.stdout.strip() == hashed()


def test_the_graph_is_a_multigraph_with_loops():
    graph = load_case(BASE).theory.graph
    assert dict(graph.nodes(data="rank")) == {"left": 2, "right": 1}
    assert sorted(graph.edges(data="mass")) == [
        ("left", "left", "2/9"),
        ("left", "left", "3/11"),
        ("left", "right", "1/13"),
        ("left", "right", "1/17"),
        ("right", "left", "1/19"),
    ]
