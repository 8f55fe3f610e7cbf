"""Drawn diagrams: boxes where the convention puts them, marks where factors vanish by the plain formula."""

from __future__ import annotations

import re
from itertools import pairwise

import plain
import pytest
from building import plain_theory
from page_reading import well_formed

import ratomega
from ratomega.case.setting import own_setting
from ratomega.desk.charts import approach_chart, atlas_chart, orders_chart
from ratomega.desk.cluster_pictures import MOST_MEMBERS, cluster_picture
from ratomega.desk.diagram_pictures import MOST_BOXES, diagrams_picture, marks_of, singular_picture
from ratomega.desk.plot_data import ApproachCurve, orders_of, stems_of
from ratomega.exact.rational import Rational

CELL = 18


def squares(svg, name):
    """The (row, column) of every box drawn with this class, in a picture of one diagram."""
    found = []
    for path in well_formed(svg).iter("{http://www.w3.org/2000/svg}path"):
        if path.get("class") == name:
            corners = re.findall(r"M([\d.]+) ([\d.]+)h", path.get("d"))
            found += [(1 + (float(y) - 1) / CELL, 1 + (float(x) - 1) / CELL) for x, y in corners]
    return sorted(found)


@pytest.mark.parametrize("diagram", [(1,), (3, 1), (2, 2, 1), (1, 1, 1, 1)])
def test_boxes_are_drawn_row_by_row(diagram):
    svg = diagrams_picture(((diagram,),)).svg(standalone=True).text
    assert squares(svg, "box") == sorted(plain.boxes(diagram))


