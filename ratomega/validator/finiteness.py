"""Finiteness and path-independence: the certificate that stands at the end of every limit.

(a) negative powers of t cancel exactly, in the total and in every compact cluster;
(b) the limit is the same along further paths;
(c) finiteness foreseen from the parameters alone, compared with what happened;
(d) all members of a cluster have the same order.
"""

from __future__ import annotations

from collections.abc import Sequence

from ratomega.diagrams.tuples import Charge, charges_up_to
from ratomega.regulator.limits import ChargeLimit
from ratomega.regulator.outcome import FiniteLimit, Pole
from ratomega.validator.verdict import Check, Kind, Verdict

__all__ = ["CANCELLATION", "PATHS", "certificate", "charge_text", "check_orders", "reach_text"]

CANCELLATION = "cancellation of poles"
PATHS = "independence of the path"
FORESIGHT = "finiteness foreseen"
ORDERS = "equal orders in a cluster"

_LOCALISATION = (
    "fixed-point localisation on compact components: N. Nekrasov, arXiv hep-th/0206161; H. Nakajima, K. Yoshioka, "
    "arXiv math/0306198"
)
_COUNT = "exact count of vanishing factors"
_PROBES = "further paths, computed from the same weights"
_BUG = "this is an error of the program, please report it"


def certificate(limits: Sequence[ChargeLimit]) -> tuple[Check, ...]:
    """The checks (a), (b), (c) for the charges that were computed."""
    return check_cancellation(limits), check_paths(limits), check_foresight(limits)


def short_cut_certificate(charges: Sequence[Charge], why: str) -> tuple[Check, ...]:
    """The same checks where no weight was looked at: the charges are without resonance, and the theorem speaks."""
    last = charge_text(charges[-1])
    compact = f"no resonance m*eps1 + n*eps2 with m, n >= 1, m*n <= charge, up to {last}: every component is compact"
    taken = f"{compact}, so every cluster is finite; no cluster was summed on its own ({why})"
    same = f"{compact}, so the limit is the same on every path"
    return (
        Check(CANCELLATION, Verdict.PROVED, Kind.THEOREM, taken, _LOCALISATION),
        Check(PATHS, Verdict.PROVED, Kind.THEOREM, same, _LOCALISATION),
        Check(FORESIGHT, Verdict.PROVED, Kind.THEOREM, compact, _LOCALISATION),
    )


def charge_text(charge: Charge) -> str:
    return f"charge {charge[0]}" if len(charge) == 1 else f"charge ({', '.join(str(k) for k in charge)})"


def counted(number: int, noun: str) -> str:
    """The number with its noun, plural where it has to be."""
    return f"{number} {noun}{'' if number == 1 else 's'}"


def reach_text(charges: Sequence[Charge]) -> str:
    """Up to where charges go that stand in the order of a case: by the total charge, or node by node.

    >>> reach_text([(0,), (1,), (2,)]), reach_text([(1,)]), reach_text([(1,), (2,)])
    ('up to charge 2', 'at charge 1', 'from charge 1 to charge 2')
    >>> reach_text([(0, 0), (1, 0), (0, 1)]), reach_text([(0, 0), (1, 0), (0, 1), (1, 1)])
    ('up to total charge 1', 'up to charge (1, 1)')
    >>> reach_text([(0, 0), (1, 0), (0, 1), (2, 0)])
    'at 4 charges, the last of them (2, 0)'
    """
    last = charges[-1]
    if len(charges) == 1:
        return f"at {charge_text(last)}"
    if len(last) == 1:
        first = charges[0]
        return f"from {charge_text(first)} to {charge_text(last)}" if any(first) else f"up to {charge_text(last)}"
    bounds = tuple(max(charge[v] for charge in charges) for v in range(len(last)))
    # A list of bounds that leaves out no charge of its total is that total as well.
    for bound in (sum(last), bounds):
        if tuple(charges) == charges_up_to(bound, len(last)):
            return f"up to total charge {bound}" if isinstance(bound, int) else f"up to {charge_text(bound)}"
    return f"at {len(charges)} charges, the last of them ({', '.join(map(str, last))})"


