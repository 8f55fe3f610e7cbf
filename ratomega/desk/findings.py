"""Everything that a report shows, computed within bounds: a big case is cut to the charges that are quickly done.

    case -> coefficients, singular configurations, checks, atlas, approach, each up to a charge of its own -> findings

What was cut is said in ``notes``. The bounds are estimates made from the case alone, never a timing: the same case
gives the same report everywhere.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

from ratomega.case.case import Case
from ratomega.case.reading import load_case
from ratomega.case.setting import own_setting
from ratomega.chain.job import CaseSource
from ratomega.chain.pipeline import detect, limit, validate
from ratomega.desk.text import charge_word
from ratomega.detector.atlas import HIGHEST_TOTAL, Atlas, atlas
from ratomega.diagrams.tuples import count_all
from ratomega.regulator.routes import choose
from ratomega.results.detections import DetectResult
from ratomega.results.limits import LimitResult
from ratomega.results.validations import ValidateResult
from ratomega.symbolic.structure import structure
from ratomega.validator.checklist import depth_of
from ratomega.verify.approach import Approach, approach
from ratomega.workers.charges import charge_cost

__all__ = ["Findings", "gather"]

# Estimated seconds of a plain sum over diagrams; scans and checks take some ten and more times as long.
LIMIT_COST, SCAN_COST, CHECK_COST, APPROACH_COST = 2.0, 0.3, 0.12, 0.06
FAST_COST, HIGHEST_BY_POLES, HIGHEST_ATLAS = 20.0, 60, 20
# Enumerating more charges than this, for their estimates, would take time itself.
MOST_COUNTED = 200_000
LARGEST_GRAPH = 12


@dataclass(frozen=True, slots=True)
class Findings:
    """The results that a report is made from.

    ``detect`` is None for a limit inside the limit, where there is no one path; ``approach`` also with symbols.
    """

    case: Case
    limit: LimitResult
    detect: DetectResult | None
    validate: ValidateResult
    atlas: Atlas
    approach: Approach | None
    notes: tuple[str, ...]


def gather(source: CaseSource, *, depth: str = "quick", allow_tilt: bool = True) -> Findings:
    """The findings on a case. ``depth`` "full" allows ten times the work. Raises ``InputError``.

    >>> case = {"charge": 500, "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["1/3", "-1/3"]}]}
    >>> gather({**case, "charge": 2}).notes
    ()
    """
    effort = 10.0 if depth_of(depth).name == "full" else 1.0
    case = load_case(source)
    notes = []

    def bounded(what: str, part: Case, advice: str) -> Case:
        if part.charge != case.charge:
            notes.append(f"{what}: up to charge {_bound(part)}, not {_bound(case)}; {advice}")
        return part

    within = bounded("coefficients", _limit_case(case, effort, allow_tilt), "ratomega limit goes further")
    limits = limit(within, allow_tilt=allow_tilt)
    found = None
    if not case.nested:
        part = bounded("singular configurations", _cheap(case, SCAN_COST * effort), "ratomega detect goes further")
        found = detect(part, exchanges=LARGEST_GRAPH, allow_tilt=allow_tilt)
    else:
        notes.append("singular configurations, clusters, pole orders: a limit inside the limit has no one path to scan")
    part = bounded("checks", _cheap(case, CHECK_COST * effort), "ratomega validate goes further")
    checks = validate(part, depth=depth, allow_tilt=allow_tilt)
    part = bounded("atlas", _atlas_case(case), "ratomega atlas goes further")
    whole = atlas(part)
    near = None
    if not case.nested and not case.symbols:
        part = bounded("approach", _cheap(case, APPROACH_COST * effort), "ratomega approach goes further")
        near = approach(part, allow_tilt=allow_tilt)
    elif case.nested:
        notes.append("approach: no sum at an irrational ratio stands for a limit inside the limit")
    else:
        notes.append("approach: a function of symbols is no number to come near to; give them values")
    return Findings(case, limits, found, checks, whole, near, tuple(notes))


def _bound(case: Case) -> str:
    return str(case.charge) if isinstance(case.charge, int) else charge_word(case.charge)


def _climb(case: Case, fits: Callable[[Case], bool]) -> Case:
    """The case itself, or cut to the highest charge up to which every one fits; charge 0 always does."""
    bounds = case.bounds
    best = case.with_charge(0 if isinstance(case.charge, int) else [0] * len(bounds))
    for k in range(1, max(bounds) + 1):
        nearer = case.with_charge(k if isinstance(case.charge, int) else [min(bound, k) for bound in bounds])
        if not fits(nearer):
            return best
        best = nearer
    return best


def _cost(case: Case) -> float:
    """Estimated seconds for the plain sum at all points that the case needs; infinite where it is beyond counting."""
    if count_all(case.theory.ranks, case.charge) > MOST_COUNTED:
        return math.inf
    charges = case.charges
    points = 1 + math.prod(structure(case, charges[-1]).nodes) if case.symbols else 1
    return points * sum(charge_cost(case.theory, charge) for charge in charges)


def _cheap(case: Case, most: float) -> Case:
    return _climb(case, lambda part: _cost(part) <= most)


def _limit_case(case: Case, effort: float, allow_tilt: bool) -> Case:
    """As far as the sum goes, or a short cut where one applies."""
    if case.nested:
        return _cheap(case, LIMIT_COST * effort / 10)
    direct = _cheap(case, LIMIT_COST * effort)
    if case.symbols or direct.charge == case.charge or not isinstance(case.charge, int):
        return direct
    setting = own_setting(case, allow_tilt=allow_tilt)
    highest_by_poles = HIGHEST_BY_POLES if effort == 1 else 2 * HIGHEST_BY_POLES

    def fits(part: Case) -> bool:
        assert isinstance(part.charge, int)
        if part.charge > highest_by_poles:
            return False
        way = choose(part, setting)
        cost = _cost(part)
        return way.short_cut == "poles" or cost <= (FAST_COST if way.short_cut == "fast" else LIMIT_COST) * effort

    far = _climb(case, fits)
    return far if far.bounds > direct.bounds else direct


def _atlas_case(case: Case) -> Case:
    most = min(HIGHEST_ATLAS, HIGHEST_TOTAL // len(case.bounds))
    if isinstance(case.charge, int):
        return case.with_charge(min(case.charge, HIGHEST_ATLAS))
    return case.with_charge([min(bound, most) for bound in case.charge])
