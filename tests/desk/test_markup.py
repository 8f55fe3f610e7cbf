"""Nothing can be smuggled into markup, and pictures are well-formed."""

from __future__ import annotations

import html

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from page_reading import Page, well_formed

from ratomega.desk.markup import element, joined, verbatim

HOSTILE = ["<script>alert(1)</script>", '"><img src=x onerror=alert(1)>', "' onload='x", "]]>", "&lt;", "<!--"]


@pytest.mark.parametrize("text", HOSTILE)
def test_text_and_attributes_stay_what_they_are(text):
    made = element("p", text, title=text).text
    page = Page(made)
    assert page.elements == [("p", {"title": text})]
    assert page.text == text
    assert page.faults == []
    tree = well_formed(made)
    assert (tree.text, tree.get("title")) == (text, text)


@settings(deadline=None, max_examples=60)
@given(st.text(max_size=40))
def test_any_text_is_well_formed(text):
    tree = well_formed(element("g", element("title", text), text, class_=text).text)
    clean = "".join(c if c.isprintable() or c == "\n" else "\N{REPLACEMENT CHARACTER}" for c in text)
    assert "".join(tree.itertext()) == clean * 2
    assert html.unescape(joined(text).text) == clean


def test_elements_are_closed_and_void_ones_have_no_content():
    assert element("br").text == "<br>"
    assert element("circle", r=1.005).text in ('<circle r="1"></circle>', '<circle r="1.01"></circle>')
    with pytest.raises(ValueError, match="no content"):
        element("br", "x")
    with pytest.raises(ValueError, match="style sheet"):
        verbatim("</style><script>")
