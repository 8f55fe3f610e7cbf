"""Laurent series in t whose coefficients are rational functions of one variable X with known poles.

    sum_n t^n numerator_n(X) / prod (X - c)^poles[c] + O(t^precision)

All coefficients share one denominator, kept as a product; nothing is ever reduced by a gcd of polynomials. The roots
are integers (or integers of a quadratic field), because X is the variable in units of 1/scale, as in ``factored``.

A product of linear forms (X - c - d t)^e is expanded root by root: with v = X - c the forms that meet at c give
v^E sum_j g_j (t/v)^j, E the sum of their exponents, and the numbers g_j do not depend on X.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from functools import lru_cache

from flint import fmpq_poly

from ratomega.errors import PrecisionError
from ratomega.exact.factored import Form, Whole
from ratomega.exact.laurent import Laurent
from ratomega.exact.plane_function import function_of_planes
from ratomega.exact.quadratic import Number
from ratomega.exact.quadratic_poly import Poly, poly_of, root_power, scaled, times
from ratomega.exact.rational import ONE, ZERO, Rational
from ratomega.exact.rational_function import RationalFunction

__all__ = ["LineSeries", "expand_roots", "line_total"]

Poles = Mapping[Whole, int]


@dataclass(frozen=True, slots=True, eq=False)
class LineSeries:
    """A series known up to, not including, the power ``precision``; ``numerators[0]`` belongs to t^valuation.

    Canonical form: the first numerator is not zero, or there is none and ``valuation == precision``.
    """

    poles: Poles
    valuation: int
    numerators: tuple[Poly, ...]
    precision: int

    @classmethod
    def make(cls, poles: Poles, valuation: int, numerators: Iterable[Poly], precision: int) -> LineSeries:
        """The checking constructor: truncates at ``precision`` and drops leading zeros."""
        known = list(numerators)[: max(precision - valuation, 0)]
        first = next((n for n, poly in enumerate(known) if not poly.is_zero()), None)
        if first is None:
            return cls({}, precision, (), precision)
        return cls(poles, valuation + first, tuple(known[first:]), precision)

    @classmethod
    def zero(cls, *, precision: int) -> LineSeries:
        return cls({}, precision, (), precision)

    def is_zero(self) -> bool:
        """No non-zero coefficient is known."""
        return not self.numerators

    def numerator(self, power: int) -> Poly:
        """The numerator of t^power; ``PrecisionError`` when it is not known."""
        if power >= self.precision:
            raise PrecisionError(f"the coefficient of t^{power} is not known: the series stops at t^{self.precision}")
        place = power - self.valuation
        return self.numerators[place] if 0 <= place < len(self.numerators) else fmpq_poly()

    def function(self, power: int, *, scale: int, symbol: str) -> RationalFunction:
        """The coefficient of t^power as a function of x = X/scale, in lowest terms."""
        coefficients = enumerate(self.numerator(power).coeffs())
        return function_of_planes(
            {(n,): c * Rational(scale) ** n for n, c in coefficients},
            [((-c, scale), order) for c, order in self.poles.items()],
            (symbol,),
        )

    def times(self, series: Laurent) -> LineSeries:
        """The product with a series in t alone."""
        precision = min(self.precision + series.valuation, series.precision + self.valuation)
        valuation = self.valuation + series.valuation
        length = max(precision - valuation, 0)
        factors = series.poly.coeffs()[:length]
        found: list[Poly] = [fmpq_poly()] * length
        for n, factor in enumerate(factors):
            if factor != 0:
                for m, poly in enumerate(self.numerators[: length - n]):
                    found[n + m] = found[n + m] + scaled(poly, factor)
        return LineSeries.make(self.poles, valuation, found, precision)

    def __neg__(self) -> LineSeries:
        return LineSeries(self.poles, self.valuation, tuple(-poly for poly in self.numerators), self.precision)

    def __add__(self, other: LineSeries) -> LineSeries:
        return line_total([self, other], precision=min(self.precision, other.precision))

    def __sub__(self, other: LineSeries) -> LineSeries:
        return self + (-other)

    def reduced(self) -> LineSeries:
        """The same with every root that divides all numerators cancelled."""
        numerators, poles = list(self.numerators), {}
        for c, order in self.poles.items():
            while order:
                divided = [_divided(poly, c) for poly in numerators]
                if any(poly is None for poly in divided):
                    break
                numerators = [poly for poly in divided if poly is not None]
                order -= 1
            if order:
                poles[c] = order
        return LineSeries(poles, self.valuation, tuple(numerators), self.precision)


def _divided(poly: Poly, c: Whole) -> Poly | None:
    """poly/(X - c), None when that is no polynomial: Horner's scheme, whose last value is the remainder."""
    values: list[Number] = []
    carry: Number = ZERO
    for coefficient in reversed(poly.coeffs()):
        carry = carry * c + coefficient
        values.append(carry)
    if values and values.pop() != 0:
        return None
    return poly_of(reversed(values))


