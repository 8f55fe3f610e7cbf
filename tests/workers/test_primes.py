"""Short cuts cut by primes, in this process: what a batch holds, the same answers, and every wrong batch refused.

The residues of a batch are compared with those of the plain reference; for the recursion, with its exact series. Whole
runs with workers stand in ``test_short_cuts``.
"""

from __future__ import annotations

import json
import pickle
from dataclasses import replace
from itertools import islice

import numpy as np
import plain
import pytest
from building import make_case, plain_theory
from flint import fmpq

import ratomega
from ratomega.case.setting import own_setting
from ratomega.chain.job import Job
from ratomega.chain.pipeline import limit_result
from ratomega.errors import RatomegaError, WorkerError
from ratomega.exact.batches import Batch, ResidueStream, computed, here
from ratomega.exact.residues import Moduli, PrimeSource, residues_of
from ratomega.regulator import routes
from ratomega.regulator.fast.sums import fast_sum, prepare
from ratomega.regulator.poles.problem import case_problem
from ratomega.regulator.poles.recursion import pole_coefficients, pole_functions
from ratomega.regulator.routes import residue_task
from ratomega.workers import primes
from ratomega.workers.chunks import run_chunk
from ratomega.workers.crew import Crew
from ratomega.workers.hands import ThisProcess
from ratomega.workers.primes import PrimeChunk, cut_primes, portion, prime_supplier
from ratomega.workers.store import Store
from ratomega.workers.texts import batch_data, batch_from, canonical_text, written

BAD = PrimeSource(23).take(2)[1]
"""A prime that the limit of two colours meets, and that is bad where it divides a denominator."""

CASES = {
    "two colours, limit": ("2", ["3/11", "-3/11"], {"antifundamental": ["1/3"]}, 5),
    "two colours, no limit": ("-2/3", ["3/11", "-2/7"], {"adjoint": ["2/9"]}, 4),
    "three colours, limit": ("1", ["3/11", "-2/7", "1/13"], {"fundamental": ["1/2"]}, 3),
    "three colours, no limit": ("103/71", ["3/11", "-2/7", "1/13"], {}, 3),
    "two colours, numbers beyond Q": ("1", ["i/2", "1/3"], {"antifundamental": ["1 + 2*i/3"]}, 4),
}


def case_of(name):
    ratio, coulomb, matter, charge = CASES[name]
    return make_case("1", ratio, [{"coulomb": coulomb, **matter}], charge=charge)


def u2(charge, *, eps2="1", coulomb=("3/11", "-3/11"), **matter):
    return make_case("1", eps2, [{"coulomb": list(coulomb), **matter}], charge=charge)


@pytest.fixture(autouse=True)
def _fast_sums_of_small_cases(monkeypatch):
    """The rule takes them from 1500 configurations on, where every batch takes a tenth of a second."""
    monkeypatch.setattr(routes, "CLUSTERWISE", 20)


@pytest.fixture
def small(monkeypatch):
    """Three primes a chunk."""
    monkeypatch.setattr(primes, "portion", lambda task: 3)


def chunks_of(case, name, charge, stages=(7, 4), number=6):
    return list(islice(cut_primes(canonical_text(case), residue_task(name, case, charge), stages)[0], number))


# ---- what a batch holds


@pytest.mark.parametrize("name", CASES)
def test_batches_of_the_fast_sums_are_residues_of_the_plain_values(small, name):
    case = case_of(name)
    setting = own_setting(case)
    powers = [plain.laurent_coefficient(plain_theory(setting), (k,)) for k in range(case.charge + 1)]
    setup = prepare(setting)
    # Of both parts where the numbers have two.
    values = []
    for k, p in enumerate(powers):
        value = p.get(0, fmpq(0))
        parts = [value]
        if setup.radicand:
            pair = plain.Pair(0, 0, setup.radicand) + value
            parts = [pair.x, pair.y]
        values += [part / setup.rescaled(fmpq(1), k) for part in parts]
    for chunk in chunks_of(case, "fast", case.charge):
        batch = chunk.read(run_chunk(pickle.loads(pickle.dumps(chunk))))
        assert (batch.primes, batch.bad) == (chunk.primes, ())
        moduli = Moduli.make(batch.primes)
        wanted = residues_of(values, moduli).reshape(batch.values.shape)
        assert not moduli.reduce(batch.values - wanted).any()


