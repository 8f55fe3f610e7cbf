"""The command ``ratomega cases``."""

from __future__ import annotations

import json

import click

from ratomega.case.bundled import bundled_names, bundled_text
from ratomega.case.case import Case
from ratomega.case.reading import load_case
from ratomega.cli.completion import CASE_NAME
from ratomega.desk.text import charge_word, table, theory_text
from ratomega.exact.rational import exact_text
from ratomega.version import VERSION

__all__ = ["cases"]


@click.command("cases", short_help="List the bundled demo cases, or print the file of one.")
@click.argument("name", type=CASE_NAME, required=False)
@click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output.")
def cases(name: str | None, as_json: bool) -> int:
    """List the bundled demo cases, or print the file of one: a start for your own.

    Example: ratomega cases b1-four-flavours
    """
    if name is not None:
        text = bundled_text(name)
        click.echo(json.dumps({"name": name, "text": text}, indent=1) if as_json else text.rstrip("\n"))
        return 0
    listed = [(bundled, load_case(bundled)) for bundled in bundled_names()]
    if as_json:
        rows = [
            {
                "name": bundled,
                "title": case.title,
                "ratio": exact_text(case.background.ratio),
                "charge": case.charge if isinstance(case.charge, int) else list(case.charge),
                "theory": theory_text(case),
            }
            for bundled, case in listed
        ]
        click.echo(json.dumps({"version": VERSION, "cases": rows}, indent=1, ensure_ascii=False))
        return 0
    lines = [
        [bundled, exact_text(case.background.ratio), _charge_bound(case), case.title] for bundled, case in listed
    ]
    click.echo("\n".join(table(["name", "eps2/eps1", "charge", "title"], lines, left=[0, 3])))
    return 0


def _charge_bound(case: Case) -> str:
    return str(case.charge) if isinstance(case.charge, int) else charge_word(case.charge)
