"""Blocks that are elementary in the nome: published values, mpmath, Gram matrices, the sum over diagrams."""

from __future__ import annotations

from itertools import permutations, product

import mpmath
import pytest
from building import make_case
from flint import fmpq

import ratomega
from ratomega.case.setting import own_setting
from ratomega.conformal.dictionary import SphereBlock, gauge_path
from ratomega.conformal.dressing import Dressing
from ratomega.conformal.exact_blocks import NomeForm, elementary_block, elementary_on_the_path, elementary_sum
from ratomega.conformal.gauge_sum import block_coefficients, gauge_coefficients
from ratomega.conformal.vertex import Vertex
from ratomega.errors import InputError
from ratomega.exact.laurent import Laurent

ZERO, ONE = fmpq(0), fmpq(1)
SIXTEENTHS = [fmpq(1, 16)] * 4


# ---- the nome


def times(left, right):
    return [sum((left[k] * right[n - k] for k in range(n + 1)), ZERO) for n in range(min(len(left), len(right)))]


def composed(outer, inner):
    """outer(inner(q)), inner without constant term."""
    result = [ZERO] * len(inner)
    for c in reversed(outer):
        result = times(result, inner)
        result[0] += c
    return result


def nome(order):
    return [ZERO, *(c / 16 for c in NomeForm(ONE, ZERO, ZERO).coefficients(order - 1))]


def test_nome_against_its_table() -> None:
    # nome = u + 8 u^2 + 84 u^3 + 992 u^4 + ..., u = q/16: Abramowitz and Stegun, from memory.
    table = [fmpq(c, 16**n) for n, c in enumerate([1, 8, 84, 992])]
    assert list(NomeForm(ONE, ZERO, ZERO).coefficients(3)) == table


