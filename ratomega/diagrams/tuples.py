"""Configurations: one diagram per colour of every node; enumeration and exact counts.

A configuration is a tuple over nodes of tuples over colours of diagrams.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from functools import lru_cache
from itertools import islice, product
from math import prod

from ratomega.diagrams.young import Diagram, diagrams_of_size

__all__ = [
    "Charge",
    "Configuration",
    "charges_up_to",
    "coloured_partitions",
    "configurations",
    "count_all",
    "count_configurations",
    "splittings",
]

NodeDiagrams = tuple[Diagram, ...]
Configuration = tuple[NodeDiagrams, ...]
Charge = tuple[int, ...]


def splittings(n: int, parts: int) -> Iterator[tuple[int, ...]]:
    """All tuples of ``parts`` non-negative integers with sum ``n``, first entries ascending.

    >>> list(splittings(2, 2))
    [(0, 2), (1, 1), (2, 0)]
    """
    if parts == 0:
        if n == 0:
            yield ()
        return
    if parts == 1:
        yield (n,)
        return
    for first in range(n + 1):
        for rest in splittings(n - first, parts - 1):
            yield (first, *rest)


def node_diagrams(rank: int, charge: int, *, start: int = 0) -> Iterator[NodeDiagrams]:
    """All tuples of ``rank`` diagrams with ``charge`` boxes in total, from number ``start`` on."""
    if rank == 1:
        yield from ((diagram,) for diagram in diagrams_of_size(charge, start=start))
        return
    for sizes in splittings(charge, rank):
        pools = [_pool(n) for n in sizes]
        here = prod(len(diagrams) for diagrams in pools)
        if start >= here:
            start -= here
            continue
        yield from _product_from(pools, start)
        start = 0


@lru_cache(maxsize=64)
def _pool(n: int) -> tuple[Diagram, ...]:
    return tuple(diagrams_of_size(n))


def _product_from(pools: Sequence[Sequence[Diagram]], start: int) -> Iterator[NodeDiagrams]:
    """``itertools.product`` from number ``start`` on, reached without walking there."""
    if start == 0:
        yield from product(*pools)
        return
    first, rest = divmod(start, prod(len(pool) for pool in pools[1:]))
    for tail in _product_from(pools[1:], rest):
        yield (pools[0][first], *tail)
    yield from product(pools[0][first + 1 :], *pools[1:])


def configurations(ranks: Sequence[int], charge: Charge, *, start: int = 0) -> Iterator[Configuration]:
    """All configurations of the given charge, in a fixed order, from number ``start`` on.

    Cost of the start: whole splittings of the first node are passed over by their counts, nothing is walked through.

    >>> len(list(configurations([2], (3,)))), next(configurations([1, 1], (1, 2)))
    (10, (((1,),), ((2,),)))
    >>> next(configurations([2], (3,), start=7))
    (((3,), ()),)
    """
    later = [tuple(node_diagrams(rank, k)) for rank, k in zip(ranks[1:], charge[1:], strict=True)]
    first, rest = divmod(start, prod(len(node) for node in later))
    for head in node_diagrams(ranks[0], charge[0], start=first):
        for tail in islice(product(*later), rest, None):
            yield (head, *tail)
        rest = 0


def coloured_partitions(rank: int, charge: int) -> list[int]:
    """The coefficients of prod 1/(1 - q^n)^rank up to q^charge. Cost: charge^2.

    >>> coloured_partitions(2, 4)
    [1, 2, 5, 10, 20]
    """
    # n c_n = rank * sum_k sigma(k) c_{n-k}, from the logarithmic derivative of the product.
    divisor_sums = [0] * (charge + 1)
    for d in range(1, charge + 1):
        for multiple in range(d, charge + 1, d):
            divisor_sums[multiple] += d
    counts = [1]
    for n in range(1, charge + 1):
        counts.append(rank * sum(divisor_sums[k] * counts[n - k] for k in range(1, n + 1)) // n)
    return counts


def count_configurations(ranks: Sequence[int], charge: Charge) -> int:
    """How many configurations there are, from the generating function prod 1/(1 - q^n)^rank of every node.

    >>> count_configurations([2], (4,)), count_configurations([1], (5,))
    (20, 7)
    """
    result = 1
    for rank, k in zip(ranks, charge, strict=True):
        result *= coloured_partitions(rank, k)[k]
    return result


def count_all(ranks: Sequence[int], bound: int | Sequence[int]) -> int:
    """How many configurations there are at all charges within ``bound``, without listing a charge.

    >>> count_all([2], 4), count_all([1, 1], [1, 2])
    (38, 8)
    """
    if isinstance(bound, int):
        return sum(coloured_partitions(sum(ranks), bound))
    result = 1
    for rank, k in zip(ranks, bound, strict=True):
        result *= sum(coloured_partitions(rank, k))
    return result


def charges_up_to(bound: int | Sequence[int], nodes: int) -> tuple[Charge, ...]:
    """Every charge within ``bound``: an integer bounds the total, a sequence bounds each node.

    Ordered by total, then by the entries from the left, descending.

    >>> charges_up_to(1, 2), charges_up_to([1, 1], 2)
    (((0, 0), (1, 0), (0, 1)), ((0, 0), (1, 0), (0, 1), (1, 1)))
    """
    if isinstance(bound, int):
        return tuple(c for n in range(bound + 1) for c in sorted(splittings(n, nodes), reverse=True))
    every = product(*(range(k + 1) for k in bound))
    return tuple(sorted(every, key=lambda c: (sum(c), [-k for k in c])))
