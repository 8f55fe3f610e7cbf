"""The fast sums against the plain reference, the general engine, an oracle without poles, and a closed form."""

from __future__ import annotations

from collections import Counter
from fractions import Fraction
from math import comb, factorial

import numpy as np
import plain
import pytest
from building import make_case, plain_theory
from census import Entry, census
from flint import fmpq, fmpq_poly

from ratomega.case.setting import own_setting
from ratomega.diagrams.tuples import configurations
from ratomega.diagrams.young import diagrams_of_size, transpose
from ratomega.errors import InputError, RatomegaError
from ratomega.exact import batches
from ratomega.exact.rational import Rational
from ratomega.exact.residues import Moduli, PrimeSource
from ratomega.regulator.direct import direct_total
from ratomega.regulator.fast import cluster_sums, collect, generic, layout, limit, three
from ratomega.regulator.fast import sums as fast
from ratomega.regulator.fast.bell import exponential
from ratomega.regulator.fast.factors import Bench
from ratomega.regulator.fast.proof import multiplicity, proof_bound
from ratomega.regulator.fast.sums import applies, fast_sum, worthwhile
from ratomega.weights import Weights, pair_points

TOP = {1: 3, 2: 5, 3: 3}
MATTER = {
    "none": {},
    "one and one": {"antifundamental": ["1/2"], "fundamental": ["3/7"]},
    "four": {"antifundamental": ["1/3", "2/5", "3/7"], "fundamental": ["1/2"]},
    "adjoint": {"adjoint": ["2/9"]},
    "two adjoints and one": {"adjoint": ["2/9", "-1/5"], "antifundamental": ["1/3"]},
}


def setting_of(ratio: str, coulomb=("3/11", "-3/11"), **matter):
    return own_setting(make_case("1", ratio, [{"coulomb": list(coulomb), **matter}]))


def plain_limits(setting, top):
    """The t^0 terms of the plain Laurent expansions; nothing may diverge."""
    found = []
    for k in range(top + 1):
        powers = plain.laurent_coefficient(plain_theory(setting), (k,))
        assert all(power >= 0 for power in powers)
        found.append(powers.get(0, fmpq(0)))
    return found


# ---- the census


@pytest.mark.parametrize("entry", census(), ids=str)
def test_the_census(entry: Entry) -> None:
    """Either equal to the plain reference, or refused; harmless parameters are never refused."""
    top = TOP[entry.rank]
    if applies(entry.setting, top) is None:
        answer = fast_sum(entry.setting, top)
        assert list(answer.coefficients) == plain_limits(entry.setting, top)
        assert min(answer.spare_bits) >= 45
    else:
        assert entry.rank == 1 or not entry.generic or entry.matter in {"cutting", "soft adjoint"}
        with pytest.raises(InputError):
            fast_sum(entry.setting, top)


@pytest.mark.parametrize("ratio", ["1", "2", "1/2", "2/3", "3/2", "-1", "-3/4", "-2/3", "103/71"])
@pytest.mark.parametrize("matter", MATTER)
def test_two_colours(ratio, matter) -> None:
    setting = setting_of(ratio, ("3/11", "-2/7"), **MATTER[matter])
    assert list(fast_sum(setting, 4).coefficients) == plain_limits(setting, 4)


@pytest.mark.parametrize("ratio", ["1", "2", "-1/2", "7/5"])
@pytest.mark.parametrize("matter", ["none", "four", "adjoint"])
def test_three_colours(ratio, matter) -> None:
    setting = setting_of(ratio, ("3/11", "-2/7", "1/13"), **MATTER[matter])
    assert list(fast_sum(setting, 3).coefficients) == plain_limits(setting, 3)


