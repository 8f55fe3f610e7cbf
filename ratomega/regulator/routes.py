"""Which way to the coefficients: a fixed rule on the case, never a timing.

*direct* sums over diagrams: cluster by cluster in exact Laurent series (``direct``), or, with many configurations and
where they apply, by the fast sums from residues (``fast``). *poles* is the recursion of U(2) (``poles``), which shares
no code with them above exact arithmetic. Both short cuts serve only charges at which every component is compact: there
the limit is finite and the same on every path by theorem, and no cluster needs to be looked at.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from ratomega.case.case import Case
from ratomega.case.setting import Setting, own_setting
from ratomega.diagrams.tuples import Charge, count_all
from ratomega.errors import InputError
from ratomega.exact.batches import ResidueTask, Supplier, here
from ratomega.exact.quadratic import Number
from ratomega.regulator.direct import direct_total
from ratomega.regulator.fast.setup import prepare
from ratomega.regulator.fast.sums import applies as fast_applies
from ratomega.regulator.fast.sums import fast_sum, worthwhile
from ratomega.regulator.fast.task import FAST, FastTask
from ratomega.regulator.poles.problem import applies as poles_apply
from ratomega.regulator.poles.problem import case_problem
from ratomega.regulator.poles.recursion import by_series, pole_coefficients
from ratomega.regulator.poles.task import POLES, POLES_AT_POINT, PoleTask
from ratomega.weights import Weights

__all__ = ["ROUTES", "ShortCut", "Way", "choose", "point_values", "residue_task", "short_cut", "uses_primes"]

ROUTES = ("auto", "direct", "poles")
# Up to here the sum is done cluster by cluster in a fraction of a second, and its certificate looks at every weight.
CLUSTERWISE = 1_500
# Beyond this charge the recursion takes many minutes and gigabytes.
HIGHEST_POLE_CHARGE = 150


@dataclass(frozen=True, slots=True)
class Way:
    """The way taken. ``short_cut`` is "" for the sum cluster by cluster, else "fast" or "poles"."""

    route: str
    short_cut: str
    why: str


@dataclass(frozen=True, slots=True)
class ShortCut:
    """Z_0 ... Z_K by a short cut.

    ``method`` is "exact", "residues" (confirmed by ``spare_bits`` at least for every coefficient) or "proved" (residues
    beyond a proved bound); ``primes`` counts the primes used.
    """

    values: tuple[Number, ...]
    method: str
    spare_bits: int | None
    primes: int


def choose(case: Case, setting: Setting, route: str = "auto", *, clusterwise: bool = False) -> Way:
    """The way for a case. ``clusterwise``: something was asked for that only the sum cluster by cluster gives.

    Raises ``InputError`` when the route does not exist, or was asked for and does not cover the case.
    """
    if route not in ROUTES:
        raise InputError.single(f'"{route}" is not a route; the routes are {", ".join(ROUTES)}', "route")
    refusal = "" if route == "direct" else _no_poles(case)
    if route == "poles":
        if clusterwise:
            refusal = "an expansion in t or a case with symbols needs the direct sum"
        if refusal:
            raise InputError.single(refusal, "route")
        return Way("poles", "poles", "asked for")
    asked = "asked for; " if route == "direct" else ""
    if clusterwise:
        return Way("direct", "", f"{asked}cluster by cluster")
    count = count_all(setting.ranks, case.charge)
    if count <= CLUSTERWISE:
        return Way("direct", "", f"{asked}{count} configurations, at most {CLUSTERWISE}: cluster by cluster")
    if route == "auto" and not refusal:
        return Way("poles", "poles", f"{count} configurations, more than {CLUSTERWISE}, and the pole recursion applies")
    why = f"{asked}{count} configurations, more than {CLUSTERWISE}"
    if isinstance(case.charge, int) and fast_applies(setting, case.charge) is None:
        return Way("direct", "fast", f"{why}, and the fast sums apply")
    return Way("direct", "", f"{why}, but no short cut applies: cluster by cluster")


def _no_poles(case: Case) -> str:
    """Why the recursion does not serve this case; empty when it does."""
    if not isinstance(case.charge, int):
        return "the pole recursion takes one bound on the charge, an integer"
    if case.charge > HIGHEST_POLE_CHARGE:
        return f"the pole recursion is limited to charge {HIGHEST_POLE_CHARGE}"
    return poles_apply(case).reason


def uses_primes(way: Way, case: Case) -> bool:
    """Does the way go through residues, which can be computed elsewhere (``supplier``)?"""
    return bool(way.short_cut) and not (way.short_cut == "poles" and by_series(case.bounds[0]))


def short_cut(
    way: Way, case: Case, setting: Setting, *, certify: bool = False, supplier: Supplier = here
) -> ShortCut:
    """All coefficients by the short cut of a way. ``supplier`` says where residues come from (by default they are
    computed here); nothing in the result depends on it. Cost: see ``fast`` and ``poles``."""
    charge = case.bounds[0]
    if way.short_cut == "poles":
        found = pole_coefficients(case_problem(case), charge, certify=certify, supplier=supplier)
        method = "exact" if not found.primes else "proved" if found.certified else "residues"
        return ShortCut(found.coefficients, method, found.spare_bits, found.primes)
    done = fast_sum(setting, charge, certify=certify, supplier=supplier)
    return ShortCut(done.coefficients, "proved" if done.proved else "residues", min(done.spare_bits), done.primes)


def residue_task(name: str, case: Case, charge: int) -> ResidueTask:
    """The task that a short cut gives to its supplier, from its name, the case and the charge of the task: what another
    process needs to compute the same residues. The charge of the case does not matter.

    Raises ``ValueError`` for a name that no task has.
    """
    if name == FAST:
        return FastTask.make(prepare(own_setting(case)), charge)
    if name in (POLES, POLES_AT_POINT):
        return PoleTask.make(case_problem(case), charge, at_square=name == POLES_AT_POINT)
    raise ValueError(f"no short cut has a task {name!r}")


def point_values(setting: Setting, highest: tuple[int, ...]) -> Callable[[Charge], Number]:
    """The limit at every charge within the highest, for a setting without resonances: what interpolation asks for."""
    if len(highest) == 1 and worthwhile(setting, highest[0]):
        coefficients = fast_sum(setting, highest[0]).coefficients
        return lambda wanted: coefficients[wanted[0]]
    weights = Weights(setting)
    return lambda wanted: direct_total(weights, wanted).coefficient(0)
