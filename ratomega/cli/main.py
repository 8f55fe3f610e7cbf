"""The command line: ``ratomega detect | limit | validate | average CASE`` and ``ratomega cases``.

Results go to standard output, everything else to standard error. Exit status: 0 done; 1 a pole survives, a limit is
path-dependent or a check is refuted; 2 the input is wrong; 3 finiteness or path-independence stayed undecided; 4 the
workers failed; 130 interrupted, after printing the finished charges.
"""

from __future__ import annotations

import json
import os
import sys
import time
from collections.abc import Callable, Iterable, Iterator, Sequence
from contextlib import contextmanager, nullcontext
from typing import Any, NoReturn, TypeVar

import click

from ratomega.case.bundled import bundled_names, bundled_text
from ratomega.case.case import Case
from ratomega.case.reading import case_from_mapping, case_to_mapping, load_case
from ratomega.cli.atlas import atlas, read_charge
from ratomega.cli.average import average_command
from ratomega.cli.plotting import plot_option, write_plot
from ratomega.cli.report import report_command
from ratomega.desk.text import charge_word, detect_text, limit_text, table, theory_text, validate_text
from ratomega.diagrams.tuples import Charge
from ratomega.documents import Result, error_document, to_json
from ratomega.errors import InputError, RatomegaError, WorkerError
from ratomega.exact.rational import exact_text
from ratomega.job import MOST_CONFIGURATIONS, Job
from ratomega.nesting import nested_checks, nested_result, refuse_other_ways
from ratomega.pipeline import (
    DEFAULT_PROBES,
    detect_result,
    limit_result,
    validate_checks,
)
from ratomega.regulator.routes import ROUTES
from ratomega.results import LimitResult, ValidateResult
from ratomega.validator.checklist import DEPTHS, depth_of
from ratomega.validator.verdict import Check
from ratomega.version import VERSION
from ratomega.workers.cluster import cluster_hands
from ratomega.workers.crew import Crew, Progress

__all__ = ["main"]

INTERRUPTED = 130

Item = TypeVar("Item")


@click.group(context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(VERSION, message="ratomega %(version)s")
def cli() -> None:
    """Exact limits of instanton partition functions on rational Omega-backgrounds.

    CASE is a TOML file, or the name of a bundled case (`ratomega cases` lists them).
    """


def _common(function: Callable[..., Any]) -> Callable[..., Any]:
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
        click.argument("case"),
    ):
        function = decorate(function)
    return function


_probes = click.option(
    "--probes",
    type=int,
    default=DEFAULT_PROBES,
    show_default=True,
    help="How many further paths are tried.",
)


def _workers(function: Callable[..., Any]) -> Callable[..., Any]:
    """The options that say who does the work."""
    for decorate in (
        click.option("--keep", metavar="FILE", help="Keep finished parts in FILE, and go on from what is there."),
        click.option("--cluster", metavar="ADDRESS", help="Work on the dask cluster with this scheduler."),
        click.option("--workers", type=int, metavar="N", help="Work in N processes."),
    ):
        function = decorate(function)
    return function


@cli.command()
@_common
@click.option(
    "--exchanges",
    type=click.IntRange(0),
    default=0,
    metavar="N",
    help="Show which boxes are exchanged inside clusters of at most N members.",
)
@plot_option
def detect(exchanges: int, plot: str | None, as_json: bool, **case_options: Any) -> int:
    """List the singular configurations, the guilty factors and the clusters.

    Example: ratomega detect u2-pure --charge 3
    """
    job = _job(_loaded(**case_options), **case_options)
    found, interrupted = _collect(job, job.scans(exchanges=exchanges), lambda report: report.charge)
    result = detect_result(job, found, partial=interrupted)
    write_plot(result, plot)
    return _finish(result, detect_text, as_json, interrupted)


@cli.command()
@_common
@_probes
@_workers
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
    **case_options: Any,
) -> int:
    """Take the limit of every coefficient exactly, with a certificate.

    Example: ratomega limit b1-four-flavours --charge 2
    """
    loaded = _loaded(**case_options)
    if loaded.nested:
        asked = {"terms": terms is not None, "route": route == "poles", "certify": certify}
        refuse_other_ways(**asked, workers=workers, cluster=cluster, keep=keep)
        return _finish(_nested(loaded, **case_options), limit_text, as_json, False)
    job = _job(loaded, **case_options, route=route, clusterwise=terms is not None)
    with _crew(job, workers, cluster, keep) as crew:
        if crew is not None and job.way.short_cut:
            click.echo("note: this route works in one process and keeps no parts", err=True)
        limits = job.limits(probes=probes, terms=terms, crew=crew, certify=certify)
        found, interrupted = _collect(job, limits, lambda one: one.charge, crew)
    return _finish(limit_result(job, found, terms=terms, partial=interrupted), limit_text, as_json, interrupted)


