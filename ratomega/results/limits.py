"""The result of ``ratomega limit``: exact coefficients, how they were found, and their certificate."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from ratomega.diagrams.tuples import Charge
from ratomega.exact.quadratic import Number
from ratomega.exact.rational_function import RationalFunction
from ratomega.regulator.outcome import PathValue
from ratomega.results.header import Header, exit_status_of
from ratomega.validator.verdict import Check

__all__ = ["Coefficient", "LimitResult", "RouteRecord"]


@dataclass(frozen=True, slots=True)
class Coefficient:
    """Z at one charge.

    ``status`` is "finite" (then ``value``), "pole" (then ``order`` and ``leading``) or "path-dependent" (then
    ``values``, the case's own path first). ``independence`` is "theorem", "agreement" (of probed paths), "undecided"
    (none was probed), or None where paths differ. ``terms`` are (power of t, coefficient) on the own path.

    The counts are None where no weight was looked at, on the short cuts of ``routes``.
    In a case with symbols ``value`` is a ``RationalFunction`` of them, the limit is finite by theorem away from its
    poles, and the counts belong to a generic point.
    """

    charge: Charge
    status: str
    value: Number | RationalFunction | None
    order: int
    leading: Number | None
    values: tuple[PathValue, ...]
    independence: str | None
    terms: tuple[tuple[int, Number], ...] | None
    configurations: int | None
    singular: int | None
    indeterminate: int | None
    worst_order: int | None
    clusters: int | None
    singular_clusters: int | None


@dataclass(frozen=True, slots=True)
class RouteRecord:
    """How the coefficients were found.

    ``route`` is "direct" or "poles". ``method`` is "exact", "residues" (put together from residues modulo ``primes``
    primes; every coefficient is confirmed by ``spare_bits`` at least), or "proved" (residues beyond a proved bound).
    """

    route: str
    method: str
    why: str
    spare_bits: int | None
    primes: int


@dataclass(frozen=True, slots=True)
class LimitResult:
    """The exact coefficients and their certificate. ``partial``: the run was interrupted, finished charges are here."""

    header: Header
    route: RouteRecord
    coefficients: tuple[Coefficient, ...]
    checks: tuple[Check, ...]
    partial: bool = False

    def __getitem__(self, charge: int | Charge) -> Coefficient:
        """The coefficient of one charge; ``KeyError`` when it was not computed."""
        wanted = (charge,) if isinstance(charge, int) else tuple(charge)
        for coefficient in self.coefficients:
            if coefficient.charge == wanted:
                return coefficient
        raise KeyError(charge)

    def __iter__(self) -> Iterator[Coefficient]:
        return iter(self.coefficients)

    @property
    def exit_status(self) -> int:
        """0 all finite; 1 a pole or a path-dependent limit; 3 finiteness or path-independence undecided."""
        if any(c.status != "finite" for c in self.coefficients):
            return 1
        return exit_status_of(self.checks)
