"""A picture of our own: SVG with its size and its words.

A picture is drawn with its upper left corner at (0, 0). Lines and letters have the colour of the text around
(``currentColor``) and classes beside, so that a page shows them in its own light; alone, in a file or a notebook, a
picture brings ink and paper with it. ``words`` says in a sentence what is to be seen, for those who do not see it.
"""

from __future__ import annotations

import os
from dataclasses import dataclass
from pathlib import Path

from ratomega.desk.markup import Child, Markup, element, joined, number
from ratomega.errors import InputError

__all__ = ["GUILTY", "INK", "KEEN", "PAPER", "Picture", "label", "side_by_side"]

# Told apart also without colours: by a cross, a ring, a figure.
GUILTY = "#c4441c"
KEEN = "#0b7a75"
INK = "#1b2330"
PAPER = "#ffffff"
FONT = "ui-sans-serif, system-ui, sans-serif"


@dataclass(frozen=True, slots=True)
class Picture:
    """SVG elements of a width and height, and what they show in words."""

    body: Markup
    width: float
    height: float
    words: str

    def svg(self, *, scale: float = 1.0, standalone: bool = False) -> Markup:
        """The picture as one <svg>. ``standalone``: with the name space, ink and paper that a file of its own needs."""
        paper = element("rect", width=self.width, height=self.height, fill=PAPER) if standalone else None
        return element(
            "svg",
            element("title", self.words),
            paper,
            self.body,
            xmlns="http://www.w3.org/2000/svg" if standalone else None,
            class_="picture",
            role="img",
            aria_label=self.words,
            viewBox=f"0 0 {number(self.width)} {number(self.height)}",
            width=self.width * scale,
            height=self.height * scale,
            font_family=FONT,
            color=INK if standalone else None,
        )

    def _repr_svg_(self) -> str:
        """How notebooks show it."""
        return self.svg(standalone=True).text

    def save(self, file: str | os.PathLike[str]) -> None:
        """Write the picture as a file, which is replaced. Raises ``InputError`` when it cannot be written."""
        try:
            Path(file).write_text(self.svg(standalone=True).text + "\n", encoding="utf-8", newline="\n")
        except OSError as error:
            raise InputError.single(f"the picture cannot be written: {error.strerror}", os.fspath(file)) from error

    def at(self, x: float, y: float) -> Markup:
        """The picture moved, as part of another one."""
        return element("g", self.body, transform=f"translate({number(x)} {number(y)})")


def label(
    text: str, x: float, y: float, *, size: float = 11.0, anchor: str = "middle", class_: str | None = None, **more: str
) -> Markup:
    """A line of text at a baseline."""
    return element(
        "text", text, x=x, y=y, font_size=size, text_anchor=anchor, fill="currentColor", class_=class_, **more
    )


def side_by_side(pictures: list[Picture], words: str, *, gap: float = 16.0) -> Picture:
    """Pictures in a row, their upper edges at one height."""
    x, parts = 0.0, list[Child]()
    for picture in pictures:
        parts.append(picture.at(x, 0))
        x += picture.width + gap
    height = max((picture.height for picture in pictures), default=0.0)
    return Picture(joined(*parts), max(x - gap, 0.0), height, words)
