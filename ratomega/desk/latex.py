"""Results as LaTeX tables that need the package longtable and nothing else.

Short fractions are set as \\frac; long ones in text, their digits in groups between which a line may break. Everything
that a person typed is escaped.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from ratomega.desk.text import charge_word, diagrams_text, factor_text, theory_text
from ratomega.exact.quadratic import Number, Quadratic
from ratomega.exact.rational_function import RationalFunction
from ratomega.results.detections import DetectResult
from ratomega.results.header import Header
from ratomega.results.limits import Coefficient, LimitResult
from ratomega.results.validations import ValidateResult

__all__ = ["detect_latex", "escaped", "limit_latex", "number_latex", "validate_latex"]

LONGEST_FRACTION = 24
GROUP = 5
_SPECIAL = {
    "\\": r"\textbackslash{}",
    "{": r"\{",
    "}": r"\}",
    "$": r"\$",
    "&": r"\&",
    "#": r"\#",
    "%": r"\%",
    "_": r"\_",
    "^": r"\textasciicircum{}",
    "~": r"\textasciitilde{}",
    "<": r"\textless{}",
    ">": r"\textgreater{}",
    "|": r"\textbar{}",
    '"': "{''}",
}
# Letters that LaTeX's own encoding has, and what else our texts hold.
_LETTERS = {"é": r"\'e", "±": r"\ensuremath{\pm}", "→": r"\ensuremath{\to}", "ε": r"\ensuremath{\epsilon}"}


def escaped(text: str) -> str:
    """Any text as LaTeX text; letters beyond ASCII that have no command here stand as their code points.

    >>> print(escaped("50% of a_1 & {b}"))
    50\\% of a\\_1 \\& \\{b\\}
    """
    table = _SPECIAL | _LETTERS
    return "".join(table.get(c, c if " " <= c <= "~" else rf"\texttt{{U+{ord(c):04X}}}") for c in text)


def number_latex(value: Number) -> str:
    r"""An exact number: in mathematics when it is short, else in text with places to break.

    >>> from ratomega.exact.rational import Rational
    >>> print(number_latex(Rational(-97, 160)))
    $-\frac{97}{160}$
    """
    if isinstance(value, Quadratic):
        root = r"\mathrm{i}" if value.d == -1 else rf"\sqrt{{{value.d}}}"
        parts = [number_latex(value.x)] if value.x != 0 else []
        return " ".join([*(f"{part} $+$" for part in parts), number_latex(value.y), f"${root}$"])
    above, below = str(abs(value.p)), str(value.q)
    sign = "-" if value.p < 0 else ""
    if below == "1" and len(above) <= LONGEST_FRACTION:
        return f"${sign}{above}$"
    if len(above) + len(below) <= LONGEST_FRACTION:
        return rf"${sign}\frac{{{above}}}{{{below}}}$"
    text = f"{_broken(above)}/\\allowbreak {_broken(below)}" if below != "1" else _broken(above)
    return f"$-${text}" if sign else text


def _broken(digits: str) -> str:
    first = len(digits) % GROUP
    groups = [digits[:first]] if first else []
    groups += [digits[n : n + GROUP] for n in range(first, len(digits), GROUP)]
    return r"\allowbreak ".join(groups)


def _value(value: Number | RationalFunction) -> str:
    return f"${value.latex()}$" if isinstance(value, RationalFunction) else number_latex(value)


def _table(columns: str, head: Sequence[str], rows: Iterable[Sequence[str]]) -> list[str]:
    lines = [rf"\begin{{longtable}}{{{columns}}}", " & ".join(head) + r" \\ \hline", r"\endhead"]
    lines += [" & ".join(row) + r" \\" for row in rows]
    return [*lines, r"\end{longtable}"]


def _heading(header: Header, partial: bool) -> list[str]:
    title = [rf"\noindent\textbf{{{escaped(header.case.title)}}}\par"] if header.case.title else []
    end = ", then ".join(f"${name} \\to 0$" for name in header.path.parameters)
    return [
        "% needs \\usepackage{longtable}",
        *title,
        rf"\noindent {escaped(theory_text(header.case))}\par",
        rf"\noindent {escaped(header.path.text())}; {end}\par",
        rf"\noindent case hash \texttt{{{header.hash}}}, version {escaped(header.version)}\par",
        *([r"\noindent interrupted: only the charges below were finished\par"] if partial else []),
        "",
    ]


def limit_latex(result: LimitResult) -> str:
    """The coefficients: charge, status, why the path does not matter, value."""
    head = ["charge", "status", "independence", "value"]
    columns = r"rllp{0.55\linewidth}"
    nested = len(result.header.path.parameters) > 1
    rows = [
        [charge_word(c.charge), _status(c, nested=nested), c.independence or "--", _limit(c)]
        for c in result.coefficients
    ]
    return "\n".join([*_heading(result.header, result.partial), *_table(columns, head, rows)]) + "\n"


def _status(c: Coefficient, *, nested: bool) -> str:
    pole = f"pole of order {c.order}" if nested else f"pole $t^{{-{c.order}}}$"
    return pole if c.status == "pole" else escaped(c.status)


def _limit(c: Coefficient) -> str:
    if c.value is not None:
        return _value(c.value)
    if c.leading is not None:
        return number_latex(c.leading)
    return "; ".join(number_latex(v.value) for v in c.values)


def detect_latex(result: DetectResult) -> str:
    """The counts of every charge, then the clusters with a singular member."""
    case = result.header.case
    counts = ["charge", "weights", "singular", "worst order", "clusters", "singular clusters"]
    rows = [
        [
            charge_word(c.charge),
            *(str(n) for n in (c.configurations, c.singular, c.worst_order, c.all_clusters, len(c.clusters))),
        ]
        for c in result.charges
    ]
    lines = [*_heading(result.header, result.partial), *_table("rrrrrr", counts, rows), ""]
    clusters = [
        [
            charge_word(report.charge),
            str(cluster.order),
            str(cluster.dimension),
            str(cluster.euler_number),
            "yes" if cluster.compact else "no",
            ", ".join(escaped(diagrams_text(member, case)) for member in cluster.members),
        ]
        for report in result.charges
        for cluster in report.clusters
    ]
    head = ["charge", "order", "dimension", "Euler number", "compact", "members"]
    lines += _table(r"rrrrlp{0.4\linewidth}", head, clusters)
    factors = [
        [charge_word(report.charge), escaped(diagrams_text(s.diagrams, case)), escaped(factor_text(f))]
        for report in result.charges
        for s in report.singular_configurations
        for f in s.factors
    ]
    lines += ["", *_table(r"rlp{0.6\linewidth}", ["charge", "configuration", "vanishing denominator"], factors)]
    return "\n".join(lines) + "\n"


def validate_latex(result: ValidateResult) -> str:
    """One row a check, and the sentence that sums up."""
    head = ["verdict", "check", "kind", "evidence", "source"]
    rows = [
        [check.verdict.value, escaped(check.name), check.kind.value, escaped(check.evidence), escaped(check.source)]
        for check in result.checks
    ]
    columns = r"lp{0.2\linewidth}lp{0.3\linewidth}p{0.2\linewidth}"
    table = _table(columns, head, rows)
    return "\n".join([*_heading(result.header, result.partial), *table, "", escaped(result.summary)]) + "\n"
