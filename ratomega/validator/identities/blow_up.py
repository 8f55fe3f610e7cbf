"""The blow-up of the plane at one point: bilinear relations between Z and Z at the two patches of the blow-up.

For U(2) without matter, e = eps1 + eps2, at orders u^0, ..., u^3,

    sum_k q^(k^2) / l_k exp(u (2 k a + k^2 e)) Z(eps1, eps2 - eps1, a + k eps1; q exp(u eps1))
                                               Z(eps1 - eps2, eps2, a + k eps2; q exp(u eps2)) = Z(eps1, eps2, a; q).

l_k is a product over p = ±2k, x = ±2a (signs together): for p < 0 of x - i eps1 - j eps2, i, j >= 0, i + j <= -p - 1;
for p > 1 of x + (i + 1) eps1 + (j + 1) eps2, i, j >= 0, i + j <= p - 2. A patch can itself sit at a rational ratio at
which weights are singular: (1, 2) has the patch (1, 1). At eps1 = eps2 a patch has a vanishing rotation, and there is
no such relation. Z at all places is our own: a check of consistency.

Source: H. Nakajima, K. Yoshioka math/0306198.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from math import factorial, isqrt

from ratomega.case.case import Case
from ratomega.case.setting import own_setting
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ONE, ZERO, Rational
from ratomega.validator.identities.siblings import (
    MOST_WORK,
    Evaluate,
    Identity,
    affordable,
    is_smooth,
    nothing_allowed,
    reach_text,
    sibling,
    single_node,
    smooth_charge,
)
from ratomega.validator.limit_point import LimitPoint, limit_point
from ratomega.validator.verdict import Check, Kind

__all__ = ["blow_up_factor", "check_blow_up"]

ORDERS = 4


def check_blow_up(case: Case, evaluate: Evaluate, *, most: int = MOST_WORK) -> Check | None:
    """The relations for U(2) without matter; undecided at eps1 = eps2 and where a shifted parameter is resonant.

    None for any other theory, or where a resonance sits at charge 1. Cost: 2 (2 sqrt(k) + 1) + 1 limits to charge k at
    most, ``most`` configurations in all; k is lowered to what is allowed.
    """
    node = single_node(case)
    if node is None or node.rank != 2 or node.antifundamental or node.fundamental or node.adjoint:
        return None
    wanted = smooth_charge(case)
    if wanted < 1:
        return None
    identity = Identity(
        "blow-up relations of U(2)",
        Kind.CONSISTENCY,
        "sum_k q^(k^2)/l_k exp(u(2ka + k^2 eps)) Z(eps1, eps2-eps1, a+k eps1; q e^(u eps1)) "
        "Z(eps1-eps2, eps2, a+k eps2; q e^(u eps2)) = Z + O(u^4)",
        "H. Nakajima, K. Yoshioka, arXiv math/0306198",
    )
    point = limit_point(own_setting(case))
    if point.eps1 == point.eps2:
        return identity.undecided("at eps1 = eps2 a patch of the blow-up has a vanishing rotation, and is no case")
    charge = affordable(case, wanted, lambda k: 2 * (2 * isqrt(k) + 1) + 1, most)
    if charge < 1:
        return identity.undecided(nothing_allowed(most))
    a = (point.nodes[0].coulomb[0] - point.nodes[0].coulomb[1]) / 2
    patches = {k: _patches(case, point, a, k, charge - k * k) for k in range(-isqrt(charge), isqrt(charge) + 1)}
    for k, pair in patches.items():
        if blow_up_factor(k, a, point.eps1, point.eps2) == 0 or not all(is_smooth(patch) for patch in pair):
            return identity.undecided(f"the Coulomb parameter shifted by {k} is resonant at a patch")
    own = evaluate(case.with_charge(charge))
    found = {k: (evaluate(one), evaluate(two)) for k, (one, two) in patches.items()}
    rows = _rows(point, a, own, found, charge)
    places = ", ".join(f"({e1}, {e2})" for e1, e2 in _backgrounds(point))
    note = f"Z at (eps1, eps2) = {places} and shifted a, orders u^0 to u^3; {reach_text(charge, wanted, most)}"
    return identity.judged(rows, note)


def _backgrounds(point: LimitPoint) -> tuple[tuple[Rational, Rational], tuple[Rational, Rational]]:
    return (point.eps1, point.eps2 - point.eps1), (point.eps1 - point.eps2, point.eps2)


def _patches(case: Case, point: LimitPoint, a: Number, k: int, charge: int) -> tuple[Case, Case]:
    one, two = _backgrounds(point)
    left, right = a + k * point.eps1, a + k * point.eps2
    return (
        sibling(case, charge, background=one, coulomb=[left, -left]),
        sibling(case, charge, background=two, coulomb=[right, -right]),
    )


def blow_up_factor(k: int, a: Number, eps1: Rational, eps2: Rational) -> Number:
    """l_k.

    >>> blow_up_factor(0, Rational(1, 3), ONE, ONE), blow_up_factor(1, Rational(1, 3), ONE, Rational(2))
    (1, -880/81)
    """
    value: Number = ONE
    for p, x in ((2 * k, 2 * a), (-2 * k, -2 * a)):
        for i in range(abs(p)):
            for j in range(abs(p) - i):
                if p < 0:
                    value = value * (x - i * eps1 - j * eps2)
                elif i + j <= p - 2:
                    value = value * (x + (i + 1) * eps1 + (j + 1) * eps2)
    return value


def _rows(
    point: LimitPoint,
    a: Number,
    own: Sequence[Number],
    patches: dict[int, tuple[Sequence[Number], Sequence[Number]]],
    charge: int,
) -> Iterator[tuple[str, Number, Number]]:
    """The coefficient of q^n u^j on the left, and what it should be."""
    for n in range(charge + 1):
        sums: list[Number] = [ZERO] * ORDERS
        for k, (one, two) in patches.items():
            factor = blow_up_factor(k, a, point.eps1, point.eps2)
            for left in range(n - k * k + 1):
                right = n - k * k - left
                rate = 2 * k * a + k * k * point.eps + left * point.eps1 + right * point.eps2
                term = one[left] * two[right] / factor
                for j in range(ORDERS):
                    sums[j] = sums[j] + term / factorial(j)
                    term = term * rate
        for j, found in enumerate(sums):
            yield f"the coefficient of q^{n} u^{j}", found, own[n] if j == 0 else ZERO
