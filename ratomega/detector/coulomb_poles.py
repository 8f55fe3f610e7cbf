"""Where Z has true poles in the Coulomb parameters at one ratio: a_alpha - a_beta = ±(m eps1 + n eps2), m, n >= 1.

The pair (m, n) enters at charge m n of the node. Around generic eps1 and eps2 each is a simple pole; at a rational
ratio several pairs give the same difference, and the order of the pole is at most their number, the multiplicity.
Special masses can lower it. Sources: Nakajima, Yoshioka math/0306198 (compactness elsewhere); Al. Zamolodchikov 1984,
R. Poghossian 0909.3412 (simple poles, two colours).
"""

from __future__ import annotations

from dataclasses import dataclass

from ratomega.case.affine import Affine
from ratomega.case.case import Case
from ratomega.case.expression import INNER
from ratomega.exact.path import Linear
from ratomega.exact.quadratic import number_text
from ratomega.exact.rational import Rational

__all__ = ["CoulombPole", "PoleMap", "coulomb_poles", "own_poles"]


@dataclass(frozen=True, slots=True)
class CoulombPole:
    """A pole at a_alpha - a_beta = ``difference`` and at minus that; ``difference`` is zero or more.

    ``pairs`` are all (m, n) with ±(m eps1 + n eps2) = difference within the charge, by charge m n and then m.
    ``multiplicity`` is their number, twice that at difference 0, where both signs meet; ``first_charge`` the least m n.
    """

    difference: Rational
    first_charge: int
    multiplicity: int
    pairs: tuple[tuple[int, int], ...]


@dataclass(frozen=True, slots=True)
class PoleMap:
    """The poles at one background up to one charge of a node, by first charge and then by difference.

    ``met`` says which differences of a given case sit on one of them; None where no case was given.
    """

    eps1: Rational
    eps2: Rational
    charge: int
    poles: tuple[CoulombPole, ...]
    met: tuple[str, ...] | None

    @property
    def ratio(self) -> Rational:
        return self.eps2 / self.eps1


def coulomb_poles(eps1: Rational, eps2: Rational, charge: int) -> tuple[CoulombPole, ...]:
    """All poles up to the charge. Cost: charge times its logarithm.

    >>> for pole in coulomb_poles(Rational(1), Rational(1), 2):
    ...     print(pole.difference, pole.first_charge, pole.multiplicity, pole.pairs)
    2 1 1 ((1, 1),)
    3 2 2 ((1, 2), (2, 1))
    """
    pairs: dict[Rational, list[tuple[int, int]]] = {}
    for m in range(1, charge + 1):
        for n in range(1, charge // m + 1):
            value = m * eps1 + n * eps2
            pairs.setdefault(-value if value < 0 else value, []).append((m, n))
    poles = []
    for difference, found in pairs.items():
        found.sort(key=lambda pair: (pair[0] * pair[1], pair[0]))
        multiplicity = len(found) if difference != 0 else 2 * len(found)
        poles.append(CoulombPole(difference, found[0][0] * found[0][1], multiplicity, tuple(found)))
    return tuple(sorted(poles, key=lambda pole: (pole.first_charge, pole.difference)))


def own_poles(case: Case, eps1: Rational, eps2: Rational) -> tuple[str, ...]:
    """The Coulomb differences of a case that sit on a pole within its charge, as sentences.

    A difference that contains a symbol is free, and sits on none; u is none, it goes to 0 as t does.
    """
    found = []
    for node, bound in zip(case.theory.nodes, case.bounds, strict=True):
        places = {pole.difference: pole for pole in coulomb_poles(eps1, eps2, bound)}
        for first, a in enumerate(node.coulomb, 1):
            for second, b in enumerate(node.coulomb[first:], first + 1):
                pole = _on(places, a - b, eps1, eps2)
                if pole is not None:
                    value = f"±{number_text(pole.difference)}" if pole.difference != 0 else "0"
                    found.append(f"{node.name}: a{first} - a{second} = {value}, from charge {pole.first_charge} on")
    return tuple(found)


def _on(
    places: dict[Rational, CoulombPole], difference: Affine, eps1: Rational, eps2: Rational
) -> CoulombPole | None:
    difference = difference.at({INNER: Affine()})
    if difference.symbols:
        return None
    value = difference.on(Linear(eps1), Linear(eps2)).constant
    return next((pole for place, pole in places.items() if value in (place, -place)), None)
