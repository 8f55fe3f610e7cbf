"""From residues back to fractions: the coefficients of W by spare bits, or W at one point by a proved bound."""

from __future__ import annotations

from dataclasses import dataclass
from math import ceil, floor, lcm, log2

import numpy as np

from ratomega.exact.batches import ResidueStream, Supplier, here
from ratomega.exact.rational import ONE, ZERO, Rational
from ratomega.exact.residues import PRIME_BITS, Floats, combine, reconstruct
from ratomega.regulator.poles.bound import ProvedBound
from ratomega.regulator.poles.fractions import ConsistencyError, PartialFractions, PoleLayout, Term
from ratomega.regulator.poles.problem import PoleProblem
from ratomega.regulator.poles.task import PoleTask

__all__ = ["Evidence", "Recovery"]

# Bits of the modulus that a fraction must leave unused before it is believed.
SPARE_BITS = 45
# The primes that are used lie so little below 2^PRIME_BITS: for planning.
LOST_BITS = 0.01
# Sizes of answers grow a little faster than the charge; a few primes cost hardly more than one.
GROWTH = 1.3
FEWEST_PRIMES = 4
# Rounds of further primes after which the search is given up, if it has not come further meanwhile.
PATIENCE = 12


@dataclass(frozen=True, slots=True)
class Evidence:
    """Why a coefficient is believed.

    ``kind`` is "exact" (exact series throughout), "bound" (residues, and a proved bound that leaves one answer) or
    "residues" (fractions behind residues). For the last two ``spare_bits`` tells by how many bits the modulus exceeds
    what the longest fraction, or for "bound" the proved size, needs; ``confirmed`` is a prime that was not used to find
    the fractions and agrees with them (None unless ``kind`` is "residues").
    """

    kind: str
    spare_bits: int | None = None
    confirmed: int | None = None


class Recovery:
    """The residues of one problem, by as many primes as it takes. ``supplier`` says where they come from."""

    def __init__(self, problem: PoleProblem, charge: int, supplier: Supplier = here) -> None:
        self.problem, self.charge = problem, charge
        self._supplier = supplier
        self._layout = PoleLayout.make(problem.steps, charge)
        self.primes: tuple[int, ...] = ()

    def values_by_bound(self) -> tuple[list[Rational], list[Evidence]]:
        """W_0 ... W_charge at the x^2 of the problem, proved: denominators times W are integers of known size."""
        bound = ProvedBound.make(self.problem, self.charge)
        # One bit for the sign, and one so that the modulus exceeds the bound.
        needed = max(bound.bits) + 2
        task = PoleTask.make(self.problem, self.charge, at_square=True)
        stream = ResidueStream(self._supplier(task, (ceil(needed / (PRIME_BITS - LOST_BITS)),)))
        values: list[Rational] = []
        evidence: list[Evidence] = []
        table: Floats = np.zeros((0, self.charge + 1))
        while (missing := needed - self._bits()) > 0:
            self.primes, table = stream.first(len(self.primes) + ceil(missing / PRIME_BITS))
        residues, modulus = combine(table, self.primes)
        for residue, denominator, size in zip(residues, bound.denominators, bound.bits, strict=True):
            value = residue * int(denominator.p) * pow(int(denominator.q), -1, modulus) % modulus
            values.append(Rational(value if 2 * value < modulus else value - modulus) / denominator)
            evidence.append(Evidence("bound", modulus.bit_length() - 2 - size))
        return values, evidence

    def functions_by_spare_bits(self) -> tuple[list[PartialFractions], list[Evidence]]:
        """W_0 ... W_charge as functions of x^2: primes until every coefficient leaves enough bits unused.

        The last prime only confirms. Raises ``ConsistencyError`` when more and more primes bring no further fraction.
        """
        functions = [PartialFractions(ONE, ())]
        evidence = [Evidence("exact")]
        denominator, stalled = 1, 0
        wanted = FEWEST_PRIMES + self.charge // 2
        task = PoleTask.make(self.problem, self.charge, at_square=False)
        stream = ResidueStream(self._supplier(task, (wanted, self.charge // 3)))
        while True:
            self.primes, table = stream.first(len(self.primes) + wanted)
            known = len(functions)
            needed, denominator = self._reconstruct(table[:-1], functions, evidence, denominator)
            if len(functions) > self.charge:
                wrong = self._refuted(table[-1], functions)
                if wrong is None:
                    confirmed = [Evidence(e.kind, e.spare_bits, self.primes[-1]) for e in evidence[1:]]
                    return functions, [evidence[0], *confirmed]
                del functions[wrong:], evidence[wrong:]
            stalled = stalled + 1 if len(functions) <= known else 0
            if stalled > PATIENCE:
                raise ConsistencyError(f"no fraction fits the residues modulo {len(self.primes)} primes")
            # One prime more, because the last one only confirms.
            missing = ceil((needed - self._bits()) / PRIME_BITS) + 1
            wanted = max(FEWEST_PRIMES, missing, len(self.primes) // 4 if stalled else 0)

    def _bits(self) -> int:
        """The product of all primes so far has more bits than this."""
        return floor(sum(log2(p) for p in self.primes) - 1e-6)

    def _reconstruct(
        self, table: Floats, functions: list[PartialFractions], evidence: list[Evidence], denominator: int
    ) -> tuple[int, int]:
        """Append the next functions, as far as all primes but the last reach, with their evidence.

        ``denominator`` is a common denominator of what is known; coefficients of W_k times it are nearly integers, so
        that hardly more than their numerators have to fit. Returns an estimate of the bits for all, and the new one.
        """
        used = 0
        keys = self._layout.keys
        for order in range(len(functions), self.charge + 1):
            terms = [i for i, born in enumerate(self._layout.born) if born <= order]
            residues, modulus = combine(table[:, order, terms], self.primes[:-1])
            helper = denominator * order
            found: list[Term] = []
            spare = modulus.bit_length()
            for index, residue in zip(terms, residues, strict=True):
                fraction = reconstruct(residue * helper % modulus, modulus, spare_bits=SPARE_BITS)
                if fraction is None:
                    break
                spare = min(spare, fraction.spare_bits)
                value = fraction.value / helper
                helper *= int(fraction.value.q)
                denominator = lcm(denominator, int(value.q))
                found.append(Term(*keys[index], value))
            if len(found) < len(terms):
                break
            used = modulus.bit_length() - spare
            functions.append(PartialFractions(ZERO, tuple(term for term in found if term.coefficient != 0)))
            evidence.append(Evidence("residues", spare))
        # From few fractions nobody looks far ahead.
        growth: float = min(2.0, (self.charge / max(1, len(functions))) ** GROWTH)
        return ceil(used * growth) + SPARE_BITS, denominator

    def _refuted(self, row: Floats, functions: list[PartialFractions]) -> int | None:
        """The first function that does not agree with the last prime, which took no part in finding it."""
        prime = self.primes[-1]
        places = {key: index for index, key in enumerate(self._layout.keys)}
        for order, function in enumerate(functions):
            left = row[order].copy()
            for term in function.terms:
                index = places[term.square, term.power]
                if (term.coefficient.p - int(left[index]) * term.coefficient.q) % prime != 0:
                    return order
                left[index] = 0.0
            if left.any():
                return order
        return None
