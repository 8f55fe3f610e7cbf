"""From a configuration to its factored weight.

Everything is one product over boxes. For two diagrams l, m and a root x,

    N_lm(x) = prod_{s in l} (x - eps1 L_m(s) + eps2 (A_l(s) + 1)) * prod_{s in m} (x + eps1 (L_l(s) + 1) - eps2 A_m(s)),

and with contents phi(s) = a + (i - 1) eps1 + (j - 1) eps2 and eps = eps1 + eps2 the multiplets are

    vector            prod over colours alpha, beta of a node      1 / N(a_alpha - a_beta)
    adjoint, m                                                         N(a_alpha - a_beta - m)
    bifundamental, m  prod over colours of source and target           N(a_alpha - b_beta - m)
    antifundamental   prod over boxes                                  phi + m
    fundamental       prod over boxes                                  phi - m + eps

There is no extra sign. Reversing an edge with m -> eps - m flips the sign of every factor of N: q of the source changes
by (-1)^(rank of the target), and q of the target by (-1)^(rank of the source).
Source: Nekrasov hep-th/0206161; Flume, Poghossian hep-th/0208176; Bruzzo, Fucito, Morales, Tanzini hep-th/0211108.

Every factor is root + p eps1 + q eps2 with integers p, q; the list of (p, q) depends on the diagrams alone.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from ratomega.case.setting import Setting
from ratomega.diagrams.tuples import Configuration
from ratomega.diagrams.young import Box, Diagram, boxes, transpose
from ratomega.exact.factored import Factored, Form, Whole, expand, integer_form, linear_factors, rational_form
from ratomega.exact.laurent import Laurent
from ratomega.exact.path import Linear
from ratomega.exact.quadratic import Number, Quadratic, one_field, rational_parts
from ratomega.exact.rational import ONE, common_denominator

__all__ = ["ContentsKey", "Factor", "Weight", "Weights", "pair_points"]

Point = tuple[int, int]
ContentsKey = tuple[tuple[int, ...] | tuple[tuple[int, int], ...], ...]
"""Node by node the sorted contents: integers, or over a quadratic field pairs of integers."""


def pair_points(lam: Diagram, mu: Diagram, lam_columns: Diagram, mu_columns: Diagram) -> list[Point]:
    """The integers (p, q) of N_lm: first the boxes of l row by row, then those of m. Columns are the transposes.

    For a box of l: p = -leg in m, q = arm in l + 1. For a box of m: p = 1 + leg in l, q = -arm in m.

    >>> pair_points((1,), (), (1,), ())
    [(1, 1)]
    >>> pair_points((1,), (1,), (1,), (1,))
    [(0, 1), (1, 0)]
    """
    points: list[Point] = []
    heights = len(mu_columns)
    for i, row in enumerate(lam, 1):
        for j in range(row):
            points.append((i - (mu_columns[j] if j < heights else 0), row - j))
    heights = len(lam_columns)
    for i, row in enumerate(mu, 1):
        for j in range(row):
            points.append((1 - i + (lam_columns[j] if j < heights else 0), j + 1 - row))
    return points


@dataclass(frozen=True, slots=True)
class Factor:
    """One factor of a weight, with everything that names it.

    ``place`` is the node's name, or "source -> target" for an edge; colours count from 1 (one colour for flavours,
    which have no arm and leg). ``value`` is the factor on the path; ``exponent`` is -1 in a denominator. ``within`` is
    the (node, colour), from 1, of the diagram in which the box lies.
    """

    multiplet: str
    place: str
    colours: tuple[int, ...]
    box: Box
    arm: int | None
    leg: int | None
    form: str
    value: Linear
    exponent: int
    within: tuple[int, int]

    @property
    def vanishes(self) -> bool:
        return bool(self.value.constant == 0)


@dataclass(slots=True, eq=False)
class Weight:
    """The factored weight of one configuration; treat it as frozen.

    ``order`` is vanishing denominators minus vanishing numerators at the limit point, also when the weight is ``dead``:
    when a numerator vanishes all along the path, and the weight with it.
    """

    parts: tuple[Factored, ...]
    vanishing_denominators: int
    order: int
    dead: bool

    @classmethod
    def of(cls, parts: tuple[Factored, ...]) -> Weight:
        """The weight with its bookkeeping: the counts of its parts add up."""
        down = up = 0
        dead = False
        for part in parts:
            down += part.vanishing_down
            up += part.vanishing_up
            dead = dead or part.dead
        return cls(parts, down, down - up, dead)

    def laurent(self, last: int) -> Laurent:
        """The expansion in t, all powers up to ``last``."""
        return expand(self.parts, last)

    def factors(self) -> dict[tuple[Number, Number], int]:
        """The linear factors: {(c, d): exponent} for c + d t, cancelled ones left out."""
        return linear_factors(self.parts)


@dataclass(frozen=True, slots=True)
class _Link:
    """Factors N(root) (pairs) or root + contents (one diagram), and where they come from."""

    multiplet: str
    place: str
    colours: tuple[int, ...]
    label: str
    root: Form
    exponent: int
    reverse: bool = False


class Weights:
    """All weights of a theory on one path. Parts that depend on one diagram are computed once.

    Cost of a weight: proportional to (number of colours)^2 times the number of boxes.
    """

    def __init__(self, setting: Setting) -> None:
        self.setting = setting
        self.slots = tuple((v, c) for v, node in enumerate(setting.nodes) for c in range(node.rank))
        self._slot_of = {slot: n for n, slot in enumerate(self.slots)}
        values = [setting.eps1, setting.eps2, *(mass for _, _, mass in setting.edges)]
        for node in setting.nodes:
            values += [*node.coulomb, *node.antifundamental, *node.fundamental, *node.adjoint]
        numbers = [x for value in values for x in (value.constant, value.slope)]
        self.radicand = one_field(numbers)
        self.scale = common_denominator([part for x in numbers for part in rational_parts(x)])
        # The background is rational: of a factor root + p eps1 + q eps2 only the root can lie beyond Q.
        self.eps1 = rational_form(setting.eps1, self.scale)
        self.eps2 = rational_form(setting.eps2, self.scale)
        self.coulomb = tuple(integer_form(setting.nodes[v].coulomb[c], self.scale) for v, c in self.slots)
        self._starts = [c if isinstance(c, int) else 0 for c, _ in self.coulomb]
        self._contents, self._pairs = self._links()
        # Slots with the same factors share their parts: all colours of a node that has no flavours.
        own = [(_roots(self._pairs[n, n]), _roots(self._contents[n])) for n in range(len(self.slots))]
        self._alike = [own.index(one) for one in own]
        self._crossing = [(first, second) for first, second in self._pairs if first != second]
        # Pair parts are met again only where a third colour varies beside them.
        self._keep_pairs = len(self.slots) > 2
        self._columns: dict[Diagram, Diagram] = {(): ()}
        self._single_contents: dict[tuple[int, Diagram], list[int]] = {}
        self._single: dict[tuple[int, Diagram], Factored] = {}
        self._double: dict[tuple[int, int, Diagram, Diagram], Factored] = {}

    # ---- the links of a theory: which roots stand between which colours ----

    def _links(self) -> tuple[dict[int, list[_Link]], dict[tuple[int, int], list[_Link]]]:
        contents: dict[int, list[_Link]] = {n: [] for n in range(len(self.slots))}
        pairs: dict[tuple[int, int], list[_Link]] = {}

        def add(first: int, second: int, link_data: tuple[str, str, str, Linear, int]) -> None:
            multiplet, place, label, root, exponent = link_data
            colours = (self.slots[first][1] + 1, self.slots[second][1] + 1)
            reverse = first > second
            key = (second, first) if reverse else (first, second)
            form = integer_form(root, self.scale)
            pairs.setdefault(key, []).append(_Link(multiplet, place, colours, label, form, exponent, reverse))

        for v, node in enumerate(self.setting.nodes):
            for c, a in enumerate(node.coulomb):
                slot = self._slot_of[v, c]
                for m in node.antifundamental:
                    link = _Link("antifundamental", node.name, (c + 1,), f"a{c + 1} + ({m})", self._form(a + m), 1)
                    contents[slot].append(link)
                eps = self.setting.eps1 + self.setting.eps2
                for m in node.fundamental:
                    root = self._form(a - m + eps)
                    label = f"a{c + 1} - ({m}) + eps1 + eps2"
                    contents[slot].append(_Link("fundamental", node.name, (c + 1,), label, root, 1))
                for d, b in enumerate(node.coulomb):
                    other = self._slot_of[v, d]
                    label = f"a{c + 1} - a{d + 1}" if c != d else ""
                    add(slot, other, ("vector", node.name, label, a - b, -1))
                    for m in node.adjoint:
                        add(slot, other, ("adjoint", node.name, f"{label} - ({m})", a - b - m, 1))
        for source, target, mass in self.setting.edges:
            left, right = self.setting.nodes[source], self.setting.nodes[target]
            for c, a in enumerate(left.coulomb):
                for d, b in enumerate(right.coulomb):
                    label = f"a{c + 1} - b{d + 1} - ({mass})"
                    place = f"{left.name} -> {right.name}"
                    data = ("bifundamental", place, label, a - b - mass, 1)
                    add(self._slot_of[source, c], self._slot_of[target, d], data)
        return contents, pairs

    def _form(self, value: Linear) -> Form:
        return integer_form(value, self.scale)

    # ---- parts ----

    def columns(self, diagram: Diagram) -> Diagram:
        known = self._columns.get(diagram)
        if known is None:
            known = self._columns[diagram] = transpose(diagram)
        return known

    def _forms(self, links: list[_Link], points: list[Point]) -> tuple[list[Form], list[Form]]:
        (c1, s1), (c2, s2) = self.eps1, self.eps2
        base = [(p * c1 + q * c2, p * s1 + q * s2) for p, q in points]
        ec, es = c1 + c2, s1 + s2
        up: list[Form] = []
        down: list[Form] = []
        for link in links:
            c0, s0 = link.root
            if link.reverse:
                # N_ml(x) runs over (1 - p, 1 - q) where N_lm runs over (p, q).
                c0, s0 = c0 + ec, s0 + es
                forms = [(c0 - c, s0 - s) for c, s in base]
            else:
                forms = [(c0 + c, s0 + s) for c, s in base]
            (up if link.exponent > 0 else down).extend(forms)
        return up, down

    def _one(self, slot: int, diagram: Diagram) -> Factored:
        part = self._single.get((slot, diagram))
        if part is None:
            columns = self.columns(diagram)
            up, down = self._forms(self._pairs[slot, slot], pair_points(diagram, diagram, columns, columns))
            if self._contents[slot]:
                up += self._forms(self._contents[slot], [(i - 1, j - 1) for i, j in boxes(diagram)])[0]
            part = self._single[slot, diagram] = Factored.of(up, down, self.scale, self.radicand)
        return part

    def _two(self, first: int, second: int, lam: Diagram, mu: Diagram) -> Factored:
        key = (first, second, lam, mu)
        part = self._double.get(key)
        if part is None:
            known = self._columns
            columns = known.get(lam) or self.columns(lam), known.get(mu) or self.columns(mu)
            up, down = self._forms(self._pairs[first, second], pair_points(lam, mu, *columns))
            part = Factored.of(up, down, self.scale, self.radicand)
            if self._keep_pairs:
                self._double[key] = part
        return part

    # ---- what the rest of the package asks for ----

    def weight(self, configuration: Configuration) -> Weight:
        """The factored weight of one configuration."""
        flat = [diagram for node in configuration for diagram in node]
        parts = [self._one(slot, diagram) for slot, diagram in zip(self._alike, flat, strict=True) if diagram]
        for first, second in self._crossing:
            lam, mu = flat[first], flat[second]
            if lam or mu:
                parts.append(self._two(first, second, lam, mu))
        return Weight.of(tuple(parts))

    def contents(self, configuration: Configuration) -> ContentsKey:
        """Node by node the sorted limiting contents of all boxes, in units of 1/scale: the key of the cluster."""
        if self.radicand:
            return self._paired_contents(configuration)
        key: list[tuple[int, ...]] = []
        slot = 0
        for node in configuration:
            found: list[int] = []
            for diagram in node:
                if diagram:
                    found += self._slot_contents(slot, diagram)
                slot += 1
            found.sort()
            key.append(tuple(found))
        return tuple(key)

    def _slot_contents(self, slot: int, diagram: Diagram) -> list[int]:
        known = self._single_contents.get((slot, diagram))
        if known is None:
            start, c1, c2 = self._starts[slot], self.eps1[0], self.eps2[0]
            known = [start + i * c1 + j * c2 for i, row in enumerate(diagram) for j in range(row)]
            self._single_contents[slot, diagram] = known
        return known

    def _paired_contents(self, configuration: Configuration) -> ContentsKey:
        c1, c2 = self.eps1[0], self.eps2[0]
        key: list[tuple[tuple[int, int], ...]] = []
        slot = 0
        for node in configuration:
            found: list[tuple[int, int]] = []
            for diagram in node:
                x, y = _integer_parts(self.coulomb[slot][0])
                for i, row in enumerate(diagram):
                    found.extend((x + i * c1 + j * c2, y) for j in range(row))
                slot += 1
            key.append(tuple(sorted(found)))
        return tuple(key)

    def named_factors(self, configuration: Configuration) -> Iterator[Factor]:
        """Every factor of the weight with its name; slow, for reports."""
        flat = [diagram for node in configuration for diagram in node]
        for slot, diagram in enumerate(flat):
            points = [(i - 1, j - 1) for i, j in boxes(diagram)]
            for link in self._contents[slot]:
                for box, (p, q) in zip(boxes(diagram), points, strict=True):
                    yield self._named(link, slot, box, None, None, p, q)
        for (first, second), links in self._pairs.items():
            for link in links:
                one, two = (second, first) if link.reverse else (first, second)
                lam, mu = flat[one], flat[two]
                points = pair_points(lam, mu, self.columns(lam), self.columns(mu))
                inside = sum(lam)
                for n, (box, (p, q)) in enumerate(zip([*boxes(lam), *boxes(mu)], points, strict=True)):
                    arm, leg = (q - 1, -p) if n < inside else (-q, p - 1)
                    yield self._named(link, one if n < inside else two, box, arm, leg, p, q)

    def _named(
        self, link: _Link, slot: int, box: Box, arm: int | None, leg: int | None, p: int, q: int
    ) -> Factor:
        c = link.root[0] + p * self.eps1[0] + q * self.eps2[0]
        s = link.root[1] + p * self.eps1[1] + q * self.eps2[1]
        unit = ONE / self.scale
        form = _sum_text(link.label, p, q)
        value = Linear(unit * c, unit * s)
        node, colour = self.slots[slot]
        within = node + 1, colour + 1
        return Factor(link.multiplet, link.place, link.colours, box, arm, leg, form, value, link.exponent, within)

    def tangent_points(self, configuration: Configuration) -> Iterator[tuple[int, int, int, int]]:
        """(first slot, second slot, p, q) of every vector factor that vanishes at the limit point.

        These are the weights a_first - a_second + p eps1 + q eps2 of the tangent space to the component of the fixed
        locus through this configuration.
        """
        flat = [diagram for node in configuration for diagram in node]
        (c1, _), (c2, _) = self.eps1, self.eps2
        for (first, second), links in self._pairs.items():
            lam, mu = flat[first], flat[second]
            if not lam and not mu:
                continue
            points = pair_points(lam, mu, self.columns(lam), self.columns(mu))
            for link in links:
                if link.multiplet != "vector":
                    continue
                for p, q in points:
                    one, two, pp, qq = (second, first, 1 - p, 1 - q) if link.reverse else (first, second, p, q)
                    if link.root[0] + pp * c1 + qq * c2 == 0:
                        yield one, two, pp, qq


def _roots(links: list[_Link]) -> list[tuple[Form, int, bool]]:
    return [(link.root, link.exponent, link.reverse) for link in links]


def _integer_parts(value: Whole) -> tuple[int, int]:
    return (int(value.x.p), int(value.y.p)) if isinstance(value, Quadratic) else (value, 0)


def _sum_text(label: str, p: int, q: int) -> str:
    text = label
    for coefficient, name in ((p, "eps1"), (q, "eps2")):
        if coefficient:
            size = name if abs(coefficient) == 1 else f"{abs(coefficient)}*{name}"
            sign = "-" if coefficient < 0 else "+"
            text = f"{text} {sign} {size}" if text else size if coefficient > 0 else f"-{size}"
    return text.strip() or "0"
