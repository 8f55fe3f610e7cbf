"""Products of linear factors c + d t, kept factored, with exact bookkeeping of the factors that vanish.

This module is the one place that says what a factor of a weight is: an integer linear form C + S t over a common
scale D, that is (C + S t)/D. The limit point is t = 0. A factor with C = 0 vanishes there and contributes one power
of t; with C = S = 0 it vanishes all along the path. Orders are counted from these exact zeros; nothing is evaluated.

Over a quadratic field C and S lie in Z[sqrt(d)]: each is an ``int``, or a ``Quadratic`` with integer parts. Such a part
carries its d as ``radicand`` (0 over the rationals), and products are pairs of integer polynomials.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from math import prod

from flint import fmpq, fmpq_poly, fmpz, fmpz_poly

from ratomega.exact.laurent import Laurent
from ratomega.exact.path import Linear
from ratomega.exact.quadratic import Number, Quadratic, is_whole
from ratomega.exact.quadratic_poly import (
    IntegerPair,
    QuadraticPoly,
    pair_low_product,
    pair_norm_quotient,
    pair_product,
)

__all__ = ["Factored", "Form", "Whole", "expand", "integer_form", "rational_form"]

# Up to this many terms, plain integers are quicker than integer polynomials.
SHORT = 4

Whole = int | Quadratic
Form = tuple[Whole, Whole]


def integer_form(value: Linear, scale: int) -> Form:
    """``value`` times ``scale`` as a pair of integers of the field; the scale must clear the denominators.

    >>> from ratomega.exact.rational import Rational
    >>> integer_form(Linear(Rational(1, 2), Rational(1, 3)), 6)
    (3, 2)
    """
    constant, slope = value.constant * scale, value.slope * scale
    if not (is_whole(constant) and is_whole(slope)):
        raise ValueError(f"the scale {scale} does not clear the denominators of {value}")
    return _whole(constant), _whole(slope)


def rational_form(value: Linear, scale: int) -> tuple[int, int]:
    """``integer_form`` of a rational value. Raises ``ValueError`` for another."""
    constant, slope = integer_form(value, scale)
    if isinstance(constant, Quadratic) or isinstance(slope, Quadratic):
        raise ValueError(f"{value} is not rational")
    return constant, slope


def _whole(value: Number) -> Whole:
    return value if isinstance(value, Quadratic) else int(value.p)


@dataclass(slots=True, eq=False)
class Factored:
    """A quotient of integer linear forms over a common scale; treat it as frozen.

    ``up`` and ``down`` hold every factor of numerator and denominator, vanishing ones included. The expanded products
    are kept once they were needed.

    >>> w = Factored.of(up=[(2, 1)], down=[(0, 3), (1, 1)], scale=1)       # (2 + t) / (3 t (1 + t))
    >>> w.order, w.dead
    (1, False)
    >>> expand([w], last=0).coefficients()
    {-1: 2/3, 0: -1/3}
    """

    up: tuple[Form, ...]
    down: tuple[Form, ...]
    scale: int
    vanishing_up: int
    vanishing_down: int
    dead: bool
    undefined: bool
    radicand: int = 0
    _products: tuple[fmpz_poly, fmpz_poly] | None = None
    _pairs: tuple[IntegerPair, IntegerPair] | None = None
    _heads: tuple[list[int], list[int]] | None = None

    @classmethod
    def of(cls, up: Iterable[Form], down: Iterable[Form], scale: int, radicand: int = 0) -> Factored:
        up, down = tuple(up), tuple(down)
        zeros_up = [s for c, s in up if c == 0]
        zeros_down = [s for c, s in down if c == 0]
        return cls(up, down, scale, len(zeros_up), len(zeros_down), 0 in zeros_up, 0 in zeros_down, radicand)

    @property
    def order(self) -> int:
        """Vanishing denominators minus vanishing numerators at the limit point."""
        return self.vanishing_down - self.vanishing_up

    def products(self) -> tuple[fmpz_poly, fmpz_poly]:
        """Numerator and denominator as integer polynomials in t, without the powers of t and the scale."""
        if self._products is None:
            self._products = (_product(self.up), _product(self.down))  # type: ignore[arg-type]
        return self._products

    def heads(self, length: int) -> tuple[list[int], list[int]]:
        """The first coefficients of ``products``, at least ``length`` of them, as plain integers: what a weight needs
        that has no pole, or a low one."""
        if self._heads is None or len(self._heads[0]) < length:
            self._heads = (_head(self.up, length), _head(self.down, length))  # type: ignore[arg-type]
        return self._heads

    def pairs(self) -> tuple[IntegerPair, IntegerPair]:
        """The same over Z[sqrt(radicand)], each as a pair (P, Q) for P + Q sqrt(radicand)."""
        if self._pairs is None:
            self._pairs = (_pair_product(self.up, self.radicand), _pair_product(self.down, self.radicand))
        return self._pairs


def _pair_product(forms: Sequence[Form], radicand: int) -> IntegerPair:
    """Rational forms are multiplied as such; only the others need pairs."""
    plain = [(c, s) for c, s in forms if isinstance(c, int) and isinstance(s, int)]
    result: IntegerPair = (_product(plain), fmpz_poly())
    layer = [_pair_form(c, s) for c, s in forms if isinstance(c, Quadratic) or isinstance(s, Quadratic)]
    while len(layer) > 1:
        paired = [pair_product(layer[n], layer[n + 1], radicand) for n in range(0, len(layer) - 1, 2)]
        if len(layer) % 2:
            paired.append(layer[-1])
        layer = paired
    return pair_product(result, layer[0], radicand) if layer else result


def _pair_form(c: Whole, s: Whole) -> IntegerPair:
    both = [_two(c), _two(s)] if c != 0 else [_two(s)]
    return fmpz_poly([x for x, _ in both]), fmpz_poly([y for _, y in both])


def _two(value: Whole) -> tuple[int, int]:
    return (int(value.x.p), int(value.y.p)) if isinstance(value, Quadratic) else (value, 0)


def _head(forms: Sequence[tuple[int, int]], length: int) -> list[int]:
    """The product of the forms to ``length`` terms, each form that vanishes at t = 0 divided by t."""
    if not forms:
        return [1] + [0] * (length - 1)
    if length == 1:
        return [prod([c or s for c, s in forms])]
    if length == 2:
        lead, slope = 1, 0
        for c, s in forms:
            if c:
                lead, slope = lead * c, slope * c + lead * s
            else:
                lead, slope = lead * s, slope * s
        return [lead, slope]
    result = [1] + [0] * (length - 1)
    for c, s in forms:
        if c:
            for n in range(length - 1, 0, -1):
                result[n] = result[n] * c + result[n - 1] * s
            result[0] *= c
        else:
            result = [x * s for x in result]
    return result


def _product(forms: Sequence[tuple[int, int]]) -> fmpz_poly:
    """The product of the forms, each form that vanishes at t = 0 divided by t; balanced, so that sizes stay equal."""
    layer = [fmpz_poly([c, s]) if c else fmpz_poly([s]) for c, s in forms]
    if not layer:
        return fmpz_poly([1])
    while len(layer) > 1:
        paired = [layer[n] * layer[n + 1] for n in range(0, len(layer) - 1, 2)]
        if len(layer) % 2:
            paired.append(layer[-1])
        layer = paired
    return layer[0]


def expand(parts: Sequence[Factored], last: int) -> Laurent:
    """The product of the parts as a Laurent series in t with all powers up to ``last``, none beyond.

    A product that vanishes on the path is the zero series. Raises ``ZeroDivisionError`` when a denominator vanishes
    all along the path. Cost: products of integer polynomials, then one division to exactly ``order + last + 1`` terms.
    """
    precision = last + 1
    order = exponent = 0
    dead = False
    for part in parts:
        if part.undefined:
            raise ZeroDivisionError("a denominator vanishes all along the path")
        dead = dead or part.dead
        order += part.vanishing_down - part.vanishing_up
        exponent += len(part.down) - len(part.up)
    length = precision + order
    if length <= 0 or dead:
        return Laurent.zero(precision=precision)
    if parts and parts[0].radicand:
        return _expand_pairs(parts, order, length, precision)
    scale = parts[0].scale if parts else 1
    if length <= SHORT:
        # The leading coefficient is a product of numbers that are not zero, so the form is canonical as it is.
        return Laurent(-order, _short_quotient(parts, length, scale, exponent), precision)
    factor = fmpq(fmpz(scale) ** exponent) if exponent >= 0 else fmpq(1, fmpz(scale) ** -exponent)
    up, down = fmpz_poly([1]), fmpz_poly([1])
    for part in parts:
        part_up, part_down = part.products()
        up, down = up.mul_low(part_up, length), down.mul_low(part_down, length)
    return Laurent.make(-order, _quotient(up, down, length) * factor, precision)


def _short_quotient(parts: Sequence[Factored], length: int, scale: int, exponent: int) -> fmpq_poly:
    """The product of the parts to ``length`` terms times scale^exponent, in plain integers: less work than polynomials
    while few terms are wanted. All coefficients stand over one denominator."""
    if length == 1:
        above = below = 1
        for part in parts:
            part_up, part_down = part.heads(1)
            above *= part_up[0]
            below *= part_down[0]
        numerators = [above]
    elif length == 2:
        # Most weights with a pole have a simple one, and this is half the work of the general way.
        u, v, c, d = 1, 0, 1, 0
        for part in parts:
            part_up, part_down = part.heads(2)
            if part.up:
                u, v = u * part_up[0], u * part_up[1] + v * part_up[0]
            c, d = c * part_down[0], c * part_down[1] + d * part_down[0]
        numerators, below = [u * c, v * c - u * d], c * c
    else:
        up = down = [1] + [0] * (length - 1)
        for part in parts:
            part_up, part_down = part.heads(length)
            if part.up:
                up = _low_product(up, part_up, length)
            down = _low_product(down, part_down, length)
        lead = down[0]
        numerators, below = [up[0]], lead
        for n in range(1, length):
            coming = up[n] * below - sum([down[k] * numerators[n - k] for k in range(1, n + 1)])
            numerators = [x * lead for x in numerators]
            numerators.append(coming)
            below *= lead
    if exponent >= 0:
        factor = scale**exponent
        return fmpq_poly([x * factor for x in numerators], below)
    return fmpq_poly(numerators, below * scale**-exponent)


def _low_product(left: list[int], right: list[int], length: int) -> list[int]:
    if length == 3:
        a, b, c = left[0], left[1], left[2]
        x, y, z = right[0], right[1], right[2]
        return [a * x, a * y + b * x, a * z + b * y + c * x]
    return [sum([left[k] * right[n - k] for k in range(n + 1)]) for n in range(length)]


def _expand_pairs(parts: Sequence[Factored], order: int, length: int, precision: int) -> Laurent:
    """The same over Z[sqrt(d)], all parts of one field."""
    d, one = parts[0].radicand, (fmpz_poly([1]), fmpz_poly())
    up, down = one, one
    exponent = 0
    for part in parts:
        part_up, part_down = part.pairs()
        up, down = pair_low_product(up, part_up, d, length), pair_low_product(down, part_down, d, length)
        exponent += len(part.down) - len(part.up)
    factor = fmpq(parts[0].scale) ** exponent
    (rational, irrational), norm = pair_norm_quotient(up, down, d, length)
    x, y = (_quotient(part, norm, length) * factor for part in (rational, irrational))
    return Laurent.make(-order, QuadraticPoly.make(x, y, d), precision)


def _quotient(up: fmpz_poly, down: fmpz_poly, length: int) -> fmpq_poly:
    """up/down to ``length`` terms. The n-th coefficient times down[0]^(n+1) is an integer: no gcd until the end."""
    lead = down[0]
    known = [down[n] for n in range(1, min(length, down.length()))]
    powers = [fmpz(1)]
    for _ in range(length):
        powers.append(powers[-1] * lead)
    integers: list[fmpz] = []
    for n in range(length):
        total = up[n] * powers[n]
        for k, coefficient in enumerate(known[:n]):
            total -= coefficient * integers[n - 1 - k] * powers[k]
        integers.append(total)
    return fmpq_poly([fmpq(integer, powers[n + 1]) for n, integer in enumerate(integers)])


def linear_factors(parts: Iterable[Factored]) -> dict[tuple[Number, Number], int]:
    """The linear factors (c, d) of c + d t with their exponents, equal ones collected, cancelled ones left out."""
    exponents: dict[tuple[Number, Number], int] = {}
    for part in parts:
        unit = fmpq(1, part.scale)
        for forms, sign in ((part.up, 1), (part.down, -1)):
            for c, s in forms:
                key = (c * unit, s * unit)
                exponents[key] = exponents.get(key, 0) + sign
    return {key: exponent for key, exponent in exponents.items() if exponent}
