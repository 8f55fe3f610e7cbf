"""From residues of W back to fractions: by spare bits, or by a proved bound."""

from __future__ import annotations

from dataclasses import dataclass
from math import ceil, floor, lcm, log2

import numpy as np

from ratomega.exact.rational import Rational, common_denominator
from ratomega.exact.residues import (
    PRIME_BITS,
    BadPrimes,
    Floats,
    Moduli,
    PrimeSource,
    combine,
    reconstruct,
)
from ratomega.regulator.pole_bound import ProvedBound
from ratomega.regulator.pole_engine import ConsistencyError, PoleEngine, PoleSolver
from ratomega.regulator.pole_problem import PoleProblem

__all__ = ["Evidence", "Recovery"]

# Bits of the modulus that a fraction must leave unused before it is believed.
SPARE_BITS = 45
BATCH_BYTES = 2**28
LARGEST_BATCH = 24
# Sizes of answers grow a little faster than the charge; a few primes cost hardly more than one.
GROWTH = 1.2
FEWEST_PRIMES = 4
# Rounds of further primes between two looks at the proved bound.
PATIENCE = 12


@dataclass(frozen=True, slots=True)
class Evidence:
    """Why a coefficient is believed.

    ``kind`` is "exact" (exact series throughout), "bound" (residues, and a proved bound that leaves one answer) or
    "residues" (a fraction behind the residues). For the last two ``spare_bits`` tells by how many bits the modulus
    exceeds what the answer, or for "bound" its proved size, needs; ``confirmed`` is a prime that was not used to find
    the fraction and agrees with it (None unless ``kind`` is "residues").
    """

    kind: str
    spare_bits: int | None = None
    confirmed: int | None = None


class Recovery:
    """W_0 ... W_charge of a problem, by as many primes as it takes. ``values`` and ``evidence`` grow together."""

    def __init__(self, problem: PoleProblem, charge: int) -> None:
        self.problem, self.charge = problem, charge
        engine = PoleEngine.make(problem, charge)
        size = max(1, min(LARGEST_BATCH, BATCH_BYTES // max(1, engine.bytes_per_prime)))
        self._solver = PoleSolver(engine, size)
        self._source = PrimeSource()
        self.primes: list[int] = []
        self._residues: list[Floats] = []
        self.values: list[Rational] = []
        self.evidence: list[Evidence] = []

    def certify(self) -> None:
        """Find everything with enough primes for the proved bound: denominators times W are integers of known size."""
        bound = ProvedBound.make(self.problem, self.charge)
        # One bit for the sign, and one so that the modulus exceeds the bound.
        while (missing := max(bound.bits) + 2 - self._bits()) > 0:
            self._more(ceil(missing / PRIME_BITS))
        residues, modulus = combine(np.concatenate(self._residues), self.primes)
        for residue, denominator, size in zip(residues, bound.denominators, bound.bits, strict=True):
            value = residue * int(denominator.p) * pow(int(denominator.q), -1, modulus) % modulus
            self.values.append(Rational(value if 2 * value < modulus else value - modulus) / denominator)
            self.evidence.append(Evidence("bound", modulus.bit_length() - 2 - size))

    def search(self) -> None:
        """Take primes until every fraction leaves enough bits unused; the last prime only confirms.

        Raises ``ConsistencyError`` when a proved bound says that the fractions should have been found by then.
        """
        self._more(FEWEST_PRIMES + self.charge // 2)
        rounds = 0
        while True:
            needed = self._reconstruct()
            if len(self.values) > self.charge and self._confirm():
                return
            rounds += 1
            if rounds % PATIENCE == 0:
                self._check_progress()
            # One prime more, because the last one only confirms.
            missing = ceil((needed - self._bits()) / PRIME_BITS) + 1
            self._more(max(FEWEST_PRIMES, missing))

    def _bits(self) -> int:
        """The product of all primes so far has more bits than this."""
        return floor(sum(log2(p) for p in self.primes) - 1e-6)

    def _more(self, count: int) -> None:
        """Residues of W modulo ``count`` further primes; bad ones are replaced."""
        while count > 0:
            batch = list(self._source.take(min(count, self._solver.size)))
            while batch:
                try:
                    residues = self._solver.solve(Moduli.make(batch))
                except BadPrimes as bad:
                    batch = [p for p in batch if p not in bad.primes]
                else:
                    self._residues.append(residues)
                    self.primes += batch
                    count -= len(batch)
                    break

    def _reconstruct(self) -> int:
        """Find the next fractions, in order, as far as the primes reach. Returns an estimate of the bits for all."""
        start = len(self.values)
        residues, modulus = combine(np.concatenate(self._residues)[:-1, start:], self.primes[:-1])
        common = common_denominator(self.values)
        used = 0
        for order, residue in enumerate(residues, start):
            # W_k times this is nearly an integer, so that hardly more than the numerator has to fit.
            helper = common * self._new_factors(order) if order else 1
            found = reconstruct(residue * helper % modulus, modulus, spare_bits=SPARE_BITS)
            if found is None:
                break
            used = modulus.bit_length() - found.spare_bits
            self.values.append(found.value / helper)
            self.evidence.append(Evidence("residues", found.spare_bits))
            common = lcm(common, int(self.values[-1].q))
        # From few fractions nobody looks far ahead.
        growth: float = min(2.0, (self.charge / max(1, len(self.values))) ** GROWTH)
        return ceil(used * growth) + SPARE_BITS

    def _new_factors(self, order: int) -> int:
        """k alpha beta times the product of (m eps1 + n eps2)^2 - x^2 over m n = k, without denominators."""
        alpha, beta = self.problem.steps
        result: int = order * alpha * beta
        for m in range(1, order + 1):
            if order % m == 0:
                factor = (m * alpha + order // m * beta) ** 2 - self.problem.square
                result *= int(factor.p)
        return result

    def _confirm(self) -> bool:
        """Do all fractions agree with the last prime? Those from the first that does not are given up."""
        prime = self.primes[-1]
        for order, (value, residue) in enumerate(zip(self.values, self._residues[-1][-1], strict=True)):
            if (value.p - int(residue) * value.q) % prime != 0:
                del self.values[order:], self.evidence[order:]
                return False
        self.evidence = [Evidence(e.kind, e.spare_bits, prime) for e in self.evidence]
        return True

    def _check_progress(self) -> None:
        bound = max(ProvedBound.make(self.problem, self.charge).bits)
        # The proved denominators may miss a few factors of the helper, so twice the bound is asked for.
        if self._bits() > 2 * bound + SPARE_BITS + 4 * PRIME_BITS:
            raise ConsistencyError(f"no fraction fits the residues modulo {len(self.primes)} primes")
