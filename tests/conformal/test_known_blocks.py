"""Known blocks against Gram matrices of irreducible modules (tests/irreducible.py), in every order of the fields.

Sources of the functions: A. Belavin, A. Polyakov, A. Zamolodchikov 1984 (Ising); J. Cardy 1985 (Lee-Yang); D. Friedan,
Z. Qiu, S. Shenker 1985 (tricritical Ising and its supercurrent).
"""

from __future__ import annotations

from fractions import Fraction
from itertools import permutations

import pytest
from irreducible import block

from ratomega.conformal.known_blocks import KNOWN_BLOCKS, blocks_of
from ratomega.conformal.minimal import FourPoint
from ratomega.exact.rational import ZERO, as_fraction

IDS = [known.name for known in KNOWN_BLOCKS]
BY_NAME = {known.name: known for known in KNOWN_BLOCKS}


def fractions(series):
    return [as_fraction(x) for x in series]


def gram(model, internal, fields, level):
    weights = [as_fraction(model.weight(label)) for label in fields]
    values, _ = block(as_fraction(model.central_charge), as_fraction(model.weight(internal)), weights, level)
    return values


@pytest.mark.parametrize("known", KNOWN_BLOCKS, ids=IDS)
def test_the_function_is_the_block(known) -> None:
    assert fractions(known.series(9)) == gram(known.model, known.internal, known.fields, 8)
    # Shorter series are beginnings of longer ones.
    assert known.series(20)[:4] == known.series(4)
    assert known.series(1) == [1]


@pytest.mark.parametrize("known", KNOWN_BLOCKS, ids=IDS)
def test_every_order_of_the_fields(known) -> None:
    """Orders that keep the channel give the moved function; the others are not met."""
    pairs = sorted([sorted(known.fields[:2]), sorted(known.fields[2:])])
    for fields in set(permutations(known.fields)):
        point = FourPoint(known.model, fields, known.internal, ZERO)
        found = [series for one, series in blocks_of(point, 6) if one is known]
        if sorted([sorted(fields[:2]), sorted(fields[2:])]) != pairs:
            assert not found
            continue
        (series,) = found
        assert fractions(series) == gram(known.model, known.internal, fields, 6)


def test_at_most_one_function_a_block() -> None:
    keys = [(known.model, known.fields, known.internal) for known in KNOWN_BLOCKS]
    assert len(set(keys)) == len(keys)
    for known in KNOWN_BLOCKS:
        assert {known.internal} <= set(known.model.fuse(*known.fields[:2])) & set(known.model.fuse(*known.fields[2:]))
        assert all(label in known.model.labels() for label in (*known.fields, known.internal))


def test_no_function_for_another_channel_or_model() -> None:
    spins = BY_NAME["Ising: four spins, identity channel"]
    assert not list(blocks_of(FourPoint(spins.model, spins.fields, (1, 2), ZERO), 4))
    other = BY_NAME["Lee-Yang: phi channel"]
    assert not list(blocks_of(FourPoint(other.model, spins.fields, (1, 3), ZERO), 4))


@pytest.mark.parametrize(
    ("name", "values"),
    [
        ("Ising: four spins, identity channel", "1 0 1/64 1/64 117/8192"),
        ("Ising: four spins, energy channel", "1 1/4 9/64 25/256 613/8192"),
        ("Lee-Yang: identity channel", "1 0 -1/55 -1/55 -9/550"),
        ("Lee-Yang: phi channel", "1 -1/10 -4/75 -9/250"),
    ],
)
def test_first_coefficients_of_published_functions(name, values) -> None:
    """Expanded with sympy from the functions in the papers."""
    expected = [Fraction(x) for x in values.split()]
    assert fractions(BY_NAME[name].series(len(expected))) == expected


def test_four_supercurrents_cross() -> None:
    """C = x^-3 B is the correlator of four fermionic currents of weight 3/2 at 0, x, 1, infinity: a rational
    function with poles of third order that crosses like fermions (Friedan, Qiu, Shenker 1985)."""
    series = fractions(BY_NAME["tricritical Ising: four supercurrents"].series(20))
    cube = (1, -3, 3, -1)
    numerator = [sum(cube[j] * series[n - j] for j in range(min(n, 3) + 1)) for n in range(20)]
    # The numerator over (1 - x)^3 has degree six, and the pole at 1 is that of the unit operator.
    assert not any(numerator[7:])
    assert sum(numerator) == 1

    def four(x):
        return sum(c * x**n for n, c in enumerate(numerator)) / (x * (1 - x)) ** 3

    # The map z -> 1 - z exchanges 0 and 1, z -> 1/z exchanges 0 and infinity and costs x^(-2h). Twelve points are more
    # than the degrees of both sides allow for an accident.
    for x in (Fraction(n, 7) for n in (-9, -8, -6, -5, -3, -2, 2, 3, 5, 8, 9, 10)):
        assert four(x) == four(1 - x) == -four(1 / x) / x**3
    # The stress tensor in the channel: 2 h^2 / c.
    assert series[2] == 2 * Fraction(3, 2) ** 2 / Fraction(7, 10)