@pytest.mark.parametrize("name", ["poles", "poles at the point"])
def test_batches_of_the_recursion_are_residues_of_its_exact_series(small, name):
    case = u2(6, antifundamental=["1/3", "2/5"])
    problem = case_problem(case)
    functions = pole_functions(problem, 6, exact=True).functions
    task = residue_task(name, case, 6)
    for chunk in chunks_of(case, name, 6):
        batch = chunk.read(run_chunk(pickle.loads(pickle.dumps(chunk))))
        moduli = Moduli.make(batch.primes)
        if name == "poles at the point":
            wanted = residues_of([f.at(problem.square) for f in functions], moduli)
        else:
            terms = [{(t.square, t.power): t.coefficient for t in f.terms} for f in functions]
            wanted = residues_of([t.get(key, fmpq(0)) for t in terms for key in task.engine.layout.keys], moduli)
        assert not moduli.reduce(batch.values - wanted.reshape(batch.values.shape)).any()


def test_no_short_cut_has_another_task():
    with pytest.raises(ValueError, match="no short cut has a task"):
        residue_task("direct", u2(3), 3)


# ---- how it is cut


def test_chunks_hold_all_primes_in_order():
    case = u2(12)
    for name, bits in (("fast", 23), ("poles", 21)):
        chunks = chunks_of(case, name, 12, (50, 30), 20)
        together = [p for chunk in chunks for p in chunk.primes]
        assert tuple(together) == PrimeSource(bits).take(len(together))
        assert len({chunk.key() for chunk in chunks}) == 20
        assert chunks == chunks_of(replace(case, title="another", charge=3), name, 12, (50, 30), 20)


@pytest.mark.parametrize(("route", "charge", "eps2"), [("direct", 24, "1"), ("direct", 26, "-1"), ("poles", 60, "1")])
def test_chunks_are_of_the_size_that_was_asked(route, charge, eps2):
    """Forecasts only; nothing is computed."""
    case = u2(charge, eps2=eps2)
    task = residue_task("fast" if route == "direct" else route, case, charge)
    chunks, foreseen = cut_primes(canonical_text(case), task, (400,))
    some = list(islice(chunks, foreseen + 5))
    assert all(0.2 < chunk.cost < 3 for chunk in some[:foreseen])
    assert all(len(chunk.primes) <= task.largest for chunk in some)
    assert len(pickle.dumps(some[0])) < 3000


def test_the_portion_fits_the_memory():
    for name, charge in (("fast", 14), ("fast", 3), ("poles", 12)):
        task = residue_task(name, u2(charge), charge)
        assert 1 <= portion(task) <= task.largest


# ---- the same answers


def run(case, *, route, keep=None, **options):
    """By a crew in this process."""
    job = Job.prepare(case, route=route)
    with Crew(ThisProcess(), None if keep is None else Store.open(keep, case)) as crew:
        found = list(job.limits(probes=0, crew=crew, **options))
    return ratomega.to_json(limit_result(job, found))


BAD_PARAMETER = {"coulomb": (f"1/{BAD}", f"-3/{BAD}")}


@pytest.mark.parametrize("certify", [False, True])
@pytest.mark.parametrize(
    ("case", "route"),
    [
        (u2(7), "direct"),
        (u2(7, eps2="-3/4", antifundamental=["1/2"]), "direct"),
        (make_case("1", "1", [{"coulomb": ["1/3", "1/7", "0"]}], charge=4), "direct"),
        (u2(5, **BAD_PARAMETER), "direct"),
        (u2(12), "poles"),
        (u2(10, eps2="-2/3", adjoint=["2/7"]), "poles"),
        (u2(9, coulomb=(f"1/{PrimeSource(21).take(1)[0]}", "0")), "poles"),
    ],
)
def test_the_bytes_do_not_depend_on_the_batches(monkeypatch, case, route, certify):
    expected = ratomega.to_json(ratomega.limit(case, route=route, certify=certify))
    assert json.loads(expected)["route"]["primes"] > 1
    for most in (11,) if certify else (3, 40):
        monkeypatch.setattr(primes, "portion", lambda task, most=most: most)
        assert run(case, route=route, certify=certify) == expected


def test_a_bad_prime_is_found_and_left_out():
    """The cases above do meet one."""
    found = computed(residue_task("fast", u2(4, **BAD_PARAMETER), 4), PrimeSource(23).take(3))
    assert found.bad == (BAD,)


