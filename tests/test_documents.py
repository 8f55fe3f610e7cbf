"""Results travel as JSON without loss: a fresh process reads an equal, typed result and writes the same bytes."""

from __future__ import annotations

import json
import subprocess
import sys

import pytest

import ratomega

COMMANDS = {"detect": ratomega.detect, "limit": ratomega.limit, "validate": ratomega.validate}

# A single node, a pole with values, a path-dependent case, several nodes.
READ_BACK = """
import sys, ratomega
text = open(sys.argv[1], encoding="utf-8").read()
result = ratomega.load_result(sys.argv[1])
again = {"DetectResult": ratomega.detect, "LimitResult": ratomega.limit, "ValidateResult": ratomega.validate}
fresh = again[type(result).__name__](result.header.case)
assert fresh == result, "a fresh computation differs"
assert ratomega.load_result(text) == result
sys.stdout.reconfigure(newline="")
sys.stdout.write(ratomega.to_json(result))
"""


def small(name):
    case = ratomega.load_case(name)
    return case.with_charge(min(case.charge, 3)) if isinstance(case.charge, int) else case


@pytest.mark.parametrize("name", [n for n in ratomega.bundled_names() if not ratomega.load_case(n).nested])
@pytest.mark.parametrize("command", COMMANDS)
def test_every_result_reads_back_equal(name, command):
    result = COMMANDS[command](small(name))
    text = ratomega.to_json(result)
    assert ratomega.load_result(text) == result
    assert ratomega.to_json(ratomega.load_result(text)) == text


@pytest.mark.parametrize("command", COMMANDS)
def test_a_fresh_process_writes_the_same_bytes(command, tmp_path):
    case = ratomega.load_case(
        {
            "title": "ηχώ",
            "charge": 2,
            "background": {"eps1": "2", "eps2": "1"},
            "node": [{"coulomb": ["3/2 + t/7", "-3/2 - t/7"], "antifundamental": ["7/2", "5/2"]}],
        }
    )
    text = ratomega.to_json(COMMANDS[command](case))
    file = tmp_path / "result.json"
    file.write_bytes(text.encode("utf-8"))
    done = subprocess.run([sys.executable, "-c", READ_BACK, str(file)], capture_output=True, check=False)
    assert done.returncode == 0, done.stderr.decode()
    assert done.stdout == file.read_bytes()


def test_keys_of_a_limit():
    document = json.loads(ratomega.to_json(ratomega.limit("b1-four-flavours", terms=1)))
    assert {"version", "case", "path", "hash", "warnings", "coefficients", "checks"} <= set(document)
    zero = document["coefficients"][0]
    assert (zero["charge"], zero["status"], zero["value"], zero["independence"]) == ([0], "finite", "1", "theorem")
    assert zero["terms"] == [{"power": 0, "value": "1"}, {"power": 1, "value": "0"}]


@pytest.mark.parametrize(
    ("change", "said"),
    [
        (lambda d: d.pop("hash"), "hash"),
        (lambda d: d.update(hash="0" * 16), "does not belong to the case"),
        (lambda d: d.update(result="other"), "not limit, detect, validate, average, approach, compare, grid, explain"),
        (lambda d: d["coefficients"][1].update(value="1.5"), "not an exact number"),
        (lambda d: d["coefficients"][1].update(value="2/4"), "lowest terms"),
        (lambda d: d["coefficients"][1].update(charge="1"), "expected a list"),
        (lambda d: d["case"].update(charge=-1), "zero or more"),
        (lambda d: d.update(partial=1), "true or false"),
    ],
)
def test_a_damaged_document_is_refused(change, said):
    document = json.loads(ratomega.to_json(ratomega.limit("b1-four-flavours")))
    change(document)
    with pytest.raises(ratomega.InputError, match=said):
        ratomega.load_result(json.dumps(document))


def test_what_is_not_a_document_is_refused(tmp_path):
    with pytest.raises(ratomega.InputError, match="not a JSON document"):
        ratomega.load_result("{ nothing")
    with pytest.raises(ratomega.InputError, match="cannot be read"):
        ratomega.load_result(tmp_path / "absent.json")
    (tmp_path / "bytes.json").write_bytes(b"\xff\xfe{")
    with pytest.raises(ratomega.InputError, match="cannot be read"):
        ratomega.load_result(tmp_path / "bytes.json")
