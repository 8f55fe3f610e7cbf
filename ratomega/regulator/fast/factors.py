"""The weight as a product over boxes and pairs of boxes, modulo many primes at once (prime axis last).

With phi = i eps1 + j eps2 (i, j from 0), eps = eps1 + eps2 and a = a_alpha - a_beta, the vector weight of a tuple of
diagrams is

    prod_alpha D(l_alpha)  prod_{alpha != beta} prod_{s in l_alpha} V(a_alpha - a_beta + phi_s)
    prod_{alpha < beta} prod_{s in l_alpha, u in l_beta} S(a_alpha - a_beta + phi_s - phi_u),

    V(y) = -1/(y (y + eps)),   S(y) = y^2 (y^2 - eps^2) / ((y^2 - eps1^2)(y^2 - eps2^2)),

where D runs over the boxes of one diagram with E = -eps1 leg + eps2 (arm + 1): D = prod 1/(E (eps - E)). An adjoint of
mass m multiplies D by prod (E - m)(eps - E - m), V by (y + eps - m)(-y - m), and S by
(y^2 - (m - eps1)^2)(y^2 - (m - eps2)^2) / ((y^2 - m^2)(y^2 - (m - eps)^2)). S and its adjoint factor are even.
They follow from the character of the tangent space (Nekrasov hep-th/0206161; Nakajima, Yoshioka math/0306198).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from ratomega.exact.residues import Floats, Moduli
from ratomega.regulator.fast.setup import FastSetup, Whole, less
from ratomega.regulator.fast.tables import Forest, Integers

__all__ = ["Bench", "Parameters", "box_factors", "diagram_factors", "differences", "pair_factors"]


@dataclass(frozen=True, slots=True, eq=False)
class Bench:
    """A batch of primes with room for intermediate results: products are formed in place.

    The primes and their reciprocals are repeated over the whole room: loops over long contiguous arrays take two
    thirds of the time of loops over short rows.
    """

    moduli: Moduli
    scratch: Floats
    reciprocals: Floats
    primes: Floats

    @classmethod
    def make(cls, moduli: Moduli, entries: int) -> Bench:
        """Room for arrays of ``entries`` residues per prime."""
        room = np.empty(entries * len(moduli))
        return cls(moduli, room, np.tile(moduli.reciprocal, entries), np.tile(moduli.p, entries))

    def reduce(self, x: Floats) -> Floats:
        """``x`` reduced in place, piece by piece where it is larger than the scratch."""
        if x.size > self.scratch.size:
            if len(x) == 1:
                self.reduce(x[0])
                return x
            step = max(1, self.scratch.size * len(x) // x.size)
            for low in range(0, len(x), step):
                self.reduce(x[low : low + step])
            return x
        quotient = self.scratch[: x.size].reshape(x.shape)
        np.multiply(x, self.reciprocals[: x.size].reshape(x.shape), out=quotient)
        np.rint(quotient, out=quotient)
        quotient *= self.primes[: x.size].reshape(x.shape)
        x -= quotient
        return x

    def multiply(self, x: Floats, y: Floats, out: Floats | None = None) -> Floats:
        """The residues of x y; without ``out`` in a new array."""
        product: Floats = x * y if out is None else np.multiply(x, y, out=out)
        return self.reduce(product)


@dataclass(frozen=True, slots=True, eq=False)
class Parameters:
    """The parameters of a setup modulo every prime of a batch."""

    eps1: Floats
    eps2: Floats
    eps: Floats

    @classmethod
    def make(cls, setup: FastSetup, moduli: Moduli) -> Parameters:
        eps1, eps2 = whole(setup.eps1, moduli), whole(setup.eps2, moduli)
        return cls(eps1, eps2, moduli.reduce(eps1 + eps2))


def whole(value: Whole, moduli: Moduli) -> Floats:
    """A long integer modulo every prime; x + y sqrt(d) with the square root that goes with each prime."""
    if isinstance(value, int):
        return moduli.reduce(np.array([value % p for p in moduli.primes], dtype=np.float64))
    x, y = int(value.x.p), int(value.y.p)
    places = zip(moduli.primes, moduli.roots, strict=True)
    return moduli.reduce(np.array([(x + y * root) % p for p, root in places], dtype=np.float64))


def forms(root: Whole, i: Integers, j: Integers, parameters: Parameters, moduli: Moduli) -> Floats:
    """root + i eps1 + j eps2 for arrays of small integers i, j."""
    return moduli.reduce(
        i[..., None].astype(np.float64) * parameters.eps1
        + j[..., None].astype(np.float64) * parameters.eps2
        + whole(root, moduli)
    )


def differences(charge: int) -> tuple[Integers, Integers, Integers]:
    """(i, j, place): the differences of two boxes that occur together in a pair of diagrams, and where to find them.

    ``place[i, j]`` is the position of the difference (i, j), negative indices counting from the end as usual.
    """
    boxes = [(i, j) for i in range(charge) for j in range(charge // (i + 1))]
    found = sorted(
        {
            (i - k, j - m)
            for i, j in boxes
            for k, m in boxes
            if (i + 1) * (j + 1) + (k + 1) * (m + 1) <= charge
        }
    )
    place = np.full((2 * charge + 1, 2 * charge + 1), -1)
    first = np.array([i for i, _ in found], dtype=np.int64)
    second = np.array([j for _, j in found], dtype=np.int64)
    place[first, second] = np.arange(len(found))
    return first, second, place


def pair_factors(
    setup: FastSetup, roots: Sequence[Whole], i: Integers, j: Integers, parameters: Parameters, moduli: Moduli
) -> Floats:
    """S(root + i eps1 + j eps2), adjoints included: shape (roots, points, primes).

    Raises ``BadPrimes`` when a denominator vanishes. Cost: one inverse per root and point.
    """

    def square(x: Floats) -> Floats:
        return moduli.multiply(x, x)

    y2 = square(np.stack([forms(root, i, j, parameters, moduli) for root in roots]))
    e1, e2 = parameters.eps1, parameters.eps2

    def beside(shift: Floats) -> Floats:
        return moduli.reduce(y2 - square(moduli.reduce(shift)))

    up = moduli.multiply(y2, beside(parameters.eps))
    down = moduli.multiply(beside(e1), beside(e2))
    for mass in setup.adjoints:
        m = whole(mass, moduli)
        up = moduli.multiply(moduli.multiply(up, beside(m - e1)), beside(m - e2))
        down = moduli.multiply(moduli.multiply(down, beside(m)), beside(m - parameters.eps))
    return moduli.multiply(up, moduli.inverses(down))


def box_factors(
    setup: FastSetup, i: Integers, j: Integers, parameters: Parameters, moduli: Moduli
) -> Floats:
    """V against every other colour times the flavours, for boxes (i, j) of every colour: (colours, boxes, primes)."""
    eps = parameters.eps
    ups, downs = [], []
    for colour, a in enumerate(setup.coulomb):
        up = np.ones((len(i), len(moduli)))
        down = np.ones((len(i), len(moduli)))
        for b in (*setup.coulomb[:colour], *setup.coulomb[colour + 1 :]):
            y = forms(less(a, b), i, j, parameters, moduli)
            down = moduli.multiply(down, moduli.multiply(-y, moduli.reduce(y + eps)))
            for mass in setup.adjoints:
                m = whole(mass, moduli)
                up = moduli.multiply(up, moduli.multiply(moduli.reduce(y + eps - m), moduli.reduce(-y - m)))
        for root in setup.flavours[colour]:
            up = moduli.multiply(up, forms(root, i, j, parameters, moduli))
        ups.append(up)
        downs.append(down)
    return moduli.multiply(np.stack(ups), moduli.inverses(np.stack(downs)))


def hook_forms(charge: int) -> tuple[Integers, Integers, Integers]:
    """(p, q, place): E = p eps1 + q eps2 with p = -leg, q = arm + 1; ``place[arm, leg]`` is the position."""
    hooks = [(arm, leg) for arm in range(charge) for leg in range(charge - arm)]
    place = np.full((max(charge, 1), max(charge, 1)), -1)
    for n, hook in enumerate(hooks):
        place[hook] = n
    return (
        np.array([-leg for _, leg in hooks], dtype=np.int64),
        np.array([arm + 1 for arm, _ in hooks], dtype=np.int64),
        place,
    )


def diagram_factors(hooks: Floats, place: Integers, forest: Forest, bench: Bench) -> Floats:
    """The product of ``hooks[place[arm, leg]]`` over the boxes of every diagram: first rows, then row by row.

    Cost: one product per box of a first row.
    """
    result = np.ones((len(forest), len(bench.moduli)))
    for j in range(forest.charge):
        rows = np.nonzero(forest.first > j)[0]
        factor = hooks[place[forest.first[rows] - 1 - j, forest.heights[rows, j] - 1]]
        result[rows] = bench.multiply(result[rows], factor, factor)
    for n in range(1, forest.charge + 1):
        part = forest.sizes(n, n)
        bench.multiply(result[part], result[forest.rest[part]], result[part])
    return result


def hook_numerators(setup: FastSetup, e: Floats, other: Floats, moduli: Moduli) -> Floats:
    """What adjoints multiply the factor of one box of D by, from E and ``other`` = eps - E."""
    product = np.ones_like(e)
    for mass in setup.adjoints:
        m = whole(mass, moduli)
        product = moduli.multiply(product, moduli.multiply(moduli.reduce(e - m), moduli.reduce(other - m)))
    return product


def hook_values(setup: FastSetup, charge: int, parameters: Parameters, moduli: Moduli) -> tuple[Floats, Integers]:
    """The factor of one box of D by arm and leg, where no denominator vanishes."""
    p, q, place = hook_forms(charge)
    e = forms(0, p, q, parameters, moduli)
    other = moduli.reduce(parameters.eps - e)
    up = hook_numerators(setup, e, other, moduli)
    return moduli.multiply(up, moduli.inverses(moduli.multiply(e, other))), place


def tree_products(boxes: Floats, where: Integers, forest: Forest, bench: Bench) -> Floats:
    """The product of ``boxes[colour, where[i, j]]`` over the boxes of every diagram: (colours, diagrams, primes)."""
    result = np.ones((len(boxes), len(forest), len(bench.moduli)))
    for n in range(1, forest.charge + 1):
        part = forest.sizes(n, n)
        factor = boxes[:, where[forest.row[part], forest.column[part]]]
        bench.multiply(result[:, forest.parent[part]], factor, result[:, part])
    return result
