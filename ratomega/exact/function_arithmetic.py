"""The arithmetic of rational functions over Q or a quadratic field, and their normal form.

A function is numerator/denominator, two integer polynomials (flint ``fmpz_mpoly``, lexicographic in the order of the
symbols) without common factor, contents included, the leading coefficient of the denominator positive: equal functions
have equal parts. Over Q(sqrt d) it is (numerator + irrational sqrt(d))/denominator, the denominator over the integers
as before: every denominator has a multiple over the integers, its norm. Normal form as for numbers: ``irrational`` is
never zero; without it, None, the function is one over Q.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Self

from flint import fmpq, fmpz_mpoly

from ratomega.exact.polynomials import context_of
from ratomega.exact.quadratic import Number, Quadratic, rational_parts
from ratomega.exact.rational import common_denominator

__all__ = ["FunctionArithmetic"]


@dataclass(frozen=True, slots=True, eq=False, repr=False)
class FunctionArithmetic:
    """What ``RationalFunction`` is made of; results of operations are of the class that they are done in."""

    numerator: fmpz_mpoly
    denominator: fmpz_mpoly
    irrational: fmpz_mpoly | None = None
    radicand: int = 0

    # ---- construction ----

    @classmethod
    def make(
        cls,
        numerator: fmpz_mpoly,
        denominator: fmpz_mpoly,
        irrational: fmpz_mpoly | None = None,
        radicand: int = 0,
    ) -> Self:
        """The checking constructor: lowest terms, positive lead. Raises ``ZeroDivisionError`` for denominator 0."""
        if denominator.is_zero():
            raise ZeroDivisionError("the denominator of a rational function is zero")
        if irrational is not None and irrational.is_zero():
            irrational = None
        common = numerator.gcd(denominator)
        if irrational is not None and not common.is_one():
            common = common.gcd(irrational)
        if denominator.leading_coefficient() < 0:
            common = -common
        if not common.is_one():
            numerator, denominator = numerator / common, denominator / common
            irrational = None if irrational is None else irrational / common
        return cls(numerator, denominator, irrational, 0 if irrational is None else radicand)

    @classmethod
    def constant(cls, value: Number | int, symbols: Sequence[str]) -> Self:
        context = context_of(symbols)
        if isinstance(value, Quadratic):
            scale = common_denominator(rational_parts(value))
            x, y = (context.constant((part * scale).p) for part in rational_parts(value))
            return cls(x, context.constant(scale), y, value.d)
        value = fmpq(value)
        return cls(context.constant(value.p), context.constant(value.q))

    @classmethod
    def symbol(cls, name: str, symbols: Sequence[str]) -> Self:
        context = context_of(symbols)
        return cls(context.gen(tuple(symbols).index(name)), context.constant(1))

    @property
    def symbols(self) -> tuple[str, ...]:
        return tuple(self.numerator.context().names())

    def conjugate(self) -> Self:
        """The function with -sqrt(d) in place of sqrt(d); a function over Q is its own."""
        if self.irrational is None:
            return self
        return type(self)(self.numerator, self.denominator, -self.irrational, self.radicand)

    # ---- arithmetic ----

    def _other(self, other: Self | Number | int) -> Self:
        if not isinstance(other, FunctionArithmetic):
            other = self.constant(other, self.symbols)
        if other.symbols != self.symbols:
            raise ValueError(f"functions of {self.symbols} and of {other.symbols} are not mixed")
        if 0 != self.radicand != other.radicand != 0:
            raise ValueError(f"sqrt({self.radicand}) and sqrt({other.radicand}) do not lie in one quadratic field")
        return other

    def _second(self) -> fmpz_mpoly:
        return self.numerator.context().constant(0) if self.irrational is None else self.irrational

    def __add__(self, other: Self | Number | int) -> Self:
        other = self._other(other)
        if self.denominator == other.denominator:
            left = right = self.numerator.context().constant(1)
            below = self.denominator
        else:
            left, right, below = other.denominator, self.denominator, self.denominator * other.denominator
        top = self.numerator * left + other.numerator * right
        if self.irrational is None and other.irrational is None:
            return self.make(top, below)
        second = self._second() * left + other._second() * right
        return self.make(top, below, second, self.radicand or other.radicand)

    def __neg__(self) -> Self:
        second = None if self.irrational is None else -self.irrational
        return type(self)(-self.numerator, self.denominator, second, self.radicand)

    def __sub__(self, other: Self | Number | int) -> Self:
        return self + (-self._other(other))

    def __mul__(self, other: Self | Number | int) -> Self:
        other = self._other(other)
        top, below = self.numerator * other.numerator, self.denominator * other.denominator
        if self.irrational is None and other.irrational is None:
            return self.make(top, below)
        one, two, d = self._second(), other._second(), self.radicand or other.radicand
        return self.make(
            top + one * two * d, below, self.numerator * two + one * other.numerator, d
        )

    def __truediv__(self, other: Self | Number | int) -> Self:
        return self * self._other(other)._inverse()

    def _inverse(self) -> Self:
        if self.irrational is None:
            return self.make(self.denominator, self.numerator)
        norm = self.numerator**2 - self.irrational**2 * self.radicand
        below = self.denominator
        return self.make(self.numerator * below, norm, -self.irrational * below, self.radicand)

    def __pow__(self, exponent: int) -> Self:
        if exponent < 0:
            return self._inverse() ** -exponent
        if self.irrational is None:
            return type(self)(self.numerator**exponent, self.denominator**exponent)
        result, base = self.constant(1, self.symbols), self
        while exponent:
            if exponent % 2:
                result = result * base
            base, exponent = base * base if exponent > 1 else base, exponent // 2
        return result

    def __radd__(self, other: Number | int) -> Self:
        return self + other

    def __rsub__(self, other: Number | int) -> Self:
        return -self + other

    def __rmul__(self, other: Number | int) -> Self:
        return self * other

    def __rtruediv__(self, other: Number | int) -> Self:
        return self._other(other) / self

    def __eq__(self, other: object) -> bool:
        if isinstance(other, (int, fmpq, Quadratic)):
            other = self.constant(other, self.symbols)
        if not isinstance(other, FunctionArithmetic):
            return NotImplemented
        if self.symbols != other.symbols or self.radicand != other.radicand:
            return False
        same = self.numerator == other.numerator and self.denominator == other.denominator
        return bool(same and self.irrational == other.irrational)

    def __hash__(self) -> int:
        return hash((self.symbols, str(self.numerator), str(self.denominator), str(self.irrational), self.radicand))

    def is_zero(self) -> bool:
        return bool(self.numerator.is_zero() and self.irrational is None)

    def polynomials(self) -> tuple[fmpz_mpoly, fmpz_mpoly, fmpz_mpoly]:
        """Numerator, denominator, and what stands with sqrt(d), zero over Q."""
        return self.numerator, self.denominator, self._second()
