"""A limit inside the limit: u -> 0 first, at fixed t, and then t -> 0.

At fixed t the inner limit is an ordinary one, with u as the parameter of its path. It is taken at one number t = P/Q, P
a Mersenne prime, which is small in the P-adic sense; Q, another prime, keeps t off the integers, where Coulomb
differences would meet the lattice of eps1 and eps2 by accident. The inner limits are a rational function of t, so

    Z_k(t) = t^-n (s_0 + s_1 t + ...),    s_0 = t^n Z_k(t) modulo P,

and s_0, a fraction of which numerator and denominator together have fewer bits than P, is found from its residue. The
bits to spare are counted, and a second prime confirms. Nothing is expanded in t.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise

from ratomega.case.case import Case
from ratomega.case.setting import Setting, own_setting, resonances
from ratomega.detector.accidents import check_path
from ratomega.diagrams.tuples import Charge
from ratomega.errors import InputError
from ratomega.exact.quadratic import Number, quadratic, rational_parts
from ratomega.exact.rational import Rational
from ratomega.exact.residues import reconstruct
from ratomega.regulator.direct import direct_total
from ratomega.weights import Weights

__all__ = ["BELOW", "NestedLimit", "NestedLimits", "nested_limits"]

# p with 2^p - 1 prime.
EXPONENTS = (521, 607, 1279, 2203, 4423, 9689)
SPARE_BITS = 64
BELOW = 1_000_003


@dataclass(frozen=True, slots=True)
class NestedLimit:
    """One charge: ``value t^-order u^-inner_order`` in the lead; both orders 0 is a finite limit.

    ``compact``: every component of the fixed locus at the limit point of both is compact, so that neither the order of
    the limits nor the path matters.
    """

    charge: Charge
    inner_order: int
    order: int
    value: Number
    compact: bool


@dataclass(frozen=True, slots=True)
class NestedLimits:
    """All charges, with the bits of the two primes and the spare bits of the worst fraction."""

    limits: tuple[NestedLimit, ...]
    bits: tuple[int, int]
    spare_bits: int


@dataclass(frozen=True, slots=True)
class _At:
    """The inner limits at t = P/Q: by charge the order of the pole in u, and the leading coefficient."""

    prime: int
    values: tuple[tuple[Charge, int, Number], ...]

    @classmethod
    def of(cls, case: Case, exponent: int, *, allow_tilt: bool) -> _At:
        prime = 2**exponent - 1
        weights = Weights(_inner_setting(case, Rational(prime, BELOW), allow_tilt=allow_tilt))
        return cls(prime, tuple(_leading(weights, charge) for charge in case.charges))


def _inner_setting(case: Case, value: Rational, *, allow_tilt: bool) -> Setting:
    setting = own_setting(case.inner(value), allow_tilt=allow_tilt)
    check_path(setting, case.bounds)
    return setting


def _leading(weights: Weights, charge: Charge) -> tuple[Charge, int, Number]:
    series = direct_total(weights, charge)
    order = max(0, -series.valuation)
    return charge, order, series.coefficient(-order)


def nested_limits(case: Case, *, allow_tilt: bool = True) -> NestedLimits:
    """The limits u -> 0, then t -> 0, at every charge of a case with u.

    Raises ``InputError`` when the second prime does not confirm the first (the inner limit depends on a tilt that was
    drawn for it), or no prime is large enough; ``PathError`` for a path that cannot be used. Cost: two direct sums over
    numbers of some hundred digits.
    """
    at_limit = own_setting(case.inner(Rational(0)))
    for first, second in pairwise(EXPONENTS):
        one = _At.of(case, first, allow_tilt=allow_tilt)
        found = [_found(value, one.prime) for _, _, value in one.values]
        if any(entry is None for entry in found):
            continue
        known = [entry for entry in found if entry is not None]
        other = _At.of(case, second, allow_tilt=allow_tilt)
        limits = []
        for (charge, order, _), (_, again, value), (outer, leading, _) in zip(
            one.values, other.values, known, strict=True
        ):
            if order != again or not _confirmed(value, other.prime, outer, leading):
                message = (
                    f"the inner limit at charge {','.join(map(str, charge))} depends on the tilt of the Coulomb "
                    "parameters that was drawn for it; give multiples of u of your own"
                )
                raise InputError.single(message, "node")
            compact = next(resonances(at_limit, charge), None) is None
            limits.append(NestedLimit(charge, order, outer, leading, compact))
        return NestedLimits(tuple(limits), (first, second), min(spare for *_, spare in known))
    raise InputError.single(f"the limits have more than {EXPONENTS[-2]} bits; lower the charge", "charge")


def _found(value: Number, prime: int) -> tuple[int, Number, int] | None:
    """(order of the pole in t, leading coefficient, spare bits) behind the value at t = P/Q; None: P is too small."""
    parts = rational_parts(value)
    order = max(_poles(part, prime) for part in parts)
    fractions = []
    for part in parts:
        fraction = reconstruct(_residue(part, order, prime), prime, spare_bits=SPARE_BITS)
        if fraction is None:
            return None
        fractions.append(fraction)
    return order, _joined(value, [f.value for f in fractions]), min(f.spare_bits for f in fractions)


def _confirmed(value: Number, prime: int, order: int, leading: Number) -> bool:
    expected, found = rational_parts(leading), rational_parts(value)
    length = max(len(expected), len(found))
    pairs = zip(_padded(expected, length), _padded(found, length), strict=True)
    return all(
        _poles(part, prime) <= order and _residue(part, order, prime) == _residue(want, 0, prime)
        for want, part in pairs
    )


def _padded(parts: tuple[Rational, ...], length: int) -> Iterator[Rational]:
    yield from parts
    for _ in range(length - len(parts)):
        yield Rational(0)


def _joined(like: Number, parts: list[Rational]) -> Number:
    return parts[0] if len(parts) == 1 else quadratic(parts[0], parts[1], like.d)  # type: ignore[union-attr]


def _poles(value: Rational, prime: int) -> int:
    below, order = int(value.q), 0
    while below % prime == 0:
        below //= prime
        order += 1
    return order


def _residue(value: Rational, order: int, prime: int) -> int:
    """t^order times the value, modulo P."""
    scaled = value * Rational(prime, BELOW) ** order
    return int(scaled.p) * pow(int(scaled.q), -1, prime) % prime
