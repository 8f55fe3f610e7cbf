"""What the pole recursion of U(2) starts from: ratio, (a1-a2)^2 and matter; and which cases it covers.

Everything is measured in a unit u with eps1 = u alpha, eps2 = u beta, alpha:beta in lowest terms, alpha > 0. With
a = (a1-a2)/2 and mu_f = m_f + (a1+a2)/2 - eps/2 (a fundamental of mass m counts as an antifundamental of mass
eps - m) the regular part W of Z depends on a through x^2 = 4 a^2 alone, and on the masses through the numerator

    prod_{p,r} P((p eps1 + r eps2)/2),   P(y) = prod_f (mu_f + y),

over a set of (p, r) that is symmetric under reflection. Hence only P(y) P(-y), a polynomial in y^2, and P(0) enter:
squares of momenta are enough, and they may be rational where the momenta are not.

The limit is taken with a and the mu_f held fixed. Where no component of the fixed locus at the limit point is
non-compact, which is what ``PoleProblem.pole`` decides, the limit does not depend on that choice.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from math import isqrt, lcm

from ratomega.case.case import Case
from ratomega.case.setting import NodeSetting
from ratomega.errors import InputError
from ratomega.exact.quadratic import only_rational
from ratomega.exact.rational import ONE, ZERO, Rational, common_denominator
from ratomega.regulator.poles.dressing import Dressing, NomeExponents

__all__ = [
    "PoleMatter",
    "PoleProblem",
    "RouteAnswer",
    "applies",
    "case_problem",
    "covers",
    "four_point_problem",
    "gauge_problem",
    "mixed_problem",
    "pole_sentence",
    "torus_problem",
]

MOST_FLAVOURS = 4


@dataclass(frozen=True, slots=True)
class PoleMatter:
    """The numerator P: ``even`` holds the coefficients of P(y) P(-y) in powers of y^2, ``centre`` is P(0).

    ``clearing`` is a positive integer whose products with all mu_f are likely to be integers (of some quadratic field).

    >>> PoleMatter.of_flavours([Rational(1, 2), Rational(3)]).even
    (9/4, -37/4, 1)
    """

    flavours: int
    adjoint: bool
    even: tuple[Rational, ...]
    centre: Rational
    clearing: int

    @classmethod
    def of_flavours(cls, mu: Iterable[Rational]) -> PoleMatter:
        mu = list(mu)
        centre = ONE
        for value in mu:
            centre *= value
        return cls(
            len(mu), False, _product_of([(value * value, -ONE) for value in mu]), centre, common_denominator(mu)
        )

    @classmethod
    def of_adjoint(cls, mu_square: Rational) -> PoleMatter:
        return cls(0, True, (mu_square, -ONE), ONE, denominator_root(mu_square))

    @classmethod
    def of_pairs(cls, pairs: Iterable[tuple[Rational, Rational]]) -> PoleMatter:
        """Flavours mu = s + d and s - d, pair by pair, from the squares (s^2, d^2).

        >>> PoleMatter.of_pairs([(Rational(49, 16), Rational(25, 16))]).even
        (9/4, -37/4, 1)
        """
        pairs = list(pairs)
        centre = ONE
        factors = []
        for s, d in pairs:
            centre *= s - d
            # ((s+y)^2 - d^2)((s-y)^2 - d^2) in y^2, with s and d standing for their squares
            factors.append(((s - d) ** 2, -2 * (s + d), ONE))
        clearing = lcm(*[denominator_root(x) for pair in pairs for x in pair])
        return cls(2 * len(pairs), False, _product_of(factors), centre, clearing)

    def scaled(self, unit: Rational) -> PoleMatter:
        """The same matter with every mu divided by ``unit``."""
        degree = len(self.even) - 1
        even = tuple(c / unit ** (2 * (degree - i)) for i, c in enumerate(self.even))
        centre = self.centre / unit**self.flavours
        return PoleMatter(self.flavours, self.adjoint, even, centre, self.clearing * abs(int(unit.p)))


def denominator_root(square: Rational) -> int:
    """The denominator of the root of a rational square; of a number that is no square, its own denominator.

    >>> denominator_root(Rational(5, 9)), denominator_root(Rational(1, 6))
    (3, 6)
    """
    root = isqrt(int(square.q))
    return root if root * root == square.q else int(square.q)


def _product_of(factors: Iterable[Sequence[Rational]]) -> tuple[Rational, ...]:
    result = [ONE]
    for factor in factors:
        longer = [ZERO] * (len(result) + len(factor) - 1)
        for i, left in enumerate(result):
            for j, right in enumerate(factor):
                longer[i + j] += left * right
        result = longer
    return tuple(result)


@dataclass(frozen=True, slots=True)
class PoleProblem:
    """A U(2) problem in units of ``unit``: eps1 = unit * steps[0], eps2 = unit * steps[1].

    ``square`` is (a1-a2)^2 / unit^2; ``matter`` is in the same unit; ``dressing`` turns W into Z and is not scaled.
    Build it with one of the functions of this module.
    """

    steps: tuple[int, int]
    unit: Rational
    square: Rational
    matter: PoleMatter
    dressing: Dressing

    @property
    def scale(self) -> Rational:
        """W_k in the units of the problem times scale^k is W_k itself: Z has dimension k (flavours - 4)."""
        return ONE if self.matter.adjoint else self.unit ** (self.matter.flavours - MOST_FLAVOURS)

    def pole(self, charge: int) -> tuple[int, int] | None:
        """(m, n) with a1-a2 = +-(m eps1 + n eps2), m, n >= 1, m n <= charge, or None.

        At such a value a component of the fixed locus is not compact: the limit can be infinite or depend on the path.
        """
        alpha, beta = self.steps
        for m in range(1, charge + 1):
            for n in range(1, charge // m + 1):
                if self.square == (m * alpha + n * beta) ** 2:
                    return m, n
        return None


def _units(eps1: Rational, eps2: Rational) -> tuple[tuple[int, int], Rational]:
    if eps1 == 0 or eps2 == 0:
        raise InputError.single("eps1 and eps2 must not be zero", "eps1" if eps1 == 0 else "eps2")
    ratio = eps2 / eps1
    return (int(ratio.q), int(ratio.p)), eps1 / ratio.q


def _flavour_dressing(eps1: Rational, eps2: Rational, coulomb_square: Rational, mu: Sequence[Rational]) -> Dressing:
    area, eps, total = eps1 * eps2, eps1 + eps2, sum(mu, ZERO)
    if len(mu) == 2:
        return Dressing(linear=-1 / (2 * area))
    if len(mu) == 3:
        return Dressing(linear=-(total + eps) / (2 * area), quadratic=-1 / (64 * area))
    if len(mu) == MOST_FLAVOURS:
        squares = sum((x * x for x in mu), ZERO)
        return Dressing(
            nome=NomeExponents(
                -coulomb_square / area, (total + eps) ** 2 / (4 * area), (2 * squares - eps * eps) / area
            )
        )
    return Dressing()


def mixed_problem(
    eps1: Rational, eps2: Rational, coulomb_square: Rational, *, mu: Sequence[Rational] = ()
) -> PoleProblem:
    """Up to four flavours by mu_f = m_f + (a1+a2)/2 - eps/2, and a^2 = (a1-a2)^2/4, which need not be a square.

    Raises ``InputError`` for more than four flavours or a vanishing eps.
    """
    steps, unit = _units(eps1, eps2)
    if len(mu) > MOST_FLAVOURS:
        raise InputError.single(f"the pole recursion knows up to four flavours, not {len(mu)}")
    dressing = _flavour_dressing(eps1, eps2, coulomb_square, mu)
    matter = PoleMatter.of_flavours(mu).scaled(unit)
    return PoleProblem(steps, unit, 4 * coulomb_square / unit**2, matter, dressing)


def torus_problem(eps1: Rational, eps2: Rational, coulomb_square: Rational, *, mu_square: Rational) -> PoleProblem:
    """One adjoint by mu^2 = (m - eps/2)^2; nothing else of its mass enters Z."""
    steps, unit = _units(eps1, eps2)
    exponent = -2 * (mu_square - (eps1 - eps2) ** 2 / 4) / (eps1 * eps2)
    matter = PoleMatter.of_adjoint(mu_square).scaled(unit)
    return PoleProblem(steps, unit, 4 * coulomb_square / unit**2, matter, Dressing(euler=exponent))


def gauge_problem(
    eps1: Rational,
    eps2: Rational,
    coulomb: tuple[Rational, Rational],
    *,
    antifundamental: Sequence[Rational] = (),
    fundamental: Sequence[Rational] = (),
    adjoint: Rational | None = None,
) -> PoleProblem:
    """A U(2) theory by its masses. Raises ``InputError`` for an adjoint together with flavours, or too many flavours.

    >>> gauge_problem(ONE, ONE, (Rational(3, 11), Rational(-3, 11))).square
    36/121
    """
    eps, shift = eps1 + eps2, (coulomb[0] + coulomb[1]) / 2
    coulomb_square = ((coulomb[0] - coulomb[1]) / 2) ** 2
    mu = [m + shift - eps / 2 for m in antifundamental] + [eps / 2 - m + shift for m in fundamental]
    if adjoint is None:
        return mixed_problem(eps1, eps2, coulomb_square, mu=mu)
    if mu:
        raise InputError.single("the pole recursion knows an adjoint or flavours, not both")
    return torus_problem(eps1, eps2, coulomb_square, mu_square=(adjoint - eps / 2) ** 2)


def four_point_problem(
    eps1: Rational, eps2: Rational, internal_square: Rational, external_squares: Sequence[Rational]
) -> PoleProblem:
    """The four-point conformal block on the sphere, by squares of momenta.

    Weights are Delta = (eps^2/4 - P^2)/(eps1 eps2) at central charge 1 + 6 eps^2/(eps1 eps2); ``external_squares``
    are the P^2 of the fields at 0, x, 1 and infinity. The result is the block in x with leading coefficient 1: the
    partition function of four flavours without its factor (1-x)^(2 m0 m1/(eps1 eps2)) (Alday, Gaiotto, Tachikawa
    0906.3219).
    """
    if len(external_squares) != 4:
        raise InputError.single(f"four external momenta are needed, not {len(external_squares)}")
    steps, unit = _units(eps1, eps2)
    at_zero, at_x, at_one, at_infinity = external_squares
    area, eps = eps1 * eps2, eps1 + eps2
    matter = PoleMatter.of_pairs([(at_x, at_zero), (at_one, at_infinity)]).scaled(unit)
    dressing = Dressing(
        nome=NomeExponents(
            -internal_square / area,
            (at_x + at_one - eps * eps / 4) / area,
            (4 * sum(external_squares, ZERO) - eps * eps) / area,
        )
    )
    return PoleProblem(steps, unit, 4 * internal_square / unit**2, matter, dressing)


def pole_sentence(m: int, n: int) -> str:
    """Why the route refuses a difference of Coulomb parameters that sits at the pole (m, n)."""
    return (
        f"a1 - a2 equals +-({m}*eps1 + {n}*eps2) at the limit point, a pole of the recursion at charge {m * n}; "
        "there the limit can be infinite or depend on the path"
    )


@dataclass(frozen=True, slots=True)
class RouteAnswer:
    """Does the route cover a case, and if not, why. The reason is one sentence, empty when it applies."""

    applies: bool
    reason: str = ""


def _structure(case: Case) -> str:
    if len(case.theory.nodes) != 1:
        return "the pole recursion covers one gauge node, and this quiver has several"
    node = case.theory.nodes[0]
    flavours = len(node.antifundamental) + len(node.fundamental)
    if case.symbols:
        return "the pole recursion takes numbers, and this case has symbols"
    if node.rank != 2:
        return f"the pole recursion covers U(2), and this node is U({node.rank})"
    if len(node.adjoint) > 1:
        return "the pole recursion covers one adjoint at most"
    if node.adjoint and flavours:
        return "the pole recursion covers an adjoint or flavours, and this node has both"
    if flavours > MOST_FLAVOURS:
        return f"the pole recursion covers up to four flavours, and this node has {flavours}"
    if _momenta(case) is None:
        return "the pole recursion takes rational (a1 - a2)^2 and m + (a1 + a2)/2, and the adjoint's m rational"
    return ""


@dataclass(frozen=True, slots=True)
class _Momenta:
    """What enters of a case: (a1-a2)^2/4, the mu of its flavours, and mu of its adjoint; all rational."""

    square: Rational
    mu: tuple[Rational, ...]
    adjoint: Rational | None


def _momenta(case: Case) -> _Momenta | None:
    """None where one of them is not rational. A difference of Coulomb parameters may be: its square counts."""
    node = _at_limit(case)
    eps = case.background.eps1.constant + case.background.eps2.constant
    first, second = node.coulomb[0].constant, node.coulomb[1].constant
    half, shift = (first - second) / 2, (first + second) / 2
    numbers = [half * half]
    numbers += [m.constant + shift - eps / 2 for m in node.antifundamental]
    numbers += [eps / 2 - m.constant + shift for m in node.fundamental]
    adjoint = [m.constant - eps / 2 for m in node.adjoint]
    rational = [x for x in numbers + adjoint if isinstance(x, Rational)]
    if len(rational) != len(numbers) + len(adjoint):
        return None
    return _Momenta(rational[0], tuple(rational[1 : len(numbers)]), rational[-1] if adjoint else None)


def covers(case: Case) -> bool:
    """Does the pole recursion cover the theory of this case, wherever a1 - a2 sits? Then ``case_problem`` gives it."""
    return not _structure(case)


def applies(case: Case) -> RouteAnswer:
    """Does the pole recursion cover this case up to its charge? Exact; cost about K log K for charge K."""
    reason = _structure(case)
    if reason:
        return RouteAnswer(False, reason)
    found = case_problem(case).pole(case.bounds[0])
    if found is None:
        return RouteAnswer(True)
    return RouteAnswer(False, pole_sentence(*found))


def case_problem(case: Case) -> PoleProblem:
    """The problem behind a case, at its limit point. Raises ``InputError`` when the theory is not covered."""
    reason = _structure(case)
    if reason:
        raise InputError.single(reason)
    momenta = _momenta(case)
    if momenta is None:
        raise InputError.single("the pole recursion takes rational momenta")
    eps1, eps2 = only_rational(case.background.eps1.constant), only_rational(case.background.eps2.constant)
    if momenta.adjoint is not None:
        return torus_problem(eps1, eps2, momenta.square, mu_square=momenta.adjoint**2)
    return mixed_problem(eps1, eps2, momenta.square, mu=momenta.mu)


def _at_limit(case: Case) -> NodeSetting:
    eps1, eps2 = case.background.eps1, case.background.eps2
    node = case.theory.nodes[0]
    return NodeSetting(
        node.name,
        tuple(a.on(eps1, eps2) for a in node.coulomb),
        tuple(m.on(eps1, eps2) for m in node.antifundamental),
        tuple(m.on(eps1, eps2) for m in node.fundamental),
        tuple(m.on(eps1, eps2) for m in node.adjoint),
    )
