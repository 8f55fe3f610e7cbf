"""`ratomega average` and `ratomega.average`: output, documents, exit statuses, bad input, interruption."""

from __future__ import annotations

import contextlib
import io
import json

import pytest
import sympy

import ratomega
from ratomega.chain import averaging
from ratomega.cli.main import main
from ratomega.documents.averages import average_body

KINDS = ["Y(x)", "1/Y(x)", "trace-powers", "size"]


def run(*words):
    out, err = io.StringIO(), io.StringIO()
    with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err), pytest.raises(SystemExit) as stopped:
        main(["average", *words])
    return stopped.value.code, out.getvalue(), err.getvalue()


def small(name):
    case = ratomega.load_case(name)
    return case.with_charge(min(case.charge, 2)) if isinstance(case.charge, int) else case.with_charge(1)


@pytest.mark.parametrize("of", KINDS)
@pytest.mark.parametrize(
    "name", ["u1-two-flavours", "u3-pure", "two-ranks", "imaginary-momenta", "surviving-pole", "path-dependent"]
)
def test_every_result_reads_back_equal(name, of):
    result = ratomega.average(small(name), of=of, powers=2)
    text = ratomega.to_json(result)
    again = ratomega.load_result(text)
    assert again == result
    assert ratomega.to_json(again) == text


@pytest.mark.parametrize("of", KINDS)
def test_the_command_prints_what_python_computes(of):
    status, out, err = run("two-ranks", "--of", of, "--charge", "1,1", "--json")
    assert (status, err) == (0, "")
    document = json.loads(out)
    assert (document["result"], document["of"]) == ("average", of)
    case = ratomega.load_case("two-ranks").with_charge([1, 1])
    assert ratomega.load_result(out) == ratomega.average(case, of=of)
    status, out, err = run("two-ranks", "--of", of, "--charge", "1,1")
    assert (status, err) == (0, "")
    names = [f"<{average.name}>" for average in ratomega.average(case, of=of)]
    assert [line for line in out.splitlines() if line.startswith("<")] == names


def test_values_are_found_by_name_and_charge():
    result = ratomega.average("two-ranks", of="trace-powers", node="right", powers=2)
    assert [average.name for average in result] == ["right: Tr phi^1", "right: Tr phi^2"]
    assert str(result["right: Tr phi^2"][0, 1].value) == "-2752/33957"
    assert [len(list(average)) for average in result] == [12, 12]
    with pytest.raises(KeyError):
        result["Tr phi^1"]
    with pytest.raises(KeyError):
        result["right: Tr phi^1"][9, 9]


def test_the_text_of_poles_and_paths():
    status, out, _ = run("surviving-pole", "--of", "size", "--charge", "1")
    assert status == 1
    assert "1 pole t^-1 paths differ ~0.466666666667 7/15" in " ".join(out.split())
    assert "charge 1, path by path (the case's own path first)" in out
    assert out.count("eps1 = 2") == 5
    status, out, _ = run("surviving-pole", "--of", "size", "--charge", "1", "--probes", "1")
    assert (status, out.count("eps1 = 2")) == (1, 3)


def test_exit_statuses():
    assert ratomega.average("u2-pure").exit_status == 0
    assert ratomega.average("path-dependent").exit_status == 1
    assert run("ising-identity", "--charge", "1", "--probes", "0")[0] == 3
    assert run("ising-identity", "--charge", "1")[0] == 0


@pytest.mark.parametrize(
    ("words", "sentence"),
    [
        (["--of", "Z"], "'Z' is not one of 'Y(x)', '1/Y(x)', 'trace-powers', 'size'"),
        (["--powers", "0"], "powers: the highest power is between 1 and 100, not 0"),
        (["--powers", "101"], "powers: the highest power is between 1 and 100, not 101"),
        (["--node", "left"], 'node: there is no node "left"; the nodes are gauge'),
        (["--probes", "21"], "probes: the number of further paths is between 0 and 20, not 21"),
        (["--charge", "x"], '--charge: "x" is not a charge'),
        (["--most-configurations", "3"], "more than the limit of 3"),
        (["--eps2", "0"], "eps2"),
    ],
)
def test_bad_options_are_one_sentence(words, sentence):
    status, out, err = run("u2-pure", *words)
    assert (status, out) == (2, "")
    assert sentence in err
    assert len(err.splitlines()) == 1


