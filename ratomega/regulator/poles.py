"""The pole route: U(2) with up to four flavours or an adjoint, exact at any rational ratio, to high charge.

The recursion over the poles in a (``pole_series`` has the formulas) costs a power of the charge where the sum over
pairs of diagrams grows exponentially in its square root. It is run in one of two ways: directly in exact Laurent
series for small charges, or modulo many primes (``pole_engine``), where the fractions are found again from their
residues. In the second case the answer says how many bits of the modulus were left over and which further prime
confirmed it; with ``certify`` so many primes are taken that a proved bound (``pole_bound``) leaves no other answer.

Nothing here is shared with the sum over diagrams, except exact arithmetic.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from ratomega.errors import InputError
from ratomega.exact.rational import ONE, Rational
from ratomega.regulator.pole_problem import PoleProblem, pole_sentence
from ratomega.regulator.pole_recovery import Evidence, Recovery
from ratomega.regulator.pole_series import regular_part

__all__ = ["Evidence", "PoleResult", "pole_coefficients"]

# Up to this charge the exact series take a few hundredths of a second and leave nothing to confirm.
LAST_EXACT_CHARGE = 8
# Squares of the linear forms must stay exact integers in float64.
WIDEST_FORM = 2**26


@dataclass(frozen=True, slots=True)
class PoleResult:
    """``coefficients[k]`` is Z_k at the limit point; ``regular[k]`` is W_k, from which it was dressed.

    ``evidence[k]`` is that of W_k; Z_k rests on W_0 ... W_k. ``primes`` counts the primes that were used.
    """

    coefficients: tuple[Rational, ...]
    regular: tuple[Rational, ...]
    evidence: tuple[Evidence, ...]
    primes: int

    @property
    def spare_bits(self) -> int | None:
        """The smallest number of spare bits among all coefficients; None when nothing came from residues."""
        return min((e.spare_bits for e in self.evidence if e.spare_bits is not None), default=None)

    @property
    def certified(self) -> bool:
        """No coefficient rests on spare bits alone."""
        return all(e.kind != "residues" for e in self.evidence)


def pole_coefficients(
    problem: PoleProblem, charge: int, *, certify: bool = False, exact: bool | None = None
) -> PoleResult:
    """Z_0 ... Z_charge of a U(2) problem at its limit point.

    ``exact`` chooses exact series (True) or primes (False); by default the charge decides. ``certify`` makes the prime
    route take as many primes as the proved bound asks for.

    Raises ``InputError`` when a1 - a2 sits at a pole: there the limit can be infinite or depend on the path.
    Cost: measured by ``python -m benchmarks poles``.

    >>> from ratomega.regulator.pole_problem import mixed_problem
    >>> result = pole_coefficients(mixed_problem(ONE, ONE, Rational(-1, 4)), 4)     # a = i/2
    >>> result.coefficients
    (1, 2/5, 7/100, 313/43350, 498379/996356400)
    """
    if charge < 0:
        raise InputError.single(f"a charge is zero or more, not {charge}", "charge")
    pole = problem.pole(charge)
    if pole is not None:
        raise InputError.single(pole_sentence(*pole), "coulomb")
    if charge <= LAST_EXACT_CHARGE if exact is None else exact:
        return _result(problem, regular_part(problem, charge), (Evidence("exact"),) * (charge + 1), 0)
    if 2 * charge * (problem.steps[0] + abs(problem.steps[1])) >= WIDEST_FORM:
        raise InputError.single(
            f"eps2/eps1 = {problem.steps[1]}/{problem.steps[0]} has too long a numerator or denominator for residues "
            f"at charge {charge}; exact series still take it",
            "eps2",
        )
    recovery = Recovery(problem, charge)
    if certify:
        recovery.certify()
    else:
        recovery.search()
    return _result(problem, recovery.values, tuple(recovery.evidence), len(recovery.primes))


def _result(
    problem: PoleProblem, regular: Sequence[Rational], evidence: tuple[Evidence, ...], primes: int
) -> PoleResult:
    scaled = []
    power = ONE
    for value in regular:
        scaled.append(value * power)
        power *= problem.scale
    return PoleResult(tuple(problem.dressing.dressed(scaled)), tuple(scaled), evidence, primes)
