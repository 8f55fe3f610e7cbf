"""Detections as JSON and back: configurations, guilty factors, clusters. Diagrams are lists of rows by node name."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from ratomega.case.case import Case
from ratomega.diagrams.tuples import Configuration
from ratomega.documents.pieces import Document, each, flag, if_given, whole, word
from ratomega.results.detections import (
    ChargeReport,
    ClusterReport,
    DetectResult,
    Exchange,
    FactorReport,
    SingularReport,
)
from ratomega.results.header import Header

__all__ = ["detect_body", "read_detect"]


def detect_body(result: DetectResult) -> Document:
    """What a detection has beside the header."""
    return {"charges": [_charge(c, result.header.case) for c in result.charges]}


def read_detect(document: Mapping[str, Any], header: Header, partial: bool) -> DetectResult:
    """The way back. Raises ``Misfit``, or what Python raises, for anything else."""
    return DetectResult(header, each(lambda c: _read_charge(c, header.case), document["charges"]), partial)


def _diagrams(configuration: Configuration, case: Case) -> Document:
    nodes = zip(case.theory.nodes, configuration, strict=True)
    return {node.name: [list(diagram) for diagram in diagrams] for node, diagrams in nodes}


def _read_diagrams(d: Mapping[str, Any], case: Case) -> Configuration:
    return tuple(
        each(lambda diagram: each(whole, diagram), d[node.name]) for node in case.theory.nodes
    )


def _factor(f: FactorReport) -> Document:
    return {
        "multiplet": f.multiplet,
        "place": f.place,
        "colours": list(f.colours),
        "box": list(f.box),
        "arm": f.arm,
        "leg": f.leg,
        "form": f.form,
        "on_path": f.on_path,
        "within": list(f.within),
    }


def _read_factor(d: Mapping[str, Any]) -> FactorReport:
    row, column = each(whole, d["box"])
    node, colour = each(whole, d["within"])
    return FactorReport(
        word(d["multiplet"]),
        word(d["place"]),
        each(whole, d["colours"]),
        (row, column),
        if_given(whole, d["arm"]),
        if_given(whole, d["leg"]),
        word(d["form"]),
        word(d["on_path"]),
        (node, colour),
    )


def _singular(s: SingularReport, case: Case) -> Document:
    return {
        "diagrams": _diagrams(s.diagrams, case),
        "order": s.order,
        "factors": [_factor(f) for f in s.factors],
        "compensating": [_factor(f) for f in s.compensating],
        "cluster": s.cluster,
        "dead": s.dead,
    }


def _read_singular(d: Mapping[str, Any], case: Case) -> SingularReport:
    return SingularReport(
        _read_diagrams(d["diagrams"], case),
        whole(d["order"]),
        each(_read_factor, d["factors"]),
        each(_read_factor, d["compensating"]),
        if_given(whole, d["cluster"]),
        flag(d["dead"]),
    )


def _exchange(e: Exchange) -> Document:
    return {"members": list(e.members), "leaves": [list(b) for b in e.leaves], "enters": [list(b) for b in e.enters]}


def _read_box(values: object) -> tuple[int, int, int, int]:
    node, colour, row, column = each(whole, values)
    return node, colour, row, column


def _read_exchange(d: Mapping[str, Any]) -> Exchange:
    first, second = each(whole, d["members"])
    return Exchange((first, second), each(_read_box, d["leaves"]), each(_read_box, d["enters"]))


def _cluster(c: ClusterReport, case: Case) -> Document:
    document: Document = {
        "order": c.order,
        "size": c.size,
        "dimension": c.dimension,
        "euler_number": c.euler_number,
        "compact": c.compact,
        "why": c.why,
        "poincare": None if c.poincare is None else list(c.poincare),
        "poincare_why": c.poincare_why,
        "members": [_diagrams(member, case) for member in c.members],
    }
    if c.exchanges is not None:
        document["exchanges"] = [_exchange(e) for e in c.exchanges]
    return document


def _read_cluster(d: Mapping[str, Any], case: Case) -> ClusterReport:
    return ClusterReport(
        whole(d["order"]),
        each(lambda member: _read_diagrams(member, case), d["members"]),
        whole(d["dimension"]),
        flag(d["compact"]),
        word(d["why"]),
        each(_read_exchange, d["exchanges"]) if "exchanges" in d else None,
        None if d["poincare"] is None else each(whole, d["poincare"]),
        word(d["poincare_why"]),
    )


def _charge(c: ChargeReport, case: Case) -> Document:
    return {
        "charge": list(c.charge),
        "configurations": c.configurations,
        "singular": c.singular,
        "indeterminate": c.indeterminate,
        "vanishing": c.vanishing,
        "worst_order": c.worst_order,
        "all_clusters": c.all_clusters,
        "clusters": [_cluster(cluster, case) for cluster in c.clusters],
        "singular_configurations": [_singular(s, case) for s in c.singular_configurations],
        "indeterminate_configurations": [_singular(s, case) for s in c.indeterminate_configurations],
        "vanishing_configurations": [_diagrams(v, case) for v in c.vanishing_configurations],
    }


def _read_charge(d: Mapping[str, Any], case: Case) -> ChargeReport:
    return ChargeReport(
        charge=each(whole, d["charge"]),
        configurations=whole(d["configurations"]),
        singular=whole(d["singular"]),
        indeterminate=whole(d["indeterminate"]),
        vanishing=whole(d["vanishing"]),
        worst_order=whole(d["worst_order"]),
        all_clusters=whole(d["all_clusters"]),
        clusters=each(lambda c: _read_cluster(c, case), d["clusters"]),
        singular_configurations=each(lambda s: _read_singular(s, case), d["singular_configurations"]),
        indeterminate_configurations=each(lambda s: _read_singular(s, case), d["indeterminate_configurations"]),
        vanishing_configurations=each(lambda v: _read_diagrams(v, case), d["vanishing_configurations"]),
    )
