"""What theory says of a coefficient as a function of the free parameters: its poles, its growth, its symmetry.

*Poles.* At charge k a component of the fixed locus can fail to be compact only where a_alpha - a_beta = m eps1 + n eps2
for two colours of a node, m, n >= 1, m n <= k (charge of that node). For generic eps1, eps2 each of these is a simple
pole; at a rational ratio several fall together, and their multiplicities add up. The limit has no other poles.

*Growth.* A weight is a product of known numbers of factors of every kind; those that contain a symbol count. The
largest count among the weights bounds the growth of the sum, the denominators are known, and so the degree of the
numerator is bounded in every symbol.

*Symmetry.* A change of sign of a symbol that only permutes the colours of each node leaves Z as it is.

Sources: Nekrasov hep-th/0206161; Nakajima, Yoshioka math/0306198 (compactness); Al. Zamolodchikov 1984, Poghossian
0909.3412 (simple poles, two colours).
"""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass

from ratomega.case.affine import Affine
from ratomega.case.case import Case
from ratomega.diagrams.tuples import Charge
from ratomega.errors import InputError
from ratomega.exact.factored import Whole
from ratomega.exact.path import Linear
from ratomega.exact.quadratic import Number, Quadratic, as_integer, rational_parts
from ratomega.exact.rational import ONE, ZERO, Rational, common_denominator

__all__ = ["Plane", "Structure", "even_symbols", "primes_of", "structure"]

Plane = tuple[Whole, ...]
"""A linear form c_0 + c_1 s_1 + ...: coprime integers, the first of c_1, c_2, ... that is not 0 positive.

Over a quadratic field the others may have two integer parts; coprime are then all parts together.
"""


