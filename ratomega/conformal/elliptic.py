"""From a block to H and back to Z: what is divided out, in exact power series.

On the sphere (Al. Zamolodchikov 1984, 1987)

    block = (16 q_e/x)^(-P^2/A) (1-x)^((P_x^2 + P_1^2 - eps^2/4)/A) theta_3^((4 sum P_i^2 - eps^2)/A) H,

P the internal momentum, block and H without the power of x, and H a series in 16 q_e. On the torus, in the q of the
trace, block = H prod 1/(1 - q^n).
"""

from __future__ import annotations

from collections.abc import Sequence

from ratomega.conformal.correlator import Correlator
from ratomega.conformal.exact_blocks import NomeForm
from ratomega.exact.power import product
from ratomega.exact.quadratic import Number, only_rational
from ratomega.exact.rational import ONE, ZERO

__all__ = ["elliptic_coefficients", "euler_power", "series_product"]


def series_product(left: Sequence[Number], right: Sequence[Number]) -> list[Number]:
    """The product of two series of equal length."""
    return [sum((left[k] * right[n - k] for k in range(n + 1)), ZERO) for n in range(len(left))]


def euler_power(exponent: Number, length: int) -> list[Number]:
    """prod_n (1 - q^n)^exponent.

    >>> euler_power(-ONE, 6)                    # numbers of partitions
    [1, 1, 2, 3, 5, 7]
    """
    result: list[Number] = [ONE]
    for n in range(1, length):
        divisors = [sum(d for d in range(1, k + 1) if k % d == 0) for k in range(1, n + 1)]
        result.append(sum((exponent * -divisors[k - 1] * result[n - k] for k in range(1, n + 1)), ZERO) / n)
    return result


def elliptic_coefficients(correlator: Correlator, block: Sequence[Number]) -> list[Number]:
    """H to as many coefficients as the block has, at the limit point. Cost: cubic in their number.

    >>> from ratomega.conformal.correlator import Momentum
    >>> from ratomega.exact.path import Linear
    >>> from ratomega.exact.rational import Rational
    >>> fields = (Momentum.of(Linear(Rational(1, 4))),) * 4             # c = 1, weights 1/16
    >>> one = Correlator(Linear(ONE), Linear(-ONE), fields, Momentum.held(Rational(3, 7)))
    >>> elliptic_coefficients(one, [ONE, Rational(3, 14), Rational(739, 6272)])
    [1, 0, 0]
    """
    length = len(block)
    if correlator.torus:
        return series_product(block, euler_power(ONE, length))
    area = correlator.eps1.constant * correlator.eps2.constant
    eps = correlator.eps1.constant + correlator.eps2.constant
    squares = [one.limit_square for one in correlator.external]
    inverse = NomeForm(
        correlator.internal.limit_square / area,
        (eps * eps / 4 - squares[1] - squares[2]) / area,
        (eps * eps - sum(squares, ZERO) * 4) / area,
    )
    rest = series_product(block, inverse.coefficients(length - 1))
    # Triangular: (16 q_e)^k starts with x^k.
    variable = [only_rational(x) for x in NomeForm(ONE, ZERO, ZERO).coefficients(length - 1)]
    power = [ONE] + [ZERO] * (length - 1)
    found: list[Number] = []
    for k in range(length):
        top = rest[k]
        found.append(top)
        for n in range(k, length):
            rest[n] = rest[n] - top * power[n - k]
        power = product(power, variable, length)
    return found
