"""The direct sum cut into chunks: ranges of configurations of one charge on one path, small ones gathered.

How it is cut follows from the case alone: the number of configurations, and the number of linear factors that one of
them has. Charges come in the order of the case, its own path first, then the further paths where they are needed.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from functools import lru_cache

from ratomega.case.case import Case
from ratomega.case.setting import Setting, own_setting, probe_setting
from ratomega.case.theory import Theory
from ratomega.detector.geometry import compact_by_parameters
from ratomega.diagrams.tuples import Charge, count_configurations
from ratomega.errors import WorkerError
from ratomega.exact.laurent import Laurent, total
from ratomega.regulator.direct import ChargeSum, direct_sum, direct_total, merged
from ratomega.regulator.limits import ChargeLimit, charge_limit_of
from ratomega.weights import Weights
from ratomega.workers.chunks import STAMP
from ratomega.workers.texts import (
    canonical_text,
    case_from,
    read_list,
    series_data,
    series_from,
    sum_data,
    sum_from,
    written,
)

__all__ = ["Piece", "SumChunk", "charge_cost", "charge_limits", "cut"]

# Seconds; measured on one core with two to four colours, and good to a factor of two, which is all that cutting needs.
TARGET = 0.3
PER_FACTOR = 5e-6
PER_CONFIGURATION = 20e-6
PER_PIECE = 100e-6

OWN_PATH = 0


@dataclass(frozen=True, slots=True)
class Piece:
    """The configurations number ``first`` to ``stop - 1`` of one charge on one path: 0 is the case's own, n > 0 the
    n-th further one. On its own path a sum is kept cluster by cluster, on the others it is one series."""

    charge: Charge
    path: int
    first: int
    stop: int

    def __str__(self) -> str:
        charge = ",".join(str(k) for k in self.charge)
        path = "the own path" if self.path == OWN_PATH else f"further path {self.path}"
        return f"charge {charge} on {path}, configurations {self.first} to {self.stop - 1}"


@dataclass(frozen=True, slots=True)
class SumChunk:
    """Some pieces of the direct sum of a case, given by its canonical text; ``last`` as in ``direct_sum``.

    The result is a list with one entry a piece.
    """

    case: str
    last: int
    pieces: tuple[Piece, ...]
    cost: float
    stamp: str = STAMP

    def key(self) -> str:
        return written(["direct", self.last, [[p.charge, p.path, p.first, p.stop] for p in self.pieces]])

    def run(self) -> str:
        return written([self._data(piece) for piece in self.pieces])

    def _data(self, piece: Piece) -> list[object]:
        weights = _weights(self.case, piece.path)
        part = range(piece.first, piece.stop)
        if piece.path != OWN_PATH:
            return series_data(direct_total(weights, piece.charge, part=part))
        sinks = not compact_by_parameters(weights.setting, piece.charge)
        return sum_data(direct_sum(weights, piece.charge, last=self.last, sinks=sinks, part=part))

    def read(self, text: str) -> list[ChargeSum | Laurent]:
        """The sums of the pieces from the text that ``run`` gave. Raises ``WorkerError`` when it is none."""
        try:
            entries = read_list(text)
            if len(entries) != len(self.pieces):
                raise ValueError(f"{len(self.pieces)} pieces were asked, {len(entries)} came")
            return [_sum_of(piece, entry) for piece, entry in zip(self.pieces, entries, strict=True)]
        except ValueError as error:
            raise WorkerError(f"the result of {self} cannot be read: {error}") from error

    def __str__(self) -> str:
        first, others = self.pieces[0], len(self.pieces) - 1
        return f"the chunk ({first}{f', and {others} more pieces' if others else ''})"


def _sum_of(piece: Piece, data: object) -> ChargeSum | Laurent:
    if piece.path != OWN_PATH:
        return series_from(data)
    found = sum_from(data, piece.charge)
    if found.configurations != piece.stop - piece.first:
        raise ValueError(f"{found.configurations} configurations in place of {piece.stop - piece.first}")
    return found


@lru_cache(maxsize=32)
def _weights(case: str, path: int) -> Weights:
    """Diagrams are met again in chunk after chunk: a worker keeps what it computed once for each path of a case."""
    read = case_from(case)
    return Weights(own_setting(read) if path == OWN_PATH else probe_setting(read, path))


# ---- cutting ----


def factor_count(theory: Theory, charge: Charge) -> int:
    """How many linear factors a weight of this charge has.

    >>> from ratomega.case.reading import load_case
    >>> factor_count(load_case("b1-four-flavours").theory, (3,))        # 2 N k of the vector, N_f k of the flavours
    24
    """
    number = 0
    for node, k in zip(theory.nodes, charge, strict=True):
        number += 2 * node.rank * k * (1 + len(node.adjoint)) + k * (len(node.antifundamental) + len(node.fundamental))
    for edge in theory.edges:
        ends = theory.nodes[edge.source], theory.nodes[edge.target]
        number += ends[1].rank * charge[edge.source] + ends[0].rank * charge[edge.target]
    return number


def charge_cost(theory: Theory, charge: Charge) -> float:
    """An estimate, in seconds, for the sum at one charge on one path."""
    one = PER_CONFIGURATION + PER_FACTOR * factor_count(theory, charge)
    return PER_PIECE + one * count_configurations(theory.ranks, charge)


def cut(case: Case, setting: Setting, *, last: int, probes: int, always_probe: bool) -> tuple[SumChunk, ...]:
    """The whole sum of a case as chunks, in the order in which ``charge_limits`` wants their results.

    ``setting`` is the case's own path; the other arguments are those of ``charge_limit``.
    """
    canonical = canonical_text(case)
    chunks: list[SumChunk] = []
    gathered: list[Piece] = []
    weight = 0.0

    def close() -> None:
        nonlocal weight
        if gathered:
            chunks.append(SumChunk(canonical, last, tuple(gathered), weight))
            gathered.clear()
            weight = 0.0

    for charge in case.charges:
        needed = probes if always_probe or not compact_by_parameters(setting, charge) else 0
        cost = charge_cost(case.theory, charge)
        count = count_configurations(case.theory.ranks, charge)
        parts = min(count, 1 + int(cost / TARGET))
        for path in range(needed + 1):
            for n in range(parts):
                if weight + cost / parts > TARGET:
                    close()
                gathered.append(Piece(charge, path, n * count // parts, (n + 1) * count // parts))
                weight += cost / parts
    close()
    return tuple(chunks)


# ---- putting together ----


def charge_limits(
    setting: Setting, further: Sequence[Setting], chunks: Sequence[SumChunk], results: Iterable[str]
) -> Iterator[ChargeLimit]:
    """The limits charge by charge, each as soon as its last piece is there.

    ``results`` are those of ``chunks``, in the same order; ``further`` are the settings of the further paths.
    """
    missing = Counter(piece.charge for chunk in chunks for piece in chunk.pieces)
    own: list[ChargeSum] = []
    others: dict[int, list[Laurent]] = {}
    for chunk, text in zip(chunks, results, strict=True):
        for piece, found in zip(chunk.pieces, chunk.read(text), strict=True):
            if isinstance(found, ChargeSum):
                own.append(found)
            else:
                others.setdefault(piece.path, []).append(found)
            missing[piece.charge] -= 1
            if not missing[piece.charge]:
                paths = [(further[n - 1], total(series, precision=1)) for n, series in sorted(others.items())]
                yield charge_limit_of(setting, merged(own), paths)
                own, others = [], {}
