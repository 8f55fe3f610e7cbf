"""Which weights are singular, indeterminate or zero at the limit point; counted from exact zeros, never evaluated.

For one configuration let d and n be the numbers of denominators and numerators that vanish at the limit point.

* The *order* is d - n. All members of a cluster have the same one.
* *Dead*: a numerator vanishes all along the path, so the weight is zero on it whatever the order.
* *Singular*: order > 0 and not dead; the weight diverges like t^(-order).
* *Indeterminate*: d > 0 and not singular; a plain program divides by zero here too, 0/0, although the weight is fine.
* *Vanishing*: dead, or order < 0; the weight is zero in the limit. A vanishing weight can be indeterminate as well.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from ratomega.diagrams.tuples import Charge, Configuration, configurations
from ratomega.weights import Factor, Weights

__all__ = ["Zeros", "guilty_factors", "scan"]


@dataclass(frozen=True, slots=True)
class Zeros:
    """The integer bookkeeping of one configuration."""

    configuration: Configuration
    vanishing_denominators: int
    vanishing_numerators: int
    dead: bool

    @property
    def order(self) -> int:
        return self.vanishing_denominators - self.vanishing_numerators

    @property
    def singular(self) -> bool:
        return self.order > 0 and not self.dead

    @property
    def indeterminate(self) -> bool:
        return self.vanishing_denominators > 0 and not self.singular

    @property
    def vanishing(self) -> bool:
        return self.dead or self.order < 0


def scan(weights: Weights, charge: Charge) -> Iterator[Zeros]:
    """The bookkeeping of every configuration of the charge, in the order of enumeration."""
    for configuration in configurations(weights.setting.ranks, charge):
        weight = weights.weight(configuration)
        down = weight.vanishing_denominators
        yield Zeros(configuration, down, down - weight.order, weight.dead)


def guilty_factors(weights: Weights, configuration: Configuration) -> tuple[tuple[Factor, ...], tuple[Factor, ...]]:
    """The vanishing denominators and the vanishing numerators of a configuration, each with its full name."""
    vanishing = [factor for factor in weights.named_factors(configuration) if factor.vanishes]
    return tuple(f for f in vanishing if f.exponent < 0), tuple(f for f in vanishing if f.exponent > 0)
