"""The public names, and what an import costs: neither the command line nor a worker reads what it does not use."""

from __future__ import annotations

import subprocess
import sys

import pytest

import ratomega
from ratomega import api


def loaded_by(statement):
    code = f"import sys; {statement}; print(*sys.modules)"
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    return set(run.stdout.split())


def test_every_public_name_is_there_and_listed():
    assert ratomega.__all__ == ["__version__", *api.__all__]
    for name in api.__all__:
        assert getattr(ratomega, name) is getattr(api, name)
        assert name in dir(ratomega)


def test_a_name_that_is_not_public_is_refused():
    with pytest.raises(AttributeError, match="module 'ratomega' has no attribute 'cluster_graph'"):
        _ = ratomega.cluster_graph


def test_a_star_import_gives_the_public_names():
    assert "ratomega.api" in loaded_by("from ratomega import *; load_case; to_json; __version__")


@pytest.mark.parametrize("statement", ["import ratomega", "import ratomega.cli.main"])
def test_nothing_heavy_is_imported_before_it_is_asked_for(statement):
    heavy = {"ratomega.api", "ratomega.chain.pipeline", "numpy", "sympy", "networkx", "matplotlib"}
    assert not loaded_by(statement) & heavy


def test_a_worker_imports_what_chunks_need_and_no_more():
    loaded = loaded_by("import ratomega.workers.charges, ratomega.workers.primes")
    assert not loaded & {"ratomega.api", "ratomega.desk", "ratomega.validator.checklist", "sympy", "networkx"}


def test_a_first_use_from_python_brings_the_representations_for_notebooks():
    assert "ratomega.desk.notebook" in loaded_by("import ratomega; ratomega.Case")
