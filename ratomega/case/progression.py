"""Values of free parameters as they are typed: "0 to 2*i in 41", "1/7 to 3 by 1/7", "1/3, i/2, eps1/4"; and products.

A number is exact, rational or of one quadratic field; eps1 and eps2 stand for their values at the limit point. How many
values there would be is known before any is made. A counting parameter is such a number, or one known to a radius.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import product

from ratomega.case.background import Background
from ratomega.case.expression import MOST_DIGITS, as_affine
from ratomega.case.wording import kind, nearest, quoted
from ratomega.errors import InputError, Problem
from ratomega.exact.path import Linear
from ratomega.exact.quadratic import Number, Quadratic, is_quadratic, number_text, one_field, rational_parts
from ratomega.exact.rational import ZERO, Rational, as_rational

__all__ = ["MOST_VALUES", "Axes", "Counting", "points_of", "read_axes", "read_counting", "split_axis"]

MOST_VALUES = 20_000
LONGEST_TEXT = 1_000_000

Axes = tuple[tuple[Number, ...], ...]
"""The values of every symbol, in the order of the symbols."""

_COUNT = re.compile(r"[0-9]{1,9}")
_FORMS = 'write "START to STOP in N", "START to STOP by STEP", or values with commas between them'


@dataclass(frozen=True, slots=True)
class Counting:
    """A value of a counting parameter: an exact number, and how far the true one may be from it in each part."""

    value: Number
    radius: Rational = ZERO


def split_axis(text: str) -> tuple[str, str]:
    """The symbol and its values from "a = 0 to 2*i in 41".

    >>> split_axis("a = 0 to 2*i in 41")
    ('a', '0 to 2*i in 41')
    """
    name, equals, values = text.partition("=")
    if not equals or not name.strip():
        message = f'{quoted(text)} names no symbol; write for example "a = 0 to 2*i in 41"'
        raise InputError.single(message, "at")
    return name.strip(), values.strip()


def read_axes(given: Mapping[str, object], symbols: Sequence[str], background: Background) -> Axes:
    """The values of every symbol. Raises ``InputError`` with every mistake: unknown symbols, symbols without values,
    what cannot be read, too many values, a value that is listed twice.
    """
    problems = []
    if not isinstance(given, Mapping):
        message = f'values are given by symbol, such as {{"a": "0 to 2*i in 41"}}, not as {kind(given)}'
        raise InputError.single(message, "at")
    for name in given:
        if name not in symbols:
            hint = nearest(str(name), symbols) or f"; the symbols are {', '.join(symbols)}"
            problems.append(Problem(f"there is no symbol {quoted(str(name))}{hint}", "at"))
    axes: list[tuple[Number, ...]] = []
    for name in symbols:
        if name not in given:
            message = f'no values are given for {name}; write for example "{name} = 0 to 2*i in 41"'
            problems.append(Problem(message, "at"))
            continue
        try:
            axes.append(_axis(given[name], f"at.{name}", background))
        except InputError as error:
            problems += error.problems
    if problems:
        raise InputError(problems)
    return tuple(axes)


def points_of(axes: Axes, symbols: Sequence[str], numbers: Sequence[Number] = ()) -> Iterator[tuple[Number, ...]]:
    """The product of the axes, the last one fastest. Raises ``InputError`` where a point does not lie in one field with
    the ``numbers`` of the case."""
    for point in product(*axes):
        try:
            one_field((*numbers, *point))
        except InputError as error:
            shown = ", ".join(f"{name} = {number_text(x)}" for name, x in zip(symbols, point, strict=True))
            own = ", that of the case" if any(is_quadratic(x) for x in numbers) else ""
            message = f"{shown}: the numbers of one point lie in one quadratic field{own}"
            raise InputError.single(message, "at") from error
        yield point


def read_number(value: object, where: str, background: Background) -> Number:
    """One exact number; text may hold eps1 and eps2, i and sqrt(d)."""
    read = as_affine(value, symbols=("eps1", "eps2"), where=where)
    number = read.on(Linear(background.eps1.constant), Linear(background.eps2.constant)).constant
    return _short(number, where)


def read_counting(given: object, nodes: int, background: Background) -> tuple[Counting, ...]:
    """The counting parameters, one a node; a single one stands for all. Raises ``InputError``.

    >>> from ratomega.case.affine import Affine
    >>> b1 = Background.make(Affine(Rational(1)), Affine(Rational(1)))
    >>> read_counting("0.6914 +/- 1e-4", 1, b1)
    (Counting(value=3457/5000, radius=1/10000),)
    """
    if isinstance(given, str):
        given = given.split(",")
    parts = list(given) if isinstance(given, (list, tuple)) else [given]
    if len(parts) not in (1, nodes):
        raise InputError.single(f"q has one value, or one a node: {nodes} expected, {len(parts)} given", "q")
    read = [_counting(part, background) for part in parts]
    return tuple(read * nodes if len(read) == 1 else read)


def _counting(given: object, background: Background) -> Counting:
    if isinstance(given, str) and "+-" in "".join(given.split()):
        message = f'{quoted(given)} has the signs + and - side by side; a radius is written "+/-"'
        raise InputError.single(message, "q")
    if not isinstance(given, str) or "+/-" not in given:
        return Counting(read_number(given, "q", background))
    # A real ball as flint prints it has brackets around it, and no middle where no digit of it is known.
    middle, _, around = given.strip().removeprefix("[").removesuffix("]").partition("+/-")
    radius = as_rational(around, "q")
    if radius < 0:
        raise InputError.single(f"the radius of {quoted(given)} is below zero", "q")
    return Counting(read_number(middle if middle.strip() else "0", "q", background), radius)


def _short(number: Number, where: str) -> Number:
    if any(max(abs(x.p), x.q) >= 10**MOST_DIGITS for x in rational_parts(number)):
        raise InputError.single(f"a value has more than {MOST_DIGITS} digits, the most that is taken", where)
    return number


def _axis(given: object, where: str, background: Background) -> tuple[Number, ...]:
    if isinstance(given, str):
        if len(given) > LONGEST_TEXT:
            raise InputError.single(f"a list of values has at most {LONGEST_TEXT} characters", where)
        words = given.split()
        if "to" in words:
            return _progression(words, where, background)
        given = given.split(",")
        if any(not part.strip() for part in given):
            raise InputError.single(f"a value is missing; {_FORMS}", where)
    if not isinstance(given, Sequence) or isinstance(given, (bytes, bytearray)):
        raise InputError.single(f"values are text or a list, not {kind(given)}; {_FORMS}", where)
    _check_count(len(given), where)
    values = tuple(read_number(value, f"{where}[{n}]", background) for n, value in enumerate(given, 1))
    seen: dict[Number, int] = {}
    for n, value in enumerate(values, 1):
        if seen.setdefault(value, n) != n:
            raise InputError.single(f"{number_text(value)} is listed twice", f"{where}[{n}]")
    return values


def _check_count(number: int, where: str) -> None:
    if not 1 <= number <= MOST_VALUES:
        raise InputError.single(f"between 1 and {MOST_VALUES} values are taken, not {number}", where)


def _progression(words: Sequence[str], where: str, background: Background) -> tuple[Number, ...]:
    middle = words.index("to")
    how = next((n for n, word in enumerate(words) if n > middle and word in ("in", "by")), None)
    if how is None:
        message = f"{quoted(' '.join(words))} does not say how many values there are; {_FORMS}"
        raise InputError.single(message, where)
    first, second, last = (" ".join(part) for part in (words[:middle], words[middle + 1 : how], words[how + 1 :]))
    start, stop = (read_number(text, where, background) for text in (first, second))
    if start == stop:
        raise InputError.single(f"the values begin and end at {number_text(start)}", where)
    _check_field(where, start, stop)
    if words[how] == "in":
        number = int(last) if _COUNT.fullmatch(last) else 0
        if number < 2:
            message = f"{quoted(last)} is no number of values; it is an integer, 2 or more"
            raise InputError.single(message, where)
        steps = number - 1
    else:
        steps = _steps(start, stop, read_number(last, where, background), where)
    _check_count(steps + 1, where)
    step = (stop - start) * Rational(1, steps)
    return tuple(_short(start + step * n, where) for n in range(steps + 1))


def _steps(start: Number, stop: Number, step: Number, where: str) -> int:
    """How many steps lead from start to stop."""
    if step == 0:
        raise InputError.single("the step is zero", where)
    _check_field(where, start, stop, step)
    ratio = (stop - start) / step
    words = f"steps of {number_text(step)} from {number_text(start)} do not lead to {number_text(stop)}"
    if isinstance(ratio, Quadratic) or ratio < 0:
        raise InputError.single(words, where)
    if ratio.q != 1:
        below = start + step * Rational(ratio.p // ratio.q)
        raise InputError.single(f"{words}; the last value before it is {number_text(below)}", where)
    return int(ratio.p)


def _check_field(where: str, *values: Number) -> None:
    """Raises ``InputError`` when the numbers of a progression lie in two fields."""
    try:
        one_field(values)
    except InputError as error:
        shown = ", ".join(number_text(value) for value in values)
        raise InputError.single(f"{shown} do not lie in one quadratic field", where) from error
