"""Coefficients, paths, checks and the case as parts of a page or a notebook."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from ratomega.case.case import Case
from ratomega.desk import mathml
from ratomega.desk.case_toml import case_toml
from ratomega.desk.markup import Child, Markup, element, joined
from ratomega.desk.text import charge_word, theory_text
from ratomega.exact.function_text import function_text
from ratomega.exact.quadratic import Number, Quadratic, approximate_text, number_text
from ratomega.exact.rational import Rational, as_rational, exact_text
from ratomega.exact.rational_function import RationalFunction
from ratomega.results.header import Header
from ratomega.results.limits import Coefficient, LimitResult
from ratomega.validator.verdict import Check

__all__ = ["case_facts", "check_list", "coefficient_table", "copy_box", "sheet", "summary_line", "values_by_path"]

SHORT = 72
RAISED = str.maketrans("0123456789", "⁰¹²³⁴⁵⁶⁷⁸⁹")
LONGEST_VALUE = 20_000
MOST_ROWS = 400


def sheet(what: str, *children: Child) -> Markup:
    """Something wide in a frame that scrolls by itself, with the keyboard too."""
    return element("div", *children, class_="sheet", role="region", aria_label=what, tabindex="0")


def exact(text: str) -> Markup:
    """An exact value, selected whole by one click; a long one is folded, one beyond all bounds left out."""
    if len(text) <= SHORT:
        return element("code", text, class_="exact")
    if len(text) > LONGEST_VALUE:
        return element("span", f"{len(text)} characters, not shown; ratomega limit prints them", class_="faint")
    head = element("summary", element("code", f"{text[:20]}…{text[-8:]}"), f" ({len(text)} characters)")
    return element("details", head, element("code", text, class_="exact"))


def value_text(c: Coefficient) -> tuple[str, Number | RationalFunction]:
    """What stands for a coefficient: its value, the leading one of a pole, or the first of several paths."""
    shown = c.value if c.value is not None else c.leading if c.leading is not None else c.values[0].value
    return (function_text(shown) if isinstance(shown, RationalFunction) else number_text(shown)), shown


def _status(c: Coefficient) -> tuple[str, str]:
    if c.status == "pole":
        return f"pole t⁻{str(c.order).translate(RAISED)}", "leading coefficient"
    if c.status == "path-dependent":
        return "path-dependent", "on the case's own path"
    return c.status, ""


def _relation(decimal: str, value: Number) -> str:
    """Is a decimal the value itself, or near it? A long fraction is no decimal that is shown."""
    short = isinstance(value, Rational) and len(exact_text(value)) <= SHORT
    return "=" if short and as_rational(decimal) == value else "≈"


def coefficient_table(coefficients: Sequence[Coefficient]) -> Markup:
    """Charge, value and status, exact and approximate."""
    rows = []
    for c in coefficients[:MOST_ROWS]:
        text, shown = value_text(c)
        status, what = _status(c)
        near = None
        if not isinstance(shown, RationalFunction) and text != (decimal := approximate_text(shown)):
            near = element("div", f"{_relation(decimal, shown)} {decimal}", class_="faint small")
        rows.append(
            element(
                "tr",
                element("th", charge_word(c.charge), scope="row", class_="n"),
                element("td", f"{what} " if what else None, exact(text), near, class_="wide"),
                element("td", element("span", status, class_=f"tag {c.status}"),
                        element("div", c.independence or "", class_="faint small")),
            )
        )
    head = element("tr", *(element("th", name, scope="col") for name in ("charge", "coefficient of Z", "limit")))
    said = "exact coefficients; below the status, where every path gives the same value: how that is known"
    caption = element("caption", said)
    rest = None
    if len(coefficients) > MOST_ROWS:
        rest = element("p", f"{len(coefficients) - MOST_ROWS} more coefficients are not listed.", class_="note")
    return joined(element("table", caption, element("thead", head), element("tbody", *rows)), rest)


def copy_box(coefficients: Sequence[Coefficient]) -> Markup:
    """All exact values as lines to be copied."""
    lines = []
    for c in coefficients[:MOST_ROWS]:
        text, _ = value_text(c)
        if c.status == "finite" and len(text) <= LONGEST_VALUE:
            lines.append(f"{charge_word(c.charge)}; {text}")
    box = element("textarea", "\n" + "\n".join(lines), readonly=True, rows=min(10, len(lines) + 1),
                  aria_label="charge; exact coefficient", spellcheck="false")
    # Of no use on paper, where the table above has the same values: the style sheet leaves it out there.
    return element("details", element("summary", "all finite coefficients as lines to copy"), box, class_="copy")


def values_by_path(coefficients: Iterable[Coefficient]) -> Markup:
    """Where paths were compared: what each of them gives."""
    parts = []
    for c in coefficients:
        if not c.values:
            continue
        rows = [
            element("tr", element("td", str(v.order), class_="n"), element("td", exact(number_text(v.value))),
                    element("td", element("code", v.path)))
            for v in c.values
        ]
        value = "leading coefficient" if any(v.order > 0 for v in c.values) else "value"
        head = element("tr", *(element("th", n, scope="col") for n in ("pole order", value, "path")))
        caption = element("caption", f"charge {charge_word(c.charge)}, path by path, the case's own path first")
        parts.append(
            sheet(f"paths at charge {charge_word(c.charge)}",
                  element("table", caption, element("thead", head), element("tbody", *rows)))
        )
    return joined(*parts)


def leading_terms(result: LimitResult) -> Markup | None:
    """Z = its first terms as a formula; None where they are no short rational numbers."""
    values: list[tuple[tuple[int, ...], Rational]] = []
    for c in result.coefficients:
        if c.status != "finite" or isinstance(c.value, (RationalFunction, Quadratic)) or c.value is None:
            break
        values.append((c.charge, c.value))
    short = [value for _, value in values[:2] if len(str(value)) <= mathml.LONGEST_TERM]
    return mathml.series(values) if len(short) == 2 else None


def summary_line(coefficients: Sequence[Coefficient]) -> str:
    """All limits in one sentence."""
    total = len(coefficients)
    poles = [charge_word(c.charge) for c in coefficients if c.status == "pole"]
    paths = [charge_word(c.charge) for c in coefficients if c.status == "path-dependent"]
    finite = total - len(poles) - len(paths)
    parts = [f"{'All' if finite == total else finite} {total if finite == total else f'of {total}'} coefficients "
             "have a finite limit"]
    if poles:
        parts.append(f"a pole survives at charge {', '.join(poles)}")
    if paths:
        parts.append(f"the limit depends on the path at charge {', '.join(paths)}")
    singular = sum(c.singular or 0 for c in coefficients)
    counted = [c.configurations for c in coefficients if c.configurations is not None]
    if counted:
        parts.append(f"{singular} of {sum(counted)} single weights are singular")
    return "; ".join(parts) + "."


def case_facts(header: Header) -> Markup:
    """Theory, ratio, path, bound, symbols, hash, warnings."""
    case = header.case
    bound = str(case.charge) if isinstance(case.charge, int) else charge_word(case.charge)
    steps = ", then ".join(f"{name} → 0" for name in header.path.parameters)
    facts: list[tuple[str, Child]] = [
        ("theory", theory_text(case)),
        ("ratio", mathml.ratio(case.background.ratio)),
        ("path", joined(element("code", header.path.text()), f", {steps}", " (tilted)" if header.path.tilted else "")),
        ("highest charge", bound if isinstance(case.charge, int) else f"{bound}, node by node"),
        *([("symbols", ", ".join(case.symbols))] if case.symbols else []),
        ("canonical hash", element("code", header.hash)),
    ]
    listed = element("dl", *(joined(element("dt", name), element("dd", value)) for name, value in facts))
    return joined(listed, *(element("p", f"Warning: {warning}", class_="note") for warning in header.warnings))


def case_file(case: Case) -> Markup:
    """The case as the file that gives it back, folded."""
    return element("details", element("summary", "the case as a file"), element("pre", case_toml(case), tabindex="0"))


def check_list(checks: Sequence[Check]) -> Markup:
    """Every check with verdict, kind, evidence and source."""
    return element(
        "ul",
        *(
            element(
                "li",
                element("p", element("span", check.verdict.value, class_=f"tag {check.verdict.value}"), " ",
                        element("strong", check.name), element("span", f" ({check.kind.value})", class_="faint")),
                element("p", check.evidence),
                element("p", f"Source: {check.source}", class_="faint small"),
            )
            for check in checks
        ),
        class_="plain checks",
    )
