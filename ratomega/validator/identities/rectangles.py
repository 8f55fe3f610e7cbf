"""The adjoint of U(N) near mass eps1: only rectangles contribute to the first order.

An adjoint weight depends on its mass through u = m (eps - m) alone, and Z_k is a polynomial of degree N k in u. At
m = eps1 it vanishes, k >= 1. Its slope there is a sum over rectangles of p by r boxes, p r = k:

    (eps2 - eps1) dZ_k/du = dZ_k/dm = sum_{p r = k} (p eps1 - r eps2)/(p r eps1 eps2) S_{pr},
    S_{pr} = sum_j prod_{i != j} (x + p eps1)(x + r eps2)/(x (x + p eps1 + r eps2)),   x = a_j - a_i.

At eps1 = eps2 both sides vanish and the slope in u is the limit of their quotient; in m = eps1 + mu it is minus the
coefficient of mu^2. The polynomial is found exactly from N k + 1 limits at numeric masses, the case's own among them. A
slope alone would let a constant through: so Z_k at m = eps1 and at m = 0 are compared as well.

Source: S. Chester, S. Pufu 2020, arXiv 2003.08412, from memory; rederived.
"""

from __future__ import annotations

from collections.abc import Sequence

from ratomega.case.affine import Affine
from ratomega.case.case import Case
from ratomega.case.setting import own_setting
from ratomega.exact.laurent import Laurent, total
from ratomega.exact.quadratic import Number, only_rational
from ratomega.exact.rational import ZERO, Rational
from ratomega.validator.identities.newton import value_and_slope
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
from ratomega.validator.limit_point import NodePoint, limit_point
from ratomega.validator.qseries import euler_product
from ratomega.validator.verdict import Check, Kind

__all__ = ["check_rectangles", "rectangle_slope"]


def check_rectangles(case: Case, evaluate: Evaluate, *, most: int = MOST_WORK) -> Check | None:
    """The slope of Z in the adjoint mass at eps1 against the sum over rectangles, for U(N) with one adjoint.

    None for any other theory, or where a resonance sits at charge 1. Cost: N k + 1 limits to charge k, at most ``most``
    configurations in all; k is lowered to what is allowed.
    """
    node = single_node(case)
    if node is None or node.antifundamental or node.fundamental or len(node.adjoint) != 1:
        return None
    wanted = smooth_charge(case)
    if wanted < 1:
        return None
    identity = Identity(
        f"rectangles: U({node.rank}) with an adjoint near mass eps1",
        Kind.SIBLING,
        "dZ_k/dm at m = eps1 is a sum over rectangles of p by r boxes, p r = k (at eps1 = eps2 the coefficient of "
        "(m - eps1)^2); Z = 1 there, and prod over n of (1 - q^n)^(-N) at m = 0; three statements on all masses "
        "together, which do not fix Z at one of them",
        "S. Chester, S. Pufu 2020, from memory; rederived",
    )
    charge = affordable(case, wanted, lambda k: node.rank * k + 1, most)
    if charge < 1:
        return identity.undecided(nothing_allowed(most))
    setting = own_setting(case)
    point = limit_point(setting)
    own, masses = point.nodes[0].adjoint[0], _masses(point.nodes[0], point.eps, node.rank * charge + 1)
    # The case's own mass keeps its expression; the others are typed numbers.
    cases = [case.with_charge(charge)] + [sibling(case, charge, adjoint=Affine(m)) for m in masses[1:]]
    nodes = [m * (point.eps - m) for m in (own, *masses[1:])]
    values = [list(evaluate(one)) for one in cases]
    euler = euler_product(Rational(-node.rank), charge)
    rows: list[tuple[str, Number, Number]] = []
    for k in range(1, charge + 1):
        known = node.rank * k + 1
        sums = [row[k] for row in values[:known]]
        massless, _ = value_and_slope(ZERO, nodes[:known], sums)
        value, slope = value_and_slope(point.eps1 * point.eps2, nodes[:known], sums)
        expected = rectangle_slope(point.nodes[0].coulomb, point.eps1, point.eps2, k)
        rows.append((f"Z_{k} at m = 0", massless, euler.coefficients[k]))
        rows.append((f"Z_{k} at m = eps1", value, ZERO))
        rows.append((f"the slope of Z_{k} in m (eps - m) at m = eps1", slope, expected))
    reach = reach_text(charge, wanted, most)
    note = f"Z as a polynomial in m from {len(cases)} masses, the case's own among them; {reach}"
    return identity.judged(rows, note)


def _masses(node: NodePoint, eps: Rational, number: int) -> list[Number]:
    """``number`` masses, the node's own first, no two with the same u; rational ones on one side of eps/2."""
    masses: list[Number] = [node.adjoint[0]]
    step = 1
    while len(masses) < number:
        mass = eps / 2 + Rational(step, 7)
        if all(mass not in (other, eps - other) for other in masses):
            masses.append(mass)
        step += 1
    return masses


def rectangle_slope(coulomb: Sequence[Number], eps1: Rational, eps2: Rational, charge: int) -> Number:
    """dZ_k/du at u = eps1 eps2 from the sum over rectangles.

    Coulomb parameters that agree, and eps1 = eps2, are reached along a line: in the end the poles cancel.

    >>> rectangle_slope([Rational(1, 3), Rational(-1, 3)], Rational(1), Rational(1), 1)
    -23/16
    """
    precision = len(coulomb) + 3

    def line(constant: Number, slope: int) -> Laurent:
        return Laurent.from_coefficients(0, [constant, slope], precision=precision)

    first = line(eps1, 0)
    second = line(eps2, 1 if eps1 == eps2 else 0)
    colours = [line(a, 3 + n * n) for n, a in enumerate(coulomb)]
    terms = []
    for p in range(1, charge + 1):
        if charge % p:
            continue
        r = charge // p
        wide, high = first.scaled(p), second.scaled(r)
        outer = (wide - high) / (first * second).scaled(p * r)
        for j, a in enumerate(colours):
            term = outer
            for i, b in enumerate(colours):
                if i != j:
                    x = a - b
                    term = term * (x + wide) * (x + high) / (x * (x + wide + high))
            terms.append(term)
    found = total(terms, precision=precision) / (second - first)
    if found.valuation < 0:
        raise ArithmeticError(f"the sum over rectangles keeps a pole at {only_rational(eps2 / eps1)}: a resonance")
    return found.coefficient(0)
