"""Reports in a real browser: nothing complains, nothing is asked for, diagrams are seen, no phone scrolls sideways."""

from __future__ import annotations

import pytest
from browser import REASON, browser
from hostile import HOSTILE, hostile_case

import ratomega

pytestmark = pytest.mark.skipif(bool(REASON), reason=REASON or "a browser is there")

WIDTHS = (360, 1400)
# Elements beyond the right edge that are not in a frame that scrolls by itself.
OUTSIDE = """
return [...document.querySelectorAll('body *')].filter(e => !e.closest('svg') && !e.closest('.sheet .sheet *') &&
  !(e.closest('.sheet') && !e.matches('.sheet')) && e.getBoundingClientRect().right > WIDTH + 1)
  .map(e => e.outerHTML.slice(0, 80));
"""
PICTURES = """
return [...document.querySelectorAll('details[open] svg, figure.chart svg')].map(e => {
  const box = e.getBoundingClientRect(), inside = e.querySelector('path,rect,circle,line').getBoundingClientRect();
  return [box.width, box.height, inside.width + inside.height];
});
"""


@pytest.fixture(scope="module")
def chromium(tmp_path_factory):
    with browser(tmp_path_factory.mktemp("browser")) as session:
        yield session


def look(chromium, file, width, *, dark=False, paper=False):
    """Open the page and check what holds for every one."""
    chromium.view(width, dark=dark, paper=paper)
    chromium.open(file.as_uri())
    # Against the width asked for: a phone's own idea of its width grows with a page that is too wide.
    assert chromium.run("return document.documentElement.scrollWidth") <= width
    assert chromium.run(OUTSIDE.replace("WIDTH", str(width))) == []
    asked = [address for address in chromium.requests() if not address.startswith("data:")]
    assert asked == [file.as_uri()]
    assert chromium.complaints() == []


@pytest.fixture(scope="module")
def page(tmp_path_factory):
    file = tmp_path_factory.mktemp("page") / "report.html"
    ratomega.report("path-dependent").save(file)
    return file


@pytest.mark.parametrize("width", WIDTHS)
@pytest.mark.parametrize("dark", [False, True])
def test_a_report_opens_at_every_width_and_in_every_light(chromium, page, width, dark):
    look(chromium, page, width, dark=dark)
    pictures = chromium.run(PICTURES)
    assert len(pictures) > 10
    assert all(w > 10 and h > 10 and inside > 4 for w, h, inside in pictures)
    ink, paper = chromium.run(
        "const s = getComputedStyle(document.body); return [s.color, s.backgroundColor].map("
        "c => c.match(/\\d+/g).slice(0, 3).reduce((x, y) => x + Number(y), 0))"
    )
    assert (ink > paper + 300) if dark else (paper > ink + 300)


@pytest.mark.parametrize("width", WIDTHS)
def test_no_table_is_wider_than_the_column_it_stands_in(chromium, page, width):
    chromium.view(width)
    chromium.open(page.as_uri())
    wide = "return [...document.querySelectorAll('main table')].filter(e => !e.closest('.sheet') && {}).length"
    assert chromium.run(wide.format("true")) >= 1
    edge = "e.getBoundingClientRect().right > e.parentElement.getBoundingClientRect().right + 1"
    assert chromium.run(wide.format(edge)) == 0


def test_no_count_is_cut_on_a_phone_and_the_first_terms_wrap(chromium, tmp_path):
    file = tmp_path / "report.html"
    ratomega.report("linear-quiver").save(file)
    look(chromium, file, 360)
    frames = "return [...document.querySelectorAll('.sheet[aria-label=counts]')].map(e => [e.scrollWidth, {}])"
    (whole, seen), = chromium.run(frames.format("e.clientWidth"))
    assert whole <= seen
    lines = chromium.run("return new Set([...document.querySelectorAll('.series math')].map("
                         "e => Math.round(e.getBoundingClientRect().bottom / 20))).size")
    assert lines > 1


def test_marked_boxes_are_filled(chromium, page):
    chromium.view(1400)
    chromium.open(page.as_uri())
    marked = "return [...document.querySelectorAll('figure svg path.guilty:not(.line)')]"
    fills = chromium.run(f"{marked}.map(e => getComputedStyle(e).fill)")
    assert fills
    assert set(fills) == {"rgb(189, 61, 23)"}


def test_the_keyboard_reaches_what_can_be_opened_and_scrolled(chromium, page):
    """Tab from the top: the way to the content comes first, then every link and summary in the order of the page."""
    chromium.view(1400)
    chromium.open(page.as_uri())
    reached = []
    for _ in range(14):
        chromium.command("Input.dispatchKeyEvent", type="keyDown", key="Tab", code="Tab", windowsVirtualKeyCode=9)
        reached.append(chromium.run("const e = document.activeElement; return e.getAttribute('href') || e.localName"))
    assert reached[:3] == ["#content", "#case", "#coefficients"]
    assert "summary" in reached


def test_paper_shows_what_is_folded(chromium, page):
    look(chromium, page, 794, paper=True)
    heights = chromium.run(
        "return [...document.querySelectorAll('details:not([open]):not(.copy) > :not(summary)')].map("
        "e => e.getBoundingClientRect().height)"
    )
    assert heights
    assert min(heights) > 0
    # Nothing that scrolls is left: what to copy stands in the table too.
    assert chromium.run("return [...document.querySelectorAll('textarea')].map(e => e.offsetHeight)") == [0]


def test_hostile_names_do_nothing(chromium, tmp_path):
    file = tmp_path / "hostile.html"
    ratomega.report(hostile_case()).save(file)
    look(chromium, file, 360)
    assert chromium.run("return document.querySelector('h1').textContent") == HOSTILE
    assert chromium.run("return document.querySelectorAll('img, script, b[onclick]').length") == 0


@pytest.mark.long
@pytest.mark.parametrize("name", ratomega.bundled_names())
def test_the_report_of_every_bundled_case_opens(chromium, name, tmp_path):
    file = tmp_path / "report.html"
    ratomega.report(name).save(file)
    for width in WIDTHS:
        look(chromium, file, width)
