"""The components of the fixed locus: cells that do not depend on the direction, and their generating function.

Two checks on the geometry that the detector finds. Cells of a compact component, counted from three directions off the
limit point and their opposites, are as many of every dimension (consistency: they are counted from our own tangent
weights). Where no Coulomb difference of a node lies on the lattice of eps1 and eps2, the fixed locus is a product over
colours, and the Poincaré polynomials of all components of one colour add up to a product (Buryak, Feigin),

    sum_n P_n t^n = prod_{(alpha+beta) not dividing i} 1/(1 - t^i) prod_i 1/(1 - q t^((alpha+beta) i)),

at eps1 : eps2 = alpha : beta > 0; at a negative ratio every component is a point. That formula shares nothing with the
count of cells, and fixes no coefficient of Z.

Sources: A. Bialynicki-Birula 1973; A. Buryak, B. Feigin 1206.5640.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence
from itertools import combinations

from ratomega.case.setting import Setting
from ratomega.detector.clusters import find_clusters
from ratomega.detector.poincare import poincare_polynomial, polynomial_text
from ratomega.detector.zeros import scan
from ratomega.diagrams.tuples import Charge, count_configurations
from ratomega.exact.quadratic import as_integer, only_rational
from ratomega.exact.rational import Rational
from ratomega.validator.depth import FULL, beyond, too_costly
from ratomega.validator.finiteness import charge_text, reach_text
from ratomega.validator.verdict import Check, Kind, Verdict
from ratomega.weights import Weights

__all__ = ["MOST_WORK", "check_components"]

MOST_WORK = 5_000
"""How many configurations are looked at, unless the caller says otherwise: about a second."""

_CELLS = "cells of the components"
_PRODUCT = "Poincaré polynomials of all components"

Polynomial = Counter[int]


def check_components(weights: Weights, charges: Sequence[Charge], *, most: int = MOST_WORK) -> tuple[Check, ...]:
    """Both checks at the charges, in their order, as long as ``most`` configurations are not exceeded in all.

    The second is left out where a Coulomb difference lies on the lattice. Undecided where only charge 0 is reached.
    """
    setting = weights.setting
    product = _generic(setting)
    reached, left = [], most
    for charge in charges:
        left -= count_configurations(setting.ranks, charge)
        if left < 0:
            break
        reached.append(charge)
    if not any(any(charge) for charge in reached):
        what = f"more than {most} configurations at the first charge"
        why = f"not run: {too_costly(what, most=most, full=FULL.configurations, less='take fewer colours')}"
        return tuple(
            Check(name, Verdict.UNDECIDED, kind, why, source)
            for name, kind, source in (_PLAIN_CELLS, *([_PLAIN_PRODUCT] if product else []))
        )
    tables = [_node_table(setting, node.rank, max(c[v] for c in reached)) for v, node in enumerate(setting.nodes)]
    compact = open_ones = 0
    disagreement = difference = ""
    for charge in reached:
        found: Polynomial = Counter()
        for cluster in find_clusters(weights, charge, scan(weights, charge)):
            polynomial = poincare_polynomial(weights, cluster)
            if polynomial.coefficients is not None:
                compact += 1
                found.update(dict(enumerate(polynomial.coefficients)))
            elif polynomial.disagreement:
                disagreement = disagreement or f"{charge_text(charge)}: {polynomial.disagreement}"
            else:
                open_ones += 1
        if product and not difference:
            difference = _difference(charge, found, _expected(tables, charge))
    cut = f" ({beyond(most=most, full=FULL.configurations)})" if len(reached) < len(charges) else ""
    reach = reach_text(reached) + cut
    return tuple(_checks(product, disagreement, difference, compact, open_ones, reach))


_PLAIN_CELLS = (_CELLS, Kind.CONSISTENCY, "A. Bialynicki-Birula 1973")
_PLAIN_PRODUCT = (_PRODUCT, Kind.GEOMETRY, "A. Buryak, B. Feigin, arXiv 1206.5640")


def _checks(
    product: bool, disagreement: str, difference: str, compact: int, open_ones: int, reach: str
) -> Iterator[Check]:
    name, kind, source = _PLAIN_CELLS
    if disagreement:
        evidence = f"a component called compact has {disagreement}"
        yield Check(name, Verdict.REFUTED, kind, evidence, source)
    else:
        note = f"; {open_ones} components are not compact and have no polynomial" if open_ones else ""
        evidence = f"{compact} compact components have the same cells from three directions and their opposites{note}"
        yield Check(name, Verdict.AGREES, kind, f"{evidence}; {reach}", source)
    if product:
        name, kind, source = _PLAIN_PRODUCT
        evidence = (
            "at eps1 : eps2 = alpha : beta they add up, over all components, to a coefficient of the product over "
            "colours and i >= 1 of 1/(1 - t^i), or 1/(1 - q t^i) where alpha + beta divides i (for no i at a negative "
            "ratio)"
        )
        verdict = Verdict.REFUTED if difference else Verdict.AGREES
        yield Check(name, verdict, kind, f"{evidence}; {difference or f'equal {reach}'}", source)


def _generic(setting: Setting) -> bool:
    """No difference of Coulomb parameters of a node is an integer combination of eps1 and eps2 at the limit point."""
    ratio = only_rational(setting.eps2.constant / setting.eps1.constant)
    unit = setting.eps1.constant / Rational(ratio.q)
    return all(
        as_integer((a.constant - b.constant) / unit) is None
        for node in setting.nodes
        for a, b in combinations(node.coulomb, 2)
    )


def _node_table(setting: Setting, rank: int, top: int) -> list[Polynomial]:
    """By charge of one node: the sum of the Poincaré polynomials, from the product formula."""
    ratio = only_rational(setting.eps2.constant / setting.eps1.constant)
    step = int(ratio.p) + int(ratio.q) if ratio > 0 else top + 1
    table: list[Polynomial] = [Counter() for _ in range(top + 1)]
    table[0][0] = 1
    for _ in range(rank):
        for i in range(1, top + 1):
            for n in range(i, top + 1):
                for power, count in list(table[n - i].items()):
                    table[n][power + (i % step == 0)] += count
    return table


def _expected(tables: Sequence[list[Polynomial]], charge: Charge) -> Polynomial:
    result: Polynomial = Counter({0: 1})
    for table, k in zip(tables, charge, strict=True):
        factors, result = result, Counter()
        for power, count in factors.items():
            for more, times in table[k].items():
                result[power + more] += count * times
    return result


def _difference(charge: Charge, found: Polynomial, expected: Polynomial) -> str:
    if found == expected:
        return ""
    texts = [polynomial_text([one[p] for p in range(max(one, default=0) + 1)]) for one in (found, expected)]
    return f"first difference at {charge_text(charge)}: found {texts[0]}, product {texts[1]}"
