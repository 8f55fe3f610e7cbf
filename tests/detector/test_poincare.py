"""Poincaré polynomials of clusters against the product formula of Buryak and Feigin and against known spaces."""

from __future__ import annotations

from collections import Counter
from dataclasses import replace

import pytest
from building import make_case
from census import Entry, census

import ratomega
from ratomega.case.setting import own_setting
from ratomega.desk.text import detect_text
from ratomega.detector.clusters import find_clusters
from ratomega.detector.geometry import Compactness
from ratomega.detector.poincare import cell_counts, poincare_polynomial
from ratomega.detector.zeros import scan
from ratomega.weights import Weights

RATIOS = [(1, 1), (1, 2), (2, 1), (2, 3), (1, 3), (3, 4)]


def polynomials(weights, charge):
    """The polynomial of every cluster of one node at one charge."""
    return [poincare_polynomial(weights, c) for c in find_clusters(weights, (charge,), scan(weights, (charge,)))]


def total(found):
    """The sum of polynomials, by power."""
    counts = Counter()
    for one in found:
        counts.update(dict(enumerate(one.coefficients)))
    return {power: count for power, count in counts.items() if count}


def buryak_feigin(step, top, colours=1):
    """The coefficients of t^0 ... t^top of [prod_{step does not divide i} 1/(1-t^i) prod_i 1/(1-q t^(step i))]^colours.

    A. Buryak, B. Feigin, arXiv 1206.5640: the Poincaré polynomials of all components, step = alpha + beta.
    """
    table = [Counter() for _ in range(top + 1)]
    table[0][0] = 1
    for _ in range(colours):
        for i in range(1, top + 1):
            for n in range(i, top + 1):
                for power, count in list(table[n - i].items()):
                    table[n][power + (i % step == 0)] += count
    return [dict(row) for row in table]


def single_colour(alpha, beta):
    return Weights(own_setting(make_case(str(alpha), str(beta), [{"coulomb": ["1/3"]}], charge=12)))


@pytest.mark.parametrize("ratio", RATIOS)
def test_one_colour_against_the_product_formula(ratio):
    weights = single_colour(*ratio)
    for n, expected in enumerate(buryak_feigin(sum(ratio), 12)):
        assert total(polynomials(weights, n)) == expected


def test_one_colour_against_numbers():
    """n = 2..6 at 1:1 and n = 5, 6 at 2:3, expanded by hand from the product formula (Buryak, Feigin 1206.5640)."""
    table = {2: [1, 1], 3: [2, 1], 4: [2, 2, 1], 5: [3, 3, 1], 6: [4, 4, 2, 1]}
    for n, expected in table.items():
        assert total(polynomials(single_colour(1, 1), n)) == dict(enumerate(expected))
    assert total(polynomials(single_colour(2, 3), 5)) == {0: 6, 1: 1}
    assert total(polynomials(single_colour(2, 3), 6)) == {0: 10, 1: 1}


@pytest.mark.parametrize("colours", [2, 3])
def test_generic_colours_multiply(colours):
    """At generic Coulomb parameters the fixed locus is a product over colours, and so is the generating function."""
    entry = Entry(colours, "1:1", "generic", "none")
    for n, expected in enumerate(buryak_feigin(2, entry.top, colours)):
        assert total(polynomials(entry.weights, n)) == expected


@pytest.mark.parametrize("rank", [2, 3, 4])
def test_equal_coulomb_parameters_at_charge_one_give_projective_space(rank):
    """M(N, 1) = C^2 x T*P^(N-1). At eps1 = eps2 the smaller torus fixes the zero section: 1 + q + ... + q^(N-1)."""
    weights = Weights(own_setting(make_case("1", "1", [{"coulomb": ["1/3"] * rank}], charge=1)))
    assert [one.coefficients for one in polynomials(weights, 1)] == [(1,) * rank]


