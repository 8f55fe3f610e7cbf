"""Rational functions of free parameters with rational coefficients: what a coefficient with symbols is.

A function is numerator/denominator, two integer polynomials (flint ``fmpz_mpoly``, lexicographic in the order of the
symbols) without common factor, contents included, the leading coefficient of the denominator positive: equal functions
have equal parts. ``str`` is the factored form in Python syntax; ``exact.function_text`` reads it back.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from flint import acb, arb, ctx, fmpq, fmpz, fmpz_mpoly

from ratomega.errors import InputError
from ratomega.exact.polynomials import coefficients_in, context_of, evaluated, poly_text, power_text
from ratomega.exact.quadratic import Number, Quadratic, as_number
from ratomega.exact.rational import ONE, ZERO, Rational

__all__ = ["Pole", "RationalFunction", "Value", "function_of", "function_of_planes"]

Value = Number | arb | acb | complex
Factors = tuple[Rational, tuple[tuple[fmpz_mpoly, int], ...]]
"""A constant and irreducible primitive polynomials with exponents, negative ones from the denominator."""

# A complex number is worked out with this many bits, doubled until both parts are good to a double.
FIRST_BITS = 128
MOST_BITS = 1 << 16


@dataclass(frozen=True, slots=True)
class Pole:
    """A pole in one symbol: where (a number, or a function of the other symbols) and of which order."""

    location: Number | RationalFunction
    order: int


@dataclass(frozen=True, slots=True, eq=False)
class RationalFunction:
    """An exact rational function. Build it with ``function_of``, ``RationalFunction.make`` or by arithmetic.

    >>> a = RationalFunction.symbol("a", ("a",))
    >>> f = (2 * a + 2) / (a * a - 1)**2
    >>> str(f), str(f.at(a="1/2")), [(str(p.location), p.order) for p in f.poles()]
    ('2/((a + 1)*(a - 1)**2)', '16/3', [('-1', 1), ('1', 2)])
    """

    numerator: fmpz_mpoly
    denominator: fmpz_mpoly

    # ---- construction ----

    @classmethod
    def make(cls, numerator: fmpz_mpoly, denominator: fmpz_mpoly) -> RationalFunction:
        """The checking constructor: lowest terms, positive lead. Raises ``ZeroDivisionError`` for denominator 0."""
        if denominator.is_zero():
            raise ZeroDivisionError("the denominator of a rational function is zero")
        common = numerator.gcd(denominator)
        if not common.is_one():
            numerator, denominator = numerator / common, denominator / common
        if denominator.leading_coefficient() < 0:
            numerator, denominator = -numerator, -denominator
        return cls(numerator, denominator)

    @classmethod
    def constant(cls, value: Rational | int, symbols: Sequence[str]) -> RationalFunction:
        value, context = fmpq(value), context_of(symbols)
        return cls(context.constant(value.p), context.constant(value.q))

    @classmethod
    def symbol(cls, name: str, symbols: Sequence[str]) -> RationalFunction:
        context = context_of(symbols)
        return cls(context.gen(tuple(symbols).index(name)), context.constant(1))

    @property
    def symbols(self) -> tuple[str, ...]:
        return tuple(self.numerator.context().names())

    # ---- arithmetic ----

    def _other(self, other: RationalFunction | Rational | int) -> RationalFunction:
        if isinstance(other, RationalFunction):
            if other.symbols != self.symbols:
                raise ValueError(f"functions of {self.symbols} and of {other.symbols} are not mixed")
            return other
        return RationalFunction.constant(other, self.symbols)

    def __add__(self, other: RationalFunction | Rational | int) -> RationalFunction:
        other = self._other(other)
        if self.denominator == other.denominator:
            return RationalFunction.make(self.numerator + other.numerator, self.denominator)
        top = self.numerator * other.denominator + other.numerator * self.denominator
        return RationalFunction.make(top, self.denominator * other.denominator)

    def __neg__(self) -> RationalFunction:
        return RationalFunction(-self.numerator, self.denominator)

    def __sub__(self, other: RationalFunction | Rational | int) -> RationalFunction:
        return self + (-self._other(other))

    def __mul__(self, other: RationalFunction | Rational | int) -> RationalFunction:
        other = self._other(other)
        return RationalFunction.make(self.numerator * other.numerator, self.denominator * other.denominator)

    def __truediv__(self, other: RationalFunction | Rational | int) -> RationalFunction:
        other = self._other(other)
        return RationalFunction.make(self.numerator * other.denominator, self.denominator * other.numerator)

    def __pow__(self, exponent: int) -> RationalFunction:
        if exponent < 0:
            return RationalFunction.constant(1, self.symbols) / self**-exponent
        return RationalFunction(self.numerator**exponent, self.denominator**exponent)

    def __radd__(self, other: Rational | int) -> RationalFunction:
        return self + other

    def __rsub__(self, other: Rational | int) -> RationalFunction:
        return -self + other

    def __rmul__(self, other: Rational | int) -> RationalFunction:
        return self * other

    def __rtruediv__(self, other: Rational | int) -> RationalFunction:
        return self._other(other) / self

    def __eq__(self, other: object) -> bool:
        if isinstance(other, (int, fmpq)):
            other = RationalFunction.constant(other, self.symbols)
        if not isinstance(other, RationalFunction):
            return NotImplemented
        same = self.symbols == other.symbols
        return same and bool(self.numerator == other.numerator and self.denominator == other.denominator)

    def __hash__(self) -> int:
        return hash((self.symbols, str(self.numerator), str(self.denominator)))

    def is_zero(self) -> bool:
        return bool(self.numerator.is_zero())

    # ---- structure ----

    def factors(self) -> Factors:
        """The constant and the irreducible factors; numerator first, each part ordered by degree, then by text."""
        constant, found = ONE, []
        for poly, sign in ((self.numerator, 1), (self.denominator, -1)):
            if poly.is_zero():
                return ZERO, ()
            content, pairs = poly.factor()
            constant = constant * fmpq(content) if sign > 0 else constant / fmpq(content)
            part = []
            for factor, exponent in pairs:
                lead = factor.leading_coefficient()
                if lead < 0:
                    factor, constant = -factor, constant * (-1) ** int(exponent)
                part.append((factor, sign * int(exponent)))
            found += sorted(part, key=lambda pair: (pair[0].total_degree(), poly_text(pair[0])))
        return constant, tuple(found)

    def degree(self, symbol: str) -> int:
        """The degree of the numerator less that of the denominator: the growth at infinity."""
        place = self._place(symbol)
        return int(self.numerator.degrees()[place]) - int(self.denominator.degrees()[place])

    def _place(self, symbol: str | None) -> int:
        if symbol is None:
            if len(self.symbols) != 1:
                message = f"say which of {', '.join(self.symbols)} is meant"
                raise InputError.single(message, "symbol")
            return 0
        if symbol not in self.symbols:
            message = f'there is no symbol "{symbol}"; the symbols are {", ".join(self.symbols)}'
            raise InputError.single(message, "symbol")
        return self.symbols.index(symbol)

    def poles(self, symbol: str | None = None) -> tuple[Pole, ...]:
        """All poles in one symbol (which may be left out when there is one), with their orders.

        Raises ``InputError`` when a factor of the denominator is not linear in the symbol.
        """
        place = self._place(symbol)
        found = []
        for factor, exponent in self.factors()[1]:
            parts = coefficients_in(factor, place)
            if exponent > 0 or len(parts) == 1:
                continue
            if len(parts) > 2:
                message = f"the factor {poly_text(factor)} of the denominator is not linear in {self.symbols[place]}"
                raise InputError.single(message, "symbol")
            location = -RationalFunction.make(parts[0], parts[1])
            found.append(Pole(location._without(place), -exponent))
        return tuple(sorted(found, key=_pole_order))

    def residue(self, location: object, symbol: str | None = None) -> Number | RationalFunction:
        """The residue in one symbol at a number or at the location of a pole; zero where there is no pole."""
        valuation, terms = self._laurent(self._place(symbol), location, -1)
        return terms[-1 - valuation] if valuation <= -1 else ZERO

    def taylor(self, symbol: str, last: int, about: object = 0) -> tuple[Number | RationalFunction, ...]:
        """The coefficients of (symbol - about)^n, n = 0 ... last. Raises ``InputError`` at a pole.

        >>> a, m = (RationalFunction.symbol(name, ("a", "m")) for name in "am")
        >>> [str(c) for c in ((m + a) * m / (a - 1)).taylor("m", 2)]
        ['0', 'a/(a - 1)', '1/(a - 1)']
        """
        valuation, terms = self._laurent(self._place(symbol), about, last)
        if valuation < 0:
            raise InputError.single(f"{symbol} = {about} is a pole of order {-valuation}", symbol)
        return (*(ZERO,) * min(valuation, last + 1), *terms)[: last + 1]

    def _laurent(self, place: int, about: object, last: int) -> tuple[int, tuple[Number | RationalFunction, ...]]:
        """(valuation, coefficients up to the power ``last``) around ``about`` in the symbol at ``place``."""
        if self.is_zero():
            return last + 1, ()
        if isinstance(about, RationalFunction):
            centre = about._within(self.symbols)
        else:
            number = as_number(about, self.symbols[place])
            if isinstance(number, Quadratic):
                message = f"{number} is not rational; an expansion is taken around a rational number"
                raise InputError.single(message, self.symbols[place])
            centre = RationalFunction.constant(number, self.symbols)
        top, bottom = (_shifted(poly, place, centre) for poly in (self.numerator, self.denominator))
        low_top, low_bottom = (next(n for n, c in enumerate(part) if not c.is_zero()) for part in (top, bottom))
        valuation = low_top - low_bottom
        top, bottom = top[low_top:], bottom[low_bottom:]
        terms: list[RationalFunction] = []
        for n in range(last - valuation + 1):
            value = top[n] if n < len(top) else RationalFunction.constant(0, self.symbols)
            for k in range(1, min(n, len(bottom) - 1) + 1):
                value = value - bottom[k] * terms[n - k]
            terms.append(value / bottom[0])
        return valuation, tuple(term._without(place) for term in terms)

    def _without(self, place: int) -> Number | RationalFunction:
        """The same function, which does not depend on the symbol at ``place``, of the other symbols."""
        rest = tuple(name for n, name in enumerate(self.symbols) if n != place)
        tables = []
        for poly in (self.numerator, self.denominator):
            terms = {tuple(e for n, e in enumerate(powers) if n != place): c for powers, c in poly.to_dict().items()}
            tables.append(terms)
        if not rest:
            return fmpq(*(terms.get((), fmpz(0)) for terms in tables))
        return RationalFunction(*(context_of(rest).from_dict(terms) for terms in tables))

    def _within(self, symbols: Sequence[str]) -> RationalFunction:
        """The same function among more symbols."""
        context, places = context_of(symbols), [tuple(symbols).index(name) for name in self.symbols]
        parts = []
        for poly in (self.numerator, self.denominator):
            terms = {}
            for powers, c in poly.to_dict().items():
                key = [0] * len(symbols)
                for place, power in zip(places, powers, strict=True):
                    key[place] = int(power)
                terms[tuple(key)] = c
            parts.append(context.from_dict(terms))
        return RationalFunction(*parts)

    # ---- values ----

    def at(self, **values: Any) -> Any:
        """The value at exact numbers (as text, ``Fraction``, ... or of a quadratic field), balls or complex numbers.

        Symbols that are not given stay: the result is then a ``RationalFunction`` of them, and the given values are
        rational. Balls are worked out with the precision of flint's context, complex numbers (and floats, taken as
        what they are) until they are good to a double. Raises ``InputError`` at a pole and for an unknown symbol.
        """
        for name in values:
            self._place(name)
        given = {name: _value(value, name) for name, value in values.items()}
        if len(given) < len(self.symbols):
            return self._partial(given)
        if any(isinstance(value, complex) for value in given.values()):
            return self._complex(given)
        if any(isinstance(value, (arb, acb)) for value in given.values()):
            balls = {name: _ball(value) for name, value in given.items()}
            return self._ball_value(balls)
        exact: list[Any] = [given[name] for name in self.symbols]
        top, bottom = (evaluated(poly, exact) for poly in (self.numerator, self.denominator))
        if bottom == 0:
            where = ", ".join(f"{name} = {value}" for name, value in given.items())
            raise InputError.single(f"{where} is a pole", ", ".join(given))
        return top / bottom

    def _partial(self, given: Mapping[str, Value]) -> RationalFunction:
        result: Any = self
        for name, value in given.items():
            if not isinstance(value, fmpq):
                rest = ", ".join(s for s in self.symbols if s not in given)
                message = f"{value} is not rational; where {rest} stays free, the given values are rational"
                raise InputError.single(message, name)
            place = result._place(name)
            centre = RationalFunction.constant(value, result.symbols)
            top, bottom = (_shifted(poly, place, centre)[0] for poly in (result.numerator, result.denominator))
            if bottom.is_zero():
                raise InputError.single(f"{name} = {value} is a pole whatever the other symbols are", name)
            result = (top / bottom)._without(place)
        assert isinstance(result, RationalFunction)
        return result

    def _ball_value(self, balls: Mapping[str, arb | acb]) -> arb | acb:
        # Factor by factor: an expanded polynomial loses digits near its zeros.
        constant, factors = self.factors()
        result: arb | acb = arb(constant)
        for factor, exponent in factors:
            value: arb | acb = evaluated(factor, [balls[name] for name in self.symbols])
            result = result * value**exponent if exponent > 0 else result / value**-exponent
        return result

    def _complex(self, given: Mapping[str, Value]) -> complex:
        bits = FIRST_BITS
        while bits <= MOST_BITS:
            with ctx.workprec(bits):
                value = acb(self._ball_value({name: _ball(x) for name, x in given.items()}))
                if value.rel_accuracy_bits() >= 60 or value == 0:
                    return complex(value)
            bits *= 2
        raise InputError.single("the value is a pole, or too close to one to be told from it", ", ".join(given))

    # ---- how it is written ----

    def __str__(self) -> str:
        constant, factors = self.factors()
        above = [power_text(f, e) for f, e in factors if e > 0]
        below = [power_text(f, -e) for f, e in factors if e < 0]
        top, bottom = abs(constant.p), constant.q
        if top != 1 or not above:
            above.insert(0, str(top))
        if bottom != 1:
            below.insert(0, str(bottom))
        text = "*".join(above)
        if len(above) == 1 and len(below) == 0 and text.startswith("("):
            text = text[1:-1] if text.endswith(")") and constant > 0 else text
        if below:
            text = f"{text}/{below[0]}" if len(below) == 1 else f"{text}/({'*'.join(below)})"
        return f"-{text}" if constant < 0 else text

    __repr__ = __str__

    def sympy(self) -> Any:
        """The factored form as a sympy expression in ``sympy.Symbol``s of the same names."""
        import sympy

        names = [sympy.Symbol(name) for name in self.symbols]
        constant, factors = self.factors()
        parts = [sympy.Rational(int(constant.p), int(constant.q))] if constant != 1 or not factors else []
        for factor, exponent in factors:
            terms = (
                sympy.Mul(sympy.Integer(int(c)), *(name ** int(e) for name, e in zip(names, powers, strict=True)))
                for powers, c in factor.to_dict().items()
            )
            parts.append(sympy.Add(*terms) ** exponent)
        # Evaluated, sympy would multiply the constant into a sum.
        return sympy.Mul(*parts, evaluate=False)

    def latex(self) -> str:
        """The factored form in LaTeX."""
        import sympy

        return str(sympy.latex(self.sympy()))


def function_of(
    coefficients: Mapping[tuple[int, ...], Rational], denominator: fmpz_mpoly, symbols: Sequence[str]
) -> RationalFunction:
    """The polynomial with the given rational coefficients over a denominator."""
    scale = fmpz(1)
    for value in coefficients.values():
        scale = scale.lcm(value.q)
    terms = {powers: (value * scale).p for powers, value in coefficients.items() if value != 0}
    return RationalFunction.make(context_of(symbols).from_dict(terms), denominator * scale)


def function_of_planes(
    coefficients: Mapping[tuple[int, ...], Rational],
    planes: Sequence[tuple[Sequence[int], int]],
    symbols: Sequence[str],
) -> RationalFunction:
    """The same over a product of linear forms (c_0, c_1, ...) with multiplicities."""
    context = context_of(symbols)
    denominator = context.constant(1)
    for plane, times in planes:
        units = (tuple(int(s == place) for s in range(len(symbols))) for place in range(len(symbols)))
        terms = {(0,) * len(symbols): fmpz(plane[0]), **{u: fmpz(c) for u, c in zip(units, plane[1:], strict=True)}}
        denominator *= context.from_dict(terms) ** times
    return function_of(coefficients, denominator, symbols)


def _shifted(poly: fmpz_mpoly, place: int, centre: RationalFunction) -> list[RationalFunction]:
    """The coefficients of the powers of x after the symbol was replaced by centre + x: Horner's scheme."""
    one = poly.context().constant(1)
    parts = [RationalFunction(part, one) for part in coefficients_in(poly, place)]
    if centre.is_zero():
        return parts
    for start in range(len(parts) - 1):
        for n in range(len(parts) - 2, start - 1, -1):
            parts[n] = parts[n] + centre * parts[n + 1]
    return parts


def _value(value: object, name: str) -> Value:
    if isinstance(value, (arb, acb)):
        return value
    if isinstance(value, (complex, float)) and not isinstance(value, bool):
        return complex(value)
    return as_number(value, name)


def _ball(value: Value) -> arb | acb:
    """A number as a ball of the current precision."""
    if isinstance(value, (arb, acb)):
        return value
    if isinstance(value, complex):
        return acb(value.real, value.imag) if value.imag else arb(value.real)
    if isinstance(value, Quadratic):
        root = arb(abs(value.d)).sqrt()
        return arb(value.x) + arb(value.y) * root if value.d > 0 else acb(arb(value.x), arb(value.y) * root)
    return arb(value)


def _pole_order(pole: Pole) -> tuple[int, Any, str]:
    where = pole.location
    return (0, where, "") if isinstance(where, fmpq) else (1, ZERO, str(where))
