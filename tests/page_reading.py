"""Reading pages and pictures back: elements in their order, every tag closed, nothing that is loaded from elsewhere."""

from __future__ import annotations

import xml.etree.ElementTree as ElementTree
from html.parser import HTMLParser

VOID = {"area", "base", "br", "col", "embed", "hr", "img", "input", "link", "meta", "source", "track", "wbr"}
# Attributes by which a page can reach for something.
REACHING = {"src", "srcset", "href", "xlink:href", "action", "formaction", "poster", "data", "background", "ping"}
ACTIVE = {"script", "object", "embed", "base", "form", "iframe", "frame", "foreignobject", "animate", "set"}


class Page(HTMLParser):
    """``elements`` are (name, attributes); ``text`` is everything that is shown."""

    def __init__(self, source):
        super().__init__(convert_charrefs=True)
        self.elements, self.text, self.open, self.faults = [], "", [], []
        self.feed(source)
        self.close()
        self.faults += [f"<{name}> is not closed" for name in self.open]

    def handle_starttag(self, tag, attrs):
        names = [name for name, _ in attrs]
        if len(set(names)) != len(names):
            self.faults.append(f"<{tag}> has an attribute twice")
        self.elements.append((tag, dict(attrs)))
        if tag not in VOID:
            self.open.append(tag)

    def handle_endtag(self, tag):
        if not self.open or self.open[-1] != tag:
            self.faults.append(f"</{tag}> closes {self.open[-1:]}")
        else:
            self.open.pop()

    def handle_data(self, data):
        if self.open[-1:] != ["style"]:
            self.text += data

    def named(self, tag):
        return [attributes for name, attributes in self.elements if name == tag]

    def reaching(self):
        """Every address in the page that is neither a place in it nor data."""
        found = [v for _, attributes in self.elements for k, v in attributes.items() if k in REACHING]
        return [address for address in found if not address.startswith(("#", "data:"))]

    def active(self):
        """Elements and attributes that do something."""
        handlers = [k for _, attributes in self.elements for k in attributes if k.startswith("on") or k == "style"]
        return [tag for tag, _ in self.elements if tag in ACTIVE] + handlers


def check_page(source):
    """The page read, after the checks that hold for every page and every fragment."""
    page = Page(source)
    assert page.faults == []
    assert page.active() == []
    assert page.reaching() == []
    assert "@import" not in source
    assert "url(" not in source
    ids = [attributes["id"] for _, attributes in page.elements if "id" in attributes]
    assert len(set(ids)) == len(ids)
    for _, attributes in page.elements:
        for key in ("aria-labelledby", "href"):
            target = attributes.get(key, "")
            if key == "aria-labelledby" and target:
                assert target in ids
            elif target.startswith("#"):
                assert target[1:] in ids
    for picture in page.named("svg"):
        assert picture["role"] == "img"
        assert picture["aria-label"]
    return page


def well_formed(svg):
    """The picture as an XML tree; raises where it is none."""
    return ElementTree.fromstring(svg)
