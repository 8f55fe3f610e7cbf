"""The pole route against the plain sum over diagrams, published closed forms and itself in exact series."""

from __future__ import annotations

import plain
import pytest
from flint import fmpq, fmpq_poly
from pole_oracle import lagrange
from sympy import divisor_sigma

from ratomega.case.affine import Affine
from ratomega.case.background import Background
from ratomega.case.case import Case
from ratomega.case.theory import Edge, Node, Theory
from ratomega.errors import InputError
from ratomega.exact.rational import ONE, ZERO
from ratomega.regulator.poles.dressing import Dressing, NomeExponents
from ratomega.regulator.poles.fractions import PoleLayout
from ratomega.regulator.poles.problem import (
    applies,
    case_problem,
    four_point_problem,
    gauge_problem,
    mixed_problem,
    torus_problem,
)
from ratomega.regulator.poles.recursion import LAST_EXACT_CHARGE, pole_coefficients, pole_functions

RATIOS = [(1, 1), (1, 2), (2, 1), (3, 2), (1, -1), (4, -3), (3, -2)]
COULOMB = (fmpq(5, 11), fmpq(-1, 7))
MASSES = [fmpq(1, 2), fmpq(1, 4), fmpq(6, 5), fmpq(-1, 7)]
MATTER = {
    "none": {},
    "one": {"antifundamental": MASSES[:1]},
    "two": {"antifundamental": MASSES[:2]},
    "three": {"antifundamental": MASSES[:3]},
    "four": {"antifundamental": MASSES},
    "mixed": {"antifundamental": MASSES[:2], "fundamental": MASSES[2:]},
    "adjoint": {"adjoint": fmpq(2, 7)},
}


def problem_of(ratio, matter, unit=ONE):
    return gauge_problem(unit * ratio[0], unit * ratio[1], COULOMB, **matter)


def plain_limit(ratio, matter, charge, unit=ONE):
    """Z at t -> 0 on eps2 + t, summed configuration by configuration."""
    lines = {name: [plain.Line(m) for m in (masses if isinstance(masses, list) else [masses])]
             for name, masses in matter.items()}
    theory = {
        "eps1": plain.Line(unit * ratio[0]),
        "eps2": plain.Line(unit * ratio[1], 1),
        "nodes": [{"coulomb": [plain.Line(a) for a in COULOMB], **lines}],
    }
    series = plain.laurent_coefficient(theory, [charge])
    assert all(power >= 0 for power in series), "the limit does not exist"
    return series.get(0, fmpq(0))


@pytest.mark.parametrize("matter", MATTER.values(), ids=MATTER.keys())
@pytest.mark.parametrize("ratio", RATIOS, ids=str)
def test_equal_to_the_plain_sum_over_diagrams(ratio, matter):
    expected = [plain_limit(ratio, matter, k) for k in range(5)]
    problem = problem_of(ratio, matter)
    assert list(pole_coefficients(problem, 4, exact=True).coefficients) == expected
    assert list(pole_coefficients(problem, 4, exact=False).coefficients) == expected


@pytest.mark.long
@pytest.mark.parametrize("matter", MATTER.values(), ids=MATTER.keys())
@pytest.mark.parametrize("ratio", RATIOS, ids=str)
def test_equal_to_the_plain_sum_up_to_charge_eight(ratio, matter):
    expected = [plain_limit(ratio, matter, k) for k in range(9)]
    problem = problem_of(ratio, matter)
    assert list(pole_coefficients(problem, 8, exact=True).coefficients) == expected
    assert list(pole_coefficients(problem, 8, exact=False).coefficients) == expected


@pytest.mark.parametrize("unit", [fmpq(-3, 5), fmpq(7)], ids=str)
@pytest.mark.parametrize("matter", [MATTER["three"], MATTER["four"], MATTER["adjoint"]], ids=["3", "4", "adjoint"])
def test_units_scale_out(unit, matter):
    expected = [plain_limit((3, -2), matter, k, unit) for k in range(4)]
    problem = problem_of((3, -2), matter, unit)
    assert list(pole_coefficients(problem, 3, exact=True).coefficients) == expected
    assert list(pole_coefficients(problem, 3, exact=False).coefficients) == expected


