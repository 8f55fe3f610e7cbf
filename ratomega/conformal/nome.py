"""From Z of U(2) to H, for free parameters: what is divided out, as a matrix of exact functions of the symbols.

With Coulomb parameters s + a and s - a, flavours as antifundamentals of masses m and mu = m + s - eps/2, A = eps1 eps2,

    Z = (16 q_e/q)^(-a^2/A) (1-q)^((sum mu + eps)^2/(4A)) theta_3^((2 sum mu^2 - eps^2)/A) H(16 q_e)

for four flavours (Al. Zamolodchikov 1984, 1987; R. Poghossian, arXiv 0909.3412; L. Alday, D. Gaiotto, Y. Tachikawa,
arXiv 0906.3219), and for one adjoint of mass m

    Z = prod (1 - q^n)^(-2 (m - eps1)(m - eps2)/A) H(q).

H is linear in Z, so H_k = sum_j t_kj Z_j with polynomials t_kj of the symbols: exact at every point, poles included.
"""

from __future__ import annotations

from collections.abc import Sequence

from ratomega.case.affine import Affine
from ratomega.case.case import Case
from ratomega.conformal.elliptic import euler_power
from ratomega.conformal.exact_blocks import NomeForm
from ratomega.exact.path import Linear
from ratomega.exact.power import logarithmic_derivative, product
from ratomega.exact.quadratic import Number, only_rational
from ratomega.exact.rational import ONE, ZERO, Rational
from ratomega.exact.rational_function import RationalFunction

__all__ = ["nome_matrix", "nome_variable"]

Row = tuple[RationalFunction, ...]


def nome_variable(case: Case) -> str:
    """What H is a series in."""
    return "q" if case.theory.nodes[0].adjoint else "16 q_e"


def nome_matrix(case: Case, last: int) -> tuple[Row, ...]:
    """The rows t_k0 ... t_kk for k = 0 ... ``last``, functions of the symbols of the case.

    Assumes U(2) with four flavours or one adjoint. Cost: last^3 products.

    >>> from ratomega.case.reading import load_case
    >>> case = load_case({
    ...     "charge": 1, "symbols": ["a"], "background": {"eps1": 1, "eps2": -1},
    ...     "node": [{"coulomb": ["a", "-a"], "antifundamental": ["1/2", "0", "1/2", "0"]}]})
    >>> [[str(x) for x in row] for row in nome_matrix(case, 1)]
    [['1'], ['-(4*a**2 + 1)/8', '1']]
    """
    length = last + 1
    slope = _slope(case, length)
    factor = [_constant(case, ONE)]
    for n in range(1, length):
        total = _constant(case, ZERO)
        for k in range(1, n + 1):
            total = total + slope[k] * factor[n - k]
        factor.append(total * Rational(1, n))
    if case.theory.nodes[0].adjoint:
        return tuple(tuple(factor[k - j] for j in range(k + 1)) for k in range(length))
    back = _inverse_powers(length)
    rows = []
    for k in range(length):
        row = []
        for j in range(k + 1):
            total = _constant(case, ZERO)
            for n in range(j, k + 1):
                total = total + factor[n - j] * back[n][k]
            row.append(total)
        rows.append(tuple(row))
    return tuple(rows)


def _inverse_powers(length: int) -> list[list[Rational]]:
    """q^n in powers of 16 q_e, for n = 0, 1, ...: the rows are inverse to those of (16 q_e)^k in powers of q."""
    variable = [only_rational(x) for x in NomeForm(ONE, ZERO, ZERO).coefficients(length - 1)]
    powers, power = [], [ONE] + [ZERO] * (length - 1)
    for k in range(length):
        powers.append([ZERO] * k + power[: length - k])
        power = product(power, variable, length)
    rows = []
    for n in range(length):
        rest = [ONE if m == n else ZERO for m in range(length)]
        row = []
        for k in range(length):
            top = rest[k]
            row.append(top)
            rest = [x - top * y for x, y in zip(rest, powers[k], strict=True)]
        rows.append(row)
    return rows


def _constant(case: Case, value: Number) -> RationalFunction:
    return RationalFunction.constant(value, case.symbols)


def _function(case: Case, form: Affine) -> RationalFunction:
    """A parameter at the limit point."""
    eps1, eps2 = (Linear(x.constant) for x in (case.background.eps1, case.background.eps2))
    at_limit = Affine(form.constant, form.eps1, form.eps2).on(eps1, eps2).constant
    result = _constant(case, at_limit)
    for name, coefficient in form.symbols:
        result = result + RationalFunction.symbol(name, case.symbols) * coefficient
    return result


def _slope(case: Case, length: int) -> list[RationalFunction]:
    """q d/dq log of the factor H/Z, before q is expressed by the nome."""
    eps1, eps2 = (only_rational(x.constant) for x in (case.background.eps1, case.background.eps2))
    area, eps = eps1 * eps2, eps1 + eps2
    node = case.theory.nodes[0]
    if node.adjoint:
        mass = _function(case, node.adjoint[0])
        exponent = (mass - eps1) * (mass - eps2) * (2 / area)
        return _combined([(exponent, [only_rational(x) for x in euler_power(ONE, length)])], length)
    first, second = (_function(case, a) for a in node.coulomb)
    middle, half = (first + second) / Rational(2), (first - second) / Rational(2)
    masses = [_function(case, m) for m in node.antifundamental]
    masses += [-_function(case, m) + eps for m in node.fundamental]
    mu = [m + middle - eps / 2 for m in masses]
    total = squares = _constant(case, ZERO)
    for x in mu:
        total, squares = total + x, squares + x * x
    exponents = (
        half * half / area,
        (total + eps) ** 2 * (-1 / (4 * area)),
        (squares * 2 - eps * eps) * (-1 / area),
    )
    units = ((ONE, ZERO, ZERO), (ZERO, ONE, ZERO), (ZERO, ZERO, ONE))
    series = [[only_rational(x) for x in NomeForm(*unit).coefficients(length - 1)] for unit in units]
    return _combined(list(zip(exponents, series, strict=True)), length)


def _combined(parts: Sequence[tuple[RationalFunction, list[Rational]]], length: int) -> list[RationalFunction]:
    slopes = [(exponent, logarithmic_derivative(series, length)) for exponent, series in parts]
    result = []
    for n in range(length):
        total = slopes[0][0] * slopes[0][1][n]
        for exponent, slope in slopes[1:]:
            total = total + exponent * slope[n]
        result.append(total)
    return result
