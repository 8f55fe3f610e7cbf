"""A proved bound: by which integers, and how large, the coefficients W_k can be written.

Denominators. The sum over pairs of diagrams writes Z_k with denominators that are products of linear forms in eps1,
eps2 and x = a1 - a2. The integer contents of the forms of one diagram divide its hook product, hence their product over
a pair divides k!; pure powers of eps1 and eps2 are at most the k-th; the other forms without x cancel in the sum, and
the poles in x are simple, at +-(m eps1 + n eps2) with m n <= k (the pole theorem that the recursion rests on). So, by
Gauss's lemma,

    N_k = 2^(b k) k! (eps1 eps2)^k prod_{m n <= k} ((m eps1 + n eps2)^2 - x^2) W_k

is a polynomial with integer coefficients in eps1, eps2, x^2, the elementary symmetric functions of the (2 mu_f)^2 and
the product of the 2 mu_f; b takes care of the halves in masses and of the dressing between Z and W: 2 for two flavours,
3 for three, 8 for four (q_e and theta_3 are integral in q/16, and the exponents of the dressing have denominator
16 eps1 eps2 at most), 1 for one, 4 for an adjoint. N_k is homogeneous, so a common factor s clears what
denominators the parameters have.

Size. Along the path W_k(t) is holomorphic in a disc |t| <= r that holds no other zero of a denominator than t = 0. By
the maximum principle |W_k(0)| is at most the maximum on |t| = r, and there the recursion itself bounds it, term by
term.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import factorial, lcm, log2

import numpy as np

from ratomega.exact.rational import Rational
from ratomega.exact.residues import Floats
from ratomega.regulator.poles.lattice import Form, PolePath, denominator_points, numerator_points, pairs_up_to
from ratomega.regulator.poles.problem import PoleMatter, PoleProblem, denominator_root

__all__ = ["ProvedBound"]

# Logarithms to base 2 are summed in float64; their rounding errors together stay far below this many bits.
SLACK_BITS = 2.0


@dataclass(frozen=True, slots=True)
class ProvedBound:
    """``denominators[k]`` W_k is an integer of at most ``bits[k]`` bits."""

    denominators: tuple[Rational, ...]
    bits: tuple[int, ...]

    @classmethod
    def make(cls, problem: PoleProblem, charge: int) -> ProvedBound:
        """Assumes ``problem.pole(charge) is None``. Cost: about charge^3 log^2 charge logarithms."""
        path = PolePath.towards(problem.steps)
        denominators = _denominators(problem, charge)
        radius = _radius(problem, path, charge)
        sizes = _sizes(problem, path, charge, radius)
        bits = tuple(
            max(1, int(np.ceil(size + _log2(d) + SLACK_BITS))) for size, d in zip(sizes, denominators, strict=True)
        )
        return cls(denominators, bits)


def _log2(value: Rational) -> float:
    """log2 |value| for numbers of any length."""
    return _log2_integer(abs(int(value.p))) - _log2_integer(int(value.q))


def _log2_integer(value: int) -> float:
    extra = max(0, value.bit_length() - 60)
    return log2(value >> extra) + extra if extra == 0 else log2((value >> extra) + 1) + extra


def _clearing(problem: PoleProblem) -> int:
    """A positive integer s with s^2 x^2, the symmetric functions of the (2 s mu_f)^2 and the product of the 2 s mu_f
    integral."""
    matter = problem.matter
    s = lcm(denominator_root(problem.square), matter.clearing)
    degree = len(matter.even) - 1
    wanted = [(coefficient, 2 * (degree - i)) for i, coefficient in enumerate(matter.even)]
    wanted += [(problem.square, 2), (matter.centre, matter.flavours)]
    for value, power in wanted:
        left = value * (2 * s) ** power if value is not problem.square else value * s**power
        if left.q != 1:
            s *= int(left.q)
    return s


def _denominators(problem: PoleProblem, charge: int) -> tuple[Rational, ...]:
    alpha, beta = problem.steps
    matter = problem.matter
    halves = 4 if matter.adjoint else (0, 1, 2, 3, 8)[matter.flavours]
    s = _clearing(problem)
    result = []
    poles, count = Rational(1), 0
    for k in range(charge + 1):
        for m in range(1, k + 1):
            if k % m == 0:
                poles *= (m * alpha + k // m * beta) ** 2 - problem.square
                count += 1
        degree = (2 if matter.adjoint else matter.flavours - 2) * k + 2 * count
        result.append(poles * Rational(2) ** (halves * k) * factorial(k) * Rational(alpha * beta) ** k
                      * Rational(s) ** degree)
    return tuple(result)


def _radius(problem: PoleProblem, path: PolePath, charge: int) -> float:
    """A power of two within which no linear form and no pole in x vanishes, except forms that vanish at t = 0."""
    steepest = 2 * charge * (abs(path.direction[0]) + abs(path.direction[1])) + 1
    radius = 0.5 / steepest
    for pair in pairs_up_to(charge):
        c, s = path.form(*pair)
        distance = float(abs(c * c - problem.square))
        while 2 * abs(c * s) * radius + (s * radius) ** 2 > distance / 2:
            radius /= 2
    return radius


def _least(form: Form, radius: float) -> float:
    """A lower bound of |c + s t| on |t| = radius."""
    c, s = form
    return abs(c) - abs(s) * radius if c else abs(s) * radius


def _sizes(problem: PoleProblem, path: PolePath, charge: int, radius: float) -> Floats:
    """Upper bounds of log2 |W_k| on the circle."""
    pairs = pairs_up_to(charge)
    weight = np.array([m * n for m, n in pairs], dtype=np.int64)
    strength = np.array([_strength(problem.matter, path, pair, radius) for pair in pairs])
    far = np.array([path.form(m, n) for m, n in pairs], dtype=np.int64)
    near = np.array([path.form(m, -n) for m, n in pairs], dtype=np.int64)
    kernel = np.zeros((len(pairs), len(pairs)))
    for sign in (1, -1):
        c = abs(far[None, :, 0] + sign * near[:, None, 0])
        s = abs(far[None, :, 1] + sign * near[:, None, 1])
        kernel -= np.log2(np.where(c > 0, c - s * radius, s * radius))
    kernel += strength[None, :]
    c, s = far[:, 0].astype(np.float64), far[:, 1].astype(np.float64)
    distance = np.array([float(abs(int(x) ** 2 - problem.square)) for x in far[:, 0]])
    answer = strength - np.log2(distance - 2 * abs(c * s) * radius - (s * radius) ** 2)
    value = np.full((len(pairs), charge + 1), -np.inf)
    value[:, 0] = 0.0
    sizes = np.full(charge + 1, -np.inf)
    sizes[0] = 0.0
    for order in range(1, charge + 1):
        columns = int(np.searchsorted(weight, order, side="right"))
        rows = int(np.searchsorted(weight, charge - order, side="right"))
        terms = value[np.arange(columns), order - weight[:columns]]
        sizes[order] = np.logaddexp2.reduce(answer[:columns] + terms)
        if rows:
            value[:rows, order] = np.logaddexp2.reduce(kernel[:rows, :columns] + terms, axis=1)
    return sizes


def _strength(matter: PoleMatter, path: PolePath, pair: tuple[int, int], radius: float) -> float:
    """An upper bound of log2 |2 R_mn| on the circle."""
    m, n = pair
    total = 1.0
    if not matter.adjoint and m % 2 and n % 2:
        if matter.centre == 0:
            return -np.inf
        total += _log2(matter.centre)
    for point in numerator_points(m, n, adjoint=matter.adjoint) if len(matter.even) > 1 else ():
        c, s = path.form(*point)
        size = (abs(c) + abs(s) * radius) / 2
        total += log2(sum(float(abs(e)) * size ** (2 * i) for i, e in enumerate(matter.even)))
    for point in denominator_points(m, n):
        total -= log2(_least(path.form(*point), radius))
    return total
