"""Siblings of a case, the limits that an identity asks for there, and the verdict on what came out.

An identity imports no sum. It is given an ``Evaluate``: a function from a case to the exact limits Z_0, ..., Z_K, K the
charge of that case. It is asked for cases at which every component is compact, so that the limit is finite and the same
on every path, and for no more configurations in all than were allowed.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, replace

from ratomega.case.affine import Affine
from ratomega.case.background import Background
from ratomega.case.case import Case
from ratomega.case.setting import own_setting, resonances
from ratomega.case.theory import Node, Theory
from ratomega.diagrams.tuples import count_all
from ratomega.exact.quadratic import Number, number_text
from ratomega.exact.rational import Rational
from ratomega.validator.depth import FULL, beyond, too_costly
from ratomega.validator.verdict import Check, Kind, Verdict

__all__ = [
    "MOST_WORK",
    "Evaluate",
    "Identity",
    "affordable",
    "is_smooth",
    "nothing_allowed",
    "reach_text",
    "sibling",
    "single_node",
    "smooth_charge",
]

Evaluate = Callable[[Case], Sequence[Number]]
"""From a case without symbols to its limits in the order of its charges: Z_0, ..., Z_K for one node."""

MOST_WORK = 20_000
"""How many configurations an identity may ask for in all, unless its caller says otherwise: some seconds."""


def single_node(case: Case) -> Node | None:
    """The one node of a case without symbols whose charge is at least 1; None for any other case."""
    if len(case.theory.nodes) != 1 or case.symbols or case.bounds[0] < 1:
        return None
    return case.theory.nodes[0]


def sibling(
    case: Case,
    charge: int,
    *,
    background: tuple[Rational, Rational] | None = None,
    coulomb: Sequence[Number] | None = None,
    antifundamental: Sequence[Number] | None = None,
    adjoint: Affine | None = None,
) -> Case:
    """The case with some of its parameters replaced: typed numbers, or an expression for the adjoint mass.

    A background given as numbers has the path eps2 + t. ``antifundamental`` replaces all flavours.
    """
    node = case.theory.nodes[0]
    if coulomb is not None:
        node = replace(node, coulomb=tuple(Affine(a) for a in coulomb))
    if antifundamental is not None:
        node = replace(node, antifundamental=tuple(Affine(m) for m in antifundamental), fundamental=())
    if adjoint is not None:
        node = replace(node, adjoint=(adjoint,))
    where = case.background
    if background is not None:
        where = Background.make(Affine(background[0]), Affine(background[1]))
    return Case.make(Theory.make([node]), where, charge)


def is_smooth(case: Case) -> bool:
    """Every component is compact at every charge of the case: no Coulomb difference m eps1 + n eps2, m n <= charge."""
    return next(resonances(own_setting(case), case.bounds), None) is None


def smooth_charge(case: Case) -> int:
    """The highest charge, within that of the case, up to which every component is compact."""
    return min((m * n - 1 for *_, m, n in resonances(own_setting(case), case.bounds)), default=case.bounds[0])


def affordable(case: Case, charge: int, evaluations: Callable[[int], int], most: int) -> int:
    """The highest k <= charge such that ``evaluations(k)`` sums to charge k have ``most`` configurations at most."""
    while charge > 0 and evaluations(charge) * count_all(case.theory.ranks, charge) > most:
        charge -= 1
    return charge


@dataclass(frozen=True, slots=True)
class Identity:
    """What stands in a check beside its verdict. ``statement`` is one sentence with the formula."""

    name: str
    kind: Kind
    statement: str
    source: str

    def judged(self, rows: Iterable[tuple[str, Number, Number]], note: str) -> Check:
        """``rows`` are (what, found, expected) in the order of the charge; the first difference refutes.

        Raises ``ValueError`` when there is no row: a check that compared nothing does not pass.
        """
        what = ""
        for what, found, expected in rows:
            if found != expected:
                evidence = (
                    f"{self.statement}; first difference: {what} is {number_text(found)} "
                    f"and should be {number_text(expected)}"
                )
                return Check(self.name, Verdict.REFUTED, self.kind, evidence, self.source)
        if not what:
            raise ValueError("nothing was compared")
        return Check(self.name, Verdict.AGREES, self.kind, f"{self.statement}; {note}", self.source)

    def undecided(self, why: str) -> Check:
        """The check could not run."""
        return Check(self.name, Verdict.UNDECIDED, self.kind, f"{self.statement}; not run: {why}", self.source)


def nothing_allowed(most: int) -> str:
    """Why a check did not run, and what to do."""
    what = f"more than {most} configurations at charge 1 already"
    return too_costly(what, most=most, full=FULL.configurations, less="take fewer colours")


def reach_text(reached: int, wanted: int, most: int) -> str:
    """Up to which charge was compared, and that more was wanted; ``most`` configurations were allowed."""
    more = f" (of {wanted}: {beyond(most=most, full=FULL.configurations)})" if reached < wanted else ""
    return f"equal up to charge {reached}{more}"
