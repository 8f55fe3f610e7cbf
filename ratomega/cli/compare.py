"""``ratomega compare``: someone's numbers against the exact limits, and what is the matter with them."""

from __future__ import annotations

import click

from ratomega.chain.job import MOST_CONFIGURATIONS
from ratomega.cli.completion import CASE, TABLE
from ratomega.desk.compare_text import compare_text
from ratomega.documents.results import to_json
from ratomega.verify.comparing import compare as make_comparison
from ratomega.verify.quantities import NAMES

__all__ = ["compare"]


@click.command("compare", short_help="Find what is the matter with someone's numbers.")
@click.argument("case", type=CASE)
@click.argument("numbers", type=TABLE)
@click.option("--as", "as_", type=click.Choice(NAMES), help="What the numbers are; without it each is tried.")
@click.option(
    "--most-configurations",
    type=click.IntRange(1),
    default=MOST_CONFIGURATIONS,
    show_default=True,
    help="Refuse a charge with more configurations than this.",
)
@click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output.")
def compare(case: str, numbers: str, as_: str | None, most_configurations: int, as_json: bool) -> int:
    """Compare NUMBERS with the exact limits, row by row, and find what explains the differences.

    NUMBERS is a CSV file (charge, value and perhaps uncertainty), a JSON file, or a JSON text itself.

    \b
    Example: ratomega compare u2-pure '{"1": "0.5625", "2": "0.12338"}'
    """
    result = make_comparison(case, numbers, as_=as_, most_configurations=most_configurations)
    click.echo(to_json(result) if as_json else compare_text(result), nl=False)
    return result.exit_status
