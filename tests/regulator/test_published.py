"""The engine against published closed forms, written out here once more with fractions and sympy.

Nothing of the package's own closed forms is used; these are the formulas themselves.
"""

from __future__ import annotations

from fractions import Fraction as F
from math import factorial

import pytest
import sympy
from building import make_case

import ratomega
from ratomega.exact.rational import as_fraction

POINTS = [("1", "-1"), ("1", "1"), ("1", "2"), ("2", "3"), ("3", "-2")]


def values(eps, nodes, *, charge, edges=()):
    """{charge: value}; every limit has to exist."""
    nodes = [nodes] if isinstance(nodes, dict) else nodes
    result = ratomega.limit(make_case(*eps, nodes, charge=charge, edges=edges))
    assert {c.status for c in result} == {"finite"}
    return {c.charge: as_fraction(c.value) for c in result}


def column(eps, node, charge):
    found = values(eps, node, charge=charge)
    return [found[k,] for k in range(charge + 1)]


# ---- power series in one variable, as lists of fractions


def times(f, g):
    return [sum((f[j] * g[n - j] for j in range(n + 1)), F(0)) for n in range(len(f))]


def power(f, exponent):
    """f^exponent for f = 1 + ..., from f g' = exponent f' g."""
    g = [F(1)]
    for n in range(1, len(f)):
        g.append(sum((exponent * j - (n - j)) * f[j] * g[n - j] for j in range(1, n + 1)) / n)
    return g


def one_plus(coefficient, step, top):
    """1 + coefficient q^step."""
    return [F(1)] + [F(coefficient) if n == step else F(0) for n in range(1, top + 1)]


def euler(exponent, top):
    """prod (1 - q^n)^exponent."""
    result = [F(1)] + [F(0)] * top
    for n in range(1, top + 1):
        result = times(result, power(one_plus(-1, n, top), exponent))
    return result


# ---- one colour


@pytest.mark.parametrize("point", POINTS)
def test_u1_without_matter(point) -> None:
    """exp(q / (eps1 eps2)), to charge 12: Nekrasov hep-th/0206161."""
    e1, e2 = map(F, point)
    assert column(point, {"coulomb": ["2/7"]}, 12) == [1 / (factorial(k) * (e1 * e2) ** k) for k in range(13)]


@pytest.mark.parametrize("point", POINTS)
@pytest.mark.parametrize("kind", ["antifundamental", "fundamental"])
def test_u1_with_one_flavour(point, kind) -> None:
    """exp(q (a + m) / (eps1 eps2)); a fundamental is an antifundamental of mass eps - m."""
    e1, e2 = map(F, point)
    a, m = F(2, 7), F(1, 5)
    x = (a + m if kind == "antifundamental" else a - m + e1 + e2) / (e1 * e2)
    node = {"coulomb": ["2/7"], kind: ["1/5"]}
    assert column(point, node, 8) == [x**k / factorial(k) for k in range(9)]


@pytest.mark.parametrize("point", POINTS)
def test_u1_with_two_flavours(point) -> None:
    """(1 + q)^((a + m1)(a + m2) / (eps1 eps2))."""
    e1, e2 = map(F, point)
    a, m1, m2 = F(2, 7), F(1, 5), F(3, 11)
    node = {"coulomb": ["2/7"], "antifundamental": ["1/5", "3/11"]}
    assert column(point, node, 8) == power(one_plus(1, 1, 8), (a + m1) * (a + m2) / (e1 * e2))


@pytest.mark.parametrize("point", POINTS)
@pytest.mark.parametrize(("text", "mass"), [("1/5", F(1, 5)), ("t/5", F(0)), ("-3/4", F(-3, 4))])
def test_u1_with_an_adjoint(point, text, mass) -> None:
    """prod (1 - q^n)^(-(m - eps1)(m - eps2)/(eps1 eps2)): Nekrasov, Okounkov hep-th/0306238 at eps1 = -eps2."""
    e1, e2 = map(F, point)
    node = {"coulomb": ["2/7"], "adjoint": [text]}
    assert column(point, node, 8) == euler(-(mass - e1) * (mass - e2) / (e1 * e2), 8)


