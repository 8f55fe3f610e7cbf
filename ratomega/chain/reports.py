"""The detector's findings as the report of one charge."""

from __future__ import annotations

from ratomega.detector.clusters import Cluster, cluster_graph, find_clusters, tagged_boxes
from ratomega.detector.poincare import poincare_polynomial
from ratomega.detector.zeros import Zeros, guilty_factors, scan
from ratomega.diagrams.tuples import Charge, Configuration
from ratomega.results.detections import ChargeReport, ClusterReport, Exchange, FactorReport, SingularReport
from ratomega.weights import Factor, Weights

__all__ = ["charge_report"]


def charge_report(weights: Weights, charge: Charge, *, exchanges: int = 0) -> ChargeReport:
    """Everything the detector says of one charge; exchange edges in clusters of at most ``exchanges`` members."""
    found = tuple(scan(weights, charge))
    grouped = find_clusters(weights, charge, found)
    guilty = [cluster for cluster in grouped if cluster.singular]
    index = {member.configuration: n for n, cluster in enumerate(guilty) for member in cluster.members}
    singular = tuple(_singular_report(weights, zeros, index) for zeros in found if zeros.singular)
    indeterminate = tuple(_singular_report(weights, zeros, index) for zeros in found if zeros.indeterminate)
    vanishing = tuple(zeros.configuration for zeros in found if zeros.vanishing)
    return ChargeReport(
        charge=charge,
        configurations=len(found),
        singular=len(singular),
        indeterminate=len(indeterminate),
        vanishing=len(vanishing),
        worst_order=max((zeros.order for zeros in found if zeros.singular), default=0),
        all_clusters=len(grouped),
        clusters=tuple(_cluster_report(weights, cluster, exchanges) for cluster in guilty),
        singular_configurations=singular,
        indeterminate_configurations=indeterminate,
        vanishing_configurations=vanishing,
    )


def _singular_report(weights: Weights, zeros: Zeros, index: dict[Configuration, int]) -> SingularReport:
    down, up = guilty_factors(weights, zeros.configuration)
    return SingularReport(
        zeros.configuration,
        zeros.order,
        tuple(_factor_report(f) for f in down),
        tuple(_factor_report(f) for f in up),
        index.get(zeros.configuration),
        zeros.dead,
    )


def _factor_report(f: Factor) -> FactorReport:
    return FactorReport(f.multiplet, f.place, f.colours, f.box, f.arm, f.leg, f.form, str(f.value), f.within)


def _cluster_report(weights: Weights, cluster: Cluster, exchanges: int) -> ClusterReport:
    members = tuple(member.configuration for member in cluster.members)
    edges: tuple[Exchange, ...] | None = None
    if 0 < len(members) <= exchanges:
        graph = cluster_graph([cluster], exchanges=True, largest=exchanges)
        place = {member: n for n, member in enumerate(members)}
        edges = tuple(_exchange(place[one], place[two], one, two) for one, two in graph.edges)
    polynomial = poincare_polynomial(weights, cluster)
    return ClusterReport(
        cluster.order,
        members,
        cluster.dimension,
        cluster.compactness.compact,
        cluster.compactness.why,
        edges,
        polynomial.coefficients,
        polynomial.disagreement,
    )


def _exchange(first: int, second: int, one: Configuration, two: Configuration) -> Exchange:
    if first > second:
        first, second, one, two = second, first, two, one
    before, after = tagged_boxes(one), tagged_boxes(two)
    leaves = tuple((v + 1, c + 1, i, j) for v, c, i, j in sorted(before - after))
    enters = tuple((v + 1, c + 1, i, j) for v, c, i, j in sorted(after - before))
    return Exchange((first, second), leaves, enters)