def test_too_low_an_estimate_changes_the_primes_alike(small, monkeypatch):
    """Most batches then lie beyond what was foreseen."""
    monkeypatch.setattr("ratomega.regulator.fast.sums.bits_needed", lambda *_: 1)
    case = u2(7)
    assert run(case, route="direct") == ratomega.to_json(ratomega.limit(case, route="direct"))


# ---- what is kept


@pytest.fixture
def runs(monkeypatch):
    """Keys of the chunks that are run in this process."""
    keys = []
    real = PrimeChunk.run

    def counted(self):
        keys.append(self.key())
        return real(self)

    monkeypatch.setattr(PrimeChunk, "run", counted)
    return keys


@pytest.mark.parametrize(("case", "route"), [(u2(6), "direct"), (u2(12), "poles")], ids=["fast", "poles"])
def test_finished_batches_are_not_done_again(small, runs, tmp_path, case, route):
    expected = ratomega.to_json(ratomega.limit(case, route=route))
    job = Job.prepare(case, route=route)

    def stop(progress):
        if progress.done == 2:
            raise KeyboardInterrupt

    with (
        pytest.raises(KeyboardInterrupt),
        Crew(ThisProcess(), Store.open(tmp_path / "kept", case), stop) as crew,
    ):
        list(job.limits(probes=0, crew=crew))
    assert len(runs) == 2
    assert run(case, route=route, keep=tmp_path / "kept") == expected
    whole = list(runs)
    # Not one batch is repeated, and with all of them kept nothing is computed.
    assert len(whole) == len(set(whole)) > 2
    assert run(case, route=route, keep=tmp_path / "kept") == expected
    assert runs == whole
    certified = ratomega.to_json(ratomega.limit(case, route=route, certify=True))
    assert run(case, route=route, certify=True, keep=tmp_path / "kept") == certified
    further = runs[len(whole) :]
    assert further
    if route == "direct":
        # A proof goes on from the same batches.
        assert not set(further) & set(whole)
    higher = replace(case, charge=case.charge + 1)
    assert run(higher, route=route, keep=tmp_path / "kept") == ratomega.to_json(ratomega.limit(higher, route=route))


def test_sums_and_batches_share_a_file(small, tmp_path):
    """The sum cluster by cluster, the fast sums and the recursion of one case."""
    case = u2(9)
    low = replace(case, charge=2)
    for one, options in ((low, {"route": "direct"}), (case, {"route": "direct"}), (case, {"route": "poles"})):
        expected = ratomega.to_json(ratomega.limit(one, **options))
        for _ in range(2):
            assert ratomega.to_json(ratomega.limit(one, keep=tmp_path / "kept", **options)) == expected


# ---- faults


def faulty(spoil):
    """A supplier whose batches went through ``spoil(number of the first prime, batch)``: three primes each, and later
    more, so that a search that is in vain comes to its end."""

    def supplier(task, stages):
        source, begin = PrimeSource(task.bits), 0

        def further(_):
            nonlocal begin
            size, first = 3 if begin < 12 else 24, begin
            begin += size
            return spoil(first, computed(task, source.take(size)))

        return further

    return supplier


def off_by_one(prime, *where):
    """One residue modulo the prime of this number is wrong."""

    def spoil(first, batch):
        if first <= prime < first + len(batch.primes):
            batch.values[prime - first, *where] += 1
        return batch

    return spoil


def swapped(first, batch):
    """The residues of two primes are exchanged."""
    values = batch.values[[1, 0, 2]] if first == 3 else batch.values
    return Batch(batch.primes, batch.bad, values)


def constant(first, batch):
    """A worker that always answers the same."""
    return Batch(batch.primes, batch.bad, np.ones_like(batch.values) if first == 3 else batch.values)


NEGATIVE = u2(5, eps2="-3/4")


@pytest.mark.parametrize("spoil", [off_by_one(1, 3), off_by_one(3, 5), swapped, constant, "the last prime"])
def test_a_wrong_batch_of_a_fast_sum_is_refused(spoil):
    setting = own_setting(NEGATIVE)
    right = fast_sum(setting, 5)
    assert right.primes > 6
    if spoil == "the last prime":
        spoil = off_by_one(right.primes - 1, 4)
    assert fast_sum(setting, 5, supplier=faulty(lambda _, batch: batch)) == right
    with pytest.raises(RatomegaError, match="no fraction fits the residues"):
        fast_sum(setting, 5, supplier=faulty(spoil))


