"""Changes of convention that leave the case alone: signs and scales of q, a U(1) factor, the normalisation.

``fixed_edits`` have no free number. ``families`` have one, s, which a row fixes: there the prediction is linear in s.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass

from ratomega.case.setting import Setting
from ratomega.conformal.dictionary import dealings, gauge_path, why_not_covered
from ratomega.diagrams.tuples import Charge
from ratomega.exact.quadratic import Number, is_quadratic, only_rational
from ratomega.exact.rational import ONE, ZERO, Rational
from ratomega.verify.series import Series, remembered, rescaled, scaled, times

__all__ = ["Family", "SeriesEdit", "families", "fixed_edits", "has_another_name", "named_exponents"]

Build = Callable[[Series, Setting], Series]


@dataclass(frozen=True, slots=True)
class SeriesEdit:
    """One change of Z in words, what to do with the case's numbers, and the change itself."""

    words: str
    advice: str
    apply: Build


def fixed_edits(setting: Setting) -> Iterator[SeriesEdit]:
    """Signs of the counting parameters, and powers of eps1 eps2 in them. Those that change nothing are among them."""
    count = len(setting.nodes)
    names = ["q"] if count == 1 else [f"q of {node.name}" for node in setting.nodes]
    for v, name in enumerate(names):
        signs = tuple(-ONE if u == v else ONE for u in range(count))
        yield _rescaling(setting, f"{name} -> -{name}", signs)
    if count > 1:
        yield _rescaling(setting, "every q -> -q", (-ONE,) * count)
    most = max(2, *setting.ranks)
    every = "q" if count == 1 else "every q"
    of_charge, whole = _charge_words(setting, range(count))
    for power in range(1, most + 1):
        for sign in (1, -1):
            exponent = sign * power
            yield SeriesEdit(
                f"{every} -> q*(eps1*eps2)^{exponent}" if exponent != 1 else f"{every} -> q*eps1*eps2",
                f"multiply the coefficient of charge {of_charge} by (eps1*eps2)^({exponent}*{whole})",
                lambda z, s, n=exponent: rescaled(z, (_area(s) ** n,) * count),  # type: ignore[misc]
            )


def has_another_name(family: Family, setting: Setting, s: Rational, uncertainty: Rational) -> bool:
    """Is a number that was fitted to a scale of q one of ``fixed_edits``, as far as it is known?"""
    if family.factor or family.pivot is None:
        return False
    area, most = _area(setting), max(2, *setting.ranks)
    known = [-ONE, *(area**n for n in range(-most, most + 1) if not is_quadratic(area))]
    return any(abs(only_rational(one) - s) <= uncertainty for one in known)


def _area(setting: Setting) -> Number:
    return setting.eps1.constant * setting.eps2.constant


def _rescaling(setting: Setting, words: str, factors: tuple[Number, ...]) -> SeriesEdit:
    of_charge, exponent = _charge_words(setting, [v for v, factor in enumerate(factors) if factor != 1])
    advice = f"multiply the coefficient of charge {of_charge} by (-1)^{exponent}"
    return SeriesEdit(words, advice, lambda z, _: rescaled(z, factors))


def _charge_words(setting: Setting, nodes: Iterable[int]) -> tuple[str, str]:
    """The charge by its nodes, and the sum of it over some of them: k, or (k_left, k_right) and k_right."""
    if len(setting.nodes) == 1:
        return "k", "k"
    names = [f"k_{node.name}" for node in setting.nodes]
    chosen = [names[v] for v in nodes]
    return f"({', '.join(names)})", chosen[0] if len(chosen) == 1 else f"({' + '.join(chosen)})"


@dataclass(frozen=True, slots=True)
class Family:
    """Changes with one number s; ``neutral`` is the s that changes nothing, ``pivot`` the charge at which the
    prediction is linear in s (None: any)."""

    words: str
    advice: str
    neutral: Rational
    pivot: Charge | None
    factor: bool
    build: Callable[[Series, Rational], Series]


def families(setting: Setting) -> Iterator[Family]:
    """A U(1) factor of one of four shapes, in every counting parameter and in their product; a scale of q; a factor
    in front."""
    count = len(setting.nodes)
    places: list[tuple[str, Charge]] = []
    for v, node in enumerate(setting.nodes):
        unit = tuple(int(u == v) for u in range(count))
        places.append(("q" if count == 1 else f"q_{node.name}", unit))
    if count > 1:
        places.append(("Q", (1,) * count))
    for name, unit in places:
        where = "" if name != "Q" else ", Q the product of all q"
        for shape, coefficients in SHAPES.items():
            words = shape.replace("q", name) + where
            yield Family(words, "multiply Z by the inverse of it", ZERO, unit, True, _factor(unit, coefficients))
    every = "q" if count == 1 else "every q"
    pivot = (1,) if count == 1 else None
    if pivot is not None:
        yield Family(
            f"{every} -> s*q", "multiply the coefficient of charge k by s^k", ONE, pivot, False,
            lambda z, s: rescaled(z, (s,) * count),
        )
    yield Family("Z -> s*Z", "multiply every coefficient by s", ONE, None, False, scaled)


