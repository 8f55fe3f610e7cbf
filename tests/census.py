"""The census: all small theories of one node at the points where something happens.

Ranks 1 to 3, ratios eps1:eps2 of both signs, Coulomb parameters generic and resonant, matter that is harmless, that
meets the contents, or that is an adjoint.  Every entry is one case; the highest charge keeps each entry to a hundred
configurations or so.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

from building import make_case, plain_theory, plain_values

from ratomega.case.case import Case
from ratomega.case.setting import Setting, own_setting, probe_setting
from ratomega.weights import Weights

RATIOS = {
    "1:1": (1, 1),
    "2:1": (2, 1),
    "1:2": (1, 2),
    "3:2": (3, 2),
    "2:3": (2, 3),
    "-1": (1, -1),
    "-2/3": (3, -2),
}

TOP_CHARGE = {1: 10, 2: 6, 3: 3}
"""The long run adds charge 4 of three colours (``further``)."""

# The difference 2 is a typed number: at eps1 = 1 or 2 it stays on the lattice of eps1 and eps2 all along the path
# eps2 + t, elsewhere it meets the lattice at the limit point alone, or not at all.
COULOMB = {
    1: {"generic": ["1/3"]},
    2: {
        "generic": ["1/3", "-1/5"],
        "equal": ["1/3", "1/3"],
        "by eps1": ["1/3 + eps1", "1/3"],
        "by 2": ["7/3", "1/3"],
    },
    3: {
        "generic": ["1/3", "-1/5", "2/7"],
        "equal": ["1/3", "1/3", "1/3"],
        "by eps1": ["1/3 + eps1", "1/3", "2/7"],
        "by 2": ["7/3", "1/3", "-5/3"],
    },
}

MATTER = {
    "none": {},
    "flavours": {"antifundamental": ["1/2", "3/11"], "fundamental": ["1/7"]},
    # Two masses that meet contents: the first all along the path (unless it is tilted), the second at its end alone.
    "cutting": {"antifundamental": ["-1/3 - eps1", "-7/3"]},
    "adjoint": {"adjoint": ["1/5"]},
    "soft adjoint": {"adjoint": ["t/5"]},
}


@dataclass(frozen=True)
class Entry:
    """One case of the census with its own path, as the engine and as the plain reference want it."""

    rank: int
    ratio: str
    coulomb: str
    matter: str
    further: int = 0

    @property
    def top(self) -> int:
        return TOP_CHARGE[self.rank] + self.further

    @property
    def steps(self) -> tuple[int, int]:
        return RATIOS[self.ratio]

    @property
    def generic(self) -> bool:
        return self.coulomb == "generic"

    @cached_property
    def case(self) -> Case:
        eps1, eps2 = self.steps
        node = {"coulomb": COULOMB[self.rank][self.coulomb], **MATTER[self.matter]}
        return make_case(str(eps1), str(eps2), [node], charge=self.top)

    @cached_property
    def setting(self) -> Setting:
        return own_setting(self.case)

    @cached_property
    def weights(self) -> Weights:
        return Weights(self.setting)

    @cached_property
    def probes(self) -> tuple[Weights, ...]:
        return tuple(Weights(probe_setting(self.case, number)) for number in (1, 2))

    @cached_property
    def theory(self) -> dict:
        return plain_theory(self.setting)

    @cached_property
    def values(self) -> dict:
        return plain_values(self.setting)

    def __str__(self) -> str:
        return f"U({self.rank}) at {self.ratio}, {self.coulomb}, {self.matter}"


def census(*, ranks=(1, 2, 3), coulomb=None, matter=None, further=0) -> list[Entry]:
    """The entries, filtered by kind of Coulomb parameters and of matter."""
    return [
        Entry(rank, ratio, kind, multiplets, further)
        for rank in ranks
        for ratio in RATIOS
        for kind in COULOMB[rank]
        for multiplets in MATTER
        if (coulomb is None or kind in coulomb) and (matter is None or multiplets in matter)
    ]
