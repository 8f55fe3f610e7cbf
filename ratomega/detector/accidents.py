"""What looks accidental in a case: typed numbers on the lattice, colours that never carry a box, stuck paths.

All of this follows from the parameters alone. A factor root + p eps1 + q eps2 occurs first at a charge that the
smallest diagrams decide (``smallest_pair``); within the charge bound everything else is out of reach.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from ratomega.case.affine import Affine
from ratomega.case.case import Case
from ratomega.case.setting import Setting
from ratomega.errors import PathError
from ratomega.exact.path import Linear, leaves_the_ratio
from ratomega.exact.quadratic import Number, as_integer, only_rational
from ratomega.exact.rational import ONE

__all__ = ["check_path", "dead_colours", "frozen_number_warnings", "smallest_pair"]


def smallest_pair(p: int, q: int) -> int:
    """The least |l| + |m| of two different colours' diagrams for which N_lm has the factor root + p eps1 + q eps2.

    >>> smallest_pair(1, 1), smallest_pair(0, 1), smallest_pair(2, 3), smallest_pair(0, 0)
    (1, 2, 6, 1)
    """
    if q >= 1:
        return p * q if p >= 1 else q + 1 - p
    return p + 1 - q if p >= 1 else (1 - p) * (1 - q)


def smallest_single(p: int, q: int) -> int:
    """The same for one diagram with itself: the hook of the box; 0 when the factor never occurs.

    >>> smallest_single(-1, 1), smallest_single(1, 0), smallest_single(1, 1)
    (2, 1, 0)
    """
    if p <= 0 and q >= 1:
        return q - p
    return p - q if p >= 1 and q <= 0 else 0


def _meetings(value: Number, setting: Setting, bound: int) -> Iterator[tuple[int, int]]:
    """All (p, q) within reach of the bound with value + p eps1 + q eps2 = 0 at the limit point, |p| ascending."""
    e1, e2 = setting.eps1.constant, setting.eps2.constant
    for size in range(bound + 2):
        for p in {size, -size}:
            q = as_integer(-(value + p * e1) / e2)
            if q is not None and abs(q) <= bound + 1:
                yield p, q


def check_path(setting: Setting, bounds: Sequence[int]) -> None:
    """Refuse a path that stays on the ratio where a denominator vanishes all along it. Raises ``PathError``."""
    if leaves_the_ratio(setting.eps1, setting.eps2):
        return
    ratio = only_rational(setting.eps2.constant / setting.eps1.constant)
    for node, bound in zip(setting.nodes, bounds, strict=True):
        first = int(ratio.q) + int(ratio.p)
        guilty = ""
        if ratio > 0 and bound >= first:
            guilty = f"from charge {first} on a vector factor of one colour vanishes identically"
        for alpha in range(node.rank):
            for beta in range(node.rank):
                difference = node.coulomb[alpha] - node.coulomb[beta]
                if alpha == beta or guilty:
                    continue
                reached = [
                    (p, q)
                    for p, q in _meetings(difference.constant, setting, bound)
                    if smallest_pair(p, q) <= bound
                    and (difference + setting.eps1.scaled(p) + setting.eps2.scaled(q)).is_zero()
                ]
                if reached:
                    p, q = reached[0]
                    guilty = (
                        f"the vector factor a{alpha + 1} - a{beta + 1} + ({p})*eps1 + ({q})*eps2 vanishes identically"
                    )
        if guilty:
            raise PathError.single(
                f"the path eps1 = {setting.eps1}, eps2 = {setting.eps2} stays on the ratio {ratio} "
                f"(eps1 deps2 = eps2 deps1), where {guilty}; choose a path that leaves the ratio, "
                'for example eps2 = "... + t" alone',
                f"background, node {node.name}",
            )


@dataclass(frozen=True, slots=True)
class _Root:
    """A root as it was typed: the factor is ``typed`` + (p + shift) eps1 + (q + shift) eps2."""

    name: str
    place: str
    typed: Affine
    kind: str
    reach: int

    def smallest(self, p: int, q: int) -> int:
        """The charge at which the factor first occurs; 0 when it never does."""
        if self.kind == "contents":
            return (p + 1) * (q + 1) if p >= 0 and q >= 0 else 0
        if self.kind == "difference":
            # The vector factors of both orders of the two colours.
            return min(smallest_pair(p, q), smallest_pair(-p, -q))
        return smallest_pair(p, q) if self.kind == "pair" else smallest_single(p, q)


def _typed_roots(case: Case) -> Iterator[_Root]:
    bounds = case.bounds
    total = case.charge if isinstance(case.charge, int) else sum(case.charge)
    eps = Affine(eps1=ONE, eps2=ONE)
    for node, bound in zip(case.theory.nodes, bounds, strict=True):
        for c, a in enumerate(node.coulomb, 1):
            for m in node.antifundamental:
                yield _Root(f"a{c} + m with antifundamental m = {m}", node.name, a + m, "contents", bound)
            for m in node.fundamental:
                yield _Root(f"a{c} - m with fundamental m = {m}", node.name, a - m + eps, "contents", bound)
            for d, b in enumerate(node.coulomb, 1):
                if c < d:
                    yield _Root(f"a{c} - a{d}", node.name, a - b, "difference", bound)
                for m in node.adjoint:
                    name = f"a{c} - a{d} - m" if c != d else "-m"
                    kind = "pair" if c != d else "single"
                    yield _Root(f"{name} with adjoint m = {m}", node.name, a - b - m, kind, bound)
    for edge in case.theory.edges:
        left, right = case.theory.nodes[edge.source], case.theory.nodes[edge.target]
        for c, a in enumerate(left.coulomb, 1):
            for d, b in enumerate(right.coulomb, 1):
                name = f"a{c} - b{d} - m with bifundamental m = {edge.mass}"
                yield _Root(name, f"{left.name} -> {right.name}", a - b - edge.mass, "pair", total)


def frozen_number_warnings(case: Case, setting: Setting) -> tuple[str, ...]:
    """Warn where typed numbers make a factor vanish at the limit point only because they hit the lattice there.

    A typed number stays fixed while the background moves. Where it equals a combination of eps1 and eps2 at the limit
    point, the same combination written as an expression would move along, and the limit can be a different one.
    """
    found: dict[str, None] = {}
    for root in _typed_roots(case):
        # A root with t in it moves on purpose.
        if root.typed.constant == 0 or root.typed.t != 0:
            continue
        met: list[tuple[int, Affine]] = []
        for p, q in _meetings(root.typed.on(setting.eps1, setting.eps2).constant, setting, root.reach):
            size = root.smallest(p, q)
            moving = Affine(eps1=-p - root.typed.eps1, eps2=-q - root.typed.eps2)
            stuck = not (Affine(root.typed.constant) - moving).on(setting.eps1, setting.eps2).is_zero()
            if stuck and 0 < size <= root.reach:
                met.append((size, moving))
        if met:
            moving = min(met, key=lambda pair: (pair[0], pair[1].key()))[1]
            found[_frozen_text(root, moving)] = None
    return tuple(found)


def _frozen_text(root: _Root, moving: Affine) -> str:
    return (
        f"{root.place}: in {root.name} the typed number {root.typed.constant} equals {moving} at the limit point, "
        "where factors vanish; it stays fixed while the background moves. "
        "Write it with eps1 and eps2 if it should move along."
    )


def dead_colours(setting: Setting) -> tuple[str, ...]:
    """Warn of colours that never carry a box: the first box has a numerator that vanishes all along the path."""
    eps = setting.eps1 + setting.eps2
    found = []
    for node in setting.nodes:
        for c, a in enumerate(node.coulomb, 1):
            killers: list[tuple[str, Linear]] = []
            killers += [("antifundamental mass", m) for m in node.antifundamental if (a + m).is_zero()]
            killers += [("fundamental mass", m) for m in node.fundamental if (a - m + eps).is_zero()]
            if killers:
                kind, mass = killers[0]
                found.append(
                    f"{node.name}: colour {c} never carries a box, because the {kind} {mass} meets a{c} = {a}; "
                    "every weight with a box there is zero on the whole path"
                )
    return tuple(found)
