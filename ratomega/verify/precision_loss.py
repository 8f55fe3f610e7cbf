"""Precision-loss: the numbers were summed at an offset in floating-point arithmetic, and cancellation ate the digits.

At an offset delta a singular weight is of the order delta^-n, n up to [k/(alpha+beta)], and its vanishing factors,
which are differences of numbers of order 1, have a relative error u/delta at the working precision u. So the error of
the sum grows like u/delta^(n+1) at most. Where the errors of the factors go together (they are the same differences
over and over) most of it cancels again, down to u/delta. The most is added up from the weights of a row,

    B_k = sqrt( sum over configurations of w^2 (1 + sum over factors f of (s/f)^2) ),  s the size of the parameters,

and the least is B_k delta^n. The working precision is that of a usual format. The offset comes from rows without
singular weights where it shows, else from the growth of the error.

On top of another change the rows must also gain, against the exact values, more digits than the choice among so many
changes is worth.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from itertools import pairwise
from math import floor, log10, sqrt

from ratomega.diagrams.tuples import Charge, configurations
from ratomega.exact.quadratic import only_rational
from ratomega.exact.rational import ONE, ZERO, Rational, as_fraction, decimal_text
from ratomega.verify.explanation import LEAST_EVIDENCE, Explanation, evidence
from ratomega.verify.given import Given
from ratomega.verify.offset import Change, Direction, directions, offset_at, short_decimals, solved
from ratomega.verify.quantities import Quantity, noise_weights
from ratomega.verify.question import Question
from ratomega.verify.rows import real_value
from ratomega.verify.series import Series, below, minus
from ratomega.verify.source import Source

__all__ = ["Noise", "noise_profile", "precision_loss", "rounding", "singular_orders"]

PRECISIONS = {"double": 2.0**-53, "single": 2.0**-24, "extended": 2.0**-64, "quadruple": 2.0**-113}
# A clean row at double precision may be off by this many typical errors, when it has so many digits.
CLEAN = 30.0
LEAST_DIGITS = 14
# Orders of magnitude by which noise may be above the most, or below the least, that is typical.
SPREAD = 2.0
LEAST_SPREAD = 3.5
LEAST_GROWTH = 1.0
LEAST_NOISY = 3
COMMON = ("double", "single")
MOST_PIVOTS = 4
GRID = [Rational(1, 10**n) for n in range(2, 13)]
LARGEST_FLOAT = 1e300


@dataclass(frozen=True, slots=True)
class Noise:
    """An offset, the working precision, the rows in which noise shows, and those that show the offset alone."""

    delta: Rational
    uncertainty: Rational
    precision: float
    noisy: tuple[Given, ...]
    shows: tuple[Given, ...]
    misfit: float
    name: str = "double"
    gained: float = 0.0


@dataclass(frozen=True, slots=True)
class _Noisy:
    """A row, how far it is off, and the most and the least that cancellation leaves at precision 1."""

    row: Given
    rest: float
    most: float
    least: float
    order: int


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


def noise_profile(source: Source, charge: Charge) -> float:
    """B_k at the point where the source sits, nothing vanishing there."""
    weights = source.weights
    scale = max(abs(_float(x)) for x in _sizes(source)) * (1 + sum(charge))
    total = 0.0
    for configuration in configurations(source.setting.ranks, charge):
        value, loss = 1.0, 1.0
        for (c, _), exponent in weights.weight(configuration).factors().items():
            factor = abs(_float(only_rational(c)))
            if factor == 0.0:
                value = 0.0
                break
            value *= factor**exponent
            loss += abs(exponent) * (scale / factor) ** 2
        total += value * value * loss
    return min(sqrt(total), LARGEST_FLOAT)


def _sizes(source: Source) -> Iterator[Rational]:
    setting = source.setting
    for value in (setting.eps1, setting.eps2, *(x for node in setting.nodes for x in node.coulomb)):
        yield only_rational(value.constant)


def _float(value: Rational) -> float:
    return float(as_fraction(value))


def rounding(source: Source, quantity: Quantity, charge: Charge) -> float:
    """By how much a sum in double precision at the point of the source may be off where nothing is singular."""
    return CLEAN * PRECISIONS["double"] * _typical(source, quantity, charge, {})


def _typical(
    source: Source, quantity: Quantity, charge: Charge, known: dict[Charge, float], change: Change | None = None
) -> float:
    """The typical error of a coefficient of the quantity, in units of the working precision."""
    z: Series = source.z
    reach = noise_weights(quantity, z if change is None else change(z, source.setting), source.setting)
    total = 0.0
    for j in below(charge):
        factor = real_value(reach(minus(charge, j)))
        if change is not None:
            factor = _through(change, reach, source, j, charge)
        if factor is None or factor == 0:
            continue
        if j not in known:
            known[j] = noise_profile(source, j)
        total += abs(_float(factor)) * known[j]
    return total


def _through(change: Change, reach: Series, source: Source, j: Charge, charge: Charge) -> Rational | None:
    """How an error of Z at charge j reaches the quantity through a change, which is linear in Z."""
    response = change(lambda k: ONE if k == j else ZERO, source.setting)
    return real_value(sum((response(i) * reach(minus(charge, i)) for i in below(charge)), start=ZERO))


def precision_loss(
    question: Question,
    *,
    change: Change | None = None,
    words: tuple[str, ...] = (),
    tried: int = 0,
    way: Direction | None = None,
) -> Iterator[Explanation]:
    """The best noise that explains all rows, if any does. Only rational cases are asked.

    Where nothing cancels, noise of double precision on top of an offset makes it an offset. On top of another change
    there are ``words`` for it; ``change`` is what it does to Z, a change of the case is in the question. ``way`` is the
    direction of the offset, the first one of the case by default.
    """
    if question.source.weights.radicand or len(question.deviating) < 2:
        return
    orders = singular_orders(question)
    direction = next(directions(question.case, question.setting)) if way is None else way
    found: list[Noise] = []
    for delta, uncertainty in _deltas(question, direction, orders, change, shortened=bool(words)):
        noise = _noise(question, direction, delta, uncertainty, orders, change)
        if noise is not None and (not words or noise.gained >= LEAST_EVIDENCE + log10(tried)):
            found.append(noise)
            if noise.shows:
                break
    if found:
        yield _explanation(question, direction, min(found, key=lambda one: one.misfit), orders, words)


def _deltas(
    question: Question,
    direction: Direction,
    orders: dict[Charge, int],
    change: Change | None,
    *,
    shortened: bool,
) -> Iterator[tuple[Rational, Rational]]:
    """Offsets from the rows without singular weights, lowest charges first; else a grid of powers of ten.

    ``shortened``: a decimal of one digit or two that a row allows comes before what it says, as exactly known.
    """
    clean = [row for row in question.deviating if orders[row.charge] == 0]
    for row in sorted(clean, key=lambda one: sum(one.charge))[:MOST_PIVOTS]:
        solution = solved(question, direction, row, change)
        if solution is not None:
            if shortened:
                # Rounding moves a row by more than its last digits say.
                near = short_decimals(solution[0], solution[1] * int(CLEAN))
                yield from ((short, ZERO) for _, short in near)
            yield solution
    # Without a row that shows the offset the growth has to: in fewer rows than that nothing can be found.
    if not clean and sum(1 for row in question.rows if orders[row.charge] > 0) >= LEAST_NOISY:
        for delta in GRID:
            yield delta, ZERO


def _noise(
    question: Question,
    direction: Direction,
    delta: Rational,
    uncertainty: Rational,
    orders: dict[Charge, int],
    change: Change | None,
) -> Noise | None:
    """Do all rows agree with the sum at this offset and noise of one precision? None when they do not."""
    source = direction.at(delta)
    near = question.quantity.of(*offset_at(direction, delta, change))
    rests: list[float] = []
    profile: dict[Charge, float] = {}
    noisy: list[_Noisy] = []
    quiet: list[tuple[Given, float]] = []
    clean: list[Given] = []
    for row in question.rows:
        value = question.value(near, row)
        if value is None:
            return None
        rest, order = abs(row.value - value), orders[row.charge]
        rests.append(_float(max(rest, row.tolerance)))
        if order == 0:
            allowed = _float(row.tolerance)
            if _float(rest) > allowed and row.digits is not None and row.digits >= LEAST_DIGITS:
                typical = _typical(source, question.quantity, row.charge, profile, change)
                allowed += CLEAN * PRECISIONS["double"] * typical
            if _float(rest) > allowed:
                return None
            clean.append(row)
            continue
        most = _typical(source, question.quantity, row.charge, profile, change)
        if rest > row.tolerance:
            noisy.append(_Noisy(row, _float(rest), most, most * abs(_float(delta)) ** order, order))
        else:
            quiet.append((row, most * abs(_float(delta)) ** order))
    noise = _judged(question, delta, uncertainty, noisy, quiet, clean)
    return noise and replace(noise, gained=_gained(question, rests, fitted=int(uncertainty != 0)))


def _gained(question: Question, rests: list[float], *, fitted: int) -> float:
    """By how many digits the rows are nearer to the prediction than to the exact values, the best row where delta was
    fitted to it left out."""
    digits = sorted(
        log10(max(_float(abs(row.value - exact)), rest) / max(rest, 1e-300))
        for row, exact, rest in zip(question.rows, question.exact, rests, strict=True)
    )
    return sum(digits[: len(digits) - fitted])


def _judged(
    question: Question,
    delta: Rational,
    uncertainty: Rational,
    noisy: list[_Noisy],
    quiet: list[tuple[Given, float]],
    clean: list[Given],
) -> Noise | None:
    """Is it noise of one precision? In every noisy row it lies between the least and the most that cancellation leaves,
    and rows without it had no room for it (one by luck excepted)."""
    visible = tuple(row for row in clean if row in question.deviating)
    if not noisy:
        if len(visible) < 2 or quiet:
            return None
        return Noise(delta, uncertainty, PRECISIONS["double"], (), visible, 0.0)
    tops = [log10(one.rest / one.most) for one in noisy]
    for name, u in PRECISIONS.items():
        level = log10(u)
        top = max(tops)
        low = sum(1 for one in noisy if log10(one.rest / one.least) < level - LEAST_SPREAD)
        lucky = sum(1 for row, least in quiet if least * u > 10**SPREAD * max(_float(row.tolerance), 1e-300))
        if top - level > SPREAD or low + lucky > 1 or any(_too_good(row, u) for row in clean):
            continue
        # Without a row that shows the offset itself, or with an unusual precision, the growth must be clear.
        plain = visible and name == "double" and _clearly(question, visible)
        if plain or (name in COMMON and abs(top - level) <= SPREAD and _grows(question, noisy)):
            rows = tuple(one.row for one in noisy)
            return Noise(delta, uncertainty, u, rows, visible, abs(top - level), name)
    return None


def _too_good(row: Given, u: float) -> bool:
    """Is a row that has to agree given to more digits than this precision has?"""
    return any(row.charge) and bool(row.value != 0) and _float(row.tolerance) < u / 10 * _float(abs(row.value))


def _clearly(question: Question, rows: tuple[Given, ...]) -> bool:
    """Do these rows together deviate by a digit more than what was given allows?"""
    exact = {row.charge: value for row, value in zip(question.rows, question.exact, strict=True)}
    return sum(evidence(rows, [exact[row.charge] for row in rows])) >= LEAST_EVIDENCE


def _grows(question: Question, noisy: list[_Noisy]) -> bool:
    """Do three rows at least show noise, and the relative error rise with every further order that cancels?"""
    exact = {row.charge: value for row, value in zip(question.rows, question.exact, strict=True)}
    worst: dict[int, float] = {}
    for one in noisy:
        size = abs(_float(exact[one.row.charge])) or 1.0
        worst[one.order] = max(worst.get(one.order, 0.0), one.rest / size)
    errors = [worst[order] for order in sorted(worst)]
    steps = pairwise(errors)
    return len(noisy) >= LEAST_NOISY and len(errors) >= 2 and all(b >= a * 10**LEAST_GROWTH for a, b in steps)


def _explanation(
    question: Question, direction: Direction, noise: Noise, orders: dict[Charge, int], words: tuple[str, ...]
) -> Explanation:
    digits = floor(-log10(noise.precision) + 0.5)
    about = "about " if noise.uncertainty == 0 else ""
    change = direction.words.format(f"{about}{decimal_text(noise.delta, 3)}")
    parameters = (("offset", decimal_text(noise.delta, 6)), ("digits", str(digits)))
    also = f", and {' and '.join(words)}" if words else ""
    if not noise.noisy:
        sentence = (
            f"The numbers were taken at an offset: {change}{also}; the exact sum there gives all {len(question.rows)} "
            "rows but for the rounding of double precision."
        )
        return Explanation(
            "offset", question.quantity.name, sentence, changes=(change, *words), parameters=parameters,
            charges=question.charges, length=1 + len(words), fitted=1,
        )
    losses = ", ".join(
        f"{orders[row.charge]} at charge {','.join(str(k) for k in row.charge)}" for row in noise.noisy
    )
    sentence = (
        f"The numbers were summed in {noise.name} precision, about {digits} digits, at an offset, {change}, and the "
        f"cancellation of singular weights left noise: so many orders of the offset cancel, {losses}"
    )
    shown = len(noise.shows)
    if shown:
        rows = "the row without singular weights shows" if shown == 1 else f"{shown} rows without singular weights show"
        sentence += f"; {rows} the offset itself"
    if words:
        sentence += f"; on top of it {' and '.join(words)}"
    return Explanation(
        "precision-loss", question.quantity.name, f"{sentence}.", changes=(change, *words), parameters=parameters,
        charges=question.charges, length=1 + len(words), fitted=1,
    )
