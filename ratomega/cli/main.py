"""The command line: one command an action on a case, and ``ratomega cases``.

Results go to standard output, everything else to standard error. Exit status: 0 done; 1 a pole survives, a limit is
path-dependent or a check is refuted; 2 the input is wrong; 3 finiteness or path-independence stayed undecided; 4 the
workers failed; 130 interrupted, after printing the finished charges.
"""

from __future__ import annotations

import json
import os
import sys
from collections.abc import Sequence
from functools import partial
from typing import Any, NoReturn

import click

from ratomega.case.bundled import bundled_names, bundled_text
from ratomega.case.case import Case
from ratomega.case.reading import load_case
from ratomega.cli.approach import approach
from ratomega.cli.atlas import atlas
from ratomega.cli.average import average
from ratomega.cli.block import block
from ratomega.cli.compare import compare
from ratomega.cli.explain import explain
from ratomega.cli.new import new
from ratomega.cli.options import case_options, form_option, probes_option, worker_options
from ratomega.cli.plotting import plot_option, write_plot
from ratomega.cli.report import report
from ratomega.cli.running import (
    INTERRUPTED,
    StatusLine,
    collect,
    crew_of,
    finish,
    loaded_case,
    nested_limits_of,
    one_form,
    prepared_job,
)
from ratomega.desk.csv_text import limit_csv
from ratomega.desk.latex import detect_latex, limit_latex, validate_latex
from ratomega.desk.text import charge_word, detect_text, limit_text, table, theory_text, validate_text
from ratomega.documents import error_document
from ratomega.errors import InputError, RatomegaError, WorkerError
from ratomega.exact.rational import exact_text
from ratomega.nesting import nested_checks, refuse_other_ways
from ratomega.pipeline import detect_result, limit_result, validate_checks
from ratomega.regulator.routes import ROUTES, uses_primes
from ratomega.results import ValidateResult
from ratomega.validator.checklist import DEPTHS, depth_of
from ratomega.validator.verdict import Check
from ratomega.version import VERSION

__all__ = ["main"]


@click.group(context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(VERSION, message="ratomega %(version)s")
def cli() -> None:
    """Exact limits of instanton partition functions on rational Omega-backgrounds.

    CASE is a TOML file, or the name of a bundled case (`ratomega cases` lists them).
    """


@cli.command()
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


@cli.command()
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
        refuse_other_ways(**asked, workers=workers, cluster=cluster, keep=keep)
        return finish(nested_limits_of(loaded, **options_given), write, as_json, False)
    job = prepared_job(loaded, **options_given, route=route, clusterwise=terms is not None)
    with crew_of(job, workers, cluster, keep) as crew:
        if crew is not None and job.way.short_cut and not uses_primes(job.way, job.case):
            click.echo("note: so low a charge is done in one process, and no parts are kept", err=True)
        limits = job.limits(probes=probes, terms=terms, crew=crew, certify=certify)
        found, interrupted = collect(job, limits, lambda one: one.charge, crew)
    return finish(limit_result(job, found, terms=terms, partial=interrupted), write, as_json, interrupted)


@cli.command()
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
        refuse_other_ways(workers=workers, cluster=cluster, keep=keep)
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


cli.add_command(approach)
cli.add_command(atlas)
cli.add_command(explain)
cli.add_command(new)
cli.add_command(average)
cli.add_command(block)
cli.add_command(compare)
cli.add_command(report)


@cli.command()
@click.argument("name", required=False)
@click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output.")
def cases(name: str | None, as_json: bool) -> int:
    """List the bundled demo cases, or print the file of one: a start for your own.

    Example: ratomega cases b1-four-flavours
    """
    if name is not None:
        text = bundled_text(name)
        click.echo(json.dumps({"name": name, "text": text}, indent=1) if as_json else text.rstrip("\n"))
        return 0
    listed = [(bundled, load_case(bundled)) for bundled in bundled_names()]
    if as_json:
        rows = [
            {
                "name": bundled,
                "title": case.title,
                "ratio": exact_text(case.background.ratio),
                "charge": case.charge if isinstance(case.charge, int) else list(case.charge),
                "theory": theory_text(case),
            }
            for bundled, case in listed
        ]
        click.echo(json.dumps({"version": VERSION, "cases": rows}, indent=1, ensure_ascii=False))
        return 0
    lines = [
        [bundled, exact_text(case.background.ratio), _charge_bound(case), case.title] for bundled, case in listed
    ]
    click.echo("\n".join(table(["name", "eps2/eps1", "charge", "title"], lines, left=[0, 3])))
    return 0


def _charge_bound(case: Case) -> str:
    return str(case.charge) if isinstance(case.charge, int) else charge_word(case.charge)


def _fail(error: RatomegaError, as_json: bool) -> int:
    given = error if isinstance(error, InputError) else InputError.single(str(error))
    if as_json:
        click.echo(json.dumps(error_document(given), indent=1, ensure_ascii=False))
    for problem in given.problems:
        click.echo(f"ratomega: {problem.text()}", err=True)
    return error.exit_status




def main(arguments: Sequence[str] | None = None) -> NoReturn:
    """Run the command line and exit with its status."""
    words = list(sys.argv[1:] if arguments is None else arguments)
    as_json = "--json" in words
    try:
        status = cli.main(args=words, prog_name="ratomega", standalone_mode=False)
        sys.stdout.flush()
    except (InputError, WorkerError) as error:
        status = _fail(error, as_json)
    except click.ClickException as error:
        where = error.ctx.command_path if isinstance(error, click.UsageError) and error.ctx is not None else ""
        status = _fail(InputError.single(error.format_message(), where.removeprefix("ratomega ")), as_json)
    except click.Abort:
        click.echo("interrupted before the first charge was finished", err=True)
        status = INTERRUPTED
    except BrokenPipeError:
        # The reader of our output went away (for example `| head`): nothing is left to say.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        status = 0
    sys.exit(status if isinstance(status, int) else 0)