def multiply(series, arc, coefficient, exponent, charges):
    """Times (1 + coefficient * prod q_i^arc_i)^exponent, on a dictionary over charges."""
    result = dict.fromkeys(charges, F(0))
    binomial = F(1)
    for n in range(max(map(sum, charges)) + 1):
        for charge, value in series.items():
            target = tuple(k + n * step for k, step in zip(charge, arc, strict=True))
            if target in result:
                result[target] += binomial * value
        binomial = binomial * coefficient * (exponent - n) / (n + 1)
    return result


QUIVER_POINTS = [("7", "5"), ("1", "1"), ("1", "2"), ("2", "-3")]
COULOMB = [F(2, 7), F(-1, 3), F(3, 5)]
MASSES = [F(1, 9), F(-2, 11), F(1, 6)]


@pytest.mark.parametrize("point", QUIVER_POINTS)
@pytest.mark.parametrize("n", [2, 3])
def test_u1_linear_quivers(point, n) -> None:
    """prod over i <= j of (1 + s_i q_i ... q_j)^(l_i r_j / (eps1 eps2)), s_1 = 1, the others -1."""
    e1, e2 = map(F, point)
    first, last = F(1, 5), F(3, 8)
    a, m = COULOMB[:n], MASSES[: n - 1]
    nodes = [{"coulomb": [str(x)]} for x in a]
    nodes[0]["antifundamental"], nodes[-1]["fundamental"] = [str(first)], [str(last)]
    edges = [(i + 1, i + 2, str(m[i])) for i in range(n - 1)]
    found = values(point, nodes, charge=4, edges=edges)
    left = [a[0] + first] + [a[i] - a[i - 1] + m[i - 1] for i in range(1, n)]
    right = [a[i] - a[i + 1] + e1 + e2 - m[i] for i in range(n - 1)] + [a[-1] + e1 + e2 - last]
    expected = {charge: F(not any(charge)) for charge in found}
    for i in range(n):
        for j in range(i, n):
            arc = [int(i <= v <= j) for v in range(n)]
            exponent = left[i] * right[j] / (e1 * e2)
            expected = multiply(expected, arc, F(1 if i == 0 else -1), exponent, list(found))
    assert found == expected


@pytest.mark.parametrize("point", QUIVER_POINTS)
@pytest.mark.parametrize("n", [1, 2, 3])
def test_u1_necklaces(point, n) -> None:
    """prod over arcs of (1 - q_arc)^(l_i r_j / (eps1 eps2)) times prod 1/(1 - Q^k), windings included."""
    e1, e2 = map(F, point)
    a, m = COULOMB[:n], MASSES[:n]
    edges = [(i + 1, (i + 1) % n + 1, str(m[i])) for i in range(n)]
    found = values(point, [{"coulomb": [str(x)]} for x in a], charge=4, edges=edges)
    left = [a[i] - a[i - 1] + m[i - 1] for i in range(n)]
    right = [a[i] - a[(i + 1) % n] + e1 + e2 - m[i] for i in range(n)]
    expected = {charge: F(not any(charge)) for charge in found}
    for i in range(n):
        for length in range(1, 5):
            arc = [sum((i + step) % n == v for step in range(length)) for v in range(n)]
            exponent = left[i] * right[(i + length - 1) % n] / (e1 * e2)
            expected = multiply(expected, arc, F(-1), exponent, list(found))
    for k in range(1, 5):
        expected = multiply(expected, [k] * n, F(-1), F(-1), list(found))
    assert found == expected


# ---- U(2) without matter and with flavours, as rational functions


SINGULAR = [("1", "1"), ("1", "2"), ("2", "1"), ("2", "3"), ("1", "-1"), ("3", "-2")]


@pytest.mark.parametrize("point", SINGULAR)
@pytest.mark.parametrize("a", ["1/5", "3/7", "0"])
def test_u2_without_matter(point, a) -> None:
    """Z_1 and Z_2 (Nekrasov hep-th/0206161; Flume, Poghossian hep-th/0208176) away from their poles in 2a."""
    if (a, point) == ("0", ("1", "-1")):
        a = "1"
    e1, e2, x = *map(F, point), F(a)
    e = e1 + e2
    found = column(point, {"coulomb": [a, f"-{a}"]}, 2)
    first = -2 / (e1 * e2 * (4 * x**2 - e**2))
    second = (8 * x**2 - 8 * e**2 - e1 * e2) / (
        (e1 * e2) ** 2 * (4 * x**2 - e**2) * (4 * x**2 - (2 * e1 + e2) ** 2) * (4 * x**2 - (e1 + 2 * e2) ** 2)
    )
    assert found == [1, first, second]


