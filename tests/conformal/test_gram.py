"""Verma modules against the Virasoro algebra itself and published low levels; fields between descendants."""

from __future__ import annotations

from functools import cache
from math import factorial

import pytest
from flint import fmpq, fmpq_mat

from ratomega.conformal.dictionary import SphereBlock, TorusBlock
from ratomega.conformal.dressing import Dressing
from ratomega.conformal.gauge_sum import block_coefficients
from ratomega.conformal.gram import commutators, partitions, verma_module
from ratomega.conformal.vertex import Vertex, Whittaker, state_column, vertex_matrices
from ratomega.exact.laurent import Laurent

POINTS = [(fmpq(3, 7), fmpq(25)), (fmpq(-2, 5), fmpq(1)), (fmpq(11, 3), fmpq(-22, 5)), (fmpq(5, 9), fmpq(1, 2))]


def number(x) -> Laurent:
    return Laurent.constant(x, precision=1)


def value(x: Laurent) -> fmpq:
    return x.coefficient(0)


@cache
def module(h: fmpq, c: fmpq, depth: int):
    return verma_module(number(h), number(c), depth)


def form(h: fmpq, c: fmpq, level: int) -> fmpq_mat:
    return fmpq_mat([[value(x) for x in row] for row in module(h, c, 8).gram[level]])


# ---- the algebra


TABLE = commutators(12)


def applied(h, c, m, vector):
    """L_m on a combination of basis vectors, from the tables: m > 0 lowers, m < 0 raises, m = 0 weighs."""
    result = {}
    for state, x in vector.items():
        if m == 0:
            image = {state: h + sum(state)}
        elif m < 0:
            image = TABLE.raising[-m, state]
        else:
            entries = TABLE.lowering.get((m, state), {})
            image = {end: a + b * h + d * c / 12 for end, (a, b, d) in entries.items()}
        for end, y in image.items():
            result[end] = result.get(end, 0) + x * y
    return {end: x for end, x in result.items() if x != 0}


@pytest.mark.parametrize(("h", "c"), POINTS[:2])
def test_commutators_of_all_pairs(h, c) -> None:
    # [L_m, L_n] = (m - n) L_(m+n) + c/12 (m^3 - m) delta, on every state up to level 4, |m|, |n| <= 4.
    for level in range(5):
        for state in partitions(level):
            for m in range(-4, 5):
                for n in range(-4, m):
                    left = applied(h, c, m, applied(h, c, n, {state: fmpq(1)}))
                    for end, x in applied(h, c, n, applied(h, c, m, {state: fmpq(1)})).items():
                        left[end] = left.get(end, 0) - x
                    right = {end: (m - n) * x for end, x in applied(h, c, m + n, {state: fmpq(1)}).items()}
                    if m + n == 0:
                        right[state] = right.get(state, 0) + c * (m**3 - m) / 12
                    assert {k: x for k, x in left.items() if x != 0} == {k: x for k, x in right.items() if x != 0}


@pytest.mark.parametrize(("h", "c"), POINTS)
def test_the_form_is_contravariant(h, c) -> None:
    # <L_-m u | v> = <u | L_m v>: also below the diagonal, which the code fills in by symmetry.
    one = module(h, c, 8)
    for level in range(1, 7):
        for m in range(1, level + 1):
            low, high = one.states[level - m], one.states[level]
            for i, u in enumerate(low):
                raised = TABLE.raising[m, u]
                for j, v in enumerate(high):
                    left = sum((x * value(one.gram[level][high.index(w)][j]) for w, x in raised.items()), fmpq(0))
                    image = one.lowering.get((m, v), ())
                    right = sum((value(one.gram[level - m][i][k]) * value(x) for k, x in image), fmpq(0))
                    assert left == right


# ---- published forms


@pytest.mark.parametrize(("h", "c"), POINTS)
def test_published_forms_at_low_level(h, c) -> None:
    # Belavin, Polyakov, Zamolodchikov 1984, with L_-1^k last in the basis.
    assert form(h, c, 1) == fmpq_mat([[2 * h]])
    assert form(h, c, 2) == fmpq_mat([[4 * h + c / 2, 6 * h], [6 * h, 4 * h * (2 * h + 1)]])
    level3 = form(h, c, 3)
    assert level3[0, 0] == 6 * h + 2 * c
    assert level3[2, 2] == 24 * h * (h + 1) * (2 * h + 1)


