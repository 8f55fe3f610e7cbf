"""The same plots as figures of matplotlib, for papers and talks, written as SVG or PNG.

matplotlib is an extra (``pip install 'ratomega[plots]'``) and imported when a figure is asked for, never before.
Figures are plain ``Figure`` objects: nothing is registered anywhere, no window opens, no global state is left behind.
Files carry no date and no versions: the same figure and the same matplotlib give the same bytes.
"""

from __future__ import annotations

import math
import os
from collections.abc import Sequence
from fractions import Fraction
from importlib.util import find_spec
from pathlib import Path
from typing import TYPE_CHECKING

from ratomega.desk.picture import GUILTY, INK, KEEN
from ratomega.desk.plot_data import ApproachCurve, curves_of, orders_of, stems_of
from ratomega.detector.atlas import Atlas
from ratomega.errors import InputError
from ratomega.results.detections import DetectResult
from ratomega.verify.approach import Approach

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

__all__ = ["check_plot_file", "plot", "plot_approach", "save_plot"]

SUFFIXES = (".svg", ".png")
SIZE = (6.4, 4.0)
MOST_TICKS = 14


def check_plot_file(file: str | os.PathLike[str], where: str = "--plot") -> None:
    """Refuse, before any work, a file that is neither .svg nor .png, and a machine without matplotlib."""
    name = os.fspath(file)
    if Path(name).suffix.lower() not in SUFFIXES:
        raise InputError.single(f'a plot is written to a file ending in .svg or .png, not to "{name[:80]}"', where)
    _check_matplotlib(where)


def _check_matplotlib(where: str) -> None:
    if find_spec("matplotlib") is None:
        raise InputError.single("plots need matplotlib: pip install 'ratomega[plots]'", where)


def plot(thing: DetectResult | Atlas | Approach) -> Figure:
    """Pole orders over charge (what ``detect`` found), the singular ratios (an atlas), or an approach, as a figure.

    Raises ``InputError`` for anything else, and where matplotlib is not installed.
    """
    if isinstance(thing, DetectResult):
        return _orders(thing)
    if isinstance(thing, Atlas):
        return _atlas(thing)
    if isinstance(thing, Approach):
        return plot_approach(curves_of(thing))
    message = f"a plot is made from what detect, atlas or approach gives, not from {type(thing).__name__}"
    raise InputError.single(message, "plot")


def save_plot(figure: Figure, file: str | os.PathLike[str]) -> None:
    """Write a figure as SVG or PNG, by the ending of the file, which is replaced. Raises ``InputError``."""
    check_plot_file(file, "file")
    from matplotlib import rc_context

    svg = Path(file).suffix.lower() == ".svg"
    metadata = {"Date": None, "Creator": "ratomega"} if svg else {"Software": "ratomega"}
    # The salt makes the names inside an SVG the same in every run.
    with rc_context({"svg.hashsalt": "ratomega"}):
        try:
            figure.savefig(file, format="svg" if svg else "png", metadata=metadata, dpi=150)
        except OSError as error:
            raise InputError.single(f"the plot cannot be written: {error.strerror}", os.fspath(file)) from error


def _axes(x_name: str, y_name: str) -> tuple[Figure, Axes]:
    _check_matplotlib("plot")
    from matplotlib.figure import Figure

    figure = Figure(figsize=SIZE, layout="constrained")
    axes = figure.subplots()
    axes.set_xlabel(x_name)
    axes.set_ylabel(y_name)
    axes.spines[["top", "right"]].set_visible(False)
    axes.grid(axis="y", alpha=0.25)
    axes.set_axisbelow(True)
    return figure, axes


def _whole(low: int, high: int) -> range:
    return range(low, high + 1, max(1, math.ceil((high - low + 1) / MOST_TICKS)))


