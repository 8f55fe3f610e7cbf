"""What commands do alike: read the case, prepare the job, collect what is finished with progress, and print."""

from __future__ import annotations

import sys
import time
from collections.abc import Callable, Iterable, Iterator
from contextlib import contextmanager, nullcontext
from typing import Any, TypeVar

import click

from ratomega.case.case import Case
from ratomega.case.reading import case_from_mapping, case_to_mapping, load_case
from ratomega.chain.job import Job
from ratomega.chain.nesting import nested_result
from ratomega.cli.atlas import read_charge
from ratomega.desk.text import charge_word
from ratomega.diagrams.tuples import Charge
from ratomega.documents.results import Result, to_json
from ratomega.errors import INTERRUPTED, InputError
from ratomega.results.limits import LimitResult
from ratomega.workers.cluster import cluster_hands
from ratomega.workers.crew import Crew, Progress

__all__ = [
    "StatusLine",
    "collect",
    "crew_of",
    "finish",
    "loaded_case",
    "nested_limits_of",
    "one_form",
    "prepared_job",
]

Item = TypeVar("Item")


def loaded_case(case: str, charge: str | None, eps1: str | None, eps2: str | None, **_others: Any) -> Case:
    """The case with what the options replace."""
    loaded = load_case(case)
    if eps1 is not None or eps2 is not None:
        mapping = case_to_mapping(loaded)
        given = {"eps1": eps1, "eps2": eps2}
        mapping["background"] |= {key: value for key, value in given.items() if value is not None}
        loaded = case_from_mapping(mapping, where="command line")
    return loaded if charge is None else loaded.with_charge(read_charge(charge))


def prepared_job(
    loaded: Case,
    *,
    no_tilt: bool,
    most_configurations: int,
    route: str = "auto",
    clusterwise: bool = True,
    **_others: Any,
) -> Job:
    """The job of a case, by the options of its command."""
    return Job.prepare(
        loaded,
        allow_tilt=not no_tilt,
        most_configurations=most_configurations,
        route=route,
        clusterwise=clusterwise,
    )


def nested_limits_of(loaded: Case, *, no_tilt: bool, most_configurations: int, **_others: Any) -> LimitResult:
    """The limits of a case with u."""
    return nested_result(loaded, allow_tilt=not no_tilt, most_configurations=most_configurations)


@contextmanager
def crew_of(job: Job, workers: int | None, cluster: str | None, keep: str | None) -> Iterator[Crew | None]:
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


def collect(
    job: Job, items: Iterable[Item], charge_of: Callable[[Item], Charge], crew: Crew | None = None
) -> tuple[list[Item], bool]:
    """Everything that was finished, and whether Ctrl-C came in between. Shows progress on a terminal."""
    found: list[Item] = []
    line = StatusLine()
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
        printed = f"{len(found)} of {total} charges were finished and are printed"
        so_far = printed if found else f"none of {total} charges was finished"
        click.echo(f"interrupted: {so_far}{kept}", err=True)
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


class StatusLine:
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


def one_form(**asked: bool) -> None:
    """Raises ``InputError`` when more than one form of output was asked for."""
    named = [f"--{name}" for name, value in asked.items() if value]
    if len(named) > 1:
        raise InputError.single(f"one form of output at a time; leave all but one of {', '.join(named)} out", named[1])


def finish(result: ResultType, write: Callable[[ResultType], str], as_json: bool, interrupted: bool) -> int:
    """Print the result and give the exit status."""
    click.echo(to_json(result) if as_json else write(result), nl=False)
    return INTERRUPTED if interrupted else result.exit_status