def kac_determinant(h: fmpq, c: fmpq, b: fmpq, level: int) -> fmpq:
    """prod_{rs<=n} ((2r)^s s! (h - h_rs))^p(n-rs) ..., with b^2 rational: h_rs = (Q^2 - (r b + s/b)^2)/4."""
    count = [sum(1 for _ in partitions(n)) for n in range(level + 1)]
    result = fmpq(1)
    for r in range(1, level + 1):
        for s in range(1, level // r + 1):
            h_rs = ((b + 1 / b) ** 2 - (r * b + fmpq(s) / b) ** 2) / 4
            result *= (h - h_rs) ** count[level - r * s]
            following = count[level - r * (s + 1)] if r * (s + 1) <= level else 0
            result *= (fmpq(2 * r) ** s * factorial(s)) ** (count[level - r * s] - following)
    return result


@pytest.mark.parametrize("b", [fmpq(1), fmpq(2), fmpq(2, 3), fmpq(7, 5)])
def test_kac_determinant_to_level_6(b) -> None:
    # V. Kac 1979; B. Feigin, D. Fuks 1982. b^2 = eps1/eps2 of either value; c = 25 at b = 1.
    c = 1 + 6 * (b + 1 / b) ** 2
    for h in (fmpq(3, 7), fmpq(-5, 4), fmpq(9)):
        for level in range(1, 7):
            assert form(h, c, level).det() == kac_determinant(h, c, b, level)


@pytest.mark.parametrize(("r", "s"), [(1, 1), (2, 1), (1, 2), (2, 2), (3, 1), (1, 6), (3, 2)])
def test_the_form_degenerates_at_the_kac_weights_alone(r, s) -> None:
    # At c = 1 - 6 (p - p')^2/(p p') with p/p' = 7/10 the first singular vector of h_rs stands at level rs.
    p, q = fmpq(7), fmpq(10)
    c, h = 1 - 6 * (q - p) ** 2 / (p * q), ((r * q - s * p) ** 2 - (q - p) ** 2) / (4 * p * q)
    for level in range(1, 7):
        size = sum(1 for _ in partitions(level))
        kernel = sum(1 for _ in partitions(level - r * s)) if level >= r * s else 0
        assert form(h, c, level).rank() == size - kernel


@pytest.mark.parametrize(("h", "c"), POINTS)
def test_pure_theory_at_level_2(h, c) -> None:
    # D. Gaiotto, arXiv 0908.0307; A. Marshakov, A. Mironov, A. Morozov, arXiv 0909.2052.
    inverse = form(h, c, 2).inv()
    assert inverse[1, 1] == (c + 8 * h) / (4 * h * (c + 2 * c * h + 2 * h * (8 * h - 5)))
    state = Whittaker(number(1), number(0))
    zero = number(0)
    block = SphereBlock(number(c), number(h), state, state, Dressing(zero, zero, zero))
    assert [value(x) for x in block_coefficients(block, 1, 2)] == [1 / (2 * h), inverse[1, 1]]


# ---- blocks


def sphere(h, c, weights, last):
    """The coefficients of <V_1(0) V_2(x) V_3(1) V_4(infinity)>."""
    w1, w2, w3, w4 = (number(w) for w in weights)
    zero = number(0)
    block = SphereBlock(number(c), number(h), Vertex(w3, w4), Vertex(w2, w1), Dressing(zero, zero, zero))
    return [value(x) for x in block_coefficients(block, 0, last)]


@pytest.mark.parametrize(("h", "c"), POINTS)
def test_four_point_block_to_level_2(h, c) -> None:
    # Belavin, Polyakov, Zamolodchikov 1984; the form below as in Marshakov, Mironov, Morozov, arXiv 0907.3946 (memory).
    h1, h2, h3, h4 = fmpq(2, 9), fmpq(-3, 5), fmpq(7, 11), fmpq(1, 4)

    def f(x, y):
        return (x + y) / 2 + h * (h - 1) / (2 * (2 * h + 1)) - 3 * (x - y) ** 2 / (2 * (2 * h + 1))

    left, right = h + h3 - h4, h + h2 - h1
    second = right * (right + 1) * left * (left + 1) / (4 * h * (2 * h + 1))
    second += 2 * f(h1, h2) * f(h3, h4) / (c + 2 * h * (8 * h - 5) / (2 * h + 1))
    assert sphere(h, c, (h1, h2, h3, h4), 2) == [1, left * right / (2 * h), second]


def hypergeometric(a, b, c, order):
    terms = [fmpq(1)]
    for n in range(order):
        terms.append(terms[-1] * (a + n) * (b + n) / ((c + n) * (n + 1)))
    return terms


def product(left, right):
    return [sum((left[k] * right[n - k] for k in range(n + 1)), fmpq(0)) for n in range(len(left))]


def power(exponent, order):
    """(1 - x)^exponent."""
    terms = [fmpq(1)]
    for n in range(order):
        terms.append(terms[-1] * (n - exponent) / (n + 1))
    return terms


@pytest.mark.parametrize("square", [fmpq(7, 5), fmpq(-10, 7), fmpq(1)])
@pytest.mark.parametrize("sign", [1, -1])
def test_a_degenerate_field_gives_a_hypergeometric_block(square, sign) -> None:
    # V_2 the field (2,1): an equation of second order (Belavin, Polyakov, Zamolodchikov 1984), solved to level 8. With
    # Q = b + 1/b weights are Q^2/4 - P^2, P = p b and b^2 = ``square``; fusion with V_2 moves p by 1/2.
    s = square
    p0, p1, p4 = fmpq(2, 9), fmpq(3, 11), fmpq(5, 13)

    def delta(p):
        return s * ((1 + 1 / s) ** 2 / 4 - p**2)

    h1, h2, h3, h4 = delta(p0), fmpq(-1, 2) - 3 * s / 4, delta(p1), delta(p4)
    h, c = delta(p0 + fmpq(sign, 2)), 1 + 6 * s * (1 + 1 / s) ** 2
    # Exponents at 0 and 1 are (s+1)/2 ± s p, at infinity -s - 1/2 ± s p.
    at_one = delta(p1 + fmpq(1, 2)) - h3 - h2
    assert at_one == (s + 1) / 2 - s * p1
    a, b = (fmpq(1, 2) - s * (sign * p0 + p1 + other * p4) for other in (1, -1))
    expected = product(power(at_one, 8), hypergeometric(a, b, 1 - 2 * sign * s * p0, 8))
    assert sphere(h, c, (h1, h2, h3, h4), 8) == expected


@pytest.mark.parametrize(("h", "c"), POINTS)
def test_torus_block(h, c) -> None:
    # First coefficient 1 + D(D-1)/(2h); the identity gives the character, numbers of partitions.
    zero = number(0)

    def torus(d, last):
        block = TorusBlock(number(c), number(h), number(d), Dressing(zero, zero, zero))
        return [value(x) for x in block_coefficients(block, 0, last)]

    d = fmpq(4, 9)
    assert torus(d, 1) == [1, 1 + d * (d - 1) / (2 * h)]
    assert torus(fmpq(0), 6) == [1, 1, 2, 3, 5, 7, 11]
    # A field of weight 1 is a current to these elements: the character again.
    assert torus(fmpq(1), 6) == [1, 1, 2, 3, 5, 7, 11]


def test_field_between_descendants_read_from_both_sides() -> None:
    # The field at 1 is its own adjoint, so <u|V|v> = <v|V|u>; the code peels the bra alone.
    (h, c), (k, _) = POINTS[0], POINTS[1]
    one, other, weight = module(h, c, 8), module(k, c, 8), number(fmpq(5, 9))
    there, back = vertex_matrices(one, other, weight, 4), vertex_matrices(other, one, weight, 4)
    assert set(there) == {(i, j) for i in range(5) for j in range(5)}
    for i, j in there:
        for a in range(len(one.states[i])):
            for b in range(len(other.states[j])):
                assert there[i, j][a][b] == back[j, i][b][a]
    half = vertex_matrices(one, other, weight, 4, half=True)
    assert half == {key: rows for key, rows in there.items() if key[0] <= key[1]}
    for level in range(5):
        state = Vertex(weight, other.weight)
        assert [row[0] for row in there[level, 0]] == state_column(one, state, level)
