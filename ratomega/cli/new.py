"""The command ``ratomega new``: a first case file, from options or by asking."""

from __future__ import annotations

import re
import sys
from collections.abc import Sequence
from pathlib import Path

import click

from ratomega.case.drafting import draft, draft_minimal
from ratomega.cli.completion import FILE
from ratomega.conformal.minimal import Label, MinimalModel
from ratomega.errors import InputError

__all__ = ["new"]

_PAIR = re.compile(r"(\d{1,4}),(\d{1,4})")


@click.command("new", short_help="Write a commented case file, from options or by asking.")
@click.option("--rank", type=int, help="The number of colours N of U(N).")
@click.option("--flavours", type=int, help="How many antifundamentals.")
@click.option("--adjoint", is_flag=True, help="With an adjoint.")
@click.option("--ratio", metavar="R", help="eps2/eps1, a fraction of either sign.")
@click.option("--minimal", metavar="P,Q", help="A four-point block of the minimal model M(P,Q) instead.")
@click.option("--external", metavar="R,S", multiple=True, help="Kac label of the field at 0; again for x, 1, infinity.")
@click.option("--internal", metavar="R,S", help="The Kac label between them.")
@click.option("--charge", type=int, default=4, show_default=True, help="The highest charge, or order of the block.")
@click.option(
    "-o",
    "--output",
    type=FILE,
    metavar="FILE",
    help="Write FILE, which must not exist; otherwise the text is printed.",
)
def new(
    rank: int | None,
    flavours: int | None,
    adjoint: bool,
    ratio: str | None,
    minimal: str | None,
    external: tuple[str, ...],
    internal: str | None,
    charge: int,
    output: str | None,
) -> int:
    """Write a commented case file to start from; without options it asks.

    Example: ratomega new --rank 2 --flavours 4 --ratio 1
    """
    if minimal is not None:
        if any(x is not None for x in (rank, flavours, ratio)) or adjoint:
            raise InputError.single("--minimal goes with --external, --internal and --charge alone", "--minimal")
        if internal is None:
            raise InputError.single("the label of the internal field is missing: --internal R,S", "--internal")
        labels = [_pair(label, "--external") for label in external]
        model, between = _pair(minimal, "--minimal"), _pair(internal, "--internal")
        text = draft_minimal(model=model, external=labels, internal=between, order=charge)
        _note_fusion(MinimalModel.make(*model), labels, between)
    else:
        if external or internal is not None:
            raise InputError.single("--external and --internal belong to --minimal P,Q", "--external")
        if rank is None:
            if not sys.stdin.isatty():
                raise InputError.single("give --rank (and --flavours, --adjoint, --ratio), or --minimal", "--rank")
            rank = click.prompt("How many colours has U(N)", type=int, default=2)
            flavours = click.prompt("How many antifundamentals", type=int, default=0) if flavours is None else flavours
            adjoint = adjoint or click.confirm("An adjoint", default=False)
            ratio = click.prompt("eps2/eps1", default="1") if ratio is None else ratio
        text = draft(rank=rank, flavours=flavours or 0, adjoint=adjoint, ratio=ratio or "1", charge=charge)
    if output is None:
        click.echo(text, nl=False)
        return 0
    try:
        with Path(output).open("x", encoding="utf-8") as file:
            file.write(text)
    except FileExistsError as error:
        raise InputError.single("this file exists already; choose another name", output) from error
    except OSError as error:
        raise InputError.single(f"the file cannot be written: {error.strerror}", output) from error
    click.echo(f"wrote {output}; now try: ratomega {'block' if minimal else 'explain'} {output}", err=True)
    return 0


def _note_fusion(model: MinimalModel, fields: Sequence[Label], internal: Label) -> None:
    """Say where a product of two fields does not hold the internal one."""
    wrong = [pair for pair in (fields[:2], fields[2:]) if model.canonical(internal) not in model.fuse(*pair)]
    if wrong:
        (r, s), (u, v) = wrong[0]
        click.echo(
            f"note: in {model} the fields ({r},{s}) and ({u},{v}) do not fuse to ({internal[0]},{internal[1]}): "
            "the model has no such block, and a pole may survive",
            err=True,
        )


def _pair(text: str, where: str) -> tuple[int, int]:
    match = _PAIR.fullmatch(text.replace(" ", ""))
    if match is None:
        raise InputError.single(f'"{text[:40]}" is not two integers with a comma between them, such as 3,4', where)
    return int(match[1]), int(match[2])
