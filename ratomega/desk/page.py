"""One page from what was found: a file that needs nothing else, no network, no script.

The policy in the head of the page forbids everything but the one style sheet that it brings, named by its hash; so a
page could load nothing even if something had been smuggled into it.
"""

from __future__ import annotations

import base64
import hashlib
import sys
from collections.abc import Sequence
from importlib.metadata import version

from ratomega.desk.charts import approach_chart, atlas_chart, orders_chart
from ratomega.desk.detector_parts import clusters_part, configurations_part, counts_table
from ratomega.desk.findings import Findings
from ratomega.desk.markup import Child, Markup, element, joined, verbatim
from ratomega.desk.plot_data import curves_of, orders_of, stems_of
from ratomega.desk.style import PAGE, PARTS
from ratomega.desk.text import theory_text
from ratomega.desk.value_parts import (
    case_facts,
    case_file,
    check_list,
    coefficient_table,
    copy_box,
    exact,
    leading_terms,
    sheet,
    summary_line,
    values_by_path,
)
from ratomega.detector.atlas import Atlas
from ratomega.exact.rational import exact_text
from ratomega.verify.approach import Approach

__all__ = ["page"]

MOST_RATIOS = 40


def page(findings: Findings, *, command: str) -> str:
    """The whole page as HTML text. ``command`` is what repeats it."""
    title = findings.case.title or theory_text(findings.case)
    sections = _sections(findings, command)
    sheet_ = verbatim(PARTS + PAGE)
    head = element(
        "head",
        element("meta", charset="utf-8"),
        element("meta", http_equiv="Content-Security-Policy", content=_policy(sheet_.text)),
        element("meta", name="viewport", content="width=device-width, initial-scale=1"),
        element("meta", name="color-scheme", content="light dark"),
        element("meta", name="referrer", content="no-referrer"),
        element("title", f"{title} - ratomega"),
        # An icon of its own: browsers would ask the server for one.
        element("link", rel="icon", href="data:,"),
        element("style", sheet_),
    )
    body = element(
        "body",
        element("a", "To the content", href="#content", class_="skip"),
        element("header", element("h1", title), element("p", summary_line(findings.limit.coefficients))),
        element(
            "nav",
            element("ol", *(element("li", element("a", name, href=f"#{key}")) for key, name, _ in sections)),
            aria_label="Sections",
        ),
        element("main", *(_section(*section) for section in sections), id="content", tabindex="-1"),
        class_="rz page",
    )
    return f"<!DOCTYPE html>\n{element('html', head, body, lang='en')}\n"


def _policy(sheet_: str) -> str:
    digest = base64.b64encode(hashlib.sha256(sheet_.encode()).digest()).decode()
    return (
        f"default-src 'none'; style-src 'sha256-{digest}'; img-src data:; base-uri 'none'; form-action 'none'"
    )


def _section(key: str, name: str, content: Markup) -> Markup:
    return element("section", element("h2", name, id=key), content, aria_labelledby=key)


def _sections(findings: Findings, command: str) -> list[tuple[str, str, Markup]]:
    """(id, heading, content) of every section that this case has."""
    detect = findings.detect
    case = joined(_notes(findings.notes), case_facts(findings.limit.header), case_file(findings.case))
    sections = [
        ("case", "The case", case),
        ("coefficients", "Exact coefficients", _coefficients(findings)),
    ]
    if detect is not None:
        sections += [
            ("configurations", "Singular configurations", configurations_part(detect)),
            ("clusters", "Clusters", clusters_part(detect)),
            ("orders", "Pole orders", _orders(findings)),
        ]
    sections.append(("atlas", "Singular ratios", atlas_part(findings.atlas)))
    if findings.approach is not None:
        sections.append(("approach", "Approach by irrational ratios", approach_part(findings.approach)))
    checks = findings.validate
    sections += [
        ("checks", "Checks", joined(element("p", checks.summary), check_list(checks.checks))),
        ("repeat", "To repeat this", _repeat(findings, command)),
    ]
    return sections


def _notes(notes: Sequence[str]) -> Markup | None:
    if not notes:
        return None
    listed = element("ul", *(element("li", note) for note in notes))
    return element("div", element("strong", "Left out of this page"), listed, class_="note")


def _coefficients(findings: Findings) -> Markup:
    limit = findings.limit
    formula = leading_terms(limit)
    route = limit.route
    how = f"Route: {route.route} ({route.why})."
    if route.spare_bits is not None:
        how += f" From residues modulo {route.primes} primes, confirmed by {route.spare_bits} spare bits at least."
    return joined(
        formula,
        coefficient_table(limit.coefficients),
        copy_box(limit.coefficients),
        values_by_path(limit.coefficients),
        element("p", how, class_="faint small"),
    )


