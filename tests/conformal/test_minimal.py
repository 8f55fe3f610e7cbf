"""Minimal models against published tables and against computations of another kind.

Weights and fusion rules: A. Belavin, A. Polyakov, A. Zamolodchikov 1984; D. Friedan, Z. Qiu, S. Shenker 1984; J. Cardy
1985. The fusion rules are computed once more from the modular matrix S (E. Verlinde 1988; J. Cardy 1986), and
characters (A. Rocha-Caridi 1985) from products and from the ranks of Gram matrices.
"""

from __future__ import annotations

from fractions import Fraction
from itertools import product
from math import pi, sin, sqrt

import pytest
from building import make_case
from irreducible import block

from ratomega.case.setting import own_setting
from ratomega.conformal.minimal import MinimalModel, minimal_point
from ratomega.errors import InputError
from ratomega.exact.rational import Rational, as_fraction

MODELS = [(2, 3), (2, 5), (2, 7), (3, 4), (4, 3), (3, 5), (4, 5), (5, 6)]


def model(pair):
    return MinimalModel.make(*pair)


# ---- the Kac table


@pytest.mark.parametrize(
    ("pair", "charge", "weights"),
    [
        ((2, 3), "0", ["0"]),
        ((2, 5), "-22/5", ["0", "-1/5"]),
        ((3, 4), "1/2", ["0", "1/16", "1/2"]),
        ((4, 5), "7/10", ["0", "1/10", "3/5", "3/2", "7/16", "3/80"]),
        ((5, 6), "4/5", ["0", "1/8", "2/3", "13/8", "3", "2/5", "1/40", "1/15", "21/40", "7/5"]),
    ],
    ids=str,
)
def test_published_weights(pair, charge, weights) -> None:
    one = model(pair)
    assert as_fraction(one.central_charge) == Fraction(charge)
    assert [as_fraction(one.weight(label)) for label in one.labels()] == [Fraction(x) for x in weights]


@pytest.mark.parametrize("pair", MODELS)
def test_both_labels_are_one_field(pair) -> None:
    one = model(pair)
    p, q = pair
    assert len(one.labels()) == (p - 1) * (q - 1) // 2
    for label in product(range(1, p), range(1, q)):
        other = one.partner(label)
        assert one.canonical(label) == one.canonical(other) in one.labels()
        assert one.weight(label) == one.weight(other)
        assert one.label_of(one.number(label)) == label
        assert one.number(other) == -one.number(label)
    inside = {one.number(label) for label in product(range(1, p), range(1, q))}
    assert {n for n in range(-3 * p * q, 3 * p * q) if one.label_of(n) is not None} == inside


@pytest.mark.parametrize("pair", [(1, 2), (2, 2), (2, 4), (0, 3), (3, -4), (6, 9)])
def test_what_is_no_minimal_model(pair) -> None:
    with pytest.raises(InputError, match="coprime"):
        MinimalModel.make(*pair)


@pytest.mark.parametrize("label", [(0, 1), (3, 1), (1, 0), (1, 4), (-1, -1)])
def test_labels_outside_the_table(label) -> None:
    one = model((3, 4))
    assert not one.has(label)
    for ask in (one.canonical, one.weight, lambda x: one.character(x, 3), lambda x: one.fuse(x, (1, 1))):
        with pytest.raises(ValueError, match="Kac table"):
            ask(label)


# ---- fusion rules


def test_published_fusion_rules() -> None:
    one, sigma, energy = (1, 1), (1, 2), (1, 3)
    ising = model((3, 4))
    assert ising.fuse(sigma, sigma) == (one, energy)
    assert ising.fuse(sigma, energy) == (sigma,)
    assert ising.fuse(energy, energy) == (one,)
    assert model((2, 5)).fuse((1, 2), (1, 2)) == (one, (1, 2))
    # Tricritical Ising: epsilon = (1,2), epsilon' = (1,3), epsilon'' = (1,4), sigma = (2,2), sigma' = (2,1).
    tricritical = model((4, 5))
    assert tricritical.fuse((1, 2), (1, 2)) == (one, (1, 3))
    assert tricritical.fuse((1, 2), (1, 3)) == ((1, 2), (1, 4))
    assert tricritical.fuse((1, 3), (1, 3)) == (one, (1, 3))
    assert tricritical.fuse((1, 4), (1, 4)) == (one,)
    assert tricritical.fuse((2, 2), (2, 2)) == (one, (1, 2), (1, 3), (1, 4))
    assert tricritical.fuse((2, 1), (2, 1)) == (one, (1, 4))
    assert tricritical.fuse((1, 4), (2, 2)) == ((2, 2),)