@pytest.mark.parametrize("matter", MATTER.values(), ids=MATTER.keys())
@pytest.mark.parametrize(
    "ratio", [(1, 1), (3, -2), *(pytest.param(r, marks=pytest.mark.long) for r in [(1, 2), (1, -1)])], ids=str
)
def test_primes_exact_series_and_certified_bound_agree(ratio, matter):
    problem = problem_of(ratio, matter)
    exact = pole_coefficients(problem, 9, exact=True)
    primes = pole_coefficients(problem, 9, exact=False)
    bound = pole_coefficients(problem, 9, exact=False, certify=True)
    assert exact.coefficients == primes.coefficients == bound.coefficients
    assert exact.regular == primes.regular == bound.regular
    assert {e.kind for e in exact.evidence} == {"exact"}
    assert [e.kind for e in primes.evidence] == ["exact"] + ["residues"] * 9
    assert {e.kind for e in bound.evidence} == {"bound"}
    assert (exact.certified, primes.certified, bound.certified) == (True, False, True)
    assert exact.spare_bits is None
    assert primes.spare_bits >= 45
    assert bound.spare_bits >= 0
    assert min(primes.primes, bound.primes) > 0 == exact.primes


@pytest.mark.parametrize("matter", [MATTER["none"], MATTER["four"], MATTER["adjoint"]], ids=["0", "4", "adjoint"])
@pytest.mark.parametrize("ratio", RATIOS, ids=str)
def test_partial_fractions_hold_for_every_coulomb_parameter(ratio, matter):
    charge = 3
    for exact in (True, False):
        functions = pole_functions(problem_of(ratio, matter), charge, exact=exact).functions
        for a in (fmpq(1, 3), fmpq(-7, 4)):
            # the shift of both Coulomb parameters is part of the masses and stays
            shift = (COULOMB[0] + COULOMB[1]) / 2
            problem = gauge_problem(fmpq(ratio[0]), fmpq(ratio[1]), (shift + a, shift - a), **matter)
            lines = {name: [plain.Line(m) for m in (masses if isinstance(masses, list) else [masses])]
                     for name, masses in matter.items()}
            theory = {
                "eps1": plain.Line(ratio[0]),
                "eps2": plain.Line(ratio[1], 1),
                "nodes": [{"coulomb": [plain.Line(shift + a), plain.Line(shift - a)], **lines}],
            }
            expected = [plain.laurent_coefficient(theory, [k]).get(0, fmpq(0)) for k in range(charge + 1)]
            assert problem.dressing.dressed([f.at(4 * a * a) for f in functions]) == expected


@pytest.mark.parametrize("ratio", [(1, 1), (1, 2), (3, -2)], ids=str)
def test_partial_fractions_by_both_methods(ratio):
    problem = problem_of(ratio, MATTER["two"])
    exact, primes = (pole_functions(problem, 10, exact=exact).functions for exact in (True, False))
    assert exact == primes
    layout = PoleLayout.make(ratio, 10)
    born = dict(zip(layout.keys, layout.born, strict=True))
    for order, function in enumerate(exact):
        assert all(born[term.square, term.power] <= order for term in function.terms)
    # The highest power at the busiest pole does occur, so that orders of poles are neither lost nor invented.
    assert max(term.power for term in exact[10].terms) == max(layout.powers)


# --- published closed forms -------------------------------------------------------------------------------------------


