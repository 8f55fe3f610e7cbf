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
        (lambda d: d.pop("hash"), 'the key "hash" is missing$'),
        (lambda d: d.update(result=["limit"]), '"result" is a list, not one of limit'),
        (lambda d: d.update(path=[1]), "a value is not of the kind that belongs in its place$"),
        (lambda d: d["path"].update(coulomb=3), "a value is not of the kind that belongs in its place$"),
        (lambda d: d.update(warnings=[None]), "expected a text, not null"),
        (lambda d: d["route"].update(primes=0.5), "expected an integer, not 0.5"),
        (lambda d: d.update(hash="0" * 16), "does not belong to the case"),
        (lambda d: d.update(result="other"), "not one of limit, detect, validate, average, approach, compare,"),
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


FOUR_FIELDS = [{"weight": "1/5"}, {"weight": "1/7"}, {"weight": "1/3"}, {"weight": "1/11"}]
# The internal weight is degenerate, and no fusion rule holds.
DEGENERATE = {"conformal": {"c": "1/2", "external": FOUR_FIELDS, "internal": {"kac": [2, 1]}, "order": 2}}


@pytest.mark.parametrize("order", ["order", "leading"])
@pytest.mark.parametrize("kind", ["limit", "average", "block"])
def test_half_a_pole_is_refused(kind, order):
    case = ratomega.load_case("surviving-pole").with_charge(1)
    match kind:
        case "limit":
            result = ratomega.limit(case)
        case "average":
            result = ratomega.average(case, of="size")
        case "block":
            result = ratomega.block(DEGENERATE)
    document = json.loads(ratomega.to_json(result))
    assert ratomega.load_result(json.dumps(document)) == result
    coefficients = document["averages"][0]["coefficients"] if kind == "average" else document["coefficients"]
    half = next(c for c in coefficients if "leading" in c)
    del half["pole_order" if (kind, order) == ("block", "order") else order]
    with pytest.raises(ratomega.InputError, match='order" and "leading" go together'):
        ratomega.load_result(json.dumps(document))


def test_what_is_not_a_document_is_refused(tmp_path):
    with pytest.raises(ratomega.InputError, match="not a JSON document"):
        ratomega.load_result("{ nothing")
    with pytest.raises(ratomega.InputError, match="cannot be read"):
        ratomega.load_result(tmp_path / "absent.json")
    (tmp_path / "bytes.json").write_bytes(b"\xff\xfe{")
    with pytest.raises(ratomega.InputError, match="not UTF-8"):
        ratomega.load_result(tmp_path / "bytes.json")
    (tmp_path / "list.json").write_text("[1]")
    with pytest.raises(ratomega.InputError, match="a JSON object, not a list"):
        ratomega.load_result(tmp_path / "list.json")
    with pytest.raises(ratomega.InputError, match="an integer has too many digits"):
        ratomega.load_result(f'{{"result": {"1" * 5000}}}')
    with pytest.raises(ratomega.InputError, match="not the name of a file"):
        ratomega.load_result("a\0b")


def test_every_mistake_of_the_case_is_named_with_its_place():
    document = json.loads(ratomega.to_json(ratomega.limit("u1-pure")))
    document["case"] |= {"charge": "x", "node": []}
    with pytest.raises(ratomega.InputError) as caught:
        ratomega.load_result(json.dumps(document))
    assert [problem.where for problem in caught.value.problems] == ["document"] * 2
    assert all("\n" not in problem.message for problem in caught.value.problems)


@pytest.mark.parametrize("value", [float("nan"), float("inf"), 10**400, True, "1"])
def test_a_number_of_an_approach_is_finite(value):
    document = json.loads(ratomega.to_json(ratomega.approach("u1-pure", offsets=["1e-2"], digits=15)))
    document["charges"][0]["points"][0]["lost"] = value
    with pytest.raises(ratomega.InputError, match="not a result of ratomega"):
        ratomega.load_result(json.dumps(document))
