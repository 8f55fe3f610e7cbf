"""The pole recursion of U(2) against the sum over diagrams: at the limit point itself, or right beside it.

Where no Coulomb difference is resonant and all is rational the recursion gives the limit. Elsewhere it is run at the
point t = P of the case's own path, P a prime of 127 bits or more, where nothing is special, and a root sqrt(d) is
replaced by an integer r with r^2 = d modulo P^(n+1), n the worst pole: everything is rational there. The sum over
diagrams says

    Z_k(t) = s_-n t^-n + ... + s_-1/t + s_0 + O(t),

and t = P is small in the P-adic sense: the value of the recursion minus s_-n P^-n - ... - s_0 (sqrt(d) replaced by r)
must be a fraction with a numerator that P divides; for both roots r and -r, which fixes x and y of x + y sqrt(d). A
wrong s passes by chance once in 2^127. No series enters on that side, no limit, no quadratic field.
"""

from __future__ import annotations

from collections.abc import Sequence

from ratomega.case.affine import Affine
from ratomega.case.background import Background
from ratomega.case.case import Case
from ratomega.case.setting import Setting
from ratomega.case.theory import Node, Theory
from ratomega.exact.path import Linear
from ratomega.exact.quadratic import Number, Quadratic, number_text, one_field
from ratomega.exact.rational import Rational
from ratomega.regulator.limits import ChargeLimit
from ratomega.regulator.poles.problem import applies, case_problem
from ratomega.regulator.poles.recursion import pole_coefficients
from ratomega.validator.comparison import compare
from ratomega.validator.finiteness import charge_text
from ratomega.validator.limit_point import ClosedForm
from ratomega.validator.verdict import Check, Kind, Verdict

__all__ = ["beside", "check_recursion", "split_prime"]

LEAST = 2**127 - 1
"""A prime, so large that it divides no denominator of a case by accident."""

_NAME = "pole recursion in the Coulomb parameter"
_STATEMENT = (
    "Z is the sum over its poles 2a = ±(m eps1 + n eps2), with residues fixed by lower charges, in exact series"
)
_BESIDE = (
    "Z is the sum over its poles 2a = ±(m eps1 + n eps2), with residues fixed by lower charges, taken on the own path "
    "at the number t = P, a prime of 127 bits or more; modulo P it is the expansion in t"
)
_SOURCE = "Al. Zamolodchikov 1984; R. Poghossian, arXiv 0909.3412"


def split_prime(radicand: int, power: int = 1) -> tuple[int, tuple[int, ...]]:
    """The least prime P from 2^127 - 1 on with a root of the radicand modulo P, and both roots modulo P^power.

    Without a radicand (0) there is one "root", 0, that stands for nothing.

    >>> prime, (one, other) = split_prime(-1, 3)
    >>> (one * one + 1) % prime**3, (one + other) % prime**3
    (0, 0)
    """
    prime = LEAST
    if not radicand:
        return prime, (0,)
    # Loading sympy takes longer than most checks.
    from sympy import nextprime
    from sympy.ntheory import sqrt_mod

    while True:
        root = sqrt_mod(radicand % prime, prime)
        if root:
            lifted, modulus = int(root), prime**power
            for _ in range(power.bit_length()):
                # Newton's iteration doubles the power of P.
                lifted = (lifted - (lifted * lifted - radicand) * pow(2 * lifted, -1, modulus)) % modulus
            return prime, (lifted, modulus - lifted)
        prime = int(nextprime(prime))


def check_recursion(case: Case, setting: Setting, limits: Sequence[ChargeLimit]) -> tuple[Check, ...]:
    """One check where the recursion covers the theory; none elsewhere. Cost: a power of the charge, below a second.

    ``setting`` is the own path on which the limits were taken.
    """
    charges = [limit.charge for limit in limits]
    if not isinstance(case.charge, int) or len(charges) < 2:
        return ()
    reached = case.with_charge(charges[-1][0])
    if applies(reached).applies:
        values = pole_coefficients(case_problem(reached), charges[-1][0]).coefficients
        form = ClosedForm(_NAME, _STATEMENT, _SOURCE, {(k,): value for k, value in enumerate(values)})
        check = compare(form, limits)
        return () if check is None else (check,)
    if len(setting.nodes) != 1:
        return ()
    radicand = one_field([x for form in _forms(setting) for x in (form.constant, form.slope)])
    prime, roots = split_prime(radicand, 1 + max(limit.own.order for limit in limits))
    beside_values: list[Sequence[Rational]] = []
    for root in roots:
        near = beside(setting, charges[-1][0], prime, root)
        if not applies(near).applies:
            return ()
        beside_values.append(pole_coefficients(case_problem(near), charges[-1][0]).coefficients)
    return (_compared(limits, beside_values, prime, roots),)


def _forms(setting: Setting) -> list[Linear]:
    node = setting.nodes[0]
    return [*node.coulomb, *node.antifundamental, *node.fundamental, *node.adjoint]


def _rooted(value: Number, root: int) -> Rational:
    """x + y sqrt(d) with the root replaced by an integer."""
    return value.x + value.y * root if isinstance(value, Quadratic) else value


def beside(setting: Setting, charge: int, prime: int, root: int) -> Case:
    """The theory of one node at t = P, with sqrt(d) replaced, as a case of its own; all parameters are numbers."""

    def at(forms: Sequence[Linear]) -> tuple[Affine, ...]:
        return tuple(Affine(_rooted(form.constant, root) + _rooted(form.slope, root) * prime) for form in forms)

    node = setting.nodes[0]
    one = Node(node.name, at(node.coulomb), at(node.antifundamental), at(node.fundamental), at(node.adjoint))
    eps1, eps2 = at([setting.eps1, setting.eps2])
    return Case.make(Theory.make([one]), Background.make(eps1, eps2), charge)


def _compared(
    limits: Sequence[ChargeLimit], values: Sequence[Sequence[Rational]], prime: int, roots: Sequence[int]
) -> Check:
    for limit in limits:
        for root, found in zip(roots, values, strict=True):
            value = found[limit.charge[0]]
            principal = sum((_rooted(c, root) * Rational(prime) ** n for n, c in limit.terms(-1)), Rational(0))
            rest = value - principal - _rooted(limit.terms(0)[-1][1], root)
            if int(rest.p) % prime or int(rest.q) % prime == 0:
                evidence = (
                    f"{_BESIDE}; first difference at {charge_text(limit.charge)}: the recursion gives at t^0 "
                    f"{_residue(value - principal, prime)} modulo P = {prime}, "
                    f"the sum over diagrams {number_text(limit.terms(0)[-1][1])}{_with_poles(limit)}"
                )
                return Check(_NAME, Verdict.REFUTED, Kind.INDEPENDENT, evidence, _SOURCE)
    poles = [charge_text(limit.charge) for limit in limits if limit.own.order > 0]
    kept = f"; the same surviving pole at {', '.join(poles)}" if poles else ""
    rooted = ", sqrt(d) replaced by either root modulo P" if len(roots) > 1 else ""
    evidence = f"{_BESIDE}{rooted}; equal up to {charge_text(limits[-1].charge)}{kept}"
    return Check(_NAME, Verdict.AGREES, Kind.INDEPENDENT, evidence, _SOURCE, True)


def _residue(value: Rational, prime: int) -> str:
    below = int(value.q)
    return str(int(value.p) * pow(below, -1, prime) % prime) if below % prime else f"a pole, {number_text(value)}"


def _with_poles(limit: ChargeLimit) -> str:
    return f" beside a pole of order {limit.own.order}" if limit.own.order else ""
