"""The commands as a person types them: output, exit statuses, errors, interruption."""

from __future__ import annotations

import contextlib
import io
import json
import os
import signal
import subprocess
import sys
from dataclasses import dataclass

import pytest

import ratomega
from ratomega.chain import job
from ratomega.cli.main import main

CASE = """
title = "{title}"
charge = {charge}

[background]
eps1 = "{eps1}"
eps2 = "{eps2}"

[[node]]
coulomb = {coulomb}
antifundamental = {antifundamental}
"""


@dataclass(frozen=True)
class Done:
    """What a command left behind."""

    returncode: int
    stdout: str
    stderr: str


def run(*words, cwd=None):
    """The command in this process: what `ratomega` does, without starting Python anew."""
    out, err = io.StringIO(), io.StringIO()
    with (
        contextlib.chdir(cwd or os.getcwd()),
        contextlib.redirect_stdout(out),
        contextlib.redirect_stderr(err),
        pytest.raises(SystemExit) as stopped,
    ):
        main(words)
    return Done(stopped.value.code, out.getvalue(), err.getvalue())


def test_the_command_in_a_process_of_its_own():
    command = [sys.executable, "-m", "ratomega", "limit", "surviving-pole", "--json"]
    done = subprocess.run(command, capture_output=True, text=True, encoding="utf-8", check=False)
    assert Done(done.returncode, done.stdout, done.stderr) == run(*command[3:])


def write_case(folder, name="case.toml", **fields):
    defaults = {
        "title": "a test",
        "charge": "2",
        "eps1": "1",
        "eps2": "1",
        "coulomb": '["1/3", "-1/3"]',
        "antifundamental": "[]",
    }
    path = folder / name
    path.write_text(CASE.format(**defaults | fields), encoding="utf-8")
    return path


@pytest.mark.parametrize("command", ["detect", "limit", "validate"])
@pytest.mark.parametrize("form", ["table", "json"])
def test_every_command_runs_on_a_bundled_case(command, form):
    done = run(command, "b1-four-flavours", "--charge", "2", *(["--json"] if form == "json" else []))
    assert (done.returncode, done.stderr) == (0, "")
    if form == "json":
        document = json.loads(done.stdout)
        assert document["case"]["charge"] == 2
        assert {"version", "path", "hash", "warnings"} <= set(document)
    else:
        assert "eps1 = 1; eps2 = 1 + t" in done.stdout


def test_cases_lists_every_bundled_case_and_prints_one(tmp_path):
    listed = run("cases").stdout
    names = ratomega.bundled_names()
    assert len(names) >= 12
    assert all(name in listed for name in names)
    assert [row["name"] for row in json.loads(run("cases", "--json").stdout)["cases"]] == list(names)
    (tmp_path / "mine.toml").write_text(run("cases", names[0]).stdout, encoding="utf-8")
    assert ratomega.load_case(tmp_path / "mine.toml") == ratomega.load_case(names[0])


# U(1) without matter is exp(q/(eps1 eps2)) (Nekrasov, Okounkov hep-th/0306238).
def test_negative_rationals_are_option_values(tmp_path):
    path = write_case(tmp_path, coulomb='["0"]', charge="3")
    done = run("limit", str(path), "--eps2", "-3/4", "--eps1", "-1", "--json")
    values = [c["value"] for c in json.loads(done.stdout)["coefficients"]]
    assert values == ["1", "4/3", "8/9", "32/81"]
    done = run("limit", str(path), "--eps1=-1/2", "--charge", "1", "--json")
    assert json.loads(done.stdout)["coefficients"][1]["value"] == "-2"


POLE = {"eps1": "2", "coulomb": '["3/2 + t/7", "-3/2 - t/7"]', "antifundamental": '["7/2", "5/2"]'}