def test_the_pole_of_u2_without_matter() -> None:
    """a = t/3 at (1, -1 + t): 4a^2 - eps^2 is -5 t^2/9, a pole of order 2."""
    result = ratomega.limit(make_case("1", "-1", [{"coulomb": ["t/3", "-t/3"]}], charge=1))
    assert (result[1].status, result[1].order, as_fraction(result[1].leading)) == ("pole", 2, F(-18, 5))


@pytest.mark.parametrize("point", SINGULAR)
@pytest.mark.parametrize("flavours", [1, 2, 3, 4])
def test_u2_with_flavours_at_charge_one(point, flavours) -> None:
    """Z_1 eps1 eps2 (4a^2 - eps^2) in the elementary symmetric functions of the masses."""
    e1, e2 = map(F, point)
    e, a = e1 + e2, F(1, 5)
    masses = [F(1, 2), F(1, 4), F(-1, 3), F(1, 7)][:flavours]
    s = [F(1)] + [F(0)] * 4
    for m in masses:
        s = [s[0], *(s[n] + m * s[n - 1] for n in range(1, 5))]
    expected = {
        1: -2 * s[1] + e,
        2: -2 * (s[2] + a**2) + e * s[1],
        3: -2 * (s[3] + s[1] * a**2) + e * (s[2] + a**2),
        4: -2 * (s[4] + s[2] * a**2 + a**4) + e * (s[3] + s[1] * a**2),
    }[flavours]
    node = {"coulomb": ["1/5", "-1/5"], "antifundamental": [str(m) for m in masses]}
    assert column(point, node, 1)[1] == expected / (e1 * e2 * (4 * a**2 - e**2))


# ---- adjoints of any rank


RANKS = {2: (["1/3", "-1/5"], [1, 2, 5, 10, 20]), 3: (["1/3", "-1/5", "2/7"], [1, 3, 9, 22])}


@pytest.mark.parametrize("point", SINGULAR)
@pytest.mark.parametrize("rank", RANKS)
@pytest.mark.parametrize("mass", ["0", "eps1 + eps2", "t/5", "eps1 + eps2 - t/3", "eps1", "eps2", "eps1 + t/5"])
def test_adjoints_at_special_masses(point, rank, mass) -> None:
    """prod (1 - q^n)^(-N) at m = 0 and eps (Vafa, Witten hep-th/9408074), 1 at m = eps1 and eps2; the masses with t in
    them are the sharp ones, because single weights are neither 1 nor 0 there."""
    coulomb, counts = RANKS[rank]
    found = column(point, {"coulomb": coulomb, "adjoint": [mass]}, len(counts) - 1)
    trivial = mass in ("eps1", "eps2", "eps1 + t/5")
    assert found == ([1] + [0] * (len(counts) - 1) if trivial else counts)


@pytest.mark.parametrize("point", SINGULAR)
def test_u2_adjoint_at_charge_one(point) -> None:
    e1, e2 = map(F, point)
    e, a, m = e1 + e2, F(1, 5), F(2, 9)
    expected = 2 * (m - e1) * (m - e2) / (e1 * e2) * (1 + m * (e - m) / (4 * a**2 - e**2))
    assert column(point, {"coulomb": ["1/5", "-1/5"], "adjoint": ["2/9"]}, 1)[1] == expected


@pytest.mark.parametrize("mass", ["-3", "2"])
def test_adjoint_with_finitely_many_poles(mass) -> None:
    """(1, -2), -m = 3 or -2: prod (1 - q^n)^4 (4a^2 - E_2)/(4a^2 - 1) (Beccaria, Macorini 1606.00179, from memory)."""
    top, a = 5, F(1, 5)
    sigma = [sum(d for d in range(1, n + 1) if n % d == 0) for n in range(1, top + 1)]
    inner = [(4 * a**2 - 1) / (4 * a**2 - 1), *(24 * s / (4 * a**2 - 1) for s in sigma)]
    found = column(("1", "-2"), {"coulomb": ["1/5", "-1/5"], "adjoint": [mass]}, top)
    assert found == times(euler(4, top), inner)


