"""U(2) with one free Coulomb parameter: coefficients as functions from the pole recursion, without a limit taken.

The recursion knows W as partial fractions in x^2 = (a1 - a2)^2, and its dressing as a function of x^2. Where the symbol
is in a1 and in a2 with opposite coefficients and nowhere else, and everything else is rational, this is the function
sought: x is linear in the symbol. Sum over diagrams and recursion meet only where the function is confirmed.
"""

from __future__ import annotations

from collections.abc import Sequence
from math import isqrt, lcm

from ratomega.case.case import Case
from ratomega.exact.path import Linear
from ratomega.exact.plane_function import function_of_planes
from ratomega.exact.quadratic import Number, is_quadratic, only_rational
from ratomega.exact.quadratic_poly import Poly, poly_of, times
from ratomega.exact.rational import ZERO, Rational
from ratomega.exact.rational_function import RationalFunction
from ratomega.regulator.poles.functions import SquareFunction, dressed_functions
from ratomega.regulator.poles.problem import PoleProblem, case_problem, covers
from ratomega.regulator.poles.recursion import pole_functions, within_reach

__all__ = ["PoleWay", "pole_way"]


class PoleWay:
    """All coefficients of one case; found together when the first is asked for."""

    def __init__(self, case: Case, problem: PoleProblem, lead: Rational, constant: Rational) -> None:
        """x = a1 - a2 is lead * symbol + constant."""
        self.case, self.problem = case, problem
        self._lead, self._constant = lead / problem.unit, constant / problem.unit
        self._known: Sequence[SquareFunction] = ()
        self.primes = 0

    def function(self, charge: int) -> RationalFunction:
        """The coefficient at one charge."""
        if not self._known:
            regular = pole_functions(self.problem, self.case.bounds[0])
            self.primes = regular.primes
            self._known = dressed_functions(self.problem, regular.functions)
        return self._in_symbol(self._known[charge])

    def _in_symbol(self, one: SquareFunction) -> RationalFunction:
        """From a function of x^2 to one of the symbol: every pole S^2 becomes the two zeros of x - S and x + S."""
        lead, constant = self._lead, self._constant
        square = poly_of([constant * constant, 2 * lead * constant, lead * lead])
        above: Poly = poly_of([])
        for c in reversed(one.numerator.coeffs()):
            above = times(above, square) + poly_of([c])
        scale = lcm(int(lead.q), int(constant.q))
        slope, start = int((lead * scale).p), int((constant * scale).p)
        planes = []
        for pole, order in one.orders.items():
            planes += [((start + sign * scale * isqrt(pole), slope), order) for sign in (-1, 1)]
        power = 2 * sum(one.orders.values())
        coefficients: dict[tuple[int, ...], Number] = {
            (n,): c * Rational(scale) ** power for n, c in enumerate(above.coeffs())
        }
        return function_of_planes(coefficients, planes, self.case.symbols)


def pole_way(case: Case) -> PoleWay | None:
    """None where the recursion does not give the functions of a case. A fixed rule: nothing is timed."""
    if len(case.symbols) != 1 or case.theory.ranks != (2,):
        return None
    (symbol,), (node,) = case.symbols, case.theory.nodes
    first, second = node.coulomb
    masses = (*node.antifundamental, *node.fundamental, *node.adjoint)
    if any(m.coefficient(symbol) != 0 for m in masses) or (first + second).coefficient(symbol) != 0:
        return None
    there = case.at(**{symbol: ZERO})
    at_zero = there.theory.nodes[0].coulomb
    at_limit = [Linear(x.constant) for x in (case.background.eps1, case.background.eps2)]
    lead, constant = (first - second).coefficient(symbol), (at_zero[0] - at_zero[1]).on(*at_limit).constant
    if lead == 0 or is_quadratic(lead) or is_quadratic(constant) or not covers(there):
        return None
    problem = case_problem(there)
    if not within_reach(problem, case.bounds[0]):
        return None
    return PoleWay(case, problem, only_rational(lead), only_rational(constant))
