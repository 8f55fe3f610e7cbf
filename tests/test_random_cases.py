"""Twenty random cases from a fixed seed, every coefficient and every path against the plain reference."""

from __future__ import annotations

from random import Random

import pytest
from building import make_case
from on_path import check_result

import ratomega
from ratomega.case.setting import own_setting, probe_setting

# Chosen so that all three outcomes occur among the twenty.
SEED = 2500
CASES = 20
POINTS = [("1", "1"), ("1", "2"), ("2", "1"), ("2", "3"), ("1", "-1"), ("3", "-2")]
POINTS += [("1 + t/2", "-2"), ("-2", "-2 + 3*t")]


def random_number(dice: Random) -> str:
    return f"{dice.randrange(-9, 10)}/{dice.choice([2, 3, 5, 7])}"


def random_mass(dice: Random, coulomb: list[str]) -> str:
    """A number, an expression on the lattice of the background, or one that meets a content."""
    kind = dice.randrange(4)
    if kind == 0:
        return random_number(dice)
    if kind == 1:
        return f"{random_number(dice)} + {dice.randrange(-2, 3)}*eps1 - eps2/{dice.randrange(1, 4)} + t/5"
    sign = "-" if kind == 2 else ""
    lattice = f"{dice.randrange(-2, 2)}*eps1 + {dice.randrange(-2, 2)}*eps2"
    return f"{sign}({dice.choice(coulomb)}) + {lattice}{dice.choice(['', ' + t/3'])}"


def random_coulomb(dice: Random, rank: int) -> list[str]:
    """Each further colour is generic, equal to the one before, or apart from it by a resonance, on the path or not."""
    coulomb = [random_number(dice)]
    for _ in range(rank - 1):
        step = dice.choice(["generic", "equal", "lattice", "pole", "number"])
        if step == "generic":
            coulomb.append(random_number(dice) + " + 1/11")
        elif step == "equal":
            coulomb.append(coulomb[-1])
        elif step == "lattice":
            coulomb.append(f"{coulomb[-1]} + {dice.randrange(-2, 3)}*eps1 + {dice.randrange(-1, 2)}*eps2")
        elif step == "pole":
            coulomb.append(f"{coulomb[-1]} - eps1 - {dice.randrange(1, 3)}*eps2 + t/{dice.randrange(2, 9)}")
        else:
            coulomb.append(f"{coulomb[-1]} + {dice.randrange(1, 4)}")
    return coulomb


def random_node(dice: Random, rank: int) -> dict:
    coulomb = random_coulomb(dice, rank)
    return {
        "coulomb": coulomb,
        "antifundamental": [random_mass(dice, coulomb) for _ in range(dice.randrange(3))],
        "fundamental": [random_mass(dice, coulomb) for _ in range(dice.randrange(2))],
        "adjoint": [random_mass(dice, coulomb[:1]) for _ in range(dice.randrange(4) == 0)],
    }


def random_case(number: int):
    dice = Random(SEED + number)
    nodes = [1, 1, 1, 2, 3][dice.randrange(5)]
    ranks = [dice.randrange(1, 4 if nodes == 1 else 3) for _ in range(nodes)]
    built = [random_node(dice, rank) for rank in ranks]
    edges = []
    for _ in range(0 if nodes == 1 else nodes - 1 + dice.randrange(2)):
        start, end = dice.sample(range(1, nodes + 1), 2)
        edges.append((start, end, random_mass(dice, built[start - 1]["coulomb"])))
    charge = {1: 6, 2: 4, 3: 3}[ranks[0]] if nodes == 1 else 3 if sum(ranks) < 5 else 2
    return make_case(*dice.choice(POINTS), built, charge=charge, edges=edges)


@pytest.mark.parametrize("number", range(CASES))
def test_random_case_against_the_plain_reference(number: int) -> None:
    check_result(ratomega.limit(random_case(number), terms=1, probes=2), last=1)


@pytest.mark.parametrize("number", range(CASES))
def test_random_case_counts_its_singular_weights(number: int) -> None:
    case = random_case(number)
    limits, reports = ratomega.limit(case, probes=0), ratomega.detect(case)
    for coefficient, report in zip(limits, reports.charges, strict=True):
        one = (coefficient.configurations, coefficient.singular, coefficient.indeterminate, coefficient.worst_order)
        assert one == (report.configurations, report.singular, report.indeterminate, report.worst_order)
        assert (coefficient.clusters, coefficient.singular_clusters) == (report.all_clusters, len(report.clusters))


def test_the_random_cases_are_of_every_kind() -> None:
    """Ranks 1 to 3, quivers, matter of every kind, both signs of the ratio, tilts, and all three outcomes."""
    cases = [random_case(number) for number in range(CASES)]
    assert {node.rank for case in cases for node in case.theory.nodes} == {1, 2, 3}
    assert {len(case.theory.nodes) for case in cases} == {1, 2, 3}
    assert {case.background.ratio > 0 for case in cases} == {True, False}
    for kind in ("antifundamental", "fundamental", "adjoint"):
        assert any(getattr(node, kind) for case in cases for node in case.theory.nodes)
    assert any(case.theory.edges for case in cases)
    assert {own_setting(case).tilted for case in cases} == {True, False}
    results = [ratomega.limit(case, probes=2) for case in cases]
    assert {c.status for result in results for c in result} == {"finite", "pole", "path-dependent"}
    assert {c.independence for result in results for c in result} >= {"theorem", "agreement", None}
    # A path is nobody's mirror image: no two of a case are related by a common factor of all tilts.
    for case in cases:
        for node, tilt in probe_setting(case, 1).tilts:
            other = dict(probe_setting(case, 2).tilts)[node]
            assert len({abs(x / y) for x, y in zip(tilt, other, strict=True)}) > 1 or len(tilt) == 2
            assert all(abs(x) != abs(y) for x, y in zip(tilt, other, strict=True))
