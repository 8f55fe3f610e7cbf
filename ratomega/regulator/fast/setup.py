"""What the fast sums are told: integers on one scale, the ratio in lowest terms, and whether they apply at all.

The fast sums serve one node of two or three colours, with any flavours and adjoints and no edges. With Coulomb
differences off the lattice of eps1 and eps2 every component of the fixed locus is compact, so the value at t = 0 does
not depend on the path; only the values of the parameters at the limit point are used, and the fast sums approach it
on a path of their own, eps1 - t, eps2 + t with everything else at rest.

All parameters are multiplied by one common scale. Vector weights have degree -2N per box, a flavour 1, an adjoint 2N:
that many powers of the scale give the coefficient back.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from itertools import permutations
from math import gcd

from ratomega.case.setting import Setting
from ratomega.exact.quadratic import Number, Quadratic, one_field, only_rational, rational_parts
from ratomega.exact.rational import Rational, common_denominator

__all__ = ["FastSetup", "Whole", "applies", "less", "prepare"]

Whole = int | Quadratic
"""An integer, or x + y sqrt(d) with integers x and y != 0."""


@dataclass(frozen=True, slots=True)
class FastSetup:
    """One node at the limit point in integers: the true values times ``scale``.

    ``inner`` is the scale that eps1, eps2 and the Coulomb differences need on their own.

    ``flavours[c]`` holds, for colour c, the roots r of the factors r + i eps1 + j eps2 of its boxes (i, j from 0);
    ``alpha``, ``beta``, ``unit``: eps1 = alpha * unit and eps2 = beta * unit in lowest terms. ``radicand`` is d where
    some parameter lies in Q(sqrt(d)), 0 where all are rational; eps1 and eps2 always are.
    """

    scale: int
    inner: int
    eps1: int
    eps2: int
    coulomb: tuple[Whole, ...]
    flavours: tuple[tuple[Whole, ...], ...]
    adjoints: tuple[Whole, ...]
    alpha: int
    beta: int
    unit: int
    radicand: int = 0

    @property
    def rank(self) -> int:
        return len(self.coulomb)

    @property
    def degree(self) -> int:
        """The degree of a weight per box in the parameters."""
        return -2 * self.rank + len(self.flavours[0]) + 2 * self.rank * len(self.adjoints)

    def singular_from(self) -> int | None:
        """The least charge at which a single weight diverges; None when the ratio is negative."""
        return self.alpha + self.beta if self.beta > 0 else None

    def rescaled(self, value: Number, charge: int) -> Number:
        """The coefficient that belongs to the coefficient of the integer parameters."""
        power = Rational(self.scale) ** abs(self.degree * charge)
        return value / power if self.degree > 0 else value * power


def less(a: Whole, b: Whole) -> Whole:
    """a - b, again an integer where it is one.

    >>> from ratomega.exact.quadratic import square_root
    >>> less(2 + square_root(5), square_root(5))
    2
    """
    return _settled(a - b)


def _settled(value: Number | int) -> Whole:
    return int(value.p) if isinstance(value, Rational) else value


def prepare(setting: Setting) -> FastSetup:
    """The setting at t = 0 in integers. Assumes one node (``applies`` says so)."""
    (node,) = setting.nodes
    eps1, eps2 = only_rational(setting.eps1.constant), only_rational(setting.eps2.constant)
    coulomb, anti, fund, adjoints = (
        [line.constant for line in lines]
        for lines in (node.coulomb, node.antifundamental, node.fundamental, node.adjoint)
    )
    values = [eps1, eps2, *coulomb, *anti, *fund, *adjoints]
    scale = _clearing(values)
    inner = _clearing([eps1, eps2, *(a - coulomb[0] for a in coulomb)])

    def whole(value: Number) -> Whole:
        return _settled(value * scale)

    e1, e2 = int((eps1 * scale).p), int((eps2 * scale).p)
    unit = gcd(e1, e2) * (1 if e1 > 0 else -1)
    flavours = tuple(
        tuple([whole(a + m) for m in anti] + [whole(a - m + eps1 + eps2) for m in fund]) for a in coulomb
    )
    return FastSetup(
        scale,
        inner,
        e1,
        e2,
        tuple(whole(a) for a in coulomb),
        flavours,
        tuple(whole(m) for m in adjoints),
        e1 // unit,
        e2 // unit,
        unit,
        one_field(values),
    )


def _clearing(values: Iterable[Number]) -> int:
    """The common denominator of all values and of both parts of those that are not rational."""
    return common_denominator([part for value in values for part in rational_parts(value)])


def applies(setting: Setting, charge: int) -> str | None:
    """Why the fast sums do not serve this setting up to this charge, in one sentence; None when they do.

    Every factor that they divide by, and every factor whose logarithm they need where weights are singular, must be
    different from zero at the limit point; the test is exact.
    """
    if len(setting.nodes) != 1 or setting.edges:
        return "the fast sums serve a single node without edges"
    rank = setting.nodes[0].rank
    if rank not in (2, 3):
        return f"the fast sums serve two and three colours, not {rank}"
    setup = prepare(setting)
    threshold = setup.singular_from()
    singular = threshold is not None and threshold <= charge
    for what, root in _roots(setup, singular):
        point = _on_lattice(setup, root, charge)
        if singular and point is None and isinstance(root, int) and root % setup.unit == 0:
            # Out of reach of single factors, but the tables of the limit run over more of the lattice.
            return f"{what} is an integer combination of eps1 and eps2 at the limit point"
        if point is not None:
            return f"{what} is {point[0]}*eps1 + {point[1]}*eps2 at the limit point"
    return None


def _roots(setup: FastSetup, singular: bool) -> Iterator[tuple[str, Whole]]:
    for (first, a), (second, b) in permutations(enumerate(setup.coulomb, 1), 2):
        if first < second:
            yield f"a{first} - a{second}", less(a, b)
        for m in setup.adjoints:
            yield f"a{first} - a{second} less an adjoint mass", less(less(a, b), m)
    if singular:
        for m in setup.adjoints:
            yield "an adjoint mass", m
        for roots in setup.flavours:
            for root in roots:
                yield "a Coulomb parameter plus a mass", root


def _on_lattice(setup: FastSetup, root: Whole, charge: int) -> tuple[int, int] | None:
    """(m, n) with root = m eps1 + n eps2 in the window that charges up to ``charge`` can reach, or None."""
    if isinstance(root, Quadratic) or root % setup.unit:
        return None
    reach = charge + 2
    for m in range(-reach, reach + 1):
        rest = root - m * setup.eps1
        if rest % setup.eps2 == 0 and abs(m) + abs(rest // setup.eps2) <= reach:
            return m, rest // setup.eps2
    return None

