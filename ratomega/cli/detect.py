"""The command ``ratomega detect``."""

from __future__ import annotations

from typing import Any

import click

from ratomega.chain.pipeline import detect_result
from ratomega.cli.options import case_options, form_option
from ratomega.cli.plotting import plot_option, write_plot
from ratomega.cli.running import collect, finish, loaded_case, one_form, prepared_job
from ratomega.desk.latex import detect_latex
from ratomega.desk.text import detect_text

__all__ = ["detect"]


@click.command("detect", short_help="List singular configurations, guilty factors and clusters.")
@case_options
@form_option
@click.option(
    "--exchanges",
    type=click.IntRange(0),
    default=0,
    metavar="N",
    help="Show which boxes are exchanged inside clusters of at most N members.",
)
@plot_option
def detect(exchanges: int, plot: str | None, as_json: bool, latex: bool, **options_given: Any) -> int:
    """List the singular configurations, the guilty factors and the clusters.

    Example: ratomega detect u2-pure --charge 3
    """
    one_form(json=as_json, latex=latex)
    job = prepared_job(loaded_case(**options_given), **options_given)
    found, interrupted = collect(job, job.scans(exchanges=exchanges), lambda report: report.charge)
    write = detect_latex if latex else detect_text
    result = detect_result(job, found, partial=interrupted)
    write_plot(result, plot)
    return finish(result, write, as_json, interrupted)