@pytest.mark.parametrize("pair", MODELS)
def test_fusion_rules_from_the_modular_matrix(pair) -> None:
    """N_abc = sum_d S_ad S_bd S_cd / S_1d; the entries are sines, the sums integers."""
    one, (p, q) = model(pair), pair

    def s(a, b):
        sign = (-1) ** (1 + a[1] * b[0] + a[0] * b[1])
        return sign * sqrt(8 / (p * q)) * sin(pi * q * a[0] * b[0] / p) * sin(pi * p * a[1] * b[1] / q)

    labels = one.labels()
    for a, b, c in product(labels, repeat=3):
        number = sum(s(a, d) * s(b, d) * s(c, d) / s((1, 1), d) for d in labels)
        assert abs(number - round(number)) < 1e-9
        assert (c in one.fuse(a, b)) == (round(number) == 1)


@pytest.mark.parametrize("pair", [(2, 5), (3, 4), (3, 5), (4, 5)])
def test_fusion_rules_are_the_zeros_of_the_fusion_polynomials(pair) -> None:
    """Both null vectors of the internal module decouple from two fields exactly where the fusion rules say so.

    The overlap with the null vector of (m, n) is prod (P_2 ± P_1 + (i eps1 + j eps2)/2) over i = 1-m, 3-m, ..., m-1 and
    j = 1-n, ..., n-1 (Feigin, Fuchs 1984). No other momenta are allowed, be they in the Kac table or not.
    """
    one, (p, q) = model(pair), pair

    def decouples(label, x, y):
        shifts = [i * q - j * p for i in range(1 - label[0], label[0], 2) for j in range(1 - label[1], label[1], 2)]
        return any(x + sign * y + shift == 0 for sign in (1, -1) for shift in shifts)

    for label in one.labels():
        for x, y in product(range(3 * p * q), repeat=2):
            known = one.label_of(x), one.label_of(y)
            rules = None not in known and one.canonical(label) in one.fuse(*known)
            assert rules == (decouples(label, x, y) and decouples(one.partner(label), x, y))


# ---- characters


def parts(top, allowed):
    """The coefficients of prod 1/(1 - q^n) over the n that are allowed."""
    counts = [1] + [0] * top
    for n in range(1, top + 1):
        if allowed(n):
            for k in range(n, top + 1):
                counts[k] += counts[k - n]
    return tuple(counts)


def test_the_rogers_ramanujan_products() -> None:
    """M(2,5) (L. Rogers 1894) and M(2,7) (G. Andrews 1974; B. Feigin, T. Nakanishi, H. Ooguri 1992)."""
    assert model((2, 5)).character((1, 1), 40) == parts(40, lambda n: n % 5 in (2, 3))
    assert model((2, 5)).character((1, 2), 40) == parts(40, lambda n: n % 5 in (1, 4))
    for s in (1, 2, 3):
        assert model((2, 7)).character((1, s), 40) == parts(40, lambda n, s=s: n % 7 not in (0, s, 7 - s))
    assert model((2, 3)).character((1, 1), 40) == (1, *(0,) * 40)


def test_the_ising_characters_are_those_of_a_fermion() -> None:
    ising, top = model((3, 4)), 24
    half = [1] + [0] * (2 * top)
    for n in range(1, 2 * top + 1, 2):
        for k in range(2 * top, n - 1, -1):
            half[k] += half[k - n]
    whole = [1] + [0] * top
    for n in range(1, top + 1):
        for k in range(top, n - 1, -1):
            whole[k] += whole[k - n]
    assert list(ising.character((1, 1), top)) == half[::2]
    assert list(ising.character((1, 3), top - 1)) == half[1::2]
    assert list(ising.character((1, 2), top)) == whole


@pytest.mark.parametrize("pair", [(2, 7), (3, 5), (4, 5), (5, 6)])
def test_characters_are_ranks_of_gram_matrices(pair) -> None:
    one = model(pair)
    for label in one.labels():
        c, h = as_fraction(one.central_charge), as_fraction(one.weight(label))
        zero, itself = Fraction(0), h
        # The identity between two equal fields couples to no null vector.
        _, ranks = block(c, h, [itself, zero, zero, itself], 6)
        assert tuple(ranks) == one.character(label, 6) == one.character(one.partner(label), 6)


# ---- recognised at the limit point of a case


def at(eps1, eps2, coulomb, masses=(), fundamental=(), adjoint=()):
    node = {
        "coulomb": coulomb,
        "antifundamental": list(masses),
        "fundamental": list(fundamental),
        "adjoint": list(adjoint),
    }
    return minimal_point(own_setting(make_case(eps1, eps2, [node])))


SPINS = ["3*eps1/2 + 5*eps2/2", "(eps1 + eps2)/2"] * 2


