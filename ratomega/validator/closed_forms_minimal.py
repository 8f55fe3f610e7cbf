"""Closed forms at minimal-model points: Z of U(2) with four degenerate flavours is a power of 1 - q times a known
block.

These points are resonant: single components need not be compact, and the limit exists because of the matter. It is
the block where the fusion rules hold at the limit point, then on every path (``conformal.minimal`` says why); only
there is a form given.
"""

from __future__ import annotations

from collections.abc import Sequence

from ratomega.case.setting import Setting
from ratomega.conformal.known_blocks import blocks_of
from ratomega.conformal.minimal import minimal_point
from ratomega.exact.rational import ONE
from ratomega.validator.limit_point import Charge, ClosedForm
from ratomega.validator.qseries import Series, binomial

__all__ = ["minimal_forms"]


def minimal_forms(setting: Setting, charges: Sequence[Charge]) -> tuple[ClosedForm, ...]:
    """The known blocks of minimal models that the limit point of ``setting`` is, at the given charges of its one node.

    Empty where the internal parameter is not degenerate, the flavours are not degenerate fields, or no known function
    belongs to the fields; a known block is one for which the fusion rules hold. Cost: (highest charge)^2 exact
    operations.
    """
    point = minimal_point(setting)
    if point is None or not charges:
        return ()
    order = max(charge[0] for charge in charges)
    forms: dict[str, ClosedForm] = {}
    for one in point.four_points:
        for known, series in blocks_of(one, order):
            z = binomial(-ONE, one.exponent, order) * Series.make(series)
            forms[known.name] = ClosedForm(
                f"{known.name}, {one.model}",
                f"Z = (1-q)^({one.exponent}) times the block of the {one}; {known.statement}"
                f"{'' if one.fields == known.fields else ' for the fields in another order'}",
                f"{known.source}; L. Alday, D. Gaiotto, Y. Tachikawa, arXiv 0906.3219",
                {charge: z.coefficients[charge[0]] for charge in charges},
            )
    return tuple(forms.values())
