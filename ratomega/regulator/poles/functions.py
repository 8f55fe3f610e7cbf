"""Z itself as a function of x^2 = (a1 - a2)^2: the partial fractions of W, dressed.

The dressing does not depend on x, but for one factor with four flavours: a power of the nome, whose exponent is a
number times x^2. So Z_k is a polynomial in x^2 over the known poles.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

from ratomega.exact.power import logarithmic_derivative, product
from ratomega.exact.quadratic_poly import Poly, poly_of, root_power, scaled, times
from ratomega.exact.rational import ONE, ZERO, Rational
from ratomega.regulator.poles.dressing import Dressing, NomeExponents
from ratomega.regulator.poles.fractions import PartialFractions
from ratomega.regulator.poles.problem import PoleProblem

__all__ = ["SquareFunction", "dressed_functions"]

Terms = Mapping[tuple[int, int], Rational]
"""Coefficients by (square, power): those of 1/(X - square)^power, and of (0, 0) the constant."""


@dataclass(frozen=True, slots=True)
class SquareFunction:
    """numerator(X) / prod (X - square)^orders[square], X = x^2 in the units of a problem; not reduced."""

    numerator: Poly
    orders: Mapping[int, int]


def dressed_functions(problem: PoleProblem, regular: Sequence[PartialFractions]) -> tuple[SquareFunction, ...]:
    """Z_0, Z_1, ... from W_0, W_1, ... The Coulomb parameters of the problem do not matter.

    Cost: for charge k about k^2 products of polynomials of the degree of Z_k with four flavours, else k.

    >>> from ratomega.regulator.poles.problem import mixed_problem
    >>> from ratomega.regulator.poles.recursion import pole_functions
    >>> problem = mixed_problem(ONE, ONE, ZERO)
    >>> one = dressed_functions(problem, pole_functions(problem, 1).functions)[1]
    >>> one.numerator.coeffs(), one.orders                                        # 2/(4 - x^2)
    ([-2], {4: 1})
    """
    length = len(regular)
    plain = _plain(problem.dressing)
    columns = [plain.dressed([ONE if n == j else ZERO for n in range(length)]) for j in range(length)]
    nome = _nome_powers(problem, length)
    found: list[SquareFunction] = []
    parts: list[SquareFunction] = []
    for k in range(length):
        factors = [columns[j][k] * problem.scale**j for j in range(k + 1)]
        parts.append(_over_poles(_mixed(regular, factors)))
        found.append(_total([(nome[k - j], part) for j, part in enumerate(parts) if not nome[k - j].is_zero()]))
    return tuple(found)


def _plain(dressing: Dressing) -> Dressing:
    """The dressing without the factor that depends on x."""
    return dressing if dressing.nome is None else replace(dressing, nome=replace(dressing.nome, nome=ZERO))


def _nome_powers(problem: PoleProblem, length: int) -> list[Poly]:
    """The coefficients of (16 q_e/q)^(-X/(4 alpha beta)), the power of the nome in Z, polynomials in X; 1 without it.

    With l the logarithm of 16 q_e/q it is sum_m c^m X^m l^m/m!, and l^m starts at q^m.
    """
    if problem.dressing.nome is None:
        return [poly_of([ONE]), *[poly_of([])] * (length - 1)]
    base = Dressing(nome=NomeExponents(ONE, ZERO, ZERO)).dressed([ONE, *[ZERO] * (length - 1)])
    slope = logarithmic_derivative(base, length)
    logarithm = [ZERO, *(slope[n] / n for n in range(1, length))]
    alpha, beta = problem.steps
    exponent = Rational(-1, 4 * alpha * beta)
    rows, power = [[ZERO] * length for _ in range(length)], [ONE, *[ZERO] * (length - 1)]
    for m in range(length):
        for n in range(length):
            rows[n][m] = power[n]
        power = [c * exponent / (m + 1) for c in product(power, logarithm, length)]
    return [poly_of(row) for row in rows]


def _mixed(regular: Sequence[PartialFractions], factors: Sequence[Rational]) -> Terms:
    """sum factors[j] regular[j]. The terms of W are powers of 1/(S^2 - X)."""
    found: dict[tuple[int, int], Rational] = {}
    for function, factor in zip(regular, factors, strict=False):
        found[0, 0] = found.get((0, 0), ZERO) + factor * function.constant
        for term in function.terms:
            key = term.square, term.power
            found[key] = found.get(key, ZERO) + factor * term.coefficient * (-1) ** term.power
    return found


def _over_poles(terms: Terms) -> SquareFunction:
    """All terms over one denominator."""
    orders: dict[int, int] = {}
    for square, power in terms:
        if power:
            orders[square] = max(power, orders.get(square, 0))
    parts = [(poly_of([terms[0, 0]]), poly_of([ONE]))]
    for pole, order in orders.items():
        above = poly_of([])
        for (square, power), c in terms.items():
            if square == pole and power:
                above = above + scaled(root_power(pole, order - power), c)
        parts.append((above, root_power(pole, order)))
    while len(parts) > 1:
        # Neighbours first, so that long polynomials meet late.
        pairs = list(zip(parts[::2], parts[1::2], strict=False))
        odd = parts[-1:] if len(parts) % 2 else []
        parts = [(times(a, d) + times(c, b), times(b, d)) for (a, b), (c, d) in pairs] + odd
    return SquareFunction(parts[0][0], orders)


def _total(parts: Sequence[tuple[Poly, SquareFunction]]) -> SquareFunction:
    """The sum of products of a polynomial and a function."""
    orders: dict[int, int] = {}
    for _, one in parts:
        for square, order in one.orders.items():
            orders[square] = max(order, orders.get(square, 0))
    total = poly_of([])
    for factor, one in parts:
        above = times(factor, one.numerator)
        for square, order in orders.items():
            missing = order - one.orders.get(square, 0)
            if missing:
                above = times(above, root_power(square, missing))
        total = total + above
    return SquareFunction(total, orders)