@pytest.mark.parametrize("scale", [Fraction(1), Fraction(1, 7), Fraction(-2, 3)])
@pytest.mark.parametrize("label", [(1, 1), (1, 2), (1, 3), (2, 1), (2, 2), (2, 3)])
def test_any_scale_and_any_label(scale, label) -> None:
    r, s = label
    coulomb = [f"({r}*eps1 + {s}*eps2)/2 + t/7", f"-({r}*eps1 + {s}*eps2)/2 - t/7"]
    point = at(str(4 * scale), str(-3 * scale), coulomb, SPINS)
    assert (point.model, point.label) == (model((3, 4)), label)
    (one,) = point.four_points
    assert one.fields == ((1, 2),) * 4
    assert one.internal == model((3, 4)).canonical(label)
    # (1 - x)^(2 m0 m1 / (eps1 eps2)) with m0 = m1 = (1, 2) + eps/2: -1/24 of the Ising cases.
    assert one.exponent == Rational(-1, 24)
    assert point.fusion_holds == one.fusion_holds == (one.internal != (1, 2))


def test_the_sum_of_the_coulomb_parameters_and_fundamentals() -> None:
    shifted = ["3*eps1/2 + 5*eps2/2 - 2/9", "(eps1 + eps2)/2 - 2/9"]
    # A fundamental of mass m is the antifundamental of mass eps - m.
    point = at("4", "-3", ["(eps1 + eps2)/2 + 2/9", "-(eps1 + eps2)/2 + 2/9"], shifted)
    assert point.four_points == ()
    reflected = ["-eps1/2 - 3*eps2/2 + 2/9", "(eps1 + eps2)/2 + 2/9"]
    point = at("4", "-3", ["(eps1 + eps2)/2 + 2/9", "-(eps1 + eps2)/2 + 2/9"], shifted, reflected)
    (one,) = point.four_points
    assert (one.fields, one.internal, one.exponent) == (((1, 2),) * 4, (1, 1), Rational(-1, 24))


@pytest.mark.parametrize("pair", [(2, 5), (3, 4)])
def test_every_way_to_make_pairs_says_the_same(pair) -> None:
    """Z knows nothing of the pairs: where four masses are degenerate fields in two ways, the fusion rules hold in both
    or in none, as they are zeros of the same product over the masses."""
    one, several = model(pair), 0
    p, q = pair
    for fields in product(one.labels(), repeat=4):
        n = [one.number(label) for label in fields]
        doubled = [n[1] + n[0], n[1] - n[0], n[2] + n[3], n[2] - n[3]]
        masses = [str(Fraction(x + q - p, 2)) for x in doubled]
        for label in one.labels():
            number = one.number(label)
            point = at(str(q), str(-p), [f"{number}/2 + t/7", f"-({number}/2) - t/7"], masses)
            several += len(point.four_points) > 1
            assert len({way.fusion_holds for way in point.four_points}) == 1
            rules = one.canonical(label) in one.fuse(*fields[:2]) and one.canonical(label) in one.fuse(*fields[2:])
            assert point.fusion_holds == rules
            assert fields in {way.fields for way in point.four_points}
    assert several


@pytest.mark.parametrize(
    ("eps", "coulomb"),
    [
        (("4", "3"), ["1/2", "-1/2"]),
        (("4", "-1"), ["1/2", "-1/2"]),
        (("1", "-3"), ["1/2", "-1/2"]),
        (("1", "-1"), ["t/3", "-t/3"]),
        (("4", "-3"), ["1/3", "-1/3"]),
        (("4", "-3"), ["t/5", "-t/5"]),
        (("4", "-3"), ["2 + t", "-2 - t"]),
        (("4", "-3"), ["7/2 + t/5", "-7/2"]),
        (("4", "-3"), ["i/2", "-i/2"]),
        (("4", "-3"), ["1/2", "-1/2", "0"]),
        (("4", "-3"), ["1/2"]),
    ],
)
def test_no_minimal_point(eps, coulomb) -> None:
    assert at(*eps, coulomb) is None


def test_no_fields_without_four_flavours() -> None:
    for node in ([], SPINS[:3], ["1/3", *SPINS[1:]], [*SPINS, "1/2"], ["i", "-i", *SPINS[2:]]):
        point = at("4", "-3", ["1/2", "-1/2"], node)
        assert (point.label, point.four_points, point.fusion_holds) == ((1, 1), (), False)
    assert at("4", "-3", ["1/2", "-1/2"], SPINS, adjoint=["1/2"]).four_points == ()
    two = [{"coulomb": ["1/2", "-1/2"]}, {"coulomb": ["0"]}]
    assert minimal_point(own_setting(make_case("4", "-3", two))) is None
