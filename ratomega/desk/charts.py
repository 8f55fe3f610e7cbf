"""The plots of a page, drawn by ourselves: they follow the light of the page and need no network and no library.

``figures`` draws the same data with matplotlib, for files.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

from ratomega.desk.markup import Child, Markup, element, joined, number
from ratomega.desk.picture import GUILTY, KEEN, Picture, label
from ratomega.desk.plot_data import ApproachCurve, Orders, Stems

__all__ = ["approach_chart", "atlas_chart", "orders_chart"]

# Narrow, with large letters: on a phone the whole is shown at two thirds of its size.
WIDTH, HEIGHT = 480.0, 300.0
LEFT, RIGHT, TOP, BOTTOM = 66.0, 12.0, 16.0, 46.0
MOST_TICKS = 9
LETTERS = 13.0
KEY_LINE = 18.0
COLOURS = ((KEEN, "keen"), (GUILTY, "guilty"), ("currentColor", "stem"))
# Told apart by dashes and dots too.
STYLES = tuple(zip((*COLOURS, *COLOURS[:2]), ("none", "6 3", "2 3", "9 3 2 3", "12 4"), strict=True))


@dataclass(frozen=True, slots=True)
class _Frame:
    """A plane with its axes: x from ``x0`` to ``x1``, y from ``y0`` to ``y1``."""

    x0: float
    x1: float
    y0: float
    y1: float

    def x(self, value: float) -> float:
        return LEFT + (value - self.x0) / (self.x1 - self.x0) * (WIDTH - LEFT - RIGHT)

    def y(self, value: float) -> float:
        return HEIGHT - BOTTOM - (value - self.y0) / (self.y1 - self.y0) * (HEIGHT - TOP - BOTTOM)

    def axes(self, x_name: str, y_name: str, x_ticks: Sequence[tuple[float, str]],
             y_ticks: Sequence[tuple[float, str]]) -> Markup:
        floor, parts = HEIGHT - BOTTOM, list[Child]()
        for value, text in y_ticks:
            y = self.y(value)
            parts.append(element("line", x1=LEFT, x2=WIDTH - RIGHT, y1=y, y2=y, stroke="currentColor",
                                 stroke_opacity=0.15, class_="grid"))
            parts.append(label(text, LEFT - 6, y + 4, size=LETTERS, anchor="end", class_="tick"))
        for value, text in x_ticks:
            parts.append(label(text, self.x(value), floor + 17, size=LETTERS, class_="tick"))
        parts.append(element("line", x1=LEFT, x2=WIDTH - RIGHT, y1=floor, y2=floor, stroke="currentColor",
                             class_="axis"))
        parts.append(label(x_name, (LEFT + WIDTH - RIGHT) / 2, HEIGHT - 8, size=LETTERS, class_="axis-name"))
        middle = (TOP + floor) / 2
        parts.append(label(y_name, 13, middle, size=LETTERS, class_="axis-name",
                           transform=f"rotate(-90 13 {number(middle)})"))
        return joined(*parts)


def _integers(low: int, high: int) -> list[tuple[float, str]]:
    step = max(1, math.ceil((high - low + 1) / MOST_TICKS))
    return [(n, str(n)) for n in range(low, high + 1, step)]


def orders_chart(orders: Orders, generic: Sequence[int] = ()) -> Picture:
    """Bars: the worst order of a single weight by total charge, with the number of singular weights above them.

    ``generic`` are the worst orders at generic parameters, drawn as dashes.
    """
    top = max([1, *orders.worst, *generic])
    last = len(orders.worst) - 1
    frame = _Frame(-0.6, last + 0.6, 0, top + 0.35)
    parts: list[Child] = [
        frame.axes("total charge", "pole order", _integers(0, last), _integers(0, top))
    ]
    wide = (frame.x(1) - frame.x(0)) * 0.56
    many = last > 14
    for charge, (worst, count) in enumerate(zip(orders.worst, orders.singular, strict=True)):
        x = frame.x(charge)
        if worst:
            parts.append(
                element("rect", element("title", f"charge {charge}: {count} singular weights, worst order {worst}"),
                        x=x - wide / 2, y=frame.y(worst), width=wide, height=frame.y(0) - frame.y(worst),
                        fill=GUILTY, class_="guilty bar")
            )
            if not many:
                parts.append(label(str(count), x, frame.y(worst) - 5, size=12, class_="count"))
        if charge < len(generic):
            y = frame.y(generic[charge])
            parts.append(element("line", x1=x - wide * 0.75, x2=x + wide * 0.75, y1=y, y2=y, stroke=KEEN,
                                 stroke_width=2.5, class_="keen dash"))
    said = ", ".join(f"{worst} at charge {k}" for k, worst in enumerate(orders.worst) if worst) or "none at any charge"
    return Picture(joined(*parts), WIDTH, HEIGHT, f"Worst pole order of a single weight: {said}")


def atlas_chart(stems: Stems) -> Picture:
    """A stem for every singular ratio, from its first charge up; a dot a charge, larger for a higher order.

    The axis of ratios is logarithmic: a ratio and its inverse stand opposite each other.
    """
    highest = max(stems.highest, 2)
    reach = math.log2(max([2.0, *(float(max(e.steps)) / min(e.steps) for e in stems.ratios)])) * 1.08
    if stems.own is not None and stems.own > 0:
        reach = max(reach, min(abs(math.log2(stems.own)) * 1.08, 8.0))
    frame = _Frame(-reach, reach, 0.5, highest + 0.6)
    worst = max((entry.worst_order for entry in stems.ratios), default=1)
    ticks = _ratio_ticks(stems, frame, reach)
    parts: list[Child] = [frame.axes("ratio eps2/eps1", "total charge", ticks, _integers(1, highest))]
    for entry in stems.ratios:
        ratio = Fraction(entry.steps[1], entry.steps[0])
        x, own = frame.x(math.log2(ratio)), ratio == stems.own
        class_, colour = ("guilty", GUILTY) if own else ("stem", "currentColor")
        bottom, upper = frame.y(entry.first_charge), frame.y(entry.by_charge[-1][0])
        said = f"eps2/eps1 = {ratio}: from charge {entry.first_charge}, worst order {entry.worst_order}"
        line = element("line", x1=x, x2=x, y1=bottom, y2=upper, stroke=colour, stroke_opacity=0.55,
                       class_=f"{class_} line")
        dots = [
            element("circle", cx=x, cy=frame.y(charge), r=1.6 + 3.6 * math.sqrt(order / worst), fill=colour,
                    class_=class_)
            for charge, order, _ in entry.by_charge
        ]
        parts.append(element("g", element("title", said), line, *dots))
    place = _own_place(stems, frame, reach)
    words = f"Ratios at which some weight is singular, up to charge {stems.highest}: " + (
        ", ".join(str(Fraction(e.steps[1], e.steps[0])) for e in stems.ratios[:20]) or "none"
    )
    if len(stems.ratios) > 20:
        words += f" and {len(stems.ratios) - 20} more"
    return Picture(joined(*parts, place), WIDTH, HEIGHT, words)


def _own_place(stems: Stems, frame: _Frame, reach: float) -> Markup | None:
    """A mark on the axis at the ratio of the case; none where it is negative, and so off the axis."""
    if stems.own is None or stems.own <= 0 or abs(math.log2(stems.own)) > reach:
        return None
    x, floor = frame.x(math.log2(stems.own)), HEIGHT - BOTTOM
    path = f"M{number(x)} {number(floor - 10)}l-6 10h12z"
    return element("path", element("title", f"this case: {stems.own}"), d=path, fill=GUILTY, class_="guilty own")


def _ratio_ticks(stems: Stems, frame: _Frame, reach: float) -> list[tuple[float, str]]:
    """The ratio of the case, then the singular ones, those of the least first charge before others, as room allows."""
    ratios = [Fraction(e.steps[1], e.steps[0]) for e in sorted(stems.ratios, key=lambda e: e.first_charge)]
    own = [stems.own] if stems.own is not None and stems.own > 0 else []
    powers = [Fraction(2) ** n for n in range(-int(reach), int(reach) + 1)]
    ticks: list[tuple[float, str]] = []
    for ratio in (*own, *ratios, *powers):
        place = math.log2(ratio)
        if abs(place) <= reach and all(_apart(frame, place, str(ratio), *tick) for tick in ticks):
            ticks.append((place, str(ratio)))
    return sorted(ticks)


def _apart(frame: _Frame, place: float, text: str, other: float, beside: str) -> bool:
    """Do two labels on the axis leave a gap between them?"""
    return abs(frame.x(place) - frame.x(other)) >= LETTERS * (0.31 * (len(text) + len(beside)) + 0.5)


def approach_chart(curves: Sequence[ApproachCurve]) -> Picture:
    """Distance from the exact limit against the offset of the ratio, both logarithmic; bars are rigorous radii."""
    xs = [x for curve in curves for x in curve.offsets]
    ys = [y for curve in curves for y in (*curve.distances, *curve.radii) if y is not None] or [0.0]
    low, high = math.floor(min(ys)), math.ceil(max(ys))
    # Room above all points for the names of the curves, as much as their lines of letters take.
    share = (6 + KEY_LINE * len(curves)) / (HEIGHT - TOP - BOTTOM)
    bottom, top = low - 0.5, max(high, low + 1) + 0.5
    frame = _Frame(min(xs) - 0.5, max(xs) + 0.5, bottom, bottom + (top - bottom) / (1 - share))
    x_ticks, y_ticks = _decades(min(xs), max(xs)), _decades(low, high)
    parts: list[Child] = [frame.axes("offset of the ratio", "distance from the limit", x_ticks, y_ticks)]
    for place, curve in enumerate(curves):
        parts += _curve(curve, frame, low, place)
    names = ", ".join(curve.name for curve in curves)
    return Picture(joined(*parts), WIDTH, HEIGHT, f"Distance from the exact limit over the offset: {names}")


def _curve(curve: ApproachCurve, frame: _Frame, low: int, place: int) -> list[Child]:
    parts: list[Child] = []
    (colour, class_), dashes = STYLES[place % len(STYLES)]
    rows = sorted(zip(curve.offsets, curve.distances, curve.radii, strict=True))
    path = " ".join(
        f"{number(frame.x(x))},{number(frame.y(y))}" for x, y, _ in rows if y is not None
    )
    parts.append(element("polyline", points=path, fill="none", stroke=colour, stroke_width=1.6,
                         stroke_dasharray=dashes, class_=f"{class_} line"))
    for x, y, radius in rows:
        at = frame.x(x)
        if radius is not None:
            up = frame.y(radius)
            parts.append(element("path", d=f"M{number(at - 5)} {number(up)}h10", stroke=colour, fill="none",
                                 stroke_width=1.6, class_=f"{class_} line radius"))
        if y is None:
            parts.append(element("circle", element("title", "exact"), cx=at, cy=frame.y(low - 0.3), r=4, fill="none",
                                 stroke=colour, class_=f"{class_} line"))
        else:
            parts.append(_dot(at, frame.y(y), place, colour, class_))
    x, y = LEFT + 10, TOP + 6 + KEY_LINE * place
    parts += [
        element("line", x1=x, x2=x + 34, y1=y, y2=y, stroke=colour, stroke_width=1.6, stroke_dasharray=dashes,
                class_=f"{class_} line sample"),
        _dot(x + 17, y, place, colour, class_),
        label(curve.name, x + 42, y + 4.5, size=LETTERS, anchor="start", class_="key"),
    ]
    return parts


def _dot(x: float, y: float, place: int, colour: str, class_: str) -> Markup:
    """A round dot, or a square one where a colour comes for the second time."""
    if place < len(COLOURS):
        return element("circle", cx=x, cy=y, r=3.5, fill=colour, class_=f"{class_} dot")
    return element("rect", x=x - 3.5, y=y - 3.5, width=7, height=7, fill=colour, class_=f"{class_} dot")


def _decades(low: float, high: float) -> list[tuple[float, str]]:
    first, last = math.floor(low), math.ceil(high)
    step = max(1, math.ceil((last - first + 1) / MOST_TICKS))
    return [(n, f"1e{n}") for n in range(first, last + 1, step) if low - 0.5 <= n <= high + 0.5]
