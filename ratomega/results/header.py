"""What every result carries: version, case, path, hash, warnings; and the exit status that checks mean."""

from __future__ import annotations

from dataclasses import dataclass

from ratomega.case.case import Case
from ratomega.validator.finiteness import CANCELLATION, PATHS
from ratomega.validator.verdict import Check, Verdict

__all__ = ["Header", "PathRecord", "exit_status_of"]


@dataclass(frozen=True, slots=True)
class PathRecord:
    """The path: eps1, eps2 and all Coulomb parameters as linear forms in t. ``tilted``: the engine moved the latter."""

    parameters: tuple[str, ...]
    eps1: str
    eps2: str
    coulomb: tuple[tuple[str, tuple[str, ...]], ...]
    tilted: bool

    def text(self) -> str:
        parts = [f"eps1 = {self.eps1}", f"eps2 = {self.eps2}"]
        parts += [f"{name}: a = ({', '.join(values)})" for name, values in self.coulomb]
        return "; ".join(parts)


@dataclass(frozen=True, slots=True)
class Header:
    """What every result carries."""

    version: str
    case: Case
    path: PathRecord
    hash: str
    warnings: tuple[str, ...]


def exit_status_of(checks: tuple[Check, ...]) -> int:
    if any(check.verdict is Verdict.REFUTED for check in checks):
        return 1
    open_checks = (c for c in checks if c.name in (CANCELLATION, PATHS) and c.verdict is Verdict.UNDECIDED)
    return 3 if any(True for _ in open_checks) else 0
