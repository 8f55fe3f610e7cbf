"""Precision-loss: the numbers were summed at an offset in floating-point arithmetic, and the cancellation ate the digits.

At an offset delta a singular weight is of the order delta^-n, n up to [k/(alpha+beta)], and its vanishing factors, which
are differences of numbers of order 1, have a relative error u/delta at the working precision u. So the error of the
sum grows like u/delta^(n+1), or like u/delta^n where the factors are formed without loss. The typical error of every
row is added up from the weights themselves:

    B_k = sqrt( sum over configurations of w^2 (1 + sum over factors f of (s/f)^2) ),  s the size of the parameters,

and u is estimated from the rows. The offset comes from rows without singular weights where it shows, else from the
growth of the error at a usual working precision.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from math import floor, log10, sqrt

from ratomega.diagrams.tuples import Charge, configurations
from ratomega.exact.quadratic import is_quadratic
from ratomega.exact.rational import ZERO, Rational, as_fraction, decimal_text
from ratomega.verify.explanation import Explanation
from ratomega.verify.given import Given
from ratomega.verify.offset import Direction, directions, offset_at, solved
from ratomega.verify.quantities import noise_weights
from ratomega.verify.question import Question
from ratomega.verify.rows import real_value
from ratomega.verify.series import below, minus
from ratomega.verify.source import Source, moved

__all__ = ["Noise", "noise_profile", "precision_loss", "singular_orders"]

PRECISIONS = {"double": 2.0**-53, "single": 2.0**-24, "extended": 2.0**-64, "quadruple": 2.0**-113}
# A clean row at double precision may be off by this many typical errors.
CLEAN = 30.0
# Orders of magnitude by which noise may miss its typical size.
SPREAD = 2.5
# Where u was estimated from the rows: orders of magnitude between the greatest and the least.
MOST_SPREAD = 4.0
LEAST_GROWTH = 2.0
GRID = [Rational(1, 10**n) for n in range(2, 13)]
LARGEST_FLOAT = 1e300


@dataclass(frozen=True, slots=True)
class Noise:
    """An offset, the working precision, and the rows in which noise shows, beyond what was given."""

    delta: Rational
    uncertainty: Rational
    precision: float
    noisy: tuple[Given, ...]
    clean: tuple[Given, ...]
    misfit: float


def singular_orders(question: Question) -> dict[Charge, int]:
    """The worst order of a single weight, for every row."""
    weights = question.source.weights
    found: dict[Charge, int] = {}
    for row in question.rows:
        orders = (
            weights.weight(c) for c in configurations(question.setting.ranks, row.charge)
        )
        found[row.charge] = max((w.order for w in orders if not w.dead), default=0)
    return {charge: max(order, 0) for charge, order in found.items()}


def noise_profile(source: Source, charge: Charge, *, formed: bool) -> float:
    """B_k at the point where the source sits, nothing vanishing there; without the loss in factors unless ``formed``."""
    weights = source.weights
    scale = max(_float(abs(x)) for x in _sizes(source)) * (1 + sum(charge))
    total = 0.0
    for configuration in configurations(source.setting.ranks, charge):
        value, loss = 1.0, 1.0
        for (c, _), exponent in weights.weight(configuration).factors().items():
            factor = _float(abs(c)) if not is_quadratic(c) else 1.0
            if factor == 0.0:
                value = 0.0
                break
            value *= factor**exponent
            loss += abs(exponent) * (scale / factor) ** 2
        total += value * value * (loss if formed else 1 + len(configuration))
    return min(sqrt(total), LARGEST_FLOAT)


def _sizes(source: Source) -> Iterator[Rational]:
    setting = source.setting
    for value in (setting.eps1, setting.eps2, *(x for node in setting.nodes for x in node.coulomb)):
        if not is_quadratic(value.constant):
            yield value.constant


def _float(value: Rational) -> float:
    return float(as_fraction(value))


def precision_loss(question: Question) -> Iterator[Explanation]:
    """The best noise that explains all rows, if any does. Only rational cases are asked."""
    if question.source.weights.radicand or len(question.deviating) < 2:
        return
    orders = singular_orders(question)
    found: list[Noise] = []
    direction = next(directions(question))
    for formed in (True, False):
        for delta, uncertainty in _deltas(question, direction, orders):
            noise = _noise(question, direction, delta, uncertainty, orders, formed=formed)
            if noise is not None:
                found.append(noise)
    if found:
        yield _explanation(question, direction, min(found, key=lambda one: one.misfit), orders)


def _deltas(
    question: Question, direction: Direction, orders: dict[Charge, int]
) -> Iterator[tuple[Rational, Rational]]:
    """Offsets from the rows without singular weights, the most telling first; else a grid of powers of ten."""
    clean = [row for row in question.deviating if orders[row.charge] == 0]
    for row in sorted(clean, key=lambda one: sum(one.charge))[:2]:
        solution = solved(question, direction, row)
        if solution is not None:
            yield solution
    if not clean:
        for delta in GRID:
            yield delta, ZERO


def _noise(
    question: Question,
    direction: Direction,
    delta: Rational,
    uncertainty: Rational,
    orders: dict[Charge, int],
    *,
    formed: bool,
) -> Noise | None:
    """Do all rows agree with the sum at this offset and noise of one precision? None when they do not."""
    source = Source(moved(direction.setting, delta))
    reach = noise_weights(question.quantity, source.z, source.setting)
    near = question.quantity.of(source.z, source.setting)
    profile: dict[Charge, float] = {}

    def typical(charge: Charge) -> float:
        total = 0.0
        for j in below(charge):
            factor = real_value(reach(minus(charge, j)))
            if factor is None or factor == 0:
                continue
            if j not in profile:
                profile[j] = noise_profile(source, j, formed=formed)
            total += abs(_float(factor)) * profile[j]
        return total

    noisy: list[tuple[Given, float, float]] = []
    quiet: list[tuple[Given, float]] = []
    clean: list[Given] = []
    for row in question.rows:
        value = question.value(near, row)
        if value is None:
            return None
        rest, size = abs(row.value - value), typical(row.charge)
        allowed = _float(row.tolerance)
        if orders[row.charge] == 0:
            allowed += CLEAN * PRECISIONS["double"] * size if row.digits is None or row.digits >= 14 else 0.0
            if _float(rest) > allowed:
                return None
            clean.append(row)
        elif rest > row.tolerance:
            noisy.append((row, _float(rest), size))
        else:
            quiet.append((row, size))
    return _judged(question, delta, uncertainty, noisy, quiet, clean)


def _judged(
    question: Question,
    delta: Rational,
    uncertainty: Rational,
    noisy: list[tuple[Given, float, float]],
    quiet: list[tuple[Given, float]],
    clean: list[Given],
) -> Noise | None:
    """Noise of one precision: it spreads little, and rows without it had no room for it (but one by luck)."""
    if not noisy:
        return None
    logs = [log10(rest / size) for _, rest, size in noisy]
    shows = any(row in question.deviating for row in clean)
    name, misfit = min(
        ((name, max(abs(one - log10(u)) for one in logs)) for name, u in PRECISIONS.items()), key=lambda pair: pair[1]
    )
    del name
    centre = sum(logs) / len(logs)
    lucky = sum(1 for row, size in quiet if size * 10**centre > 10**SPREAD * max(_float(row.tolerance), 1e-300))
    if lucky > 1:
        return None
    sizes = [size for _, _, size in noisy]
    growth = log10(max(sizes) / min(sizes))
    if shows:
        # The offset is known from other rows: the precision may be any.
        if max(logs) - min(logs) > MOST_SPREAD or centre > log10(PRECISIONS["single"]) + SPREAD or centre < -40:
            return None
    elif misfit > SPREAD or len(noisy) < 2 or growth < LEAST_GROWTH:
        return None
    rows = tuple(row for row, _, _ in noisy)
    return Noise(delta, uncertainty, 10**centre, rows, tuple(clean), misfit)


def _explanation(
    question: Question, direction: Direction, noise: Noise, orders: dict[Charge, int]
) -> Explanation:
    digits = floor(-log10(noise.precision) + 0.5)
    about = "about " if noise.uncertainty == 0 else ""
    shown = decimal_text(noise.delta, 3)
    change = direction.words.format(f"{about}{shown}")
    losses = ", ".join(
        f"charge {','.join(str(k) for k in row.charge)}: {orders[row.charge]}" for row in noise.noisy
    )
    sentence = (
        f"The numbers were summed with about {digits} digits at an offset, {change}, and cancellation left noise in them: "
        f"it grows as the singular weights make it (orders of the offset that cancel, {losses})"
    )
    visible = sum(1 for row in noise.clean if row in question.deviating)
    sentence += f", and {visible} rows without singular weights show the offset itself." if visible else "."
    return Explanation(
        "precision-loss", question.quantity.name, sentence,
        changes=(change,),
        parameters=(("offset", decimal_text(noise.delta, 6)), ("digits", str(digits))),
        charges=question.charges, fitted=1,
    )
