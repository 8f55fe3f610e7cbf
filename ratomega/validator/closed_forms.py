"""Closed forms: independent values of Z at the case's own limit point.

Nothing here knows of diagrams, weights or paths; only exact arithmetic and the case are shared with the sum over
diagrams. A form is used where it is a theorem about the limit: at charges without resonance, where every component of
the fixed locus is compact, Z is a continuous function of all parameters at the limit point, and an identity that
holds around the point holds at it.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace

from ratomega.case.case import Case
from ratomega.case.setting import Setting, resonances
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ONE
from ratomega.validator.closed_forms_u1 import chain_forms, necklace_forms
from ratomega.validator.closed_forms_u2 import four_flavour_forms, low_charge_forms
from ratomega.validator.closed_forms_un import adjoint_forms, truncation_forms, vanishing_forms
from ratomega.validator.identities.finite_poles import finite_pole_forms
from ratomega.validator.identities.painleve import painleve_forms
from ratomega.validator.limit_point import Charge, ClosedForm, LimitPoint, limit_point

__all__ = ["Charge", "ClosedForm", "closed_forms"]

_FAMILIES = (
    chain_forms,
    necklace_forms,
    adjoint_forms,
    vanishing_forms,
    truncation_forms,
    four_flavour_forms,
    low_charge_forms,
    finite_pole_forms,
    painleve_forms,
)


def closed_forms(case: Case, setting: Setting) -> tuple[ClosedForm, ...]:
    """Every closed form that applies to ``case`` at the end of the path ``setting``, in a fixed order.

    ``values`` of each holds the charges of the case at which the form holds, at least one of them not zero; a form
    that holds at none is left out. Parameters are matched by their limit values. Where the quiver falls apart, each
    part has its own forms (at charges that vanish elsewhere), and the product is a form of its own.

    Cost: for F factors and C charges up to k, about F C k exact operations.

    >>> from ratomega.case.affine import Affine
    >>> from ratomega.case.background import Background
    >>> from ratomega.case.setting import own_setting
    >>> from ratomega.exact.rational import Rational
    >>> from ratomega.case.theory import Node, Theory
    >>> theory = Theory.make([Node("gauge", (Affine(Rational(1, 3)),))])
    >>> case = Case.make(theory, Background.make(Affine(ONE), Affine(Rational(2))), 2)
    >>> [(form.name, form.values[(2,)]) for form in closed_forms(case, own_setting(case))]
    [('U(1) without matter', 1/8)]
    """
    point = limit_point(setting)
    compact = [charge for charge in case.charges if not any(True for _ in resonances(setting, charge))]
    found: list[ClosedForm] = []
    known: list[dict[Charge, Number]] = []
    parts = point.components()
    for nodes in parts:
        inside = [charge for charge in compact if charge == _at(charge, nodes)]
        table: dict[Charge, Number] = {}
        for form in _part_forms(point.part(nodes), [tuple(charge[node] for node in nodes) for charge in inside]):
            values = {_spread(charge, nodes, len(point.nodes)): value for charge, value in form.values.items()}
            if any(any(charge) for charge in values):
                found.append(replace(form, values=values))
                table = values | table
        known.append(table)
    if len(parts) > 1:
        found.extend(_product_form(parts, known, compact))
    return tuple(found)


def _at(charge: Charge, nodes: Sequence[int]) -> Charge:
    """The charge at ``nodes``, zero elsewhere."""
    return tuple(k if node in nodes else 0 for node, k in enumerate(charge))


def _spread(charge: Charge, nodes: Sequence[int], length: int) -> Charge:
    """The charge of a part as a charge of the whole quiver."""
    whole = dict(zip(nodes, charge, strict=True))
    return tuple(whole.get(node, 0) for node in range(length))


def _part_forms(part: LimitPoint, charges: Sequence[Charge]) -> Iterator[ClosedForm]:
    for family in _FAMILIES:
        yield from family(part, charges)


def _product_form(
    parts: Sequence[tuple[int, ...]], known: Sequence[dict[Charge, Number]], charges: Sequence[Charge]
) -> Iterator[ClosedForm]:
    """Z of a quiver that falls apart, at charges that do not vanish in at least two of its parts."""
    values: dict[Charge, Number] = {}
    for charge in charges:
        pieces = [_at(charge, nodes) for nodes in parts]
        charged = [(piece, table) for piece, table in zip(pieces, known, strict=True) if any(piece)]
        if len(charged) > 1 and all(piece in table for piece, table in charged):
            values[charge] = ONE
            for piece, table in charged:
                values[charge] = values[charge] * table[piece]
    if values:
        yield ClosedForm(
            "product over the parts of the quiver",
            "Z is the product of the closed forms of the parts of the quiver that no edge joins",
            "elementary: every factor of a weight belongs to one part",
            values,
        )
