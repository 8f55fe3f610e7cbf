"""What the detector found, as parts of a page or a notebook: counts, drawn configurations, clusters as graphs."""

from __future__ import annotations

from collections.abc import Sequence

from ratomega.case.case import Case
from ratomega.desk import mathml
from ratomega.desk.cluster_pictures import MOST_MEMBERS, cluster_picture, exchange_words
from ratomega.desk.diagram_pictures import singular_picture
from ratomega.desk.markup import Child, Markup, element, joined
from ratomega.desk.text import charge_word, diagrams_text, factor_text
from ratomega.desk.value_parts import sheet
from ratomega.results.detections import ChargeReport, ClusterReport, DetectResult, SingularReport

__all__ = ["cluster_figure", "clusters_part", "configurations_part", "counts_table", "legend", "singular_figure"]

# So many drawings a charge, and in all, stay quick to load and to look through.
MOST_A_CHARGE = 18
MOST_DRAWN = 90
MOST_CLUSTERS_A_CHARGE = 9
MOST_CLUSTERS = 45
MOST_FACTORS = 24
MOST_CHARGES = 60
OPEN_CHARGES = 3


def names_of(case: Case | None) -> tuple[str, ...]:
    return () if case is None else tuple(node.name for node in case.theory.nodes)


def _diagrams(s: SingularReport, case: Case | None) -> str | None:
    return None if case is None else diagrams_text(s.diagrams, case, empty="∅")


def legend() -> Markup:
    return element(
        "p",
        "Row 1 is at the top, rows run to the right. A filled box with a cross is guilty: one denominator that belongs "
        "to it vanishes in the limit (a figure says how many, where there are more). A ring marks a box of which a "
        "numerator vanishes, which compensates. A weight of order n grows like 1/tⁿ as t goes to 0.",
        class_="faint small",
    )


def singular_figure(s: SingularReport, case: Case | None = None) -> Markup:
    """A configuration drawn, with its order and its guilty factors."""
    factors = [*(("denominator", f) for f in s.factors), *(("numerator", f) for f in s.compensating)]
    listed = [element("li", f"{kind} {factor_text(f)}") for kind, f in factors[:MOST_FACTORS]]
    if len(factors) > MOST_FACTORS:
        listed.append(element("li", f"and {len(factors) - MOST_FACTORS} more"))
    number = f"{len(factors)} vanishing factor{'s' if len(factors) != 1 else ''}"
    # The order counts what vanishes in the limit; of a weight that is zero before it says nothing.
    grows = "zero all along the path" if s.dead else element("span", f"order {s.order}", class_="together")
    return element(
        "figure",
        singular_picture(s, names_of(case)).svg(),
        element(
            "figcaption",
            _diagrams(s, case),
            ": " if case is not None else None,
            grows,
            joined(", ", element("span", f"cluster {s.cluster}", class_="together")) if s.cluster is not None else None,
            element("details", element("summary", number), element("ul", *listed)),
        ),
    )


def cluster_figure(cluster: ClusterReport, index: int | None = None, case: Case | None = None) -> Markup:
    """A cluster as a graph with its order, dimension and Poincaré polynomial; the rest stands below, folded."""
    name = "cluster" if index is None else f"cluster {index}"
    facts: list[Child] = [
        f"{name[0].upper()}{name[1:]}: order {cluster.order}, {cluster.size} "
        f"member{'s' if cluster.size != 1 else ''}, dimension {cluster.dimension}, ",
    ]
    if cluster.poincare is not None:
        facts += ["Poincaré polynomial ", mathml.polynomial(cluster.poincare)]
    else:
        facts.append(f"no Poincaré polynomial{f' ({cluster.poincare_why})' if cluster.poincare_why else ''}")
    facts.append(", compact" if cluster.compact else ", not compact")
    lines = [element("li", f"{'compact' if cluster.compact else 'not compact'}: {cluster.why}")]
    cut = None
    if cluster.size > MOST_MEMBERS:
        cut = element("div", f"The first {MOST_MEMBERS} of {cluster.size} members are drawn, without exchanges.")
    else:
        lines += [element("li", exchange_words(e, cluster)) for e in cluster.exchanges or ()]
    details = element("details", element("summary", "why, and what is exchanged"), element("ul", *lines))
    picture = cluster_picture(cluster, names_of(case))
    return element("figure", picture.svg(), element("figcaption", *facts, cut, details))