def test_a_wrong_batch_beyond_is_refuted_by_the_proof():
    setting = own_setting(NEGATIVE)
    found, proved = fast_sum(setting, 5), fast_sum(setting, 5, certify=True)
    assert proved.primes > found.primes
    for prime in (found.primes, proved.primes - 1):
        with pytest.raises(RatomegaError, match="refuted by further primes"):
            fast_sum(setting, 5, certify=True, supplier=faulty(off_by_one(prime, 4)))


@pytest.mark.parametrize("spoil", [off_by_one(3, 9, 2), swapped, "the last prime"])
def test_a_wrong_batch_of_the_recursion_is_refused(spoil):
    problem = case_problem(u2(9))
    right = pole_coefficients(problem, 9)
    if spoil == "the last prime":
        spoil = off_by_one(right.primes - 1, 4, 1)
    assert pole_coefficients(problem, 9, supplier=faulty(lambda _, batch: batch)) == right
    with pytest.raises(RatomegaError, match="no fraction fits the residues"):
        pole_coefficients(problem, 9, supplier=faulty(spoil))


def test_a_good_prime_that_is_called_bad_costs_a_prime_and_no_digit():
    def spoil(first, batch):
        return Batch(batch.primes[1:], batch.primes[:1], batch.values[1:]) if first == 3 else batch

    setting = own_setting(NEGATIVE)
    assert fast_sum(setting, 5, supplier=faulty(spoil)).coefficients == fast_sum(setting, 5).coefficients


def test_a_store_with_wrong_residues_is_refused(tmp_path):
    """With a sound checksum: somebody else's residues, or a broken machine's."""
    case = u2(7)

    def see(progress):
        raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt), Crew(ThisProcess(), Store.open(tmp_path / "kept", case), see) as crew:
        list(Job.prepare(case, route="direct").limits(probes=0, crew=crew))
    with Store.open(tmp_path / "kept", case) as kept:
        (key,) = kept.keys()
    wrong = computed(residue_task("fast", case, 7), json.loads(key)[2])
    wrong.values[0, 7] += 1
    with Store.open(tmp_path / "wrong", case) as store:
        store.put([(key, written(batch_data(wrong)))])
    with pytest.raises(RatomegaError, match="no fraction fits the residues"):
        ratomega.limit(case, route="direct", keep=tmp_path / "wrong")


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("", "Expecting value"),
        ("[[]]", "2 entries"),
        ('[[],"%"]', "base 64"),
        ('[[],"é"]', "base 64"),
        ('[[],"AAAA"]', "72 bytes"),
        ("[[],7]", "a text"),
        ('[[5],"AAAA"]', "bad primes"),
        ('[[true],"AAAA"]', "an integer"),
        ('[[],"' + "/" * 96 + '"]', "not smaller than its prime"),
    ],
)
def test_texts_that_are_no_batch_are_refused(small, text, said):
    (chunk,) = chunks_of(u2(5), "fast", 5, (3,), 1)
    with pytest.raises(WorkerError, match="cannot be read") as caught:
        chunk.read(text)
    assert said in str(caught.value)
    assert "(fast, charge 5, 3 primes from 8388593 to" in str(caught.value)


def test_a_prime_that_was_asked_twice_or_out_of_order_is_refused():
    values = batch_data(Batch((101,), (), np.array([[5.0]])))[1]
    assert batch_from([[103, 107], values], (101, 103, 107), (1,)).primes == (101,)
    for bad in ([107, 103], [103, 103]):
        with pytest.raises(ValueError, match="in their order"):
            batch_from([bad, values], (101, 103, 107), (1,))


def test_batches_by_a_crew_are_those_computed_here(small):
    case = u2(6)
    task = residue_task("fast", case, 6)
    with Crew(ThisProcess()) as crew:
        ours = ResidueStream(prime_supplier(case, crew)(task, (5,)))
        theirs = ResidueStream(here(task))
        for number in (1, 8, 4, 20):
            (p, x), (q, y) = ours.first(number), theirs.first(number)
            assert p == q
            assert not Moduli.make(p).reduce(x - y).any()
