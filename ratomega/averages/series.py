"""Averages as power series in the counting parameters, each coefficient a Laurent series in t.

The average is (sum over configurations of weight times observable)/Z. Observables depend on t through the contents,
and singular weights multiply them: both are expanded, to exactly the depth that the order of the weight asks for.

Where poles survive in the sums, their coefficients at positive powers of t enter into the quotient. So the depth is
raised until the average is known up to t^0; a quotient gains as many powers as its parts.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from typing import Generic, Protocol, TypeVar

from ratomega.diagrams.tuples import Charge, Configuration, configurations
from ratomega.exact.laurent import Laurent
from ratomega.regulator.direct import direct_total
from ratomega.weights import Weights

__all__ = ["AverageSeries", "Observables", "Sums", "minus", "number_averages", "sub_charges", "sums_of"]

Observables = Callable[[Configuration, int], Sequence[Laurent]]
"""The values of several observables on a configuration, with all powers of t up to the second argument."""

Sums = Callable[[Charge, int], Sequence[Laurent]]
"""Sums of weight times observable at a charge, with all powers of t up to the second argument."""


class Known(Protocol):
    """A series in t that is known up to, not including, a power."""

    @property
    def precision(self) -> int: ...


Series = TypeVar("Series", bound=Known)


def minus(one: Charge, other: Charge) -> Charge | None:
    """The difference of two charges; None when an entry is negative.

    >>> minus((2, 1), (1, 1)), minus((1, 1), (2, 0))
    ((1, 0), None)
    """
    found = tuple(a - b for a, b in zip(one, other, strict=True))
    return None if any(k < 0 for k in found) else found


def sub_charges(charge: Charge) -> Iterator[Charge]:
    """All charges with no entry beyond those of ``charge``; 0 first, ``charge`` last."""
    if not charge:
        yield ()
        return
    for first in range(charge[0] + 1):
        for rest in sub_charges(charge[1:]):
            yield (first, *rest)


def sums_of(weights: Weights, observables: Observables, *, count: int) -> Sums:
    """The sums over all configurations of a charge of weight times each of ``count`` observables.

    A weight of order p starts at t^-p, so its observables are needed up to t^(p + last).
    """

    def sums(charge: Charge, last: int) -> Sequence[Laurent]:
        found = [Laurent.zero(precision=last + 1)] * count
        for configuration in configurations(weights.setting.ranks, charge):
            weight = weights.weight(configuration)
            series = weight.laurent(last)
            if series.is_zero():
                continue
            values = observables(configuration, weight.order + last)
            found = [known + (series * value).truncated(last + 1) for known, value in zip(found, values, strict=True)]
        return found

    return sums


class AverageSeries(Generic[Series]):
    """The averages of several observables at any charge, known up to t^0 at least. Everything is kept.

    ``sums`` gives the sums of weight times observable; Z itself is taken from the weights. ``subtract(s, z, a)`` is
    s - z a for the kind of series that ``sums`` gives.
    """

    def __init__(
        self,
        weights: Weights,
        sums: Callable[[Charge, int], Sequence[Series]],
        subtract: Callable[[Series, Laurent, Series], Series],
    ) -> None:
        self.weights = weights
        self._sums, self._subtract = sums, subtract
        self._last = 0
        self._known: dict[Charge, list[Series]] = {}
        self._z: dict[Charge, Laurent] = {}

    def at(self, charge: Charge) -> list[Series]:
        """One series in t for every observable."""
        while True:
            found = self._average(charge)
            missing = 1 - min((series.precision for series in found), default=1)
            if missing <= 0:
                return found
            self._last += missing
            self._known.clear()
            self._z.clear()

    def _average(self, charge: Charge) -> list[Series]:
        known = self._known.get(charge)
        if known is None:
            known = list(self._sums(charge, self._last))
            for part in sub_charges(charge):
                rest = minus(charge, part)
                if any(part) and rest is not None:
                    z = self.z(part)
                    pairs = zip(known, self._average(rest), strict=True)
                    known = [self._subtract(one, z, average) for one, average in pairs]
            self._known[charge] = known
        return known

    def z(self, charge: Charge) -> Laurent:
        """Z at one charge, to the present depth."""
        known = self._z.get(charge)
        if known is None:
            known = self._z[charge] = direct_total(self.weights, charge, last=self._last)
        return known


def number_averages(weights: Weights, sums: Sums) -> AverageSeries[Laurent]:
    """The averages of observables that are numbers."""
    return AverageSeries(weights, sums, lambda one, z, average: one - z * average)