@pytest.mark.parametrize(
    ("ratio", "coulomb", "top"),
    [
        ("1", ("3/11", "-3/11"), 10),
        ("2", ("3/11", "-2/7"), 9),
        ("2/3", ("3/11", "-2/7"), 9),
        ("-1", ("3/11", "-3/11"), 8),
        ("71/103", ("3/11", "-2/7"), 8),
        ("1", ("3/11", "-2/7", "1/13"), 6),
        ("2", ("3/11", "-2/7", "1/13"), 5),
    ],
)
@pytest.mark.parametrize("matter", ["none", "four"])
def test_moderate_charges_against_the_engine(ratio, coulomb, top, matter) -> None:
    setting = setting_of(ratio, coulomb, **MATTER[matter])
    weights = Weights(setting)
    expected = [direct_total(weights, (k,)).coefficient(0) for k in range(top + 1)]
    assert list(fast_sum(setting, top).coefficients) == expected


def test_the_path_of_the_case_does_not_matter() -> None:
    """Components are compact, so the limit is the same on a path that moves everything."""
    node = {"coulomb": ["3/11 + t", "-2/7 - 2*t"], "antifundamental": ["1/3 - t/5"]}
    setting = own_setting(make_case("1 + t/2", "2 - 3*t", [node]))
    assert list(fast_sum(setting, 5).coefficients) == plain_limits(setting, 5)


def test_negative_and_long_parameters() -> None:
    """The eps may both be negative, and parameters longer than a machine word."""
    long = "123456789012345678901/1000000000000000000007"
    node = {"coulomb": [long, "-2/7"], "antifundamental": ["1/3"]}
    for eps1, eps2 in (("-1", "-1"), ("-3/2", "-3"), ("-2", "1")):
        setting = own_setting(make_case(eps1, eps2, [node]))
        assert list(fast_sum(setting, 4).coefficients) == plain_limits(setting, 4)


def test_coefficients_that_vanish() -> None:
    """U(2) with an adjoint of mass eps1: Z = 1."""
    setting = setting_of("-1", adjoint=["eps1"])
    assert list(fast_sum(setting, 7, certify=True).coefficients) == [1, *[0] * 7]


def test_more_flavours_than_the_colours_carry() -> None:
    masses = ["1/3", "2/5", "3/7", "1/2", "-1/9"]
    for ratio in ("1", "-2/3"):
        setting = setting_of(ratio, antifundamental=masses)
        assert list(fast_sum(setting, 4).coefficients) == plain_limits(setting, 4)
    setting = setting_of("2", antifundamental=masses)
    expected = [direct_total(Weights(setting), (k,)).coefficient(0) for k in range(8)]
    assert list(fast_sum(setting, 7).coefficients) == expected


def test_charge_zero() -> None:
    for coulomb in (("3/11", "-3/11"), ("3/11", "-2/7", "1/13")):
        assert list(fast_sum(setting_of("1", coulomb), 0, certify=True).coefficients) == [1]


# ---- where it does not apply


@pytest.mark.parametrize(
    ("node", "words"),
    [
        ({"coulomb": ["1/3"]}, "two and three colours"),
        ({"coulomb": ["1/3", "-2/3"]}, "a1 - a2 is"),
        ({"coulomb": ["30", "1"]}, "a1 - a2 is an integer combination"),
        ({"coulomb": ["1/3", "1/5"], "adjoint": ["2/15"]}, "less an adjoint mass"),
        ({"coulomb": ["1/3", "1/5"], "adjoint": ["2"]}, "an adjoint mass"),
        ({"coulomb": ["1/3", "1/5"], "fundamental": ["1/3"]}, "plus a mass"),
    ],
)
def test_refusals_name_the_reason(node, words) -> None:
    setting = own_setting(make_case("1", "1", [node]))
    assert words in applies(setting, 3)
    with pytest.raises(InputError, match=words):
        fast_sum(setting, 3)


def test_several_nodes_are_refused() -> None:
    node = {"coulomb": ["1/3", "1/5"]}
    setting = own_setting(make_case("1", "1", [node, node], edges=[("1", "2", "1/7")]))
    assert "single node" in applies(setting, 3)


