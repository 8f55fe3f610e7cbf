"""The command ``ratomega approach``."""

from __future__ import annotations

from typing import Any

import click

from ratomega.cli.options import case_options
from ratomega.cli.plotting import plot_option, write_plot
from ratomega.cli.running import finish, loaded_case
from ratomega.desk.approach_text import approach_text
from ratomega.verify.approach import DEFAULT_DIGITS, DEFAULT_OFFSETS
from ratomega.verify.approach import approach as approach_limits

__all__ = ["approach"]


@click.command("approach", short_help="See what the sum loses at irrational ratios near the limit.")
@case_options
@click.option(
    "--offsets", default=",".join(DEFAULT_OFFSETS), show_default=True, metavar="LIST", help="Offsets, by commas."
)
@click.option("--digits", type=int, default=DEFAULT_DIGITS, show_default=True, help="Decimal digits to work with.")
@plot_option
def approach(
    offsets: str,
    digits: int,
    plot: str | None,
    as_json: bool,
    no_tilt: bool,
    most_configurations: int,
    **options_given: Any,
) -> int:
    """Evaluate the sum at irrational ratios near the limit, in balls, and see what it loses.

    Example: ratomega approach u2-pure --charge 4 --offsets 1e-2,1e-4,1e-6 --digits 15
    """
    result = approach_limits(
        loaded_case(**options_given),
        offsets=[part.strip() for part in offsets.split(",")],
        digits=digits,
        allow_tilt=not no_tilt,
        most_configurations=most_configurations,
    )
    write_plot(result, plot)
    return finish(result, approach_text, as_json, False)
