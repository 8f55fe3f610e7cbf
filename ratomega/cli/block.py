"""``ratomega block``: a conformal block, its gauge theory, and the dictionary between them."""

from __future__ import annotations

import click

from ratomega.chain.blocks import block as make_block
from ratomega.cli.completion import CASE
from ratomega.desk.block_text import block_text
from ratomega.documents.results import to_json

__all__ = ["block"]


@click.command("block", short_help="Give a conformal block, its gauge theory and the dictionary.")
@click.argument("case", type=CASE)
@click.option("--order", "--charge", "order", type=int, metavar="K", help="Highest power of x, or of q on the torus.")
@click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output.")
def block(case: str, order: int | None, as_json: bool) -> int:
    """Give a conformal block and its gauge theory, with the dictionary between them.

    CASE is in conformal terms, or U(2) with four flavours or one adjoint.

    Example: ratomega block block-mixed-fields --order 2
    """
    found = make_block(case, order=order)
    click.echo(to_json(found) if as_json else block_text(found), nl=False)
    return found.exit_status
