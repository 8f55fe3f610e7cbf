"""The command ``ratomega validate``."""

from __future__ import annotations

from typing import Any

import click

from ratomega.chain.nesting import nested_checks, refuse_other_ways
from ratomega.chain.pipeline import validate_checks
from ratomega.cli.options import case_options, form_option, probes_option, was_typed, worker_options
from ratomega.cli.running import (
    StatusLine,
    collect,
    crew_of,
    finish,
    loaded_case,
    nested_limits_of,
    one_form,
    prepared_job,
)
from ratomega.desk.latex import validate_latex
from ratomega.desk.text import validate_text
from ratomega.results.validations import ValidateResult
from ratomega.validator.checklist import DEPTHS, depth_of
from ratomega.validator.verdict import Check

__all__ = ["validate"]


@click.command("validate", short_help="Run every outside check that applies to a case.")
@case_options
@probes_option
@worker_options
@form_option
@click.option(
    "--depth",
    type=click.Choice([depth.name for depth in DEPTHS]),
    default="quick",
    show_default=True,
    help="How much work a single check may be.",
)
def validate(
    probes: int,
    workers: int | None,
    cluster: str | None,
    keep: str | None,
    depth: str,
    as_json: bool,
    latex: bool,
    **options_given: Any,
) -> int:
    """Check finiteness, further paths, and every independent route and relation that applies.

    Example: ratomega validate b1-four-flavours --charge 2
    """
    one_form(json=as_json, latex=latex)
    write = validate_latex if latex else validate_text
    loaded = loaded_case(**options_given)
    if loaded.nested:
        refuse_other_ways(probes=was_typed("probes"), workers=workers, cluster=cluster, keep=keep)
        limits_found = nested_limits_of(loaded, **options_given)
        nested = ValidateResult(limits_found.header, tuple(nested_checks(loaded, limits_found)), depth)
        return finish(nested, write, as_json, False)
    job = prepared_job(loaded, **options_given)
    with crew_of(job, workers, cluster, keep) as crew:
        limits = job.limits(probes=probes, always_probe=True, crew=crew)
        found, interrupted = collect(job, limits, lambda one: one.charge, crew)
    checks: list[Check] = []
    line = StatusLine()
    try:
        for check in validate_checks(job, found, depth_of(depth)):
            checks.append(check)
            line.show(f"check {len(checks)}: {check.name}")
    except KeyboardInterrupt:
        interrupted = True
        line.clear()
        click.echo(f"interrupted: {len(checks)} checks were finished and are printed", err=True)
    line.clear()
    result = ValidateResult(job.header, tuple(checks), depth, interrupted)
    return finish(result, write, as_json, interrupted)
