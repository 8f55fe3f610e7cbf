"""One rational function at many exact points: prepared once, then a few operations in C a point.

In one symbol, a point s = x + y sqrt(d) is a root of X^2 - 2x X + x^2 - d y^2, so that the remainder r_0 + r_1 X of a
polynomial modulo this one has its value r_0 + r_1 s. In several symbols Horner's scheme does it.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from flint import fmpq_poly, fmpz, fmpz_mpoly, fmpz_poly

from ratomega.exact.polynomials import evaluated
from ratomega.exact.quadratic import Number, Quadratic, quadratic, square_root
from ratomega.exact.rational import Rational
from ratomega.exact.rational_function import RationalFunction

__all__ = ["UNDETERMINED", "PointFunction"]

UNDETERMINED = "0/0: the value depends on how the point is approached"


class PointFunction:
    """A rational function made ready. ``at`` takes a point, a number for each symbol in their order, all of one field,
    that of the function where it has one.

    >>> a = RationalFunction.symbol("a", ("a",))
    >>> f = PointFunction(a / (a * a - 1) ** 2)
    >>> f.at([Rational(1, 2)]), str(f.at([quadratic(Rational(0), Rational(1, 2), -1)])), f.at([Rational(1)])
    (8/9, '8/25*sqrt(-1)', 'pole of order 2')
    """

    def __init__(self, function: RationalFunction) -> None:
        parts = function.polynomials() if function.radicand else function.polynomials()[:2]
        self._function = function
        self._parts: tuple[Any, ...] = tuple(map(_dense, parts)) if len(function.symbols) == 1 else parts

    def at(self, point: Sequence[Number]) -> Number | str:
        """The value; text that says what is there where there is none.

        A pole in one symbol comes with its order; in several, a point where numerator and denominator both vanish is
        told apart from a pole.
        """
        top, bottom = (_value(part, point) for part in self._parts[:2])
        if self._function.radicand:
            top = top + _value(self._parts[2], point) * square_root(self._function.radicand)
            if bottom == 0:
                # The denominator over the integers can vanish where that in lowest terms does not.
                top, bottom = self._function.factored_at(point)
        if bottom != 0:
            value: Number = top / bottom
            return value
        if len(point) > 1:
            return UNDETERMINED if top == 0 else "pole"
        if self._function.radicand:
            return f"pole of order {-self._function.valuation(point[0])}"
        return f"pole of order {_multiplicity(self._parts[1], point[0])}"


def _dense(poly: fmpz_mpoly) -> fmpz_poly:
    coefficients = {int(powers[0]): c for powers, c in poly.to_dict().items()}
    return fmpz_poly([coefficients.get(n, fmpz(0)) for n in range(max(coefficients, default=-1) + 1)])


def _value(part: Any, point: Sequence[Number]) -> Any:
    if not isinstance(part, fmpz_poly):
        return evaluated(part, point)
    where = point[0]
    if not isinstance(where, Quadratic):
        return part(where)
    rest = (fmpq_poly(part) % _minimal(where)).coeffs()
    rest += [Rational(0)] * (2 - len(rest))
    return quadratic(rest[0] + rest[1] * where.x, rest[1] * where.y, where.d)


def _minimal(where: Number) -> fmpq_poly:
    """The monic polynomial of lowest degree with this root."""
    if isinstance(where, Quadratic):
        return fmpq_poly([where.norm(), -2 * where.x, 1])
    return fmpq_poly([-where, 1])


def _multiplicity(poly: fmpz_poly, root: Number) -> int:
    """How often a root that the polynomial has is one."""
    rest, factor, times = fmpq_poly(poly), _minimal(root), 0
    while not (rest % factor).coeffs():
        rest, times = rest // factor, times + 1
    return times