def _orders(result: DetectResult) -> Figure:
    orders = orders_of(result)
    figure, axes = _axes("total charge", "worst pole order of a single weight")
    charges = range(len(orders.worst))
    bars = axes.bar(charges, orders.worst, width=0.56, color=GUILTY)
    if len(orders.worst) <= MOST_TICKS:
        axes.bar_label(bars, [str(n) if n else "" for n in orders.singular], fontsize=8, padding=2)
    axes.set_xticks(list(_whole(0, len(orders.worst) - 1)))
    axes.set_yticks(list(_whole(0, max(1, *orders.worst))))
    axes.set_title(f"eps2/eps1 = {result.header.case.background.ratio}; singular weights above the bars", fontsize=9)
    return figure


def _atlas(atlas: Atlas) -> Figure:
    stems = stems_of(atlas)
    figure, axes = _axes("ratio eps2/eps1", "total charge")
    worst = max((entry.worst_order for entry in stems.ratios), default=1)
    for entry in stems.ratios:
        ratio = Fraction(entry.steps[1], entry.steps[0])
        colour = GUILTY if ratio == stems.own else INK
        x, charges = float(ratio), [charge for charge, _, _ in entry.by_charge]
        axes.plot([x, x], [charges[0], charges[-1]], color=colour, linewidth=0.8, alpha=0.6)
        sizes = [6 + 40 * order / worst for _, order, _ in entry.by_charge]
        axes.scatter([x] * len(charges), charges, s=sizes, color=colour, linewidths=0)
    reach = max([2.0, *(max(e.steps) / min(e.steps) for e in stems.ratios)]) * 1.15
    axes.set_xscale("log", base=2)
    axes.set_xlim(1 / reach, reach)
    axes.set_ylim(0.5, max(stems.highest, 2) + 0.6)
    powers = range(-int(math.log2(reach)), int(math.log2(reach)) + 1)
    axes.set_xticks([2.0**n for n in powers], [str(2**n) if n >= 0 else f"1/{2**-n}" for n in powers])
    axes.minorticks_off()
    axes.set_yticks(list(_whole(1, max(stems.highest, 2))))
    title = "ratios at which some weight is singular; larger dots: higher order"
    if stems.left_out:
        title += f"\n{stems.left_out} ratios of high first charge left out"
    axes.set_title(title, fontsize=9)
    return figure


def plot_approach(curves: Sequence[ApproachCurve]) -> Figure:
    """Distances from the exact limit over the offset of the ratio, both logarithmic, with the rigorous radii.

    Axes are decimal logarithms, because distances can be far below the range of floats. A distance of 0 is an open dot
    at the foot. Raises ``InputError`` without curves, and where matplotlib is not installed.
    """
    if not curves:
        raise InputError.single("a plot of an approach needs one curve at least", "plot")
    figure, axes = _axes("offset of the ratio, power of 10", "distance from the exact limit, power of 10")
    known = [y for curve in curves for y in (*curve.distances, *curve.radii) if y is not None]
    foot = min(known, default=0.0) - 1
    colours = (KEEN, GUILTY, INK, "#7a5195", "#8a6d00")
    for place, curve in enumerate(curves):
        colour = colours[place % len(colours)]
        rows = sorted(zip(curve.offsets, curve.distances, curve.radii, strict=True), key=lambda row: row[0])
        points = [(x, y) for x, y, _ in rows if y is not None]
        axes.plot([x for x, _ in points], [y for _, y in points], "o-", color=colour, label=curve.name, markersize=4)
        radii = [(x, radius) for x, _, radius in rows if radius is not None]
        axes.plot([x for x, _ in radii], [y for _, y in radii], "_", color=colour, markersize=10)
        exact = [x for x, y, _ in rows if y is None]
        axes.plot(exact, [foot] * len(exact), "o", color=colour, markerfacecolor="none")
    axes.legend(fontsize=8, frameon=False)
    axes.set_title("dots: distance; bars: radius within which the value is known", fontsize=9)
    return figure