def test_nome_inverts_the_modular_function() -> None:
    # q = 16 nome prod ((1 + nome^(2n)) / (1 + nome^(2n-1)))^8 (Jacobi), composed order by order.
    order = 9
    modulus = [ZERO, fmpq(16)] + [ZERO] * (order - 1)
    for n in range(1, order + 1):
        for _ in range(8):
            factor = [ONE if k in (0, n) else ZERO for k in range(order + 1)]
            if n % 2:
                factor = [ONE if k == 0 else (-ONE) ** (k // n) if k % n == 0 else ZERO for k in range(order + 1)]
            modulus = times(modulus, factor)
    assert composed(modulus, nome(order)) == [ZERO, ONE] + [ZERO] * (order - 1)


def test_theta_is_its_sum_over_squares() -> None:
    order = 10
    squares = [ZERO] * (order + 1)
    for n in range(-3, 4):
        squares[n * n] += 1
    assert composed(squares, nome(order)) == list(NomeForm(ZERO, ZERO, ONE).coefficients(order))


def test_all_three_factors_against_mpmath() -> None:
    a, b, c = fmpq(3, 7), fmpq(-5, 8), fmpq(-3)
    series = NomeForm(a, b, c).coefficients(16)
    with mpmath.workdps(40):
        x = mpmath.mpf(1) / 100

        def real(value):
            return mpmath.mpf(int(value.p)) / int(value.q)

        q_e = mpmath.qfrom(m=x)
        expected = (16 * q_e / x) ** real(a) * (1 - x) ** real(b) * mpmath.jtheta(3, 0, q_e) ** real(c)
        found = mpmath.polyval([real(value) for value in reversed(series)], x)
        assert mpmath.almosteq(found, expected, rel_eps=mpmath.mpf(10) ** -30)


# ---- published blocks


def test_published_blocks_at_h_3_7() -> None:
    # Al. Zamolodchikov 1986 for c = 1, all weights 1/16: (16 q_e)^h [x(1-x)]^(-1/8)/theta_3, and c = 25, all weights
    # 15/16: (16 q_e)^(h-1) [x(1-x)]^(-7/8) theta_3^(-3), without their powers of x; values recomputed in fractions.
    h = fmpq(3, 7)
    first = elementary_block(ONE, -ONE, h, SIXTEENTHS)
    assert first == NomeForm(h, fmpq(-1, 8), -ONE)
    assert first.coefficients(3) == (1, fmpq(3, 14), fmpq(739, 6272), fmpq(7123, 87808))
    second = elementary_block(ONE, ONE, 1 - h, SIXTEENTHS)
    assert second == NomeForm(h - 1, fmpq(-7, 8), fmpq(-3))
    assert second.coefficients(3) == (1, fmpq(3, 14), fmpq(1131, 6272), fmpq(13787, 87808))


def test_vacuum_at_c_1() -> None:
    # a -> 0 with the background held at (1, -1): the block 1, 0, 1/128, 1/128, 117/16384 (from memory of the formula,
    # recomputed in fractions).
    form = elementary_block(ONE, -ONE, ZERO, SIXTEENTHS)
    assert form.coefficients(4) == (1, 0, fmpq(1, 128), fmpq(1, 128), fmpq(117, 16384))


def gram_block(eps1, eps2, internal, external, last):
    """The same block from Gram matrices, by weights (eps^2/4 - P^2)/(eps1 eps2)."""
    area, eps = eps1 * eps2, eps1 + eps2

    def number(x):
        return Laurent.constant(x, precision=1)

    at_zero, at_x, at_one, at_infinity = (number((eps**2 / 4 - x) / area) for x in external)
    zero = number(0)
    block = SphereBlock(
        number(1 + 6 * eps**2 / area),
        number((eps**2 / 4 - internal) / area),
        Vertex(at_one, at_infinity),
        Vertex(at_x, at_zero),
        Dressing(zero, zero, zero),
    )
    return tuple(x.coefficient(0) for x in block_coefficients(block, 0, last))


def families(eps1, eps2):
    # Fateev, Litvinov, Neveu, Onofri, arXiv 0902.1331: Q^2/4 - b^2/16 three times, Q^2/4 - (b/4 ± 1/(2b))^2 once,
    # b^2 = eps1/eps2; with b -> 1/b; and the members in which the sum and the difference of eps1 and eps2 enter.
    for one, other in ((eps1, eps2), (eps2, eps1)):
        for sign in (1, -1):
            yield [one**2 / 16] * 3 + [(one / 4 + sign * other / 2) ** 2]
    plus, minus = (eps1 + eps2) ** 2 / 16, (eps1 - eps2) ** 2 / 16
    yield [plus, plus, plus, minus]
    yield [minus, minus, minus, plus]


@pytest.mark.parametrize("eps", [(1, 1), (1, -1), (1, 2), (3, -2), (7, 5)])
def test_blocks_against_gram_matrices_to_level_6(eps) -> None:
    eps1, eps2 = (fmpq(x) for x in eps)
    internal = fmpq(5, 11)
    for family in families(eps1, eps2):
        for external in {tuple(str(x) for x in p): p for p in permutations(family)}.values():
            form = elementary_block(eps1, eps2, internal, external)
            assert form is not None
            assert form.coefficients(6) == gram_block(eps1, eps2, internal, external, 6)


def test_what_is_not_elementary() -> None:
    eps1, eps2 = fmpq(7), fmpq(5)
    wrong = [eps1**2 / 16] * 2 + [eps2**2 / 16] * 2
    assert elementary_block(eps1, eps2, ONE, wrong) is None
    assert elementary_block(ONE, -ONE, ONE, [*SIXTEENTHS[:3], fmpq(1, 9)]) is None
    assert elementary_sum(eps1, eps2, ONE, [ZERO, eps1 / 2, eps2 / 2, ZERO]) is None
    assert elementary_sum(eps1, eps2, ONE, [ZERO, eps1 / 2, eps2 / 2]) is None
    assert elementary_sum(ONE, ONE, ONE, [ZERO, fmpq(1, 2), ZERO, ZERO]) is None
    with pytest.raises(InputError, match="four external momenta"):
        elementary_block(ONE, ONE, ONE, SIXTEENTHS[:3])


# ---- sums


def masses(r, s, u, v):
    return ["(eps1 + eps2)/2", f"(eps1 + eps2)/2 + {r}*eps1/2", f"(eps1 + eps2)/2 + {s}*eps2/2",
            f"(eps1 + eps2)/2 + {u}*eps1/2 + {v}*eps2/2"]  # fmt: skip


def sum_of(case, order):
    """Z from the form at the limit point."""
    gauge = gauge_path(own_setting(case))
    eps1, eps2 = gauge.eps1.constant, gauge.eps2.constant
    mu = [m.constant - (eps1 + eps2) / 2 for m in gauge.flavours]
    return elementary_sum(eps1, eps2, gauge.difference.constant**2 / 4, mu).coefficients(order)


@pytest.mark.parametrize("signs", list(product((1, -1), repeat=4)))
def test_sums_against_gram_matrices(signs) -> None:
    # Off centre, one flavour a fundamental: reflected by hand, eps - m.
    first, second, third, fourth = masses(*signs)
    node = {
        "coulomb": ["2/7", "-1/3"],
        "antifundamental": [f"{m} + 1/42" for m in (first, second, third)],
        "fundamental": [f"eps1 + eps2 - ({fourth} + 1/42)"],
    }
    for eps in (("7", "5"), ("1", "1"), ("3", "-2")):
        case = make_case(*eps, [node])
        found = gauge_coefficients(gauge_path(own_setting(case)), 4)
        assert sum_of(case, 4) == tuple(z.coefficient(0) for z in found)


C25 = {"antifundamental": ["1/2 + (eps1+eps2)/2", "(eps1+eps2)/2"] * 2}


@pytest.mark.parametrize("coulomb", [("2/7", "-2/7"), ("1/3", "-1/3"), ("9/5", "1/5")])
def test_c_25_to_charge_12(coulomb) -> None:
    # Al. Zamolodchikov 1986 at the point where single weights are singular; a = 2/7, 1/3, 4/5.
    shifted = {"antifundamental": [f"{m} - 1" for m in C25["antifundamental"]]} if coulomb[0] == "9/5" else C25
    case = make_case("1", "1", [{"coulomb": list(coulomb), **shifted}], charge=12)
    expected = sum_of(case, 12)
    assert expected == tuple(c.value for c in ratomega.limit(case, route="direct"))


def test_c_25_at_h_3_7_to_charge_12() -> None:
    # h = 1 - a^2 = 3/7: a = 2 sqrt(7)/7 is not rational, a^2 is.
    case = make_case("1", "1", [{"coulomb": ["2*sqrt(7)/7", "-2*sqrt(7)/7"], **C25}], charge=12)
    found = sum_of(case, 12)
    assert found == tuple(c.value for c in ratomega.limit(case, route="poles"))
    gram = gauge_coefficients(gauge_path(own_setting(case)), 8)
    assert found[:9] == tuple(z.coefficient(0) for z in gram)
    assert found[:5] == tuple(c.value for c in ratomega.limit(case.with_charge(4), route="direct"))


def test_any_order() -> None:
    # a^2 = 4 + 2 sqrt(3), and an order that no sum reaches.
    case = make_case("1", "-1", [{"coulomb": ["1 + sqrt(3)", "-1 - sqrt(3)"], **C25}])
    high = sum_of(case, 60)
    assert len(high) == 61
    gram = gauge_coefficients(gauge_path(own_setting(case)), 3)
    assert high[:4] == tuple(z.coefficient(0) for z in gram)


# ---- along the path


@pytest.mark.parametrize(
    ("node", "elementary"),
    [
        ({"coulomb": ["t/3", "-t/3"], "antifundamental": masses(1, 1, 1, 1)}, True),
        ({"coulomb": ["1 + t", "1"], "antifundamental": [f"{m} - 1 - t/2" for m in masses(1, -1, 1, -1)]}, True),
        # At the end of the path only: mu = 1/2 and 0 stay where they are while eps2 moves.
        ({"coulomb": ["t/3", "-t/3"], **C25}, False),
        ({"coulomb": ["t/3", "-t/3"], "antifundamental": masses(1, 1, 1, 1)[:3]}, False),
    ],
)
def test_elementary_all_along_the_path(node, elementary) -> None:
    assert elementary_on_the_path(gauge_path(own_setting(make_case("1", "-1", [node])))) is elementary
