"""Cut into chunks, sent through pickle, put together again: the direct sum as before, every cluster of it.

The direct sum itself is compared with the plain reference elsewhere.
"""

from __future__ import annotations

import pickle
from dataclasses import replace
from itertools import pairwise

import pytest
from building import make_case
from census import census

import ratomega
from ratomega.chain.job import Job
from ratomega.diagrams.tuples import count_configurations
from ratomega.errors import InputError, PathError, Problem, WorkerError
from ratomega.exact.laurent import Laurent
from ratomega.regulator.direct import ChargeSum, ClusterSum, direct_sum, merged
from ratomega.weights import Weights
from ratomega.workers import charges
from ratomega.workers.charges import SumChunk, charge_limits, cut
from ratomega.workers.chunks import run_chunk
from ratomega.workers.texts import read_list, series_from, sum_data, sum_from, written

QUIVER = make_case(
    "1",
    "1",
    [{"coulomb": ["1/3", "1/3"], "fundamental": ["1/7"]}, {"coulomb": ["2/7"], "adjoint": ["1/5"]}],
    charge=[2, 3],
    edges=[(1, 2, "1/9")],
)
RESONANT = make_case("1", "1", [{"coulomb": ["1", "-1"], "antifundamental": ["1/2"]}], charge=4)


def pieces_of(case, **options):
    job = Job.prepare(case)
    wanted = {"last": 0, "probes": 2, "always_probe": False} | options
    return [piece for chunk in cut(case, job.setting, **wanted) for piece in chunk.pieces]


@pytest.mark.parametrize("target", [1e-9, 2e-3, 10.0])
@pytest.mark.parametrize("case", [QUIVER, RESONANT], ids=["quiver", "resonant"])
def test_every_configuration_is_in_one_piece(monkeypatch, case, target):
    monkeypatch.setattr(charges, "TARGET", target)
    seen = {}
    for piece in pieces_of(case, always_probe=True):
        assert piece.first == seen.get((piece.charge, piece.path), 0)
        assert piece.stop > piece.first
        seen[piece.charge, piece.path] = piece.stop
    ranks = case.theory.ranks
    assert seen == {(c, path): count_configurations(ranks, c) for c in case.charges for path in range(3)}


def test_further_paths_are_cut_where_they_are_needed():
    paths = {piece.charge: piece.path for piece in pieces_of(RESONANT)}
    assert paths == {(0,): 0, (1,): 2, (2,): 2, (3,): 2, (4,): 2}


