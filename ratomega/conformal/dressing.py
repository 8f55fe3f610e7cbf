"""The U(1) factor between a conformal block and the partition function: exp(c q) (1 - q)^b prod_n (1 - q^n)^e."""

from __future__ import annotations

from dataclasses import dataclass

from ratomega.exact.laurent import Laurent
from ratomega.exact.rational import Rational

__all__ = ["Dressing"]


@dataclass(frozen=True, slots=True)
class Dressing:
    """The exponents c, b, e: exact series in t, all known to one precision.

    >>> zero, one = Laurent.zero(precision=1), Laurent.constant(1, precision=1)
    >>> [str(x.coefficient(0)) for x in Dressing(one, zero, zero).coefficients(3)]
    ['1', '1', '1/2', '1/6']
    >>> [str(x.coefficient(0)) for x in Dressing(zero, zero, -one).coefficients(5)]     # numbers of partitions
    ['1', '1', '2', '3', '5', '7']
    """

    linear: Laurent
    complement: Laurent
    euler: Laurent

    def coefficients(self, order: int) -> tuple[Laurent, ...]:
        """The coefficients of q^0 ... q^order, from q d/dq log of the factor. Cost: order^2 products."""
        slope = [self._slope(n) for n in range(1, order + 1)]
        result = [Laurent.constant(1, precision=self.linear.precision)]
        for n in range(1, order + 1):
            total = slope[0] * result[n - 1]
            for k in range(2, n + 1):
                total = total + slope[k - 1] * result[n - k]
            result.append(total.scaled(Rational(1, n)))
        return tuple(result)

    def _slope(self, n: int) -> Laurent:
        divisors = sum(d for d in range(1, n + 1) if n % d == 0)
        slope = -self.complement - self.euler.scaled(divisors)
        return slope + self.linear if n == 1 else slope
