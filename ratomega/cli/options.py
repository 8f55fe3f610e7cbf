"""The arguments and options that several commands share."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import click
from click.core import ParameterSource

from ratomega.chain.job import MOST_CONFIGURATIONS
from ratomega.chain.pipeline import DEFAULT_PROBES
from ratomega.cli.completion import CASE, FILE

__all__ = ["case_options", "form_option", "probes_option", "was_typed", "worker_options"]


def case_options(function: Callable[..., Any]) -> Callable[..., Any]:
    """The argument and the options that every command on a case shares."""
    for decorate in (
        click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output."),
        click.option(
            "--most-configurations",
            type=click.IntRange(1),
            default=MOST_CONFIGURATIONS,
            show_default=True,
            help="Refuse a charge with more configurations than this.",
        ),
        click.option("--no-tilt", is_flag=True, help="Refuse, instead of tilting, resonant Coulomb parameters."),
        click.option("--eps2", metavar="EXPR", help="Replace eps2 of the case; t may occur."),
        click.option("--eps1", metavar="EXPR", help="Replace eps1 of the case; t may occur."),
        click.option("--charge", metavar="K", help="Highest total charge, or one bound a node: 2,1."),
        click.argument("case", type=CASE),
    ):
        function = decorate(function)
    return function


probes_option = click.option(
    "--probes",
    type=int,
    default=DEFAULT_PROBES,
    show_default=True,
    help="How many further paths are tried.",
)


def was_typed(name: str) -> bool:
    """Whether the option of the running command was given, be it as the default."""
    return click.get_current_context().get_parameter_source(name) is not ParameterSource.DEFAULT


def form_option(function: Callable[..., Any]) -> Callable[..., Any]:
    """A table for LaTeX in place of text."""
    return click.option("--latex", is_flag=True, help="A LaTeX table; needs the package longtable.")(function)


def worker_options(function: Callable[..., Any]) -> Callable[..., Any]:
    """The options that say who does the work."""
    for decorate in (
        click.option(
            "--keep",
            type=FILE,
            metavar="FILE",
            help="Keep finished parts in FILE, and go on from what is there.",
        ),
        click.option("--cluster", metavar="ADDRESS", help="Work on the dask cluster with this scheduler."),
        click.option("--workers", type=int, metavar="N", help="Work in N processes."),
    ):
        function = decorate(function)
    return function
