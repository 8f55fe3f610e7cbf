"""A case: theory + background + charge bound, with its canonical hash."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Sequence
from dataclasses import dataclass, replace

from ratomega.case.background import Background
from ratomega.case.theory import Theory
from ratomega.diagrams.tuples import Charge, charges_up_to
from ratomega.errors import InputError

__all__ = ["HIGHEST_CHARGE", "Case"]

# A first bound on what is read: counting the configurations costs charge^2, so the exact count comes after this.
HIGHEST_CHARGE = 500


@dataclass(frozen=True, slots=True)
class Case:
    """One job. ``charge`` is an integer (bound on the total charge) or one bound per node."""

    title: str
    theory: Theory
    background: Background
    charge: int | tuple[int, ...]

    @classmethod
    def make(
        cls, theory: Theory, background: Background, charge: int | Sequence[int], title: str = ""
    ) -> Case:
        """The checking constructor. Raises ``InputError`` for a bad charge."""
        return cls(title, theory, background, checked_charge(charge, len(theory.nodes)))

    def with_charge(self, charge: int | Sequence[int]) -> Case:
        return replace(self, charge=checked_charge(charge, len(self.theory.nodes)))

    @property
    def charges(self) -> tuple[Charge, ...]:
        """Every charge within the bound, charge 0 first."""
        return charges_up_to(self.charge, len(self.theory.nodes))

    @property
    def bounds(self) -> tuple[int, ...]:
        """The highest charge of every node."""
        return (self.charge,) * len(self.theory.nodes) if isinstance(self.charge, int) else self.charge

    def key(self) -> str:
        """The physics alone as canonical text: no title, no charge, no names."""
        eps = [[str(x.constant), str(x.slope)] for x in (self.background.eps1, self.background.eps2)]
        return json.dumps([eps, self.theory.key()], separators=(",", ":"))

    @property
    def hash(self) -> str:
        """SHA-256 of ``key``, the first 16 hexadecimal digits."""
        return hashlib.sha256(self.key().encode()).hexdigest()[:16]


def checked_charge(charge: object, nodes: int) -> int | tuple[int, ...]:
    """``charge`` as an integer or a tuple with one bound per node; ``InputError`` otherwise."""
    if isinstance(charge, int) and not isinstance(charge, bool):
        bounds: tuple[object, ...] = (charge,)
    elif isinstance(charge, Sequence) and not isinstance(charge, str):
        bounds = tuple(charge)
        if len(bounds) != nodes:
            message = f"a list of charges gives one bound per node: {nodes} expected, {len(bounds)} given"
            raise InputError.single(message, "charge")
    else:
        message = f"expected an integer or a list of integers, not {type(charge).__name__}"
        raise InputError.single(message, "charge")
    checked: list[int] = []
    for bound in bounds:
        if not isinstance(bound, int) or isinstance(bound, bool):
            raise InputError.single(f"a charge is an integer, not {bound!r}", "charge")
        if bound < 0:
            raise InputError.single(f"a charge is zero or more, not {bound}", "charge")
        if bound > HIGHEST_CHARGE:
            raise InputError.single(f"the charge {bound} is beyond {HIGHEST_CHARGE}", "charge")
        checked.append(bound)
    return checked[0] if isinstance(charge, int) else tuple(checked)
