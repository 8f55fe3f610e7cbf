"""``ratomega atlas``: what would be singular where, before anything is computed."""

from __future__ import annotations

import re

import click

from ratomega.cli.completion import CASE
from ratomega.cli.plotting import plot_option, write_plot
from ratomega.desk.atlas_text import atlas_text
from ratomega.detector.atlas import atlas as make_atlas
from ratomega.documents.results import to_json
from ratomega.errors import InputError

__all__ = ["atlas", "read_charge"]

_INTEGERS = re.compile(r"[+-]?\d{1,9}(,[+-]?\d{1,9})*")


@click.command("atlas", short_help="List the ratios with singular weights, and the Coulomb poles.")
@click.argument("case", type=CASE, required=False)
@click.option("--ranks", metavar="N", help="Instead of a case: the rank of every node, such as 2 or 2,1.")
@click.option("--charge", metavar="K", help="Highest total charge, or one bound a node: 2,1.")
@click.option("--ratio", metavar="R", help="List the Coulomb poles at eps2/eps1 = R, such as 1/2 or -3.")
@click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output.")
@plot_option
def atlas(
    case: str | None, ranks: str | None, charge: str | None, ratio: str | None, plot: str | None, as_json: bool
) -> int:
    """List the ratios at which some weight is singular, and the poles in the Coulomb parameters.

    Give a CASE, or --ranks with --charge. Coulomb parameters and masses are taken as generic.

    Example: ratomega atlas --ranks 2 --charge 5 --ratio 1/2
    """
    found = make_atlas(
        case,
        ranks=None if ranks is None else _integers(ranks, "--ranks", "ranks are integers, one a node such as 2,1"),
        charge=None if charge is None else read_charge(charge),
        ratio=ratio,
    )
    write_plot(found, plot)
    click.echo(to_json(found) if as_json else atlas_text(found), nl=False)
    return found.exit_status


def read_charge(text: str) -> int | list[int]:
    """A charge as it is typed: an integer, or one integer a node. Raises ``InputError``."""
    bounds = _integers(text, "--charge", "write an integer, or one integer a node such as 2,1")
    return bounds if "," in text else bounds[0]


def _integers(text: str, option: str, advice: str) -> list[int]:
    if not _INTEGERS.fullmatch(text):
        what = "a charge" if option == "--charge" else "a list of ranks"
        raise InputError.single(f'"{text[:40]}" is not {what}; {advice}', option)
    return [int(word) for word in text.split(",")]
