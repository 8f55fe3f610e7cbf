"""HTML, SVG and MathML as text into which nothing can be smuggled.

``element`` builds one element. Text among its children and all values of attributes are escaped; only what ``element``
made itself (``Markup``) goes in unchanged. So a title or a name of a case can hold anything and is still text. Elements
are closed one by one, also where HTML would not ask for it: the same text is well-formed XML, HTML's void elements
apart.
"""

from __future__ import annotations

import html
from collections.abc import Iterable
from dataclasses import dataclass

__all__ = ["Child", "Markup", "element", "joined", "verbatim"]

# Elements of HTML without content, which have no end tag.
VOID = frozenset({"br", "col", "hr", "img", "input", "link", "meta", "wbr"})


@dataclass(frozen=True, slots=True)
class Markup:
    """Finished markup, to be had from this module alone."""

    text: str

    def __str__(self) -> str:
        return self.text


Child = Markup | str | int | None
Attribute = str | int | float | bool | None


def element(name: str, /, *children: Child | Iterable[Child], **attributes: Attribute) -> Markup:
    """One element. Attributes that are None or False are left out, True stands for an empty value.

    A final underscore of an attribute's name is dropped, others stand for a hyphen: ``class_``, ``aria_label``.

    >>> print(element("p", "1 < 2 ", element("b", "&"), class_="x", hidden=True, id=None))
    <p class="x" hidden="">1 &lt; 2 <b>&amp;</b></p>
    """
    opening = "".join(_attribute(key, value) for key, value in attributes.items())
    if name in VOID:
        if children:
            raise ValueError(f"<{name}> has no content")
        return Markup(f"<{name}{opening}>")
    return Markup(f"<{name}{opening}>{joined(*children)}</{name}>")


def joined(*children: Child | Iterable[Child]) -> Markup:
    """The children one after the other, texts escaped; None is nothing."""
    parts: list[str] = []
    for child in children:
        if child is None:
            continue
        if isinstance(child, Markup):
            parts.append(child.text)
        elif isinstance(child, (str, int)):
            parts.append(_escaped(str(child)))
        else:
            parts.append(joined(*child).text)
    return Markup("".join(parts))


def verbatim(sheet: str) -> Markup:
    """A style sheet of this package as the content of <style>, which HTML does not unescape."""
    if "<" in sheet or "&" in sheet:
        raise ValueError("a style sheet contains neither < nor &")
    return Markup(sheet)


def _attribute(key: str, value: Attribute) -> str:
    if value is None or value is False:
        return ""
    name = key.removesuffix("_").replace("_", "-")
    text = "" if value is True else number(value) if isinstance(value, float) else str(value)
    return f' {name}="{_escaped(text)}"'


def number(value: float) -> str:
    """A coordinate, to a hundredth.

    >>> number(3.0), number(-0.001), number(2.505)
    ('3', '0', '2.5')
    """
    text = f"{value:.2f}".rstrip("0").rstrip(".")
    return "0" if text == "-0" else text


def _escaped(text: str) -> str:
    """Control characters are no part of XML; a file's name may hold them all the same."""
    return html.escape("".join(c if c.isprintable() or c == "\n" else "\N{REPLACEMENT CHARACTER}" for c in text))