def test_a_surviving_pole_exits_1(tmp_path):
    path = write_case(tmp_path, charge="1", **POLE)
    done = run("limit", str(path), "--json")
    coefficient = json.loads(done.stdout)["coefficients"][1]
    assert done.returncode == 1
    assert (coefficient["status"], coefficient["order"], coefficient["leading"]) == ("pole", 1, "7/15")
    assert coefficient["values"][0]["value"] == "7/15"
    assert len(coefficient["values"]) > 1
    table = run("limit", str(path))
    assert table.returncode == 1
    assert "pole t^-1" in table.stdout
    assert run("validate", str(path)).returncode == 1
    assert run("detect", str(path)).returncode == 0


def test_a_path_dependent_limit_exits_1(tmp_path):
    path = write_case(tmp_path, charge="2", **POLE)
    done = run("limit", str(path), "--json")
    coefficient = json.loads(done.stdout)["coefficients"][2]
    assert done.returncode == 1
    assert coefficient["status"] == "path-dependent"
    assert coefficient["values"][0]["value"] == "-403/1680"
    assert "value" not in coefficient


def test_without_probes_independence_is_undecided_and_exits_3(tmp_path):
    path = write_case(
        tmp_path,
        eps1="4",
        eps2="-3",
        coulomb='["(eps1+eps2)/2", "-(eps1+eps2)/2"]',
        antifundamental='["3*eps1/2 + 5*eps2/2", "(eps1+eps2)/2", "3*eps1/2 + 5*eps2/2", "(eps1+eps2)/2"]',
    )
    assert run("limit", str(path)).returncode == 0
    done = run("limit", str(path), "--probes", "0", "--json")
    assert done.returncode == 3
    assert json.loads(done.stdout)["coefficients"][1]["independence"] == "undecided"
    assert run("validate", str(path), "--probes", "0").returncode == 3


def test_no_tilt_names_a_factor_and_a_cure(tmp_path):
    path = write_case(tmp_path, coulomb='["0", "0"]')
    assert "were tilted" in run("limit", str(path)).stdout
    done = run("limit", str(path), "--no-tilt")
    assert done.returncode == 2
    assert "vanishes identically" in done.stderr
    assert "coulomb = [" in done.stderr


def bad(tmp_path, text):
    path = tmp_path / "bad.toml"
    path.write_text(text, encoding="utf-8")
    return run("limit", str(path), "--json")


GOOD = CASE.format(
    title="x", charge=1, eps1="1", eps2="1", coulomb='["1/3", "-1/3"]', antifundamental="[]"
)


@pytest.mark.parametrize(
    ("old", "new", "said"),
    [
        ('["1/3", "-1/3"]', "[3/2]", "quoted"),
        ('["1/3", "-1/3"]', "[0.5]", "0.5"),
        ('["1/3", "-1/3"]', '["1/0"]', "zero"),
        ('["1/3", "-1/3"]', '["eps1*eps2"]', "number"),
        ('["1/3", "-1/3"]', '["9**9**9"]', "power"),
        ('["1/3", "-1/3"]', '["2eps1"]', "2*eps1"),
        ('["1/3", "-1/3"]', '["epsilon"]', "nearest"),
        ('["1/3", "-1/3"]', '["sin(1)"]', "function"),
        ('["1/3", "-1/3"]', "[]", "Coulomb"),
        ('["1/3", "-1/3"]', '["' + "1+" * 50_000 + '1"]', "characters"),
        ('["1/3", "-1/3"]', '["' + "(" * 500 + "1" + ")" * 500 + '"]', "nest"),
        ('eps1 = "1"', 'eps1 = "0"', "zero"),
        ('eps1 = "1"', 'eps1 = "eps2"', "only numbers and t, u"),
        ("charge = 1", "charge = -1", "zero or more"),
        ("charge = 1", "charge = 400", "configurations"),
        ("charge = 1", "charge = 10000000000", "beyond"),
        ("[[node]]", "[[nodes]]", "node"),
        ("antifundamental", "antifundamentals", "antifundamental"),
        ("[[node]]", '[[edge]]\nfrom = "gauge"\nto = "nowhere"\nmass = "0"\n[[node]]', "nowhere"),
        ('eps2 = "1"', 'eps2 = "1"\neps3 = "1"', "eps3"),
        ("charge = 1", "charge = [1, 2]", "one bound per node"),
        ("title", "title = = ", "TOML"),
    ],
)
def test_bad_input_is_one_clear_sentence(tmp_path, old, new, said):
    assert old in GOOD
    done = bad(tmp_path, GOOD.replace(old, new))
    error = json.loads(done.stdout)["error"]
    assert done.returncode == 2
    assert said in error["message"], error
    assert "bad.toml" in error["where"] or error["where"] in ("charge", "")
    assert error["all"][0] == {"message": error["message"], "where": error["where"]}
    assert len(done.stderr) < 2000
    assert done.stderr.startswith("ratomega: ")