RECTANGLES = [F(23, 16), F(14601, 5929), F(8882, 3675), F(10715207, 3418870)]


def test_second_order_in_the_adjoint_mass_at_equal_rotations() -> None:
    """(1, 1), U(2), a = 1/3, m = 1 + mu: the coefficient of mu^2 from sums over rectangles (Chester, Pufu 2020, from
    memory), here as the second difference of exact polynomials in mu of degree 4k."""
    for k, expected in enumerate(RECTANGLES[:3], 1):
        points = range(-2 * k, 2 * k + 1)
        samples = []
        for mu in points:
            node = {"coulomb": ["1/3", "-1/3"], "adjoint": [f"1 + {mu}/3"]}
            samples.append((sympy.Rational(mu, 3), sympy.Rational(column(("1", "1"), node, k)[k])))
        mu = sympy.Symbol("mu")
        polynomial = sympy.Poly(sympy.interpolate(samples, mu), mu)
        assert polynomial.degree() <= 4 * k
        assert polynomial.coeff_monomial(mu) == polynomial.coeff_monomial(1) == 0
        assert polynomial.coeff_monomial(mu**2) == sympy.Rational(expected)


# ---- truncation to a hypergeometric series


def hypergeometric(upper, lower, argument, top):
    terms = [F(1)]
    for n in range(top):
        ratio = argument / F(n + 1)
        for x in upper:
            ratio *= x + n
        for x in lower:
            ratio /= x + n
        terms.append(terms[-1] * ratio)
    return terms


@pytest.mark.parametrize("point", [("7", "5"), ("1", "1"), ("1", "2"), ("2", "1"), ("1", "-1")])
@pytest.mark.parametrize("rank", [2, 3])
def test_truncation_to_a_hypergeometric_series(point, rank) -> None:
    """Masses (-a_1 - eps1, -a_2, ..., -a_N, m_1, ..., m_N): _NF_{N-1} of (-1)^N q. Single terms are 0/0 where
    eps1 = j eps2."""
    e1, e2 = map(F, point)
    a, m = [F(1, 3), F(-1, 5), F(2, 7)][:rank], [F(1, 2), F(3, 11), F(-1, 4)][:rank]
    cutting = [f"{-a[0]} - eps1", *(str(-x) for x in a[1:])]
    node = {"coulomb": [str(x) for x in a], "antifundamental": [*cutting, *(str(x) for x in m)]}
    upper, lower = [(a[0] + x) / e2 for x in m], [1 + (a[0] - x + e1) / e2 for x in a[1:]]
    assert column(point, node, 4) == hypergeometric(upper, lower, F((-1) ** rank), 4)
    # All colours cut: 1.
    node["antifundamental"] = [*(str(-x) for x in a), *(str(x) for x in m)]
    assert column(point, node, 3) == [1, 0, 0, 0]


# ---- four flavours: elementary conformal blocks


def nome(top):
    """16 nome / q to q^top: the series inverse to q = 16 n prod ((1 + n^(2k)) / (1 + n^(2k-1)))^8 (Jacobi)."""
    size = top + 2
    product = [F(1)] + [F(0)] * (size - 1)
    for k in range(1, size):
        product = times(product, power(one_plus(1, k, size - 1), F(8 if k % 2 == 0 else -8)))
    # q = 16 n product(n), solved for n order by order: n = (q/16) / product(n).
    found = [F(0), F(1, 16)] + [F(0)] * (size - 2)
    for _ in range(size):
        inverse = power(composed(product, found), F(-1))
        found = [F(0), *(x / 16 for x in inverse[:-1])]
    return found[: top + 2]


def composed(outer, inner):
    result = [F(0)] * len(inner)
    for c in reversed(outer):
        result = times(result, inner)
        result[0] += c
    return result