@pytest.mark.parametrize("ratio", [*RATIOS, (7, 5)], ids=str)
def test_pure_u2_at_charges_one_and_two(ratio):
    # Nekrasov hep-th/0206161; Flume, Poghossian hep-th/0208176
    e1, e2 = fmpq(ratio[0]), fmpq(ratio[1])
    e = e1 + e2
    for square in (fmpq(9, 121), fmpq(-1, 4), fmpq(3, 7)):
        first = -2 / (e1 * e2 * (4 * square - e**2))
        second = (8 * square - 8 * e**2 - e1 * e2) / (
            e1**2 * e2**2 * (4 * square - e**2) * (4 * square - (2 * e1 + e2) ** 2) * (4 * square - (e1 + 2 * e2) ** 2)
        )
        for exact in (True, False):
            assert pole_coefficients(mixed_problem(e1, e2, square), 2, exact=exact).coefficients == (1, first, second)


def test_imaginary_coulomb_parameter_by_its_square():
    # a = i/2 at (1, 1): every term of the first charges follows from the formulas of the test above
    for exact in (True, False):
        result = pole_coefficients(mixed_problem(fmpq(1), fmpq(1), fmpq(-1, 4)), 4, exact=exact)
        assert result.coefficients == (1, fmpq(2, 5), fmpq(7, 100), fmpq(313, 43350), fmpq(498379, 996356400))


