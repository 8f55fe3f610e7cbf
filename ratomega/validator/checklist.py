"""Every outside check that applies to a case, one after the other: what ``validate`` runs.

The order: what the limits prove themselves; independent routes to Z of this very case; relatives of the case; the
geometry of its clusters; relations that take our weights or Z as data. A check that does not apply is left out; one
that applies and would cost more than the depth allows is undecided and says so.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence

from ratomega.case.case import Case
from ratomega.regulator.limits import ChargeLimit
from ratomega.validator.burge import check_burge_pairs, check_burge_sum
from ratomega.validator.closed_forms_minimal import minimal_forms
from ratomega.validator.comparison import check_adjoint_clusters, check_closed_forms, compare
from ratomega.validator.components import check_components
from ratomega.validator.depth import DEPTHS, Depth, depth_of
from ratomega.validator.finiteness import certificate, check_orders
from ratomega.validator.identities.blow_up import check_blow_up
from ratomega.validator.identities.collapse import check_collapse
from ratomega.validator.identities.prepotential import check_one_instanton, check_seiberg_witten
from ratomega.validator.identities.rectangles import check_rectangles
from ratomega.validator.identities.siblings import Evaluate
from ratomega.validator.identities.special_adjoint import check_special_adjoint
from ratomega.validator.identities.special_clusters import check_special_clusters
from ratomega.validator.path_comparison import check_elementary_path, check_gram
from ratomega.validator.recursion import check_recursion
from ratomega.validator.regularity import regularity_checks
from ratomega.validator.verdict import Check
from ratomega.weights import Weights

__all__ = ["DEPTHS", "Depth", "depth_of", "first_checks", "outside_checks"]

Clusterwise = Callable[[Case], Sequence[ChargeLimit]]


def first_checks(limits: Sequence[ChargeLimit]) -> Iterator[Check]:
    """What the limits prove themselves."""
    yield from certificate(limits)
    yield check_orders(limits)


def outside_checks(
    case: Case,
    weights: Weights,
    limits: Sequence[ChargeLimit],
    *,
    evaluate: Evaluate,
    clusterwise: Clusterwise,
    depth: Depth,
) -> Iterator[Check]:
    """All other checks on a case without symbols, of the limits on its own path ``weights.setting``.

    ``evaluate`` and ``clusterwise`` take the limits of other cases. Cost: bounded check by check by the depth, before
    any work.
    """
    yield from _routes(case, weights, limits, depth)
    yield from _relatives(case, evaluate, clusterwise, depth)
    yield from check_components(weights, [one.charge for one in limits], most=depth.configurations)
    for check in (
        check_burge_pairs(weights, limits, most_configurations=depth.configurations),
        check_burge_sum(weights, limits, most_configurations=depth.configurations),
        check_blow_up(case, evaluate, most=depth.configurations),
    ):
        if check is not None:
            yield check
    yield from regularity_checks(weights, [one.charge for one in limits], effort=depth.effort)


def _routes(case: Case, weights: Weights, limits: Sequence[ChargeLimit], depth: Depth) -> Iterator[Check]:
    setting = weights.setting
    yield from check_closed_forms(case, setting, limits)
    for form in minimal_forms(setting, [one.charge for one in limits]):
        check = compare(form, limits)
        if check is not None:
            yield check
    yield from check_elementary_path(case, setting, limits)
    yield from check_recursion(case, setting, limits)
    yield from check_gram(case, setting, limits, most_level=depth.level)
    adjoint = check_adjoint_clusters(setting, limits)
    if adjoint is not None:
        yield adjoint


def _relatives(case: Case, evaluate: Evaluate, clusterwise: Clusterwise, depth: Depth) -> Iterator[Check]:
    for check in (
        check_special_adjoint(case, evaluate, most=depth.configurations),
        check_special_clusters(case, clusterwise, most=depth.configurations),
        check_rectangles(case, evaluate, most=depth.configurations),
        check_one_instanton(case, evaluate, most=depth.configurations),
        check_seiberg_witten(case, evaluate, most=depth.configurations),
    ):
        if check is not None:
            yield check
    yield from check_collapse(case, evaluate, most=depth.configurations)
