"""A case on one definite path: every parameter is c + d t and nothing symbolic is left.

The case's own path moves only what the case says. Where a Coulomb difference of a node is an integer combination of
eps1 and eps2 all along it, denominators can vanish identically; then the Coulomb parameters of that node are tilted.
A tilt keeps the sum of the Coulomb parameters of its node: moving the sum is the same as moving all masses against
it, and masses keep their expressions. Further paths (``probe_setting``) vary the direction of the background and the
Coulomb parameters in the same way. All choices are seeded by the hash of the case, so that a case has one answer.
"""

from __future__ import annotations

import hashlib
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from itertools import combinations, count
from math import isqrt

from ratomega.case.affine import Affine
from ratomega.case.case import Case
from ratomega.errors import PathError
from ratomega.exact.path import Linear, integer_combination, leaves_the_ratio
from ratomega.exact.quadratic import as_integer
from ratomega.exact.rational import ZERO, Rational

__all__ = ["NodeSetting", "Setting", "own_setting", "probe_setting"]

# Further paths beyond these would cost time and add nothing.
MOST_PROBES = 20
SMALLEST_PRIME = 13

Tilt = tuple[Rational, ...]


@dataclass(frozen=True, slots=True)
class NodeSetting:
    """The parameters of one node on the path."""

    name: str
    coulomb: tuple[Linear, ...]
    antifundamental: tuple[Linear, ...]
    fundamental: tuple[Linear, ...]
    adjoint: tuple[Linear, ...]

    @property
    def rank(self) -> int:
        return len(self.coulomb)


@dataclass(frozen=True, slots=True)
class Setting:
    """The whole theory on one path. ``tilts`` holds, by node name, what was added to the Coulomb parameters."""

    eps1: Linear
    eps2: Linear
    nodes: tuple[NodeSetting, ...]
    edges: tuple[tuple[int, int, Linear], ...]
    tilts: tuple[tuple[str, Tilt], ...] = ()
    # Written once: it stands beside the result of every charge.
    _text: str = field(default="", init=False, repr=False, compare=False)

    @property
    def ranks(self) -> tuple[int, ...]:
        return tuple(node.rank for node in self.nodes)

    @property
    def tilted(self) -> bool:
        return bool(self.tilts)

    def text(self) -> str:
        """The path in one line, as it stands beside every result."""
        if not self._text:
            parts = [f"eps1 = {self.eps1}", f"eps2 = {self.eps2}"]
            for node in self.nodes:
                parts.append(f"{node.name}: a = ({', '.join(str(a) for a in node.coulomb)})")
            object.__setattr__(self, "_text", "; ".join(parts))
        return self._text


def _settle(case: Case, eps1: Linear, eps2: Linear, tilts: dict[str, Tilt]) -> Setting:
    nodes = []
    for node in case.theory.nodes:
        tilt = tilts.get(node.name, (ZERO,) * node.rank)
        nodes.append(
            NodeSetting(
                node.name,
                tuple(a.on(eps1, eps2) + Linear(ZERO, s) for a, s in zip(node.coulomb, tilt, strict=True)),
                tuple(m.on(eps1, eps2) for m in node.antifundamental),
                tuple(m.on(eps1, eps2) for m in node.fundamental),
                tuple(m.on(eps1, eps2) for m in node.adjoint),
            )
        )
    edges = tuple((e.source, e.target, e.mass.on(eps1, eps2)) for e in case.theory.edges)
    return Setting(eps1, eps2, tuple(nodes), edges, tuple(sorted(tilts.items())))


def frozen_pairs(setting: Setting) -> Iterator[tuple[int, int, int, tuple[int, int]]]:
    """(node, colour, colour, (m, n)) wherever a difference of Coulomb parameters is m eps1 + n eps2 on the path."""
    for index, node in enumerate(setting.nodes):
        for alpha, beta in combinations(range(node.rank), 2):
            pair = integer_combination(node.coulomb[alpha] - node.coulomb[beta], setting.eps1, setting.eps2)
            if pair is not None:
                yield index, alpha, beta, pair


def _numbers(case: Case, purpose: str) -> Iterator[int]:
    """An endless stream of bytes fixed by the hash of the case and the purpose."""
    counter = 0
    while True:
        yield from hashlib.sha256(f"{case.hash}/{purpose}/{counter}".encode()).digest()
        counter += 1


def _prime(number: int, rank: int) -> int:
    """The denominator of the tilts of path ``number`` (0 is the own one): no two paths share one.

    The primes begin above 2 rank^2, so that drawn residues are mostly distinct.
    """
    candidate = max(SMALLEST_PRIME, 2 * rank * rank + 1)
    while True:
        if all(candidate % d for d in range(2, isqrt(candidate) + 1)):
            if number == 0:
                return candidate
            number -= 1
        candidate += 1