def test_bad_arguments_from_python():
    for options, where in [({"of": "y"}, "of"), ({"powers": True}, "powers"), ({"powers": 2.0}, "powers")]:
        with pytest.raises(ratomega.InputError) as caught:
            ratomega.average("u2-pure", **options)
        assert [problem.where for problem in caught.value.problems] == [where]


def test_symbols_are_refused():
    status, _, err = run("free-momentum")
    assert (status, err) == (2, "ratomega: symbols: averages are taken at numbers; give numbers for a\n")
    assert ratomega.average(ratomega.load_case("free-momentum").at(a="1/3").with_charge(1)).exit_status == 0


def test_no_tilt_is_refused_where_a_tilt_is_needed():
    status, _, err = run("equal-coulomb", "--no-tilt")
    assert status == 2
    assert "vanishes identically" in err
    assert ratomega.average("equal-coulomb").header.warnings


@pytest.mark.parametrize(
    ("change", "what"),
    [
        ({"of": "Z"}, '"of" is'),
        ({"averages": 3}, "expected a list"),
        ({"averages": [{"name": "Y(x)", "coefficients": [{"charge": [0], "status": "finite", "value": "y"}]}]}, ""),
        ({"averages": [{"name": 1, "coefficients": []}]}, "expected a text"),
    ],
)
def test_damaged_documents_are_refused(change, what):
    document = json.loads(ratomega.to_json(ratomega.average(small("u2-pure"))))
    with pytest.raises(ratomega.InputError, match="not a result of ratomega") as caught:
        ratomega.load_result(json.dumps(document | change))
    assert what in str(caught.value)


def test_a_function_beyond_the_rationals_travels_as_text_that_sympy_reads():
    """<Y(x)> at one box by hand, u = x - a: each box multiplies Y by (u - e1)(u - e2)/(u (u - e))."""
    result = ratomega.average(small("imaginary-momenta"))
    text = average_body(result)["averages"][0]["coefficients"][1]["value"]
    assert "sqrt(-1)" in text
    x, a = sympy.Symbol("x"), 2 * sympy.I / 5
    masses = [1 + sympy.I / n for n in (3, -3, 4)] + [1 + 3 * sympy.I / 4]
    expected = 0
    for here, there in ((a, -a), (-a, a)):
        weight = sympy.prod(here + m for m in masses) / ((there - here) * (2 - there + here))
        change = (x - here - 1) ** 2 / ((x - here) * (x - here - 2)) - 1
        expected += weight * change * (x - a) * (x + a)
    assert sympy.simplify(sympy.sympify(text) - expected) == 0
    document = json.loads(ratomega.to_json(result))
    document["averages"][0]["coefficients"][1]["value"] = text.replace("sqrt(-1)", "sqrt(4)")
    with pytest.raises(ratomega.InputError, match="not a result of ratomega"):
        ratomega.load_result(json.dumps(document))


def test_an_interrupted_run_prints_what_was_finished(monkeypatch):
    def interrupted(job, wanted, *, probes):
        for n, one in enumerate(averaging.averages_of(job, wanted, probes=probes)):
            if n == 2:
                raise KeyboardInterrupt
            yield one

    monkeypatch.setattr("ratomega.cli.average.averages_of", interrupted)
    status, out, err = run("u2-pure", "--json")
    assert status == 130
    assert "2 of 9 charges were finished" in err
    result = ratomega.load_result(out)
    assert result.partial
    assert [c.charge for c in result["Y(x)"]] == [(0,), (1,)]
    assert "PARTIAL" in run("u2-pure")[1]


def test_finished_charges_are_reported():
    seen = []
    ratomega.average(small("u2-pure"), of="size", watch=seen.append)
    assert seen == [(0,), (1,), (2,)]