@cli.command()
@_common
@_probes
@_workers
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
    **case_options: Any,
) -> int:
    """Check finiteness, further paths, and every independent route and relation that applies.

    Example: ratomega validate b1-four-flavours --charge 2
    """
    loaded = _loaded(**case_options)
    if loaded.nested:
        refuse_other_ways(workers=workers, cluster=cluster, keep=keep)
        limits_found = _nested(loaded, **case_options)
        nested = ValidateResult(limits_found.header, tuple(nested_checks(loaded, limits_found)), depth)
        return _finish(nested, validate_text, as_json, False)
    job = _job(loaded, **case_options)
    with _crew(job, workers, cluster, keep) as crew:
        limits = job.limits(probes=probes, always_probe=True, crew=crew)
        found, interrupted = _collect(job, limits, lambda one: one.charge, crew)
    checks: list[Check] = []
    line = _Line()
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
    return _finish(result, validate_text, as_json, interrupted)


cli.add_command(atlas)


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


def _loaded(case: str, charge: str | None, eps1: str | None, eps2: str | None, **_others: Any) -> Case:
    """The case with what the options replace."""
    loaded = load_case(case)
    if eps1 is not None or eps2 is not None:
        mapping = case_to_mapping(loaded)
        given = {"eps1": eps1, "eps2": eps2}
        mapping["background"] |= {key: value for key, value in given.items() if value is not None}
        loaded = case_from_mapping(mapping, where="command line")
    return loaded if charge is None else loaded.with_charge(read_charge(charge))


def _job(
    loaded: Case,
    *,
    no_tilt: bool,
    most_configurations: int,
    route: str = "auto",
    clusterwise: bool = True,
    **_others: Any,
) -> Job:
    return Job.prepare(
        loaded,
        allow_tilt=not no_tilt,
        most_configurations=most_configurations,
        route=route,
        clusterwise=clusterwise,
    )


def _nested(loaded: Case, *, no_tilt: bool, most_configurations: int, **_others: Any) -> LimitResult:
    return nested_result(loaded, allow_tilt=not no_tilt, most_configurations=most_configurations)


@contextmanager
def _crew(job: Job, workers: int | None, cluster: str | None, keep: str | None) -> Iterator[Crew | None]:
    """Who does the work, by the options; None when it is done here and nothing is kept."""
    if cluster is None:
        crew = job.crew(workers=workers, keep=keep)
        with crew or nullcontext():
            yield crew
        return
    if workers is not None:
        raise InputError.single("a cluster has its own workers; leave one of --workers and --cluster out", "--workers")
    with cluster_hands(cluster) as hands:
        crew = job.crew(executor=hands, keep=keep)
        with crew or nullcontext():
            yield crew


def _collect(
    job: Job, items: Iterable[Item], charge_of: Callable[[Item], Charge], crew: Crew | None = None
) -> tuple[list[Item], bool]:
    """Everything that was finished, and whether Ctrl-C came in between. Shows progress on a terminal."""
    found: list[Item] = []
    line = _Line()
    total = len(job.case.charges)
    costs = [job.cost(charge) for charge in job.case.charges]
    start = time.monotonic()
    if crew is not None:
        crew.watch = lambda progress: line.show(_chunks_text(progress))
    try:
        for item in items:
            found.append(item)
            if crew is None:
                done = sum(costs[: len(found)])
                left = (time.monotonic() - start) * (sum(costs) - done) / done
                line.show(f"charge {charge_word(charge_of(item))}: {len(found)} of {total}{_left_text(left)}")
    except KeyboardInterrupt:
        kept = ""
        if crew is not None:
            crew.close()
            kept = f"; {crew.kept_text()}"
        line.clear()
        click.echo(f"interrupted: {len(found)} of {total} charges were finished and are printed{kept}", err=True)
        return found, True
    line.clear()
    return found, False


def _chunks_text(progress: Progress) -> str:
    left = "" if progress.seconds_left is None else _left_text(progress.seconds_left)
    return f"chunk {progress.done} of {progress.total}{left}"


def _left_text(seconds: float) -> str:
    """How long it will still take, in words; nothing where that is next to nothing."""
    whole = round(seconds)
    if whole < 2:
        return ""
    if whole < 120:
        return f", about {whole} s left"
    minutes = round(seconds / 60)
    return f", about {minutes} min left" if minutes < 120 else f", about {round(seconds / 3600)} h left"


class _Line:
    """One line on standard error that is written over and over; nothing unless that is a terminal."""

    def __init__(self) -> None:
        self._on = sys.stderr.isatty()
        self._width = 0

    def show(self, text: str) -> None:
        if self._on:
            click.echo("\r" + text.ljust(self._width), err=True, nl=False)
            self._width = len(text)

    def clear(self) -> None:
        if self._width:
            click.echo("\r" + " " * self._width + "\r", err=True, nl=False)
            self._width = 0


ResultType = TypeVar("ResultType", bound=Result)


def _finish(result: ResultType, write: Callable[[ResultType], str], as_json: bool, interrupted: bool) -> int:
    click.echo(to_json(result) if as_json else write(result), nl=False)
    return INTERRUPTED if interrupted else result.exit_status


def _fail(error: RatomegaError, as_json: bool) -> int:
    given = error if isinstance(error, InputError) else InputError.single(str(error))
    if as_json:
        click.echo(json.dumps(error_document(given), indent=1, ensure_ascii=False))
    for problem in given.problems:
        click.echo(f"ratomega: {problem.text()}", err=True)
    return error.exit_status


cli.add_command(report_command(loaded=_loaded))
cli.add_command(average_command(common=_common, probes=_probes, job=_job, collect=_collect, finish=_finish))


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
