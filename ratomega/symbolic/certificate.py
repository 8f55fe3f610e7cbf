"""What stands for a coefficient that is a function: how it was found, and the points at which it was confirmed."""

from __future__ import annotations

from collections.abc import Sequence

from ratomega.symbolic.functions import SymbolicCharge
from ratomega.symbolic.grid import Point
from ratomega.validator.finiteness import charge_text
from ratomega.validator.verdict import Check, Kind, Verdict

__all__ = ["check_functions", "point_text"]

_NAME = "functions of the symbols"
_SOURCE = (
    "poles and growth of Z: N. Nekrasov, arXiv hep-th/0206161; H. Nakajima, K. Yoshioka, arXiv math/0306198; "
    "values: the same limits at further points"
)

_POLE_SOURCE = (
    "pole recursion: Al. Zamolodchikov 1984, 1987; R. Poghossian, arXiv 0909.3412; values: the limits of the sum over "
    "diagrams"
)


def point_text(symbols: Sequence[str], point: Point) -> str:
    return ", ".join(f"{name} = {value}" for name, value in zip(symbols, point, strict=True))


def check_functions(symbols: Sequence[str], found: Sequence[SymbolicCharge]) -> Check:
    """Every function equals the exact limit at points that were not used to find it."""
    for one in found:
        if one.refuted:
            evidence = (
                f"{charge_text(one.charge)}: the function differs from the limit at "
                f"{point_text(symbols, one.refuted[0])}: this is an error of the program, please report it"
            )
            return Check(_NAME, Verdict.REFUTED, Kind.CONSISTENCY, evidence, _SOURCE)
    most = max((one.points for one in found), default=0)
    primes = max((one.primes for one in found), default=0)
    way = (
        f"interpolated from at most {most} exact limits at points where every component is compact, with the "
        "denominators and degrees that theory gives"
        if most
        else "from the partial fractions of the pole recursion in (a1 - a2)^2, "
        + (f"found modulo {primes} primes" if primes else "found in exact series")
        + "; no limit was taken for that"
    )
    beside = "; ".join(point_text(symbols, point) for point in (found[0].confirmed if found else ()))
    evidence = f"{way}; equal to limits of the sum over diagrams at points not used: {beside}"
    return Check(_NAME, Verdict.AGREES, Kind.CONSISTENCY, evidence, _SOURCE if most else _POLE_SOURCE)