def line_total(series: Iterable[LineSeries], *, precision: int) -> LineSeries:
    """The sum of several series, to ``precision``, over the least common denominator.

    Series with the same poles are added first: one multiplication for each kind of denominator.
    """
    kinds: dict[frozenset[tuple[Whole, int]], dict[int, Poly]] = {}
    for one in series:
        sums = kinds.setdefault(frozenset(one.poles.items()), {})
        for power, poly in enumerate(one.numerators, one.valuation):
            if power < precision:
                sums[power] = sums[power] + poly if power in sums else poly
    poles: dict[Whole, int] = {}
    for kind in kinds:
        for c, order in kind:
            poles[c] = max(order, poles.get(c, 0))
    found: dict[int, Poly] = {}
    for kind, sums in kinds.items():
        if all(poly.is_zero() for poly in sums.values()):
            continue
        known = dict(kind)
        cofactor = poly_of([1])
        for c, order in poles.items():
            if order > known.get(c, 0):
                cofactor = times(cofactor, _power(c, order - known.get(c, 0)))
        for power, poly in sums.items():
            found[power] = found.get(power, fmpq_poly()) + times(poly, cofactor)
    lowest = min(found, default=precision)
    numerators = [found.get(power, fmpq_poly()) for power in range(lowest, precision)]
    return LineSeries.make(poles, lowest, numerators, precision)


@lru_cache(maxsize=4096)
def _power(c: Whole, exponent: int) -> Poly:
    return root_power(c, exponent)


def expand_roots(roots: Mapping[Form, int], *, last: int) -> LineSeries:
    """prod (X - C - S t)^exponent over the roots (C, S), all powers of t up to ``last``.

    >>> series = expand_roots({(1, 0): 1, (2, 1): -1}, last=1)                # (X - 1)/(X - 2 - t)
    >>> [str(series.function(n, scale=1, symbol="x")) for n in (0, 1)]
    ['(x - 1)/(x - 2)', '(x - 1)/(x - 2)**2']
    """
    if last < 0:
        return LineSeries.zero(precision=last + 1)
    groups: dict[Whole, list[tuple[Whole, int]]] = {}
    for (c, s), exponent in roots.items():
        groups.setdefault(c, []).append((s, exponent))
    result = [poly_of([1])]
    poles: dict[Whole, int] = {}
    for c, forms in groups.items():
        numbers = _group(forms, last + 1)
        degree = sum(exponent for _, exponent in forms)
        order = max(j - degree for j, g in enumerate(numbers) if g != 0)
        if order > 0:
            poles[c] = order
        lift = degree + max(order, 0)
        part = [scaled(_power(c, lift - j), g) if g != 0 else None for j, g in enumerate(numbers)]
        result = _multiplied(result, part, last + 1)
    return LineSeries.make(poles, 0, result, last + 1)


def _group(forms: Iterable[tuple[Whole, int]], length: int) -> list[Number]:
    """prod (1 - s u)^exponent to ``length`` terms in u."""
    known: list[Number] = [ONE, *[ZERO] * (length - 1)]
    for s, exponent in forms:
        for _ in range(abs(exponent)):
            if exponent > 0:
                for n in range(length - 1, 0, -1):
                    known[n] = known[n] - known[n - 1] * s
            else:
                for n in range(1, length):
                    known[n] = known[n] + known[n - 1] * s
    return known


def _multiplied(result: list[Poly], part: list[Poly | None], length: int) -> list[Poly]:
    found: list[Poly] = [fmpq_poly()] * min(length, len(result) + len(part) - 1)
    for n, one in enumerate(result):
        if one.is_zero():
            continue
        for m, other in enumerate(part[: length - n]):
            if other is not None:
                found[n + m] = found[n + m] + times(one, other)
    return found