def test_the_resolved_singularity_has_no_polynomial():
    """At eps1 + eps2 = 0 and equal Coulomb parameters T*P^1 is fixed: not compact, cells depend on the direction.

    By hand: weights (x, e - x) and (-x, e + x) at the two points, e = eps1 + eps2 and x = a1 - a2.
    """
    weights = Weights(own_setting(make_case("1", "-1", [{"coulomb": ["1/3", "1/3"]}], charge=1)))
    (cluster,) = find_clusters(weights, (1,), scan(weights, (1,)))
    assert not cluster.compactness.compact
    found = poincare_polynomial(weights, cluster)
    assert (found.coefficients, found.disagreement) == (None, "")
    cells = cell_counts(weights, [m.configuration for m in cluster.members], cluster.dimension)
    assert cells == {
        "eps1 >> eps2 >> Coulomb": (1, 1, 0),
        "eps2 >> eps1 >> Coulomb": (1, 1, 0),
        "Coulomb >> eps1 >> eps2": (0, 2, 0),
    }


def test_directions_that_disagree_refute_compactness():
    weights = Weights(own_setting(make_case("1", "-1", [{"coulomb": ["1/3", "1/3"]}], charge=1)))
    (cluster,) = find_clusters(weights, (1,), scan(weights, (1,)))
    found = poincare_polynomial(weights, replace(cluster, compactness=Compactness(True, "claimed")))
    assert found.coefficients is None
    assert found.disagreement == (
        "cells depend on the direction: 1 + q for eps1 >> eps2 >> Coulomb; 1 + q for eps2 >> eps1 >> Coulomb; "
        "2*q for Coulomb >> eps1 >> eps2"
    )


@pytest.mark.parametrize(
    ("shift", "expected"), [("0", [1, 1, 2, 3, 4, 6, 9, 12]), ("eps1", [1, 2, 2, 4, 6, 8, 12, 16])]
)
def test_resonant_components_have_one_point_of_dimension_zero_each(shift, expected):
    """All compact at 1:1: the constant terms count the components (numbers recomputed from contents in test_census),
    and at q = 1 stands the Euler number of M(2, n): 1, 2, 5, 10, 20, ... (Vafa, Witten hep-th/9408074)."""
    weights = Weights(own_setting(make_case("1", "1", [{"coulomb": [f"1/3 + {shift}", "1/3"]}], charge=7)))
    for n, euler in enumerate([1, 2, 5, 10, 20, 36, 65, 110]):
        found = total(polynomials(weights, n))
        assert found[0] == expected[n]
        assert sum(found.values()) == euler


@pytest.mark.parametrize("entry", census(matter=["none"]), ids=str)
def test_the_census_has_a_polynomial_exactly_where_a_component_is_compact(entry):
    """Poincaré duality, a connected component, as many cells as members."""
    for k in range(min(entry.top, 6) + 1):
        for cluster in find_clusters(entry.weights, (k,), scan(entry.weights, (k,))):
            found = poincare_polynomial(entry.weights, cluster)
            assert found.disagreement == ""
            assert (found.coefficients is not None) == cluster.compactness.compact
            if found.coefficients is not None:
                assert found.coefficients[0] == found.coefficients[-1] == 1
                assert sum(found.coefficients) == cluster.euler_number
                assert len(found.coefficients) == cluster.dimension + 1


def test_detect_says_it_in_text_in_json_and_from_python():
    case = make_case("1", "1", [{"coulomb": ["0"]}], charge=4)
    result = ratomega.detect(case)
    assert [cluster.poincare for cluster in result[4].clusters] == [(1, 1), (1, 1, 1)]
    assert "dimension 2, Poincaré polynomial 1 + q + q^2, compact (" in detect_text(result)
    document = ratomega.to_json(result)
    assert ratomega.load_result(document) == result
    assert '"poincare_why": ""' in document


def test_detect_invents_no_polynomial_where_a_component_is_not_compact():
    case = make_case("1", "-1", [{"coulomb": ["1/3", "1/3"]}], charge=1)
    result = ratomega.detect(case)
    (cluster,) = result[1].clusters
    assert (cluster.compact, cluster.poincare) == (False, None)
    shown = "dimension 2, no Poincaré polynomial, not compact (no member is a sink; a1 - a2 = eps1 + eps2"
    assert shown in detect_text(result)
    assert ratomega.load_result(ratomega.to_json(result)) == result
