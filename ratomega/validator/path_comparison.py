"""Forms on the case's own path against what the sum over diagrams gives on it.

A form may hold a pole, and at a resonance it belongs to one path: so the leading behaviour on the own path is compared,
not the verdict on all paths.
"""

from __future__ import annotations

from collections.abc import Sequence

from ratomega.case.case import Case
from ratomega.case.setting import Setting
from ratomega.regulator.limits import ChargeLimit
from ratomega.validator.finiteness import charge_text, reach_text
from ratomega.validator.verdict import Check, Kind, Verdict
from ratomega.validator.virasoro import MOST_LEVEL, Leading, PathForm, elementary_path_form, gram_path_form

__all__ = ["check_elementary_path", "check_gram", "compare_on_path"]


def compare_on_path(form: PathForm, limits: Sequence[ChargeLimit]) -> Check | None:
    """Compare with the own path of the limits at every charge that both have; None when that is charge 0 at most."""
    compared = [limit for limit in limits if limit.charge in form.values]
    if not any(any(limit.charge) for limit in compared):
        return None
    for limit in compared:
        expected, found = form.values[limit.charge], Leading(limit.own.order, limit.own.value)
        if expected != found:
            evidence = (
                f"{form.statement}; first difference at {charge_text(limit.charge)}: this way {expected.text()}, "
                f"sum over diagrams {found.text()}"
            )
            return Check(form.name, Verdict.REFUTED, Kind.INDEPENDENT, evidence, form.source)
    poles = [charge_text(limit.charge) for limit in compared if limit.own.order > 0]
    parts = [form.statement, f"equal {reach_text([limit.charge for limit in compared])}"]
    parts += [f"the same surviving pole at {', '.join(poles)}"] if poles else []
    parts += [form.note] if form.note else []
    complete = len(compared) == len(limits)
    return Check(form.name, Verdict.AGREES, Kind.INDEPENDENT, "; ".join(parts), form.source, complete)


def check_gram(
    case: Case, setting: Setting, limits: Sequence[ChargeLimit], *, most_level: int = MOST_LEVEL
) -> tuple[Check, ...]:
    """The Gram matrices against the limits on the own path: one check, none when the theory is not covered."""
    form = gram_path_form(case, setting, most_level=most_level) if limits else None
    check = None if form is None else compare_on_path(form, limits)
    return () if check is None else (check,)


def check_elementary_path(case: Case, setting: Setting, limits: Sequence[ChargeLimit]) -> tuple[Check, ...]:
    """The elementary block along the path against the limits at resonant charges; none where it does not apply."""
    form = elementary_path_form(case, setting)
    check = None if form is None else compare_on_path(form, limits)
    return () if check is None else (check,)
