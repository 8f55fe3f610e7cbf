"""Large Coulomb parameters: the prepotential and the first gravitational terms, from limits at the case's own ratio.

Z depends on ratios of its parameters alone, up to powers: scaling all Coulomb parameters and masses by s is scaling
eps1 and eps2 by 1/s. So the flat-space limit of -eps1 eps2 log Z is read off from its growth in s, at the very ratio of
the case, singular or not. Its poles in s are known, so it is a polynomial over a known denominator, which finitely many
limits fix; the case's own parameters (s = 1) are among them.

*U(2) without matter*, x = a^2, k instantons: -eps1 eps2 [log Z]_k = F_k x^(1-2k) + (eps1 eps2 A_k + (eps1^2 + eps2^2)
B_k / 3) x^(-2k) + ... . With u = <Tr phi^2>/2 on the curve y^2 = (z^2 - u)^2 - 4 q the period is
a = sqrt(u) 2F1(-1/4, 1/4; 1; 4 q/u^2), and u = a^2 + sum k F_k q^k a^(2-4k) (Matone),
A = -log(du/d(a^2))/2, B = -log((u^2 - 4q)/a^4)/8.
*U(N) with flavours*, one instanton: F_1 = (-1)^N sum_k prod_f (a_k + m_f) / prod_{j != k} (a_k - a_j)^2.

Sources: Seiberg, Witten hep-th/9407087; Klemm, Lerche, Theisen hep-th/9505150; Matone hep-th/9506102; Nakajima,
Yoshioka math/0311058; D'Hoker, Krichever, Phong hep-th/9609041.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from ratomega.case.case import Case
from ratomega.case.setting import own_setting
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ONE, ZERO, Rational
from ratomega.validator.depth import FULL
from ratomega.validator.identities.newton import leading_two
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
from ratomega.validator.qseries import Series, hypergeometric
from ratomega.validator.verdict import Check, Kind

__all__ = ["check_one_instanton", "check_seiberg_witten", "seiberg_witten_terms"]

# Limits at many points for one number: beyond this charge they say nothing new.
HIGHEST_CHARGE = 8


# ---- U(2) without matter, from the curve


def seiberg_witten_terms(order: int) -> tuple[Series, Series, Series]:
    """(F, A, B) as series in q at a = 1, constant terms 0.

    >>> [str(c) for c in seiberg_witten_terms(3)[0].coefficients]
    ['0', '1/2', '5/64', '3/64']
    """
    quarter = Rational(1, 4)
    # a^2 / u as a series in v = q/u^2, and u / a^2 = g as a series in q/a^4 with v = (q/a^4) / g^2.
    ratio = hypergeometric([-quarter, quarter], [ONE], Rational(4), order)
    period = ratio * ratio
    inverse = Series.one(order)
    for _ in range(order):
        v = Series((ZERO, *(inverse * inverse).inverse().coefficients[:order]))
        inverse = _composed(period, v).inverse()
    prepotential = Series((ZERO, *(inverse.coefficients[k] / k for k in range(1, order + 1))))
    # d(u)/d(a^2) at fixed q: u = a^2 g(q/a^4) gives g - 2 q g'.
    speed = Series(tuple((1 - 2 * k) * c for k, c in enumerate(inverse.coefficients)))
    discriminant = inverse * inverse + Series.make([0, -4, *[0] * order][: order + 1])
    return prepotential, speed.log().scaled(-Rational(1, 2)), discriminant.log().scaled(-Rational(1, 8))


def _composed(outer: Series, inner: Series) -> Series:
    """outer(inner), the inner one without constant term."""
    result = Series.one(inner.order).scaled(ZERO)
    for c in reversed(outer.coefficients):
        result = result * inner + Series.one(inner.order).scaled(c)
    return result


def _poles(charge: int) -> Iterator[tuple[int, int]]:
    """(m, n) as often as 4 a^2 = (m eps1 + n eps2)^2 can be a pole of [log Z]_charge, products of lower charges too."""
    for m in range(1, charge + 1):
        for n in range(1, charge // m + 1):
            for _ in range(charge // (m * n)):
                yield m, n


def check_seiberg_witten(case: Case, evaluate: Evaluate, *, most: int = MOST_WORK) -> Check | None:
    """F_k and the two terms after it against the curve, for U(2) without matter.

    None for any other theory, or where a resonance sits at charge 1. Cost: about as many limits to charge k as
    [log Z]_k has poles beyond what its growth takes away (1, 2, 3, 7, 8, 15 for k = 1..6), at most ``most``
    configurations in all; k is lowered to what is allowed, and is 8 at most.
    """
    node = single_node(case)
    if node is None or node.rank != 2 or node.antifundamental or node.fundamental or node.adjoint:
        return None
    smooth = smooth_charge(case)
    if smooth < 1:
        return None
    identity = Identity(
        "Seiberg-Witten prepotential and first gravitational terms of U(2)",
        Kind.SIBLING,
        "-eps1 eps2 log Z is F_k q^k a^(2-4k) + (eps1 eps2 A_k + (eps1^2+eps2^2) B_k/3) q^k a^(-4k) at large a, "
        "F, A, B from the periods of the curve; a statement on all a together",
        "N. Seiberg, E. Witten, arXiv hep-th/9407087; M. Matone, arXiv hep-th/9506102; H. Nakajima, K. Yoshioka, "
        "arXiv math/0311058",
    )
    wanted = min(smooth, HIGHEST_CHARGE)
    charge = affordable(case, wanted, _points_needed, most)
    if charge < 1:
        return identity.undecided(nothing_allowed(most))
    point = limit_point(own_setting(case))
    momenta = _momenta(case, point, charge)
    logarithms = []
    for n, a in enumerate(momenta):
        one = case.with_charge(charge) if n == 0 else sibling(case, charge, coulomb=[a, -a])
        logarithms.append(Series(tuple(evaluate(one))).log())
    rows = _growth_rows(point, momenta, logarithms, charge)
    allowed = most if charge < wanted else FULL.configurations
    reach = reach_text(charge, smooth, allowed)
    note = f"from limits at {len(momenta)} values of a, the case's own among them; {reach}"
    return identity.judged(rows, note)


def _degree(charge: int) -> int:
    """The degree in a^2 of [log Z]_k times its denominator."""
    return sum(1 for _ in _poles(charge)) + 1 - 2 * charge


def _points_needed(charge: int) -> int:
    return max(_degree(k) for k in range(1, charge + 1)) + 1


def _momenta(case: Case, point: LimitPoint, charge: int) -> list[Number]:
    """Enough values of a without resonance, no two with the same square, the case's own first."""
    first, second = point.nodes[0].coulomb
    found: list[Number] = [(first - second) / 2]
    step = 1
    while len(found) < _points_needed(charge):
        a = Rational(step, 5) * point.eps1
        if all(a not in (b, -b) for b in found) and is_smooth(sibling(case, charge, coulomb=[a, -a])):
            found.append(a)
        step += 1
    return found


