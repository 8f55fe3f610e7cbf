"""The result of ``ratomega validate``: every check, and what they say together."""

from __future__ import annotations

from dataclasses import dataclass

from ratomega.results.header import Header, exit_status_of
from ratomega.validator.verdict import Check, Kind, Verdict

__all__ = ["ValidateResult"]


@dataclass(frozen=True, slots=True)
class ValidateResult:
    """All checks that apply to the case, run to a depth: "quick" or "full"."""

    header: Header
    checks: tuple[Check, ...]
    depth: str
    partial: bool = False

    @property
    def routes(self) -> tuple[Check, ...]:
        """The checks by which an independent route agrees with the limits of this very case, at all its charges."""
        independent = (c for c in self.checks if c.kind is Kind.INDEPENDENT and c.verdict is Verdict.AGREES)
        return tuple(c for c in independent if c.complete)

    @property
    def summary(self) -> str:
        """One sentence: what is refuted, how many independent routes agree, what stayed undecided."""
        refuted = [c.name for c in self.checks if c.verdict is Verdict.REFUTED]
        undecided = [c.name for c in self.checks if c.verdict is Verdict.UNDECIDED]
        parts = [f"REFUTED: {', '.join(refuted)}" if refuted else "nothing is refuted"]
        routes = self.routes
        if routes:
            word = "independent route agrees" if len(routes) == 1 else "independent routes agree"
            parts.append(f"{len(routes)} {word} with the limits of this case at all its charges")
        else:
            parts.append("no independent route covers all charges of this case")
            relatives = sum(1 for c in self.checks if c.kind is Kind.SIBLING and c.verdict is Verdict.AGREES)
            if relatives:
                word = "check on a relative of it agrees" if relatives == 1 else "checks on relatives of it agree"
                parts.append(f"{relatives} {word}, which does not prove this case")
        if undecided:
            parts.append(f"undecided: {', '.join(undecided)}")
        return f"{len(self.checks)} checks at depth {self.depth}: {'; '.join(parts)}."

    @property
    def exit_status(self) -> int:
        """1 when a check is refuted; 3 when finiteness or path-independence stayed undecided; else 0."""
        return exit_status_of(self.checks)
