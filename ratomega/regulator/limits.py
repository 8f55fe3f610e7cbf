"""The limit at one charge: the own path in full, further paths where compactness does not decide."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from ratomega.case.setting import Setting, resonances
from ratomega.detector.geometry import resonance_text
from ratomega.diagrams.tuples import Charge
from ratomega.exact.laurent import Laurent
from ratomega.exact.quadratic import Number
from ratomega.regulator.direct import ChargeSum, ClusterSum, direct_sum, direct_total
from ratomega.regulator.outcome import Outcome, PathValue, judge, leading
from ratomega.weights import Weights

__all__ = ["ChargeLimit", "charge_limit", "charge_limit_of"]


@dataclass(frozen=True, slots=True)
class ChargeLimit:
    """Everything that was computed at one charge.

    ``compact``: every component of the fixed locus at this charge is compact, by the parameters; otherwise
    ``resonance`` names a Coulomb difference that may prevent it. ``further`` holds the probed paths, if any.
    """

    sum: ChargeSum
    compact: bool
    resonance: str
    own: PathValue
    further: tuple[PathValue, ...]
    outcome: Outcome

    @property
    def charge(self) -> Charge:
        return self.sum.charge

    def is_compact(self, cluster: ClusterSum) -> bool:
        """Is this cluster's component known to be compact? The parameters or a sink decide.

        A cluster of order <= 0 has no pole to cancel and is let pass; with matter its component need not be compact.
        """
        return self.compact or cluster.order <= 0 or cluster.has_sink is True

    @property
    def failing_compact_clusters(self) -> int:
        """Compact clusters whose sum keeps a negative power of t (a theorem says that there are none)."""
        return sum(1 for c in self.sum.clusters.values() if self.is_compact(c) and c.series.valuation < 0)

    @property
    def uneven_clusters(self) -> int:
        """Clusters whose members differ in order (there should be none)."""
        return sum(1 for c in self.sum.clusters.values() if c.order != c.lowest_order)

    def terms(self, last: int) -> tuple[tuple[int, Number], ...]:
        """(power, coefficient) of the own path's expansion from the lowest power, at most 0, to ``last``."""
        lowest = min(0, self.sum.series.valuation)
        return tuple((n, self.sum.series.coefficient(n)) for n in range(lowest, last + 1))


def charge_limit(
    weights: Weights, charge: Charge, probes: Sequence[Weights] = (), *, last: int = 0, always_probe: bool = False
) -> ChargeLimit:
    """The limit at one charge. ``probes`` are the further paths; they are summed only where compactness does not
    prove that the limit is the same on every path, or with ``always_probe``."""
    resonance = next(resonances(weights.setting, charge), None)
    own_sum = direct_sum(weights, charge, last=last, sinks=resonance is not None)
    needed = probes if always_probe or resonance is not None else ()
    return _judged(weights.setting, own_sum, [(p.setting, direct_total(p, charge)) for p in needed], resonance)


def charge_limit_of(setting: Setting, own_sum: ChargeSum, further: Sequence[tuple[Setting, Laurent]]) -> ChargeLimit:
    """The limit at one charge from the sums themselves, wherever they were taken: the own path in full, then the
    further paths."""
    return _judged(setting, own_sum, further, next(resonances(setting, own_sum.charge), None))


def _judged(
    setting: Setting,
    own_sum: ChargeSum,
    further: Sequence[tuple[Setting, Laurent]],
    resonance: tuple[int, int, int, int, int] | None,
) -> ChargeLimit:
    compact = resonance is None
    own = leading(setting.text(), own_sum.series)
    found = tuple(leading(path.text(), series) for path, series in further)
    why = "" if resonance is None else resonance_text(setting, resonance)
    return ChargeLimit(own_sum, compact, why, own, found, judge(own, found, compact=compact))
