"""The command ``ratomega average``; what it shares with the others is handed in by ``cli.main``."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import click

from ratomega.averages.limits import KINDS
from ratomega.averaging import DEFAULT_POWERS, average_result, averages_of, wanted_of
from ratomega.desk.average_text import average_text

__all__ = ["average_command"]

Decorator = Callable[[Callable[..., Any]], Callable[..., Any]]


def average_command(
    *, common: Decorator, probes: Decorator, job: Callable[..., Any], collect: Callable[..., Any],
    finish: Callable[..., int],
) -> click.Command:
    """The command, from the options and the steps that every command on a case shares."""

    @click.command("average")
    @common
    @probes
    @click.option("--of", "of", type=click.Choice(KINDS), default=KINDS[0], show_default=True, help="What to average.")
    @click.option("--node", metavar="NAME", help="One node of a quiver; without it every node.")
    @click.option("--powers", type=int, default=DEFAULT_POWERS, show_default=True, help="The highest power of traces.")
    def average(of: str, node: str | None, powers: int, probes: int, as_json: bool, **case_options: Any) -> int:
        """Take exact limits of averages over configurations: Y(x), chiral traces, the number of boxes.

        Example: ratomega average u2-pure --of trace-powers --charge 2
        """
        prepared = job(**case_options)
        wanted = wanted_of(prepared, of=of, node=node, powers=powers)
        steps = averages_of(prepared, wanted, probes=probes)
        found, interrupted = collect(prepared, steps, lambda one: one.charge)
        result = average_result(prepared, wanted, found, partial=interrupted)
        return finish(result, average_text, as_json, interrupted)

    return average
