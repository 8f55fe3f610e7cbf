"""The command ``ratomega limit``."""

from __future__ import annotations

from functools import partial
from typing import Any

import click

from ratomega.chain.nesting import refuse_other_ways
from ratomega.chain.pipeline import limit_result
from ratomega.cli.options import case_options, form_option, probes_option, was_typed, worker_options
from ratomega.cli.running import collect, crew_of, finish, loaded_case, nested_limits_of, one_form, prepared_job
from ratomega.desk.csv_text import limit_csv
from ratomega.desk.latex import limit_latex
from ratomega.desk.text import limit_text
from ratomega.regulator.routes import ROUTES, uses_primes

__all__ = ["limit"]


@click.command("limit", short_help="Take the limit of every coefficient exactly, with a certificate.")
@case_options
@probes_option
@worker_options
@form_option
@click.option("--csv", "as_csv", is_flag=True, help="Comma-separated values.")
@click.option("--factored", is_flag=True, help="With --csv, the prime factors of denominators as well.")
@click.option("--terms", type=int, metavar="N", help="Also the expansion in t up to t^N.")
@click.option("--route", type=click.Choice(ROUTES), default="auto", show_default=True, help="The way to take.")
@click.option("--certify", is_flag=True, help="Prove what residues gave, by a bound.")
def limit(
    probes: int,
    terms: int | None,
    route: str,
    certify: bool,
    workers: int | None,
    cluster: str | None,
    keep: str | None,
    as_json: bool,
    latex: bool,
    as_csv: bool,
    factored: bool,
    **options_given: Any,
) -> int:
    """Take the limit of every coefficient exactly, with a certificate.

    Example: ratomega limit b1-four-flavours --charge 2
    """
    one_form(json=as_json, latex=latex, csv=as_csv)
    write = limit_latex if latex else partial(limit_csv, factored=factored) if as_csv else limit_text
    loaded = loaded_case(**options_given)
    if loaded.nested:
        asked = {"terms": terms is not None, "route": route == "poles", "certify": certify}
        refuse_other_ways(**asked, probes=was_typed("probes"), workers=workers, cluster=cluster, keep=keep)
        return finish(nested_limits_of(loaded, **options_given), write, as_json, False)
    job = prepared_job(loaded, **options_given, route=route, clusterwise=terms is not None)
    with crew_of(job, workers, cluster, keep) as crew:
        if crew is not None and job.way.short_cut and not uses_primes(job.way, job.case):
            click.echo("note: so low a charge is done in one process, and no parts are kept", err=True)
        limits = job.limits(probes=probes, terms=terms, crew=crew, certify=certify)
        found, interrupted = collect(job, limits, lambda one: one.charge, crew)
    return finish(limit_result(job, found, terms=terms, partial=interrupted), write, as_json, interrupted)