def _path_number(number: int, attempt: int) -> int:
    """The same number for the first attempts, then larger primes: a prime can be swallowed by the numbers of a case.

    With eps2 = 1 + t/13, say, every multiple of t/13 is on the lattice.
    """
    return number + (MOST_PROBES + 1) * (attempt // 4)


def _tilt(rank: int, stream: Iterator[int], prime: int) -> Tilt:
    """A traceless tilt in units of 1/prime; no entry and no difference is an integer, no two agree up to sign."""
    while True:
        steps = [1 + (256 * next(stream) + next(stream)) % (2 * prime) for _ in range(rank - 1)]
        entries = [*steps, -sum(steps)]
        residues = {s % prime for s in entries}
        # For two colours the entries are s and -s by force.
        sizes = {abs(s) for s in entries}
        if len(residues) == rank and 0 not in residues and (rank == 2 or len(sizes) == rank):
            return tuple(Rational(s, prime) for s in entries)


def _tilts(ranks: dict[str, int], stream: Iterator[int], number: int) -> dict[str, Tilt]:
    """Tilts by node name; no entry of one node is, up to sign, an entry of another."""
    tilts: dict[str, Tilt] = {}
    taken: set[Rational] = set()
    for name, rank in ranks.items():
        tilt = _tilt(rank, stream, _prime(number, rank))
        while taken.intersection(abs(s) for s in tilt):
            tilt = _tilt(rank, stream, _prime(number, rank))
        tilts[name] = tilt
        taken.update(abs(s) for s in tilt)
    return tilts


def own_setting(case: Case, *, allow_tilt: bool = True) -> Setting:
    """The case's own path, tilted once for the whole case where denominators can vanish identically.

    Raises ``PathError`` when a tilt is needed and ``allow_tilt`` is false, ``ValueError`` for a case with u.
    """
    if case.nested:
        raise ValueError("a case with u has no path of its own; its inner case has one")
    eps1, eps2 = case.background.eps1, case.background.eps2
    setting = _settle(case, eps1, eps2, {})
    frozen = list(frozen_pairs(setting))
    if not frozen:
        return setting
    stream = _numbers(case, "tilt")
    names = sorted({setting.nodes[index].name for index, *_ in frozen})
    ranks = {node.name: node.rank for node in setting.nodes if node.name in names}
    for attempt in count():
        tilted = _settle(case, eps1, eps2, _tilts(ranks, stream, _path_number(0, attempt)))
        if not any(frozen_pairs(tilted)):
            break
    if not allow_tilt:
        raise _needs_tilt(setting, tilted, frozen[0])
    return tilted


def _needs_tilt(setting: Setting, tilted: Setting, first: tuple[int, int, int, tuple[int, int]]) -> PathError:
    index, alpha, beta, (m, n) = first
    node = setting.nodes[index]
    cure = next(node for node in tilted.nodes if node.name == setting.nodes[index].name)
    difference = f"a{alpha + 1} - a{beta + 1}"
    lattice = Affine(eps1=Rational(m), eps2=Rational(n))
    form = difference if m == n == 0 else f"{difference} - ({lattice})"
    return PathError.single(
        f"{difference} is {lattice} all along the path, so the vector factor "
        f"{form} of colours {alpha + 1}, {beta + 1} vanishes identically; "
        f"the tilt coulomb = [{', '.join(chr(34) + str(a) + chr(34) for a in cure.coulomb)}] would cure it",
        f"node {node.name}",
    )


def probe_setting(case: Case, number: int) -> Setting:
    """The ``number``-th further path (from 1): another direction of the background, other Coulomb parameters.

    Deterministic; the direction leaves the ratio, and no Coulomb difference stays on the lattice of eps1 and eps2.
    """
    if not 1 <= number <= MOST_PROBES:
        raise ValueError(f"probe number {number} is not between 1 and {MOST_PROBES}")
    stream = _numbers(case, f"probe {number}")
    own = case.background
    ranks = {node.name: node.rank for node in case.theory.nodes if node.rank > 1}
    for attempt in count():
        path = _path_number(number, attempt)
        prime = _prime(path, 1)
        slopes = [Rational(1 + next(stream) % prime, prime) for _ in range(2)]
        eps1, eps2 = Linear(own.eps1.constant, slopes[0]), Linear(own.eps2.constant, slopes[1])
        if not leaves_the_ratio(eps1, eps2):
            continue
        setting = _settle(case, eps1, eps2, _tilts(ranks, stream, path))
        if not any(frozen_pairs(setting)):
            return setting
    raise AssertionError("unreachable: only finitely many primes divide the numbers of a case")


def resonances(setting: Setting, charge: Sequence[int]) -> Iterator[tuple[int, int, int, int, int]]:
    """(node, alpha, beta, m, n) with a_alpha - a_beta = m eps1 + n eps2 at t = 0, m, n >= 1, m n <= charge of the node.

    Colours count from 0 and come in both orders. Empty exactly when every component of the fixed locus at this charge
    is compact.
    """
    e1, e2 = setting.eps1.constant, setting.eps2.constant
    for index, node in enumerate(setting.nodes):
        for alpha in range(node.rank):
            for beta in range(node.rank):
                if alpha == beta:
                    continue
                difference = node.coulomb[alpha].constant - node.coulomb[beta].constant
                for m in range(1, charge[index] + 1):
                    n = as_integer((difference - m * e1) / e2)
                    if n is not None and n >= 1 and m * n <= charge[index]:
                        yield index, alpha, beta, m, n