def _growth_rows(
    point: LimitPoint, momenta: Sequence[Number], logarithms: Sequence[Series], charge: int
) -> Iterator[tuple[str, Number, Number]]:
    """The two leading coefficients in 1/a^2, found and expected, charge by charge."""
    e1, e2 = point.eps1, point.eps2
    prepotential, first, second = seiberg_witten_terms(charge)
    for k in range(1, charge + 1):
        roots = [(m * e1 + n * e2) ** 2 / 4 for m, n in _poles(k)]
        degree = _degree(k)
        squares = [a * a for a in momenta[: degree + 1]]
        values = []
        for x, logarithm in zip(squares, logarithms, strict=False):
            value = -e1 * e2 * logarithm.coefficients[k]
            for root in roots:
                value = value * (x - root)
            values.append(value)
        leading, following = leading_two(squares, values)
        # Divided by the product of the (x - root): to the next order it multiplies by 1 + (sum of the roots)/x.
        yield f"F_{k}", leading, prepotential.coefficients[k]
        expected = e1 * e2 * first.coefficients[k] + (e1**2 + e2**2) * second.coefficients[k] / 3
        yield f"the term after F_{k}", following + leading * sum(roots, ZERO), expected


# ---- U(N), one instanton


def check_one_instanton(case: Case, evaluate: Evaluate, *, most: int = MOST_WORK) -> Check | None:
    """The one-instanton prepotential of U(N), N >= 2, with flavours and different Coulomb parameters.

    None for any other theory, and where two Coulomb parameters agree. Cost: about N^2 - 2 N + 3 + (number of flavours)
    limits to charge 1; undecided where that is more than ``most`` configurations.
    """
    node = single_node(case)
    if node is None or node.rank < 2 or node.adjoint:
        return None
    point = limit_point(own_setting(case))
    colours, flavours = point.nodes[0].coulomb, point.nodes[0].flavours
    if any(a == b for n, a in enumerate(colours) for b in colours[:n]):
        return None
    identity = Identity(
        f"one-instanton prepotential of U({node.rank})",
        Kind.SIBLING,
        "-eps1 eps2 Z_1 grows like F_1 = (-1)^N sum_k prod_f (a_k + m_f)/prod_(j != k) (a_k - a_j)^2 when all Coulomb "
        "parameters and masses grow",
        "E. D'Hoker, I. Krichever, D. Phong, arXiv hep-th/9609041",
    )
    rank = node.rank
    degree = rank * (rank - 1) + 2 - 2 * rank + len(flavours)
    needed = degree + 1
    if affordable(case, 1, lambda k: needed, most) < 1:
        return identity.undecided(nothing_allowed(most))
    differences = [a - b for n, a in enumerate(colours) for b in colours[:n]]
    scales: list[Rational] = []
    values: list[Number] = []
    step = 0
    while len(scales) < needed:
        # s = 1 is the case itself, and comes first.
        scale = ONE + Rational(step, 3)
        step += 1
        other = case.with_charge(1)
        if scale != 1:
            grown = [a * scale for a in colours]
            other = sibling(case, 1, coulomb=grown, antifundamental=[m * scale for m in flavours])
        if not is_smooth(other):
            continue
        value = -point.eps1 * point.eps2 * evaluate(other)[1]
        for x in differences:
            value = value * ((scale * x) ** 2 - point.eps**2)
        scales.append(scale)
        values.append(value)
    leading, _ = leading_two(scales, values)
    for x in differences:
        leading = leading / x**2
    expected = one_instanton(colours, flavours)
    number = f"{len(scales)} scales" if len(scales) > 1 else "one scale"
    own = "" if ONE not in scales else ", the case's own among them" if len(scales) > 1 else ", the case's own"
    return identity.judged([("F_1", leading, expected)], f"equal, from limits at {number}{own}")


def one_instanton(coulomb: Sequence[Number], flavours: Sequence[Number]) -> Number:
    """F_1 of U(N) with flavours phi + m.

    >>> one_instanton([Rational(1), Rational(-1)], [])
    1/2
    """
    total: Number = ZERO
    for k, a in enumerate(coulomb):
        term: Number = ONE
        for m in flavours:
            term = term * (a + m)
        for j, b in enumerate(coulomb):
            if j != k:
                term = term / (a - b) ** 2
        total = total + term
    return -total if len(coulomb) % 2 else total
