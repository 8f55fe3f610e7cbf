"""The pole recursion modulo batches of primes, in matrix products of float64 residues.

``PoleSolver.solve`` runs the schedule: it keeps, for every group of columns, the coefficients V[c, j, e] placed at the
order j + m n where they are read, and adds block after block of orders to the sums that are pending. The arrays of one
batch serve the next one again: the same places are written every time.

With a mirror symmetry the columns (m, n) and (n, m) are read together: V of the second is V of the first with t -> -t,
so even and odd powers of V see the sum and the difference of two kernels.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.lib.stride_tricks import as_strided

from ratomega.exact.residues import Floats, Moduli, longest_dot
from ratomega.regulator.poles.fractions import ConsistencyError, PoleLayout
from ratomega.regulator.poles.kernel import Kernel
from ratomega.regulator.poles.lattice import PolePath
from ratomega.regulator.poles.plan import Windows
from ratomega.regulator.poles.principal import PrincipalParts
from ratomega.regulator.poles.problem import PoleProblem
from ratomega.regulator.poles.residues import ResidueLattice
from ratomega.regulator.poles.schedule import Group, Schedule, Step
from ratomega.regulator.poles.scratch import Scratch

__all__ = ["PoleEngine", "PoleSolver"]


@dataclass(frozen=True, slots=True, eq=False)
class PoleEngine:
    """One problem, planned to a charge."""

    lattice: ResidueLattice
    schedule: Schedule
    layout: PoleLayout

    @classmethod
    def make(cls, problem: PoleProblem, charge: int) -> PoleEngine:
        """Exact integer planning. The Coulomb parameters of the problem do not matter here."""
        lattice = ResidueLattice.make(problem.matter, PolePath.towards(problem.steps), charge)
        return cls(lattice, Schedule.make(Windows.make(lattice)), PoleLayout.make(problem.steps, charge))

    @property
    def bytes_per_prime(self) -> int:
        """Memory for one prime, near enough to choose the size of a batch."""
        parities = 2 if self.lattice.path.mirror else 1
        return 8 * (parities * self.schedule.table_size + self.schedule.size)


class PoleSolver:
    """An engine with the arrays for batches of ``size`` primes."""

    def __init__(self, engine: PoleEngine, size: int) -> None:
        self.engine, self.size = engine, size
        self.schedule, self.windows = engine.schedule, engine.schedule.windows
        self.path = engine.lattice.path
        self.principal = PrincipalParts(self.windows, engine.layout)
        groups = self.schedule.groups
        deepest = max([g.highest for g in groups], default=0)
        self.length = max(deepest, -int(self.windows.valuation.min(initial=0))) + 3
        self.scratch = Scratch()
        self.copies = np.zeros((size, self.schedule.size))
        self.ring = max([g.block for g in groups], default=1)
        height = self.schedule.last - self.schedule.first + 1
        self.pending = np.zeros((size, self.ring, height, len(self.windows.pairs)))
        orders = self.windows.charge + 1
        self.tables = [
            _Table(self, group, self.copies[:, begin : begin + orders * group.cells])
            for group, begin in zip(groups, self.schedule.offsets, strict=True)
        ]

    def solve(self, moduli: Moduli) -> Floats:
        """The coefficients of the partial fractions of W_0 ... W_charge: shape (primes, charge + 1, terms).

        The constant of W_0, which is 1, is not among them. Raises ``BadPrimes`` when a prime divides a denominator,
        ``ConsistencyError`` when singular parts survive, and ``ValueError`` for more than ``size`` primes.
        """
        if len(moduli) > self.size:
            raise ValueError(f"this solver takes {self.size} primes at a time, not {len(moduli)}")
        if not self.tables:
            return np.zeros((len(moduli), self.windows.charge + 1, len(self.engine.layout.powers)))
        strength = self.engine.lattice.series(moduli, self.length)
        for table in self.tables:
            table.fill(moduli, strength)
        self._recursion(moduli)
        parts = [(table.group, table.copies[: len(moduli)]) for table in self.tables]
        return self.principal.residues(moduli, strength, parts)

    def _recursion(self, moduli: Moduli) -> None:
        """Fill the copies of V, order by order."""
        windows, schedule = self.windows, self.schedule
        sums = _Sums(moduli, self.pending[: len(moduli)], schedule.first, self.path.mirror)
        powers = np.arange(schedule.first, schedule.last + 1)[:, None]
        for order, (source, target) in enumerate(schedule.moves):
            for table in self.tables:
                if order % table.group.block == 0:
                    table.feed(moduli, order, sums)
            rows = windows.rows(order)
            value = self.scratch(0, (len(moduli), len(powers), rows))
            sums.take(order, value, self.scratch(1, value.shape))
            if order == 0:
                value[:, -schedule.first] += 1.0
            low, need = windows.low[:rows, order], windows.need[:rows, order]
            # Products were started at the lowest power of all rows: from there on, the sums are complete.
            cancelled = (powers < low) & (powers >= low.min(initial=0)) & (powers <= need)
            if value[:, cancelled].any():
                raise ConsistencyError(f"terms below the lower end of a window do not cancel at order {order}")
            self.copies[: len(moduli), target] = value.reshape(len(moduli), -1)[:, source]


def _longest_sum(moduli: Moduli, *, mirror: bool) -> int:
    """How many products of a kernel and a value can be summed: with a mirror kernels are sums of two residues."""
    largest = float(moduli.p.max()) / 2 + 2
    return longest_dot(2 * largest if mirror else largest, largest)


class _Sums:
    """Sums of products for the orders that are under way: exact, and reduced only when 2^53 comes near.

    ``values`` has shape (primes, orders in a ring, powers, rows).
    """

    def __init__(self, moduli: Moduli, values: Floats, first: int, mirror: bool) -> None:
        self.moduli, self.values, self.first = moduli, values, first
        self.limit = _longest_sum(moduli, mirror=mirror)
        self.longest = self.limit // 2
        self.values[...] = 0.0
        # How many products are summed at most, by order and power.
        self.summed = np.zeros(values.shape[1:3], dtype=np.int64)

    def add(self, step: Step, product: Floats, length: int) -> None:
        """Add a product (primes, orders x powers, rows), each entry a sum of ``length`` products."""
        begin, place = step.begin % self.values.shape[1], step.first - self.first
        orders = slice(begin, begin + step.end - step.begin)
        powers = slice(place, place + (step.count - 1) * step.stride + 1, step.stride)
        summed = self.summed[orders, powers]
        if summed.max() + length > self.limit:
            waiting = self.values[:, orders, powers]
            waiting[...] = self.moduli.reduce(waiting)
            summed[...] = 1
        summed += length
        target = self.values[:, orders, powers, : step.rows]
        target += product.reshape(target.shape)

    def take(self, order: int, out: Floats, work: Floats) -> None:
        """The residues of one finished order, whose place in the ring is then empty again."""
        place = order % self.values.shape[1]
        self.moduli.reduce(self.values[:, place, :, : out.shape[2]], out=out, work=work)
        self.values[:, place] = 0.0
        self.summed[place] = 0


class _Table:
    """The kernel of one group, and the copies of V that it multiplies."""

    def __init__(self, solver: PoleSolver, group: Group, copies: Floats) -> None:
        windows, path = solver.windows, solver.path
        self.group, self.mirror, self.scratch = group, path.mirror, solver.scratch
        self.first, self.size = solver.schedule.first, len(group.columns)
        self.copies = copies.reshape(solver.size, windows.charge + 1, group.stop - group.start, self.size)
        pairs = [windows.pairs[c] for c in group.columns]
        near = [path.form(m, -n) for m, n in windows.pairs[: group.rows]]
        self.straight = Kernel.make([path.form(m, n) for m, n in pairs], near)
        self.swapped = Kernel.make([path.form(n, m) for m, n in pairs], near) if path.mirror else None
        self.alone = [m == n for m, n in pairs]
        # One table for even and one for odd powers of the result if there is a mirror; powers run downwards, so that
        # powers and columns together are one axis of the matrix product.
        shape = (solver.size, len(group.depth), self.size, group.rows)
        self.kernels = [np.zeros(shape) for _ in range(2 if path.mirror else 1)]

    def fill(self, moduli: Moduli, strength: Floats) -> None:
        group, kernels = self.group, [kernel[: len(moduli)] for kernel in self.kernels]
        if group.rows == 0:
            return
        own = strength[:, :, group.columns]
        straight = self.straight.powers(moduli, own, group.lowest, group.depth, self.scratch.part(1))
        if self.swapped is None:
            for index, piece in enumerate(straight):
                kernels[0][:, -1 - index, :, : piece.shape[2]] = piece
            return
        turned = own * ((-1.0) ** np.arange(own.shape[1]))[None, :, None]
        swapped = self.swapped.powers(moduli, turned, group.lowest, group.depth, self.scratch.part(2))
        for index, (one, other) in enumerate(zip(straight, swapped, strict=True)):
            other[:, self.alone] = 0.0
            plus, minus = kernels if (group.lowest + index) % 2 == 0 else kernels[::-1]
            np.add(one, other, out=plus[:, -1 - index, :, : one.shape[2]])
            np.subtract(one, other, out=minus[:, -1 - index, :, : one.shape[2]])

    def feed(self, moduli: Moduli, begin: int, sums: _Sums) -> None:
        """Add what this group contributes to the block of orders that begins here."""
        for step in self.group.steps.get(begin, ()):
            self._product(moduli, step, sums)

    def _product(self, moduli: Moduli, step: Step, sums: _Sums) -> None:
        group, size = self.group, self.size
        primes, orders = len(moduli), step.end - step.begin
        kernel = self.kernels[step.first % 2 if self.mirror else 0][:primes].reshape(primes, -1, group.rows)
        top = (group.highest - step.deepest) * size
        length = (step.deepest - group.lowest + 1) * size
        # Row (order, power) of the left factor is a run of V; neighbouring powers overlap.
        anchor = self.copies[:primes, step.begin :, step.low - (step.count - 1) * step.stride - group.start :]
        sp, sj, se, sc = anchor.strides
        left = self.scratch(0, (primes, orders, step.count, length))
        left[...] = as_strided(anchor, left.shape, (sp, sj, step.stride * se, sc), writeable=False)
        left = left.reshape(primes, orders * step.count, length)
        product = self.scratch(1, (primes, orders * step.count, step.rows))
        for cut in range(0, length, sums.longest):
            end = min(cut + sums.longest, length)
            np.matmul(left[:, :, cut:end], kernel[:, top + cut : top + end, : step.rows], out=product)
            sums.add(step, product, end - cut)