def check_cancellation(limits: Sequence[ChargeLimit]) -> Check:
    """(a). A cluster that is not compact and does not cancel alone is no fault of the total."""
    poles = [limit for limit in limits if isinstance(limit.outcome, Pole)]
    failing = [limit for limit in limits if limit.failing_compact_clusters]
    clusters = sum(1 for limit in limits for c in limit.sum.clusters.values() if c.singular_members)
    singular = sum(limit.sum.singular for limit in limits)
    if failing:
        first = failing[0]
        evidence = (
            f"{charge_text(first.charge)}: {first.failing_compact_clusters} compact clusters keep a negative power "
            f"of t, against the theorem: {_BUG}"
        )
        return Check(CANCELLATION, Verdict.REFUTED, Kind.THEOREM, evidence, _LOCALISATION)
    if poles:
        found = "; ".join(
            f"{charge_text(p.charge)}: pole of order {p.own.order}, leading coefficient {p.own.value}" for p in poles
        )
        evidence = f"a pole survives in the total: {found}"
        return Check(CANCELLATION, Verdict.REFUTED, Kind.THEOREM, evidence, _LOCALISATION)
    loose = sum(
        1
        for limit in limits
        for c in limit.sum.clusters.values()
        if not limit.is_compact(c) and c.series.valuation < 0
    )
    note = f"; {loose} non-compact clusters cancel only against each other" if loose else ""
    found = "no single weight is singular"
    if singular:
        found = f"{counted(singular, 'singular weight')} in {counted(clusters, 'cluster')}"
    evidence = f"{found}; every negative power of t cancels exactly{note}" if singular else f"{found}{note}"
    return Check(CANCELLATION, Verdict.PROVED, Kind.THEOREM, evidence, "exact cancellation in the Laurent expansion")


def check_paths(limits: Sequence[ChargeLimit]) -> Check:
    """(b). Proved where every component is compact; otherwise the probed paths speak."""
    differing = [
        limit
        for limit in limits
        if any((f.value, f.order) != (limit.own.value, limit.own.order) for f in limit.further)
    ]
    if differing:
        first = differing[0]
        values = "; ".join(
            f"{p.value}{f' t^-{p.order}' if p.order else ''} on [{p.path}]" for p in (first.own, *first.further)
        )
        charges = ", ".join(charge_text(limit.charge) for limit in differing)
        evidence = f"paths differ at {charges}; first: {values}"
        return Check(PATHS, Verdict.REFUTED, Kind.CONSISTENCY, evidence, _PROBES)
    open_limits = [limit for limit in limits if not limit.compact]
    probed = max((len(limit.further) for limit in limits), default=0)
    give = "gives" if probed == 1 else "give"
    agreeing = f"; {counted(probed, 'further path')} {give} the same values" if probed else ""
    if not open_limits:
        evidence = f"every component is compact at these charges{agreeing}"
        return Check(PATHS, Verdict.PROVED, Kind.THEOREM, evidence, _LOCALISATION)
    first = open_limits[0]
    why = f"compactness does not decide from {charge_text(first.charge)} on ({first.resonance})"
    if any(not limit.further for limit in open_limits):
        evidence = f"{why}, and no further path was probed; ask for some with --probes"
        return Check(PATHS, Verdict.UNDECIDED, Kind.CONSISTENCY, evidence, _PROBES)
    return Check(PATHS, Verdict.AGREES, Kind.CONSISTENCY, f"{why}{agreeing}", _PROBES)


def check_foresight(limits: Sequence[ChargeLimit]) -> Check:
    """(c). No difference of Coulomb parameters equals m eps1 + n eps2 with m, n >= 1, m n <= charge: finite."""
    wrong = [limit for limit in limits if limit.compact and not isinstance(limit.outcome, FiniteLimit)]
    if wrong:
        evidence = f"{charge_text(wrong[0].charge)} was foreseen finite and is not: {_BUG}"
        return Check(FORESIGHT, Verdict.REFUTED, Kind.THEOREM, evidence, _LOCALISATION)
    open_limits = [limit for limit in limits if not limit.compact]
    if not open_limits:
        evidence = "no Coulomb difference equals m*eps1 + n*eps2 with m, n >= 1, m*n <= charge: finite, as it came out"
        return Check(FORESIGHT, Verdict.PROVED, Kind.THEOREM, evidence, _LOCALISATION)
    first = open_limits[0]
    outcomes = ", ".join(f"{charge_text(limit.charge)}: {limit.outcome.status}" for limit in open_limits)
    evidence = f"not foreseen from {charge_text(first.charge)} on, because {first.resonance}; what happened: {outcomes}"
    return Check(FORESIGHT, Verdict.UNDECIDED, Kind.THEOREM, evidence, _LOCALISATION)


def check_orders(limits: Sequence[ChargeLimit]) -> Check:
    """(d)."""
    uneven = [limit for limit in limits if limit.uneven_clusters]
    if uneven:
        first = uneven[0]
        evidence = f"{charge_text(first.charge)}: {first.uneven_clusters} clusters have members of different order"
        return Check(ORDERS, Verdict.REFUTED, Kind.CONSISTENCY, evidence, _COUNT)
    clusters = sum(len(limit.sum.clusters) for limit in limits)
    evidence = f"{counted(clusters, 'cluster')}, each with one order for all its members"
    return Check(ORDERS, Verdict.PROVED, Kind.CONSISTENCY, evidence, _COUNT)
