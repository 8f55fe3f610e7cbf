"""From a U(2) theory on its path to conformal data: central charge, weights, Whittaker states and the U(1) factor.

With eps = eps1 + eps2, A = eps1 eps2 and Coulomb parameters (a, -a):

    c = 1 + 6 eps^2/A,    internal weight h = (eps^2/4 - a^2)/A,    Delta(m) = m (eps - m)/A.

(L. Alday, D. Gaiotto, Y. Tachikawa, arXiv 0906.3219.) A common shift of the Coulomb parameters is a shift of all
masses, and a fundamental of mass m is the antifundamental of mass eps - m. The flavours are dealt to the two ends of
the block, at most two to an end:

* two, of masses m + b and m - b: a field of weight Delta(m) next to one of weight (eps^2/4 - b^2)/A;
* one, of mass m: the Whittaker state L_1 = -(m - eps/2)/A, L_2 = -1/(4A);
* none: the Whittaker state L_1 = -1/A, L_2 = 0.

Each is the limit of the one before, a mass sent to infinity with q times this mass held fixed (D. Gaiotto, arXiv
0908.0307; A. Marshakov, A. Mironov, A. Morozov, arXiv 0909.2052). The same limit takes the factor of four flavours,
(1 - q)^(2 m m'/A), through exp(-q m/A) at two flavours and one, m the half-sum of the two, to exp(-q/(2A)) at one and
one; an end without flavours leaves no factor. All ways of dealing the flavours give one Z.

One adjoint of mass m: the torus one-point block of a field of weight Delta(m), times prod (1 - q^n)^(-1 + 2 Delta(m)).
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import combinations

from ratomega.case.setting import Setting
from ratomega.conformal.dressing import Dressing
from ratomega.conformal.vertex import State, Vertex, Whittaker
from ratomega.errors import InputError, PathError
from ratomega.exact.laurent import Laurent
from ratomega.exact.path import Linear
from ratomega.exact.quadratic import is_quadratic
from ratomega.exact.rational import ZERO, Rational

__all__ = [
    "Dealing",
    "GaugePath",
    "SphereBlock",
    "TorusBlock",
    "conformal_block",
    "dealings",
    "gauge_path",
    "kac_order",
    "why_not_covered",
]

MOST_FLAVOURS = 4
HALF, QUARTER = Rational(1, 2), Rational(1, 4)


@dataclass(frozen=True, slots=True)
class GaugePath:
    """A U(2) theory on its path: a1 - a2, and the masses of its flavours as antifundamentals of Coulomb sum 0."""

    eps1: Linear
    eps2: Linear
    difference: Linear
    flavours: tuple[Linear, ...]
    adjoint: Linear | None


@dataclass(frozen=True, slots=True)
class Dealing:
    """Which flavours stand at the left end of the block (at 1 and infinity) and which at the right (at 0 and q)."""

    left: tuple[Linear, ...]
    right: tuple[Linear, ...]


@dataclass(frozen=True, slots=True)
class SphereBlock:
    """sum_k q^k <left| level k |right> over the Verma module of weight ``internal``; times ``dressing`` it is Z."""

    central: Laurent
    internal: Laurent
    left: State
    right: State
    dressing: Dressing


@dataclass(frozen=True, slots=True)
class TorusBlock:
    """sum_k q^k (trace of the field of weight ``field`` at level k); times ``dressing`` it is Z."""

    central: Laurent
    internal: Laurent
    field: Laurent
    dressing: Dressing


def why_not_covered(setting: Setting) -> str:
    """Why a theory has no block here, in one sentence; empty when it has one."""
    if len(setting.nodes) != 1:
        return "the dictionary covers one gauge node, and this quiver has several"
    node = setting.nodes[0]
    flavours = len(node.antifundamental) + len(node.fundamental)
    if node.rank != 2:
        return f"the dictionary covers U(2), and this node is U({node.rank})"
    if len(node.adjoint) > 1 or (node.adjoint and flavours):
        return "the dictionary covers one adjoint alone or flavours alone"
    if flavours > MOST_FLAVOURS:
        return f"the dictionary covers up to four flavours, and this node has {flavours}"
    return ""


def gauge_path(setting: Setting) -> GaugePath:
    """The theory of a setting with the sum of its Coulomb parameters shifted to 0.

    Raises ``InputError`` when the theory is not covered (``why_not_covered``).
    """
    reason = why_not_covered(setting)
    if reason:
        raise InputError.single(reason)
    node = setting.nodes[0]
    first, second = node.coulomb
    eps, shift = setting.eps1 + setting.eps2, (first + second).scaled(HALF)
    flavours = [m + shift for m in node.antifundamental] + [eps - m + shift for m in node.fundamental]
    adjoint = node.adjoint[0] if node.adjoint else None
    return GaugePath(setting.eps1, setting.eps2, first - second, tuple(flavours), adjoint)


def dealings(flavours: Sequence[Linear]) -> Iterator[Dealing]:
    """Every way to deal the flavours to two ends, at most two to an end and no fewer to the right end than to the left;
    up to exchange of equal ends, even ones first.

    >>> one, two = Linear(Rational(1)), Linear(Rational(2))
    >>> [(len(d.left), len(d.right)) for d in dealings([one, two])]
    [(1, 1), (0, 2)]
    """
    places = range(len(flavours))
    for count in range(len(flavours) // 2, -1, -1):
        if len(flavours) - count > 2:
            break
        for left in combinations(places, count):
            if 2 * count == len(flavours) and 0 not in left and count:
                continue
            right = [place for place in places if place not in left]
            yield Dealing(tuple(flavours[i] for i in left), tuple(flavours[i] for i in right))


def _irrationals(dealing: Dealing) -> int:
    """How many numbers beyond Q a dealing brings: pairs of conjugate masses bring none."""
    numbers = []
    for end in (dealing.left, dealing.right):
        if len(end) == 1:
            numbers += [end[0].constant, end[0].slope]
        elif end:
            total, b = end[0] + end[1], end[0] - end[1]
            numbers += [total.constant, total.slope, b.constant**2, b.constant * b.slope, b.slope**2]
    return sum(1 for x in numbers if is_quadratic(x))


@dataclass(frozen=True, slots=True)
class _Series:
    """eps, 1/A and the rest of the path as series of one precision."""

    eps: Laurent
    over_area: Laurent
    precision: int

    def of(self, form: Linear) -> Laurent:
        return Laurent.from_coefficients(0, [form.constant, form.slope], precision=self.precision)

    def number(self, value: Rational | int) -> Laurent:
        return Laurent.constant(value, precision=self.precision)

    def momentum_weight(self, twice: Linear) -> Laurent:
        """(eps^2/4 - b^2)/A from 2b."""
        double = self.of(twice)
        return (self.eps * self.eps - double * double).scaled(QUARTER) * self.over_area

    def mass_weight(self, mass: Linear) -> Laurent:
        """Delta(m) = m (eps - m)/A."""
        m = self.of(mass)
        return m * (self.eps - m) * self.over_area

    def state(self, masses: Sequence[Linear]) -> State:
        if not masses:
            return Whittaker(-self.over_area, self.number(0))
        if len(masses) == 1:
            mu = self.of(masses[0]) - self.eps.scaled(HALF)
            return Whittaker(-(mu * self.over_area), self.over_area.scaled(-QUARTER))
        mean = (masses[0] + masses[1]).scaled(HALF)
        return Vertex(self.mass_weight(mean), self.momentum_weight(masses[0] - masses[1]))

    def dressing(self, dealing: Dealing) -> Dressing:
        zero = self.number(0)
        few, many = sorted((dealing.left, dealing.right), key=len)
        if not few:
            return Dressing(zero, zero, zero)
        if len(many) == 1:
            return Dressing(self.over_area.scaled(-HALF), zero, zero)
        mean = self.of((many[0] + many[1]).scaled(HALF))
        if len(few) == 1:
            return Dressing(-(mean * self.over_area), zero, zero)
        other = self.of((few[0] + few[1]).scaled(HALF))
        return Dressing(zero, (mean * other * self.over_area).scaled(2), zero)


def conformal_block(gauge: GaugePath, *, precision: int, dealing: Dealing | None = None) -> SphereBlock | TorusBlock:
    """The block of a theory, all its data as series in t to ``precision`` (1: the numbers at the limit point).

    ``dealing`` defaults to the first of ``dealings`` that brings the fewest numbers beyond Q.
    """
    eps1, eps2, eps = (
        Laurent.from_coefficients(0, [x.constant, x.slope], precision=precision)
        for x in (gauge.eps1, gauge.eps2, gauge.eps1 + gauge.eps2)
    )
    series = _Series(eps, (eps1 * eps2).inverse(), precision)
    one, zero = series.number(1), series.number(0)
    central = one + (eps * eps * series.over_area).scaled(6)
    internal = series.momentum_weight(gauge.difference)
    if gauge.adjoint is not None:
        field = series.mass_weight(gauge.adjoint)
        return TorusBlock(central, internal, field, Dressing(zero, zero, field.scaled(2) - one))
    chosen = min(dealings(gauge.flavours), key=_irrationals) if dealing is None else dealing
    left, right = series.state(chosen.left), series.state(chosen.right)
    return SphereBlock(central, internal, left, right, series.dressing(chosen))


def kac_order(gauge: GaugePath, level: int) -> int:
    """The order in t to which prod_{rs <= level} (h - h_rs), each pair once, vanishes on the path; 0: at no level.

    The Gram matrix of a level n <= ``level`` has the determinant prod_{rs <= n} (h - h_rs)^p(n - rs) up to a constant
    (V. Kac 1979; B. Feigin, D. Fuks 1982), 4A (h - h_rs) = (r eps1 + s eps2)^2 - (a1 - a2)^2. As polynomials in h and c
    the entries of the inverse have each of these factors once in the denominator: the order is the worst pole.

    Raises ``PathError`` where a factor vanishes all along the path: that needs a tilt.

    >>> flat = GaugePath(Linear(Rational(1)), Linear(Rational(1), Rational(1)), Linear(Rational(3)), (), None)
    >>> kac_order(flat, 1), kac_order(flat, 2)      # a1 - a2 = 2 eps1 + eps2 = eps1 + 2 eps2 at the limit point
    (0, 2)
    """
    order = 0
    for r in range(1, level + 1):
        for s in range(1, level // r + 1):
            shift = gauge.eps1.scaled(r) + gauge.eps2.scaled(s)
            for form in (shift - gauge.difference, shift + gauge.difference):
                if form.is_zero():
                    message = f"a1 - a2 is +-({r}*eps1 + {s}*eps2) all along the path; it needs a tilt"
                    raise PathError.single(message, "coulomb")
                order += int(form.constant == ZERO)
    return order
