"""Closed forms for one U(2) node: four flavours with an elementary conformal block, and the first charges.

All are written for Coulomb parameters (a, -a); a common shift of the Coulomb parameters is a shift of the masses.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from ratomega.conformal.exact_blocks import elementary_sum
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ONE, ZERO
from ratomega.validator.limit_point import Charge, ClosedForm, LimitPoint

__all__ = ["ELEMENTARY_SOURCE", "ELEMENTARY_STATEMENT", "four_flavour_forms", "low_charge_forms"]

ELEMENTARY_STATEMENT = (
    "Z = (16 q_e/q)^(-a^2/(eps1 eps2)) (1-q)^((sum mu + eps)^2/(4 eps1 eps2)) "
    "theta_3^((2 sum mu^2 - eps^2)/(eps1 eps2)) where mu = m - eps/2 are 0, ±eps1/2, ±eps2/2, ±eps1/2±eps2/2, "
    "q_e the nome of modulus q, theta_3 = sum_n q_e^(n^2)"
)
ELEMENTARY_SOURCE = (
    "V. Fateev, A. Litvinov, A. Neveu, E. Onofri, arXiv 0902.1331; Al. Zamolodchikov 1986 (c = 1); "
    "R. Poghossian, arXiv 0909.3412"
)

_SUM_OF_BOXES = "N. Nekrasov, arXiv hep-th/0206161; R. Flume, R. Poghossian, arXiv hep-th/0208176"


def _centred(point: LimitPoint) -> tuple[Number, list[Number]]:
    """(a^2, flavour masses) after the Coulomb parameters are shifted to (a, -a)."""
    node = point.nodes[0]
    first, second = node.coulomb
    return (first - second) ** 2 / 4, [m + (first + second) / 2 for m in node.flavours]


def _is_one_u2(point: LimitPoint) -> bool:
    return len(point.nodes) == 1 and point.nodes[0].rank == 2


def four_flavour_forms(point: LimitPoint, charges: Sequence[Charge]) -> Iterator[ClosedForm]:
    """U(2) with mu_f = m_f - eps/2 equal to 0, ±eps1/2, ±eps2/2, ±eps1/2 ± eps2/2, one of each: H = 1 for every a.

    ``conformal.exact_blocks`` says why and holds the form.
    """
    if not _is_one_u2(point) or point.nodes[0].adjoint or len(point.nodes[0].flavours) != 4:
        return
    a_squared, masses = _centred(point)
    form = elementary_sum(point.eps1, point.eps2, a_squared, [m - point.eps / 2 for m in masses])
    if form is None:
        return
    values = form.coefficients(max(charge[0] for charge in charges))
    yield ClosedForm(
        "U(2) with four flavours, elementary block",
        ELEMENTARY_STATEMENT,
        ELEMENTARY_SOURCE,
        {charge: values[charge[0]] for charge in charges},
    )


def low_charge_forms(point: LimitPoint, charges: Sequence[Charge]) -> Iterator[ClosedForm]:
    """U(2) at charge 1 with flavours or one adjoint, and without matter at charge 2."""
    if not _is_one_u2(point) or (1,) not in charges:
        return
    node, eps = point.nodes[0], point.eps
    a_squared, masses = _centred(point)
    scale, gap = point.eps1 * point.eps2, 4 * a_squared - eps**2
    if not node.adjoint:
        even, odd = _even_and_odd(masses, a_squared)
        yield ClosedForm(
            "U(2) at charge 1",
            "Z_1 = (eps O - 2 E)/(eps1 eps2 (4a^2 - eps^2)) where prod_f (a + m_f) = E + a O, E and O even in a",
            _SUM_OF_BOXES,
            {(1,): (eps * odd - 2 * even) / (scale * gap)},
        )
    if len(node.adjoint) == 1 and not masses:
        m = node.adjoint[0]
        value = 2 * (m - point.eps1) * (m - point.eps2) / scale * (1 + m * (eps - m) / gap)
        yield ClosedForm(
            "U(2) with an adjoint at charge 1",
            "Z_1 = 2 (m-eps1)(m-eps2)/(eps1 eps2) (1 + m (eps-m)/(4a^2 - eps^2))",
            _SUM_OF_BOXES,
            {(1,): value},
        )
    if not node.adjoint and not masses and (2,) in charges:
        upper = 8 * a_squared - 8 * eps**2 - scale
        lower = scale**2 * gap * (4 * a_squared - (eps + point.eps1) ** 2) * (4 * a_squared - (eps + point.eps2) ** 2)
        yield ClosedForm(
            "U(2) without matter at charge 2",
            "Z_2 = (8a^2 - 8 eps^2 - eps1 eps2)/(eps1^2 eps2^2 (4a^2 - eps^2)(4a^2 - (2 eps1 + eps2)^2)"
            "(4a^2 - (eps1 + 2 eps2)^2))",
            _SUM_OF_BOXES,
            {(2,): upper / lower},
        )


def _even_and_odd(masses: Sequence[Number], a_squared: Number) -> tuple[Number, Number]:
    """(E, O) with prod (a + m) = E + a O, both polynomials in a^2.

    >>> from ratomega.exact.rational import Rational
    >>> _even_and_odd([Rational(2), Rational(3)], Rational(10))
    (16, 5)
    """
    even: Number = ONE
    odd: Number = ZERO
    for m in masses:
        even, odd = m * even + a_squared * odd, even + m * odd
    return even, odd
