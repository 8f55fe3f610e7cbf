"""The command ``ratomega average``."""

from __future__ import annotations

from typing import Any

import click

from ratomega.averages.limits import KINDS
from ratomega.chain.averaging import DEFAULT_POWERS, average_result, averages_of, wanted_of
from ratomega.cli.options import case_options, probes_option
from ratomega.cli.running import collect, finish, loaded_case, prepared_job
from ratomega.desk.average_text import average_text

__all__ = ["average"]


@click.command("average", short_help="Take exact limits of Y(x), chiral traces or the number of boxes.")
@case_options
@probes_option
@click.option("--of", "of", type=click.Choice(KINDS), default=KINDS[0], show_default=True, help="What to average.")
@click.option("--node", metavar="NAME", help="One node of a quiver; without it every node.")
@click.option("--powers", type=int, default=DEFAULT_POWERS, show_default=True, help="The highest power of traces.")
def average(of: str, node: str | None, powers: int, probes: int, as_json: bool, **options_given: Any) -> int:
    """Take exact limits of averages over configurations: Y(x), chiral traces, the number of boxes.

    Example: ratomega average u2-pure --of trace-powers --charge 2
    """
    prepared = prepared_job(loaded_case(**options_given), **options_given)
    wanted = wanted_of(prepared, of=of, node=node, powers=powers)
    steps = averages_of(prepared, wanted, probes=probes)
    found, interrupted = collect(prepared, steps, lambda one: one.charge)
    result = average_result(prepared, wanted, found, partial=interrupted)
    return finish(result, average_text, as_json, interrupted)
