"""Rational functions of free parameters, over Q or a quadratic field: what a coefficient with symbols is.

Normal form and arithmetic are those of ``function_arithmetic``; this is what a function is asked for: its factors and
poles, expansions, values.

``str`` is the factored form in Python syntax, over the field in lowest terms; ``exact.function_text`` reads it back.
Factors are found when they are asked for (``field_factors``); arithmetic needs none.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from itertools import zip_longest
from typing import Any

from flint import acb, arb, fmpq, fmpz, fmpz_mpoly

from ratomega.errors import InputError
from ratomega.exact.factored_form import factored_sympy, factored_text
from ratomega.exact.field_factors import Factors, field_factors
from ratomega.exact.field_polynomials import Factor, FieldPoly, factor_text
from ratomega.exact.function_arithmetic import FunctionArithmetic
from ratomega.exact.function_values import ball_of_factors, complex_of_factors, exact_of_factors
from ratomega.exact.polynomials import coefficients_in, context_of, evaluated
from ratomega.exact.quadratic import (
    Number,
    Quadratic,
    as_number,
    one_field,
    quadratic,
    rational_parts,
    split_square,
    square_root,
)
from ratomega.exact.rational import ZERO, Rational, common_denominator
from ratomega.exact.values import Value, ball_value, exact_values, value_of

__all__ = ["Pole", "RationalFunction", "function_of"]


@dataclass(frozen=True, slots=True)
class Pole:
    """A pole in one symbol: where (a number, or a function of the other symbols) and of which order."""

    location: Number | RationalFunction
    order: int


@dataclass(frozen=True, slots=True, eq=False, repr=False)
class RationalFunction(FunctionArithmetic):
    """An exact rational function. Build it with ``function_of``, ``RationalFunction.make`` or by arithmetic.

    >>> a = RationalFunction.symbol("a", ("a",))
    >>> f = (2 * a + 2) / (a * a - 1)**2
    >>> str(f), str(f.at(a="1/2")), [(str(p.location), p.order) for p in f.poles()]
    ('2/((a + 1)*(a - 1)**2)', '16/3', [('-1', 1), ('1', 2)])
    """

    # ---- structure ----

    def factors(self) -> Factors:
        """The constant and the irreducible factors; numerator first, each part ordered by degree, then by text."""
        if self.is_zero():
            return ZERO, ()
        return field_factors(self.numerator, self._second(), self.denominator, self.radicand)

    def degree(self, symbol: str) -> int:
        """The degree of the numerator less that of the denominator: the growth at infinity; -1 for the zero function.
        """
        place = self._place(symbol)
        top = max(int(part.degrees()[place]) for part in (self.numerator, self._second()))
        return top - int(self.denominator.degrees()[place])

    def is_polynomial(self) -> bool:
        """No symbol is left in the denominator."""
        return bool(self.denominator.is_constant())

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

        Locations may lie in a quadratic field where the function does not. Raises ``InputError`` when a factor of the
        denominator is neither linear in the symbol nor a quadratic polynomial in it with rational coefficients.
        """
        place = self._place(symbol)
        found = []
        for factor, exponent in self.factors()[1]:
            if exponent < 0:
                found += [Pole(location, -exponent) for location in self._zeros(factor, place)]
        return tuple(sorted(found, key=_pole_order))

    def _zeros(self, factor: Factor, place: int) -> list[Number | RationalFunction]:
        parts = [part._without(place) for part in _coefficients(factor, place)]
        if len(parts) <= 2:
            return [-(parts[0] / parts[1])] if len(parts) == 2 else []
        numbers = [part for part in parts if isinstance(part, fmpq)]
        if len(numbers) == len(parts) == 3:
            constant, linear, lead = numbers
            square = linear * linear / 4 - constant * lead
            root, d = split_square(int(square.p * square.q))
            step = square_root(d) * (Rational(root) / (square.q * lead))
            return [-linear / (2 * lead) - step, -linear / (2 * lead) + step]
        message = f"the factor {factor_text(factor)} of the denominator is not linear in {self.symbols[place]}"
        raise InputError.single(message, "symbol")

    def valuation(self, location: object, symbol: str | None = None) -> int:
        """The order of vanishing in one symbol, negative at a pole. The function is not zero.

        >>> a = RationalFunction.symbol("a", ("a",))
        >>> f = 1 / (a - square_root(-1))
        >>> f.valuation("i"), f.valuation("-i")
        (-1, 0)
        """
        return self._laurent(self._place(symbol), location, -1)[0]

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
            centre = RationalFunction.constant(as_number(about, self.symbols[place]), self.symbols)
        self._checked_field([centre], self.symbols[place])
        top, bottom = self._shifted(place, centre)
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

    def _shifted(self, place: int, centre: RationalFunction) -> tuple[list[RationalFunction], list[RationalFunction]]:
        """Numerator and denominator by powers of x after the symbol was replaced by centre + x."""
        top: Factor = self.numerator
        if self.irrational is not None:
            top = FieldPoly(self.numerator, self.irrational, self.radicand)
        return _moved(_coefficients(top, place), centre), _moved(_coefficients(self.denominator, place), centre)

    def _checked_field(self, values: Iterable[Number | RationalFunction], where: str) -> None:
        """Raises ``InputError`` when a value lies in another quadratic field than the function or a value before."""
        known = [square_root(d) for d in (self.radicand, *(_radicand(x) for x in values)) if d]
        try:
            one_field(known)
        except InputError as error:
            raise InputError.single(error.problems[0].message, where) from error

    def _without(self, place: int) -> Number | RationalFunction:
        """The same function, which does not depend on the symbol at ``place``, of the other symbols."""
        rest = tuple(name for n, name in enumerate(self.symbols) if n != place)
        tables = []
        for poly in self.polynomials():
            terms = {tuple(e for n, e in enumerate(powers) if n != place): c for powers, c in poly.to_dict().items()}
            tables.append(terms)
        if not rest:
            top, bottom, second = (fmpq(terms.get((), fmpz(0))) for terms in tables)
            return quadratic(top / bottom, second / bottom, self.radicand)
        return self._of_parts([context_of(rest).from_dict(terms) for terms in tables])

    def _of_parts(self, parts: Sequence[fmpz_mpoly]) -> RationalFunction:
        """The same function with its polynomials among other symbols."""
        top, bottom, second = parts
        return RationalFunction(top, bottom, second if self.radicand else None, self.radicand)

    def _within(self, symbols: Sequence[str]) -> RationalFunction:
        """The same function among more symbols."""
        context, places = context_of(symbols), [tuple(symbols).index(name) for name in self.symbols]
        parts = []
        for poly in self.polynomials():
            terms = {}
            for powers, c in poly.to_dict().items():
                key = [0] * len(symbols)
                for place, power in zip(places, powers, strict=True):
                    key[place] = int(power)
                terms[tuple(key)] = c
            parts.append(context.from_dict(terms))
        return self._of_parts(parts)

    # ---- values ----

    def at(self, **values: Any) -> Any:
        """The value at exact numbers (as text, ``Fraction``, ... or of a quadratic field), balls or complex numbers.

        Symbols that are not given stay: the result is then a ``RationalFunction`` of them, and the given values are
        exact. Balls are worked out with the precision of flint's context, complex numbers (and floats, taken as
        what they are) until they are good to a double. Raises ``InputError`` at a pole, for an unknown symbol and for
        exact numbers of two quadratic fields.
        """
        for name in values:
            self._place(name)
        given = {name: value_of(value, name) for name, value in values.items()}
        if len(given) < len(self.symbols):
            return self._partial(given)
        if any(isinstance(value, complex) for value in given.values()):
            ordered = [given[name] for name in self.symbols]
            return complex_of_factors(self.factors(), self.radicand, ordered, ", ".join(given))
        if any(isinstance(value, (arb, acb)) for value in given.values()):
            balls = [ball_value(given[name]) for name in self.symbols]
            return ball_of_factors(self.factors(), self.radicand, balls)
        self._checked_field(exact_values(given), ", ".join(given))
        numbers: list[Any] = [given[name] for name in self.symbols]
        top, bottom, second = (evaluated(poly, numbers) for poly in self.polynomials())
        if self.radicand:
            top = top + second * square_root(self.radicand)
            if bottom == 0:
                # The denominator over the integers can vanish where that in lowest terms does not.
                top, bottom = self.factored_at(numbers)
        if bottom == 0:
            where = ", ".join(f"{name} = {value}" for name, value in given.items())
            raise InputError.single(f"{where} is a pole", ", ".join(given))
        return top / bottom

    def factored_at(self, values: Sequence[Number]) -> tuple[Number, Number]:
        """Numerator and denominator in lowest terms over the field, at exact numbers of that field."""
        return exact_of_factors(self.factors(), self.radicand, values)

    def _partial(self, given: Mapping[str, Value]) -> RationalFunction:
        self._checked_field(exact_values(given), ", ".join(given))
        result: Any = self
        for name, value in given.items():
            if not isinstance(value, (fmpq, Quadratic)):
                rest = ", ".join(s for s in self.symbols if s not in given)
                message = f"{value} is not exact; where {rest} stays free, the given values are exact"
                raise InputError.single(message, name)
            place = result._place(name)
            centre = RationalFunction.constant(value, result.symbols)
            top, bottom = (parts[0] for parts in result._shifted(place, centre))
            if not bottom.is_zero():
                result = (top / bottom)._without(place)
                continue
            valuation, terms = result._laurent(place, centre, 0)
            if valuation < 0:
                raise InputError.single(f"{name} = {value} is a pole whatever the other symbols are", name)
            result = terms[0] if valuation == 0 else result * 0
            if valuation > 0:
                result = result._without(place)
        assert isinstance(result, RationalFunction)
        return result

    # ---- how it is written ----

    def __str__(self) -> str:
        return factored_text(self.factors())

    __repr__ = __str__

    def sympy(self) -> Any:
        """The factored form as a sympy expression in ``sympy.Symbol``s of the same names."""
        return factored_sympy(self.symbols, self.factors())

    def latex(self) -> str:
        """The factored form in LaTeX."""
        import sympy

        return str(sympy.latex(self.sympy()))


