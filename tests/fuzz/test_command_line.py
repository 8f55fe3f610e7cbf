"""Whole command lines: each ends with a result or with one sentence a mistake, and the exit status that says so.

The cases are small, and what would start other processes or ask the network is left out.
"""

from __future__ import annotations

import contextlib
import io
import json

import click
import pytest
from fuzzing import clear, patience, searches
from hypothesis import strategies as st

from ratomega.cli.main import COMMANDS, cli, main

pytestmark = pytest.mark.fuzz

GOOD = """
charge = 1
symbols = ["a"]
[background]
eps1 = "1"
eps2 = "1"
[[node]]
coulomb = ["a", "-a"]
"""
QUIVER = """
charge = [1, 0]
background = { eps1 = "1", eps2 = "-3/4" }
node = [{ name = "x", coulomb = ["1/3"] }, { name = "y", coulomb = ["1/5"] }]
edge = [{ from = "x", to = "y", mass = "1/7" }]
"""
FILES = {
    "good.toml": GOOD,
    "quiver.toml": QUIVER,
    # A name that is no UTF-8.
    "caf\udce9.toml": GOOD.replace('"a", "-a"', '"1/3", "-1/3"').replace("symbols", "# symbols"),
    "bad.toml": "charge = = 1\n",
    "table.csv": "charge,value\n1,0.5625\n",
    "bad.csv": "charge,value\nx,y\n",
}
SMALL = ["u1-pure", "u1-adjoint", "u2-unrefined", "good.toml", "quiver.toml", "caf\udce9.toml"]
CASES = [*SMALL, *SMALL, "bad.toml", "table.csv", ".", "nowhere.toml", "no such case", "", "-", "--", "é\udcff", "a\nb"]
HUGE = ["0", "-1", "999999999", "1" * 30, "1" * 5000, "x", "", "1.5", "1e3", "\u0663", "1,1", "1\n"]
EXPRESSIONS = ["1", "-3/4", "t", "1 + t", "u", "0", "1/0", "sqrt(2)", "a", "eps1", "1" * 300, "2*(", "é\udcff", "1\n+t"]
FILE_NAMES = ["out.html", "p.svg", "p.png", "p.gif", ".", "nowhere/x", "", "good.toml", "é\udcff", "a\nb", "x" * 400]
VALUES = {
    "--charge": ["0", "1", "1", "1", "1,1", "500", "501", "-1", "1,1,1", *HUGE],
    "--order": ["0", "1", *HUGE],
    "--most-configurations": ["1", "1000", *HUGE],
    "--probes": ["0", "1", "21", *HUGE],
    "--terms": ["0", "1", *HUGE],
    "--powers": ["1", "2", *HUGE],
    "--exchanges": ["2", *HUGE],
    "--digits": ["15", "30", *HUGE],
    "--rank": ["1", "2", *HUGE],
    "--ranks": ["1", "2,1", "1,1,1,1", *HUGE],
    "--flavours": ["0", "4", *HUGE],
    "--offsets": ["1e-2", "1e-2,1e-3", "1e-400", "1e999999999", "1,", "0", *HUGE],
    "--ratio": ["1", "-3/4", "1/0", "1e999999999", *HUGE],
    "--at": ["a = 0 to 1 in 3", "a = 1/3, i/2", "a = 0 to 1 by 1e-9", "a = 0 to 1 in 1000000000", "b = 1", "a", *HUGE],
    "--q": ["1/2", "0.5 +/- 1e-3", "1/0", "1e999999999", *HUGE],
    "--minimal": ["3,4", "4,3", "2,5", "6,4", "0,0", *HUGE],
    "--external": ["1,1", "1,2", "9,9", *HUGE],
    "--internal": ["1,1", "1,3", "9,9", *HUGE],
    "--node": ["x", "y", "gauge", "", "é\udcff"],
    "--eps1": EXPRESSIONS,
    "--eps2": EXPRESSIONS,
    "--output": FILE_NAMES,
    "-o": FILE_NAMES,
    "--plot": FILE_NAMES,
    "--keep": FILE_NAMES,
    # A good number would start processes.
    "--workers": ["0", "-1", "x", "99999"],
}
NUMBERS = ["table.csv", "bad.csv", '{"1": "0.5625"}', '[[1, "x"]]', "{", "nowhere.csv", ".", "", "é\udcff"]
# An address would be asked, for as long as that takes.
NETWORK = {"--cluster"}


