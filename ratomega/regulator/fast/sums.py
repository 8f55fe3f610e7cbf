"""All coefficients of one node with two or three colours at a rational ratio, exactly, from residues.

``applies`` says whether the fast sums serve a setting; ``sum`` computes. Where no single weight diverges up to
the charge the weights are summed at the limit point (``generic``), otherwise the limit is taken
(``limit``, ``three``). The answer carries the bits that confirm it (``collect``), or is proved
(``proof``).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from ratomega.case.setting import Setting
from ratomega.diagrams.tuples import count_all
from ratomega.errors import InputError
from ratomega.exact.rational import ONE, Rational
from ratomega.exact.residues import Floats, Moduli
from ratomega.regulator.fast.collect import Collected, bits_needed, collect, residues_beyond
from ratomega.regulator.fast.generic import two_colours
from ratomega.regulator.fast.layout import Layout
from ratomega.regulator.fast.limit import two_colours_limit
from ratomega.regulator.fast.proof import check_proof, proof_bound
from ratomega.regulator.fast.setup import FastSetup, applies, prepare
from ratomega.regulator.fast.tables import Forest
from ratomega.regulator.fast.three import three_colours, three_colours_limit

__all__ = ["FastSum", "applies", "fast_sum", "worthwhile"]

# Single products leave room below 2^53; sums of products and unreduced power sums want smaller primes.
PRODUCT_BITS = 26
MATRIX_BITS = 25
# More primes at once gain nothing but memory. Three colours keep matrices over pairs of diagrams.
LARGEST_BATCH = 96
MATRIX_ENTRIES = 2**22
LIMIT_BITS = 23
# With fewer configurations the general engine is done before the tables stand.
FEWEST_CONFIGURATIONS = 150
# Below this charge a rehearsal costs more than some superfluous primes.
REHEARSAL_FROM = 6


@dataclass(frozen=True, slots=True)
class FastSum:
    """Z_0 ... Z_K. ``spare_bits[k]``: bits of the modulus beyond what Z_k needed; ``primes``: how many were used.

    ``proved``: the primes reach a proved bound on every coefficient, so that no bits are needed as evidence.
    """

    coefficients: tuple[Rational, ...]
    spare_bits: tuple[int, ...]
    primes: int
    proved: bool


def worthwhile(setting: Setting, charge: int) -> bool:
    """Does a fixed rule prefer the fast sums: they apply, and there are enough configurations? Never a timing."""
    if applies(setting, charge) is not None:
        return False
    return count_all(setting.ranks, charge) >= FEWEST_CONFIGURATIONS


def fast_sum(setting: Setting, charge: int, *, certify: bool = False) -> FastSum:
    """The coefficients up to ``charge`` at the limit point.

    Normalised as the general engine: Z_0 = 1, one weight per configuration. With ``certify`` the residues are taken
    modulo so many primes that a proved bound (``proof``) leaves one answer; that takes ten to twenty times longer.

    Raises ``InputError`` with the reason when the fast sums do not apply, ``RatomegaError`` when certification refutes
    what was found. Cost: see ``generic``, ``limit`` and ``three``, times the number of primes, which
    grows with the digits of the answer.

    >>> from ratomega.case.setting import NodeSetting
    >>> from ratomega.exact.path import Linear
    >>> node = NodeSetting("g", (Linear(Rational(1, 3)), Linear(Rational(-1, 3))), (), (), ())
    >>> answer = fast_sum(Setting(Linear(ONE), Linear(ONE, ONE), (node,), ()), 2)
    >>> [str(z) for z in answer.coefficients]
    ['1', '9/16', '23409/189728']
    """
    reason = applies(setting, charge)
    if reason is not None:
        raise InputError.single(reason)
    setup = prepare(setting)
    if charge >= REHEARSAL_FROM:
        # The numbers at a fraction of the charge show how long they are going to be, and take no time.
        rehearsal = _collected(setup, max(3, charge // 3))
        done = _collected(setup, charge, rehearsal.coefficients)
    else:
        done = _collected(setup, charge)
    primes = _certify(setup, charge, done.coefficients) if certify else done.primes
    return FastSum(done.coefficients, done.spare_bits, primes, certify)


def _certify(setup: FastSetup, charge: int, coefficients: tuple[Rational, ...]) -> int:
    """Prove every coefficient or raise ``RatomegaError``; the number of primes that it took."""
    method = _method(setup, charge)
    bounds = [proof_bound(setup, k, moving=method.singular) for k in range(charge + 1)]
    largest = max(bound.size for bound in bounds)
    primes, table = residues_beyond(method.residues, 2 * largest, bits=method.bits, batch=method.batch)
    for k, (bound, value) in enumerate(zip(bounds, coefficients, strict=True)):
        check_proof(setup, bound, k, value, table[k], primes)
    return len(primes)


def _collected(setup: FastSetup, charge: int, known: tuple[Rational, ...] = (ONE,)) -> Collected:
    method = _method(setup, charge)
    estimate = bits_needed(setup, charge, known)
    return collect(setup, charge, method.residues, bits=method.bits, estimate=estimate, batch=method.batch)


@dataclass(frozen=True, slots=True, eq=False)
class _Method:
    """How residues are computed, the size of the primes, and how many of them the memory takes at once."""

    residues: Callable[[Moduli], Floats]
    bits: int
    batch: int
    singular: bool


def _method(setup: FastSetup, charge: int) -> _Method:
    threshold = setup.singular_from()
    singular = threshold is not None and threshold <= charge
    if setup.rank == 2 and not singular:
        forest = Forest.make(charge)
        return _Method(lambda moduli: two_colours(setup, forest, moduli), PRODUCT_BITS, LARGEST_BATCH, False)
    if setup.rank == 2:
        layout = Layout.make(setup, charge)
        return _Method(lambda moduli: two_colours_limit(setup, layout, moduli), LIMIT_BITS, LARGEST_BATCH, True)
    if not singular:
        forest = Forest.make(charge)
        batch = max(4, min(LARGEST_BATCH, MATRIX_ENTRIES // len(forest) ** 2))
        return _Method(lambda moduli: three_colours(setup, forest, moduli), MATRIX_BITS, batch, False)
    layout = Layout.make(setup, charge)
    entries = layout.depth * count_all([2], charge)
    batch = max(4, min(LARGEST_BATCH, MATRIX_ENTRIES // entries))
    return _Method(lambda moduli: three_colours_limit(setup, layout, moduli), LIMIT_BITS, batch, True)