def function_of(
    coefficients: Mapping[tuple[int, ...], Number], denominator: fmpz_mpoly, symbols: Sequence[str]
) -> RationalFunction:
    """The polynomial with the given coefficients, of one field, over a denominator."""
    d = one_field(coefficients.values())
    scale = fmpz(common_denominator(part for value in coefficients.values() for part in rational_parts(value)))
    columns: tuple[dict[tuple[int, ...], fmpz], ...] = ({}, {})
    for powers, value in coefficients.items():
        for column, part in zip(columns, rational_parts(value), strict=False):
            column[powers] = (part * scale).p
    top, second = (context_of(symbols).from_dict(column) for column in columns)
    return RationalFunction.make(top, denominator * scale, second, d)


def _coefficients(factor: Factor, place: int) -> list[RationalFunction]:
    """The coefficients of the powers of one symbol, as functions of all symbols."""
    polys = (factor.rational, factor.irrational) if isinstance(factor, FieldPoly) else (factor,)
    columns = [coefficients_in(poly, place) for poly in polys]
    one, zero = polys[0].context().constant(1), polys[0].context().constant(0)
    d = factor.d if isinstance(factor, FieldPoly) else 0
    rows = zip_longest(*columns, [zero], fillvalue=zero)
    return [RationalFunction.make(row[0], one, row[1], d) for row in rows]


def _moved(parts: list[RationalFunction], centre: RationalFunction) -> list[RationalFunction]:
    """The coefficients after the symbol was replaced by centre + x: Horner's scheme."""
    if centre.is_zero():
        return parts
    for start in range(len(parts) - 1):
        for n in range(len(parts) - 2, start - 1, -1):
            parts[n] = parts[n] + centre * parts[n + 1]
    return parts


def _radicand(value: Number | RationalFunction) -> int:
    if isinstance(value, RationalFunction):
        return value.radicand
    return value.d if isinstance(value, Quadratic) else 0


def _pole_order(pole: Pole) -> tuple[int, Any, Any, str]:
    """Numbers first, by their parts."""
    where = pole.location
    if isinstance(where, RationalFunction):
        return 1, ZERO, ZERO, str(where)
    x, y = (*rational_parts(where), ZERO)[:2]
    return 0, x, y, ""