def test_all_mistakes_at_once(tmp_path):
    text = GOOD.replace('eps1 = "1"', 'eps1 = "0"').replace('"1/3", "-1/3"', '"1/0", "x"')
    done = bad(tmp_path, text + "colour = 1\n")
    assert len(json.loads(done.stdout)["error"]["all"]) == 4


def test_files_that_are_none(tmp_path):
    assert "absent.toml" in run("limit", "absent.toml", cwd=tmp_path).stderr
    (tmp_path / "folder.toml").mkdir()
    assert "folder" in run("limit", "folder.toml", cwd=tmp_path).stderr
    (tmp_path / "latin.toml").write_bytes(b'title = "\xe9"\n')
    assert "UTF-8" in run("limit", "latin.toml", cwd=tmp_path).stderr
    done = run("limit", "b1-four-flavour")
    assert done.returncode == 2
    assert "b1-four-flavours" in done.stderr
    assert run("limit", "absent.toml", cwd=tmp_path).returncode == 2


@pytest.mark.parametrize(
    "words",
    [
        ["limit"],
        ["limit", "b1-four-flavours", "--colour"],
        ["limit", "b1-four-flavours", "--charge", "x"],
        ["limit", "b1-four-flavours", "--charge", "1,2"],
        ["limit", "b1-four-flavours", "--charge", "-1"],
        ["limit", "b1-four-flavours", "--eps2", "0"],
        ["limit", "b1-four-flavours", "--terms", "-1"],
        ["limit", "b1-four-flavours", "--probes", "1000"],
        ["limit", "b1-four-flavours", "--most-configurations", "3"],
        ["cases", "nothing"],
        ["nothing"],
    ],
)
def test_wrong_words_exit_2(words):
    done = run(*words)
    assert done.returncode == 2
    assert done.stderr.startswith("ratomega: ")
    assert done.stderr.count("\n") == 1


def test_the_limit_on_configurations_can_be_raised():
    words = ["limit", "b1-four-flavours", "--charge", "3"]
    assert run(*words, "--most-configurations", "17").returncode == 2
    assert run(*words, "--most-configurations", "18").returncode == 0


INTERRUPT = """
import os, signal, sys
from ratomega.chain import job
from ratomega.cli.main import main
plain = job.charge_limit
def stopping(weights, charge, *rest, **options):
    if sum(charge) == 2:
        os.kill(os.getpid(), signal.SIGINT)
    return plain(weights, charge, *rest, **options)
job.charge_limit = stopping
main(["limit", "b1-four-flavours", "--json"])
"""


def test_an_interrupted_run_keeps_what_it_has():
    done = subprocess.run([sys.executable, "-c", INTERRUPT], capture_output=True, text=True, check=False)
    document = json.loads(done.stdout)
    assert done.returncode == 130
    assert document["partial"] is True
    assert [c["charge"] for c in document["coefficients"]] == [[0], [1]]
    assert "interrupted" in done.stderr