def _factor(unit: Charge, coefficients: Callable[[Rational, int], Rational]) -> Callable[[Series, Rational], Series]:
    def build(z: Series, s: Rational) -> Series:
        def factor(charge: Charge) -> Number:
            order = max(charge)
            if charge != tuple(order * x for x in unit):
                return ZERO
            return coefficients(s, order)

        return times(z, remembered(factor))

    return build


def _exponential(s: Rational, order: int) -> Rational:
    result = ONE
    for n in range(1, order + 1):
        result *= s / n
    return result


def _binomial(s: Rational, order: int) -> Rational:
    """The coefficient of q^order in (1 + q)^s."""
    result = ONE
    for n in range(1, order + 1):
        result *= (s - n + 1) / n
    return result


def _complement(s: Rational, order: int) -> Rational:
    return _binomial(s, order) if order % 2 == 0 else -_binomial(s, order)


def _euler(s: Rational, order: int) -> Rational:
    """The coefficient of q^order in prod (1 - q^n)^s, from q d/dq log."""
    known = [ONE]
    for n in range(1, order + 1):
        total = ZERO
        for k in range(1, n + 1):
            total += known[n - k] * sum(d for d in range(1, k + 1) if k % d == 0)
        known.append(-s * total / n)
    return known[order]


SHAPES: dict[str, Callable[[Rational, int], Rational]] = {
    "exp(s*q)": _exponential,
    "(1 - q)^s": _complement,
    "(1 + q)^s": _binomial,
    "prod (1 - q^n)^s": _euler,
}


def named_exponents(setting: Setting) -> dict[Rational, str]:
    """Exponents with a meaning: of the theory of one colour, and of the dictionary to conformal blocks."""
    area, eps = _area(setting), setting.eps1.constant + setting.eps2.constant
    found: dict[Rational, str] = {}

    def add(value: Number, words: str) -> None:
        for sign, prefix in ((1, ""), (-1, "-")):
            if is_quadratic(value):
                continue
            signed = only_rational(value * sign)
            if signed != 0:
                found.setdefault(signed, f"{prefix}{words}" if "+" not in words else f"{prefix}({words})")

    add(ONE / area, "1/(eps1*eps2)")
    add(ONE / (2 * area), "1/(2*eps1*eps2)")
    for node in setting.nodes:
        for adjoint in node.adjoint:
            m = adjoint.constant
            add(m * (eps - m) / area, "m*(eps - m)/(eps1*eps2)")
            add(2 * m * (eps - m) / area - 1, "(2*m*(eps - m)/(eps1*eps2) + -1)")
            both = (m - setting.eps1.constant) * (m - setting.eps2.constant) / area
            add(both, "(m - eps1)*(m - eps2)/(eps1*eps2)")
            add(both * node.rank, f"{node.rank}*(m - eps1)*(m - eps2)/(eps1*eps2)")
        if node.rank == 1:
            ends = [node.coulomb[0].constant + m.constant for m in node.antifundamental]
            ends += [node.coulomb[0].constant + eps - m.constant for m in node.fundamental]
            if len(ends) == 1:
                add(ends[0] / area, "(a + m)/(eps1*eps2)")
            if len(ends) == 2:
                add(ends[0] * ends[1] / area, "(a + m1)*(a + m2)/(eps1*eps2)")
    if not why_not_covered(setting):
        for dealing in dealings(gauge_path(setting).flavours):
            if len(dealing.left) == len(dealing.right) == 2:
                left, right = (sum((x.constant for x in end), start=ZERO) / 2 for end in (dealing.left, dealing.right))
                add(2 * left * right / area, "2*m*m'/(eps1*eps2)")
                add(2 * left * (eps - right) / area, "2*m*(eps - m')/(eps1*eps2)")
                add(2 * right * (eps - left) / area, "2*m'*(eps - m)/(eps1*eps2)")
                add(2 * (eps - left) * (eps - right) / area, "2*(eps - m)*(eps - m')/(eps1*eps2)")
    return found
