"""Conformal blocks that are elementary in the elliptic nome, for every internal weight, to any order.

With q_e the nome whose modulus is q and theta_3 = sum q_e^(n^2), every four-point block is

    (16 q_e/q)^(h - (c-1)/24) (1-q)^((c-1)/24 - h_x - h_1) theta_3^((c-1)/2 - 4 sum h_i) H(16 q_e),

without its power of q, where H collects the poles in h (Al. Zamolodchikov 1984, 1987). The residue at 2a = ±(r eps1 +
s eps2) contains prod_f prod (mu_f + (i eps1 + j eps2)/2) over i = 1-r, 3-r, ..., r-1 and j = 1-s, 3-s, ..., s-1. With
mu = 0, ±eps1/2, ±eps2/2, ±eps1/2 ± eps2/2, one of each, there is a vanishing factor for each parity of r and s, with
either sign since i and j take both, and H = 1. That is: fields of momenta P with squares

    eps1^2/16 three times and (eps1/4 ± eps2/2)^2 once; the same with eps1 and eps2 exchanged;
    (eps1 + eps2)^2/16 three times and (eps1 - eps2)^2/16 once; or the other way round,

at any place; weights are (eps^2/4 - P^2)/(eps1 eps2) (V. Fateev, A. Litvinov, A. Neveu, E. Onofri, arXiv 0902.1331). At
eps2 = -eps1 all weights are 1/16 (Al. Zamolodchikov 1986), at eps2 = eps1 all are 15/16.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import product as tuples

from ratomega.conformal.dictionary import GaugePath
from ratomega.errors import InputError
from ratomega.exact.path import Linear
from ratomega.exact.power import logarithmic_derivative, product, reciprocal
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ONE, ZERO, Rational

__all__ = ["NomeForm", "elementary_block", "elementary_on_the_path", "elementary_sum"]

HALF = Rational(1, 2)


@dataclass(frozen=True, slots=True)
class NomeForm:
    """(16 q_e/q)^nome (1-q)^complement theta_3^theta; exponents may lie in one quadratic field.

    >>> NomeForm(ONE, ZERO, ZERO).coefficients(3)          # 16 q_e/q, q_e = u + 8 u^2 + 84 u^3 + ... in u = q/16
    (1, 1/2, 21/64, 31/128)
    """

    nome: Number
    complement: Number
    theta: Number

    def coefficients(self, order: int) -> tuple[Number, ...]:
        """The coefficients of q^0 ... q^order. Cost: some order^2 products of fractions.

        theta_3^2 = 2F1(1/2, 1/2; 1; q) and q d(log q_e)/dq = 1/((1-q) theta_3^4) (Jacobi).
        """
        length = order + 1
        period = [ONE]
        for n in range(1, length):
            period.append(period[-1] * Rational((2 * n - 1) ** 2, (2 * n) ** 2))
        theta = logarithmic_derivative(period, length)
        nome = reciprocal(product([ONE, -ONE], product(period, period, length), length), length)
        slope = [self.nome * x - self.complement + self.theta * y / 2 for x, y in zip(nome, theta, strict=True)]
        result: list[Number] = [ONE]
        for n in range(1, length):
            result.append(sum((slope[k] * result[n - k] for k in range(1, n + 1)), ZERO) / n)
        return tuple(result)


def elementary_sum(eps1: Rational, eps2: Rational, coulomb_square: Number, mu: Sequence[Number]) -> NomeForm | None:
    """Z of U(2) with Coulomb parameters (a, -a) and four flavours of mu = m - eps/2, from a^2; None where H is not 1.

    It is the block times (1-q)^(2 m0 m1/(eps1 eps2)) (L. Alday, D. Gaiotto, Y. Tachikawa, arXiv 0906.3219).

    >>> form = elementary_sum(ONE, ONE, Rational(4, 7), [ZERO, HALF, ZERO, -HALF])         # c = 25, h = 3/7
    >>> form.coefficients(2)        # 1 + 3/14 q + 1131/6272 q^2, times (1-q)^(15/8)
    (1, -93/56, 939/1568)
    """
    family = ([ZERO, r * eps1 / 2, s * eps2 / 2, (u * eps1 + v * eps2) / 2] for r, s, u, v in tuples((1, -1), repeat=4))
    if not any(_same_multiset(mu, one) for one in family):
        return None
    area, eps = eps1 * eps2, eps1 + eps2
    total, squares = sum(mu, ZERO), sum((x * x for x in mu), ZERO)
    complement = (total + eps) ** 2 / (4 * area)
    return NomeForm(-coulomb_square / area, complement, (2 * squares - eps**2) / area)


def elementary_block(
    eps1: Rational, eps2: Rational, internal_square: Number, external_squares: Sequence[Number]
) -> NomeForm | None:
    """The four-point block by squares of momenta, without its power of q; None where H is not 1.

    ``external_squares`` are P^2 of the fields at 0, q, 1 and infinity, ``internal_square`` is P^2 = a^2.
    Raises ``InputError`` unless there are four fields.

    >>> all_sixteenth = [Rational(1, 16)] * 4                                   # c = 1, weights 1/16
    >>> elementary_block(ONE, -ONE, Rational(3, 7), all_sixteenth).coefficients(3)      # h = 3/7
    (1, 3/14, 739/6272, 7123/87808)
    """
    if len(external_squares) != 4:
        raise InputError.single(f"four external momenta are needed, not {len(external_squares)}")
    plus, minus = (eps1 + eps2) ** 2 / 16, (eps1 - eps2) ** 2 / 16
    family = [[plus, plus, plus, minus], [minus, minus, minus, plus]]
    for one, other in ((eps1, eps2), (eps2, eps1)):
        thrice = one**2 / 16
        family += [[thrice, thrice, thrice, (one / 4 + sign * other / 2) ** 2] for sign in (1, -1)]
    if not any(_same_multiset(external_squares, one) for one in family):
        return None
    area, eps = eps1 * eps2, eps1 + eps2
    _, at_q, at_one, _ = external_squares
    complement = (at_q + at_one - eps**2 / 4) / area
    return NomeForm(-internal_square / area, complement, (4 * sum(external_squares, ZERO) - eps**2) / area)


def elementary_on_the_path(gauge: GaugePath) -> bool:
    """Does H = 1 hold all along the path? Then the limit is the value of the form at its end, resonant or not.

    At a resonance it belongs to this path: on others, where the masses leave the family, it may be different.
    """
    half_eps, zero = (gauge.eps1 + gauge.eps2).scaled(HALF), Linear(ZERO)
    mu = [m - half_eps for m in gauge.flavours]
    one, two = gauge.eps1.scaled(HALF), gauge.eps2.scaled(HALF)
    return any(
        _same_multiset(mu, [zero, one.scaled(r), two.scaled(s), one.scaled(u) + two.scaled(v)])
        for r, s, u, v in tuples((1, -1), repeat=4)
    )


def _same_multiset(left: Sequence[object], right: Sequence[object]) -> bool:
    rest = list(right)
    for x in left:
        if x not in rest:
            return False
        rest.remove(x)
    return not rest