def test_chunks_are_of_the_size_that_was_asked():
    """Forecasts only; nothing is summed. A hundred thousand configurations, and a thousand tiny charges."""
    large = make_case("1", "1", [{"coulomb": ["3/11", "-3/11"]}], charge=24)
    many = make_case("1", "1", [{"name": f"x{n}", "coulomb": ["1/3"]} for n in range(4)], charge=9)
    for case in (large, many):
        chunks = cut(case, Job.prepare(case).setting, last=0, probes=0, always_probe=False)
        assert all(chunk.cost <= charges.TARGET for chunk in chunks)
        assert all(chunk.cost > charges.TARGET / 4 for chunk in chunks[:-1])
        assert len(pickle.dumps(chunks[len(chunks) // 2])) < 20_000


def test_a_higher_charge_goes_on_with_the_same_chunks():
    low, high = (cut(c, Job.prepare(c).setting, last=0, probes=0, always_probe=False) for c in (
        make_case("1", "1", [{"coulomb": ["3/11", "-3/11"]}], charge=k) for k in (14, 15)
    ))
    assert [c.key() for c in low[:-1]] == [c.key() for c in high[: len(low) - 1]]
    assert low[0].case == high[0].case


def test_names_and_titles_are_not_in_the_way():
    one = ratomega.load_case("b1-four-flavours")
    two = replace(one, title="something else")
    chunks = [cut(c, Job.prepare(c).setting, last=0, probes=0, always_probe=False) for c in (one, two)]
    assert chunks[0] == chunks[1]


# ---- the same sums


def by_chunks(case, *, last=0, probes=2, always_probe=False):
    job = Job.prepare(case)
    chunks = cut(case, job.setting, last=last, probes=probes, always_probe=always_probe)
    texts = [run_chunk(pickle.loads(pickle.dumps(chunk))) for chunk in chunks]
    further = [weights.setting for weights in job.probes(probes)]
    return list(charge_limits(job.setting, further, chunks, texts))


def check_same(case, **options):
    job = Job.prepare(case)
    asked = {"probes": 2} | options
    plain = list(job.limits(terms=asked.pop("last", None), **asked))
    found = by_chunks(case, **options)
    assert found == plain
    for one, other in zip(found, plain, strict=True):
        assert list(one.sum.clusters) == list(other.sum.clusters)


@pytest.mark.parametrize("target", [1e-9, 1e-2])
def test_limits_by_chunks_on_quivers_and_resonances(monkeypatch, target):
    monkeypatch.setattr(charges, "TARGET", target)
    check_same(QUIVER, last=2)
    check_same(QUIVER, always_probe=True)
    check_same(RESONANT, last=1)


# A mass that meets a content, a soft adjoint, a tilted node, three colours, a negative ratio: all that the census has.
@pytest.mark.parametrize("entry", census(), ids=str)
def test_parts_of_the_census_merge_exactly(entry):
    charge = (min(entry.top, 4),)
    whole = direct_sum(entry.weights, charge, last=1, sinks=True)
    n = whole.configurations
    for edges in ([0, n // 3, n // 3 + 1, n], [*range(0, n, 7), n]):
        parts = [range(a, b) for a, b in pairwise(edges)]
        sums = [direct_sum(entry.weights, charge, last=1, sinks=True, part=part) for part in parts]
        sums = [sum_from(read_list(written(sum_data(one))), charge) for one in sums]
        found = merged(sums)
        assert found == whole
        assert list(found.clusters) == list(whole.clusters)


def test_clusters_that_are_uneven_stay_so():
    """There are none among the sums, by a theorem; the certificate checks it, so that merging must not hide one."""
    series = Laurent.from_coefficients(-1, [1, 2], precision=1)
    one = ClusterSum(3, 2, 1, 2, None, series)
    two = ClusterSum(4, 1, 0, 1, False, series)
    parts = [ChargeSum((2,), series, {((0, 1),): cluster}, 5, 2, 1, 2) for cluster in (one, two)]
    for order in (parts, parts[::-1]):
        found = merged(order)
        assert found.clusters == {((0, 1),): ClusterSum(7, 2, 0, 3, False, series + series)}
        assert (found.configurations, found.singular, found.indeterminate, found.worst_order) == (10, 4, 2, 2)
        assert found.series == series + series


# ---- what is refused


def first_chunk():
    return cut(RESONANT, Job.prepare(RESONANT).setting, last=0, probes=1, always_probe=False)[0]


def test_another_version_of_the_program_is_refused():
    chunk = replace(first_chunk(), stamp="ratomega 0.0.1, scheme 1")
    with pytest.raises(WorkerError, match=r"scheme 1.*ratomega 0\.0\.1"):
        run_chunk(chunk)


def test_a_result_of_other_pieces_is_refused():
    chunk = first_chunk()
    text = run_chunk(chunk)
    less = SumChunk(chunk.case, chunk.last, chunk.pieces[:-1], chunk.cost)
    with pytest.raises(WorkerError, match="pieces"):
        less.read(text)
    own = next(n for n, piece in enumerate(chunk.pieces) if piece.path == 0 and piece.stop > 1)
    longer = list(chunk.pieces)
    longer[own] = replace(longer[own], stop=longer[own].stop + 1)
    with pytest.raises(WorkerError, match="in place of"):
        replace(chunk, pieces=tuple(longer)).read(text)


@pytest.mark.parametrize(
    "text",
    ["", "{}", "[" * 100_000, "[1,2]", "null", '[[0,1,["1/0"]]]', "[[0,1,[0.5]]]", '[[0,1,["2/4"]]]', "[[true,1,[]]]"],
)
def test_texts_that_are_no_sums_are_refused(text):
    chunk = replace(first_chunk(), pieces=first_chunk().pieces[1:3])
    with pytest.raises(WorkerError, match="cannot be read"):
        chunk.read(text)
    with pytest.raises(ValueError):  # noqa: PT011 - which part of the text is wrong is no matter here
        series_from(read_list(text)[0])


def test_series_must_be_canonical():
    assert str(series_from([-1, 2, ["1", "0", "1/2"]])) == "1*t^-1 + 1/2*t^1 + O(t^2)"
    for data in ([-1, 2, ["0", "1"]], [-1, 2, ["1", "0"]], [0, 0, ["1"]], [0, 2, []]):
        with pytest.raises(ValueError, match="canonical"):
            series_from(data)


@pytest.mark.parametrize("kind", [InputError, PathError])
def test_errors_cross_processes_with_their_problems(kind):
    error = kind([Problem("one", "here"), Problem("two")])
    back = pickle.loads(pickle.dumps(error))
    assert type(back) is kind
    assert back.problems == error.problems
    assert str(back) == str(error)


def test_weights_are_made_from_the_canonical_text_alone():
    """The setting that a worker builds is the one of the job, tilts included."""
    for case in (QUIVER, RESONANT):
        job = Job.prepare(case)
        text = cut(case, job.setting, last=0, probes=1, always_probe=True)[0].case
        assert charges._weights(text, 0).setting == job.setting
        assert [charges._weights(text, n).setting for n in (1, 2)] == [w.setting for w in job.probes(2)]
        assert isinstance(charges._weights(text, 0), Weights)
