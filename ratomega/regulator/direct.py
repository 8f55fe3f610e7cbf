"""The direct sum: all weights of one charge as exact Laurent series in t, cluster by cluster.

Every weight is expanded to exactly the depth that its own pole and the wanted last power need.
Cost: one product of linear factors and one short series division a configuration.

The sum can be taken in parts, over ranges of the configurations in their order; ``merged`` puts the parts together.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import islice

from ratomega.detector.geometry import is_sink
from ratomega.diagrams.tuples import Charge, Configuration, configurations
from ratomega.exact.laurent import Laurent, Sum, total
from ratomega.weights import ContentsKey, Weights

__all__ = ["ChargeSum", "ClusterSum", "direct_sum", "direct_total", "merged"]

ClusterKey = ContentsKey


@dataclass(frozen=True, slots=True)
class ClusterSum:
    """The sum over one cluster.

    ``lowest_order`` and ``order`` are the least and the greatest order among the members (equal, if all is well);
    ``singular_members`` counts those that diverge on the path; ``has_sink`` is None where it was not asked for.
    """

    size: int
    order: int
    lowest_order: int
    singular_members: int
    has_sink: bool | None
    series: Laurent


@dataclass(frozen=True, slots=True)
class ChargeSum:
    """Z at one charge on one path, to ``precision``, with the clusters it is made of and the counts on the way."""

    charge: Charge
    series: Laurent
    clusters: Mapping[ClusterKey, ClusterSum]
    configurations: int
    singular: int
    indeterminate: int
    worst_order: int


class _Book:
    """What is known of a cluster while its members are met."""

    __slots__ = ("has_sink", "lowest_order", "order", "singular", "size", "sum")

    def __init__(self, order: int, empty: Sum) -> None:
        self.size = self.singular = 0
        self.order = self.lowest_order = order
        self.has_sink: bool | None = None
        self.sum = empty


def _part(weights: Weights, charge: Charge, part: range | None) -> Iterator[Configuration]:
    """The configurations of a charge, or those whose numbers lie in ``part`` (of step 1)."""
    if part is None:
        return configurations(weights.setting.ranks, charge)
    return islice(configurations(weights.setting.ranks, charge, start=part.start), len(part))


def direct_sum(
    weights: Weights, charge: Charge, *, last: int = 0, sinks: bool = False, part: range | None = None
) -> ChargeSum:
    """Sum the weights of one charge, all powers of t up to ``last``; of the configurations in ``part`` if it is given.

    With ``sinks`` the singular clusters are searched for a sink, which decides their compactness.
    """
    precision = last + 1
    books: dict[ClusterKey, _Book] = {}
    count = singular = indeterminate = worst = 0
    for configuration in _part(weights, charge, part):
        weight = weights.weight(configuration)
        key = weights.contents(configuration)
        order, dead = weight.order, weight.dead
        count += 1
        diverges = order > 0 and not dead
        if diverges:
            singular += 1
            worst = max(worst, order)
        elif weight.vanishing_denominators:
            indeterminate += 1
        book = books.get(key)
        if book is None:
            book = books[key] = _Book(order, Sum(precision=precision))
        elif order > book.order:
            book.order = order
        elif order < book.lowest_order:
            book.lowest_order = order
        book.size += 1
        book.singular += diverges
        if sinks and order > 0 and not book.has_sink:
            book.has_sink = is_sink(weights, configuration)
        book.sum.add(weight.laurent(last))
    clusters = {
        key: ClusterSum(b.size, b.order, b.lowest_order, b.singular, b.has_sink, b.sum.series())
        for key, b in books.items()
    }
    series = total((cluster.series for cluster in clusters.values()), precision=precision)
    return ChargeSum(charge, series, clusters, count, singular, indeterminate, worst)


def direct_total(weights: Weights, charge: Charge, *, last: int = 0, part: range | None = None) -> Laurent:
    """The sum of the weights of one charge alone, without clusters: what a further path needs."""
    weighed = (weights.weight(configuration) for configuration in _part(weights, charge, part))
    return total((weight.laurent(last) for weight in weighed), precision=last + 1)


def merged(parts: Sequence[ChargeSum]) -> ChargeSum:
    """The sum over several disjoint parts of one charge, exactly; a cluster may be spread over any of them.

    Parts that cover a charge in order give what ``direct_sum`` gives without parts, the order of the clusters included.
    """
    if len(parts) == 1:
        return parts[0]
    clusters: dict[ClusterKey, ClusterSum] = {}
    for part in parts:
        for key, cluster in part.clusters.items():
            known = clusters.get(key)
            clusters[key] = cluster if known is None else _joined(known, cluster)
    return replace(
        parts[0],
        series=total((part.series for part in parts), precision=parts[0].series.precision),
        clusters=clusters,
        configurations=sum(part.configurations for part in parts),
        singular=sum(part.singular for part in parts),
        indeterminate=sum(part.indeterminate for part in parts),
        worst_order=max(part.worst_order for part in parts),
    )


def _joined(one: ClusterSum, two: ClusterSum) -> ClusterSum:
    sinks = [found for found in (one.has_sink, two.has_sink) if found is not None]
    return ClusterSum(
        one.size + two.size,
        max(one.order, two.order),
        min(one.lowest_order, two.lowest_order),
        one.singular_members + two.singular_members,
        any(sinks) if sinks else None,
        one.series + two.series,
    )
