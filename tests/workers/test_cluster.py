"""A real dask cluster of two worker processes."""

from __future__ import annotations

import distributed
import pytest
from building import make_case

import ratomega
from ratomega.chain.job import Job
from ratomega.chain.pipeline import limit_result
from ratomega.errors import InputError
from ratomega.regulator import routes
from ratomega.workers import charges, primes
from ratomega.workers.cluster import cluster_hands

CASE = make_case("1", "1", [{"coulomb": ["1", "-1"], "antifundamental": ["1/2"]}], charge=4)


@pytest.fixture(scope="module")
def cluster():
    with distributed.LocalCluster(
        n_workers=2, threads_per_worker=1, processes=True, dashboard_address=":0", silence_logs=40
    ) as cluster:
        yield cluster


@pytest.fixture(scope="module")
def plain():
    return ratomega.to_json(ratomega.limit(CASE))


@pytest.fixture(autouse=True)
def _small_chunks(monkeypatch):
    monkeypatch.setattr(charges, "TARGET", 5e-3)


def test_the_executor_of_a_client(cluster, plain):
    with distributed.Client(cluster, set_as_default=False) as client:
        assert len(client.nthreads()) == 2
        with client.get_executor() as executor:
            assert ratomega.to_json(ratomega.limit(CASE, executor=executor)) == plain
            assert ratomega.to_json(ratomega.limit(CASE, executor=executor, workers=2)) == plain
            # It is still the caller's.
            assert executor.submit(abs, -3).result() == 3


def test_short_cuts_on_a_cluster(cluster, monkeypatch):
    monkeypatch.setattr(primes, "portion", lambda task: 3)
    monkeypatch.setattr(routes, "CLUSTERWISE", 20)
    case = make_case("1", "2", [{"coulomb": ["1/3", "-1/5"]}], charge=10)
    with distributed.Client(cluster, set_as_default=False) as client, client.get_executor() as executor:
        for route in ("direct", "poles"):
            alone = ratomega.limit(case, route=route)
            assert alone.route.primes > 6
            assert ratomega.to_json(ratomega.limit(case, route=route, executor=executor)) == ratomega.to_json(alone)


def test_the_address_of_a_scheduler(cluster, plain, tmp_path):
    job = Job.prepare(CASE)
    for _ in range(2):
        with (
            cluster_hands(cluster.scheduler_address) as hands,
            job.crew(executor=hands, keep=tmp_path / "kept") as crew,
        ):
            found = list(job.limits(probes=3, crew=crew))
        assert ratomega.to_json(limit_result(job, found)) == plain
    with distributed.Client(cluster, set_as_default=False) as client:
        assert len(client.nthreads()) == 2


def test_a_cluster_without_workers_is_refused():
    with (
        distributed.LocalCluster(n_workers=0, dashboard_address=":0", silence_logs=40) as empty,
        pytest.raises(InputError, match="has no workers"),
        cluster_hands(empty.scheduler_address),
    ):
        pass


def test_without_dask_the_extra_is_named(monkeypatch):
    def absent(name):
        raise ModuleNotFoundError(name)

    monkeypatch.setattr("ratomega.workers.cluster.importlib.import_module", absent)
    with pytest.raises(InputError, match=r"pip install 'ratomega\[cluster\]'"), cluster_hands("tcp://127.0.0.1:1"):
        pass
