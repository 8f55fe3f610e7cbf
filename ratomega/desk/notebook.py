"""How results show in a notebook: one table of types, entered once.

Notebooks of every kind ask an object for ``_repr_html_``. Results know nothing of the desk, which lies above them; so
``ratomega/api`` calls ``register``, which gives each type of the table that one method. (The other way, a
formatter registered with IPython, would serve IPython alone and need it imported first.) A representation is a fragment
that brings its style with it, has no ids, loads nothing and runs nothing; it is bounded like a page.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from ratomega.case.case import Case
from ratomega.desk.approach_text import approach_text
from ratomega.desk.average_text import average_text
from ratomega.desk.block_text import block_text
from ratomega.desk.charts import atlas_chart
from ratomega.desk.detector_parts import (
    cluster_figure,
    clusters_part,
    configurations_part,
    counts_table,
    legend,
    singular_figure,
)
from ratomega.desk.grid_csv import grid_csv
from ratomega.desk.markup import Child, Markup, element, verbatim
from ratomega.desk.page import approach_part
from ratomega.desk.plot_data import stems_of
from ratomega.desk.style import PARTS
from ratomega.desk.text import charge_word, theory_text
from ratomega.desk.value_parts import (
    case_facts,
    case_file,
    check_list,
    coefficient_table,
    leading_terms,
    sheet,
    summary_line,
    values_by_path,
)
from ratomega.detector.atlas import Atlas
from ratomega.results.averages import AverageResult
from ratomega.results.blocks import BlockResult
from ratomega.results.detections import ChargeReport, ClusterReport, DetectResult, SingularReport
from ratomega.results.grids import GridResult
from ratomega.results.limits import Coefficient, LimitResult
from ratomega.results.validations import ValidateResult
from ratomega.validator.verdict import Check
from ratomega.verify.approach import Approach

__all__ = ["register"]

MOST_FIGURES = 18
LONGEST_TEXT = 100_000


def _case(case: Case) -> tuple[Child, ...]:
    title = element("strong", case.title or "case")
    return title, element("p", f"{theory_text(case)}; hash ", element("code", case.hash)), case_file(case)


def _limit(result: LimitResult) -> tuple[Child, ...]:
    formula = leading_terms(result)
    return (
        element("strong", result.header.case.title or "limit"),
        element("p", summary_line(result.coefficients)),
        formula,
        coefficient_table(result.coefficients),
        values_by_path(result.coefficients),
        element("details", element("summary", "the case, and its path"), case_facts(result.header)),
        element("details", element("summary", "certificate"), check_list(result.checks)),
    )


def _coefficient(c: Coefficient) -> tuple[Child, ...]:
    return coefficient_table([c]), values_by_path([c])


def _detect(result: DetectResult) -> tuple[Child, ...]:
    parts = [element("strong", result.header.case.title or "detect"), counts_table(result.charges)]
    for name, part in (("singular configurations", configurations_part), ("clusters", clusters_part)):
        parts.append(element("details", element("summary", name), part(result)))
    return tuple(parts)


def _charge(report: ChargeReport) -> tuple[Child, ...]:
    shown = report.clusters[:MOST_FIGURES]
    rest = len(report.clusters) - len(shown)
    return (
        element("strong", f"charge {charge_word(report.charge)}"),
        counts_table([report]),
        element("div", *(cluster_figure(c, n) for n, c in enumerate(shown)), class_="gallery large"),
        element("p", f"{rest} more clusters are not drawn.", class_="note") if rest else None,
    )


def _validate(result: ValidateResult) -> tuple[Child, ...]:
    title = element("strong", result.header.case.title or "validate")
    return title, element("p", result.summary), check_list(result.checks)


def _atlas(atlas: Atlas) -> tuple[Child, ...]:
    groups = " x ".join(f"U({rank})" for rank in atlas.ranks)
    said = f"{groups}: {len(atlas.ratios)} ratios at which some weight is singular"
    return element("p", said), element("figure", atlas_chart(stems_of(atlas)).svg(), class_="chart")


def _text(table: str) -> Markup:
    """A result without pictures: its text, line by line."""
    cut = element("p", "cut here; ratomega.to_json has all", class_="note") if len(table) > LONGEST_TEXT else None
    return sheet("result", element("pre", table[:LONGEST_TEXT], class_="lines"), cut)


REPRESENTATIONS: dict[type, Callable[[Any], tuple[Child, ...]]] = {
    Case: _case,
    LimitResult: _limit,
    Coefficient: _coefficient,
    DetectResult: _detect,
    ChargeReport: _charge,
    ClusterReport: lambda cluster: (cluster_figure(cluster),),
    SingularReport: lambda singular: (singular_figure(singular), legend()),
    ValidateResult: _validate,
    Check: lambda check: (check_list([check]),),
    Atlas: _atlas,
    Approach: lambda near: (approach_part(near), _text(approach_text(near))),
    AverageResult: lambda result: (_text(average_text(result)),),
    BlockResult: lambda result: (_text(block_text(result)),),
    GridResult: lambda result: (_text(grid_csv(result)),),
}


def _fragment(*children: Child) -> str:
    style: Markup = element("style", verbatim(PARTS))
    return element("div", style, *children, class_="rz").text


def register() -> None:
    """Give every type of the table its ``_repr_html_``. Doing so again changes nothing."""
    for kind, parts in REPRESENTATIONS.items():
        # The default binds this type's function; a name would be looked up after the loop.
        def html(self: object, parts: Callable[[Any], tuple[Child, ...]] = parts) -> str:
            return _fragment(*parts(self))

        html.__name__ = "_repr_html_"
        setattr(kind, "_repr_html_", html)  # noqa: B010 - the type does not declare it, on purpose
