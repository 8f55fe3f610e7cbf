"""From the regular part W of the U(2) partition function to Z: one universal factor, exact to any order.

Z(q) = exp(c1 q + c2 q^2) W(q)                          up to three antifundamentals,
Z(q) = (16 q_e/q)^A (1-q)^B theta_3^C W(16 q_e)         four,
Z(q) = prod_n (1-q^n)^E W(q)                            one adjoint,

where q_e is the elliptic nome whose modulus is q, theta_3 = sum q_e^(n^2) (Al. Zamolodchikov 1984, 1987;
R. Poghossian 2009). With F = 2F1(1/2,1/2;1;q) one has theta_3^2 = F and q d/dq log q_e = 1/((1-q) F^2), so all three
four-flavour factors come from one hypergeometric series.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from ratomega.exact.power import composed, exponential, logarithmic_derivative, product, reciprocal
from ratomega.exact.rational import ONE, ZERO, Rational

__all__ = ["Dressing", "NomeExponents"]


@dataclass(frozen=True, slots=True)
class NomeExponents:
    """The exponents A, B, C of 16 q_e/q, 1 - q and theta_3."""

    nome: Rational
    complement: Rational
    theta: Rational


@dataclass(frozen=True, slots=True)
class Dressing:
    """exp(linear q + quadratic q^2) prod (1-q^n)^euler, and the nome factor with its change of variable if any.

    >>> Dressing(linear=Rational(1)).dressed([ONE, ZERO, ZERO])
    [1, 1, 1/2]
    >>> Dressing(euler=Rational(-2)).dressed([ONE, ZERO, ZERO, ZERO])
    [1, 2, 5, 10]
    """

    linear: Rational = ZERO
    quadratic: Rational = ZERO
    euler: Rational = ZERO
    nome: NomeExponents | None = None

    def dressed(self, regular: Sequence[Rational]) -> list[Rational]:
        """The coefficients of Z from those of W. Cost: quadratic, and one composition for four flavours."""
        length = len(regular)
        slope = [ZERO] * length
        for power, coefficient in ((1, self.linear), (2, self.quadratic)):
            if power < length:
                slope[power] += power * coefficient
        if self.euler != 0:
            for n in range(1, length):
                for multiple in range(n, length, n):
                    slope[multiple] -= self.euler * n
        if self.nome is None:
            return product(exponential(slope, length), regular, length) if any(x != 0 for x in slope) else list(regular)
        period = _period(length)
        log_theta = logarithmic_derivative(period, length)
        log_nome = _nome_slope(period, length)
        for n in range(1, length):
            slope[n] += self.nome.nome * log_nome[n] - self.nome.complement + self.nome.theta * log_theta[n] / 2
        variable = [ZERO, *exponential(log_nome, length)[: length - 1]]
        return product(exponential(slope, length), composed(regular, variable, length), length)


def _period(length: int) -> list[Rational]:
    """2F1(1/2, 1/2; 1; q): the squares of the central binomial coefficients over 4^n."""
    result = [ONE]
    for n in range(1, length):
        result.append(result[-1] * Rational((2 * n - 1) ** 2, (2 * n) ** 2))
    return result


def _nome_slope(period: Sequence[Rational], length: int) -> list[Rational]:
    """q d/dq log(16 q_e/q) = 1/((1-q) F^2) - 1."""
    square = product(period, period, length)
    slope = reciprocal(product([ONE, -ONE], square, length), length)
    slope[0] = ZERO
    return slope
