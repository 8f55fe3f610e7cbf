"""U(2) with an adjoint at a mass for which Z has one pole in the Coulomb parameter: a closed form.

At eps1 : eps2 = 1 : -2 and m = -3 eps1 or 2 eps1 (m and eps - m are the same theory), and with eps1 and eps2 exchanged,

    Z = prod (1 - q^n)^4 (4 a^2 - eps1^2 E_2)/(4 a^2 - eps1^2),   E_2 = 1 - 24 sum_n sigma_1(n) q^n.

Source: M. Beccaria, G. Macorini 1606.00179, from memory.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ONE, ZERO, Rational
from ratomega.validator.limit_point import Charge, ClosedForm, LimitPoint
from ratomega.validator.qseries import Series, euler_product

__all__ = ["finite_pole_forms"]


def finite_pole_forms(point: LimitPoint, charges: Sequence[Charge]) -> Iterator[ClosedForm]:
    """The closed form where it applies, in the protocol of the families of ``closed_forms``.

    ``charges`` are without resonance; charge 1 is among them wherever 4 a^2 is not eps1^2 = eps^2.
    """
    node = point.nodes[0]
    if len(point.nodes) > 1 or node.rank != 2 or node.flavours or len(node.adjoint) != 1 or (1,) not in charges:
        return
    if point.eps2 == -2 * point.eps1:
        unit = point.eps1
    elif point.eps1 == -2 * point.eps2:
        unit = point.eps2
    else:
        return
    if node.adjoint[0] not in (-3 * unit, 2 * unit):
        return
    order = max(charge[0] for charge in charges)
    place = (node.coulomb[0] - node.coulomb[1]) ** 2
    numerator = Series.one(order).scaled(place) + eisenstein_2(order).scaled(-(unit**2))
    series = (numerator * euler_product(Rational(4), order)).scaled(1 / (place - unit**2))
    values: dict[Charge, Number] = {charge: series.coefficients[charge[0]] for charge in charges}
    yield ClosedForm(
        "U(2) with an adjoint, one pole in the Coulomb parameter",
        "Z = prod (1-q^n)^4 (4a^2 - u^2 E_2)/(4a^2 - u^2) for the ratio u : -2u and the masses -3u and 2u, "
        "E_2 = 1 - 24 sum sigma_1(n) q^n",
        "M. Beccaria, G. Macorini, arXiv 1606.00179; from memory",
        values,
    )


def eisenstein_2(order: int) -> Series:
    """E_2 = 1 - 24 sum_n sigma_1(n) q^n.

    >>> eisenstein_2(4).coefficients
    (1, -24, -72, -96, -168)
    """
    sums = [ZERO] * (order + 1)
    for d in range(1, order + 1):
        for n in range(d, order + 1, d):
            sums[n] = sums[n] + d
    return Series((ONE, *(-24 * s for s in sums[1:])))
