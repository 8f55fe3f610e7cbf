"""All coefficients of one node with two or three colours at a rational ratio, exactly, from residues.

``applies`` says whether the fast sums serve a setting; ``sum`` computes. Where no single weight diverges up to
the charge the weights are summed at the limit point (``generic``), otherwise the limit is taken
(``limit``, ``three``): ``task`` chooses. The answer carries the bits that confirm it (``collect``), or is proved
(``proof``).
"""

from __future__ import annotations

from dataclasses import dataclass

from ratomega.case.setting import Setting
from ratomega.diagrams.tuples import count_all
from ratomega.errors import InputError
from ratomega.exact.batches import ResidueStream, Supplier, here
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ONE
from ratomega.regulator.fast.collect import bits_needed, collect, first_primes, primes_beyond, residues_beyond
from ratomega.regulator.fast.proof import check_proof, proof_bound
from ratomega.regulator.fast.setup import FastSetup, applies, prepare
from ratomega.regulator.fast.task import FastTask

__all__ = ["FastSum", "applies", "fast_sum", "worthwhile"]

# With fewer configurations the general engine is done before the tables stand.
FEWEST_CONFIGURATIONS = 150
# Below this charge a rehearsal costs more than some superfluous primes.
REHEARSAL_FROM = 6


@dataclass(frozen=True, slots=True)
class FastSum:
    """Z_0 ... Z_K. ``spare_bits[k]``: bits of the modulus beyond what Z_k needed; ``primes``: how many were used.

    ``proved``: the primes reach a proved bound on every coefficient, so that no bits are needed as evidence.
    """

    coefficients: tuple[Number, ...]
    spare_bits: tuple[int, ...]
    primes: int
    proved: bool


def worthwhile(setting: Setting, charge: int) -> bool:
    """Does a fixed rule prefer the fast sums: they apply, and there are enough configurations? Never a timing."""
    if applies(setting, charge) is not None:
        return False
    return count_all(setting.ranks, charge) >= FEWEST_CONFIGURATIONS


def fast_sum(setting: Setting, charge: int, *, certify: bool = False, supplier: Supplier = here) -> FastSum:
    """The coefficients up to ``charge`` at the limit point.

    Normalised as the general engine: Z_0 = 1, one weight per configuration. With ``certify`` the residues are taken
    modulo so many primes that a proved bound (``proof``) leaves one answer; that takes ten to twenty times longer.
    ``supplier`` says where the residues come from; the answer does not depend on it.

    Raises ``InputError`` with the reason when the fast sums do not apply, ``RatomegaError`` when certification refutes
    what was found. Cost: see ``generic``, ``limit`` and ``three``, times the number of primes, which
    grows with the digits of the answer.

    >>> from ratomega.case.setting import NodeSetting
    >>> from ratomega.exact.path import Linear
    >>> from ratomega.exact.rational import Rational
    >>> node = NodeSetting("g", (Linear(Rational(1, 3)), Linear(Rational(-1, 3))), (), (), ())
    >>> answer = fast_sum(Setting(Linear(ONE), Linear(ONE, ONE), (node,), ()), 2)
    >>> [str(z) for z in answer.coefficients]
    ['1', '9/16', '23409/189728']
    """
    reason = applies(setting, charge)
    if reason is not None:
        raise InputError.single(reason)
    setup = prepare(setting)
    known: tuple[Number, ...] = (ONE,)
    if charge >= REHEARSAL_FROM:
        # The numbers at a fraction of the charge show how long they are going to be, and take no time.
        known = _rehearsal(setup, max(3, charge // 3))
    task = FastTask.make(setup, charge)
    wanted = first_primes(bits_needed(setup, charge, known), task.bits)
    bounds = [proof_bound(setup, k, moving=task.singular) for k in range(charge + 1)] if certify else []
    beyond = 2 * max(bound.size for bound in bounds) if bounds else 0
    rest = max(0, primes_beyond(beyond, task.bits) - wanted) if bounds else 0
    stream = ResidueStream(supplier(task, (wanted, rest)))
    done = collect(setup, charge, stream, wanted=wanted)
    if not certify:
        return FastSum(done.coefficients, done.spare_bits, done.primes, False)
    primes, table = residues_beyond(stream, beyond, bits=task.bits)
    for k, (bound, value) in enumerate(zip(bounds, done.coefficients, strict=True)):
        check_proof(setup, bound, k, value, table[:, k], primes)
    return FastSum(done.coefficients, done.spare_bits, len(primes), True)


def _rehearsal(setup: FastSetup, charge: int) -> tuple[Number, ...]:
    task = FastTask.make(setup, charge)
    wanted = first_primes(bits_needed(setup, charge, (ONE,)), task.bits)
    return collect(setup, charge, ResidueStream(here(task)), wanted=wanted).coefficients
