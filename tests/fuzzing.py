"""What the fuzzers share: how many examples they try, and what counts as one clear sentence.

By default a fuzzer tries a fixed number of examples, the same ones in every run; ``-m "fuzz and long"`` tries LONGER
times as many, other ones every time. A failure is shown with the smallest input that makes it.
"""

from __future__ import annotations

import re
import signal
from contextlib import contextmanager
from dataclasses import dataclass

import pytest
from hypothesis import HealthCheck, given, settings

from ratomega.errors import InputError

LONGER = 50
# No input below comes near it. An endless loop becomes a failure that shows its input, not a run that never ends.
PATIENCE = 60
LONGEST_SENTENCE = 700

# Names of Python's own exceptions and what goes with them: a person cannot do anything with those.
_UNCLEAR = ("Traceback", "Error", "Exception", "NoneType", "object at 0x", "<class", "not subscriptable", "unhashable")


@dataclass(frozen=True, slots=True)
class Search:
    """Called with some work and a strategy, does the work on examples of it."""

    examples: int
    fresh: bool

    def __call__(self, work, strategy):
        def bounded(example):
            with patience():
                work(example)

        how = settings(
            max_examples=self.examples,
            deadline=None,
            derandomize=not self.fresh,
            database=None,
            print_blob=self.fresh,
            suppress_health_check=list(HealthCheck),
        )
        how(given(strategy)(bounded))()


def searches(examples):
    """The argument ``search`` of a fuzzer: so many examples by default, LONGER times as many in the long run."""
    usual, long = Search(examples, fresh=False), Search(LONGER * examples, fresh=True)
    return pytest.mark.parametrize("search", [usual, pytest.param(long, marks=pytest.mark.long)], ids=["usual", "long"])


@contextmanager
def patience():
    def give_up(_signal, _frame):
        raise AssertionError(f"no end after {PATIENCE} seconds")

    before = signal.signal(signal.SIGALRM, give_up)
    signal.alarm(PATIENCE)
    try:
        yield
    finally:
        signal.alarm(0)
        signal.signal(signal.SIGALRM, before)


def clear(sentence):
    """Raises ``AssertionError`` unless this is one line that a person can read."""
    assert sentence
    assert sentence.isprintable(), ascii(sentence)
    assert len(sentence) <= LONGEST_SENTENCE, sentence
    # What somebody typed stands in quotes, and may be anything.
    ours = re.sub(r'".*"', "", sentence)
    assert not any(word in ours for word in _UNCLEAR), sentence


def outcome(work, *arguments, at="", **options):
    """What ``work`` gives, or the ``InputError`` that it raised; everything else goes through.

    Every problem is a clear sentence, and its place begins with ``at``.
    """
    try:
        return work(*arguments, **options)
    except InputError as error:
        refused = error
    assert refused.problems
    for problem in refused.problems:
        clear(problem.message)
        assert problem.where.isprintable(), ascii(problem.where)
        assert problem.where.startswith(at), problem
    return refused
