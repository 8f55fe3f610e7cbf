"""Young diagrams as pictures: one diagram for every node and colour, marked boxes among them.

Row 1 is at the top and rows run to the right, so that box (i, j) is in line i and column j. A box in which denominators
vanish is filled and crossed, or bears their number where it is not one; a box in which numerators vanish bears a ring.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

from ratomega.desk.markup import Child, Markup, element, joined, number
from ratomega.desk.picture import GUILTY, KEEN, Picture, label, side_by_side
from ratomega.diagrams.tuples import Configuration
from ratomega.diagrams.young import Diagram, boxes
from ratomega.errors import InputError
from ratomega.results.detections import FactorReport, SingularReport

__all__ = ["MOST_BOXES", "Marks", "configuration_words", "diagrams_picture", "draw", "marks_of", "singular_picture"]

# A larger configuration is written by its rows: nobody counts so many boxes.
MOST_BOXES = 400
# A node with more colours is drawn by those that carry boxes.
MOST_COLOURS = 8
MOST_DRAWN = 24
LONGEST_NAME = 14
SMALLEST_LETTERS = 10.0

Place = tuple[int, int, int, int]
"""(node, colour, row, column), all from 1."""


@dataclass(frozen=True, slots=True)
class Marks:
    """How many denominators, and how many numerators, vanish in which boxes."""

    down: Mapping[Place, int]
    up: Mapping[Place, int]


NO_MARKS = Marks({}, {})


def marks_of(singular: SingularReport) -> Marks:
    """The guilty boxes of a configuration, and those that compensate."""
    return Marks(Counter(map(_place, singular.factors)), Counter(map(_place, singular.compensating)))


def _place(factor: FactorReport) -> Place:
    return (*factor.within, *factor.box)


def singular_picture(singular: SingularReport, names: Sequence[str] = (), *, cell: float = 18.0) -> Picture:
    """A singular or indeterminate configuration with its marked boxes."""
    return diagrams_picture(singular.diagrams, marks_of(singular), names, cell=cell)


def draw(what: Configuration | SingularReport) -> Picture:
    """A configuration, or one that ``detect`` found, as an SVG picture; a notebook shows it, ``save`` writes a file.

    Raises ``InputError`` when ``what`` is neither.

    >>> draw((((2, 1),), ((), (1,)))).words
    'node 1: (2,1); node 2: colour 1 empty, colour 2 (1)'
    """
    if isinstance(what, SingularReport):
        return singular_picture(what)
    if not _is_configuration(what):
        message = "a configuration holds, for every node, a tuple of diagrams; a diagram is a decreasing tuple of rows"
        raise InputError.single(message, "draw")
    return diagrams_picture(what)


def _is_configuration(what: object) -> bool:
    def diagram(rows: object) -> bool:
        whole = isinstance(rows, tuple) and all(type(row) is int and row > 0 for row in rows)
        return whole and list(rows) == sorted(rows, reverse=True)  # type: ignore[call-overload]

    def node(diagrams: object) -> bool:
        return isinstance(diagrams, tuple) and bool(diagrams) and all(map(diagram, diagrams))

    return isinstance(what, tuple) and bool(what) and all(map(node, what))


def diagrams_picture(
    configuration: Configuration, marks: Marks = NO_MARKS, names: Sequence[str] = (), *, cell: float = 18.0
) -> Picture:
    """A configuration drawn. ``names`` are those of the nodes, shown where there are several.

    >>> picture = diagrams_picture((((2,), ()),))
    >>> picture.words
    'colour 1: (2), colour 2: empty'
    """
    words = configuration_words(configuration, marks, names)
    if sum(sum(diagram) for node in configuration for diagram in node) > MOST_BOXES:
        text = f"more than {MOST_BOXES} boxes, not drawn"
        return Picture(label(text, 0, 14, anchor="start"), 6.2 * len(text), 20, words)
    several = len(configuration) > 1
    groups = []
    for number_, node in enumerate(configuration, 1):
        name = (names[number_ - 1] if names else f"node {number_}") if several else ""
        groups.append(_node_picture(node, number_, name, marks, cell))
    return side_by_side(groups, words, gap=1.2 * cell)


def _node_picture(node: Sequence[Diagram], number_: int, name: str, marks: Marks, cell: float) -> Picture:
    shown = [(colour, diagram) for colour, diagram in enumerate(node, 1) if diagram or len(node) <= MOST_COLOURS]
    shown = shown[:MOST_DRAWN]
    pictures = [_diagram_picture(diagram, number_, colour, marks, cell, len(node) > 1) for colour, diagram in shown]
    rest = len(node) - len(shown)
    if rest:
        text = f"+ {rest} {'empty' if len(shown) < MOST_DRAWN else 'more'}"
        pictures.append(Picture(label(text, 0, cell * 0.8, size=cell * 0.6, anchor="start"), 0.36 * cell * len(text),
                                cell, ""))
    row = side_by_side(pictures, "", gap=0.7 * cell)
    if not name:
        return row
    head = 0.95 * cell
    short = name if len(name) <= LONGEST_NAME else name[: LONGEST_NAME - 1] + "…"
    size = max(0.62 * cell, SMALLEST_LETTERS)
    width = max(row.width, 0.58 * size * len(short))
    body = joined(label(short, 0, 0.65 * cell, size=size, anchor="start", class_="name"), row.at(0, head))
    return Picture(body, width, row.height + head, "")


def _diagram_picture(
    diagram: Diagram, node: int, colour: int, marks: Marks, cell: float, labelled: bool
) -> Picture:
    """One diagram with a thin margin, its colour below."""
    margin = 1.0
    columns, rows = (diagram[0], len(diagram)) if diagram else (1, 1)
    width, height = columns * cell + 2 * margin, rows * cell + 2 * margin
    parts: list[Child] = []
    if diagram:
        plain = [(i, j) for i, j in boxes(diagram) if (node, colour, i, j) not in marks.down]
        if plain:
            parts.append(_cells(plain, cell, margin, "box", "none"))
        for i, j in boxes(diagram):
            place = (node, colour, i, j)
            x, y = margin + (j - 1) * cell, margin + (i - 1) * cell
            if place in marks.down:
                parts.append(_cells([(i, j)], cell, margin, "guilty", GUILTY))
                parts.append(_cross(x, y, cell) if marks.down[place] == 1 else _figure(marks.down[place], x, y, cell))
            if place in marks.up:
                middle = cell / 2
                colour_, class_ = ("#ffffff", "cross") if place in marks.down else (KEEN, "keen")
                parts.append(
                    element("circle", cx=x + middle, cy=y + middle, r=0.38 * cell, fill="none", stroke=colour_,
                            stroke_width=0.1 * cell, class_=class_)
                )
    else:
        parts.append(label("∅", width / 2, margin + 0.78 * cell, size=0.85 * cell, class_="empty"))
    if labelled:
        size = max(0.58 * cell, SMALLEST_LETTERS)
        parts.append(label(f"a{colour}", width / 2, height + 0.95 * size, size=size, class_="colour"))
        height += 1.3 * size
    return Picture(joined(*parts), width, height, "")


def _cells(places: Iterable[tuple[int, int]], cell: float, margin: float, class_: str, fill: str) -> Markup:
    size = number(cell)
    path = "".join(
        f"M{number(margin + (j - 1) * cell)} {number(margin + (i - 1) * cell)}h{size}v{size}h-{size}z"
        for i, j in places
    )
    return element("path", d=path, fill=fill, stroke="currentColor", stroke_width=max(0.8, cell / 18), class_=class_)


def _cross(x: float, y: float, cell: float) -> Markup:
    low, high = 0.28 * cell, 0.72 * cell
    path = (
        f"M{number(x + low)} {number(y + low)}L{number(x + high)} {number(y + high)}"
        f"M{number(x + low)} {number(y + high)}L{number(x + high)} {number(y + low)}"
    )
    return element("path", d=path, stroke="#ffffff", stroke_width=0.12 * cell, fill="none", class_="cross")


def _figure(count: int, x: float, y: float, cell: float) -> Markup:
    return element(
        "text", str(count), x=x + cell / 2, y=y + 0.75 * cell, font_size=0.72 * cell, font_weight="bold",
        text_anchor="middle", fill="#ffffff", class_="figure",
    )


# ---- words ----


def rows_text(diagram: Diagram) -> str:
    """One diagram by its rows."""
    return f"({','.join(str(row) for row in diagram)})" if diagram else "empty"


def configuration_words(configuration: Configuration, marks: Marks = NO_MARKS, names: Sequence[str] = ()) -> str:
    """The diagrams by their rows, and the marked boxes."""
    several = len(configuration) > 1
    nodes = []
    for number_, node in enumerate(configuration, 1):
        name = f"{names[number_ - 1] if names else f'node {number_}'}: " if several else ""
        if len(node) == 1:
            nodes.append(name + rows_text(node[0]))
            continue
        full = [f"colour {c} {rows_text(d)}" if several else f"colour {c}: {rows_text(d)}" for c, d in
                enumerate(node, 1) if d or len(node) <= MOST_COLOURS]
        rest = len(node) - len(full)
        nodes.append(name + ", ".join([*full, *([f"{rest} others empty"] if rest else [])]))
    text = "; ".join(nodes)
    for what, found in (("vanishing denominators", marks.down), ("vanishing numerators", marks.up)):
        if found:
            text += f". {what[0].upper()}{what[1:]}: " + ", ".join(
                _place_words(place, count, configuration) for place, count in sorted(found.items())
            )
    return text


def _place_words(place: Place, count: int, configuration: Configuration) -> str:
    node, colour, i, j = place
    parts = [f"box ({i},{j})"]
    if len(configuration[node - 1]) > 1:
        parts.append(f"of colour {colour}")
    if len(configuration) > 1:
        parts.append(f"of node {node}")
    return " ".join(parts) + (f" ({count} times)" if count > 1 else "")
