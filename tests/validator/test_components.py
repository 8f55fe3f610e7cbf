"""The checks on components: they hold, they catch a wrong component, they say what they did not do."""

from __future__ import annotations

from dataclasses import replace

import pytest
from building import make_case

from ratomega.case.setting import own_setting
from ratomega.detector.clusters import find_clusters
from ratomega.detector.geometry import Compactness
from ratomega.validator import components
from ratomega.validator.components import check_components
from ratomega.validator.verdict import Verdict
from ratomega.weights import Weights

GENERIC = ["1/7", "-3/11", "5/13"]


def checked(eps1, eps2, nodes, *, charge=4, edges=(), **options):
    case = make_case(eps1, eps2, nodes, charge=charge, edges=edges)
    return check_components(Weights(own_setting(case)), case.charges, **options)


@pytest.mark.parametrize(
    ("eps1", "eps2", "nodes"),
    [
        ("1", "1", [{"coulomb": GENERIC[:1]}]),
        ("1", "2", [{"coulomb": GENERIC[:2], "fundamental": ["1/3"]}]),
        ("1", "1", [{"coulomb": GENERIC}]),
        ("3", "-2", [{"coulomb": GENERIC[:2]}]),
        ("1", "1", [{"coulomb": GENERIC[:1]}, {"coulomb": GENERIC[:2]}]),
        ("1", "1", [{"coulomb": ["sqrt(2)", "0"]}]),
    ],
)
def test_both_hold_at_generic_parameters(eps1, eps2, nodes):
    """A. Buryak, B. Feigin 1206.5640; node by node and colour by colour a product."""
    cells, product = checked(eps1, eps2, nodes)
    assert (cells.verdict, product.verdict) == (Verdict.AGREES, Verdict.AGREES)
    assert product.source == "A. Buryak, B. Feigin, arXiv 1206.5640"


@pytest.mark.parametrize("shift", ["0", "1", "-1/2", "3/2"])
def test_on_the_lattice_the_product_is_left_out(shift):
    """eps1 : eps2 = 1 : 1/2 has the lattice of the multiples of 1/2."""
    (cells,) = checked("1", "1/2", [{"coulomb": [f"1/3 + {shift}", "1/3"]}])
    assert cells.verdict is Verdict.AGREES
    assert ("are not compact and have no polynomial" in cells.evidence) == (shift == "3/2")
    assert len(checked("1", "1/2", [{"coulomb": ["1/3 + 1/4", "1/3"]}])) == 2


def test_a_component_called_compact_that_is_not_is_refuted(monkeypatch):
    """T*P^1 at eps1 + eps2 = 0 and equal Coulomb parameters."""

    def claimed(*arguments):
        return tuple(replace(c, compactness=Compactness(True, "claimed")) for c in find_clusters(*arguments))

    monkeypatch.setattr(components, "find_clusters", claimed)
    (cells,) = checked("1", "-1", [{"coulomb": ["1/3", "1/3"]}], charge=1)
    assert cells.verdict is Verdict.REFUTED
    assert "2*q for Coulomb >> eps1 >> eps2" in cells.evidence


def test_a_dropped_cluster_is_refuted(monkeypatch):
    monkeypatch.setattr(components, "find_clusters", lambda *arguments: find_clusters(*arguments)[1:])
    _, product = checked("1", "1", [{"coulomb": GENERIC[:1]}], charge=3)
    assert product.verdict is Verdict.REFUTED
    assert "first difference at charge 0: found 0, product 1" in product.evidence


def test_work_is_bounded():
    cells, product = checked("1", "1", [{"coulomb": GENERIC[:2]}], charge=6, most=10)
    assert cells.verdict is product.verdict is Verdict.AGREES
    # 1 + 2 + 5 configurations, and 10 more would be too many.
    assert "up to charge 2 (more is too costly; --depth full allows more)" in product.evidence
    for check in checked("1", "1", [{"coulomb": GENERIC[:2]}], most=2):
        assert check.verdict is Verdict.UNDECIDED
        assert "more than 2 configurations at the first charge" in check.evidence
        assert "ask for it with --depth full" in check.evidence
