"""Values show themselves in a notebook: the representation is asked for as a notebook does, without one."""

from __future__ import annotations

import html

import pytest
from hostile import hostile_case
from page_reading import check_page

import ratomega
from ratomega.desk.notebook import REPRESENTATIONS, register


@pytest.fixture(scope="module")
def values():
    case = ratomega.load_case(hostile_case())
    found, limit = ratomega.detect(case, exchanges=4), ratomega.limit(case)
    checks = ratomega.validate(ratomega.load_case("u1-pure").with_charge(2))
    singular = [s for report in found.charges for s in report.singular_configurations]
    clusters = [c for report in found.charges for c in report.clusters]
    return [case, limit, limit[2, 0], found, found[2, 0], clusters[0], singular[0], checks, checks.checks[0],
            ratomega.atlas(case), ratomega.approach("u1-pure", offsets=["1e-2"]), ratomega.average(case, of="size"),
            ratomega.block("ising-energy"), ratomega.grid("free-momentum", {"a": "0 to i in 3"})]


def test_every_type_of_the_table_shows_itself(values):
    assert {type(value) for value in values} == set(REPRESENTATIONS)
    for value in values:
        page = check_page(value._repr_html_())
        assert all("id" not in attributes for _, attributes in page.elements)
        assert page.named("script") == page.named("link") == []


def test_representations_hold_what_they_show(values):
    case, limit, coefficient, found, report, cluster, singular, checks, check, atlas, near, average, block, grid = (
        value._repr_html_() for value in values
    )
    assert all(html.escape(values[0].title) in text for text in (case, limit, found))
    assert values[0].hash in case
    assert str(values[1][2, 0].value) in limit
    assert str(values[2].value) in coefficient
    assert report.count("<figure>") == len(values[4].clusters)
    assert f"order {values[5].order}, {values[5].size} member" in cluster
    assert singular.count('class="guilty"') >= 1
    assert html.escape(values[7].summary) in checks
    assert html.escape(values[8].evidence) in check
    assert f"{len(values[9].ratios)} ratios" in atlas
    assert "charge 2, order 1" in near
    assert html.escape(values[0].title) in average
    assert html.escape(ratomega.load_case("ising-energy").title) in block
    assert "1/2*sqrt(-1),1,-11/30," in grid


def test_results_do_not_know_the_desk(values):
    """The method is entered from above, once; entering it again changes nothing."""
    before = values[1]._repr_html_()
    register()
    assert values[1]._repr_html_() == before


def test_a_report_stands_in_a_frame_that_runs_nothing():
    case = {"charge": 1, "title": '"><script>', "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["0"]}]}
    made = ratomega.report(case)
    text = made._repr_html_()
    assert text.startswith("<iframe ")
    assert 'sandbox=""' in text
    assert text.count("<") == 2
    assert html.escape(made.html) in text


def test_a_picture_shows_itself():
    assert ratomega.draw((((1,),),))._repr_svg_().startswith('<svg xmlns="http://www.w3.org/2000/svg"')
