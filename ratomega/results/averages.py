"""The result of ``ratomega average``: exact limits of averages, order by order, as a frozen value."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from ratomega.averages.limits import AverageLimit
from ratomega.diagrams.tuples import Charge
from ratomega.results.header import Header

__all__ = ["Average", "AverageResult"]


@dataclass(frozen=True, slots=True)
class Average:
    """One average, as a power series in the counting parameters: the coefficient at every charge."""

    name: str
    coefficients: tuple[AverageLimit, ...]

    def __getitem__(self, charge: int | Charge) -> AverageLimit:
        """The coefficient of one charge; ``KeyError`` when it was not computed."""
        wanted = (charge,) if isinstance(charge, int) else tuple(charge)
        for coefficient in self.coefficients:
            if coefficient.charge == wanted:
                return coefficient
        raise KeyError(charge)

    def __iter__(self) -> Iterator[AverageLimit]:
        return iter(self.coefficients)


@dataclass(frozen=True, slots=True)
class AverageResult:
    """The averages that were asked for. ``of`` is the observable; ``partial``: the run was interrupted."""

    header: Header
    of: str
    averages: tuple[Average, ...]
    partial: bool = False

    def __getitem__(self, name: str) -> Average:
        """The average of this name, such as "Y(x)", "Tr phi^2" or, of one node of several, "left: Y(x)"."""
        for average in self.averages:
            if average.name == name:
                return average
        raise KeyError(name)

    def __iter__(self) -> Iterator[Average]:
        return iter(self.averages)

    @property
    def exit_status(self) -> int:
        """0 all finite; 1 a pole or a path-dependent limit; 3 path-independence undecided."""
        found = [one for average in self.averages for one in average.coefficients]
        if any(one.status != "finite" for one in found):
            return 1
        return 3 if any(one.independence == "undecided" for one in found) else 0
