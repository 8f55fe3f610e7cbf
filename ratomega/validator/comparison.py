"""Forms by charge against the limits: agreement to the stated charge, or the first difference."""

from __future__ import annotations

from collections.abc import Sequence

from ratomega.case.case import Case
from ratomega.case.setting import Setting
from ratomega.exact.quadratic import number_text
from ratomega.regulator.limits import ChargeLimit
from ratomega.regulator.outcome import FiniteLimit
from ratomega.validator.closed_forms import ClosedForm, closed_forms
from ratomega.validator.finiteness import charge_text, reach_text
from ratomega.validator.verdict import Check, Kind, Verdict

__all__ = ["check_adjoint_clusters", "check_closed_forms", "compare"]


def check_closed_forms(case: Case, setting: Setting, limits: Sequence[ChargeLimit]) -> tuple[Check, ...]:
    """One check for every closed form that holds at some computed charge beyond 0."""
    checks = (compare(form, limits) for form in closed_forms(case, setting))
    return tuple(check for check in checks if check is not None)


def compare(form: ClosedForm, limits: Sequence[ChargeLimit]) -> Check | None:
    """Compare at every charge that both sides have; None when that is charge 0 at most."""
    compared = [limit for limit in limits if limit.charge in form.values]
    if not any(any(limit.charge) for limit in compared):
        return None
    for limit in compared:
        expected, outcome = form.values[limit.charge], limit.outcome
        if not isinstance(outcome, FiniteLimit) or outcome.value != expected:
            found = number_text(outcome.value) if isinstance(outcome, FiniteLimit) else outcome.status
            evidence = (
                f"{form.statement}; first difference at {charge_text(limit.charge)}: "
                f"closed form {number_text(expected)}, limit {found}"
            )
            return Check(form.name, Verdict.REFUTED, Kind.INDEPENDENT, evidence, form.source)
    evidence = f"{form.statement}; equal {reach_text([limit.charge for limit in compared])}"
    complete = len(compared) == len(limits)
    return Check(form.name, Verdict.AGREES, Kind.INDEPENDENT, evidence, form.source, complete)


def check_adjoint_clusters(setting: Setting, limits: Sequence[ChargeLimit]) -> Check | None:
    """Adjoint of limiting mass 0 or eps: every compact cluster sums to its Euler number, the number of members.

    None when the theory is not one node with one such adjoint. The numbers of members are our own: a missing cluster
    would not be noticed here.
    """
    eps = (setting.eps1 + setting.eps2).constant
    if len(setting.nodes) != 1:
        return None
    node = setting.nodes[0]
    if node.antifundamental or node.fundamental or [m.constant for m in node.adjoint] not in ([0], [eps]):
        return None
    name, source = "Euler numbers of the clusters", "C. Vafa, E. Witten, arXiv hep-th/9408074"
    clusters = 0
    for limit in limits:
        if not limit.compact:
            continue
        for cluster in limit.sum.clusters.values():
            value = cluster.series.coefficient(0)
            clusters += 1
            if cluster.series.valuation < 0 or value != cluster.size:
                where = charge_text(limit.charge)
                evidence = f"{where}: a cluster of {cluster.size} members sums to {number_text(value)}"
                return Check(name, Verdict.REFUTED, Kind.CONSISTENCY, evidence, source)
    if clusters <= 1:
        return None
    evidence = f"adjoint mass {node.adjoint[0]}: each of {clusters} compact clusters sums to its number of members"
    return Check(name, Verdict.AGREES, Kind.CONSISTENCY, evidence, source)
