"""The command ``ratomega report``: one page on a case."""

from __future__ import annotations

import json
import shlex
from typing import Any

import click

from ratomega.case.wording import shortened
from ratomega.cli.completion import CASE, FILE
from ratomega.cli.running import loaded_case
from ratomega.desk.report import report as make_report
from ratomega.validator.checklist import DEPTHS
from ratomega.version import VERSION

__all__ = ["report"]

LONGEST_NAME = 4096


@click.command("report", short_help="Write one self-contained HTML page on a case.")
@click.argument("case", type=CASE)
@click.option(
    "-o",
    "--output",
    type=FILE,
    metavar="FILE",
    required=True,
    help="The page to write; a file there is replaced.",
)
@click.option("--charge", metavar="K", help="Highest total charge, or one bound a node: 2,1.")
@click.option("--eps1", metavar="EXPR", help="Replace eps1 of the case; t may occur.")
@click.option("--eps2", metavar="EXPR", help="Replace eps2 of the case; t may occur.")
@click.option("--no-tilt", is_flag=True, help="Refuse, instead of tilting, resonant Coulomb parameters.")
@click.option(
    "--depth",
    type=click.Choice([depth.name for depth in DEPTHS]),
    default="quick",
    show_default=True,
    help="How much work a check may be, and how far a big case is followed.",
)
@click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output.")
def report(output: str, no_tilt: bool, depth: str, as_json: bool, **case_options: Any) -> int:
    """Write one self-contained HTML page: coefficients, diagrams, clusters, pole orders, atlas, checks.

    Example: ratomega report b1-four-flavours -o b1.html
    """
    given = {f"--{key}": case_options[key] for key in ("charge", "eps1", "eps2") if case_options[key] is not None}
    words = ["ratomega", "report", case_options["case"]]
    for option, value in given.items():
        words += [option, value]
    words += [*(["--no-tilt"] if no_tilt else []), *(["--depth", depth] if depth != "quick" else [])]
    command = shlex.join([*words, "-o", output])
    made = make_report(loaded_case(**case_options), depth=depth, allow_tilt=not no_tilt, command=command)
    made.save(output)
    # The name of a file need not be text.
    shown = shortened(output, LONGEST_NAME)
    if as_json:
        document = {"result": "report", "version": VERSION, "file": shown, "hash": made.findings.case.hash}
        click.echo(json.dumps({**document, "left_out": list(made.notes)}, indent=1, ensure_ascii=False))
    else:
        click.echo(f"wrote {shown}")
        for note in made.notes:
            click.echo(f"left out  {note}")
    return 0
