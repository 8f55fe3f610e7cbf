"""The pole recursion of U(2) against the sum over diagrams: at the limit point itself, or right beside it.

Where no Coulomb difference is resonant the recursion gives the limit. Where one is, its own terms diverge; then it is
run at the point t = P of the case's own path, P a prime of 127 bits, where nothing is special. The sum over diagrams
says

    Z_k(t) = s_-n t^-n + ... + s_-1/t + s_0 + O(t),

and t = P is small in the P-adic sense: the value of the recursion minus s_-n P^-n - ... - s_0 must be a fraction with a
numerator that P divides. A wrong s passes by chance once in 2^127. No series enters on that side, no limit either.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from ratomega.case.affine import Affine
from ratomega.case.background import Background
from ratomega.case.case import Case
from ratomega.case.setting import Setting
from ratomega.case.theory import Node, Theory
from ratomega.exact.path import Linear
from ratomega.exact.quadratic import Number, is_quadratic, number_text, only_rational
from ratomega.exact.rational import Rational
from ratomega.regulator.limits import ChargeLimit
from ratomega.regulator.poles.problem import applies, case_problem
from ratomega.regulator.poles.recursion import pole_coefficients
from ratomega.validator.comparison import compare
from ratomega.validator.finiteness import charge_text
from ratomega.validator.limit_point import ClosedForm
from ratomega.validator.verdict import Check, Kind, Verdict

__all__ = ["beside", "check_recursion"]

BESIDE = 2**127 - 1
"""A prime that divides no denominator of a case by accident."""

_NAME = "pole recursion in the Coulomb parameter"
_STATEMENT = (
    "Z is the sum over its poles 2a = ±(m eps1 + n eps2), with residues fixed by lower charges, in exact series"
)
_BESIDE = (
    "Z is the sum over its poles 2a = ±(m eps1 + n eps2), with residues fixed by lower charges, taken on the own path "
    "at the number t = P = 2^127 - 1; modulo P it is the expansion in t"
)
_SOURCE = "Al. Zamolodchikov 1984; R. Poghossian, arXiv 0909.3412"


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
    near = beside(setting, charges[-1][0])
    if near is None or not applies(near).applies:
        return ()
    values = pole_coefficients(case_problem(near), charges[-1][0]).coefficients
    return (_compared(limits, values),)


def beside(setting: Setting, charge: int) -> Case | None:
    """The theory at t = P as a case of its own, all parameters numbers; None beyond the rationals or several nodes."""
    if len(setting.nodes) != 1:
        return None
    node = setting.nodes[0]
    forms = [*node.coulomb, *node.antifundamental, *node.fundamental, *node.adjoint]
    if any(is_quadratic(x) for form in forms for x in (form.constant, form.slope)):
        return None

    def at(forms: Sequence[Linear]) -> tuple[Affine, ...]:
        return tuple(Affine(form.constant + form.slope * BESIDE) for form in forms)

    one = Node(node.name, at(node.coulomb), at(node.antifundamental), at(node.fundamental), at(node.adjoint))
    eps1, eps2 = at([setting.eps1, setting.eps2])
    return Case.make(Theory.make([one]), Background.make(eps1, eps2), charge)


def _compared(limits: Sequence[ChargeLimit], values: Sequence[Rational]) -> Check:
    for limit in limits:
        value = values[limit.charge[0]]
        expansion: Number = Rational(0)
        for power, coefficient in limit.terms(0):
            expansion = expansion + coefficient * Rational(BESIDE) ** power
        difference = value - only_rational(expansion)
        if int(difference.p) % BESIDE != 0:
            evidence = (
                f"{_BESIDE}; first difference at {charge_text(limit.charge)}: the recursion gives "
                f"{number_text(_residue(limit, value))} at t^0 modulo P, the sum over diagrams {_leading_text(limit)}"
            )
            return Check(_NAME, Verdict.REFUTED, Kind.INDEPENDENT, evidence, _SOURCE)
    poles = [charge_text(limit.charge) for limit in limits if limit.own.order > 0]
    kept = f"; the same surviving pole at {', '.join(poles)}" if poles else ""
    evidence = f"{_BESIDE}; equal up to {charge_text(limits[-1].charge)}{kept}"
    return Check(_NAME, Verdict.AGREES, Kind.INDEPENDENT, evidence, _SOURCE, True)


def _residue(limit: ChargeLimit, value: Rational) -> Rational:
    """The value with the principal part of the sum taken away, modulo P: what should be s_0 there."""
    for power, coefficient in _principal(limit):
        value -= only_rational(coefficient) * Rational(BESIDE) ** power
    below = int(value.q)
    return Rational(int(value.p) * pow(below, -1, BESIDE) % BESIDE) if below % BESIDE else value


def _principal(limit: ChargeLimit) -> Iterator[tuple[int, Number]]:
    return ((power, coefficient) for power, coefficient in limit.terms(0) if power < 0)


def _leading_text(limit: ChargeLimit) -> str:
    order = f" t^-{limit.own.order}" if limit.own.order else ""
    return f"{number_text(limit.own.value)}{order} on its own path"
