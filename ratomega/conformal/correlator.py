"""Four fields on the sphere, or one on the torus, on a path to the limit point: what a block is computed from.

Everything is told by squares of momenta: with eps = eps1 + eps2 and A = eps1 eps2

    c = 1 + 6 eps^2/A,    Delta = (eps^2/4 - P^2)/A,

and on a path each P^2 is a polynomial of second degree in t: the square of a linear form, or a number that is held
where only the square is known. U(2) on its path is the same with P_0, P_inf half differences and P_x, P_1 half sums of
two masses less eps/2 (L. Alday, D. Gaiotto, Y. Tachikawa, arXiv 0906.3219).
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import count

from ratomega.case.conformal import PLACES, ConformalCase
from ratomega.case.setting import Setting
from ratomega.conformal.dictionary import SphereBlock, TorusBlock, gauge_path
from ratomega.conformal.dressing import Dressing
from ratomega.conformal.gauge_sum import block_coefficients
from ratomega.conformal.vertex import Vertex
from ratomega.errors import InputError, PathError
from ratomega.exact.laurent import Laurent
from ratomega.exact.path import Linear, leaves_the_ratio
from ratomega.exact.quadratic import Number, is_quadratic, number_text, one_field
from ratomega.exact.rational import ONE, ZERO, Rational

__all__ = [
    "Correlator",
    "Momentum",
    "further_correlator",
    "of_conformal",
    "of_gauge",
    "pairing",
    "u1_exponent",
    "why_no_fields",
]

HALF, QUARTER = Rational(1, 2), Rational(1, 4)
# eps1 moves by the first, the internal momentum by the second, both over the third, while eps2 moves by 1.
_DIRECTIONS = ((1, 3, 17), (2, -5, 19), (3, 7, 23), (5, -11, 29), (-7, 13, 31))


@dataclass(frozen=True, slots=True)
class Momentum:
    """P on the path. ``square`` holds the coefficients of 1, t, t^2 of P^2; ``root`` is None where P is not known."""

    square: tuple[Number, Number, Number]
    root: Linear | None

    @classmethod
    def of(cls, root: Linear) -> Momentum:
        c, s = root.constant, root.slope
        return cls((c * c, c * s * 2, s * s), root)

    @classmethod
    def held(cls, square: Number) -> Momentum:
        return cls((square, ZERO, ZERO), None)

    @property
    def limit_square(self) -> Number:
        return self.square[0]

    @property
    def limit(self) -> Number | None:
        return None if self.root is None else self.root.constant

    def square_at(self, t: int) -> Number:
        c0, c1, c2 = self.square
        return c0 + c1 * t + c2 * (t * t)

    def text(self) -> str:
        return str(self.root) if self.root is not None else f"a root of {number_text(self.square[0])}"


@dataclass(frozen=True, slots=True)
class Correlator:
    """``external``: four momenta, of the fields at 0, x, 1 and infinity, or one on the torus."""

    eps1: Linear
    eps2: Linear
    external: tuple[Momentum, ...]
    internal: Momentum

    @property
    def torus(self) -> bool:
        return len(self.external) == 1

    def text(self) -> str:
        """The path in one line."""
        names = PLACES if not self.torus else ("the field",)
        fields = ", ".join(f"{name}: {one.text()}" for name, one in zip(names, self.external, strict=True))
        return f"eps1 = {self.eps1}; eps2 = {self.eps2}; internal momentum {self.internal.text()}; momenta {fields}"

    def numbers(self) -> tuple[Number, ...]:
        """All numbers that a block is made of."""
        ends = (self.eps1.constant, self.eps1.slope, self.eps2.constant, self.eps2.slope)
        return (*ends, *(x for one in (*self.external, self.internal) for x in one.square))

    def weight(self, momentum: Momentum) -> Number:
        """The conformal weight at the limit point."""
        eps = self.eps1.constant + self.eps2.constant
        return (eps * eps / 4 - momentum.limit_square) / (self.eps1.constant * self.eps2.constant)

    def degenerate(self, level: int) -> tuple[tuple[int, int], ...]:
        """The (r, s) with r s <= ``level`` and internal weight h_rs at the limit point, by level."""
        pairs = ((r, n // r) for n in range(1, level + 1) for r in range(1, n + 1) if n % r == 0)
        return tuple(pair for pair in pairs if self._gap(*pair)[0] == 0)

    def _gap(self, r: int, s: int) -> tuple[Number, Number, Number]:
        """(r eps1 + s eps2)^2 - 4 P^2 in powers of t: 4 A (h - h_rs)."""
        shift = self.eps1.scaled(r) + self.eps2.scaled(s)
        c0, c1, c2 = Momentum.of(shift).square
        p0, p1, p2 = self.internal.square
        return c0 - p0 * 4, c1 - p1 * 4, c2 - p2 * 4

    def kac_order(self, level: int) -> int:
        """The order in t to which prod_{rs <= level} (h - h_rs) vanishes: the worst pole of an inverse Gram matrix.

        See ``conformal.dictionary.kac_order``. Raises ``PathError`` where h is h_rs all along the path.
        """
        order = 0
        for r, s in self.degenerate(level):
            gap = self._gap(r, s)
            if all(x == 0 for x in gap):
                raise PathError.single(f"the internal weight is h_({r},{s}) all along the path", "internal")
            order += next(power for power, x in enumerate(gap) if x != 0)
        return order

    def block(self, precision: int) -> SphereBlock | TorusBlock:
        """Central charge and weights as series in t to ``precision`` (1: numbers); without a U(1) factor."""

        def series(*coefficients: Number) -> Laurent:
            return Laurent.from_coefficients(0, coefficients, precision=precision)

        eps1, eps2 = (series(x.constant, x.slope) for x in (self.eps1, self.eps2))
        eps, over_area = eps1 + eps2, (eps1 * eps2).inverse()
        central = series(ONE) + (eps * eps * over_area).scaled(6)
        weights = [
            ((eps * eps).scaled(QUARTER) - series(*one.square)) * over_area for one in (*self.external, self.internal)
        ]
        nothing = Dressing(series(ZERO), series(ZERO), series(ZERO))
        if self.torus:
            return TorusBlock(central, weights[1], weights[0], nothing)
        at_zero, at_x, at_one, at_infinity, internal = weights
        return SphereBlock(central, internal, Vertex(at_one, at_infinity), Vertex(at_x, at_zero), nothing)

    def coefficients(self, last: int) -> tuple[Laurent, ...]:
        """The block from Gram matrices to level ``last``, each coefficient known up to t^0 at least.

        A negative valuation is a pole that survives. Numbers below the first degenerate level, series in t from there.
        Cost: see ``conformal.gauge_sum.block_coefficients``.
        """
        found = self.degenerate(last)
        singular = min((r * s for r, s in found), default=last + 1)
        levels = list(block_coefficients(self.block(1), 0, singular - 1))
        if singular <= last:
            # The inverse of a form that is wrong from t^p on, with poles of order v, is wrong from t^(p - 2v) on.
            levels += block_coefficients(self.block(1 + 2 * self.kac_order(last)), singular, last)
        return tuple(levels)


def of_conformal(case: ConformalCase) -> Correlator:
    """eps2 moves by t; numbers are held, labels and expressions move along, the internal momentum is held."""
    eps1, eps2 = Linear(case.eps1), Linear(case.eps2, ONE)
    return _settled(case, eps1, eps2, ZERO)


def _settled(case: ConformalCase, eps1: Linear, eps2: Linear, tilt: Rational) -> Correlator:
    external = []
    for field in case.external:
        momentum = case.momentum(field)
        external.append(Momentum.held(case.square(field)) if momentum is None else Momentum.of(momentum.on(eps1, eps2)))
    inside = case.momentum(case.internal)
    if inside is None:
        return Correlator(eps1, eps2, tuple(external), Momentum.held(case.square(case.internal)))
    held = inside.on(Linear(case.eps1), Linear(case.eps2)).constant
    return Correlator(eps1, eps2, tuple(external), Momentum.of(Linear(held, tilt)))


def further_correlator(case: ConformalCase, number: int, *, level: int) -> Correlator:
    """The ``number``-th further path (from 1): eps1 and the internal momentum move as well.

    No two directions are related by a symmetry, and none stays at a weight that is degenerate up to ``level``. Assumes
    that the internal momentum is known, as it is at a degenerate weight.
    """
    usable = 0
    for attempt in count():
        one, tilt, over = _DIRECTIONS[attempt % len(_DIRECTIONS)]
        over += 6 * (attempt // len(_DIRECTIONS))
        eps1, eps2 = Linear(case.eps1, Rational(one, over)), Linear(case.eps2, ONE)
        if not leaves_the_ratio(eps1, eps2):
            continue
        found = _settled(case, eps1, eps2, Rational(tilt, over))
        if any(all(x == 0 for x in found._gap(r, s)) for r, s in found.degenerate(level)):
            continue
        usable += 1
        if usable == number:
            return found
    raise AssertionError("unreachable: directions do not end")


def why_no_fields(setting: Setting) -> str:
    """Why a gauge theory is no block of primary fields, in one sentence; empty when it is one."""
    if len(setting.nodes) != 1 or setting.nodes[0].rank != 2:
        return "a conformal block belongs to one node U(2) with four flavours or one adjoint, and this is no such node"
    node = setting.nodes[0]
    flavours = len(node.antifundamental) + len(node.fundamental)
    if (flavours, len(node.adjoint)) not in ((4, 0), (0, 1)):
        return (
            f"a conformal block of primary fields belongs to U(2) with four flavours or one adjoint, and this node has "
            f"{flavours} flavours and {len(node.adjoint)} adjoints"
        )
    return ""


def pairing(setting: Setting) -> int:
    """Which flavour makes a pair with the first one: 1, 2 or 3 (0 with an adjoint).

    The first pair belongs to the fields at 0 and x, the other to those at 1 and infinity. Flavours are paired in the
    order in which they stand, antifundamentals first, unless another pairing brings fewer numbers beyond Q.
    """
    if setting.nodes[0].adjoint:
        return 0
    ways = {second: of_gauge(setting, second) for second in (1, 2, 3)}
    return min(ways, key=lambda second: sum(1 for x in ways[second].numbers() if is_quadratic(x)))


def of_gauge(setting: Setting, second: int) -> Correlator:
    """U(2) with four flavours or one adjoint on its path, the flavours paired by ``second`` (see ``pairing``).

    Raises ``InputError`` for any other theory.
    """
    reason = why_no_fields(setting)
    if reason:
        raise InputError.single(reason)
    gauge = gauge_path(setting)
    half_eps = (gauge.eps1 + gauge.eps2).scaled(HALF)
    internal = Momentum.of(gauge.difference.scaled(HALF))
    if gauge.adjoint is not None:
        return Correlator(gauge.eps1, gauge.eps2, (Momentum.of(gauge.adjoint - half_eps),), internal)
    masses = gauge.flavours
    third, fourth = (masses[n] for n in (1, 2, 3) if n != second)
    momenta = (
        (masses[0] - masses[second]).scaled(HALF),
        (masses[0] + masses[second]).scaled(HALF) - half_eps,
        (third + fourth).scaled(HALF) - half_eps,
        (third - fourth).scaled(HALF),
    )
    return Correlator(gauge.eps1, gauge.eps2, tuple(Momentum.of(one) for one in momenta), internal)


def u1_exponent(correlator: Correlator) -> Number | None:
    """The exponent of 1 - x, 2 m0 m1/A, or of prod (1 - q^n), 2 Delta - 1; at the limit point.

    None where the momenta at x and 1 are not known, or lie in two fields.
    """
    area = correlator.eps1.constant * correlator.eps2.constant
    if correlator.torus:
        return correlator.weight(correlator.external[0]) * 2 - 1
    half_eps = (correlator.eps1.constant + correlator.eps2.constant) / 2
    at_x, at_one = correlator.external[1].limit, correlator.external[2].limit
    if at_x is None or at_one is None:
        return None
    try:
        one_field((at_x, at_one))
    except InputError:
        return None
    return (at_x + half_eps) * (at_one + half_eps) * 2 / area