@pytest.mark.parametrize(
    ("command", "stopped"),
    [
        (["limit", "u2-pure", "--charge", "14"], "short_cut"),
        (["limit", "u2-pure"], "charge_limit"),
        (["validate", "u2-pure"], "charge_limit"),
        (["detect", "u2-pure"], "charge_report"),
    ],
)
def test_interrupted_before_anything_was_finished(monkeypatch, command, stopped):
    def interrupt(*_, **__):
        raise KeyboardInterrupt

    monkeypatch.setattr(job, stopped, interrupt)
    done = run(*command, "--json")
    document = json.loads(done.stdout)
    assert done.returncode == 130
    assert document["partial"] is True
    # What did not run is not counted as passed.
    assert document.get("coefficients", []) == document.get("checks", []) == document.get("charges", []) == []


def test_a_reader_that_goes_away_is_no_error(tmp_path):
    command = f"{sys.executable} -m ratomega detect b1-four-flavours --charge 4 --json | head -c 10"
    done = subprocess.run(["bash", "-c", command], capture_output=True, text=True, check=False)
    assert "Traceback" not in done.stderr
    assert done.returncode == 0


def test_output_names_no_folder_and_no_host(tmp_path):
    path = write_case(tmp_path)
    text = run("limit", str(path), "--json").stdout
    assert str(tmp_path) not in text
    assert os.uname().nodename not in text or len(os.uname().nodename) < 4
    assert signal.SIGINT.name not in text


@pytest.mark.parametrize("words", [["limit", "u1-pure", "--probes"], ["atlas", "--charge", "1", "--ranks"]])
@pytest.mark.parametrize("typed", ["1\n2", "\x1b[31m", "1" * 5000, "caf\udce9"])
def test_what_was_typed_is_shown_on_one_line_harmless_to_a_terminal(words, typed):
    done = run(*words, typed)
    assert done.returncode == 2
    assert done.stdout == ""
    assert done.stderr.endswith("\n")
    line = done.stderr[:-1]
    assert line.isprintable()
    assert len(line) < 700


def test_names_that_are_no_text(tmp_path):
    """Python reads undecodable bytes of a name as lone surrogates, which cannot be written as UTF-8."""
    words = [b"report", b"u1-pure", b"--charge", b"1", b"-o", b"caf\xe9.html"]
    command = [os.fsencode(sys.executable), b"-m", b"ratomega"]
    environment = {**os.environ, "PYTHONIOENCODING": "utf-8:strict"}
    done = subprocess.run([*command, *words], capture_output=True, cwd=tmp_path, env=environment, check=False)
    assert (done.returncode, done.stdout) == (0, b"wrote caf\\udce9.html\n")
    assert os.listdir(os.fsencode(tmp_path)) == [b"caf\xe9.html"]
    words = [b"approach", b"u1-pure", b"--json", b"--plot", b"caf\xe9.gif"]
    done = subprocess.run([*command, *words], capture_output=True, cwd=tmp_path, env=environment, check=False)
    assert done.returncode == 2
    assert 'not to "caf\udce9.gif"' in json.loads(done.stdout)["error"]["message"]


def test_without_a_command_there_is_help():
    assert run().stdout == run("--help").stdout


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (["limi", "x"], 'ratomega: there is no command "limi"; the nearest known one is "limit"\n'),
        (["xyzzy"], 'ratomega: there is no command "xyzzy"\n'),
        (["--nope"], "ratomega: No such option '--nope'.\n"),
    ],
)
def test_what_is_no_command_is_one_sentence(words, said):
    done = run(*words)
    assert (done.returncode, done.stdout, done.stderr) == (2, "", said)


def test_a_pole_is_shown_with_its_power():
    """U(2) at 2:1 with a1 - a2 = eps1 + eps2: 7/15 is the leading coefficient, not a value."""
    (line,) = [one for one in run("limit", "surviving-pole", "--charge", "1").stdout.splitlines() if "pole t^-1" in one]
    assert line.endswith("~0.466666666667 t^-1  7/15 t^-1")
