"""The adjoint of U(N) at masses that are special in the limit alone: siblings of a case on the path.

At a mass t/5 no weight is 1 and at eps1 + t/7 none vanishes, yet the limits are those of mass 0 and eps1:
Z = prod (1 - q^n)^(-N), each compact cluster summing to its Euler number (``special_clusters``), and Z = 1. At a ratio
where weights are singular these are sharp tests of the sum, since members of a cluster must conspire. They are
statements on siblings and prove nothing about the mass of the case itself.

Source: C. Vafa, E. Witten hep-th/9408074 (Euler numbers); common practice (mass eps1).
"""

from __future__ import annotations

from ratomega.case.affine import Affine
from ratomega.case.case import Case
from ratomega.case.theory import Node
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ONE, Rational
from ratomega.validator.identities.siblings import (
    MOST_WORK,
    Evaluate,
    Identity,
    affordable,
    nothing_allowed,
    reach_text,
    sibling,
    single_node,
    smooth_charge,
)
from ratomega.validator.qseries import Series, euler_product
from ratomega.validator.verdict import Check, Kind

__all__ = ["SOFT", "adjoint_node", "check_special_adjoint", "soft_sibling"]

SOFT = Affine(t=Rational(1, 5))
NEAR_EPS1 = Affine(eps1=ONE, t=Rational(1, 7))
NEAR_EPS2 = Affine(eps2=ONE, t=Rational(-1, 3))


def adjoint_node(case: Case) -> Node | None:
    """The one node of a case whose only matter is one adjoint; None for any other case."""
    node = single_node(case)
    if node is None or node.antifundamental or node.fundamental or len(node.adjoint) != 1:
        return None
    return node


def check_special_adjoint(case: Case, evaluate: Evaluate, *, most: int = MOST_WORK) -> Check | None:
    """The totals of the siblings of masses t/5, eps1 + t/7 and eps2 - t/3, for U(N) with one adjoint.

    None for any other theory, or where a resonance sits at charge 1. Cost: three limits, at most ``most``
    configurations in all; the charge is lowered to what is allowed.
    """
    node = adjoint_node(case)
    if node is None or smooth_charge(case) < 1:
        return None
    identity = Identity(
        f"U({node.rank}) with an adjoint of special mass on the path",
        Kind.SIBLING,
        f"Z = prod over n of (1 - q^n)^(-{node.rank}) for the mass t/5, Z = 1 for eps1 + t/7 and for eps2 - t/3, in "
        "the limit t -> 0; other masses than the case has, so this does not prove the case",
        "C. Vafa, E. Witten, arXiv hep-th/9408074; common practice",
    )
    wanted = smooth_charge(case)
    charge = affordable(case, wanted, lambda k: 3, most)
    if charge < 1:
        return identity.undecided(nothing_allowed(most))
    euler = euler_product(Rational(-node.rank), charge)
    one = Series.one(charge)
    rows: list[tuple[str, Number, Number]] = []
    for mass, series in ((SOFT, euler), (NEAR_EPS1, one), (NEAR_EPS2, one)):
        values = evaluate(sibling(case, charge, adjoint=mass))
        rows += [(f"Z_{k} at mass {mass}", values[k], series.coefficients[k]) for k in range(1, charge + 1)]
    return identity.judged(rows, reach_text(charge, wanted, most))


def soft_sibling(case: Case, *, most: int = MOST_WORK) -> Case | None:
    """The sibling of mass t/5 to a charge with at most ``most`` configurations, for U(N) with one adjoint.

    None for any other theory, where a resonance sits at charge 1, or where nothing is allowed.
    """
    node = adjoint_node(case)
    if node is None:
        return None
    charge = affordable(case, smooth_charge(case), lambda k: 1, most)
    return sibling(case, charge, adjoint=SOFT) if charge >= 1 else None
