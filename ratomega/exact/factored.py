"""Products of linear factors c + d t, kept factored, with exact bookkeeping of the factors that vanish.

This module is the one place that says what a factor of a weight is: an integer linear form C + S t over a common
scale D, that is (C + S t)/D. The limit point is t = 0. A factor with C = 0 vanishes there and contributes one power
of t; with C = S = 0 it vanishes all along the path. Orders are counted from these exact zeros; nothing is evaluated.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from flint import fmpq, fmpq_poly, fmpz, fmpz_poly

from ratomega.exact.laurent import Laurent
from ratomega.exact.path import Linear
from ratomega.exact.rational import Rational

__all__ = ["Factored", "Form", "expand", "integer_form"]

Form = tuple[int, int]


def integer_form(value: Linear, scale: int) -> Form:
    """``value`` times ``scale`` as a pair of integers; the scale must clear the denominators.

    >>> integer_form(Linear(Rational(1, 2), Rational(1, 3)), 6)
    (3, 2)
    """
    constant, slope = value.constant * scale, value.slope * scale
    if constant.q != 1 or slope.q != 1:
        raise ValueError(f"the scale {scale} does not clear the denominators of {value}")
    return int(constant.p), int(slope.p)


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
    _products: tuple[fmpz_poly, fmpz_poly] | None = None

    @classmethod
    def of(cls, up: Iterable[Form], down: Iterable[Form], scale: int) -> Factored:
        up, down = tuple(up), tuple(down)
        return cls(
            up,
            down,
            scale,
            sum(1 for c, _ in up if c == 0),
            sum(1 for c, _ in down if c == 0),
            (0, 0) in up,
            (0, 0) in down,
        )

    @property
    def order(self) -> int:
        """Vanishing denominators minus vanishing numerators at the limit point."""
        return self.vanishing_down - self.vanishing_up

    def products(self) -> tuple[fmpz_poly, fmpz_poly]:
        """Numerator and denominator as integer polynomials in t, without the powers of t and the scale."""
        if self._products is None:
            self._products = (_product(self.up), _product(self.down))
        return self._products


def _product(forms: Sequence[Form]) -> fmpz_poly:
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
    order = 0
    for part in parts:
        if part.undefined:
            raise ZeroDivisionError("a denominator vanishes all along the path")
        order += part.order
    length = precision + order
    if length <= 0 or any(part.dead for part in parts):
        return Laurent.zero(precision=precision)
    up, down = fmpz_poly([1]), fmpz_poly([1])
    exponent = 0
    scale = 1
    for part in parts:
        part_up, part_down = part.products()
        up, down = up.mul_low(part_up, length), down.mul_low(part_down, length)
        exponent += len(part.down) - len(part.up)
        scale = part.scale
    factor = fmpq(fmpz(scale) ** exponent) if exponent >= 0 else fmpq(1, fmpz(scale) ** -exponent)
    if length == 1:
        return Laurent.make(-order, fmpq_poly([factor * up[0] / down[0]]), precision)
    return Laurent.make(-order, _quotient(up, down, length) * factor, precision)


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


def linear_factors(parts: Iterable[Factored]) -> dict[tuple[Rational, Rational], int]:
    """The linear factors (c, d) of c + d t with their exponents, equal ones collected, cancelled ones left out."""
    exponents: dict[tuple[Rational, Rational], int] = {}
    for part in parts:
        for forms, sign in ((part.up, 1), (part.down, -1)):
            for c, s in forms:
                key = (fmpq(c, part.scale), fmpq(s, part.scale))
                exponents[key] = exponents.get(key, 0) + sign
    return {key: exponent for key, exponent in exponents.items() if exponent}
