"""Documents of results, damaged in any way: a result that is written and read back again, or one sentence."""

from __future__ import annotations

import copy
import json
from functools import cache

import pytest
from fuzzing import outcome, searches
from hypothesis import strategies as st

import ratomega
from ratomega.errors import InputError

pytestmark = pytest.mark.fuzz

QUIVER = {
    "charge": [1, 1],
    "background": {"eps1": 1, "eps2": "1 + t"},
    "node": [{"name": "left", "coulomb": ["0", "0"]}, {"name": "right", "coulomb": ["1/3"]}],
    "edge": [{"from": "left", "to": "right", "mass": "1/5"}],
}

FOUR_FIELDS = [{"weight": "1/5"}, {"weight": "1/7"}, {"weight": "1/3"}, {"weight": "1/11"}]
# A block with a pole: the internal weight is degenerate, and no fusion rule holds.
DEGENERATE = {"conformal": {"c": "1/2", "external": FOUR_FIELDS, "internal": {"kac": [2, 1]}, "order": 2}}


@cache
def documents():
    """A document of every kind, as its text."""
    case = ratomega.load_case("b1-four-flavours").with_charge(2)
    symbolic = ratomega.load_case("free-momentum").with_charge(1)
    results = [
        ratomega.limit(case),
        ratomega.limit(case, terms=1),
        ratomega.limit(symbolic),
        ratomega.limit("surviving-pole"),
        ratomega.limit("path-dependent"),
        ratomega.limit(ratomega.load_case("vacuum-degenerate").with_charge(1)),
        ratomega.limit(ratomega.load_case("imaginary-momenta").with_charge(1)),
        ratomega.detect(QUIVER, exchanges=2),
        ratomega.validate(ratomega.load_case("u1-pure").with_charge(1)),
        ratomega.average(case, of="trace-powers", powers=2),
        ratomega.average(ratomega.load_case("u2-pure").with_charge(1), of="Y(x)"),
        ratomega.average(ratomega.load_case("surviving-pole").with_charge(1), of="size"),
        ratomega.block(DEGENERATE),
        ratomega.grid("free-momentum", {"a": ["1/3", "eps1"]}),
        ratomega.grid("free-momentum", {"a": "0 to 2*i in 2"}, digits=8, q="1/2"),
        ratomega.atlas(ranks=2, charge=2, ratio="1/2"),
        ratomega.block("block-mixed-fields", order=1),
        ratomega.approach(case, offsets=["1e-2"], digits=15),
        ratomega.compare("u2-pure", {1: "-0.5625", 2: "0.123381894", 3: "-0.0150363679"}),
        ratomega.explain(case),
    ]
    return [ratomega.to_json(result) for result in results]


def read_or_refused(text):
    result = outcome(ratomega.load_result, text, at="document")
    if not isinstance(result, InputError):
        assert ratomega.load_result(ratomega.to_json(result)) == result


NUMBERS = ["1/0", "1/3", "-2/4", "1 + 2*sqrt(-1)", "sqrt(4)", "1/2*sqrt(2)", "0.5", "nan", "1" * 5000, "a", "1/(a - a)"]
leaves = (
    st.none()
    | st.booleans()
    | st.integers(-3, 3)
    | st.sampled_from([10**9, -(10**30), 10**400])
    | st.floats()
    | st.sampled_from([*NUMBERS, "", "finite", "pole", "limit", "theorem", "agrees", "\x00", "\ud800", "x" * 300])
    | st.text(max_size=5)
)
anything = st.recursive(
    leaves, lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=3), inner, max_size=3)
)


def places(data, here=()):
    yield here
    inner = data.items() if isinstance(data, dict) else enumerate(data) if isinstance(data, list) else ()
    for step, value in inner:
        yield from places(value, (*here, step))


@cache
def parsed():
    """Every document with its places below the top."""
    return [(document, [place for place in places(document) if place]) for document in map(json.loads, documents())]


@st.composite
def changed(draw):
    """A document with a value replaced by any or by another of its own, or left out."""
    data, where = draw(st.sampled_from(parsed()))
    data = copy.deepcopy(data)
    deepest = draw(st.sampled_from([1, 3, 9, 9]))
    *path, last = draw(st.sampled_from([place for place in where if len(place) <= deepest]))
    inner = data
    for step in path:
        inner = inner[step]
    match draw(st.sampled_from(["any", "other", "out"])):
        case "any":
            inner[last] = draw(anything)
        case "other":
            other = data
            for step in draw(st.sampled_from(where)):
                other = other[step] if isinstance(other, dict) or step < len(other) else other
            inner[last] = copy.deepcopy(other)
        case "out":
            del inner[last]
    return json.dumps(data)


@searches(150)
def test_a_document_with_something_changed(search):
    search(read_or_refused, changed())


@st.composite
def damaged(draw):
    text = draw(st.sampled_from(documents()))
    start, length = draw(st.integers(0, len(text))), draw(st.integers(0, 30))
    pieces = ["", "{", "}", "[", "]", '"', ",", "1" * 5000, "NaN", "-Infinity", "1e999", "\\ud800", "\x00", "[" * 5000]
    return text[:start] + draw(st.sampled_from(pieces)) + text[start + length :]


@searches(50)
def test_a_damaged_text(search):
    texts = damaged() | st.text(max_size=20).map("{{{}".format) | st.just("{" * 100_000)

    def work(text):
        if text.lstrip()[:1] == "{":
            read_or_refused(text)

    search(work, texts)


@searches(50)
def test_any_file(search, tmp_path):
    path = tmp_path / "result.json"

    def work(data):
        path.write_bytes(data)
        read = outcome(ratomega.load_result, path, at=str(path))
        assert isinstance(read, InputError)

    search(work, st.binary(max_size=40) | anything.map(lambda value: json.dumps(value).encode()))