@pytest.mark.parametrize("square", [fmpq(3, 7), fmpq(-5, 2)], ids=str)
def test_irrational_coulomb_parameter_by_its_square(square):
    # a = sqrt(21)/7 and i sqrt(10)/2. Z_k times the product of all (m eps1 + n eps2)^2 - 4 a^2 is a polynomial in a^2
    # of lower degree than that product, so the plain sum at as many rational a as there are factors fixes it.
    e1, e2, charge = fmpq(1), fmpq(2), 4
    poles = [(m * e1 + n * e2) ** 2 for m in range(1, charge + 1) for n in range(1, charge // m + 1)]

    def cleared(value, a_square):
        for pole in poles:
            value *= pole - 4 * a_square
        return value

    nodes, values = [], []
    for i in range(len(poles)):
        a = fmpq(3 * i + 1, 6)
        theory = {
            "eps1": plain.Line(e1),
            "eps2": plain.Line(e2, 1),
            "nodes": [{"coulomb": [plain.Line(a), plain.Line(-a)]}],
        }
        nodes.append(a * a)
        values.append(cleared(plain.laurent_coefficient(theory, [charge])[0], a * a))
    expected = lagrange(nodes, values, square)
    for exact in (True, False):
        ours = pole_coefficients(mixed_problem(e1, e2, square), charge, exact=exact).coefficients[charge]
        assert cleared(ours, square) == expected


def euler_power(exponent, length):
    """prod_n (1 - q^n)^exponent for an integer exponent, factor by factor."""
    series = [1] + [0] * (length - 1)
    for n in range(1, length):
        for _ in range(abs(exponent)):
            if exponent > 0:
                for k in range(length - 1, n - 1, -1):
                    series[k] -= series[k - n]
            else:
                for k in range(n, length):
                    series[k] += series[k - n]
    return series


@pytest.mark.parametrize("ratio", [(1, 1), (1, 2), (1, -1), (3, -2), (5, 7)], ids=str)
def test_special_adjoint_masses(ratio):
    # Vafa, Witten hep-th/9408074 for m = 0; Z = 1 for m = eps1. The numerators vanish at the limit point only, since
    # the recursion holds mu fixed on its path: the poles of single terms survive and must cancel.
    e1, e2 = fmpq(ratio[0]), fmpq(ratio[1])
    length = 25
    massless = gauge_problem(e1, e2, COULOMB, adjoint=fmpq(0))
    assert list(pole_coefficients(massless, length - 1).coefficients) == euler_power(-2, length)
    special = gauge_problem(e1, e2, COULOMB, adjoint=e1)
    assert list(pole_coefficients(special, length - 1).coefficients) == [1] + [0] * (length - 1)


@pytest.mark.parametrize("mass", [fmpq(-3), fmpq(2)], ids=str)
def test_adjoint_with_finitely_many_poles(mass):
    # (eps1, eps2) = (1, -2): Z = prod (1-q^n)^4 (4a^2 - E_2)/(4a^2 - 1); Beccaria, Macorini 1606.00179 (from memory)
    length, a = 31, fmpq(3, 11)
    eisenstein = [fmpq(1)] + [fmpq(-24 * int(divisor_sigma(n))) for n in range(1, length)]
    factor = [((4 * a * a if n == 0 else 0) - e) / (4 * a * a - 1) for n, e in enumerate(eisenstein)]
    euler = euler_power(4, length)
    expected = [sum((euler[i] * factor[n - i] for i in range(n + 1)), fmpq(0)) for n in range(length)]
    problem = gauge_problem(fmpq(1), fmpq(-2), (a, -a), adjoint=mass)
    assert list(pole_coefficients(problem, length - 1).coefficients) == expected


@pytest.mark.parametrize("ratio", [(1, 1), (2, 1), (1, 2), (1, -1), (3, -2)], ids=str)
def test_truncation_to_a_hypergeometric_series(ratio):
    # Masses (-a1 - eps1, -a2, m1, m2): Z = 2F1((a1+m1)/eps2, (a1+m2)/eps2; 1 + (a1-a2+eps1)/eps2; q), any eps1, eps2
    e1, e2 = fmpq(ratio[0]), fmpq(ratio[1])
    a1, a2, m1, m2 = fmpq(2, 7), fmpq(-3, 11), fmpq(1, 3), fmpq(4, 5)
    x, y, z = (a1 + m1) / e2, (a1 + m2) / e2, 1 + (a1 - a2 + e1) / e2
    expected = [fmpq(1)]
    for k in range(16):
        expected.append(expected[-1] * (x + k) * (y + k) / ((z + k) * (k + 1)))
    problem = gauge_problem(e1, e2, (a1, a2), antifundamental=[-a1 - e1, -a2, m1, m2])
    assert list(pole_coefficients(problem, 16).coefficients) == expected
    # The same theory with two of the masses as fundamentals: antifundamental m is fundamental eps - m.
    mixed = gauge_problem(e1, e2, (a1, a2), antifundamental=[-a2, m1], fundamental=[e1 + e2 - m2, e1 + e2 + a1 + e1])
    assert list(pole_coefficients(mixed, 9).coefficients) == expected[:10]


def painleve_three_sides(s, length):
    """Both sides of the bilinear relation divided by t^(2 s^2), as lists of coefficients."""

    def weight(twice):
        value = fmpq(1)
        for y in (2 * s, -2 * s):
            for i in range(twice):
                for j in range(twice):
                    value *= 1 + y - twice + i + j
        return 1 / value

    def slopes(shift, size):
        """F, t dF/dt and its derivative again, without the power t^((s+shift)^2)."""
        problem = mixed_problem(fmpq(1), fmpq(-1), (s + shift) ** 2)
        series = pole_coefficients(problem, size - 1).coefficients
        return [fmpq_poly([((s + shift) ** 2 + k) ** power * c for k, c in enumerate(series)]) for power in range(3)]

    left, right = fmpq_poly(), fmpq_poly()
    twice = 0
    while (first := twice**2 // 2 + twice % 2) < length:
        # F_{s+n} F_{s-n} starts at t^(2 n^2) with n = twice/2; half-integer n brings t^(1/2) more.
        n, size = fmpq(twice, 2), length - first
        f, g = slopes(n, size), slopes(-n, size)
        both = 1 if twice == 0 else 2
        if twice % 2:
            term = f[0].mul_low(g[0], size) * -weight(twice)
            right += (both * term).left_shift(first)
        else:
            term = f[2].mul_low(g[0], size) - 2 * f[1].mul_low(g[1], size) + f[0].mul_low(g[2], size)
            left += (both * weight(twice) / 2 * term).left_shift(first)
        twice += 1
    return left, right


@pytest.mark.parametrize("length", [12, pytest.param(40, marks=pytest.mark.long)])
def test_painleve_three(length):
    # Gamayun, Iorgov, Lisovyy 1302.1832; Bershtein, Shchechkin 1406.3008: bilinear relations between Z at a = s + n,
    # (eps1, eps2) = (1, -1), as series in t = q: with F_x = t^(x^2) Z(a = x; q = t) and D the Hirota derivative,
    # sum_{n in Z} r_n D^2(F_{s+n}, F_{s-n})/2 = -t^(1/2) sum_{n in Z + 1/2} r_n F_{s+n} F_{s-n}.
    left, right = painleve_three_sides(fmpq(3, 11), length)
    assert left == right
    assert left.degree() == length - 1


def test_the_nome_inverts_the_modulus():
    # q = 16 x prod ((1+x^2n)/(1+x^(2n-1)))^8 at x = q_e (theta functions); q_e = q/16 + 8 (q/16)^2 + 84 (q/16)^3 + ...
    length = 24
    ratio = Dressing(nome=NomeExponents(ONE, ZERO, ZERO)).dressed([ONE] + [ZERO] * (length - 1))
    assert [int(ratio[n] * 16**n) for n in range(6)] == [1, 8, 84, 992, 12514, 164688]  # OEIS A002103, from memory
    x = fmpq_poly([0, *[c / 16 for c in ratio[: length - 1]]])
    modulus, power = 16 * x, [fmpq_poly([1])]
    for _ in range(length):
        power.append(power[-1].mul_low(x, length))
    for n in range(1, length // 2 + 1):
        for _ in range(8):
            modulus = modulus.mul_low(1 + power[2 * n], length)
            inverse = sum(((-1) ** k * power[k * (2 * n - 1)] for k in range(length // (2 * n - 1) + 1)), fmpq_poly())
            modulus = modulus.mul_low(inverse, length)
    assert modulus == fmpq_poly([0, 1])
    # theta_3 = sum q_e^(n^2)
    theta = Dressing(nome=NomeExponents(ZERO, ZERO, ONE)).dressed([ONE] + [ZERO] * (length - 1))
    assert fmpq_poly(theta) == 1 + 2 * (power[1] + power[4] + power[9] + power[16])


def test_conformal_blocks_known_for_every_weight():
    # h = 3/7. c = 1, external weights 1/16: (16 q_e)^h [x(1-x)]^(-1/8)/theta_3; c = 25, external weights 15/16:
    # (16 q_e)^(h-1) [x(1-x)]^(-7/8) theta_3^(-3), both without the power of x (Al. Zamolodchikov 1986).
    # A weight is (eps^2/4 - P^2)/(eps1 eps2).
    h = fmpq(3, 7)
    for exact in (True, False):
        one = pole_coefficients(four_point_problem(fmpq(1), fmpq(-1), h, [fmpq(1, 16)] * 4), 3, exact=exact)
        assert one.coefficients == (1, fmpq(3, 14), fmpq(739, 6272), fmpq(7123, 87808))
        many = pole_coefficients(four_point_problem(fmpq(1), fmpq(1), 1 - h, [fmpq(1, 16)] * 4), 3, exact=exact)
        assert many.coefficients == (1, fmpq(3, 14), fmpq(1131, 6272), fmpq(13787, 87808))


@pytest.mark.parametrize("sign", [1, -1])
@pytest.mark.parametrize("ratio", [*RATIOS, (7, -4)], ids=str)
def test_a_family_with_trivial_regular_part_at_every_ratio(ratio, sign):
    # Fateev, Litvinov, Neveu, Onofri 0902.1331: three external momenta eps1/4 and one eps1/4 +- eps2/2 give H = 1
    e1, e2 = fmpq(ratio[0]), fmpq(ratio[1])
    momenta = [(e1 / 4 + sign * e2 / 2) ** 2, *[e1 * e1 / 16] * 3]
    for square in (fmpq(3, 7), fmpq(-1, 3)):
        problem = four_point_problem(e1, e2, square, momenta)
        assert list(pole_coefficients(problem, 20).regular) == [1] + [0] * 20


def test_four_flavours_with_complex_masses_by_squares():
    # c = 25, masses 1+2i/3, 1, 1+2i/3, 1 and a = i/2: Z_1 = -83/72 - 4i/3. The block lacks the factor (1-x)^(2 m0 m1)
    # with m0 = m1 = 1 + i/3, so its first coefficient is Z_1 + 2 (1 + i/3)^2 = 5/8; momenta squared are -1/9.
    problem = four_point_problem(fmpq(1), fmpq(1), fmpq(-1, 4), [fmpq(-1, 9)] * 4)
    for exact in (True, False):
        assert pole_coefficients(problem, 1, exact=exact).coefficients[1] == fmpq(5, 8)


@pytest.mark.parametrize("ratio", RATIOS, ids=str)
def test_squares_and_masses_describe_the_same_theory(ratio):
    e1, e2 = fmpq(ratio[0]), fmpq(ratio[1])
    a, half = fmpq(3, 11), (e1 + e2) / 2
    at_zero, at_x, at_one, at_infinity = fmpq(1, 3), fmpq(2, 5), fmpq(-3, 7), fmpq(5, 4)
    m0, m1 = at_x + half, at_one + half
    masses = [m0 + at_zero, m0 - at_zero, m1 + at_infinity, m1 - at_infinity]
    block = four_point_problem(e1, e2, a * a, [p * p for p in (at_zero, at_x, at_one, at_infinity)])
    theory = gauge_problem(e1, e2, (a, -a), antifundamental=masses)
    length = 10
    # (1-x)^(2 m0 m1/(eps1 eps2)) is the difference (Alday, Gaiotto, Tachikawa 0906.3219)
    exponent = 2 * m0 * m1 / (e1 * e2)
    factor = [fmpq(1)]
    for k in range(length - 1):
        factor.append(factor[-1] * (k - exponent) / (k + 1))
    left = pole_coefficients(theory, length - 1).coefficients
    right = pole_coefficients(block, length - 1).coefficients
    assert list(left) == [sum((factor[i] * right[k - i] for i in range(k + 1)), fmpq(0)) for k in range(length)]
    adjoint = gauge_problem(e1, e2, (a, -a), adjoint=fmpq(2, 7))
    assert adjoint == torus_problem(e1, e2, a * a, mu_square=(fmpq(2, 7) - half) ** 2)


# --- what the route covers --------------------------------------------------------------------------------------------


def case_of(nodes, edges=(), eps=("1", "1"), charge=4):
    background = Background.make(Affine(fmpq(eps[0])), Affine(fmpq(eps[1])))
    return Case.make(Theory.make(nodes, edges), background, charge)


def node(coulomb, **matter):
    values = {name: tuple(Affine(fmpq(m)) for m in masses) for name, masses in matter.items()}
    return Node("gauge", tuple(Affine(fmpq(a)) for a in coulomb), **values)


THIRD, FIFTH = fmpq(1, 3), fmpq(1, 5)


@pytest.mark.parametrize(
    ("case", "words"),
    [
        (case_of([node([THIRD])]), r"covers U\(2\), and this node is U\(1\)"),
        (case_of([node([THIRD, FIFTH, 0])]), r"this node is U\(3\)"),
        (case_of([node([0, 1]), Node("other", (Affine(THIRD),))], [Edge(0, 1, Affine())]), "several"),
        (case_of([node([THIRD, FIFTH], antifundamental=[0] * 3, fundamental=[1] * 2)]), "has 5"),
        (case_of([node([THIRD, FIFTH], antifundamental=[0], adjoint=[1])]), "has both"),
        (case_of([node([THIRD, FIFTH], adjoint=[0, 1])]), "one adjoint at most"),
    ],
    ids=["rank 1", "rank 3", "quiver", "five", "both", "two adjoints"],
)
def test_theories_that_are_not_covered(case, words):
    answer = applies(case)
    assert not answer.applies
    with pytest.raises(InputError, match=words) as caught:
        case_problem(case)
    assert caught.value.problems[0].message == answer.reason


@pytest.mark.parametrize(
    ("eps", "difference", "charge", "pole"),
    [
        (("1", "1"), 2, 4, (1, 1)),
        (("1", "1"), -3, 4, (1, 2)),
        (("1", "1"), 5, 3, None),
        (("1", "1"), 5, 4, (1, 4)),
        (("2", "1"), 3, 1, (1, 1)),
        (("1", "-1"), 0, 1, (1, 1)),
        (("3", "-2"), 0, 5, None),
        (("3", "-2"), 0, 6, (2, 3)),
        (("4", "-3"), -5, 1, None),
        (("4", "-3"), -5, 2, (2, 1)),
    ],
)
def test_resonance_at_a_pole_is_refused_with_its_reason(eps, difference, charge, pole):
    case = case_of([node([fmpq(difference) + THIRD, THIRD])], eps=eps, charge=charge)
    answer = applies(case)
    assert answer.applies is (pole is None)
    for exact in (True, False):
        if pole is None:
            assert len(pole_coefficients(case_problem(case), charge, exact=exact).coefficients) == charge + 1
        else:
            assert f"+-({pole[0]}*eps1 + {pole[1]}*eps2)" in answer.reason
            with pytest.raises(InputError, match="a pole of the recursion"):
                pole_coefficients(case_problem(case), charge, exact=exact)


def test_resonance_beyond_the_poles_is_an_ordinary_case():
    # Equal Coulomb parameters at (1,1): 1/2, 11/108, 61/5184, from the sum over diagrams on a tilted path
    case = case_of([node([THIRD, THIRD])])
    assert applies(case).applies
    for exact in (True, False):
        result = pole_coefficients(case_problem(case), 3, exact=exact)
        assert result.coefficients == (1, fmpq(1, 2), fmpq(11, 108), fmpq(61, 5184))


def test_a_case_becomes_the_problem_of_its_limit_point():
    theory = node(COULOMB, antifundamental=MASSES[:2], fundamental=MASSES[2:])
    case = case_of([theory], eps=("3", "-2"))
    assert case_problem(case) == problem_of((3, -2), MATTER["mixed"])
    moving = Node("gauge", (Affine(eps1=THIRD, t=ONE), Affine(eps2=FIFTH)), (Affine(eps1=ONE, eps2=ONE),))
    problem = case_problem(case_of([moving], eps=("3", "-2")))
    assert problem == gauge_problem(fmpq(3), fmpq(-2), (ONE, fmpq(-2, 5)), antifundamental=[ONE])


def test_wrong_requests():
    problem = problem_of((1, 1), {})
    with pytest.raises(InputError, match="zero or more"):
        pole_coefficients(problem, -1)
    with pytest.raises(InputError, match="must not be zero"):
        mixed_problem(ONE, ZERO, THIRD)
    with pytest.raises(InputError, match="not both"):
        gauge_problem(ONE, ONE, COULOMB, antifundamental=[ONE], adjoint=ONE)
    with pytest.raises(InputError, match="not 5"):
        mixed_problem(ONE, ONE, THIRD, mu=[ONE] * 5)
    with pytest.raises(InputError, match="four external momenta"):
        four_point_problem(ONE, ONE, THIRD, [ONE] * 3)


def test_charge_zero_and_the_change_of_method():
    problem = problem_of((1, 1), MATTER["two"])
    for exact in (True, False, None):
        assert pole_coefficients(problem, 0, exact=exact).coefficients == (1,)
    assert pole_coefficients(problem, LAST_EXACT_CHARGE).evidence[-1].kind == "exact"
    assert pole_coefficients(problem, LAST_EXACT_CHARGE + 1).evidence[-1].kind == "residues"


def test_a_long_ratio_goes_through_exact_series_only():
    problem = mixed_problem(fmpq(10**9 + 7), fmpq(10**9 + 9), THIRD)
    with pytest.raises(InputError, match="exact series still take it"):
        pole_coefficients(problem, 3, exact=False)
    e1, e2 = fmpq(10**9 + 7), fmpq(10**9 + 9)
    assert pole_coefficients(problem, 1).coefficients[1] == -2 / (e1 * e2 * (4 * THIRD - (e1 + e2) ** 2))
