"""A case in conformal terms: central charge, fields by weight, momentum or Kac label; and the gauge case it stands for.

With b^2 = eps1/eps2, eps = eps1 + eps2 and A = eps1 eps2 the central charge is c = 1 + 6 eps^2/A, and a field of
momentum P has the weight

    Delta = (eps^2/4 - P^2)/A.

A Kac label (r, s) is the momentum P = (r eps1 + s eps2)/2. Only the ratio of eps1 and eps2 is physics; momenta are
measured in the unit in which eps1 and eps2 are coprime integers, eps1 positive. A weight gives P^2, which is rational
where P need not be.

Four fields at 0, x, 1, infinity are U(2) with Coulomb parameters (a, -a), a the internal momentum, and antifundamental
masses m0 ± P_0 and m1 ± P_inf, where m0 = eps/2 + P_x and m1 = eps/2 + P_1; one field on the torus is U(2) with an
adjoint of mass eps/2 + P (L. Alday, D. Gaiotto, Y. Tachikawa, arXiv 0906.3219).

On the way to the limit point eps2 moves and with it the central charge. What is a number (also a weight, by its
momentum) is held; a label, or a momentum in eps1 and eps2, moves along. The internal momentum is always held.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterable
from dataclasses import dataclass, replace
from math import isqrt

from ratomega.case.affine import Affine
from ratomega.case.background import Background
from ratomega.case.case import Case, checked_title
from ratomega.case.theory import Node, Theory
from ratomega.case.wording import kind, shortened
from ratomega.errors import InputError
from ratomega.exact.path import Linear
from ratomega.exact.quadratic import LARGEST_RADICAND, Number, number_text, one_field, quadratic, split_square
from ratomega.exact.rational import ZERO, Rational, exact_text

__all__ = [
    "HIGHEST_LABEL",
    "HIGHEST_ORDER",
    "PLACES",
    "ConformalCase",
    "Field",
    "checked_order",
    "exact_root",
    "gauge_case",
    "squared_ratio",
]

HIGHEST_ORDER = 150
HIGHEST_LABEL = 1000
PLACES = ("0", "x", "1", "infinity")
HALF = Rational(1, 2)

Label = tuple[int, int]


@dataclass(frozen=True, slots=True)
class Field:
    """A primary field by one of three kinds: "weight" (a rational), "momentum" (an expression in eps1 and eps2) or
    "kac" (a pair of positive integers)."""

    kind: str
    value: Rational | Affine | Label

    def text(self) -> str:
        """How it is shown: weight 1/16, momentum eps1/4, (1,2)."""
        if isinstance(self.value, tuple):
            return f"({self.value[0]},{self.value[1]})"
        return f"{self.kind} {self.value if isinstance(self.value, Affine) else exact_text(self.value)}"


@dataclass(frozen=True, slots=True)
class ConformalCase:
    """Four fields on the sphere, or one on the torus; ``order`` is the highest power of x, or of q on the torus."""

    title: str
    b_squared: Rational
    external: tuple[Field, ...]
    internal: Field
    order: int

    @property
    def eps1(self) -> Rational:
        return Rational(abs(int(self.b_squared.p)))

    @property
    def eps2(self) -> Rational:
        return Rational(int(self.b_squared.q) * (1 if self.b_squared > 0 else -1))

    @property
    def central_charge(self) -> Rational:
        """1 + 6 (b + 1/b)^2."""
        return 13 + 6 * (self.b_squared + 1 / self.b_squared)

    def with_order(self, order: object) -> ConformalCase:
        return replace(self, order=checked_order(order))

    def momentum(self, field: Field) -> Affine | None:
        """The momentum; of a weight the root of its square, None where it is beyond exact numbers."""
        if isinstance(field.value, Affine):
            return field.value
        if isinstance(field.value, tuple):
            return Affine(eps1=Rational(field.value[0]) / 2, eps2=Rational(field.value[1]) / 2)
        root = exact_root(self._square_of_weight(field.value))
        return None if root is None else Affine(root)

    def square(self, field: Field) -> Number:
        """P^2 at the limit point."""
        if not isinstance(field.value, (Affine, tuple)):
            return self._square_of_weight(field.value)
        momentum = self.momentum(field)
        assert momentum is not None
        number = momentum.on(Linear(self.eps1), Linear(self.eps2)).constant
        return number * number

    def _square_of_weight(self, weight: Rational) -> Rational:
        return (self.eps1 + self.eps2) ** 2 / 4 - weight * self.eps1 * self.eps2

    def key(self) -> str:
        """The physics alone as canonical text."""
        fields = [f"{field.kind} {_value_text(field)}" for field in (*self.external, self.internal)]
        return json.dumps(["conformal", exact_text(self.b_squared), *fields], separators=(",", ":"))

    @property
    def hash(self) -> str:
        """SHA-256 of ``key``, the first 16 hexadecimal digits."""
        return hashlib.sha256(self.key().encode()).hexdigest()[:16]

    @classmethod
    def make(
        cls, b_squared: Rational, external: Iterable[Field], internal: Field, order: object, title: str = ""
    ) -> ConformalCase:
        """The checking constructor. Raises ``InputError``, also where momenta lie in different quadratic fields.

        >>> third = Field("momentum", Affine(Rational(1, 3)))
        >>> case = ConformalCase.make(Rational(-4, 3), [Field("kac", (1, 2))], third, 3)
        >>> case.central_charge, case.eps1, case.eps2, case.square(case.external[0])
        (1/2, 4, -3, 1)
        """
        fields = tuple(external)
        if len(fields) not in (1, 4):
            message = f"give four fields (at {', '.join(PLACES)}), or one on the torus, not {len(fields)}"
            raise InputError.single(message, "external")
        if b_squared == 0:
            raise InputError.single("b^2 is not zero", "b_squared")
        given = [x for field in (*fields, internal) if isinstance(field.value, Affine) for x in field.value.numbers()]
        one_field(given)
        return cls(checked_title(title), b_squared, fields, internal, checked_order(order))


def _value_text(field: Field) -> str:
    return str(field.value) if isinstance(field.value, Affine) else str(field.value).replace(" ", "")


def checked_order(order: object) -> int:
    """``order`` when it is an integer in bounds; ``InputError`` otherwise."""
    if not isinstance(order, int) or isinstance(order, bool):
        raise InputError.single(f"the order is an integer, not {kind(order)}", "order")
    if not 0 <= order <= HIGHEST_ORDER:
        shown = shortened(exact_text(Rational(order)))
        raise InputError.single(f"the order is between 0 and {HIGHEST_ORDER}, not {shown}", "order")
    return order


def squared_ratio(central: Rational) -> Rational:
    """b^2 of a central charge, the one with |b^2| >= 1, that is |eps1| >= |eps2|. Raises ``InputError`` without one.

    c - 13 = 6 (b^2 + 1/b^2), so that 12 b^2 = c - 13 ± sqrt((c - 1)(c - 25)).

    >>> [squared_ratio(Rational(c)) for c in (1, 25, -2)], squared_ratio(Rational(1, 2))
    ([-1, 1, -2], -4/3)
    """
    root = exact_root((central - 1) * (central - 25))
    if not isinstance(root, Rational):
        raise InputError.single(
            f"c = {shortened(exact_text(central))} has no rational b^2, because (c - 1)(c - 25) is not the square of a "
            "rational number; b^2 = eps1/eps2 must be rational here",
            "c",
        )
    ends = ((central - 13 + root) / 12, (central - 13 - root) / 12)
    return max(ends, key=abs)


def exact_root(square: Rational) -> Number | None:
    """The square root as a rational or as y sqrt(d), y > 0; None where d would be too large to be split.

    >>> [str(exact_root(x)) for x in (Rational(9, 4), Rational(-8, 9), Rational(1, 2))]
    ['3/2', '2/3*sqrt(-2)', '1/2*sqrt(2)']
    >>> exact_root(Rational(10**40 + 1)) is None
    True
    """
    (top, top_rest), (bottom, bottom_rest) = _square_part(int(square.p)), _square_part(int(square.q))
    radicand = top_rest * bottom_rest
    factor = Rational(top, bottom * bottom_rest)
    if radicand in (0, 1):
        return factor * radicand
    if abs(radicand) > LARGEST_RADICAND:
        return None
    size, d = split_square(radicand)
    return quadratic(ZERO, factor * size, d)


def _square_part(n: int) -> tuple[int, int]:
    """(s, r) with n = s^2 r: r is ±1 or 0 for ± a square, else nothing is split off (factoring may be out of reach)."""
    root = isqrt(abs(n))
    if root * root == abs(n):
        return root, (n > 0) - (n < 0)
    return 1, n


def gauge_case(case: ConformalCase) -> Case:
    """The U(2) theory whose Z is the block times its U(1) factor, on the path described above.

    Raises ``InputError`` where momenta are no exact numbers of one quadratic field.

    >>> quarter = Field("weight", Rational(15, 16))
    >>> gauge = gauge_case(ConformalCase.make(Rational(1), [quarter] * 4, Field("weight", Rational(3, 4)), 2))
    >>> [str(x) for x in gauge.theory.nodes[0].coulomb + gauge.theory.nodes[0].antifundamental[:2]]
    ['1/2', '-1/2', '1/2 + eps1/2 + eps2/2', 'eps1/2 + eps2/2']
    """
    a, momenta = _gauge_momenta(case)
    eps_half = Affine(eps1=HALF, eps2=HALF)
    adjoint: tuple[Affine, ...] = ()
    flavours: tuple[Affine, ...] = ()
    if len(momenta) == 1:
        adjoint = (eps_half + momenta[0],)
    else:
        at_zero, at_x, at_one, at_infinity = momenta
        m0, m1 = eps_half + at_x, eps_half + at_one
        flavours = (m0 + at_zero, m0 - at_zero, m1 + at_infinity, m1 - at_infinity)
    node = Node("gauge", (Affine(a), Affine(-a)), flavours, (), adjoint)
    background = Background.make(Affine(case.eps1), Affine(case.eps2))
    return Case.make(Theory.make([node]), background, case.order, case.title)


def _gauge_momenta(case: ConformalCase) -> tuple[Number, tuple[Affine, ...]]:
    """The internal momentum as a number, and the external ones."""
    names = [f"external[{number}]" for number in range(1, len(case.external) + 1)] + ["internal"]
    found = []
    for where, field in zip(names, (*case.external, case.internal), strict=True):
        momentum = case.momentum(field)
        if momentum is None:
            square = shortened(number_text(case.square(field)))
            raise InputError.single(
                f"there is no gauge theory with exact masses: the momentum is the root of {square}, and numbers under "
                f'a root go up to {LARGEST_RADICAND}; "ratomega block" takes the case as it is',
                where,
            )
        found.append(momentum)
    try:
        one_field(x for momentum in found for x in momentum.numbers())
    except InputError as error:
        raise InputError.single(
            f"there is no gauge theory with exact masses: among the momenta {error}; "
            '"ratomega block" takes the case as it is',
            "external",
        ) from None
    a = found[-1].on(Linear(case.eps1), Linear(case.eps2)).constant
    return a, tuple(found[:-1])