def test_marks_are_where_factors_of_one_colour_vanish():
    """U(1) at eps1 = eps2 = 1: E = eps2 (A + 1) - eps1 L and eps - E box by box, and nothing else is in the weight."""
    case = {"charge": 5, "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["0"]}]}
    for report in ratomega.detect(case).charges:
        for s in report.singular_configurations:
            ((diagram,),) = s.diagrams
            expected = []
            for box in plain.boxes(diagram):
                value = plain.arm(diagram, box) + 1 - plain.leg(diagram, box)
                if value in (0, 2):
                    expected.append(box)
            assert squares(singular_picture(s).svg(standalone=True).text, "guilty") == sorted(expected)


@pytest.mark.parametrize("name", ["path-dependent", "surviving-pole", "three-nodes", "equal-coulomb"])
def test_marks_count_the_vanishing_factors_of_the_plain_reference(name):
    case = ratomega.load_case(name).with_charge(3)
    theory = plain_theory(own_setting(case))
    seen = 0
    for report in ratomega.detect(case).charges:
        for s in (*report.singular_configurations, *report.indeterminate_configurations):
            factors = list(plain.factors(theory, s.diagrams))
            marks = marks_of(s)
            assert sum(marks.down.values()) == sum(-e for f, e in factors if f.c == 0 and e < 0)
            assert sum(marks.up.values()) == sum(e for f, e in factors if f.c == 0 and e > 0)
            for node, colour, i, j in (*marks.down, *marks.up):
                assert (i, j) in plain.boxes(s.diagrams[node - 1][colour - 1])
            words = singular_picture(s).words
            assert "anishing denominators: box" in words
            seen += 1
    assert seen


def test_every_picture_is_well_formed_and_has_words():
    found = ratomega.detect("equal-coulomb", exchanges=MOST_MEMBERS)
    for report in found.charges:
        for cluster in report.clusters:
            picture = cluster_picture(cluster)
            tree = well_formed(picture.svg(standalone=True).text)
            lines = [e for e in tree.iter() if e.get("class") == "exchange"]
            cards = [e for e in tree.iter() if e.get("class") == "card"]
            assert len(cards) == min(cluster.size, MOST_MEMBERS)
            assert len(lines) == (len(cluster.exchanges or ()) if cluster.size <= MOST_MEMBERS else 0)
            assert f"{cluster.size} members" in picture.words
    assert any(c.size > MOST_MEMBERS for r in found.charges for c in r.clusters)
    orders = orders_of(found)
    for chart in (orders_chart(orders, (0, 0, 1)), atlas_chart(stems_of(ratomega.atlas(ranks=1, charge=20)))):
        well_formed(chart.svg(standalone=True).text)
        assert chart.words


def test_bars_and_stems_hold_the_numbers():
    """Worst order floor(k/2) at ratio 1; first charge alpha + beta at every ratio (Buryak, Feigin 1206.5640)."""
    orders = orders_of(ratomega.detect("u2-pure"))
    assert orders.worst == tuple(k // 2 for k in range(9))
    stems = stems_of(ratomega.atlas(ranks=1, charge=7))
    assert {e.steps: e.first_charge for e in stems.ratios} == {e.steps: sum(e.steps) for e in stems.ratios}
    tree = well_formed(orders_chart(orders).svg(standalone=True).text)
    assert sum(e.get("class") == "guilty bar" for e in tree.iter()) == 7


def test_many_stems_are_cut_whole_charges_at_a_time():
    atlas = ratomega.atlas(ranks=1, charge=30)
    stems = stems_of(atlas)
    assert 0 < len(stems.ratios) <= 150
    assert stems.left_out == len(atlas.ratios) - len(stems.ratios) > 0
    last = max(e.first_charge for e in stems.ratios)
    assert [e for e in atlas.ratios if e.first_charge <= last] == list(stems.ratios)


def test_an_approach_takes_numbers_of_any_size():
    curve = ApproachCurve.make("charge 2", [Rational(1, 100), 1e-4], ["3e-500", 0], [0, "1e-600"])
    assert curve.offsets == (-2.0, -4.0)
    assert curve.distances[0] == pytest.approx(-499.5229, abs=1e-4)
    assert curve.distances[1] is None
    assert curve.radii == (None, -600.0)
    well_formed(approach_chart([curve]).svg(standalone=True).text)
    for bad in (([], [], []), (["1e-2"], ["x"], [0]), ([0], [1], [1]), (["1e-2"], ["nan"], [0]), ([1, 2], [1], [1])):
        with pytest.raises(ratomega.InputError):
            ApproachCurve.make("x", *bad)


def keys_and_dashes(tree):
    """The names of the curves, and how each of them is drawn."""
    samples = [(e.get("stroke"), e.get("stroke-dasharray")) for e in tree.iter() if "sample" in e.get("class", "")]
    return [e.text for e in tree.iter() if e.get("class") == "key"], samples


def test_five_curves_are_told_apart_and_their_names_stand_above_all_points():
    rows = ["1e-2", "1e-8"], ["3e-2", "1e7"], ["1e-30", "1e5"]
    tree = well_formed(approach_chart([ApproachCurve.make(f"charge {n}", *rows) for n in range(5)]).svg().text)
    names, samples = keys_and_dashes(tree)
    assert names == [f"charge {n}" for n in range(5)]
    assert len(set(samples)) == 5
    dots = [float(e.get("cy") or e.get("y")) for e in tree.iter() if e.get("class", "").endswith(" dot")]
    keys = [float(e.get("y")) for e in tree.iter() if e.get("class") == "key"]
    # Five dots belong to the names.
    assert max(keys) < sorted(dots)[5]


def test_the_ratios_of_an_atlas_are_written_below_it_and_do_not_run_into_each_other():
    for case, wanted in (({"ranks": 2, "charge": 4}, {"1/3", "1/2", "1", "2", "3"}), ("u2-pure", {"1/7", "7", "3/2"}),
                         ({"ranks": 1, "charge": 30}, {"1"}), ("u2-ratio-two-thirds", {"2/3"})):
        found = ratomega.atlas(case) if isinstance(case, str) else ratomega.atlas(**case)
        tree = well_formed(atlas_chart(stems_of(found)).svg().text)
        below = [e for e in tree.iter() if e.get("class") == "tick" and e.get("text-anchor") == "middle"]
        assert wanted <= {e.text for e in below}
        spans = sorted((float(e.get("x")), len(e.text) * 0.6 * float(e.get("font-size"))) for e in below)
        assert all(x + wide / 2 <= y - other / 2 for (x, wide), (y, other) in pairwise(spans))


def test_letters_in_a_cluster_are_large_enough_to_be_read():
    cluster = ratomega.detect("three-nodes")[(0, 2, 0)].clusters[0]
    sizes = [float(e.get("font-size")) for e in well_formed(cluster_picture(cluster).svg().text).iter() if
             e.get("class") in ("colour", "name", "number")]
    assert len(sizes) > 8
    assert min(sizes) >= 10


def test_draw_takes_configurations_and_says_what_is_none():
    picture = ratomega.draw((((2, 1), ()),))
    assert picture.words == "colour 1: (2,1), colour 2: empty"
    well_formed(picture._repr_svg_())
    well_formed(ratomega.draw((((MOST_BOXES + 1,),),)).svg(standalone=True).text)
    well_formed(ratomega.draw((((1,), *((),) * 40),)).svg(standalone=True).text)
    for bad in ((), 3, ((),), (((1, 2),),), (((0,),),), (((1.5,),),), [[[1]]], (((True,),),)):
        with pytest.raises(ratomega.InputError, match="a configuration"):
            ratomega.draw(bad)


def test_a_picture_is_saved_the_same_each_time(tmp_path):
    file = tmp_path / "d.svg"
    ratomega.draw((((2,),),)).save(file)
    first = file.read_bytes()
    ratomega.draw((((2,),),)).save(file)
    assert file.read_bytes() == first
    with pytest.raises(ratomega.InputError, match="cannot be written"):
        ratomega.draw((((2,),),)).save(tmp_path / "none" / "d.svg")
