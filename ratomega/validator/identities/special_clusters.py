"""Euler numbers cluster by cluster, for the sibling of a case whose adjoint has the mass t/5.

No weight of a member is 1 there; only together do the members of a compact cluster give their number.

Source: C. Vafa, E. Witten hep-th/9408074.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace

from ratomega.case.case import Case
from ratomega.case.setting import own_setting
from ratomega.regulator.limits import ChargeLimit
from ratomega.validator.comparison import check_adjoint_clusters
from ratomega.validator.identities.siblings import MOST_WORK, nothing_allowed, smooth_charge
from ratomega.validator.identities.special_adjoint import SOFT, adjoint_node, soft_sibling
from ratomega.validator.verdict import Check, Kind, Verdict

__all__ = ["check_special_clusters"]

_NAME = "Euler numbers of the clusters at adjoint mass t/5"
_SOURCE = "C. Vafa, E. Witten, arXiv hep-th/9408074"


def check_special_clusters(
    case: Case, clusterwise: Callable[[Case], Sequence[ChargeLimit]], *, most: int = MOST_WORK
) -> Check | None:
    """Every cluster of the sibling of mass t/5 sums to its Euler number, for U(N) with one adjoint.

    ``clusterwise`` gives the limits of a case cluster by cluster. None for any other theory, where a resonance sits at
    charge 1, and where the case has that mass itself, so that its own clusters are checked already.
    """
    if adjoint_node(case) is None or smooth_charge(case) < 1 or case.theory.nodes[0].adjoint == (SOFT,):
        return None
    other = soft_sibling(case, most=most)
    if other is None:
        return Check(_NAME, Verdict.UNDECIDED, Kind.CONSISTENCY, f"not run: {nothing_allowed(most)}", _SOURCE)
    found = check_adjoint_clusters(own_setting(other), clusterwise(other))
    return None if found is None else replace(found, name=_NAME)
