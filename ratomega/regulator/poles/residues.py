"""The residues R_mn(t) of all pairs at once: exact zeros first, then power series modulo many primes.

R_mn is a product over rectangles of lattice points: numerator points (p, r), where P(y) P(-y) at y = (p eps1 + r
eps2)/2 is a polynomial in t, over denominator points (i, j), where i eps1 + j eps2 is linear in t. Every factor is
t^v times a number times a series that starts with 1; the logarithmic slopes (t d/dt log) of those series add up, by one
matrix product with the table that says which point lies in which rectangle, and one exponential per pair follows. The
numbers multiply up strip by strip.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ratomega.exact.rational import Rational
from ratomega.exact.residues import Floats, Moduli, residues_of
from ratomega.regulator.poles.lattice import Integers, PolePath, even_at, pairs_up_to
from ratomega.regulator.poles.problem import PoleMatter

__all__ = ["ResidueLattice"]

Point = tuple[int, int]


@dataclass(frozen=True, slots=True, eq=False)
class ResidueLattice:
    """The pairs (m, n) with a residue that does not vanish identically, and the points that R_mn is made of.

    With a mirror symmetry of the path only m >= n are kept. ``valuation[c]`` is the exact order in t of R of pair c.
    ``numerator[c, i]`` and ``denominator[c, i]`` say whether a point belongs to pair c.
    """

    charge: int
    path: PolePath
    matter: PoleMatter
    pairs: tuple[Point, ...]
    valuation: Integers
    numerator_points: tuple[Point, ...]
    numerator_orders: tuple[int, ...]
    numerator: Floats
    denominator_points: tuple[Point, ...]
    denominator: Floats

    @classmethod
    def make(cls, matter: PoleMatter, path: PolePath, charge: int) -> ResidueLattice:
        """Exact; cost about (charge log charge)^2 integer comparisons and charge log charge evaluations of P.

        >>> lattice = ResidueLattice.make(PoleMatter.of_flavours([]), PolePath.towards((1, 1)), 6)
        >>> dict(zip(lattice.pairs, lattice.valuation.tolist()))[3, 2]
        -3
        """
        pairs = tuple(pair for pair in pairs_up_to(charge) if pair[0] >= pair[1] or not path.mirror)
        m = np.array([pair[0] for pair in pairs], dtype=np.int64)[:, None]
        n = np.array([pair[1] for pair in pairs], dtype=np.int64)[:, None]

        above = _numerator_points(matter, charge)
        p, r = (np.array([point[axis] for point in above], dtype=np.int64)[None, :] for axis in (0, 1))
        if matter.adjoint:
            inside = (abs(p) < 2 * m) & (r < 2 * n)
        else:
            inside = (abs(p) < m) & ((m - p) % 2 == 1) & (r < n) & ((n - r) % 2 == 1)
        orders = [vanishing_order(matter, path, point) for point in above]

        below = _denominator_points(charge)
        i, j = (np.array([point[axis] for point in below], dtype=np.int64)[None, :] for axis in (0, 1))
        under = (1 - m <= i) & (i <= m) & (1 - n <= j) & (j <= n) & ~((i == m) & (j == n))
        zero = np.array([path.form(*point)[0] == 0 for point in below], dtype=np.int64)

        gone = np.array([order is None for order in orders], dtype=bool)
        alive = ~(inside & gone[None, :]).any(axis=1)
        if not matter.adjoint and matter.centre == 0:
            alive &= ~((m % 2 == 1) & (n % 2 == 1))[:, 0]
        inside = inside[:, ~gone]
        known = [order for order in orders if order is not None]
        valuation = inside @ np.array(known, dtype=np.int64) - under @ zero
        kept = np.nonzero(alive)[0]
        return cls(
            charge,
            path,
            matter,
            tuple(pairs[i] for i in kept),
            valuation[kept],
            tuple(point for point, order in zip(above, orders, strict=True) if order is not None),
            tuple(known),
            inside[kept].astype(np.float64),
            below,
            under[kept].astype(np.float64),
        )

    def series(self, moduli: Moduli, length: int) -> Floats:
        """The residues of the first ``length`` coefficients of 2 R_mn t^-valuation: shape (primes, length, pairs).

        Raises ``BadPrimes``. Cost per prime: length x (pairs x points + points log points + pairs x length).
        """
        top_lead, top_slope = self._numerator_factors(moduli, length)
        bottom_lead, bottom_slope = self._denominator_factors(moduli, length)
        slope = moduli.reduce(top_slope @ self.numerator.T - bottom_slope @ self.denominator.T)
        bottom = moduli.inverses(self._denominator_products(moduli, bottom_lead))
        lead = moduli.multiply(self._numerator_products(moduli, top_lead), bottom)
        if not self.matter.adjoint:
            centre = residues_of([self.matter.centre], moduli)
            odd = np.array([m % 2 == 1 and n % 2 == 1 for m, n in self.pairs])
            lead = moduli.multiply(lead, np.where(odd[None, :], centre, 1.0))
        result = np.zeros((len(moduli), length, len(self.pairs)))
        result[:, 0] = moduli.reduce(2 * lead)
        if length > 1:
            steps = moduli.inverses(moduli.integers(np.arange(1, length, dtype=np.int64)))
            for power in range(1, length):
                total = (slope[:, 1 : power + 1] * result[:, power - 1 :: -1]).sum(axis=1)
                result[:, power] = moduli.multiply(moduli.reduce(total), steps[:, power - 1 : power])
        return result

    def _numerator_factors(self, moduli: Moduli, length: int) -> tuple[dict[Point, Floats], Floats]:
        """Leading numbers by point, and slopes of shape (primes, length, points)."""
        count = len(self.numerator_points)
        slope = np.zeros((len(moduli), length, count))
        if count == 0:
            return {}, slope
        even = residues_of(self.matter.even, moduli)
        forms = np.array([self.path.form(*point) for point in self.numerator_points], dtype=np.int64)
        half = residues_of([Rational(1, 2)], moduli)
        c, s = (moduli.multiply(moduli.integers(forms[:, i]), half) for i in (0, 1))
        square = [moduli.multiply(c, c), moduli.multiply(2 * c, s), moduli.multiply(s, s)]
        polynomial = [np.broadcast_to(even[:, -1:], c.shape)]
        for index in range(even.shape[1] - 2, -1, -1):
            longer = [np.zeros_like(c) for _ in range(len(polynomial) + 2)]
            for i, coefficient in enumerate(polynomial):
                for j in range(3):
                    longer[i + j] = longer[i + j] + moduli.multiply(coefficient, square[j])
            longer[0] = longer[0] + even[:, index : index + 1]
            polynomial = [moduli.reduce(x) for x in longer]
        # A point where the first coefficients vanish exactly starts at its own order.
        stacked = np.stack([*polynomial, *[np.zeros_like(c)] * max(self.numerator_orders)], axis=1)
        picked = np.array(self.numerator_orders)[None, :] + np.arange(len(polynomial))[:, None]
        shifted = np.take_along_axis(stacked, np.broadcast_to(picked, (len(moduli), *picked.shape)), axis=1)
        unit = moduli.multiply(shifted, moduli.inverses(np.ascontiguousarray(shifted[:, :1])))
        degree = len(polynomial) - 1
        for power in range(1, length):
            total = power * unit[:, power] if power <= degree else np.zeros_like(c)
            for back in range(1, min(power - 1, degree) + 1):
                total = total - unit[:, back] * slope[:, power - back]
            slope[:, power] = moduli.reduce(total)
        return {point: shifted[:, 0, i] for i, point in enumerate(self.numerator_points)}, slope

    def _denominator_factors(self, moduli: Moduli, length: int) -> tuple[dict[Point, Floats], Floats]:
        forms = np.array([self.path.form(*point) for point in self.denominator_points], dtype=np.int64)
        slope = np.zeros((len(moduli), length, len(forms)))
        lead = moduli.integers(np.where(forms[:, 0] == 0, forms[:, 1], forms[:, 0]))
        tilt = moduli.integers(np.where(forms[:, 0] == 0, 0, -forms[:, 1]))
        ratio = moduli.multiply(tilt, moduli.inverses(lead))
        # log(1 - r t) has the slope -(r t + r^2 t^2 + ...)
        for power in range(1, length):
            slope[:, power] = -ratio if power == 1 else moduli.multiply(slope[:, power - 1], ratio)
        return {point: lead[:, i] for i, point in enumerate(self.denominator_points)}, slope

    def _numerator_products(self, moduli: Moduli, lead: dict[Point, Floats]) -> Floats:
        """The product of the leading numbers over the rectangle of each pair: shape (primes, pairs)."""
        one = np.ones(len(moduli))
        step = 1 if self.matter.adjoint else 2
        strips: dict[Point, Floats] = {}
        products: dict[Point, Floats] = {}
        for m, n in pairs_up_to(self.charge):
            p, r = (2 * m - 1, 2 * n - 1) if self.matter.adjoint else (m - 1, n - 1)
            strip = strips.get((m - step, n), one)
            for point in {(p, r), (-p, r)}:
                if point in lead:
                    strip = moduli.multiply(strip, lead[point])
            strips[m, n] = strip
            products[m, n] = moduli.multiply(products.get((m, n - step), one), strip)
        return _stacked(products, self.pairs, moduli)

    def _denominator_products(self, moduli: Moduli, lead: dict[Point, Floats]) -> Floats:
        one = np.ones(len(moduli))
        strips: dict[Point, Floats] = {}
        rectangles: dict[Point, Floats] = {}
        products: dict[Point, Floats] = {}
        for m, n in pairs_up_to(self.charge):
            upper = moduli.multiply(strips.get((m - 1, n), one), lead[1 - m, n])
            lower = moduli.multiply(strips.get((m - 1, 1 - n), one), lead[m, 1 - n])
            lower = moduli.multiply(lower, lead.get((1 - m, 1 - n), one))
            before = moduli.multiply(rectangles.get((m, n - 1), one), lower)
            products[m, n] = moduli.multiply(before, upper)
            strips[m, n], strips[m, 1 - n] = moduli.multiply(upper, lead[m, n]), lower
            rectangles[m, n] = moduli.multiply(before, strips[m, n])
        return _stacked(products, self.pairs, moduli)


def _stacked(values: dict[Point, Floats], pairs: tuple[Point, ...], moduli: Moduli) -> Floats:
    if not pairs:
        return np.ones((len(moduli), 0))
    return np.stack([values[pair] for pair in pairs], axis=1)


def vanishing_order(matter: PoleMatter, path: PolePath, point: Point) -> int | None:
    """The order in t of P(y) P(-y) at y = (p eps1 + r eps2)/2; None when it is zero all along the path."""
    for order, coefficient in enumerate(even_at(matter, path.form(*point))):
        if coefficient != 0:
            return order
    return None


def _numerator_points(matter: PoleMatter, charge: int) -> tuple[Point, ...]:
    """One half under reflection, without (0, 0), of all (p, r) in the numerator of some R_mn with m n <= charge."""
    if len(matter.even) == 1:
        return ()
    points = []
    for m, n in pairs_up_to(charge):
        p, r = (2 * m - 1, 2 * n - 1) if matter.adjoint else (m - 1, n - 1)
        points += [point for point in sorted({(-p, r), (p, r)}) if r > 0 or point[0] > 0]
    return tuple(points)


def _denominator_points(charge: int) -> tuple[Point, ...]:
    """All (i, j) other than (0, 0) in the rectangle of some pair, its own corner (m, n) included."""
    points = []
    for m, n in pairs_up_to(charge):
        points += [point for point in ((m, n), (1 - m, n), (m, 1 - n), (1 - m, 1 - n)) if point != (0, 0)]
    return tuple(points)