def parameters():
    context = click.Context(cli)
    return {name: cli.get_command(context, name).params for name in COMMANDS}


PARAMETERS = parameters()
OPTIONS = sorted({o for params in PARAMETERS.values() for p in params for o in p.opts if o.startswith("-")} - NETWORK)


def test_every_option_with_a_value_has_some_to_try():
    for params in PARAMETERS.values():
        for p in params:
            if isinstance(p, click.Option) and not p.is_flag and not isinstance(p.type, click.Choice):
                assert set(p.opts) & (set(VALUES) | NETWORK), p.opts


def values_of(option):
    """Values for an option, by its name and type; none where it takes none."""
    for params in PARAMETERS.values():
        for p in params:
            if option in p.opts:
                if p.is_flag:
                    return None
                if isinstance(p.type, click.Choice):
                    return [*p.type.choices, "other", ""]
                return next(VALUES[o] for o in (option, *p.opts) if o in VALUES)
    raise KeyError(option)


# Lines that work, to which something is done.
STARTS = {
    "atlas": ["--ranks", "2", "--charge", "3"],
    "block": ["block-mixed-fields", "--order", "1"],
    "cases": ["u1-pure"],
    "compare": ["u2-pure", "table.csv"],
    "grid": ["good.toml", "--at", "a = 0 to 1 in 3"],
    "new": ["--rank", "2"],
    "report": ["u1-pure", "--charge", "1", "-o", "out.html"],
}


@st.composite
def command_lines(draw):
    name = draw(st.sampled_from(COMMANDS))
    own = [o for p in PARAMETERS[name] for o in p.opts if o.startswith("-") and o not in NETWORK]
    if draw(st.booleans()):
        words = [STARTS.get(name, [draw(st.sampled_from(SMALL)), "--charge", "1"])]
    else:
        arguments = [p for p in PARAMETERS[name] if isinstance(p, click.Argument)]
        words = [[draw(st.sampled_from(NUMBERS if p.name == "numbers" else CASES))] for p in arguments]
    for _ in range(draw(st.integers(0, 3))):
        # Mostly options of the command itself; else those of any, or what is none.
        others = [*OPTIONS, "--help", "--nonsense", "-3/4", "--", "u1-pure"]
        option = draw(st.sampled_from(own if draw(st.integers(0, 9)) else others))
        values = values_of(option) if option in OPTIONS else None
        words.append([option] if values is None else [option, draw(st.sampled_from(values))])
    return [name, *(word for group in draw(st.permutations(words)) for word in group)]


def run(words):
    """The exit status, standard output and standard error, encoded as on a terminal."""
    out, err = (io.TextIOWrapper(io.BytesIO(), "utf-8", errors) for errors in ("strict", "backslashreplace"))
    with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
        try:
            main(words)
        except SystemExit as stopped:
            status = stopped.code
    texts = []
    for stream in (out, err):
        stream.flush()
        texts.append(stream.buffer.getvalue().decode("utf-8"))
    return status, *texts


def ends_well(words):
    """The line ends with a result or with clear sentences, and its status says which."""
    status, out, err = run(words)
    assert status in (0, 1, 2, 3)
    asks_help = "-h" in words or "--help" in words
    if "--json" in words and words[0] != "new" and not (asks_help and status == 0):
        json.loads(out)
    elif status == 2:
        assert out == ""
    elif words[0] != "new":
        assert out
    if status == 2:
        assert err
        for line in err.splitlines():
            assert line.startswith("ratomega: ")
            clear(line.removeprefix("ratomega: "))


def write_files(folder):
    for name, text in FILES.items():
        (folder / name).write_text(text)


@searches(100)
def test_any_command_line(search, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)

    def work(words):
        write_files(tmp_path)
        ends_well(words)

    search(work, command_lines())


@pytest.mark.long
@pytest.mark.parametrize("name", COMMANDS)
def test_every_value_of_every_option(name, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    start = STARTS.get(name, ["u1-pure", "--charge", "1"])
    for option in OPTIONS:
        values = values_of(option) if any(option in p.opts for p in PARAMETERS[name]) else []
        for value in [None] if values is None else values:
            write_files(tmp_path)
            with patience():
                ends_well([name, *start, option, *([] if value is None else [value])])
