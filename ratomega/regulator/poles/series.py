"""The pole recursion in exact Laurent series: the plain form, and the one for small charges.

For U(2) with x = a1 - a2 the regular part W of Z obeys, at generic eps1, eps2,

    W_k(x) = delta_k0 + sum_{m n <= k} 2 R_mn / ((m eps1 + n eps2)^2 - x^2) W_{k - mn}(m eps1 - n eps2),
    R_mn = prod_{p,r} P((p eps1 + r eps2)/2) / prod' (i eps1 + j eps2)

(Al. Zamolodchikov 1984, 1987; R. Poghossian 2009; the products are those of ``lattice``). At a rational ratio
the poles collide. On a path that leaves the ratio every quantity is a Laurent series in t; the singular parts cancel
in W and its coefficient of t^0 is the limit. Nothing is planned here: each series carries its own precision, and the
work is done again with longer series if that was not enough.
"""

from __future__ import annotations

from ratomega.errors import PrecisionError
from ratomega.exact.laurent import Laurent
from ratomega.exact.quadratic import only_rational
from ratomega.exact.rational import ONE, ZERO
from ratomega.regulator.poles.fractions import ConsistencyError, PartialFractions, Term
from ratomega.regulator.poles.lattice import (
    Form,
    PolePath,
    denominator_points,
    even_at,
    numerator_points,
    pairs_up_to,
)
from ratomega.regulator.poles.problem import PoleMatter, PoleProblem

__all__ = ["regular_functions", "residue_series"]

Pair = tuple[int, int]


def regular_functions(problem: PoleProblem, charge: int) -> tuple[PartialFractions, ...]:
    """W_0 ... W_charge at the limit point as functions of x^2, in the units of the problem.

    The Coulomb parameters of the problem do not matter. Raises ``ConsistencyError`` if a singular part of W survives,
    which the theory excludes. Cost: about charge^5 operations on fractions that grow; fine below charge 20.

    >>> from ratomega.regulator.poles.problem import mixed_problem
    >>> functions = regular_functions(mixed_problem(ONE, ONE, ZERO), 2)
    >>> functions[1].terms
    (Term(square=4, power=1, coefficient=2),)
    >>> [f.at(4 * (3 * ONE / 11) ** 2) for f in functions]      # a = 3/11
    [1, 121/224, 19135787/165582144]
    """
    path = PolePath.towards(problem.steps)
    length = charge // 2 + 4
    while True:
        try:
            return _attempt(problem, path, charge, length)
        except PrecisionError:
            length *= 2


def _attempt(problem: PoleProblem, path: PolePath, charge: int, length: int) -> tuple[PartialFractions, ...]:
    pairs = pairs_up_to(charge)
    strength = {pair: residue_series(problem.matter, path, pair, length).scaled(2) for pair in pairs}
    pairs = tuple(pair for pair in pairs if not strength[pair].is_zero())
    kernels: dict[tuple[Pair, Pair], Laurent] = {}
    values: dict[tuple[Pair, int], Laurent] = {}
    for order in range(charge):
        for row in pairs:
            if row[0] * row[1] + order > charge:
                break
            total = Laurent.constant(ONE if order == 0 else ZERO, precision=length)
            for column in pairs:
                rest = order - column[0] * column[1]
                if rest < 0:
                    break
                if (row, column) not in kernels:
                    near, far = path.form(row[0], -row[1]), path.form(*column)
                    kernels[row, column] = _kernel(near, far, length) * strength[column]
                total = total + kernels[row, column] * values[column, rest]
            values[row, order] = total
    functions = [PartialFractions(ONE, ())]
    for order in range(1, charge + 1):
        parts = {
            column: strength[column] * values[column, order - column[0] * column[1]]
            for column in pairs
            if column[0] * column[1] <= order
        }
        functions.append(PartialFractions(ZERO, _principal_parts(path, parts, order)))
    return tuple(functions)


def _principal_parts(path: PolePath, parts: dict[Pair, Laurent], order: int) -> tuple[Term, ...]:
    """The terms of sum_c parts[c] / (x_c^2 - x^2) at t^0: with x_c^2 = S^2 + f, expanded in f (see pole_principal)."""
    poles: dict[tuple[int, int], Laurent] = {}
    for pair, part in parts.items():
        c, s = path.form(*pair)
        step = Laurent.from_coefficients(1, [-2 * c * s, -s * s], precision=part.precision - part.valuation + 2)
        power = 1
        while part.valuation <= 0:
            poles[c * c, power] = poles[c * c, power] + part if (c * c, power) in poles else part
            part, power = part * step, power + 1
    terms = []
    for (square, power), total in sorted(poles.items(), key=lambda item: item[0]):
        coefficient = only_rational(total.coefficient(0))
        if total.valuation < 0:
            raise ConsistencyError(f"the pole recursion left a singular part at charge {order}: {total}")
        if coefficient != 0:
            terms.append(Term(square, power, coefficient))
    return tuple(terms)


def _linear(form: Form, length: int) -> Laurent:
    return Laurent.from_coefficients(0, [form[0], form[1]], precision=length)


def _kernel(near: Form, far: Form, length: int) -> Laurent:
    """1 / (far^2 - near^2)."""
    minus = (far[0] - near[0], far[1] - near[1])
    plus = (far[0] + near[0], far[1] + near[1])
    return _linear(minus, length + 2).inverse() * _linear(plus, length + 2).inverse()


def residue_series(matter: PoleMatter, path: PolePath, pair: tuple[int, int], length: int) -> Laurent:
    """R_mn on the path, to at least ``length`` coefficients unless it vanishes identically."""
    m, n = pair
    room = length + 2 * m * n
    value = Laurent.constant(ONE, precision=room)
    if not matter.adjoint and m % 2 and n % 2:
        value = value.scaled(matter.centre)
    for p, r in numerator_points(m, n, adjoint=matter.adjoint):
        value = value * Laurent.from_coefficients(0, even_at(matter, path.form(p, r)), precision=room)
    for i, j in denominator_points(m, n):
        value = value / _linear(path.form(i, j), room)
    return value.truncated(value.valuation + length)
