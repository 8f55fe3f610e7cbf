"""What the Tab key offers, asked of click's own machinery as each shell asks it."""

from __future__ import annotations

import os
import re
import subprocess
import sys
from pathlib import Path

import pytest
from click.shell_completion import BashComplete, FishComplete, ZshComplete, get_completion_class

from ratomega.case.bundled import bundled_names
from ratomega.cli.main import COMMANDS, cli

VARIABLE = "_RATOMEGA_COMPLETE"
README = Path(__file__).resolve().parent.parent / "README.md"
OTHERS = {"cases", "new"}
ON_A_CASE = [name for name in COMMANDS if name not in OTHERS]


def offered(*words, incomplete="", shell=BashComplete):
    """Pairs (type, value) for what stands in the place of ``incomplete`` behind these words."""
    found = shell(cli, {}, "ratomega", VARIABLE).get_completions(list(words), incomplete)
    return [(item.type, item.value) for item in found]


def plain(*words, incomplete=""):
    found = offered(*words, incomplete=incomplete)
    assert {kind for kind, _ in found} <= {"plain"}
    return [value for _, value in found]


@pytest.fixture
def folder(tmp_path, monkeypatch):
    """Two cases, tables, a folder with a case inside, and what fits nowhere."""
    cases = ("mine.toml", "b1-mine.toml", "two words.toml", ".kept.toml")
    for name in (*cases, "numbers.csv", "numbers.json", "notes.txt"):
        (tmp_path / name).touch()
    (tmp_path / "models").mkdir()
    (tmp_path / "models" / "deep.toml").touch()
    monkeypatch.chdir(tmp_path)
    return tmp_path


def test_commands():
    assert plain() == list(COMMANDS)
    assert plain(incomplete="a") == ["approach", "atlas", "average"]


@pytest.mark.parametrize("command", ON_A_CASE)
def test_a_case_is_a_bundled_one_or_a_file(command, folder):
    assert plain(command) == [*bundled_names(), "b1-mine.toml", "mine.toml", "models/"]
    assert plain(command, incomplete="b1") == ["b1-four-flavours", "b1-mine.toml"]
    assert plain(command, incomplete="models/") == ["models/deep.toml"]
    assert plain(command, incomplete=".k") == [".kept.toml"]
    assert offered(command, incomplete="zzz") == []
    assert offered(command, incomplete="nowhere/x") == []
    assert offered(command, incomplete="a\0b/") == []


def test_what_only_the_shell_can_finish_is_left_to_it(folder):
    assert offered("limit", incomplete="mod") == [("dir", "mod")]
    assert offered("limit", incomplete="two w") == [("file", "two w")]


def test_a_path_stays_as_it_was_typed(folder, monkeypatch):
    monkeypatch.setenv("HOME", str(folder))
    assert plain("limit", incomplete="~/mi") == ["~/mine.toml"]
    assert plain("limit", incomplete="./mi") == ["./mine.toml"]
    assert plain("limit", incomplete=f"{folder}/models/d") == [f"{folder}/models/deep.toml"]


def test_the_case_may_come_behind_options(folder):
    assert plain("limit", "--charge", "3", incomplete="mi") == ["mine.toml"]
    assert plain("limit", "--charge", "3", "--json", incomplete="u3") == ["u3-pure"]


def test_tables_and_names(folder):
    assert plain("compare", "mine.toml") == ["numbers.csv", "numbers.json", "models/"]
    assert plain("cases", incomplete="mine") == []
    assert plain("cases", incomplete="ising") == ["ising-energy", "ising-identity"]


def test_files_to_write_are_left_to_the_shell(folder):
    for words in ("report mine.toml -o", "new --output", "limit mine.toml --keep", "detect mine.toml --plot"):
        assert offered(*words.split(), incomplete="no") == [("file", "no")]


def test_options_and_their_choices():
    assert "--most-configurations" in plain("limit", "u2-pure", incomplete="--mo")
    assert plain("limit", "u2-pure", "--route", incomplete="p") == ["poles"]
    assert plain("validate", "u2-pure", "--depth") == ["quick", "full"]
    assert plain("compare", "u2-pure", "--as", incomplete="pre") == ["prepotential"]
    assert plain("average", "u2-pure", "--of", incomplete="s") == ["size"]


@pytest.mark.parametrize(("name", "shell"), [("bash", BashComplete), ("zsh", ZshComplete), ("fish", FishComplete)])
def test_every_shell_of_the_readme_gets_its_script_and_its_answers(name, shell):
    assert get_completion_class(name) is shell
    assert f"{VARIABLE}={name}_source ratomega" in README.read_text(encoding="utf-8")
    assert offered("limit", incomplete="b1-f", shell=shell) == [("plain", "b1-four-flavours")]


def test_the_entry_of_the_program_answers_a_shell():
    """As bash asks, in a process of its own."""
    words = {VARIABLE: "bash_complete", "COMP_WORDS": "ratomega limit b1-f", "COMP_CWORD": "2"}
    command = [sys.executable, "-m", "ratomega"]
    done = subprocess.run(command, env=os.environ | words, capture_output=True, text=True, check=False)
    assert (done.returncode, done.stdout, done.stderr) == (0, "plain,b1-four-flavours\n", "")
    script = subprocess.run(
        command, env=os.environ | {VARIABLE: "zsh_source"}, capture_output=True, text=True, check=False
    )
    assert re.search(rf"{VARIABLE}=zsh_complete ratomega\b", script.stdout)
    assert script.returncode == 0