def test_a_far_resonance_is_no_obstacle_where_nothing_diverges() -> None:
    setting = setting_of("-1", ("20", "1"))
    assert applies(setting, 4) is None
    assert list(fast_sum(setting, 4).coefficients) == plain_limits(setting, 4)
    assert applies(setting, 20) is not None


# ---- the oracle: no poles, no clusters, no series


def interpolated_at_zero(points, values):
    """The constant term of the polynomial in x through the points, by Lagrange's formula."""
    total = fmpq(0)
    for n, (x, y) in enumerate(zip(points, values, strict=True)):
        for m, z in enumerate(points):
            if m != n:
                y *= z / (z - x)
        total += y
    return total


def cleared(k, eps1, eps2, a):
    """k! (eps1 eps2)^k prod_(mn <= k) ((m eps1 + n eps2)^2 - a^2)."""
    value = factorial(k) * (eps1 * eps2) ** k
    for m in range(1, k + 1):
        for n in range(1, k // m + 1):
            value *= (m * eps1 + n * eps2) ** 2 - a**2
    return value


def oracle(top, matter, degree):
    """Z_top at ratio 1 from its values at rational numbers t on the path (1 - t, 1 + t), all of them non-singular.

    Z times its denominator is an even polynomial in t of degree 2 #{mn <= top} + (2 + degree) top.
    """
    pairs = sum(top // m for m in range(1, top + 1))
    half_degree = pairs + (2 + degree) * top // 2
    points, values = [], []
    # Two points more than needed: a degree counted too low would show.
    for n in range(half_degree + 3):
        t = Rational(2 * n + 1, 101)
        node = {"coulomb": ["3/11", "-3/11"], **matter}
        setting = own_setting(make_case(str(1 - t), str(1 + t), [node]))
        assert fast.prepare(setting).singular_from() > top
        points.append(t * t)
        values.append(fast_sum(setting, top).coefficients[top] * cleared(top, 1 - t, 1 + t, Rational(6, 11)))
    answers = [interpolated_at_zero(points[skip:], values[skip:]) for skip in (0, 1, 2)]
    assert answers[0] == answers[1] == answers[2]
    return answers[0] / cleared(top, Rational(1), Rational(1), Rational(6, 11))


@pytest.mark.parametrize(
    ("top", "matter", "degree"),
    [(12, {}, -4), (6, {"antifundamental": ["1/3", "2/5", "3/7", "1/2"]}, 0), (5, {"adjoint": ["2/9"]}, 0)],
)
def test_depth_against_the_oracle(top, matter, degree) -> None:
    assert fast_sum(setting_of("1", **matter), top).coefficients[top] == oracle(top, matter, degree)


@pytest.mark.long
def test_depth_against_the_oracle_far_out() -> None:
    assert fast_sum(setting_of("1"), 20).coefficients[20] == oracle(20, {}, -4)


# ---- a closed form at a point where single weights diverge up to order 8


def power(series, exponent, length):
    """A series with constant term 1 to a rational power: n b_n = sum_k (exponent k - n + k) a_k b_(n-k)."""
    result = [Fraction(1)]
    for n in range(1, length):
        known = sum((exponent * k - (n - k)) * series[k] * result[n - k] for k in range(1, n + 1))
        result.append(known / n)
    return result


def times(a, b, length):
    return [sum((a[k] * b[n - k] for k in range(n + 1)), Fraction(0)) for n in range(length)]


def test_four_flavours_at_ratio_one_in_closed_form() -> None:
    """Masses mu + eps/2 with mu = (1/2, 0, 1/2, 0) at eps1 = eps2 = 1, Q the elliptic nome of modulus q:

    Z = (16 Q/q)^(-a^2) (1 - q)^((sum mu + eps)^2 / 4) theta_3(Q)^(2 sum mu^2 - eps^2).

    The four-point block with all weights 15/16 at c = 25, the counterpart of weights 1/16 at c = 1 (Al. Zamolodchikov
    1986).
    """
    length = 15
    # The modulus by the nome: q = 16 Q prod ((1 + Q^(2n)) / (1 + Q^(2n-1)))^8; theta_3 = sum Q^(n^2).
    up, down, theta = ([Fraction(1)] + [Fraction(0)] * (length - 1) for _ in range(3))
    for n in range(1, length):
        factor = [Fraction(int(k in (0, n))) for k in range(length)]
        if n % 2:
            down = times(down, factor, length)
        else:
            up = times(up, factor, length)
        if n * n < length:
            theta[n * n] = Fraction(2)
    ratio = times(power(up, Fraction(8), length), power(down, Fraction(-8), length), length)
    # x = 16 Q as a series in q, by repeated substitution of q = x r(x/16).
    scaled = fmpq_poly([fmpq(c.numerator, c.denominator) / 16**n for n, c in enumerate(ratio)])
    x = fmpq_poly([0, 1])
    for _ in range(length):
        composed = fmpq_poly([0])
        for coefficient in reversed(scaled.coeffs()):
            composed = (composed * x).truncate(length + 1) + coefficient
        x = fmpq_poly([0, *_inverse(composed, length)])
    nome_over_q = [Fraction(int(x[n + 1].p), int(x[n + 1].q)) for n in range(length)]
    theta_of_q = [Fraction(0)] * length
    x_power = fmpq_poly([1])
    for coefficient in (fmpq(c.numerator, c.denominator) / 16**n for n, c in enumerate(theta)):
        theta_of_q = [
            old + Fraction(int((coefficient * x_power)[n].p), int((coefficient * x_power)[n].q))
            for n, old in enumerate(theta_of_q)
        ]
        x_power = (x_power * x).truncate(length)
    a = Fraction(3, 11)
    mus = [Fraction(1, 2), Fraction(0), Fraction(1, 2), Fraction(0)]
    eps = 2
    one_minus_q = [Fraction(1), Fraction(-1)] + [Fraction(0)] * (length - 2)
    expected = power(nome_over_q, -(a**2), length)
    expected = times(expected, power(one_minus_q, (sum(mus) + eps) ** 2 / 4, length), length)
    exponent = 2 * sum(mu**2 for mu in mus) - eps**2
    expected = times(expected, power(theta_of_q, exponent, length), length)
    setting = setting_of("1", antifundamental=["3/2", "1", "3/2", "1"])
    found = fast_sum(setting, length - 1).coefficients
    assert [Fraction(int(z.p), int(z.q)) for z in found] == expected


def _inverse(series, length):
    """The first coefficients of 1 / series."""
    inverse = [1 / series[0]]
    for n in range(1, length):
        inverse.append(-sum((series[k] * inverse[n - k] for k in range(1, n + 1)), fmpq(0)) / series[0])
    return inverse


# ---- the parts


@pytest.mark.parametrize("depth", range(1, 15))
@pytest.mark.parametrize("spread", [1, 4, 30])
def test_exponentials_stay_exact(depth, spread) -> None:
    """Power sums at the very edge of what was promised, against the same recursion in long integers."""
    p = 8388593
    half = p // 2
    choices = np.random.default_rng(depth)
    sums = choices.integers(-spread * half, spread * half, size=(depth, 50, 1), endpoint=True)
    sums[:, :10] = spread * half * choices.choice([-1, 1], size=(depth, 10, 1))
    sums[:, 10] = spread * half
    bench = Bench.make(Moduli.make([p], last=True), 50)
    floats = [one.astype(np.float64) for one in sums]
    found = exponential(floats, spread * (half + 1.0), half + 1.0, bench)
    for column in range(50):
        series = [1]
        for n in range(1, depth + 1):
            terms = (comb(n - 1, j - 1) * int(sums[j - 1, column, 0]) * series[n - j] for j in range(1, n + 1))
            series.append(sum(terms))
        assert (int(found[column, 0]) - series[depth]) % p == 0


def test_bad_primes_are_replaced(monkeypatch) -> None:
    """Small primes divide many factors; the answer is the same without them."""
    setting = setting_of("1", antifundamental=["1/3"])
    expected = fast_sum(setting, 5).coefficients

    class Small(PrimeSource):
        def __init__(self, bits, radicand):
            super().__init__(bits, radicand)
            self._ready = [7, 11, 13, 1000003, 1000033]

    monkeypatch.setattr(batches, "PrimeSource", Small)
    answer = fast_sum(setting, 5)
    assert answer.coefficients == expected


def test_too_few_primes_are_followed_by_more(monkeypatch) -> None:
    setting = setting_of("2")
    expected = fast_sum(setting, 8)
    monkeypatch.setattr(fast, "bits_needed", lambda *_: 1)
    answer = fast_sum(setting, 8)
    assert answer.coefficients == expected.coefficients
    assert min(answer.spare_bits) >= 45


# ---- faults that must not go unseen


def one_short(sums, bound, half, bench):
    """A window bug: the last power sum is forgotten."""
    sums[-1][:] = 0.0
    return exponential(sums, bound, half, bench)


def shallow(orders):
    """A depth bug: one diagram in a cluster family is thought to be regular."""
    return lambda setup, forest: np.where(orders(setup, forest) > 1, 1, orders(setup, forest))


def unhalved(forest):
    """A halving bug: diagrams that equal their transposes count twice."""
    weights = MIRROR_WEIGHTS(forest)
    return np.where(weights == 1.0, 2.0, weights)


MIRROR_WEIGHTS = layout._mirror_weights

FAULTS = {
    "window": [(limit, "exponential", one_short), (three, "exponential", one_short)],
    "depth": [(cluster_sums, "_orders", shallow(cluster_sums._orders))],
    "halving": [(layout, "_mirror_weights", unhalved)],
}


@pytest.mark.parametrize("fault", FAULTS)
@pytest.mark.parametrize("coulomb", [("3/11", "-3/11"), ("3/11", "-2/7", "1/13")])
def test_faults_change_the_answer(fault, coulomb, monkeypatch) -> None:
    """What the comparisons of this file are for: each of these faults makes the small charges wrong."""
    setting = setting_of("1", coulomb)
    top = 4
    expected = plain_limits(setting, top)
    assert list(fast_sum(setting, top).coefficients) == expected
    for module, name, wrong in FAULTS[fault]:
        monkeypatch.setattr(module, name, wrong)
    assert list(fast_sum(setting, top).coefficients) != expected


def test_exchanging_the_diagrams_is_no_symmetry(monkeypatch) -> None:
    """Doubling the pairs with |small| < |big| instead of running both passes is wrong at charge 1 already."""
    setting = setting_of("103/71", antifundamental=["1/3"])
    right = generic._pass

    def doubled(big, small, table, sign, *rest):
        if sign < 0:
            right(small, big, table, -sign, *rest)
        else:
            right(big, small, table, sign, *rest)

    monkeypatch.setattr(generic, "_pass", doubled)
    assert list(fast_sum(setting, 1).coefficients) != plain_limits(setting, 1)



# ---- proof


@pytest.mark.parametrize("charge", range(1, 7))
def test_multiplicities_are_upper_bounds(charge) -> None:
    """Enumeration: no pair of diagrams holds a form more often, and the bound is met somewhere."""
    most: dict[tuple[int, int], int] = {}
    for ((lam, mu),) in configurations([2], (charge,)):
        counts = Counter(pair_points(lam, mu, transpose(lam), transpose(mu)))
        for point, count in counts.items():
            most[point] = max(most.get(point, 0), count)
    assert all(count <= multiplicity(*point, charge) for point, count in most.items())
    assert all(multiplicity(p, q, charge) == 0 for p in range(-9, 10) for q in range(-9, 10) if (p, q) not in most)
    assert any(count > 1 for count in most.values()) or charge < 4
    # One diagram against itself: hooks.
    for diagram in diagrams_of_size(charge):
        columns = transpose(diagram)
        for (p, q), count in Counter(pair_points(diagram, diagram, columns, columns)).items():
            hook = q - p if q >= 1 else p - q
            assert count <= charge // hook


@pytest.mark.parametrize("ratio", ["1", "2", "-1", "103/71"])
@pytest.mark.parametrize("coulomb", [("3/11", "-3/11"), ("3/11", "-2/7", "1/13")])
@pytest.mark.parametrize("matter", ["none", "one and one", "adjoint"])
def test_certified(ratio, coulomb, matter) -> None:
    setting = setting_of(ratio, coulomb, **MATTER[matter])
    top = 4 if len(coulomb) == 2 else 2
    answer = fast_sum(setting, top, certify=True)
    assert answer.proved
    assert list(answer.coefficients) == plain_limits(setting, top)
    setup = fast.prepare(setting)
    for k, value in enumerate(answer.coefficients):
        bound = proof_bound(setup, k, moving=ratio in {"1", "2"})
        whole = value / setup.rescaled(Rational(1), k) * bound.multiple
        assert whole.q == 1
        assert abs(whole.p) <= bound.size


@pytest.mark.parametrize("ratio", ["1", "103/71"])
def test_certification_refutes_a_wrong_coefficient(ratio, monkeypatch) -> None:
    """A wrong reconstruction that passed: off by little, off by much, with a foreign denominator."""
    setting = setting_of(ratio)
    right = fast.collect
    for k, change in ((1, Rational(1)), (3, Rational(10) ** 4000), (2, Rational(1, 10007))):

        def wrong(*given, k=k, change=change, **options):
            found = right(*given, **options)
            values = [z + change * (n == k) for n, z in enumerate(found.coefficients)]
            return collect.Collected(tuple(values), found.spare_bits, found.primes)

        monkeypatch.setattr(fast, "collect", wrong)
        with pytest.raises(RatomegaError, match=f"charge {k}"):
            fast_sum(setting, 4, certify=True)


# ---- the choice


def test_small_cases_stay_with_the_engine() -> None:
    assert not worthwhile(setting_of("1"), 5)
    assert worthwhile(setting_of("1"), 8)
    assert worthwhile(setting_of("1", ("3/11", "-2/7", "1/13")), 5)
    assert not worthwhile(setting_of("1", ("1/3", "-2/3")), 8)


def test_large_arrays_are_reduced_in_pieces() -> None:
    moduli = Moduli.make([101, 103], last=True)
    bench = Bench.make(moduli, 3)
    for shape in ((1, 1, 50, 2), (50, 2), (7, 9, 2)):
        values = np.arange(np.prod(shape), dtype=np.float64).reshape(shape) * 1000
        assert np.array_equal(bench.reduce(values.copy()), moduli.reduce(values))


@pytest.mark.parametrize(
    ("ratio", "coulomb", "top"),
    [("1", ("3/11", "-3/11"), 12), ("1/2", ("3/11", "-3/11"), 9), ("1", ("3/11", "2/7", "1/5"), 6)],
)
def test_power_sums_keep_their_bound(ratio, coulomb, top, monkeypatch) -> None:
    """Exactness rests on the bound that the exponential is told; no result would show a small excess."""
    largest = []

    def watched(sums, bound, half, bench):
        size = max(float(np.abs(one).max()) for one in sums)
        assert size <= bound
        largest.append(size / bound)
        assert half >= max(bench.moduli.primes) / 2
        return exponential(sums, bound, half, bench)

    for module in (limit, three):
        monkeypatch.setattr(module, "exponential", watched)
    fast_sum(setting_of(ratio, coulomb), top)
    # The bound is no idle one.
    assert max(largest) > 0.3


def test_the_prime_that_is_kept_out_must_agree() -> None:
    setup = fast.prepare(setting_of("103/71"))
    primes = PrimeSource(26).take(12)
    table = generic.two_colours(setup, layout.Forest.make(3), Moduli.make(primes, last=True)).T
    found: list[Rational] = []
    collect._extend(setup, 3, table, primes, found, [])
    assert len(found) == 4
    table[-1, 2] += 1
    found.clear()
    collect._extend(setup, 3, table, primes, found, [])
    assert len(found) == 2
