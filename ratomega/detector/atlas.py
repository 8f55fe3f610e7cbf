"""The atlas: every rational ratio at which some weight is singular, known before any weight is looked at.

At generic Coulomb parameters only factors of one colour with itself vanish, at positive ratios alone, and an order is
the sum of the orders of the colours. So one walk over the diagrams of one colour (``one_colour``) knows all ratios at
once; products of series in the number of boxes combine colours and nodes. No weight is formed, nothing is expanded.

Coulomb parameters and masses are taken as generic: a case gives its ranks, its charge and its background. At the
parameters of a case itself a resonance makes more weights singular, and a mass on the lattice can compensate; that is
what the detector's scan says. Where a background is given, the differences of Coulomb parameters at which Z has poles
stand beside.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import zip_longest

from ratomega.case.case import Case, checked_charge
from ratomega.case.reading import CaseSource, load_case
from ratomega.case.theory import HIGHEST_RANK, MOST_NODES
from ratomega.detector.coulomb_poles import PoleMap, coulomb_poles, own_poles
from ratomega.detector.one_colour import RatioCount, one_colour_census
from ratomega.diagrams.tuples import coloured_partitions, count_all
from ratomega.errors import InputError
from ratomega.exact.quadratic import only_rational
from ratomega.exact.rational import ONE, Rational, as_rational
from ratomega.version import VERSION

__all__ = ["Atlas", "SingularRatio", "atlas"]

# The walk over the diagrams of one colour to charge 40 takes some ten seconds.
HIGHEST_ATLAS_CHARGE = 40
# Over all nodes, where a charge is given node by node: the products of series grow with its square.
HIGHEST_TOTAL = 160


@dataclass(frozen=True, slots=True)
class SingularRatio:
    """A ratio at which some weight is singular within the charge. ``steps`` is eps1 : eps2 in lowest terms.

    ``singular`` counts the singular configurations up to the charge. ``by_charge`` has (total charge, worst order,
    singular configurations) from ``first_charge`` on.
    """

    steps: tuple[int, int]
    first_charge: int
    worst_order: int
    singular: int
    by_charge: tuple[tuple[int, int, int], ...]

    @property
    def ratio(self) -> Rational:
        """eps2 / eps1."""
        return Rational(self.steps[1], self.steps[0])


@dataclass(frozen=True, slots=True)
class Atlas:
    """All singular ratios by first charge and then by eps1's step; ``poles`` where a background was given.

    ``configurations`` counts all configurations up to the charge; ``hash`` is that of the case, None without one.
    """

    version: str
    hash: str | None
    ranks: tuple[int, ...]
    charge: int | tuple[int, ...]
    configurations: int
    ratios: tuple[SingularRatio, ...]
    poles: PoleMap | None

    def __getitem__(self, ratio: object) -> SingularRatio:
        """The entry of one ratio eps2/eps1; ``KeyError`` where no weight is singular."""
        wanted = as_rational(ratio, "ratio")
        for entry in self.ratios:
            if entry.ratio == wanted:
                return entry
        raise KeyError(ratio)

    @property
    def exit_status(self) -> int:
        """Always 0: whatever is found is a result."""
        return 0


def atlas(
    case: CaseSource | None = None,
    *,
    ranks: int | Sequence[int] | None = None,
    charge: int | Sequence[int] | None = None,
    ratio: object = None,
) -> Atlas:
    """Every ratio at which a weight is singular up to the charge, and where Z has poles at one ratio.

    Give a ``case`` (its charge may be replaced) or ``ranks`` with a ``charge``. Poles are listed at the background of
    the case; with ``ratio`` at eps2 = ratio eps1 instead, eps1 = 1 where there is no case.

    Raises ``InputError`` for bad input and for a charge beyond 40 (one colour's diagrams are walked through).

    >>> found = atlas(ranks=2, charge=4)
    >>> [(str(x.ratio), x.first_charge, x.worst_order, x.singular) for x in found.ratios]
    [('1', 2, 2, 30), ('2', 3, 1, 12), ('1/2', 3, 1, 12), ('3', 4, 1, 4), ('1/3', 4, 1, 4)]
    """
    loaded = None if case is None else load_case(case)
    if (loaded is None) == (ranks is None):
        raise InputError.single("an atlas takes a case or ranks, one of them", "ranks")
    if loaded is not None and charge is not None:
        loaded = loaded.with_charge(charge)
    sizes = _ranks(ranks) if loaded is None else loaded.theory.ranks
    if loaded is not None:
        charge = loaded.charge
    elif charge is None:
        raise InputError.single("ranks need a charge beside them", "charge")
    bound = checked_charge(charge, len(sizes))
    poles = _pole_map(loaded, bound, ratio)
    name = None if loaded is None else loaded.hash
    return Atlas(VERSION, name, sizes, bound, count_all(sizes, bound), singular_ratios(sizes, bound), poles)


def _ranks(ranks: object) -> tuple[int, ...]:
    given = [ranks] if isinstance(ranks, int) else ranks
    if not isinstance(given, Sequence) or isinstance(given, str) or not 1 <= len(given) <= MOST_NODES:
        raise InputError.single(f"ranks are one to {MOST_NODES} integers, one a node", "ranks")
    for rank in given:
        if not isinstance(rank, int) or isinstance(rank, bool) or not 1 <= rank <= HIGHEST_RANK:
            raise InputError.single(f"a rank is an integer between 1 and {HIGHEST_RANK}, not {rank}", "ranks")
    return tuple(given)


def _pole_map(case: Case | None, bound: int | tuple[int, ...], ratio: object) -> PoleMap | None:
    if case is None and ratio is None:
        return None
    eps1 = ONE if case is None else only_rational(case.background.eps1.constant)
    if ratio is not None:
        quotient = as_rational(ratio, "ratio")
        if quotient == 0:
            raise InputError.single("a ratio eps2/eps1 is not zero", "ratio")
        eps2 = eps1 * quotient
    else:
        assert case is not None
        eps2 = only_rational(case.background.eps2.constant)
    charge = bound if isinstance(bound, int) else max(bound)
    met = None if case is None else own_poles(case, eps1, eps2)
    return PoleMap(eps1, eps2, charge, coulomb_poles(eps1, eps2, charge), met)


def singular_ratios(ranks: Sequence[int], bound: int | tuple[int, ...]) -> tuple[SingularRatio, ...]:
    """The ratios for gauge nodes of these ranks; an integer bounds the total charge, a tuple every node's.

    Raises ``InputError`` for a charge that is too high.
    """
    bounds = (bound,) * len(ranks) if isinstance(bound, int) else bound
    highest, total = max(bounds), bound if isinstance(bound, int) else sum(bound)
    if highest > HIGHEST_ATLAS_CHARGE or total > HIGHEST_TOTAL:
        message = f"an atlas reaches to charge {HIGHEST_ATLAS_CHARGE} a node and {HIGHEST_TOTAL} in all"
        raise InputError.single(f"{message}, not {highest} and {total}", "charge")
    found: dict[tuple[int, int], SingularRatio] = {}
    for steps, count in sorted(one_colour_census(highest).items(), key=lambda item: (sum(item[0]), item[0])):
        alpha, beta = steps
        # Transposing every diagram exchanges eps1 and eps2.
        twin = found.get((beta, alpha))
        if twin is None:
            found[steps] = _combined(steps, count, ranks, bounds, total)
        else:
            found[steps] = replace(twin, steps=steps)
    return tuple(found.values())


def _combined(
    steps: tuple[int, int], count: RatioCount, ranks: Sequence[int], bounds: Sequence[int], total: int
) -> SingularRatio:
    """From one colour to the whole quiver: by total charge all configurations, the regular ones, the worst order."""
    everything, regular, worst = [1], [1], [0]
    ordinary = coloured_partitions(1, len(count.singular) - 1)
    calm = [n - bad for n, bad in zip(ordinary, count.singular, strict=True)]
    for rank, bound in zip(ranks, bounds, strict=True):
        everything = _product(everything, coloured_partitions(rank, bound), total)
        regular = _product(regular, _power(calm[: bound + 1], rank, bound), total)
        # Within a node one colour alone is worst: floor(n / (alpha + beta)) of the sum is at least the sum of floors.
        worst = _largest_sums(worst, count.worst[: bound + 1], total)
    singular = [n - fine for n, fine in zip(everything, regular, strict=True)]
    first = next(charge for charge, bad in enumerate(singular) if bad)
    rows = tuple((charge, worst[charge], singular[charge]) for charge in range(first, len(singular)))
    return SingularRatio(steps, first, max(worst), sum(singular), rows)


def _product(left: Sequence[int], right: Sequence[int], top: int) -> list[int]:
    result = [0] * min(len(left) + len(right) - 1, top + 1)
    for m, x in enumerate(left):
        for n, y in enumerate(right[: max(0, len(result) - m)]):
            result[m + n] += x * y
    return result


def _power(series: Sequence[int], exponent: int, top: int) -> list[int]:
    result: list[int] = [1]
    square = list(series)
    while exponent:
        if exponent % 2:
            result = _product(result, square, top)
        exponent //= 2
        if exponent:
            square = _product(square, square, top)
    # A power of a series that is known to ``top`` is known to ``top``.
    return [n for n, _ in zip_longest(result, range(top + 1), fillvalue=0)]


def _largest_sums(left: Sequence[int], right: Sequence[int], top: int) -> list[int]:
    """By total charge the largest order of two nodes together."""
    length = min(len(left) + len(right) - 1, top + 1)
    return [
        max(left[m] + right[k - m] for m in range(max(0, k - len(right) + 1), min(k, len(left) - 1) + 1))
        for k in range(length)
    ]
