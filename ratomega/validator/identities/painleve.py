"""Pure U(2) at eps1 + eps2 = 0 from the bilinear form of Painlevé III_3: a recursion with no diagram in it.

In units eps1 = 1 let F_s = t^(s^2) Z(a = s; q = t). With the Hirota derivative D in log t,

    sum_{n in Z} r_n D^2(F_{s+n}, F_{s-n})/2 = - t^(1/2) sum_{n in Z + 1/2} r_n F_{s+n} F_{s-n},
    r_n = prod_{y = ±2s} prod_{i,j=0}^{2|n|-1} 1/(1 + y - 2|n| + i + j).

At order k beyond t^(2 s^2) the term n = 0 contains k^2 Z_k(s), everything else is of lower charge: the relation fixes
Z_k(s) through lower charges at s and at s + n for half-integers n. 2 s must not be an integer.

Sources: O. Gamayun, N. Iorgov, O. Lisovyy 1302.1832; M. Bershtein, A. Shchechkin 1406.3008 (proof).
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence

from ratomega.exact.quadratic import Number, as_integer
from ratomega.exact.rational import ONE, ZERO, Rational
from ratomega.validator.limit_point import Charge, ClosedForm, LimitPoint

__all__ = ["painleve_coefficients", "painleve_forms"]

# The recursion meets about charge^2 pairs of shift and charge, each a sum over charge^(3/2) terms: seconds at 30.
HIGHEST_CHARGE = 30


def painleve_forms(point: LimitPoint, charges: Sequence[Charge]) -> Iterator[ClosedForm]:
    """Z of pure U(2) at eps1 + eps2 = 0 up to charge 30, in the protocol of the families of ``closed_forms``.

    Nothing where 2 a is a multiple of eps1: there the recursion divides by zero.
    """
    node = point.nodes[0]
    if len(point.nodes) > 1 or node.rank != 2 or node.flavours or node.adjoint or point.eps != 0:
        return
    place = (node.coulomb[0] - node.coulomb[1]) / (2 * point.eps1)
    if as_integer(2 * place) is not None:
        return
    order = min(HIGHEST_CHARGE, max(charge[0] for charge in charges))
    found = painleve_coefficients(place, order)
    # Z_k has dimension -4k.
    values: dict[Charge, Number] = {
        charge: found[charge[0]] / point.eps1 ** (4 * charge[0]) for charge in charges if charge[0] <= order
    }
    yield ClosedForm(
        "Painlevé III_3 at eps1 + eps2 = 0",
        "t^(a^2) Z(a; t) and its shifts by half-integers solve the bilinear form of Painlevé III_3, which fixes Z by "
        "recursion",
        "O. Gamayun, N. Iorgov, O. Lisovyy, arXiv 1302.1832; M. Bershtein, A. Shchechkin, arXiv 1406.3008",
        values,
    )


def painleve_coefficients(place: Number, order: int) -> list[Number]:
    """Z_0, ..., Z_order of pure U(2) at eps1 = 1 = -eps2 and a = ``place``, 2 a no integer.

    The first one is -2/(eps1 eps2 (4 a^2)) = 1/(2 a^2):

    >>> painleve_coefficients(Rational(1, 3), 1)
    [1, 9/2]
    """
    # Shifts are counted in halves: n = half/2.
    known: dict[tuple[int, int], Number] = {}

    def value(half: int, k: int) -> Number:
        if k == 0:
            return ONE
        if (half, k) not in known:
            known[half, k] = _next(place + Rational(half, 2), k, lambda n, j: value(half + n, j))
        return known[half, k]

    return [value(0, k) for k in range(order + 1)]


def _next(place: Number, charge: int, lower: Callable[[int, int], Number]) -> Number:
    """Z_charge at ``place`` from lower charges: ``lower(half, k)`` is Z_k at place + half/2."""
    rest: Number = ZERO
    for j in range(1, charge):
        rest = rest + lower(0, charge - j) * lower(0, j) * Rational((charge - 2 * j) ** 2, 2)
    half = 1
    while (left := charge - (half * half + half % 2) // 2) >= 0:
        total: Number = ZERO
        for j in range(left + 1):
            term = lower(half, left - j) * lower(-half, j)
            if half % 2 == 0:
                # 4 s n with n = half/2.
                term = term * (2 * place * half + left - 2 * j) ** 2 / 2
            total = total + term
        # n and -n give the same.
        rest = rest + 2 * total * _residue(place, half)
        half += 1
    return -rest / charge**2


def _residue(place: Number, half: int) -> Number:
    """r_n for n = half/2."""
    product: Number = ONE
    for y in (2 * place, -2 * place):
        for i in range(half):
            for j in range(half):
                product = product * (1 + y - half + i + j)
    return 1 / product