def four_flavours(e1, e2, a, mu, top):
    """The prefactor of U(2) with four flavours: Z where Al. Zamolodchikov's H is 1."""
    e, found = e1 + e2, nome(top)
    theta = [F(0)] * (top + 2)
    for n in range(top + 2):
        if n * n < top + 2:
            theta[n * n] += 1 if n == 0 else 2
    theta = composed(theta, found)[: top + 1]
    over = [16 * x for x in found[1:]]
    assert over[:3] == [1, F(1, 2), F(21, 64)]
    result = power(over, -(a**2) / (e1 * e2))
    result = times(result, power(one_plus(-1, 1, top), (sum(mu) + e) ** 2 / (4 * e1 * e2)))
    return times(result, power(theta, (2 * sum(x * x for x in mu) - e**2) / (e1 * e2)))


@pytest.mark.parametrize(("point", "name"), [(("1", "-1"), "c = 1"), (("1", "1"), "c = 25")])
@pytest.mark.parametrize("a", [F(1, 3), F(2, 5), F(-1, 7)])
def test_elementary_blocks_at_c_1_and_25(point, name, a) -> None:
    """mu = (1/2, 0, 1/2, 0): external weights 1/16 at c = 1 (Al. Zamolodchikov 1986), 15/16 at c = 25, to charge 6."""
    e1, e2 = map(F, point)
    mu = [F(1, 2), F(0), F(1, 2), F(0)]
    node = {"coulomb": [str(a), str(-a)], "antifundamental": [str(x + (e1 + e2) / 2) for x in mu]}
    found = column(point, node, 6)
    assert found == four_flavours(e1, e2, a, mu, 6)
    # The masses may move with the background: the same limit.
    node["antifundamental"] = ["1/2 + (eps1 + eps2)/2", "(eps1 + eps2)/2"] * 2
    assert column(point, node, 6) == found


@pytest.mark.parametrize("point", [("7", "5"), ("1", "1"), ("1", "2"), ("2", "3"), ("3", "-2"), ("1", "-1")])
@pytest.mark.parametrize("sign", [1, -1])
def test_elementary_blocks_at_every_b(point, sign) -> None:
    """m_0 = m_1 = eps/2 + eps1/4, alpha_0 = eps1/4, alpha_1 = eps1/4 -+ eps2/2: H = 1
    (Fateev, Litvinov, Neveu, Onofri 0902.1331; masses m_0 +- alpha_0, m_1 +- alpha_1 by Alday, Gaiotto, Tachikawa
    0906.3219)."""
    e1, e2 = map(F, point)
    a = F(1, 5)
    mu = [e1 / 2, F(0), e1 / 2 - sign * e2 / 2, sign * e2 / 2]
    masses = [f"(eps1 + eps2)/2 + {x}" for x in ("eps1/2", "0", f"eps1/2 - {sign}*eps2/2", f"{sign}*eps2/2")]
    node = {"coulomb": [str(a), str(-a)], "antifundamental": masses}
    assert column(point, node, 4) == four_flavours(e1, e2, a, mu, 4)


@pytest.mark.parametrize(
    ("point", "exponent", "block"),
    [
        (("1", "-1"), F(1, 8), [F(1), F(3, 14), F(739, 6272), F(7123, 87808)]),
        (("1", "1"), F(-25, 8), [F(1), F(3, 14), F(1131, 6272), F(13787, 87808)]),
    ],
    ids=["c = 1", "c = 25"],
)
def test_blocks_at_a_tabulated_weight(point, exponent, block) -> None:
    """The blocks at h = 3/7 (Al. Zamolodchikov 1986). There a is irrational, but the coefficient of q^k is a polynomial
    of degree k in a^2: interpolated through the engine's values at rational a."""
    e1, e2 = map(F, point)
    square = (e1 + e2) ** 2 / 4 - F(3, 7) * e1 * e2
    samples = {}
    for a in (F(1, 3), F(2, 5), F(1, 7), F(3, 8), F(4, 9)):
        masses = ["1/2 + (eps1 + eps2)/2", "(eps1 + eps2)/2"] * 2
        samples[a**2] = column(point, {"coulomb": [str(a), str(-a)], "antifundamental": masses}, 3)
    z = []
    for k in range(4):
        points = [(sympy.Rational(x), sympy.Rational(y[k])) for x, y in samples.items()]
        polynomial = sympy.Poly(sympy.interpolate(points, sympy.Symbol("h")), sympy.Symbol("h"))
        assert polynomial.degree() == k
        z.append(F(str(polynomial.eval(sympy.Rational(square)))))
    assert times(z, power(one_plus(-1, 1, 3), exponent)) == block
