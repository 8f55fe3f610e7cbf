"""What a table may hold: coefficients of Z, of log Z, of -eps1 eps2 log Z, or of the conformal block.

The block is Z divided by its U(1) factor, where the dictionary of ``conformal`` covers the theory; flavours can be
dealt to the two ends of a block in several ways, and each has its own factor.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

from ratomega.case.setting import Setting
from ratomega.conformal.dictionary import conformal_block, dealings, gauge_path, why_not_covered
from ratomega.diagrams.tuples import Charge
from ratomega.errors import InputError
from ratomega.exact.laurent import Laurent
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ONE, ZERO
from ratomega.verify.series import Series, inverse, logarithm, remembered, scaled, times

__all__ = ["NAMES", "Quantity", "quantities"]

NAMES = ("z", "log", "prepotential", "block")
MEANING = {
    "z": "the coefficients of Z",
    "log": "the coefficients of log Z",
    "prepotential": "the coefficients of -eps1*eps2*log Z",
    "block": "the coefficients of the conformal block",
}


@dataclass(frozen=True, slots=True)
class Quantity:
    """One of ``NAMES``; ``dealing`` is the way of dealing flavours to the ends of a block, by its number."""

    name: str
    dealing: int = 0

    @property
    def meaning(self) -> str:
        return MEANING[self.name]

    def of(self, z: Series, setting: Setting) -> Series:
        """The quantity from Z; numbers of the theory are those of the setting at t = 0."""
        if self.name == "z":
            return z
        if self.name == "block":
            return times(z, _inverse_factor(setting, self.dealing))
        log = logarithm(z)
        return log if self.name == "log" else scaled(log, -setting.eps1.constant * setting.eps2.constant)


def quantities(name: str | None, setting: Setting) -> tuple[Quantity, ...]:
    """The quantities to try, simplest first. Raises ``InputError`` for an unknown name or a block that there is not."""
    if name is not None and name not in NAMES:
        message = f'there is no quantity "{name[:40]}"; choose one of {", ".join(NAMES)}'
        raise InputError.single(message, "as")
    reason = why_not_covered(setting)
    if name == "block" and reason:
        raise InputError.single(f"this case has no conformal block: {reason}", "as")
    found = []
    for one in NAMES if name is None else (name,):
        if one != "block":
            found.append(Quantity(one))
        elif not reason:
            ways = _ways(setting)
            found += [Quantity(one, n) for n in (ways if ways or name is None else [0])]
    return tuple(found)


def _ways(setting: Setting) -> list[int]:
    """The dealings that have a U(1) factor; an end without flavours leaves none, and the block is Z."""
    gauge = gauge_path(setting)
    if gauge.adjoint is not None:
        return [0]
    return [n for n, dealing in enumerate(dealings(gauge.flavours)) if dealing.left and dealing.right]


@lru_cache(maxsize=256)
def _inverse_factor(setting: Setting, dealing: int) -> Series:
    """1 / the U(1) factor; a diagnosis asks for that of one setting thousands of times."""
    gauge = gauge_path(setting)
    chosen = None if gauge.adjoint is not None else list(dealings(gauge.flavours))[dealing]
    dressing = conformal_block(gauge, precision=1, dealing=chosen).dressing

    @lru_cache(maxsize=8)
    def coefficients(order: int) -> tuple[Laurent, ...]:
        return dressing.coefficients(order)

    def coefficient(charge: Charge) -> Number:
        return coefficients(charge[0])[charge[0]].coefficient(0)

    return inverse(remembered(coefficient))


def noise_weights(quantity: Quantity, z: Series, setting: Setting) -> Series:
    """How an error of Z reaches the quantity: the coefficients that multiply it, charge by charge."""
    if quantity.name == "z":
        return lambda charge: ZERO if any(charge) else ONE
    if quantity.name == "block":
        return _inverse_factor(setting, quantity.dealing)
    reached = inverse(z)
    return reached if quantity.name == "log" else scaled(reached, -setting.eps1.constant * setting.eps2.constant)
