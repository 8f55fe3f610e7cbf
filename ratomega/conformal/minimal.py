"""Minimal models M(p, p') and the cases that are their four-point blocks.

On a ratio eps1 : eps2 = p' : -p with coprime p, p' >= 2 the central charge is that of M(p, p'). A momentum P is written
by twice its value, 2P = r eps1 + s eps2, and has the weight

    h_rs = ((r p' - s p)^2 - (p' - p)^2) / (4 p p'),       1 <= r < p, 1 <= s < p',

the same for (r, s) and (p - r, p' - s), which have opposite momenta because p eps1 + p' eps2 = 0. The internal momentum
of U(2) is a_1 - a_2. Four antifundamental masses m0 ± P_0 and m1 ± P_inf belong to fields at 0, x, 1, infinity of
momenta P_0, m0 - eps/2, m1 - eps/2, P_inf, and Z = (1 - x)^(2 m0 m1 / (eps1 eps2)) times the block; the four masses
make two pairs in three ways, and each way has its own fields and its own block.

When is the limit the block of the minimal model? Where the fusion rules hold at the limit point, on both sides of the
channel: then on every path. In outline: let w be the descendants by which two fields fuse into the internal Verma
module. Near the limit point w has a simple pole at every 2a = m eps1 + n eps2 that passes through it. Its residue
contains the fusion polynomial of (m, n), which vanishes at the limit point like t (where it stands beside vanishing
denominators, it vanishes faster), so that w stays finite. A null vector of the j-th step of the Jantzen filtration
has norm t^j, hence its overlaps with both sides vanish like t^j, and it contributes t^(2j - j): nothing. Computed,
and equal to one another, were: a typed as a degenerate expression with a tilt, eps2 moving; typed masses and a that
do not move with eps2; masses on tilts of their own; the ratio held fixed and a alone moving (a path that only
``Setting`` can express); to charges beyond the first second-step vector, at p p' - |r p' - s p|. So no order of
limits is wrong there, and a case may be typed in any of these ways. The order matters elsewhere: where p or p' is 1
(at c = 1 four fields of weight 1/16 give another value at charge 4 for every direction), and where the fusion rules
hold on one side only. Then overlaps vanish like t and 1, a norm like t, and what remains depends on the path, also in
the limit of a small tilt; but then the other two fields do not couple to the irreducible module, and there is no
block of the minimal model to be met.

Sources: A. Belavin, A. Polyakov, A. Zamolodchikov 1984 (weights, fusion rules); A. Rocha-Caridi 1985 (characters);
J. Jantzen 1979 (filtration); Alday, Gaiotto, Tachikawa, arXiv 0906.3219 (masses and momenta).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from math import gcd

from ratomega.case.setting import Setting
from ratomega.errors import InputError
from ratomega.exact.quadratic import Number, as_integer, only_rational
from ratomega.exact.rational import Rational

__all__ = ["FourPoint", "Label", "MinimalModel", "MinimalPoint", "minimal_point"]

Label = tuple[int, int]
"""A Kac label (r, s)."""


@dataclass(frozen=True, slots=True)
class MinimalModel:
    """M(p, p'), both at least 2 and coprime; labels are (r, s) with 1 <= r < p and 1 <= s < p'.

    >>> ising = MinimalModel.make(3, 4)
    >>> ising.central_charge, [(label, ising.weight(label)) for label in ising.labels()]
    (1/2, [((1, 1), 0), ((1, 2), 1/16), ((1, 3), 1/2)])
    """

    p: int
    p_prime: int

    @classmethod
    def make(cls, p: int, p_prime: int) -> MinimalModel:
        """The checking constructor. Raises ``InputError``."""
        if p < 2 or p_prime < 2 or gcd(p, p_prime) != 1:
            message = f"a minimal model has two coprime integers of at least 2, not {p} and {p_prime}"
            raise InputError.single(message, "p, p'")
        return cls(p, p_prime)

    def __str__(self) -> str:
        return f"M({self.p},{self.p_prime})"

    @property
    def central_charge(self) -> Rational:
        """1 - 6 (p' - p)^2 / (p p')."""
        return 1 - Rational(6 * (self.p_prime - self.p) ** 2, self.p * self.p_prime)

    def has(self, label: Label) -> bool:
        """Does the label stand in the Kac table?"""
        return 1 <= label[0] < self.p and 1 <= label[1] < self.p_prime

    def partner(self, label: Label) -> Label:
        """The other label of the same field."""
        return self.p - label[0], self.p_prime - label[1]

    def canonical(self, label: Label) -> Label:
        """The smaller label of the field. Raises ``ValueError`` for a label outside the Kac table."""
        if not self.has(label):
            raise ValueError(f"{label} is not in the Kac table of {self}")
        return min(label, self.partner(label))

    def labels(self) -> tuple[Label, ...]:
        """One label of every field, the smaller one, ascending."""
        table = ((r, s) for r in range(1, self.p) for s in range(1, self.p_prime))
        return tuple(label for label in table if self.canonical(label) == label)

    def weight(self, label: Label) -> Rational:
        """The conformal weight h_rs.

        >>> MinimalModel.make(4, 5).weight((3, 1))
        3/2
        """
        number = self.number(self.canonical(label))
        return Rational(number**2 - (self.p_prime - self.p) ** 2, 4 * self.p * self.p_prime)

    def number(self, label: Label) -> int:
        """r p' - s p: twice the momentum in units of eps1 / p'."""
        return label[0] * self.p_prime - label[1] * self.p

    def label_of(self, number: int) -> Label | None:
        """The one label with r p' - s p = ``number``, None when there is none.

        >>> [MinimalModel.make(3, 4).label_of(n) for n in (1, -1, 0, 5)]
        [(1, 1), (2, 3), None, (2, 1)]
        """
        r = number * pow(self.p_prime, -1, self.p) % self.p
        label = r, (r * self.p_prime - number) // self.p
        return label if self.has(label) else None

    def fuse(self, first: Label, second: Label) -> tuple[Label, ...]:
        """The fields in the product of two fields, canonical labels, ascending.

        >>> MinimalModel.make(3, 4).fuse((1, 2), (1, 2)), MinimalModel.make(4, 5).fuse((3, 1), (3, 1))
        (((1, 1), (1, 3)), ((1, 1),))
        """
        (r1, s1), (r2, s2) = self.canonical(first), self.canonical(second)
        # Canonical labels have r <= p/2, so that only the columns meet the end of the table.
        rows = range(abs(r1 - r2) + 1, r1 + r2, 2)
        columns = range(abs(s1 - s2) + 1, min(s1 + s2 - 1, 2 * self.p_prime - 1 - s1 - s2) + 1, 2)
        return tuple(sorted({self.canonical((r, s)) for r in rows for s in columns}))

    def character(self, label: Label, order: int) -> tuple[int, ...]:
        """The numbers of states at the levels 0 ... ``order`` of the irreducible module: the character of Rocha-Caridi
        without its power q^(h - c/24),

            prod_n 1/(1 - q^n) sum_k (q^(k (k p p' + r p' - s p)) - q^((k p + r) (k p' + s))), k over all integers.

        Cost: order^2.

        >>> MinimalModel.make(2, 5).character((1, 1), 8), MinimalModel.make(2, 5).character((1, 2), 6)
        ((1, 0, 1, 1, 1, 1, 2, 2, 3), (1, 1, 1, 1, 2, 2, 3))
        """
        if not self.has(label):
            raise ValueError(f"{label} is not in the Kac table of {self}")
        (r, s), p, q = label, self.p, self.p_prime
        states = [0] * (order + 1)
        # Beyond |k| = order + 1 both exponents exceed the order.
        for k in range(-order - 1, order + 2):
            for sign, level in ((1, k * (k * p * q + r * q - s * p)), (-1, (k * p + r) * (k * q + s))):
                if level <= order:
                    states[level] += sign
        for part in range(1, order + 1):
            for level in range(part, order + 1):
                states[level] += states[level - part]
        return tuple(states)


@dataclass(frozen=True, slots=True)
class FourPoint:
    """One way in which four flavours are degenerate fields: ``fields`` at 0, x, 1, infinity, canonical labels.

    Z is (1 - x)^``exponent`` times the block with the ``internal`` field.
    """

    model: MinimalModel
    fields: tuple[Label, Label, Label, Label]
    internal: Label
    exponent: Rational

    @property
    def fusion_holds(self) -> bool:
        """Is the internal field in the products of the first two fields and of the last two?"""
        first, second, third, fourth = self.fields
        return self.internal in self.model.fuse(first, second) and self.internal in self.model.fuse(third, fourth)

    def __str__(self) -> str:
        return f"fields {', '.join(_text(label) for label in self.fields)}, channel {_text(self.internal)}"


def _text(label: Label) -> str:
    return f"({label[0]},{label[1]})"


@dataclass(frozen=True, slots=True)
class MinimalPoint:
    """The limit point of a U(2) case whose internal momentum is degenerate: a_1 - a_2 = r eps1 + s eps2.

    ``four_points`` holds the ways in which four flavours are degenerate fields, at most three and each once; it is
    empty for another number of flavours, with an adjoint, and where no way is degenerate.
    """

    model: MinimalModel
    label: Label
    four_points: tuple[FourPoint, ...]

    @property
    def fusion_holds(self) -> bool:
        """Do the fusion rules hold for some way of reading the flavours as fields?"""
        return any(one.fusion_holds for one in self.four_points)


def minimal_point(setting: Setting) -> MinimalPoint | None:
    """What the limit point of ``setting`` is in a minimal model; None when it is none or the theory is not one U(2).

    Only limit values are looked at: the scale of eps1 and eps2, the sum of the Coulomb parameters and the path do not
    matter. Cost: a few exact operations.
    """
    if len(setting.nodes) != 1 or setting.nodes[0].rank != 2:
        return None
    node = setting.nodes[0]
    eps1, eps2 = only_rational(setting.eps1.constant), only_rational(setting.eps2.constant)
    ratio = -eps2 / eps1
    p, p_prime = int(ratio.p), int(ratio.q)
    if p < 2 or p_prime < 2:
        return None
    model, unit = MinimalModel.make(p, p_prime), eps1 / p_prime
    first, second = (a.constant for a in node.coulomb)
    label = _label(model, (first - second) / unit)
    if label is None:
        return None
    eps = eps1 + eps2
    masses = [m.constant for m in node.antifundamental] + [eps - m.constant for m in node.fundamental]
    shifted = [m + (first + second) / 2 for m in masses]
    ways: tuple[FourPoint, ...] = ()
    if len(masses) == 4 and not node.adjoint:
        ways = tuple(dict.fromkeys(_four_points(model, model.canonical(label), shifted, eps1, eps2)))
    return MinimalPoint(model, label, ways)


def _label(model: MinimalModel, number: Number) -> Label | None:
    whole = as_integer(number)
    return None if whole is None else model.label_of(whole)


def _four_points(
    model: MinimalModel, internal: Label, masses: list[Number], eps1: Rational, eps2: Rational
) -> Iterator[FourPoint]:
    """The ways to make two pairs m0 ± P_0 and m1 ± P_inf of the masses so that all four fields are degenerate."""
    unit, eps = eps1 / model.p_prime, eps1 + eps2
    for second in (1, 2, 3):
        third, fourth = (n for n in (1, 2, 3) if n != second)
        (x, y), (z, w) = (masses[0], masses[second]), (masses[third], masses[fourth])
        labels = [_label(model, double / unit) for double in (x - y, x + y - eps, z + w - eps, z - w)]
        at0, at_x, at1, at_infinity = (None if label is None else model.canonical(label) for label in labels)
        if at0 is None or at_x is None or at1 is None or at_infinity is None:
            continue
        # All four momenta are rational, so the sums of the pairs are.
        exponent = only_rational((x + y) * (z + w) / (2 * eps1 * eps2))
        yield FourPoint(model, (at0, at_x, at1, at_infinity), internal, exponent)
