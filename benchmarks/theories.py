"""The theories that the benchmarks run on, once as cases and once as the plain reference takes them."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from ratomega.diagrams.tuples import count_all
from ratomega.exact.rational import Rational
from ratomega.results.limits import LimitResult

NON_SINGULAR = "103/71"


@dataclass(frozen=True, slots=True)
class Theory:
    """One gauge node; eps1 = 1, so that eps2 is the ratio."""

    name: str
    coulomb: tuple[str, ...]
    flavours: tuple[str, ...] = ()

    def case(self, charge: int, eps2: str, eps1: str = "1") -> dict[str, Any]:
        node = {"coulomb": list(self.coulomb), "antifundamental": list(self.flavours)}
        return {"charge": charge, "background": {"eps1": eps1, "eps2": eps2}, "node": [node]}

    def plain(self, eps1: Any, eps2: Any, number: Callable[[str], Any] | None = None) -> dict[str, Any]:
        """The dictionary that tests/plain.py reads, its parameters turned into numbers by ``number``."""
        turn = rational if number is None else number
        node = {"coulomb": [turn(a) for a in self.coulomb], "antifundamental": [turn(m) for m in self.flavours]}
        return {"eps1": eps1, "eps2": eps2, "nodes": [node], "edges": []}

    def configurations(self, charge: int) -> int:
        return int(count_all([len(self.coulomb)], charge))


def rationals(result: LimitResult) -> list[Rational]:
    """The coefficients of a case without symbols and irrational numbers. Raises ``TypeError`` for any other."""
    values = []
    for coefficient in result:
        if not isinstance(coefficient.value, Rational):
            raise TypeError(f"{coefficient.value} is not rational")
        values.append(coefficient.value)
    return values


def rational(text: str) -> Rational:
    """
    >>> rational("-3/11")
    -3/11
    """
    return Rational(*[int(part) for part in text.split("/")])


TWO = ("3/11", "-3/11")
FOUR_MASSES = ("1/3", "2/5", "3/7", "1/2")
PURE = Theory("U(2), no matter", TWO)
FLAVOURED = Theory("U(2), four flavours", TWO, FOUR_MASSES)
THREE = Theory("U(3), no matter", ("3/13", "-5/17", "1/7"))


def at(theory: Theory, ratio: str) -> str:
    """How a row names its case."""
    return f"{theory.name}, ratio {ratio}"
