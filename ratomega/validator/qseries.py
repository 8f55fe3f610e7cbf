"""Exact power series in the counting parameters q: what the closed forms are made of.

``Series`` is a truncated series in one q with exact coefficients, rational or of a quadratic field; its length is its
precision. ``Multiseries`` is a truncated series in one q per node, a table from charge to coefficient on a set of
charges that is closed downwards. Nothing here knows of diagrams. Every operation costs at most (number of coefficients)
x (order) exact operations.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass

from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ONE, ZERO, Rational

__all__ = [
    "Multiseries",
    "Series",
    "binomial",
    "euler_product",
    "exponential",
    "hypergeometric",
]


@dataclass(frozen=True, slots=True)
class Series:
    """``coefficients[0] + coefficients[1] q + ... + O(q^(order + 1))``; never empty.

    A sum or product is known to the smaller order of the two.

    >>> half = Series.make([1, 1, 0, 0]).power(Rational(1, 2))
    >>> half.coefficients, (half * half).coefficients
    ((1, 1/2, -1/8, 1/16), (1, 1, 0, 0))
    """

    coefficients: tuple[Number, ...]

    @classmethod
    def make(cls, coefficients: Iterable[Number | int]) -> Series:
        known: tuple[Number, ...] = tuple(Rational(c) if isinstance(c, int) else c for c in coefficients)
        if not known:
            raise ValueError("a series needs at least its constant term")
        return cls(known)

    @classmethod
    def one(cls, order: int) -> Series:
        return cls((ONE, *(ZERO,) * order))

    @property
    def order(self) -> int:
        """The highest power that is known."""
        return len(self.coefficients) - 1

    def __add__(self, other: Series) -> Series:
        return Series(tuple(x + y for x, y in zip(self.coefficients, other.coefficients, strict=False)))

    def __mul__(self, other: Series) -> Series:
        left, right = self.coefficients, other.coefficients
        length = min(len(left), len(right))
        return Series(tuple(sum((left[k] * right[n - k] for k in range(n + 1)), ZERO) for n in range(length)))

    def scaled(self, factor: Number) -> Series:
        return Series(tuple(c * factor for c in self.coefficients))

    def power(self, exponent: Number) -> Series:
        """The series to a rational power, constant term 1. Raises ``ValueError`` for another constant term.

        From f g' = exponent f' g for g = f^exponent; works for every exponent, negative and zero included.
        """
        f = self.coefficients
        if f[0] != 1:
            raise ValueError("a rational power of a series needs the constant term 1")
        g: list[Number] = [ONE]
        for n in range(1, len(f)):
            g.append(sum((((exponent + 1) * k - n) * f[k] * g[n - k] for k in range(1, n + 1)), ZERO) / n)
        return Series(tuple(g))

    def inverse(self) -> Series:
        """1 / series, constant term 1."""
        return self.power(-ONE)

    def exp(self) -> Series:
        """The exponential; the constant term is zero. Raises ``ValueError`` otherwise.

        >>> Series.make([0, 1, 0, 0]).exp().coefficients
        (1, 1, 1/2, 1/6)
        """
        f = self.coefficients
        if f[0] != 0:
            raise ValueError("the exponential of a series needs the constant term 0")
        g: list[Number] = [ONE]
        for n in range(1, len(f)):
            g.append(sum((k * f[k] * g[n - k] for k in range(1, n + 1)), ZERO) / n)
        return Series(tuple(g))

    def log(self) -> Series:
        """The logarithm, constant term 1. Raises ``ValueError`` otherwise.

        >>> Series.make([1, 1, 0, 0]).log().coefficients
        (0, 1, -1/2, 1/3)
        """
        f = self.coefficients
        if f[0] != 1:
            raise ValueError("the logarithm of a series needs the constant term 1")
        g: list[Number] = [ZERO]
        for n in range(1, len(f)):
            g.append(f[n] - sum((k * g[k] * f[n - k] for k in range(1, n)), ZERO) / n)
        return Series(tuple(g))


def exponential(rate: Number, order: int) -> Series:
    """exp(rate q)."""
    return _from_ratios(lambda k: rate / (k + 1), order)


def binomial(slope: Number, exponent: Number, order: int) -> Series:
    """(1 + slope q)^exponent.

    >>> binomial(-ONE, -ONE, 3).coefficients
    (1, 1, 1, 1)
    """
    return _from_ratios(lambda k: slope * (exponent - k) / (k + 1), order)


def hypergeometric(upper: Sequence[Number], lower: Sequence[Number], argument: Number, order: int) -> Series:
    """sum_k prod (upper)_k / prod (lower)_k (argument q)^k / k!, with Pochhammer symbols (x)_k = x (x+1) ... (x+k-1).

    Raises ``ZeroDivisionError`` when a lower parameter reaches zero within ``order``: 0, -1, ..., 1 - order.

    >>> hypergeometric([ONE, ONE], [Rational(2)], -ONE, 3).coefficients      # log(1 + q) / q
    (1, -1/2, 1/3, -1/4)
    """

    def ratio(k: int) -> Number:
        value: Number = argument / (k + 1)
        for x in upper:
            value = value * (x + k)
        for x in lower:
            value = value / (x + k)
        return value

    return _from_ratios(ratio, order)


def _from_ratios(ratio: Callable[[int], Number], order: int) -> Series:
    """The series with constant term 1 whose coefficients k + 1 and k have the quotient ``ratio(k)``."""
    terms: list[Number] = [ONE]
    for k in range(order):
        terms.append(terms[-1] * ratio(k))
    return Series(tuple(terms))


def euler_product(exponent: Number, order: int) -> Series:
    """prod_{n >= 1} (1 - q^n)^exponent: a power of the Dedekind eta function without its q^(1/24).

    >>> euler_product(Rational(24), 4).coefficients      # Ramanujan's tau
    (1, -24, 252, -1472, 4830)
    """
    # Euler's pentagonal number theorem gives the first power.
    sparse = [ZERO] * (order + 1)
    n = 0
    while n * (3 * n - 1) // 2 <= order:
        for position in {n * (3 * n - 1) // 2, n * (3 * n + 1) // 2}:
            if position <= order:
                sparse[position] = Rational((-1) ** n)
        n += 1
    return Series(tuple(sparse)).power(exponent)


@dataclass(frozen=True, slots=True)
class Multiseries:
    """A series in one q per node: the coefficient of every charge of a set that is closed downwards.

    >>> square = [(0, 0), (1, 0), (0, 1), (1, 1)]
    >>> product = Multiseries.one(square).times(Series.make([1, 5]), (1, 0)).times(Series.make([1, 7]), (1, 1))
    >>> dict(product.coefficients)
    {(0, 0): 1, (1, 0): 5, (0, 1): 0, (1, 1): 7}
    """

    coefficients: Mapping[tuple[int, ...], Number]

    @classmethod
    def one(cls, charges: Iterable[tuple[int, ...]]) -> Multiseries:
        return cls({charge: ZERO if any(charge) else ONE for charge in charges})

    def times(self, series: Series, monomial: tuple[int, ...]) -> Multiseries:
        """The product with ``series`` taken at prod_v q_v^(monomial_v).

        Raises ``ValueError`` when the monomial is constant, or the series is too short for the charges.
        """
        if not any(monomial):
            raise ValueError("the series is taken at a monomial that is not constant")
        result: dict[tuple[int, ...], Number] = {}
        for charge in self.coefficients:
            depth = fits(monomial, charge)
            if depth > series.order:
                raise ValueError(f"the series stops at power {series.order}; charge {charge} needs {depth}")
            result[charge] = sum(
                (series.coefficients[j] * self.coefficients[_minus(charge, monomial, j)] for j in range(depth + 1)),
                ZERO,
            )
        return Multiseries(result)

    def with_signs(self, signs: Sequence[int]) -> Multiseries:
        """The same series at q_v -> signs_v q_v, every sign 1 or -1."""
        return Multiseries(
            {
                charge: -c if sum(k for k, s in zip(charge, signs, strict=True) if s < 0) % 2 else c
                for charge, c in self.coefficients.items()
            }
        )


def fits(monomial: tuple[int, ...], charge: tuple[int, ...]) -> int:
    """How often the monomial goes into the charge.

    >>> fits((1, 2), (3, 5))
    2
    """
    return min(k // v for k, v in zip(charge, monomial, strict=True) if v)


def _minus(charge: tuple[int, ...], monomial: tuple[int, ...], times: int) -> tuple[int, ...]:
    return tuple(k - times * v for k, v in zip(charge, monomial, strict=True))
