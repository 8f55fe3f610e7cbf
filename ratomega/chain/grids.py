"""From a case with symbols to values on a grid: what may be asked, by which way, and the rows.

case -> values of the symbols -> way -> functions of the symbols, or limits at the points -> H -> rows

Whatever the way, a value is that of the coefficient as a function of the symbols. A limit taken at the point itself is
the same where every component is compact, and only there the second way is taken.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace

from ratomega.case.case import Case
from ratomega.case.progression import Axes, Counting, points_of, read_axes, read_counting
from ratomega.case.reading import load_case
from ratomega.case.setting import Setting, own_setting, resonances
from ratomega.chain.job import MOST_CONFIGURATIONS, CaseSource, check_count, symbolic_path
from ratomega.chain.pipeline import limit
from ratomega.conformal.correlator import why_no_fields
from ratomega.conformal.nome import nome_matrix, nome_variable
from ratomega.diagrams.tuples import Charge, count_all
from ratomega.errors import InputError
from ratomega.exact.decimals import (
    Decimals,
    ball_decimals,
    ball_power_sum,
    decimal_value,
    decimals,
    enclosed,
    size_bound,
    upper_text,
)
from ratomega.exact.point_function import PointFunction
from ratomega.exact.quadratic import Number, is_quadratic, one_field, rational_parts
from ratomega.exact.rational import ONE, ZERO, Rational
from ratomega.exact.rational_function import RationalFunction
from ratomega.regulator.poles.problem import applies as poles_apply
from ratomega.regulator.routes import CLUSTERWISE, HIGHEST_POLE_CHARGE
from ratomega.results.grids import GridResult, GridRow
from ratomega.results.header import Header
from ratomega.symbolic.grid import choose_grid
from ratomega.symbolic.structure import Structure, primes_of, structure
from ratomega.validator.verdict import Check, Kind, Verdict
from ratomega.version import VERSION

__all__ = ["grid"]

MOST_ROWS = 200_000
MOST_DIGITS = 1_000
# Digits written in all, and digits that pass through exact arithmetic on the way to decimals.
MOST_WRITTEN = 50_000_000
MOST_WORKED = 500_000_000
# A limit beyond Q costs about as much as so many in Q.
BEYOND_Q = 4
# The pole recursion to charge K costs about as much as K^4 over this number of weights.
RECURSION_SHARE = 100
SPARE_BITS = 64
MOST_DOUBLINGS = 4

COLUMNS = ("charge", "value", "real", "imaginary", "radius", "sum", "note")
"""Names that a symbol cannot have beside the columns of a table."""

Value = Number | str
"""A coefficient at a point, or what is there instead."""
Evaluate = Callable[[Sequence[Number]], dict[Charge, Value]]


@dataclass(frozen=True, slots=True)
class _Asked:
    """A grid that was found to be in order. ``shapes`` belong to the highest charges."""

    case: Case
    points: tuple[tuple[Number, ...], ...]
    shapes: tuple[Structure, ...]
    nome: bool
    digits: int | None
    q: tuple[Counting, ...] | None
    allow_tilt: bool
    most_configurations: int

    @property
    def generic(self) -> tuple[Rational, ...]:
        """A point without anything special: a witness of a grid of one point."""
        single = [replace(shape, degrees=(0,) * len(shape.degrees)) for shape in self.shapes]
        return choose_grid(single, primes_of(self.case)).witnesses[0]

    def at(self, point: Sequence[Number]) -> Case:
        return self.case.at(**dict(zip(self.case.symbols, point, strict=True)))


def grid(
    source: CaseSource,
    at: Mapping[str, object],
    *,
    nome: bool = False,
    digits: int | None = None,
    q: object = None,
    allow_tilt: bool = True,
    most_configurations: int = MOST_CONFIGURATIONS,
) -> GridResult:
    """The coefficients of Z of a case with symbols at all points of a grid, as values to compute with.

    ``at`` gives the values of every symbol: "0 to 2*i in 41", "0 to 3 by 1/8", or a list, as text or of exact numbers;
    several symbols make a product. ``nome`` takes H in place of Z, for U(2) with four flavours or one adjoint.
    Values are exact; with ``digits`` they are decimals with a rigorous radius. ``q``, an exact number or text such as
    "0.6914 +/- 1e-4" (one, or one a node), asks for the partial sum at every point: of Z in q, of H in 16 q_e (on the
    torus in q). A pole at a point is a row without a value and with a note.

    Raises ``InputError`` for bad input, and before any work for what is too much. Cost: that of ``limit`` for functions
    or, for a few points without resonance, for as many limits; then some microseconds a value.

    >>> case = {"charge": 1, "symbols": ["a"], "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["a", "-a"]}]}
    >>> found = grid(case, at={"a": "0 to i in 3"})             # 1/(2 (1 - a^2))
    >>> [str(row.value) for row in found[1]]
    ['1/2', '2/5', '1/4']
    >>> [str(row.value or row.note) for row in grid(case, at={"a": [1, "1/3"]})[1]]
    ['pole of order 1', '9/16']
    """
    case = load_case(source)
    axes = read_axes(at, _symbols(case), case.background)
    counting = None if q is None else read_counting(q, len(case.theory.nodes), case.background)
    _check_size(case, axes, digits, counting)
    if case.theory.ranks != (2,) or case.bounds[0] > HIGHEST_POLE_CHARGE:
        check_count(case, most_configurations)
    shapes = tuple(structure(case, charge) for charge in _highest(case))
    _check_digits(case, axes, shapes, digits, counting)
    numbers = [x for _, parameter in case.theory.parameters() for x in parameter.numbers()]
    points = tuple(points_of(axes, case.symbols, numbers))
    asked = _Asked(case, points, shapes, nome, digits, counting, allow_tilt, most_configurations)
    setting = own_setting(asked.at(asked.generic), allow_tilt=allow_tilt)
    reason = why_no_fields(setting) if nome else ""
    if reason:
        raise InputError.single(reason, "nome")
    way, why = _way(asked)
    evaluate, checks = _by_functions(asked) if way == "functions" else _by_points(asked)
    rows = tuple(row for point in points for row in _rows(asked, point, evaluate(point)))
    of, variable = ("H", nome_variable(case)) if nome else ("Z", "q")
    return GridResult(_header(case, setting), of, variable, axes, digits, counting, way, why, rows, checks)


# ---- what may be asked ----


def _symbols(case: Case) -> tuple[str, ...]:
    if not case.symbols:
        raise InputError.single(
            'a grid runs over free parameters, and this case has none; name one, for example symbols = ["a"], and use '
            'it, for example coulomb = ["a", "-a"]',
            "symbols",
        )
    for name in case.symbols:
        if name in COLUMNS:
            raise InputError.single(f"{name} is a column of the table; give the symbol another name", "symbols")
    return case.symbols


def _check_size(case: Case, axes: Axes, digits: int | None, counting: Sequence[Counting] | None) -> None:
    """Refuse too many rows or digits, or a ball without digits."""
    points = math.prod(map(len, axes))
    rows = points * len(case.charges)
    if rows > MOST_ROWS:
        message = f"{points} points at {len(case.charges)} charges are {rows} values, more than {MOST_ROWS}"
        raise InputError.single(f"{message}; take fewer points or a lower charge", "at")
    if digits is not None and not (isinstance(digits, int) and not isinstance(digits, bool)):
        raise InputError.single(f"the number of digits is an integer, not {type(digits).__name__}", "digits")
    if digits is not None and not 1 <= digits <= MOST_DIGITS:
        raise InputError.single(f"the number of digits is between 1 and {MOST_DIGITS}, not {digits}", "digits")
    if digits is None and counting is not None and any(one.radius for one in counting):
        raise InputError.single("q is known to a radius, so the sums are decimals; say to how many digits", "digits")
    if digits is None and counting is not None:
        for one in counting:
            for axis in axes:
                for value in axis:
                    _same_field(one.value, value)


def _same_field(q: Number, value: Number) -> None:
    try:
        one_field((q, value))
    except InputError as error:
        message = f"q = {q} and {value} lie in two quadratic fields, where an exact sum has no place; ask for digits"
        raise InputError.single(message, "q") from error


def _highest(case: Case) -> tuple[Charge, ...]:
    """The charges with the highest total: what holds for lower ones, holds for one of them."""
    most = max(map(sum, case.charges))
    return tuple(charge for charge in case.charges if sum(charge) == most)


def _length(number: Number) -> int:
    return max(max(int(x.p).bit_length(), int(x.q).bit_length()) for x in rational_parts(number)) * 3 // 10 + 1


def _check_digits(
    case: Case,
    axes: Axes,
    shapes: Sequence[Structure],
    digits: int | None,
    counting: Sequence[Counting] | None,
) -> None:
    """Refuse what would be too long, from the degrees of the functions and the length of the numbers."""
    longest = [max(map(_length, axis)) for axis in axes]
    points = math.prod(map(len, axes))
    values = points * len(case.charges)
    degrees = [max(each) for each in zip(*(shape.degrees for shape in shapes), strict=True)]
    work = sum(2 * (degree + 1) * length for degree, length in zip(degrees, longest, strict=True))
    if counting is not None:
        work += sum(k * _length(one.value) for k, one in zip(case.bounds, counting, strict=True))
    work *= values
    most = MOST_WRITTEN if digits is None else MOST_WORKED
    if work > most:
        cure = "ask for digits, or take" if digits is None else "take"
        message = f"exact values at these points have some {work} digits in all, more than {most}"
        raise InputError.single(f"{message}; {cure} fewer points, shorter numbers or a lower charge", "at")
    if digits is not None and digits * values > MOST_WRITTEN:
        message = f"{values} values to {digits} digits are more than {MOST_WRITTEN} digits in all"
        raise InputError.single(message, "digits")


def _header(case: Case, setting: Setting) -> Header:
    warnings = (f"the Coulomb parameters were tilted: {setting.text()}",) if setting.tilted else ()
    return Header(VERSION, case, symbolic_path(case, setting), case.hash, warnings)


# ---- by which way ----


def _way(asked: _Asked) -> tuple[str, str]:
    """A fixed rule: limits at the points when they are fewer than interpolation asks for, and not too much work, and
    none is a resonance."""
    needed = max(math.prod(shape.nodes) for shape in asked.shapes)
    number, beyond_q = len(asked.points), sum(1 for point in asked.points if any(map(is_quadratic, point)))
    weight = number + (BEYOND_Q - 1) * beyond_q
    told = f"{number} point{'s' if number > 1 else ''}" + (f", counted as {weight}" if weight != number else "")
    if weight > needed:
        return "functions", f"{told}, more than the {needed} limits from which functions would be interpolated"
    if _limit_work(asked, beyond_q) > asked.most_configurations:
        return "functions", f"limits at {told} would take the work of more than {asked.most_configurations} weights"
    for point in asked.points:
        if any(True for _ in resonances(own_setting(asked.at(point)), asked.case.bounds)):
            where = ", ".join(f"{name} = {x}" for name, x in zip(asked.case.symbols, point, strict=True))
            return "functions", f"not every component is compact at {where}, where a function has its own value"
    return "points", f"{told}, no more than the {needed} limits from which functions would be interpolated"


def _by_functions(asked: _Asked) -> tuple[Evaluate, tuple[Check, ...]]:
    found = limit(asked.case, allow_tilt=asked.allow_tilt, most_configurations=asked.most_configurations)
    functions: dict[Charge, RationalFunction] = {}
    for one in found:
        assert isinstance(one.value, RationalFunction)
        functions[one.charge] = one.value
    if asked.nome:
        functions = _combined(nome_matrix(asked.case, asked.case.bounds[0]), functions)
    prepared = {charge: PointFunction(function) for charge, function in functions.items()}
    return lambda point: {charge: one.at(point) for charge, one in prepared.items()}, found.checks


def _combined(
    rows: Sequence[Sequence[RationalFunction]], z: Mapping[Charge, RationalFunction]
) -> dict[Charge, RationalFunction]:
    found: dict[Charge, RationalFunction] = {}
    for k, row in enumerate(rows):
        total = row[0] * z[0,]
        for j in range(1, k + 1):
            total = total + row[j] * z[j,]
        found[k,] = total
    return found


def _by_points(asked: _Asked) -> tuple[Evaluate, tuple[Check, ...]]:
    case = asked.case
    matrix = [list(map(PointFunction, row)) for row in nome_matrix(case, case.bounds[0])] if asked.nome else []

    def evaluate(point: Sequence[Number]) -> dict[Charge, Value]:
        done = limit(asked.at(point), probes=0, most_configurations=asked.most_configurations)
        z: dict[Charge, Number] = {}
        for one in done:
            assert one.value is not None
            assert not isinstance(one.value, RationalFunction)
            z[one.charge] = one.value
        if not asked.nome:
            return dict(z)
        found: dict[Charge, Value] = {}
        for k, row in enumerate(matrix):
            total: Number = ZERO
            for j, entry in enumerate(row):
                factor = entry.at(point)
                assert not isinstance(factor, str), "the entries are polynomials"
                total = total + factor * z[j,]
            found[k,] = total
        return found

    return evaluate, (_points_check(asked),)


def _limit_work(asked: _Asked, beyond_q: int) -> int:
    """About how many weights the limits at all points are worth, ``beyond_q`` of the points not rational."""
    case = asked.case
    count = rational = count_all(case.theory.ranks, case.charge)
    if count > CLUSTERWISE and isinstance(case.charge, int) and not poles_apply(asked.at(asked.generic)).reason:
        rational = min(count, case.charge**4 // RECURSION_SHARE)
    return (len(asked.points) - beyond_q) * rational + BEYOND_Q * beyond_q * count


def _points_check(asked: _Asked) -> Check:
    evidence = (
        f"at none of the {len(asked.points)} points a difference of Coulomb parameters equals m*eps1 + n*eps2 with "
        "m, n >= 1, m*n <= charge: every component is compact, so the limits are the same on every path, and are the "
        "values of the coefficients as functions of the symbols"
    )
    source = (
        "fixed-point localisation on compact components: N. Nekrasov, arXiv hep-th/0206161; H. Nakajima, K. Yoshioka, "
        "arXiv math/0306198"
    )
    return Check("limits at the points", Verdict.PROVED, Kind.THEOREM, evidence, source)


# ---- the rows ----


def _rows(asked: _Asked, point: tuple[Number, ...], values: Mapping[Charge, Value]) -> Iterator[GridRow]:
    if asked.q is not None:
        yield _sum_row(asked, point, values, asked.q)
        return
    for charge, value in values.items():
        if isinstance(value, str):
            yield GridRow(point, charge, None, None, None, value)
        elif asked.digits is None:
            yield GridRow(point, charge, value, None, None, "")
        else:
            yield GridRow(point, charge, None, decimals(value, asked.digits), None, "")


def _sum_row(
    asked: _Asked, point: tuple[Number, ...], values: Mapping[Charge, Value], counting: Sequence[Counting]
) -> GridRow:
    known: list[tuple[Number, Charge]] = []
    for charge, value in values.items():
        if isinstance(value, str):
            where = charge[0] if len(charge) == 1 else charge
            return GridRow(point, None, None, None, None, f"charge {where}: {value}")
        known.append((value, charge))
    last = _last_terms(asked.case, known, counting)
    exact = _exact_sum(point, known, counting)
    if asked.digits is None:
        assert exact is not None, "fields were compared before"
        return GridRow(point, None, exact, None, last, "")
    shown = decimals(exact, asked.digits) if exact is not None else _ball_sum(known, counting, asked.digits)
    return GridRow(point, None, None, shown, last, "")


def _exact_sum(
    point: Sequence[Number], known: Sequence[tuple[Number, Charge]], counting: Sequence[Counting]
) -> Number | None:
    """The sum, where all numbers are exact and of one field; else None."""
    try:
        one_field((*point, *(one.value for one in counting)))
    except InputError:
        return None
    if any(one.radius for one in counting):
        return None
    highest = [max(charge[n] for _, charge in known) for n in range(len(counting))]
    powers = [_powers(one.value, most) for one, most in zip(counting, highest, strict=True)]
    total: Number = ZERO
    for value, charge in known:
        for power, k in zip(powers, charge, strict=True):
            value = value * power[k]
        total = total + value
    return total


def _powers(base: Number, most: int) -> list[Number]:
    powers: list[Number] = [ONE]
    for _ in range(most):
        powers.append(powers[-1] * base)
    return powers


def _ball_sum(known: Sequence[tuple[Number, Charge]], counting: Sequence[Counting], digits: int) -> Decimals:
    """The sum in balls. Where q is exact the precision grows until the digits asked for are there."""
    bits = 4 * digits + SPARE_BITS
    for _ in range(MOST_DOUBLINGS):
        ball = ball_power_sum(known, [enclosed(one.value, one.radius, bits) for one in counting])
        shown = ball_decimals(ball, digits)
        size = max(abs(decimal_value(part)) for part in (shown.real, shown.imaginary))
        if any(one.radius for one in counting) or decimal_value(shown.radius) * Rational(10) ** (digits - 1) <= size:
            break
        bits *= 2
    return shown


def _last_terms(case: Case, known: Sequence[tuple[Number, Charge]], counting: Sequence[Counting]) -> str:
    """A bound on the sizes of the terms of the last two charges: of one alone, it may vanish by a symmetry."""
    variables = [enclosed(one.value, one.radius, SPARE_BITS) for one in counting]
    total = ZERO
    for value, charge in known:
        if _is_last(case, charge):
            total += size_bound(ball_power_sum([(value, charge)], variables))
    return upper_text(total)


def _is_last(case: Case, charge: Charge) -> bool:
    if isinstance(case.charge, int):
        return sum(charge) >= case.charge - 1
    return any(bound and k >= bound - 1 for k, bound in zip(charge, case.charge, strict=True))