def counts_table(charges: Sequence[ChargeReport]) -> Markup:
    """The counts of every charge."""
    names = ("charge", "weights", "singular", "indeterminate", "worst order", "clusters", "singular clusters")
    rows = [
        element(
            "tr",
            element("th", charge_word(c.charge), scope="row", class_="n"),
            *(
                element("td", str(n), class_="n")
                for n in (c.configurations, c.singular, c.indeterminate, c.worst_order, c.all_clusters, len(c.clusters))
            ),
        )
        for c in charges[: 4 * MOST_CHARGES]
    ]
    head = element("tr", *(element("th", name, scope="col", class_="n") for name in names))
    caption = element("caption", "single weights and clusters of each charge")
    return sheet(
        "counts", element("table", caption, element("thead", head), element("tbody", *rows), class_="counts")
    )


def configurations_part(result: DetectResult) -> Markup:
    """The singular and the indeterminate configurations, charge by charge, as far as drawings go."""
    parts: list[Child] = []
    drawn = opened = 0
    for report in result.charges:
        listed = [*report.singular_configurations, *report.indeterminate_configurations]
        if not listed:
            continue
        room = max(0, min(MOST_A_CHARGE, MOST_DRAWN - drawn))
        shown = listed[:room]
        drawn += len(shown)
        head = f"charge {charge_word(report.charge)}: {report.singular} singular"
        if report.indeterminate:
            head += f", {report.indeterminate} indeterminate (0/0, the weight itself is fine)"
        figures = [singular_figure(s, result.header.case) for s in shown]
        parts.append(_charge(head, "configurations", figures, len(listed), opened < OPEN_CHARGES))
        opened += 1
    return joined(legend(), *parts) if parts else element("p", "No single weight is singular or indeterminate.")


def clusters_part(result: DetectResult) -> Markup:
    """The clusters with a singular member, charge by charge."""
    parts: list[Child] = []
    drawn = opened = 0
    for report in result.charges:
        if not report.clusters:
            continue
        room = max(0, min(MOST_CLUSTERS_A_CHARGE, MOST_CLUSTERS - drawn))
        shown = report.clusters[:room]
        drawn += len(shown)
        figures = [cluster_figure(cluster, n, result.header.case) for n, cluster in enumerate(shown)]
        number = len(report.clusters)
        head = f"charge {charge_word(report.charge)}: {number} singular cluster{'s' if number != 1 else ''}"
        parts.append(_charge(head, "clusters", figures, number, opened < OPEN_CHARGES))
        opened += 1
    if not parts:
        return element("p", "No cluster has a singular member.")
    said = (
        "A cluster is one component of the fixed locus at the limit point; its members are the Young diagrams on it, "
        "and the poles of their weights cancel among themselves where it is compact. Members are joined where boxes "
        "are exchanged and no third member lies between."
    )
    return joined(element("p", said, class_="faint small"), *parts)


def _charge(head: str, what: str, figures: Sequence[Markup], number: int, opened: bool) -> Markup:
    rest = number - len(figures)
    note = None
    if rest:
        more = f"{rest} more {what} of this charge are" if rest > 1 else f"1 more {what[:-1]} of this charge is"
        text = f"{more} not drawn; ratomega detect --json lists all."
        note = element("p", text, class_="note")
    gallery = element("div", *figures, class_="gallery large" if what == "clusters" else "gallery")
    return element("details", element("summary", head), gallery, note, open=opened)
