"""The pole route: U(2) with up to four flavours or an adjoint, exact at any rational ratio, to high charge.

The recursion over the poles in a (``series`` has the formulas) costs a power of the charge where the sum over
pairs of diagrams grows exponentially in its square root. It is run in one of two ways: directly in exact Laurent
series for small charges, or modulo many primes (``engine``). What is found again from its residues are the
coefficients of the partial fractions of W in a^2: they do not depend on a and are several times shorter than W at a
definite a, so fewer primes do, and every a costs next to nothing afterwards. The answer says how many bits of the
modulus were left over and which further prime confirmed it; with ``certify`` so many primes are taken that a proved
bound on W (``bound``) leaves no other answer.

Nothing here is shared with the sum over diagrams, except exact arithmetic.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from ratomega.errors import InputError
from ratomega.exact.batches import Supplier, here
from ratomega.exact.rational import ONE, Rational
from ratomega.regulator.poles.fractions import PartialFractions
from ratomega.regulator.poles.problem import PoleProblem, pole_sentence
from ratomega.regulator.poles.recovery import Evidence, Recovery
from ratomega.regulator.poles.series import regular_functions

__all__ = [
    "Evidence",
    "PoleFunctions",
    "PoleResult",
    "by_series",
    "pole_coefficients",
    "pole_functions",
    "within_reach",
]

# Up to this charge the exact series take a few hundredths of a second and leave nothing to confirm.
LAST_EXACT_CHARGE = 8
# Squares of the linear forms must stay exact integers in float64.
WIDEST_FORM = 2**26


@dataclass(frozen=True, slots=True)
class PoleFunctions:
    """W_0, W_1, ... at the limit point as functions of x^2 = (a1 - a2)^2, in the units of the problem.

    ``evidence[k]`` is that of ``functions[k]``; ``primes`` counts the primes that were used.
    """

    functions: tuple[PartialFractions, ...]
    evidence: tuple[Evidence, ...]
    primes: int


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


def by_series(charge: int) -> bool:
    """Is this charge so low that the rule takes exact series, and no primes?

    >>> by_series(8), by_series(9)
    (True, False)
    """
    return charge <= LAST_EXACT_CHARGE


def pole_functions(
    problem: PoleProblem, charge: int, *, exact: bool | None = None, supplier: Supplier = here
) -> PoleFunctions:
    """W_0 ... W_charge as exact partial fractions in x^2. The Coulomb parameters of the problem do not matter.

    ``exact`` chooses exact series (True) or primes (False); by default the charge decides (``by_series``).
    ``supplier`` says where residues come from; the answer does not depend on it.
    Cost: measured by ``python -m benchmarks.poles``.

    >>> from ratomega.regulator.poles.problem import mixed_problem
    >>> pole_functions(mixed_problem(ONE, ONE, ONE), 2).functions[2].terms[0]
    Term(square=4, power=1, coefficient=1)
    """
    _check(problem, charge)
    if by_series(charge) if exact is None else exact:
        return PoleFunctions(regular_functions(problem, charge), (Evidence("exact"),) * (charge + 1), 0)
    recovery = _recovery(problem, charge, supplier)
    functions, evidence = recovery.functions_by_spare_bits()
    return PoleFunctions(tuple(functions), tuple(evidence), len(recovery.primes))


def pole_coefficients(
    problem: PoleProblem,
    charge: int,
    *,
    certify: bool = False,
    exact: bool | None = None,
    supplier: Supplier = here,
) -> PoleResult:
    """Z_0 ... Z_charge of a U(2) problem at its limit point.

    ``exact`` and ``supplier`` as in ``pole_functions``. ``certify`` makes the prime route take as many primes as the
    proved bound asks for.

    Raises ``InputError`` when a1 - a2 sits at a pole: there the limit can be infinite or depend on the path.
    Cost: measured by ``python -m benchmarks poles``.

    >>> from ratomega.regulator.poles.problem import mixed_problem
    >>> result = pole_coefficients(mixed_problem(ONE, ONE, Rational(-1, 4)), 4)     # a = i/2
    >>> result.coefficients
    (1, 2/5, 7/100, 313/43350, 498379/996356400)
    """
    _check(problem, charge)
    pole = problem.pole(charge)
    if pole is not None:
        raise InputError.single(pole_sentence(*pole), "coulomb")
    if certify and not (by_series(charge) if exact is None else exact):
        recovery = _recovery(problem, charge, supplier)
        values, evidence = recovery.values_by_bound()
        return _result(problem, values, tuple(evidence), len(recovery.primes))
    known = pole_functions(problem, charge, exact=exact, supplier=supplier)
    return _result(problem, [f.at(problem.square) for f in known.functions], known.evidence, known.primes)


def _check(problem: PoleProblem, charge: int) -> None:
    if charge < 0:
        raise InputError.single(f"a charge is zero or more, not {charge}", "charge")


def within_reach(problem: PoleProblem, charge: int) -> bool:
    """Does the rule have a way to this charge? Residues do not take a ratio of very long numbers."""
    return by_series(charge) or _fits(problem, charge)


def _fits(problem: PoleProblem, charge: int) -> bool:
    return 2 * charge * (problem.steps[0] + abs(problem.steps[1])) < WIDEST_FORM


def _recovery(problem: PoleProblem, charge: int, supplier: Supplier) -> Recovery:
    if not _fits(problem, charge):
        raise InputError.single(
            f"eps2/eps1 = {problem.steps[1]}/{problem.steps[0]} has too long a numerator or denominator for residues "
            f"at charge {charge}; exact series still take it",
            "eps2",
        )
    return Recovery(problem, charge, supplier)


def _result(
    problem: PoleProblem, regular: Sequence[Rational], evidence: tuple[Evidence, ...], primes: int
) -> PoleResult:
    scaled = []
    power = ONE
    for value in regular:
        scaled.append(value * power)
        power *= problem.scale
    return PoleResult(tuple(problem.dressing.dressed(scaled)), tuple(scaled), evidence, primes)
