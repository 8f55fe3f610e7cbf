"""Stores of finished chunks, damaged or filled by somebody else: used, or refused and left as they are."""

from __future__ import annotations

import json
import sqlite3
from functools import cache
from pathlib import Path
from tempfile import TemporaryDirectory

import pytest
from fuzzing import clear, outcome, searches
from hypothesis import strategies as st

import ratomega
from ratomega.errors import InputError, WorkerError
from ratomega.workers.store import Store

pytestmark = pytest.mark.fuzz

CASE = ratomega.load_case("b1-four-flavours").with_charge(2)
KEPT = {f"key {n}": f"[{n}]" * 100 for n in range(20)}


@cache
def sound():
    """A store as bytes."""
    with TemporaryDirectory() as folder:
        path = Path(folder) / "kept"
        with Store.open(path, CASE) as store:
            store.put(KEPT.items())
        return path.read_bytes()


@cache
def true_chunks():
    """The keys and texts that a run of the case keeps, and its result."""
    with TemporaryDirectory() as folder:
        path = Path(folder) / "kept"
        result = ratomega.limit(CASE, keep=path, terms=0)
        with Store.open(path, CASE) as store:
            return {key: store.get(key) for key in sorted(store.keys())}, result


def everything(path):
    with Store.open(path, CASE) as store:
        return {key: store.get(key) for key in sorted(store.keys())}


edits = st.lists(
    st.tuples(
        # Half of them in the header and the first page, where a byte means most.
        st.integers(0, 200) | st.integers(0, 200_000),
        st.sampled_from([1, 1, 2, 16, 512, 4096]),
        st.binary(min_size=1, max_size=8) | st.sampled_from(["zero", "cut"]) | st.integers(0, 200_000),
    ),
    min_size=1,
    max_size=3,
)


def edited(changes):
    """A store with pieces overwritten (by bytes, by zeros, or by what stands elsewhere), or cut off."""
    data = bytearray(sound())
    for place, length, new in changes:
        place %= len(data) + 1
        if new == "cut":
            del data[place:]
        elif isinstance(new, int):
            data[place : place + length] = data[new % (len(data) + 1) :][:length]
        else:
            data[place : place + length] = bytes(length) if new == "zero" else new
    return bytes(data)


@searches(100)
def test_a_damaged_store(search, tmp_path):
    path = tmp_path / "kept"

    def work(example):
        data = example if isinstance(example, bytes) else edited(example)
        path.write_bytes(data)
        found = outcome(everything, path, at="kept")
        if isinstance(found, InputError):
            assert path.read_bytes() == data
            assert [one.name for one in tmp_path.iterdir()] == ["kept"]
        else:
            # An empty file is a new store; of a sound one all or, with pages lost, some results are there and right.
            assert found.items() <= KEPT.items()
        for other in tmp_path.iterdir():
            other.unlink()

    search(work, edits | st.binary(max_size=40))


texts = st.sampled_from(["1/2", "1/0", "2/4", "", "x"])
leaves = st.none() | st.booleans() | st.integers(-3, 10**6) | st.floats() | texts
anything = st.recursive(leaves, lambda inner: st.lists(inner, max_size=4), max_leaves=8)


def places(data, here=()):
    yield here
    for step, value in enumerate(data) if isinstance(data, list) else ():
        yield from places(value, (*here, step))


@st.composite
def filled(draw):
    """The chunks of a run, one of which says something else."""
    chunks = dict(true_chunks()[0])
    key = draw(st.sampled_from(sorted(chunks)))
    data = json.loads(chunks[key])
    path = draw(st.sampled_from(list(places(data))))
    if not path:
        return chunks | {key: draw(st.text(alphabet="[]{},12\"/", max_size=8) | anything.map(json.dumps))}
    inner = data
    for step in path[:-1]:
        inner = inner[step]
    inner[path[-1]] = draw(anything)
    return chunks | {key: json.dumps(data)}


@searches(60)
def test_a_store_whose_chunks_say_something_else(search, tmp_path):
    """Checksums are no secret: whoever made the file can have made them too."""
    path = tmp_path / "kept"

    def work(chunks):
        path.unlink(missing_ok=True)
        with Store.open(path, CASE) as store:
            store.put(chunks.items())
        try:
            result = ratomega.limit(CASE, keep=path, terms=0)
        except (InputError, WorkerError) as error:
            clear(str(error))
        else:
            assert len(result.coefficients) == 3

    search(work, filled())


def test_the_chunks_of_a_run_give_its_result(tmp_path):
    chunks, result = true_chunks()
    with Store.open(tmp_path / "kept", CASE) as store:
        store.put(chunks.items())
    assert chunks
    assert ratomega.limit(CASE, keep=tmp_path / "kept", terms=0) == result


cells = st.binary(max_size=8) | st.text(max_size=3)
rows = st.tuples(st.text(max_size=5) | st.sampled_from(sorted(KEPT)), cells, cells)


@searches(40)
def test_rows_of_any_kind(search, tmp_path):
    path = tmp_path / "kept"

    def work(row):
        path.write_bytes(sound())
        with sqlite3.connect(path) as connection:
            connection.execute("INSERT OR REPLACE INTO chunk VALUES (?, ?, ?)", row)
        connection.close()
        assert isinstance(outcome(everything, path, at="kept"), InputError)

    search(work, rows)
