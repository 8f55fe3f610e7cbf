"""The command line: one command an action on a case, and ``ratomega cases``.

Results go to standard output, everything else to standard error. Exit status: 0 done; 1 a pole survives, a limit is
path-dependent or a check is refuted; 2 the input is wrong; 3 finiteness or path-independence stayed undecided; 4 the
workers failed; 130 interrupted, after printing the finished charges.
"""

from __future__ import annotations

import json
import os
import sys
from collections.abc import Sequence
from importlib import import_module
from typing import NoReturn

import click

from ratomega.case.wording import nearest, quoted, shortened
from ratomega.documents.failing import error_document
from ratomega.errors import INTERRUPTED, InputError, RatomegaError, WorkerError
from ratomega.version import VERSION

__all__ = ["main"]

LONGEST_SENTENCE = 600

COMMANDS = (
    "approach",
    "atlas",
    "average",
    "block",
    "cases",
    "compare",
    "detect",
    "explain",
    "grid",
    "limit",
    "new",
    "report",
    "validate",
)
"""Each is defined under its name in the module of its name, which is imported when the command is asked for."""


class _Commands(click.Group):
    def list_commands(self, ctx: click.Context) -> list[str]:
        return list(COMMANDS)

    def resolve_command(
        self, ctx: click.Context, args: list[str]
    ) -> tuple[str | None, click.Command | None, list[str]]:
        if args[0] not in COMMANDS and not args[0].startswith("-"):
            raise InputError.single(f"there is no command {quoted(args[0])}{nearest(args[0], COMMANDS)}")
        return super().resolve_command(ctx, args)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        if cmd_name not in COMMANDS:
            return None
        command: click.Command = getattr(import_module(f"ratomega.cli.{cmd_name}"), cmd_name)
        return command


@click.group(cls=_Commands, context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(VERSION, message="ratomega %(version)s")
def cli() -> None:
    """Exact limits of instanton partition functions on rational Omega-backgrounds.

    CASE is a TOML file, or the name of a bundled case (`ratomega cases` lists them).
    """


def _fail(error: RatomegaError, as_json: bool) -> int:
    given = error if isinstance(error, InputError) else InputError.single(str(error))
    if as_json:
        text = json.dumps(error_document(given), indent=1, ensure_ascii=False)
        # Words that were no text when they were typed are no text here; \udcxx is how JSON writes them.
        click.echo(text.encode("utf-8", "backslashreplace").decode("utf-8"))
    for problem in given.problems:
        # What was typed stands in the sentence, and a terminal obeys what cannot be printed.
        click.echo(f"ratomega: {shortened(problem.text(), LONGEST_SENTENCE)}", err=True)
    return error.exit_status


def main(arguments: Sequence[str] | None = None) -> NoReturn:
    """Run the command line and exit with its status."""
    words = list(sys.argv[1:] if arguments is None else arguments)
    as_json = "--json" in words
    try:
        status = cli.main(args=words or ["--help"], prog_name="ratomega", standalone_mode=False)
        sys.stdout.flush()
    except (InputError, WorkerError) as error:
        status = _fail(error, as_json)
    except click.ClickException as error:
        where = error.ctx.command_path if isinstance(error, click.UsageError) and error.ctx is not None else ""
        status = _fail(InputError.single(error.format_message(), where.removeprefix("ratomega").strip()), as_json)
    except click.Abort:
        click.echo("interrupted before the first charge was finished", err=True)
        status = INTERRUPTED
    except BrokenPipeError:
        # The reader of our output went away (for example `| head`): nothing is left to say.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        status = 0
    sys.exit(status if isinstance(status, int) else 0)
