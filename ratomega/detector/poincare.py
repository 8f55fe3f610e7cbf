"""The Poincaré polynomial of the component of the fixed locus that a cluster stands for.

At a member all tangent weights of the component are a_first - a_second + p eps1 + q eps2: trivial at the limit point,
not trivial for the full torus, which fixes the member alone. A one-parameter group of the full torus, a small direction
off the limit point, gives each of them a sign. Where the component is compact it falls into one cell for every member,
an affine space whose dimension is the number of negative weights there (Bialynicki-Birula 1973). So the polynomial in
q = t^2 is the number of members by their number of negative weights, and it is the same for every direction.

Three directions are counted, eps1 >> eps2 >> Coulomb, eps2 >> eps1 >> Coulomb and Coulomb >> eps1 >> eps2, and their
opposites, which count the positive weights. A component that is not compact can have cells that depend on the
direction; no polynomial is given for one. Where directions differ on a component that is called compact, none is given
either, and ``disagreement`` says what was found.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass

from ratomega.detector.clusters import Cluster
from ratomega.diagrams.tuples import Configuration
from ratomega.weights import Weights

__all__ = ["Poincare", "cell_counts", "poincare_polynomial", "polynomial_text"]

TangentWeight = tuple[int, int, int, int]
Direction = Callable[[TangentWeight], tuple[int, int, int]]


@dataclass(frozen=True, slots=True)
class Poincare:
    """``coefficients`` of 1, q, q^2, ... up to the dimension; None where there is no polynomial.

    ``disagreement`` is empty unless the component is called compact and two directions count different cells.
    """

    coefficients: tuple[int, ...] | None
    disagreement: str = ""


def _colours(weight: TangentWeight) -> int:
    # a_1 >> a_2 >> ...: the difference has the sign of the order of the colours.
    return weight[1] - weight[0]


DIRECTIONS: dict[str, Direction] = {
    "eps1 >> eps2 >> Coulomb": lambda w: (w[2], w[3], _colours(w)),
    "eps2 >> eps1 >> Coulomb": lambda w: (w[3], w[2], _colours(w)),
    "Coulomb >> eps1 >> eps2": lambda w: (_colours(w), w[2], w[3]),
}


def cell_counts(
    weights: Weights, members: Iterable[Configuration], dimension: int
) -> dict[str, tuple[int, ...]]:
    """By direction: how many members have 0, 1, ..., dimension negative tangent weights.

    Cost: one pass over the members, as much as computing their weights once.
    """
    counts = {name: [0] * (dimension + 1) for name in DIRECTIONS}
    for member in members:
        tangent = tuple(weights.tangent_points(member))
        for name, key in DIRECTIONS.items():
            counts[name][sum(1 for weight in tangent if key(weight) < (0, 0, 0))] += 1
    return {name: tuple(found) for name, found in counts.items()}


def poincare_polynomial(weights: Weights, cluster: Cluster) -> Poincare:
    """The Poincaré polynomial of the component of a cluster, no polynomial where it is not compact.

    >>> from ratomega.case.reading import load_case
    >>> from ratomega.case.setting import own_setting
    >>> from ratomega.detector.clusters import find_clusters
    >>> from ratomega.detector.zeros import scan
    >>> case = load_case({"charge": 4, "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["0"]}]})
    >>> weights = Weights(own_setting(case))
    >>> [poincare_polynomial(weights, x).coefficients for x in find_clusters(weights, (4,), scan(weights, (4,)))]
    [(1, 1), (1, 1, 1)]
    """
    if not cluster.compactness.compact:
        return Poincare(None)
    found = cell_counts(weights, (member.configuration for member in cluster.members), cluster.dimension)
    first = next(iter(found.values()))
    if all(counts == first == counts[::-1] for counts in found.values()):
        return Poincare(first)
    each = "; ".join(f"{polynomial_text(counts)} for {name}" for name, counts in found.items())
    return Poincare(None, f"cells depend on the direction: {each}")


def polynomial_text(coefficients: Sequence[int]) -> str:
    """The polynomial in q.

    >>> polynomial_text((1, 2, 1)), polynomial_text((3, 0, 1)), polynomial_text((0,))
    ('1 + 2*q + q^2', '3 + q^2', '0')
    """
    terms = []
    for power, count in enumerate(coefficients):
        if count:
            name = "" if power == 0 else "q" if power == 1 else f"q^{power}"
            terms.append(name if name and count == 1 else f"{count}*{name}" if name else str(count))
    return " + ".join(terms) or "0"
