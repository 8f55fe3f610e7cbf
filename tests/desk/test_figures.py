"""Plots with matplotlib: files by their ending, the same bytes each time, the right numbers, nothing global."""

from __future__ import annotations

import subprocess
import sys

import pytest
from page_reading import well_formed

import ratomega
from ratomega.cli.main import main
from ratomega.desk import figures
from ratomega.desk.plot_data import ApproachCurve, curves_of


@pytest.fixture(scope="module")
def found():
    return ratomega.detect("u1-pure")


def test_a_figure_holds_the_orders(found):
    """Worst order floor(k/2) at ratio 1 (Buryak, Feigin 1206.5640: components of dimension up to that)."""
    axes = ratomega.plot(found).axes[0]
    assert [bar.get_height() for bar in axes.patches] == [k // 2 for k in range(11)]


def test_the_atlas_marks_the_ratio_of_the_case():
    axes = ratomega.plot(ratomega.atlas("u2-ratio-two")).axes[0]
    stems = {round(line.get_xdata()[0], 9): line.get_ydata()[0] for line in axes.lines}
    assert stems[2.0] == 3
    assert stems[round(1 / 3, 9)] == 4
    colours = {round(line.get_xdata()[0], 9): line.get_color() for line in axes.lines}
    assert [x for x, colour in colours.items() if colour == figures.GUILTY] == [2.0]


@pytest.mark.parametrize("ending", ["svg", "png", "SVG"])
def test_files_are_the_same_each_time(ending, found, tmp_path):
    one, two = tmp_path / f"one.{ending}", tmp_path / f"two.{ending}"
    ratomega.save_plot(ratomega.plot(found), one)
    ratomega.save_plot(ratomega.plot(found), two)
    assert one.read_bytes() == two.read_bytes()
    if ending.lower() == "svg":
        well_formed(one.read_text(encoding="utf-8"))
        assert "<dc:date>" not in one.read_text(encoding="utf-8")
    else:
        assert one.read_bytes()[:8] == b"\x89PNG\r\n\x1a\n"
        assert b"Software\x00ratomega" in one.read_bytes()


def test_an_approach_is_drawn_curve_by_curve(tmp_path):
    rows = ["1e-2", "1e-4"], ["1e-3", 0], ["1e-900", "1e-9"]
    curves = [ApproachCurve.make(f"charge {k}", *rows) for k in (2, 4)]
    figure = figures.plot_approach(curves)
    assert [text.get_text() for text in figure.axes[0].get_legend().get_texts()] == ["charge 2", "charge 4"]
    ratomega.save_plot(figure, tmp_path / "a.png")
    with pytest.raises(ratomega.InputError, match="one curve"):
        figures.plot_approach([])


def test_an_approach_shows_each_order_once():
    """U(2) at ratio 1: the order floor(k/2) first comes at charge 2 floor(k/2)."""
    near = ratomega.approach("u2-pure", offsets=["1e-2", "1e-5"])
    curves = curves_of(near)
    assert [c.name for c in curves] == [f"charge {max(1, 2 * n)}, order {n}" for n in range(5)]
    # Distances shrink with the offset itself: a slope of 1 in both logarithms, where the ball is sharp enough.
    (x1, x2), (y1, y2) = curves[1].offsets, curves[1].distances
    assert (y2 - y1) / (x2 - x1) == pytest.approx(1, abs=0.02)
    assert len(ratomega.plot(near).axes[0].get_legend().get_texts()) == 5


def test_what_cannot_be_plotted_is_said():
    with pytest.raises(ratomega.InputError, match="detect, atlas or approach"):
        ratomega.plot(ratomega.limit("surviving-pole"))


def test_without_matplotlib_one_sentence(monkeypatch, found):
    monkeypatch.setattr(figures, "find_spec", lambda name: None)
    with pytest.raises(ratomega.InputError, match=r"pip install 'ratomega\[plots\]'"):
        ratomega.plot(found)
    with pytest.raises(ratomega.InputError, match=r"pip install 'ratomega\[plots\]'"):
        figures.check_plot_file("a.png")


def run(*words):
    with pytest.raises(SystemExit) as ended:
        main(words)
    return ended.value.code


def test_commands_write_plots(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    assert run("detect", "surviving-pole", "--plot", "d.svg") == 0
    well_formed((tmp_path / "d.svg").read_text(encoding="utf-8"))
    assert run("atlas", "--ranks", "2", "--charge", "5", "--plot", "a.png") == 0
    assert (tmp_path / "a.png").stat().st_size > 1000
    assert capsys.readouterr().err == ""
    assert run("atlas", "u2-pure", "--plot", "a.pdf") == 2
    said = capsys.readouterr()
    assert said.err == 'ratomega: --plot: a plot is written to a file ending in .svg or .png, not to "a.pdf"\n'
    assert said.out == ""


def test_nothing_is_imported_before_a_plot_is_asked_for():
    script = """
import sys, ratomega
print("matplotlib" in sys.modules)
ratomega.plot(ratomega.atlas(ranks=1, charge=3))
print("matplotlib" in sys.modules, "matplotlib.pyplot" in sys.modules)
"""
    done = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, check=True)
    assert done.stdout.split() == ["False", "True", "False"]
