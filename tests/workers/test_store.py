"""The store: what it keeps, and every file that it refuses, which must be left byte by byte as it was."""

from __future__ import annotations

import hashlib
import os
import sqlite3
import threading
import zlib
from dataclasses import replace

import pytest
from building import make_case

import ratomega
from ratomega.errors import InputError
from ratomega.workers import charges, store
from ratomega.workers.store import Store

CASE = ratomega.load_case("b1-four-flavours")


@pytest.fixture
def path(tmp_path):
    """A store with some results in it."""
    path = tmp_path / "kept"
    with Store.open(path, CASE) as opened:
        opened.put([(f"key {n}", f"[{n}]" * 400) for n in range(40)])
    return path


def refused(path, said, case=CASE):
    before = path.read_bytes() if path.is_file() else None
    with pytest.raises(InputError, match=said) as caught:
        Store.open(path, case).close()
    (problem,) = caught.value.problems
    assert problem.where == path.name
    assert "\n" not in problem.message
    assert "Error" not in problem.message
    assert (path.read_bytes() if path.is_file() else None) == before
    assert not path.with_name(path.name + "-journal").exists()


def test_what_was_put_comes_back(path):
    with Store.open(path, CASE) as opened:
        assert len(opened) == 40
        assert opened.keys() == {f"key {n}" for n in range(40)}
        assert opened.get("key 7") == "[7]" * 400
        opened.put([("key 7", "[7]" * 400), ("more", "")])
        assert opened.get("more") == ""
        assert len(opened) == 41
    assert path.stat().st_size < 40 * 1200


def test_title_and_charge_do_not_matter_physics_and_node_names_do(path):
    Store.open(path, replace(CASE, title="another", charge=2)).close()
    refused(path, "another case, of hash", ratomega.load_case("u2-pure"))
    (node,) = CASE.theory.nodes
    renamed = replace(CASE, theory=replace(CASE.theory, nodes=(replace(node, name="other"),)))
    assert renamed.hash == CASE.hash
    refused(path, "nodes have other names", renamed)


def test_another_version_is_refused(path, monkeypatch):
    monkeypatch.setattr(store, "STAMP", "ratomega 0.1.0, scheme 99")
    refused(path, "made by ratomega .*, scheme 1, and this is ratomega 0.1.0, scheme 99")


def test_a_database_of_another_program_is_refused(tmp_path):
    path = tmp_path / "theirs.db"
    with sqlite3.connect(path) as connection:
        connection.execute("CREATE TABLE chunk (key TEXT, result BLOB, checksum BLOB)")
    connection.close()
    refused(path, "another program")
    empty = tmp_path / "marked.db"
    with sqlite3.connect(empty) as connection:
        connection.execute("PRAGMA application_id = 77")
    connection.close()
    refused(empty, "another program")


@pytest.mark.parametrize("data", [b"[background]\n", b"x" * 5000, b"\0" * 4096, b"SQLite format 3\0" + b"\xff" * 4080])
def test_a_file_that_is_no_database_is_refused(tmp_path, data):
    path = tmp_path / "case.toml"
    path.write_bytes(data)
    refused(path, "no store of chunks|damaged")


def test_an_empty_file_is_a_new_store(tmp_path):
    """A run that is killed while it makes its store can leave one."""
    path = tmp_path / "kept"
    path.touch()
    with Store.open(path, CASE) as opened:
        assert len(opened) == 0


def test_files_that_cannot_be_stores(tmp_path):
    (tmp_path / "folder").mkdir()
    refused(tmp_path / "folder", "not a regular file")
    os.mkfifo(tmp_path / "pipe")
    refused(tmp_path / "pipe", "not a regular file")
    refused(tmp_path / "nowhere" / "kept", "no folder")
    with pytest.raises(InputError):
        Store.open("a\0b", CASE)


