"""Cases from generated tables, texts and files: read, or refused with the place of every mistake."""

from __future__ import annotations

import copy
import tomllib

import pytest
from fuzzing import outcome, searches
from hypothesis import strategies as st

from ratomega.case.bundled import bundled_names, bundled_text
from ratomega.case.case import Case
from ratomega.case.conformal import ConformalCase
from ratomega.case.reading import case_from_mapping, case_to_mapping, load_case, load_case_as_written
from ratomega.case.tables import toml_tables
from ratomega.errors import InputError

pytestmark = pytest.mark.fuzz

CONFORMAL = """
charge = 2
[conformal]
b_squared = "-3/4"
external = [{ weight = "1/16" }, { momentum = "eps1/4" }, { kac = [1, 2] }, { momentum = "t/3" }]
internal = { weight = "3/7" }
"""
TEXTS = [*map(bundled_text, bundled_names()), CONFORMAL]
GOOD = [tomllib.loads(text) for text in TEXTS]

TOP = ["title", "charge", "symbols", "background", "node", "edge", "conformal", "order"]
KEYS = [*TOP, "eps1", "eps2", "name", "coulomb", "fundamental", "antifundamental", "adjoint", "from", "to", "mass"]
FIELDS = ["c", "b_squared", "external", "internal", "weight", "momentum", "kac"]
keys = st.sampled_from([*KEYS, *FIELDS, "x", "", "a.b", "\x1b[31m"]) | st.text(max_size=3)
WORDS = ["1", "1/3", "t", "u", "eps1", "gauge", "left", "", "1/0", "\x00", "sqrt(5)", "i*eps1", "a", "9" * 300]
leaves = (
    st.none()
    | st.booleans()
    | st.integers(-3, 3)
    | st.sampled_from([10**9, -(10**30), 2**63])
    | st.floats()
    | st.sampled_from(WORDS)
    | st.text(max_size=5)
    | st.dates()
)
anything = st.recursive(
    leaves, lambda inner: st.lists(inner, max_size=3) | st.dictionaries(keys, inner, max_size=4), max_leaves=12
)


def read_or_refused(case):
    """A case that was read has a hash and canonical tables, and those read back to an equal one."""
    if isinstance(case, Case):
        assert case.hash
        assert case_from_mapping(case_to_mapping(case)) == case
    else:
        assert isinstance(case, (ConformalCase, InputError))


@searches(70)
def test_any_tables(search):
    search(lambda data: read_or_refused(outcome(case_from_mapping, data)), st.dictionaries(keys, anything, max_size=6))


def places(data, here=()):
    """Every place in nested tables, as a tuple of keys and indices."""
    yield here
    inner = data.items() if isinstance(data, dict) else enumerate(data) if isinstance(data, list) else ()
    for step, value in inner:
        yield from places(value, (*here, step))


@st.composite
def changed(draw):
    """A good case with up to three things replaced, added or taken out."""
    data = copy.deepcopy(draw(st.sampled_from(GOOD)))
    for _ in range(draw(st.integers(1, 3))):
        *path, last = draw(st.sampled_from([place for place in places(data) if place]))
        inner = data
        for step in path:
            inner = inner[step]
        if draw(st.booleans()):
            inner[last] = draw(anything)
        elif isinstance(inner, list):
            inner.insert(last, draw(anything))
        else:
            inner[draw(keys)] = draw(anything)
            if draw(st.booleans()):
                inner.pop(last)
        if not data:
            break
    return data


@searches(100)
def test_a_good_case_with_something_changed(search):
    def work(data):
        read_or_refused(outcome(case_from_mapping, data))
        read_or_refused(outcome(load_case_as_written, data))

    search(work, changed())


SIGNS = ["\n", "[", "]", "[[node]]\n", "[[edge]]\n", "[conformal]\n", '"', "'''", '"""', "=", "#", ",", "{", "}", "."]
VALUES = ["1e9", "1/2", "eps1", "a.b.c", '"1/3"', "inf", "0x1", "2026-01-01", "\\u0000", "\x00", "\ufeff", "é"]
pieces = st.text(max_size=6) | st.sampled_from([*SIGNS, *VALUES, "charge = 1\n"])


@st.composite
def damaged(draw):
    """The text of a good case with pieces cut out, put in, or doubled."""
    text = draw(st.sampled_from(TEXTS))
    for _ in range(draw(st.integers(1, 4))):
        start, length = draw(st.integers(0, len(text))), draw(st.integers(0, 40))
        piece = text[start : start + length] * 2 if draw(st.booleans()) else draw(pieces)
        text = text[:start] + piece + text[start + length :]
    return text


@searches(100)
def test_damaged_files(search, tmp_path):
    path = tmp_path / "damaged.toml"

    def work(data):
        path.write_bytes(data)
        read_or_refused(outcome(load_case, path, at="damaged.toml"))

    whole = damaged().map(str.encode)
    search(work, st.one_of(whole, whole.flatmap(with_bytes), st.binary(max_size=40)))


def with_bytes(data):
    """The file with a few bytes of any value in it."""
    return st.builds(lambda at, new: data[:at] + new + data[at:], st.integers(0, len(data)), st.binary(max_size=3))


@searches(100)
def test_any_text_is_toml_or_refused(search):
    soup = st.lists(pieces, max_size=12).map("".join)
    texts = st.text(max_size=80) | st.text(alphabet="ab=[]{}.,\"'#\n\\ 1/t", max_size=80) | soup
    search(lambda text: outcome(toml_tables, text, "demo.toml", at="demo.toml"), texts)
