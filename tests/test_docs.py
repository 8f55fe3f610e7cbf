"""The documentation cannot rot: README's files are written, its commands run, its output compared."""

from __future__ import annotations

import doctest
import re
import shlex
import subprocess
import sys
from pathlib import Path

import click
import pytest
from click.testing import CliRunner

import ratomega
from ratomega.cli.main import cli, main

ROOT = Path(__file__).resolve().parent.parent
README = (ROOT / "README.md").read_text(encoding="utf-8")
FILES = re.findall(r"<!-- file: (\S+) -->\n```(?:toml|csv)\n(.*?)```", README, re.DOTALL)
CONSOLE = re.findall(r"```console\n\$ (.*?)\n(.*?)```", README, re.DOTALL)
# Commands of `new` that write one of the files above.
WRITING = re.findall(r"```sh\n(ratomega new .*? -o (\S+))\n```", README)
COMMANDS = {name: cli.get_command(click.Context(cli), name) for name in cli.list_commands(click.Context(cli))}


def run(command, folder):
    """The command in a process of its own, as a user has it."""
    words = shlex.split(command)
    assert words[0] == "ratomega"
    return subprocess.run(
        [sys.executable, "-m", *words], capture_output=True, text=True, encoding="utf-8", cwd=folder, check=False
    )


def run_here(command, capsys):
    """The same entry in this process, which has loaded everything already."""
    with pytest.raises(SystemExit):
        main(shlex.split(command)[1:])
    return capsys.readouterr()


@pytest.fixture
def folder(tmp_path):
    for name, text in FILES:
        (tmp_path / name).write_text(text, encoding="utf-8")
    return tmp_path


def test_every_example_of_the_readme_is_found():
    assert len(FILES) == README.count("<!-- file: ") > 3
    assert len(CONSOLE) == README.count("```console") > 10
    assert len(dict(FILES)) == len(FILES)


def test_the_tour_has_three_jobs_and_comes_before_the_reference():
    start, end = README.index("## A tour: three worked jobs\n"), README.index("## The case file\n")
    assert README.index("## Install and run\n") < README.index("## A first case\n") < start < end
    jobs = re.split(r"^## ", README[start + 3 : end], flags=re.MULTILINE)[0].split("\n### ")[1:]
    assert len(jobs) == 3
    assert all("```console\n" in job and "<!-- file: " in job for job in jobs)


@pytest.mark.parametrize(("command", "name"), WRITING)
def test_files_that_a_command_writes_are_what_the_readme_shows(command, name, tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    assert run_here(command, capsys).out == ""
    assert (tmp_path / name).read_text(encoding="utf-8") == dict(FILES)[name]


def test_links_inside_the_readme_lead_to_a_heading():
    headings = re.findall(r"^#+ (.*)$", re.sub(r"```.*?```", "", README, flags=re.DOTALL), re.MULTILINE)
    slugs = {re.sub(r"[^\w\- ]", "", heading.lower()).replace(" ", "-") for heading in headings}
    links = re.findall(r"\]\(#([^)]+)\)", README)
    assert links
    assert set(links) <= slugs


@pytest.mark.parametrize(("command", "output"), CONSOLE, ids=[command for command, _ in CONSOLE])
def test_console_examples_print_what_the_readme_shows(command, output, folder, monkeypatch, capsys):
    monkeypatch.chdir(folder)
    done = run_here(command, capsys)
    assert (done.out, done.err) == (output, "")
    assert output


def test_the_first_example_in_a_process_of_its_own(folder):
    command, output = CONSOLE[0]
    done = run(command, folder)
    assert (done.stdout, done.stderr) == (output, "")


def test_python_examples(folder, monkeypatch):
    monkeypatch.chdir(folder)
    found = doctest.testfile(str(ROOT / "README.md"), module_relative=False, encoding="utf-8")
    assert found.attempted > 5
    assert found.failed == 0


@pytest.mark.parametrize("name", sorted(COMMANDS))
def test_the_example_in_every_help_text_runs(name, tmp_path, monkeypatch):
    """In this process: that the installed command works is seen above."""
    monkeypatch.chdir(tmp_path)
    help_text = CliRunner().invoke(cli, [name, "--help"]).output
    example = re.search(r"Example: ratomega (.*)", help_text)
    assert example, help_text
    done = CliRunner().invoke(cli, shlex.split(example[1]), standalone_mode=False, catch_exceptions=False)
    assert done.return_value == 0


def test_the_first_command_line_is_in_the_readme_and_names_a_bundled_case():
    block = re.search(r"```sh\n(python3 -m venv .*?)\n```", README)
    assert block
    last = block[1].split("&& ")[-1]
    assert last.split()[:2] == ["ratomega", "limit"]
    assert last.split()[2] in ratomega.bundled_names()


def test_every_option_is_documented():
    options = {o for command in COMMANDS.values() for p in command.params for o in p.opts if o.startswith("--")}
    assert len(options) > 20
    assert all(option in README for option in options), options