def test_special_names_of_sqlite_are_names_of_files(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    for name in (":memory:", "file:kept?mode=memory"):
        Store.open(name, CASE).close()
        assert (tmp_path / name).stat().st_size > 0


def change(path, statement, *values):
    with sqlite3.connect(path) as connection:
        connection.execute(statement, values)
    connection.close()


@pytest.mark.parametrize(
    "statement",
    [
        "UPDATE chunk SET result = x'00' WHERE key = 'key 3'",
        "UPDATE chunk SET checksum = x'00' WHERE key = 'key 3'",
        "UPDATE chunk SET key = 'key x' WHERE key = 'key 3'",
        "UPDATE chunk SET result = 'text' WHERE key = 'key 3'",
        "UPDATE chunk SET result = result || x'00' WHERE key = 'key 3'",
        "UPDATE chunk SET result = (SELECT result FROM chunk WHERE key = 'key 4') WHERE key = 'key 3'",
        "DELETE FROM about WHERE name = 'hash'",
        "INSERT INTO about VALUES ('more', 'x')",
        "DROP TABLE chunk",
        "DROP TABLE about",
    ],
)
def test_rows_that_were_changed_are_refused(path, statement):
    change(path, statement)
    refused(path, "damaged")


@pytest.mark.parametrize(
    ("old", "new"), [(b"CREATE TABLE about", b"CREATE TABLE ab\x80ut"), (b"chunkchunk", b"chunk\x80hunk")]
)
def test_a_schema_that_is_no_text_is_refused(path, old, new):
    """SQLite quotes it in its message, which Python then cannot decode."""
    data = path.read_bytes()
    assert old in data
    path.write_bytes(data.replace(old, new))
    refused(path, "damaged")


def test_a_result_that_unpacks_without_end_is_refused(path, monkeypatch):
    monkeypatch.setattr(store, "LARGEST_RESULT", 1000)
    text = "0" * 5000
    checksum = hashlib.sha256(f"key 3\n{text}".encode()).digest()[:16]
    packed = zlib.compress(text.encode())
    change(path, "UPDATE chunk SET result = ?, checksum = ? WHERE key = 'key 3'", packed, checksum)
    refused(path, "damaged")


def test_a_bit_anywhere_is_noticed_or_does_no_harm(path):
    """Every 97th byte flipped in turn: the store is refused and stays as it is, or gives exactly what was put."""
    sound = path.read_bytes()
    refusals = 0
    for place in range(0, len(sound), 97):
        data = bytearray(sound)
        data[place] ^= 0x10
        path.write_bytes(data)
        try:
            with Store.open(path, CASE) as opened:
                for key in opened.keys() & {f"key {n}" for n in range(40)}:
                    assert opened.get(key) == f"[{key[4:]}]" * 400
        except InputError:
            refusals += 1
            assert path.read_bytes() == bytes(data)
    assert refusals > 10


@pytest.mark.parametrize("share", [0.1, 0.5, 0.9])
def test_a_store_cut_short_is_refused(path, share):
    data = path.read_bytes()
    path.write_bytes(data[: int(len(data) * share)])
    refused(path, "damaged|no store")


def test_two_runs_may_share_a_store(path):
    failures = []

    def work(number):
        try:
            with Store.open(path, CASE) as opened:
                for n in range(30):
                    opened.put([(f"shared {n}", "same"), (f"own {number} {n}", "x")])
        except BaseException as error:
            failures.append(error)

    threads = [threading.Thread(target=work, args=(n,)) for n in range(3)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert not failures
    with Store.open(path, CASE) as opened:
        assert len(opened) == 40 + 30 + 90


def test_an_interruption_while_writing_leaves_the_store_sound(path):
    def rows():
        yield "one", "1"
        raise KeyboardInterrupt

    with Store.open(path, CASE) as opened:
        with pytest.raises(KeyboardInterrupt):
            opened.put(rows())
        opened.put([("two", "2")])
        assert {"one", "two"} & opened.keys() == {"two"}


# ---- with sums


def test_kept_sums_are_used_and_a_higher_charge_goes_on(tmp_path, monkeypatch):
    monkeypatch.setattr(charges, "TARGET", 2e-3)
    runs = []
    plain = charges.SumChunk.run
    monkeypatch.setattr(charges.SumChunk, "run", lambda self: runs.append(self.key()) or plain(self))
    low, high = (make_case("1", "1", [{"coulomb": ["1", "-1"], "antifundamental": ["1/2"]}], charge=k) for k in (3, 4))
    results = {k: ratomega.to_json(ratomega.limit(case)) for k, case in ((3, low), (4, high))}
    kept = tmp_path / "kept"
    assert ratomega.to_json(ratomega.limit(low, keep=kept)) == results[3]
    first = len(runs)
    assert first > 3
    assert ratomega.to_json(ratomega.limit(low, keep=kept)) == results[3]
    assert len(runs) == first
    assert ratomega.to_json(ratomega.limit(high, keep=kept)) == results[4]
    assert len(runs) == len(set(runs))
    # Other work on the same case is kept beside it.
    checked = ratomega.to_json(ratomega.validate(low))
    assert ratomega.to_json(ratomega.validate(low, keep=kept)) == checked
    assert ratomega.to_json(ratomega.limit(low, terms=2, keep=kept)) == ratomega.to_json(ratomega.limit(low, terms=2))
    assert ratomega.to_json(ratomega.limit(high, keep=kept)) == results[4]


@pytest.mark.parametrize("workers", [0, -1, 1025, True, 1.5, "2"])
def test_numbers_of_workers_that_make_no_sense(workers):
    with pytest.raises(InputError, match="number of workers is between 1 and 1024"):
        ratomega.limit(CASE, workers=workers)


def test_an_executor_that_is_none():
    with pytest.raises(InputError, match=r"an executor is a concurrent\.futures\.Executor, not int"):
        ratomega.validate(CASE, executor=3)