@dataclass(frozen=True, slots=True)
class Structure:
    """At one charge: the linear factors of the denominator with multiplicities, the degree of the numerator in every
    symbol at most, and which symbols enter by their square alone.
    """

    planes: tuple[tuple[Plane, int], ...]
    degrees: tuple[int, ...]
    even: tuple[bool, ...]

    @property
    def nodes(self) -> tuple[int, ...]:
        """How many values of every symbol fix the numerator (of its square, where it is even)."""
        return tuple(d // 2 + 1 if even else d + 1 for d, even in zip(self.degrees, self.even, strict=True))


def structure(case: Case, charge: Charge) -> Structure:
    """Raises ``InputError`` when a denominator vanishes at the limit point whatever the symbols are."""
    planes: Counter[Plane] = Counter()
    for node, (index, difference) in _differences(case):
        for m, n in _steps(charge[index]):
            plane = _plane(case, difference - Affine(eps1=Rational(m), eps2=Rational(n)))
            if any(plane[1:]):
                planes[plane] += 1
            elif plane[0] == 0:
                raise InputError.single(
                    f"a difference of Coulomb parameters, {difference}, equals {m}*eps1 + {n}*eps2 at the limit point "
                    "whatever the symbols are; no component is compact there, and the limit as a function needs that: "
                    "give numbers for the symbols instead",
                    f"node {node}",
                )
    poles = [sum(times for plane, times in planes.items() if plane[1 + s]) for s in range(len(case.symbols))]
    growth = [_growth(case, charge, symbol) for symbol in case.symbols]
    degrees = tuple(max(0, p + g) for p, g in zip(poles, growth, strict=True))
    return Structure(tuple(sorted(planes.items(), key=_by_parts)), degrees, even_symbols(case))


def _by_parts(one: tuple[Plane, int]) -> list[tuple[Rational, Rational]]:
    return [(c.x, c.y) if isinstance(c, Quadratic) else (Rational(c), ZERO) for c in one[0]]


def _differences(case: Case) -> Iterator[tuple[str, tuple[int, Affine]]]:
    """Every difference of two different Coulomb parameters of a node, in both orders."""
    for index, node in enumerate(case.theory.nodes):
        for alpha, a in enumerate(node.coulomb):
            for beta, b in enumerate(node.coulomb):
                if alpha != beta:
                    yield node.name, (index, a - b)


def _steps(charge: int) -> Iterator[tuple[int, int]]:
    for m in range(1, charge + 1):
        for n in range(1, charge // m + 1):
            yield m, n


def _plane(case: Case, form: Affine) -> Plane:
    """The form at the limit point in the normal form of a ``Plane``."""
    at_limit = [Linear(x.constant) for x in (case.background.eps1, case.background.eps2)]
    numbers: list[Number] = [Affine(form.constant, form.eps1, form.eps2).on(*at_limit).constant]
    numbers += [form.coefficient(name) for name in case.symbols]
    lead = next((x for x in numbers[1:] if x != 0), ONE)
    if isinstance(lead, Quadratic):
        numbers = [x / lead for x in numbers]
        lead = ONE
    parts = [part for x in numbers for part in rational_parts(x)]
    scale = common_denominator(parts)
    divisor = math.gcd(*(int((part * scale).p) for part in parts)) or 1
    return tuple(_whole(x * Rational(scale if lead > 0 else -scale, divisor)) for x in numbers)


def _whole(value: Number) -> Whole:
    if isinstance(value, Quadratic):
        return value
    whole = as_integer(value)
    assert whole is not None
    return whole


def _growth(case: Case, charge: Charge, symbol: str) -> int:
    """The largest number of numerator factors with the symbol, less denominators with it, among the weights.

    The number is additive: every box of a colour brings a fixed one, so the boxes of a node go to its best colour.
    """

    def has(form: Affine) -> bool:
        return form.coefficient(symbol) != 0

    brings = []
    for node in case.theory.nodes:
        flavours = [-m for m in node.antifundamental] + list(node.fundamental)
        brings.append([sum(has(a - m) for m in flavours) for a in node.coulomb])
    for gains, node in zip(brings, case.theory.nodes, strict=True):
        for first, a in enumerate(node.coulomb):
            for second, b in enumerate(node.coulomb):
                factors = sum(has(a - b - m) for m in node.adjoint) - has(a - b)
                gains[first] += factors
                gains[second] += factors
    for edge in case.theory.edges:
        for first, a in enumerate(case.theory.nodes[edge.source].coulomb):
            for second, b in enumerate(case.theory.nodes[edge.target].coulomb):
                factors = int(has(a - b - edge.mass))
                brings[edge.source][first] += factors
                brings[edge.target][second] += factors
    return sum(k * max(gains) for k, gains in zip(charge, brings, strict=True))


def primes_of(case: Case) -> int:
    """A number that contains every prime of the denominators of a case, and of the coefficients of its symbols."""
    result = 1
    backgrounds = (x for form in (case.background.eps1, case.background.eps2) for x in (form.constant, form.slope))
    parameters = [parameter for _, parameter in case.theory.parameters()]
    for x in (*backgrounds, *(x for parameter in parameters for x in parameter.numbers())):
        result = math.lcm(result, *(int(part.q) for part in rational_parts(x)))
    for parameter in parameters:
        for _, x in parameter.symbols:
            # A prime that does not divide the norm of a coefficient stays in the denominator of its product with j/p.
            size = x.norm() if isinstance(x, Quadratic) else x
            result = math.lcm(result, abs(int(size.p)))
    return result


def even_symbols(case: Case) -> tuple[bool, ...]:
    """For every symbol: does its change of sign only permute the colours of each node?"""
    return tuple(_same_up_to_colours(case, symbol) for symbol in case.symbols)


def _same_up_to_colours(case: Case, symbol: str) -> bool:
    one, two = case.theory, case.theory.at({symbol: Affine(symbols=((symbol, -ONE),))})
    for left, right in zip(one.nodes, two.nodes, strict=True):
        for kind in ("coulomb", "antifundamental", "fundamental", "adjoint"):
            if sorted(x.key() for x in getattr(left, kind)) != sorted(x.key() for x in getattr(right, kind)):
                return False
    return sorted((e.source, e.target, e.mass.key()) for e in one.edges) == sorted(
        (e.source, e.target, e.mass.key()) for e in two.edges
    )
