"""Z of U(2) from Virasoro descendants, and elementary blocks along a path: forms that know of no diagrams.

Gram matrices are taken at the limit point itself, positive ratios and eps1 = eps2 included, up to the level at which
the Kac determinant vanishes there; from that level on over exact series in t on the case's own path. So at a resonance
the value, or the order and leading coefficient of a pole that survives, belongs to the own path, and is to be compared
with what the sum gives on that path, whatever further paths say.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from ratomega.case.case import Case
from ratomega.case.setting import Setting, resonances
from ratomega.conformal.dictionary import GaugePath, gauge_path, why_not_covered
from ratomega.conformal.exact_blocks import elementary_on_the_path, elementary_sum
from ratomega.conformal.gauge_sum import first_singular_level, gauge_coefficients
from ratomega.exact.laurent import Laurent
from ratomega.exact.path import Linear
from ratomega.exact.quadratic import Number, is_quadratic, number_text, only_rational, rational_parts
from ratomega.exact.rational import Rational
from ratomega.validator.closed_forms_u2 import ELEMENTARY_SOURCE, ELEMENTARY_STATEMENT
from ratomega.validator.depth import FULL
from ratomega.validator.limit_point import Charge, ClosedForm

__all__ = [
    "GRAM_NAME",
    "GRAM_SOURCE",
    "MOST_LEVEL",
    "Leading",
    "PathForm",
    "deepest_level",
    "elementary_path_form",
    "gram_form",
    "gram_path_form",
]

MOST_LEVEL = 8

# The deepest level for the effort that a case makes: digits of its longest number, four times for a torus, twice over
# series and over a quadratic field. Each line stays at some seconds.
_DEPTHS = ((12, 10), (40, 8), (200, 6))
_ALWAYS = 4

GRAM_NAME = "Gram matrix of Virasoro descendants"
_FLAVOURS = (
    "Z_k is the contraction of two states with the inverse Gram matrix of level k of the Verma module, times the U(1) "
    "factor"
)
_ADJOINT = (
    "Z is the trace of a primary field over the Verma module, level by level with the inverse Gram matrix, times "
    "prod_n (1-q^n)^(2 m (eps-m)/(eps1 eps2) - 1)"
)
GRAM_SOURCE = (
    "L. Alday, D. Gaiotto, Y. Tachikawa, arXiv 0906.3219; D. Gaiotto, arXiv 0908.0307; A. Marshakov, A. Mironov, "
    "A. Morozov, arXiv 0909.2052"
)


@dataclass(frozen=True, slots=True)
class Leading:
    """The leading behaviour ``value * t^(-order)`` on a path; order 0 is a finite limit."""

    order: int
    value: Number

    def text(self) -> str:
        return number_text(self.value) if self.order == 0 else f"{number_text(self.value)} t^-{self.order}"


@dataclass(frozen=True, slots=True)
class PathForm:
    """Leading behaviour by charge on the case's own path, from a computation that is no sum over diagrams.

    ``note`` says what was left out, empty when nothing was.
    """

    name: str
    statement: str
    source: str
    values: Mapping[Charge, Leading]
    note: str = ""


def deepest_level(gauge: GaugePath, most_level: int) -> int:
    """How deep the Gram matrices are taken, by the length of the numbers; decided before any work."""
    forms = [gauge.eps1, gauge.eps2, gauge.difference, *gauge.flavours]
    forms += [] if gauge.adjoint is None else [gauge.adjoint]
    effort = max(_digits(form) for form in forms)
    effort *= 1 if gauge.adjoint is None else 4
    numbers = [x for form in forms for x in (form.constant, form.slope)]
    if any(is_quadratic(x) for x in numbers) or first_singular_level(gauge, most_level) <= most_level:
        effort *= 2
    return min(most_level, next((level for limit, level in _DEPTHS if effort <= limit), _ALWAYS))


def _digits(form: Linear) -> int:
    parts = [*rational_parts(form.constant), *rational_parts(form.slope)]
    return max(max(int(x.p).bit_length(), int(x.q).bit_length()) for x in parts) * 3 // 10 + 1


def gram_path_form(case: Case, setting: Setting, *, most_level: int = MOST_LEVEL) -> PathForm | None:
    """Z of U(2) with up to four flavours or one adjoint, from Gram matrices, on the path ``setting``.

    Every charge up to the bound of the case, ``most_level`` and the depth that the length of the numbers allows
    (``deepest_level``); poles included. None when the theory is not covered, or the bound is charge 0.

    Cost: 0.1 s at charge 8 for short rational numbers off resonance, some seconds at most otherwise.
    """
    if why_not_covered(setting):
        return None
    gauge = gauge_path(setting)
    depth = deepest_level(gauge, most_level)
    last = min(case.bounds[0], depth)
    if last < 1:
        return None
    values: dict[Charge, Leading] = {(k,): _leading(z) for k, z in enumerate(gauge_coefficients(gauge, last))}
    singular = first_singular_level(gauge, last)
    where = "" if singular > last else f", in series in t from level {singular} on, where the Kac determinant vanishes"
    statement = (_FLAVOURS if gauge.adjoint is None else _ADJOINT) + where
    left_out = case.bounds[0] > last
    note = ""
    if left_out:
        deeper = deepest_level(gauge, FULL.level)
        more = f", to level {deeper} with --depth full" if deeper > depth else ""
        note = f"charges beyond {last} were not computed this way (Gram matrices to level {depth} here{more})"
    return PathForm(GRAM_NAME, statement, GRAM_SOURCE, values, note)


def _leading(series: Laurent) -> Leading:
    order = max(0, -series.valuation)
    return Leading(order, series.coefficient(-order))


def gram_form(case: Case, setting: Setting, *, most_level: int = MOST_LEVEL) -> ClosedForm | None:
    """The same as values by charge, at the charges without resonance: there the limit is one on every path."""
    form = gram_path_form(case, setting, most_level=most_level)
    if form is None:
        return None
    values = {k: x.value for k, x in form.values.items() if x.order == 0 and not _is_resonant(setting, k)}
    return ClosedForm(form.name, form.statement, form.source, values)


def _is_resonant(setting: Setting, charge: Charge) -> bool:
    return any(True for _ in resonances(setting, charge))


def elementary_path_form(case: Case, setting: Setting) -> PathForm | None:
    """U(2) with four flavours whose masses keep the block elementary all along the path: the limit at its end.

    Only the resonant charges stand here: ``closed_forms`` has the others. None when there is none, or the masses leave
    the family on the path.
    """
    if why_not_covered(setting):
        return None
    gauge = gauge_path(setting)
    resonant = [charge for charge in case.charges if _is_resonant(setting, charge)]
    if gauge.adjoint is not None or not resonant or not elementary_on_the_path(gauge):
        return None
    eps1, eps2 = only_rational(gauge.eps1.constant), only_rational(gauge.eps2.constant)
    mu = [m.constant - (eps1 + eps2) / 2 for m in gauge.flavours]
    form = elementary_sum(eps1, eps2, gauge.difference.constant**2 * Rational(1, 4), mu)
    if form is None:
        raise AssertionError("unreachable: the family holds on the path, hence at its end")
    values = form.coefficients(resonant[-1][0])
    return PathForm(
        "U(2) with four flavours, elementary block along the path",
        f"{ELEMENTARY_STATEMENT}; it holds all along the path, so at its end, where a is resonant",
        ELEMENTARY_SOURCE,
        {charge: Leading(0, values[charge[0]]) for charge in resonant},
    )
