"""Results as plain text tables for a terminal."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from ratomega.case.case import Case
from ratomega.detector.poincare import polynomial_text
from ratomega.diagrams.tuples import Charge, Configuration
from ratomega.exact.function_text import function_text
from ratomega.exact.quadratic import approximate_text, number_text
from ratomega.exact.rational_function import RationalFunction
from ratomega.results.detections import ChargeReport, ClusterReport, DetectResult, FactorReport
from ratomega.results.header import Header
from ratomega.results.limits import Coefficient, LimitResult, RouteRecord
from ratomega.results.validations import ValidateResult
from ratomega.validator.verdict import Check

__all__ = ["check_lines", "detect_text", "heading", "limit_text", "table", "theory_text", "validate_text"]

# A terminal page shows this many singular configurations and clusters a charge; JSON has them all.
MOST_SHOWN = 12


def table(head: Sequence[str], rows: Iterable[Sequence[str]], *, left: Sequence[int] = ()) -> list[str]:
    """Aligned columns; ``left`` names the columns that are flush left, the others are flush right.

    >>> print("\\n".join(table(["k", "Z"], [["0", "1"], ["10", "-1/2"]], left=[1])))
     k  Z
     0  1
    10  -1/2
    """
    lines = [list(head), *(list(row) for row in rows)]
    widths = [max(len(line[n]) for line in lines) for n in range(len(head))]
    text = []
    for line in lines:
        columns = enumerate(zip(line, widths, strict=True))
        cells = [cell.ljust(width) if n in left else cell.rjust(width) for n, (cell, width) in columns]
        text.append("  ".join(cells).rstrip())
    return text


def charge_word(charge: Charge) -> str:
    return ",".join(str(k) for k in charge)


def theory_text(case: Case) -> str:
    """The gauge groups and their matter in one line."""
    parts = []
    for node in case.theory.nodes:
        matter = [
            f"{len(masses)} {name}{'s' if len(masses) > 1 else ''}"
            for name, masses in (
                ("antifundamental", node.antifundamental),
                ("fundamental", node.fundamental),
                ("adjoint", node.adjoint),
            )
            if masses
        ]
        parts.append(f"{node.name}: U({node.rank})" + (f" with {', '.join(matter)}" if matter else ""))
    for edge in case.theory.edges:
        ends = case.theory.nodes[edge.source].name, case.theory.nodes[edge.target].name
        parts.append(f"bifundamental {ends[0]} -> {ends[1]}")
    return "; ".join(parts)


def heading(header: Header, partial: bool) -> list[str]:
    """What stands above every result: title, theory, path, ratio, hash, warnings, and an empty line."""
    case = header.case
    ratio = case.background.ratio
    lines = [case.title] if case.title else []
    lines += [
        f"theory   {theory_text(case)}",
        f"path     {header.path.text()}; {', then '.join(f'{name} -> 0' for name in header.path.parameters)}",
        *([f"symbols  {', '.join(case.symbols)}"] if case.symbols else []),
        f"ratio    eps2/eps1 = {number_text(ratio)}",
        f"hash     {header.hash}",
    ]
    lines += [f"warning  {warning}" for warning in header.warnings]
    if partial:
        lines.append("PARTIAL  interrupted: only the charges below were finished")
    return [*lines, ""]


def check_lines(checks: Iterable[Check]) -> list[str]:
    lines = []
    for check in checks:
        lines.append(f"  {check.verdict.value:<9}  {check.name} ({check.kind.value})")
        lines.append(f"             {check.evidence}")
        lines.append(f"             source: {check.source}")
    return lines


def limit_text(result: LimitResult) -> str:
    """The coefficients, the paths where they matter, and the certificate."""
    head = ["charge", "weights", "singular", "worst order", "singular clusters", "status", "independence"]
    head += ["approx.", "exact"]
    nested = len(result.header.path.parameters) > 1
    rows = [_limit_row(c, nested=nested) for c in result.coefficients]
    lines = [*heading(result.header, result.partial)[:-1], _route_line(result.route), ""]
    if not rows:
        return "\n".join(lines[:-1]) + "\n"
    lines += table(head, rows, left=[5, 6, 7, 8])
    for c in result.coefficients:
        if c.values:
            lines += ["", f"charge {charge_word(c.charge)}, path by path (the case's own path first)"]
            lines += table(
                ["order", "value", "path"],
                [[str(v.order), number_text(v.value), v.path] for v in c.values],
                left=[1, 2],
            )
    for c in result.coefficients:
        if c.terms is not None:
            lines += ["", f"charge {charge_word(c.charge)}, expansion in t on the case's own path"]
            lines += table(["power", "coefficient"], [[str(n), number_text(v)] for n, v in c.terms], left=[1])
    lines += ["", "certificate", *check_lines(result.checks)]
    return "\n".join(lines) + "\n"


def _route_line(route: RouteRecord) -> str:
    how = ""
    if route.method == "residues":
        how = f"; from residues modulo {route.primes} primes, confirmed by {route.spare_bits} spare bits at least"
    elif route.method == "proved":
        how = f"; from residues modulo {route.primes} primes, beyond a proved bound"
    return f"route    {route.route} ({route.why}){how}"


def _limit_row(c: Coefficient, *, nested: bool) -> list[str]:
    known = (c.configurations, c.singular, c.worst_order, c.singular_clusters)
    counts = ["-" if n is None else str(n) for n in known]
    # With two small parameters the order is that of both together; the check beside says which has how much of it.
    pole = f"pole of order {c.order}" if nested else f"pole t^-{c.order}"
    status = pole if c.status == "pole" else c.status
    if isinstance(c.value, RationalFunction):
        function = c.value
        return [charge_word(c.charge), *counts, status, c.independence or "", "function", function_text(function)]
    power = ""
    if c.value is not None:
        shown = c.value
    elif c.leading is not None:
        shown, power = c.leading, " at that order" if nested else f" t^-{c.order}"
    else:
        shown = c.values[0].value
    independence = c.independence or ("paths differ" if c.values else "-")
    numbers = [f"~{approximate_text(shown)}{power}", f"{number_text(shown)}{power}"]
    return [charge_word(c.charge), *counts, status, independence, *numbers]


def validate_text(result: ValidateResult) -> str:
    """Every check with its verdict, and a sentence that sums up."""
    lines = heading(result.header, result.partial) + check_lines(result.checks)
    return "\n".join([*lines, "", result.summary]) + "\n"


def detect_text(result: DetectResult) -> str:
    """The counts of every charge, then the clusters and the guilty factors."""
    head = ["charge", "weights", "singular", "indeterminate", "vanishing", "worst order", "clusters"]
    head += ["singular clusters"]
    rows = [
        [
            charge_word(c.charge),
            *(str(n) for n in (c.configurations, c.singular, c.indeterminate, c.vanishing, c.worst_order)),
            str(c.all_clusters),
            str(len(c.clusters)),
        ]
        for c in result.charges
    ]
    lines = heading(result.header, result.partial) + table(head, rows)
    for report in result.charges:
        lines += _charge_lines(report, result.header.case)
    return "\n".join(lines) + "\n"


def _charge_lines(report: ChargeReport, case: Case) -> list[str]:
    if not report.clusters and not report.indeterminate_configurations:
        return []
    lines = ["", f"charge {charge_word(report.charge)}"]
    for n, cluster in enumerate(report.clusters[:MOST_SHOWN]):
        compact = "compact" if cluster.compact else "not compact"
        lines.append(
            f"  cluster {n}: order {cluster.order}, {cluster.size} members, Euler number {cluster.euler_number}, "
            f"dimension {cluster.dimension}, {poincare_text(cluster)}, {compact} ({cluster.why})"
        )
        lines += [f"    {m}: {diagrams_text(c, case)}" for m, c in enumerate(cluster.members[:MOST_SHOWN])]
        if cluster.size > MOST_SHOWN:
            lines.append(f"    and {cluster.size - MOST_SHOWN} more members (--json lists all)")
        for e in cluster.exchanges or ():
            lines.append(f"    exchange {e.members[0]} - {e.members[1]}: {_boxes(e.leaves)} for {_boxes(e.enters)}")
    if len(report.clusters) > MOST_SHOWN:
        lines.append(f"  and {len(report.clusters) - MOST_SHOWN} more clusters (--json lists all)")
    for title, listed in (
        ("singular", report.singular_configurations),
        ("indeterminate", report.indeterminate_configurations),
    ):
        for s in listed[:MOST_SHOWN]:
            lines.append(f"  {title} {diagrams_text(s.diagrams, case)}: order {s.order}{', dead' if s.dead else ''}")
            lines += [f"    denominator  {factor_text(f)}" for f in s.factors]
            lines += [f"    numerator    {factor_text(f)}" for f in s.compensating]
        if len(listed) > MOST_SHOWN:
            lines.append(f"  and {len(listed) - MOST_SHOWN} more {title} configurations (--json lists all)")
    return lines


def poincare_text(cluster: ClusterReport) -> str:
    """The Poincaré polynomial, or that there is none; why a component is not compact stands beside it."""
    if cluster.poincare is not None:
        return f"Poincaré polynomial {polynomial_text(cluster.poincare)}"
    return f"no Poincaré polynomial{f' ({cluster.poincare_why})' if cluster.poincare_why else ''}"


def diagrams_text(configuration: Configuration, case: Case, *, empty: str = "-") -> str:
    """Diagrams by their rows, ``empty`` where there is no box; node names only where there are several nodes."""
    nodes = []
    for node, diagrams in zip(case.theory.nodes, configuration, strict=True):
        text = " ".join(f"({','.join(str(row) for row in d)})" if d else empty for d in diagrams)
        nodes.append(f"{node.name} {text}" if len(case.theory.nodes) > 1 else text)
    return "; ".join(nodes)


def factor_text(f: FactorReport) -> str:
    colours = ",".join(str(c) for c in f.colours)
    hook = f", arm {f.arm}, leg {f.leg}" if f.arm is not None else ""
    return f"{f.multiplet} {f.place}, colours {colours}, box ({f.box[0]},{f.box[1]}){hook}: {f.form} = {f.on_path}"


def _boxes(boxes: Iterable[tuple[int, int, int, int]]) -> str:
    return " ".join(f"[node {v} colour {c}: ({i},{j})]" for v, c, i, j in boxes)