def _orders(findings: Findings) -> Markup:
    assert findings.detect is not None
    orders = orders_of(findings.detect)
    generic = generic_orders(findings.atlas, len(orders.worst))
    counts = counts_table(findings.detect.charges)
    none = "No single weight diverges at any of these charges."
    if not any((*orders.worst, *generic)):
        return joined(element("p", none), counts)
    bars = (
        "Bars: the order n to which the worst single weight diverges, like 1/tⁿ, with the number of singular weights "
        "above."
    )
    said = (
        f"{bars if any(orders.worst) else none} Dashes: the worst order at generic Coulomb parameters and masses, as "
        "far as the singular ratios below go. What the sum of all weights does stands above, with the exact "
        "coefficients."
    )
    figure = element("figure", orders_chart(orders, generic).svg(), class_="chart")
    return joined(element("p", said, class_="faint small"), figure, counts)


def generic_orders(atlas: Atlas, length: int) -> tuple[int, ...]:
    """By total charge the worst order at generic parameters at the ratio of the case, as far as the atlas goes."""
    if atlas.poles is None:
        return ()
    entry = next((e for e in atlas.ratios if e.ratio == atlas.poles.ratio), None)
    found = {} if entry is None else {charge: order for charge, order, _ in entry.by_charge}
    highest = atlas.charge if isinstance(atlas.charge, int) else sum(atlas.charge)
    return tuple(found.get(charge, 0) for charge in range(min(length, highest + 1)))


def atlas_part(atlas: Atlas) -> Markup:
    """The atlas drawn, and as a table."""
    stems = stems_of(atlas)
    bound = str(atlas.charge) if isinstance(atlas.charge, int) else ",".join(str(k) for k in atlas.charge)
    said = (
        f"Generic Coulomb parameters and masses, charges up to {bound}: a stem stands on every ratio at which some "
        "weight is singular, from its first charge on; dots grow with the worst order. At every other ratio, negative "
        "ones included, no weight is singular."
    )
    own: Child = None
    if stems.own is not None:
        where = "it is negative, and so not on the axis" if stems.own < 0 else "a mark on the axis shows it"
        own = f" This case is at {stems.own}; {where}."
    more = f" {stems.left_out} ratios of high first charge are not drawn." if stems.left_out else None
    met = () if atlas.poles is None or atlas.poles.met is None else atlas.poles.met
    notes = [element("p", f"A Coulomb difference sits on a pole: {sentence}.", class_="note") for sentence in met]
    rows = [
        element(
            "tr",
            element("th", exact_text(e.ratio), scope="row", class_="n"),
            *(element("td", str(n), class_="n") for n in (e.first_charge, e.worst_order, e.singular)),
        )
        for e in atlas.ratios[:MOST_RATIOS]
    ]
    names = ("eps2/eps1", "first charge", "worst order", "singular weights")
    head = element("tr", *(element("th", name, scope="col", class_="n") for name in names))
    rest = len(atlas.ratios) - MOST_RATIOS
    table = element(
        "details",
        element("summary", "the ratios as a table"),
        sheet("singular ratios", element("table", element("thead", head), element("tbody", *rows))),
        element("p", f"and {rest} more; ratomega atlas --json lists all") if rest > 0 else None,
    )
    return joined(
        element("p", said, own, more, class_="faint small"),
        element("figure", atlas_chart(stems).svg(), class_="chart"),
        *notes,
        table if rows else None,
    )


def approach_part(approach: Approach) -> Markup:
    """How sums at irrational ratios come near the limits, drawn."""
    curves = curves_of(approach)
    if not curves:
        return element("p", "No limit beyond charge 0 that sums at irrational ratios could come near to.")
    said = (
        f"The same sum in ball arithmetic with {approach.digits} digits at irrational ratios near this one: dots are "
        "distances from the exact limit, short bars the rigorous radius of a value, an open dot a distance of zero; "
        "the order is the worst pole order of a single weight. Digits cancel in the sum as single weights diverge: "
        "bars rise towards the left, and where they reach a curve no digit of the distance is left."
    )
    more = " No weight is singular here: there is nothing to lose." if approach.nothing_lost else None
    return joined(
        element("p", said, more, class_="faint small"),
        element("figure", approach_chart(curves).svg(), class_="chart"),
    )


def _repeat(findings: Findings, command: str) -> Markup:
    header = findings.limit.header
    versions = (
        ("ratomega", header.version),
        ("Python", ".".join(str(n) for n in sys.version_info[:3])),
        ("python-flint", version("python-flint")),
    )
    return joined(
        element("pre", command, tabindex="0"),
        element("p", "The canonical hash covers the physics alone: theory, background and path, not title or charge."),
        element(
            "dl",
            element("dt", "canonical hash"),
            element("dd", exact(header.hash)),
            *(joined(element("dt", name), element("dd", text)) for name, text in versions),
        ),
    )
