"""The result of ``ratomega block``: the dictionary, the coefficients in three forms, the checks."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from ratomega.case.case import Case
from ratomega.case.conformal import ConformalCase
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import Rational
from ratomega.regulator.outcome import PathValue
from ratomega.validator.verdict import Check, Kind, Verdict

__all__ = ["BlockCoefficient", "BlockResult", "Dictionary", "FieldEntry"]


@dataclass(frozen=True, slots=True)
class FieldEntry:
    """A field at the limit point: where it stands, its weight, P^2, and P where it is an exact number."""

    place: str
    weight: Number
    square: Number
    momentum: Number | None


@dataclass(frozen=True, slots=True)
class Dictionary:
    """Conformal data and gauge data at the limit point.

    ``masses`` are those of four antifundamentals or of the adjoint, at Coulomb parameters (a, -a); empty where they are
    no exact numbers of one field. ``exponent`` is that of 1 - x, or of prod (1 - q^n), between Z and the block.
    """

    central_charge: Rational
    b_squared: Rational
    eps1: Rational
    eps2: Rational
    external: tuple[FieldEntry, ...]
    internal: FieldEntry
    masses: tuple[Number, ...]
    exponent: Number | None

    @property
    def coulomb(self) -> Number | None:
        """a, the internal momentum."""
        return self.internal.momentum


@dataclass(frozen=True, slots=True)
class BlockCoefficient:
    """One power of x, or of q on the torus.

    ``status`` is "finite" (``block`` is the coefficient of the block), "pole" (``leading`` t^-``pole_order`` survives)
    or "path-dependent" (``values``, the own path first). ``elliptic`` is the coefficient of H in powers of 16 q_e, or
    of q on the torus, and ``gauge`` that of Z; both stop where the block is not finite. ``independence`` is "theorem"
    below the first degenerate level, then "agreement" of paths.
    """

    order: int
    status: str
    block: Number | None
    elliptic: Number | None
    gauge: Number | None
    pole_order: int
    leading: Number | None
    values: tuple[PathValue, ...]
    independence: str | None


@dataclass(frozen=True, slots=True)
class BlockResult:
    """A conformal block and its gauge theory.

    ``case`` as it was given. ``gauge`` is the theory, None where ``gauge_reason`` says why; ``z_reason`` says why Z is
    left out, empty where it is there. ``degenerate`` holds the (r, s) of the internal weight up to the order, by
    level: from the first on coefficients are limits on ``path``. ``route`` gave the coefficients; ``checks`` compare.
    """

    version: str
    case: Case | ConformalCase
    hash: str
    path: str
    degenerate: tuple[tuple[int, int], ...]
    dictionary: Dictionary
    gauge: Case | None
    gauge_reason: str
    z_reason: str
    route: str
    coefficients: tuple[BlockCoefficient, ...]
    checks: tuple[Check, ...]

    def __getitem__(self, order: int) -> BlockCoefficient:
        """The coefficient of one power; ``KeyError`` when it was not computed."""
        if not 0 <= order < len(self.coefficients):
            raise KeyError(order)
        return self.coefficients[order]

    def __iter__(self) -> Iterator[BlockCoefficient]:
        return iter(self.coefficients)

    @property
    def torus(self) -> bool:
        return len(self.dictionary.external) == 1

    @property
    def summary(self) -> str:
        """One sentence on the routes."""
        agreeing = [c.name for c in self.checks if c.verdict is Verdict.AGREES and c.kind is Kind.INDEPENDENT]
        refuted = [c.name for c in self.checks if c.verdict is Verdict.REFUTED]
        undecided = [c.name for c in self.checks if c.verdict is Verdict.UNDECIDED]
        parts = [f"coefficients from {self.route}"]
        parts.append(f"confirmed by {', '.join(agreeing)}" if agreeing else "no other route confirms them here")
        parts += [f"REFUTED by {', '.join(refuted)}"] if refuted else []
        parts += [f"undecided: {', '.join(undecided)}"] if undecided else []
        return "; ".join(parts) + "."

    @property
    def exit_status(self) -> int:
        """1 when a pole survives, a coefficient depends on the path or a check is refuted; 3 when a comparison stayed
        undecided; else 0."""
        if any(one.status != "finite" for one in self.coefficients):
            return 1
        if any(check.verdict is Verdict.REFUTED for check in self.checks):
            return 1
        return 3 if any(check.verdict is Verdict.UNDECIDED for check in self.checks) else 0
