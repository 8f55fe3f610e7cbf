"""Where the limits are taken: a grid of small rational numbers that avoids every pole, and points beside it.

The values of one symbol are j/p with a prime p of its own that occurs in no number of the case, and j not divisible by
p: no factor with the symbol vanishes there by accident, in a numerator neither. That no denominator does is checked
besides, and other primes are taken where one should.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import count, product

from ratomega.errors import InputError
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ONE, Rational
from ratomega.symbolic.structure import Plane, Structure

__all__ = ["Grid", "Point", "choose_grid", "plane_value"]

Point = tuple[Rational, ...]

_PRIMES = (3, 5, 7, 11, 13, 17, 19, 23, 29, 31, 37, 41, 43, 47, 53, 59, 61, 67, 71, 73, 79, 83, 89, 97)
WITNESSES = 2


@dataclass(frozen=True, slots=True)
class Grid:
    """Values of every symbol for the highest charge (a lower charge takes the first of them), and points beside.

    ``witnesses`` are points of which no coordinate is on the axes: functions are confirmed there.
    """

    axes: tuple[tuple[Rational, ...], ...]
    witnesses: tuple[Point, ...]


def plane_value(plane: Plane, point: Sequence[Rational]) -> Number:
    value: Number = ONE * plane[0]
    for c, x in zip(plane[1:], point, strict=True):
        value = value + c * x
    return value


def choose_grid(structures: Sequence[Structure], avoid: int = 1) -> Grid:
    """A grid on which no denominator of any of the charges vanishes, with its witnesses; no prime divides ``avoid``."""
    sizes = [max(each) for each in zip(*(s.nodes for s in structures), strict=True)]
    even = structures[0].even
    planes = {plane for s in structures for plane, _ in s.planes}
    number = len(sizes)
    usable = [p for p in _PRIMES if avoid % p]
    for start in range(len(usable) - 2 * number + 1):
        primes, others = usable[start : start + number], usable[start + number : start + 2 * number]
        axes = tuple(_axis(size, p, e) for size, p, e in zip(sizes, primes, even, strict=True))
        witnesses = tuple(tuple(n + Rational(1, p) for p in others) for n in range(1, 1 + WITNESSES))
        points = (*product(*axes), *witnesses)
        if all(plane_value(plane, point) != 0 for plane in planes for point in points):
            return Grid(axes, witnesses)
    raise InputError.single(
        "no grid of small numbers was found that avoids all poles in the symbols; rescale all parameters", "symbols"
    )


def _axis(size: int, prime: int, even: bool) -> tuple[Rational, ...]:
    return tuple(x for x, _ in zip(_values(prime, even), range(size), strict=False))


def _values(prime: int, even: bool) -> Iterator[Rational]:
    for j in count(1):
        if j % prime:
            yield Rational(j, prime)
            if not even:
                yield Rational(-j, prime)


def denominator_value(planes: Sequence[tuple[Plane, int]], point: Sequence[Rational]) -> Number:
    """The product of all linear factors at a point; zero only on a pole."""
    value: Number = ONE
    for plane, times in planes:
        value = value * plane_value(plane, point) ** times
    return value
