"""What the plots show, as plain numbers: the same for the pictures of a page and for the figures of matplotlib."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from decimal import Decimal, InvalidOperation
from fractions import Fraction

from ratomega.detector.atlas import Atlas, SingularRatio
from ratomega.errors import InputError
from ratomega.exact.rational import Rational
from ratomega.results.detections import DetectResult
from ratomega.verify.approach import Approach

__all__ = ["ApproachCurve", "Orders", "Stems", "curves_of", "orders_of", "stems_of"]

# More stems than these run into each other.
MOST_STEMS = 150
# So do more curves than these.
MOST_CURVES = 5

Measured = int | float | str | Decimal | Fraction | Rational


@dataclass(frozen=True, slots=True)
class Orders:
    """By total charge from 0: the worst order of a single weight, and the number of singular ones."""

    worst: tuple[int, ...]
    singular: tuple[int, ...]


def orders_of(result: DetectResult) -> Orders:
    """The detector's findings by total charge: over all charges of that total the worst order, and the sum."""
    top = max((sum(report.charge) for report in result.charges), default=0)
    worst, singular = [0] * (top + 1), [0] * (top + 1)
    for report in result.charges:
        total = sum(report.charge)
        worst[total] = max(worst[total], report.worst_order)
        singular[total] += report.singular
    return Orders(tuple(worst), tuple(singular))


@dataclass(frozen=True, slots=True)
class Stems:
    """The ratios that an atlas is drawn with, from the least first charge on, and how many were left out.

    ``highest`` is the total charge up to which it reaches; ``own`` the ratio of the case, where there is one.
    """

    ratios: tuple[SingularRatio, ...]
    left_out: int
    highest: int
    own: Fraction | None


def stems_of(atlas: Atlas) -> Stems:
    """Whole first charges are left out, the highest first, until at most ``MOST_STEMS`` ratios stay."""
    highest = atlas.charge if isinstance(atlas.charge, int) else sum(atlas.charge)
    shown = list(atlas.ratios)
    while len(shown) > MOST_STEMS:
        last = max(entry.first_charge for entry in shown)
        shown = [entry for entry in shown if entry.first_charge < last]
    own = None
    if atlas.poles is not None:
        ratio = atlas.poles.ratio
        own = Fraction(int(ratio.p), int(ratio.q))
    return Stems(tuple(shown), len(atlas.ratios) - len(shown), highest, own)


@dataclass(frozen=True, slots=True)
class ApproachCurve:
    """One coefficient approached through irrational ratios: decimal logarithms, None where a number is 0.

    ``offsets`` are the distances from the rational ratio, ``distances`` those from the exact limit, ``radii`` the
    radii within which the values are known. Build it with ``ApproachCurve.make``.
    """

    name: str
    offsets: tuple[float, ...]
    distances: tuple[float | None, ...]
    radii: tuple[float | None, ...]

    @classmethod
    def make(
        cls, name: str, offsets: Sequence[Measured], distances: Sequence[Measured], radii: Sequence[Measured]
    ) -> ApproachCurve:
        """From numbers of any size, as numbers or decimal texts ("3.2e-410"). Raises ``InputError``.

        >>> ApproachCurve.make("charge 2", ["1e-2", "1e-4"], ["2e-3", 0], [0, "1e-500"]).radii
        (None, -500.0)
        """
        if not len(offsets) == len(distances) == len(radii) >= 1:
            message = "an approach needs as many distances and radii as offsets, one at least"
            raise InputError.single(message, "offsets")
        logs = [_logarithm(x, "offsets") for x in offsets]
        found = [x for x in logs if x is not None]
        if len(found) < len(logs):
            raise InputError.single("an offset is more than 0", "offsets")
        return cls(
            name,
            tuple(found),
            tuple(_logarithm(x, "distances") for x in distances),
            tuple(_logarithm(x, "radii") for x in radii),
        )


def curves_of(approach: Approach) -> tuple[ApproachCurve, ...]:
    """A curve for every worst order of a single weight: the first charge, beyond 0, that has it and a limit."""
    curves: dict[int, ApproachCurve] = {}
    for one in approach.charges:
        if one.exact is None or not any(one.charge) or one.worst_order in curves:
            continue
        name = f"charge {','.join(str(k) for k in one.charge)}, order {one.worst_order}"
        points = one.points
        columns = [p.offset for p in points], [p.distance for p in points], [p.radius for p in points]
        curves[one.worst_order] = ApproachCurve.make(name, *columns)
    return tuple(curves.values())[:MOST_CURVES]


def _logarithm(value: Measured, where: str) -> float | None:
    """log10 |value|; through decimals, because what is measured may be far below the range of floats."""
    if isinstance(value, Rational):
        value = Fraction(int(value.p), int(value.q))
    try:
        decimal = Decimal(value.numerator) / Decimal(value.denominator) if isinstance(value, Fraction) else Decimal(
            str(value)
        )
    except InvalidOperation as error:
        raise InputError.single(f'"{str(value)[:40]}" is not a number', where) from error
    if not decimal.is_finite():
        raise InputError.single(f"{decimal} is not a finite number", where)
    if decimal == 0:
        return None
    found = float(abs(decimal).log10())
    assert math.isfinite(found)
    return found
