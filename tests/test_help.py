"""Help as it stands on a terminal of 80 columns: nothing is cut, and every command shows one example."""

from __future__ import annotations

import click
import pytest
from click.testing import CliRunner

from ratomega.cli.main import COMMANDS, cli

WIDTH = 80


def help_of(*words):
    done = CliRunner().invoke(cli, [*words, "--help"], terminal_width=WIDTH)
    assert done.exit_code == 0
    return done.output


def test_the_list_of_commands_has_one_whole_line_for_each():
    lines = help_of().partition("Commands:\n")[2].splitlines()
    assert [line.split()[0] for line in lines] == list(COMMANDS)
    for line in lines:
        assert len(line) <= WIDTH
        assert line.endswith(".")
        assert "..." not in line


@pytest.mark.parametrize("name", COMMANDS)
def test_the_help_of_a_command_fits_and_has_one_example(name):
    text = help_of(name)
    assert max(map(len, text.splitlines())) <= WIDTH
    assert text.count(f"  Example: ratomega {name}") == 1
    command = cli.get_command(click.Context(cli), name)
    # An example is run for each of COMMANDS; a command with commands of its own would have to be walked through.
    assert not isinstance(command, click.Group)
