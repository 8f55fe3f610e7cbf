"""Warnings and refusals that follow from the parameters alone, against a search through all small diagrams.

The search writes every configuration of the plain reference and looks at its factors.
"""

from __future__ import annotations

from itertools import product

import plain
import pytest
from building import make_case, plain_theory
from flint import fmpq

import ratomega
from ratomega.case.setting import own_setting
from ratomega.detector.accidents import (
    check_path,
    dead_colours,
    frozen_number_warnings,
    smallest_pair,
    smallest_single,
)
from ratomega.errors import PathError

POINTS = [("1", "1"), ("1", "2"), ("2", "1"), ("3", "2"), ("1", "-1"), ("3", "-2")]
NUMBERS = ["-3", "-2", "-1", "-1/2", "1/2", "1", "2", "5/2", "3", "4"]


def diagrams(most):
    return [d for n in range(most + 1) for d in plain.partitions(n)]


def points_of(lam, mu):
    """(p, q) of the factors x + p eps1 + q eps2 of a bifundamental between two diagrams."""
    for s in plain.boxes(lam):
        yield -plain.leg(mu, s), plain.arm(lam, s) + 1
    for s in plain.boxes(mu):
        yield 1 + plain.leg(lam, s), -plain.arm(mu, s)


def test_the_smallest_diagrams_with_a_factor() -> None:
    """Least numbers of boxes, over all pairs of diagrams with up to 8 boxes, and over all diagrams with themselves."""
    pair, single = {}, {}
    pool = diagrams(8)
    for lam, mu in product(pool, pool):
        boxes = sum(lam) + sum(mu)
        if boxes <= 8:
            for point in points_of(lam, mu):
                pair[point] = min(boxes, pair.get(point, boxes))
    for lam in pool:
        for point in points_of(lam, lam):
            single[point] = min(sum(lam), single.get(point, sum(lam)))
    for p, q in product(range(-9, 10), repeat=2):
        least = smallest_pair(p, q)
        assert least == pair.get((p, q), least)
        assert (least > 8) == ((p, q) not in pair)
        least = smallest_single(p, q)
        assert least == single.get((p, q), 0) or (least > 8 and (p, q) not in single)


# ---- typed numbers on the lattice


def moving_zeros(case, exponent=1) -> bool:
    """Is there a factor within the charge bound that vanishes at the limit point and nowhere else on the path?"""
    theory = plain_theory(own_setting(case))
    ranks = [len(node["coulomb"]) for node in theory["nodes"]]
    return any(
        factor.c == 0 and factor.d != 0
        for charge in case.charges
        for configuration in plain.configurations(ranks, charge)
        for factor, sign in plain.factors(theory, configuration)
        if sign == exponent
    )


@pytest.mark.parametrize("point", POINTS)
@pytest.mark.parametrize("number", NUMBERS)
@pytest.mark.parametrize("charge", [1, 3])
def test_warnings_of_typed_numbers(point, number, charge) -> None:
    """A warning exactly where a numerator vanishes at the end of the path because of a typed number."""
    one = [{"coulomb": ["0"]}]
    cases = [
        make_case(*point, [{"coulomb": ["0"], "antifundamental": [number]}], charge=charge),
        make_case(*point, [{"coulomb": ["0"], "fundamental": [number]}], charge=charge),
        make_case(*point, [{"coulomb": ["0"], "adjoint": [number]}], charge=charge),
        make_case(*point, [*one, *one], charge=charge, edges=[(1, 2, number)]),
        make_case(*point, [{"coulomb": [number]}, *one], charge=charge, edges=[(1, 2, "0")]),
    ]
    for case in cases:
        warnings = frozen_number_warnings(case, own_setting(case))
        assert bool(warnings) == moving_zeros(case)
        assert all("equals" in warning and "stays fixed" in warning for warning in warnings)
        assert set(warnings) <= set(ratomega.limit(case).header.warnings)


@pytest.mark.parametrize("point", POINTS)
@pytest.mark.parametrize("number", NUMBERS)
def test_warnings_of_coulomb_parameters(point, number) -> None:
    """The same for a difference of Coulomb parameters; its factors are those of an edge with mass 0."""
    case = make_case(*point, [{"coulomb": [number, "0"]}], charge=3)
    between = make_case(*point, [{"coulomb": [number]}, {"coulomb": ["0"]}], charge=3, edges=[(1, 2, "0")])
    back = make_case(*point, [{"coulomb": ["0"]}, {"coulomb": [number]}], charge=3, edges=[(1, 2, "0")])
    expected = moving_zeros(between) or moving_zeros(back)
    assert bool(frozen_number_warnings(case, own_setting(case))) == expected


def test_an_expression_that_moves_along_is_no_accident() -> None:
    for mass in ("eps1 + eps2", "-eps2", "2*eps1", "t", "-1 + t/2"):
        case = make_case("1", "1", [{"coulomb": ["0"], "antifundamental": [mass]}], charge=4)
        assert frozen_number_warnings(case, own_setting(case)) == ()
    named = frozen_number_warnings(
        typed := make_case("1", "1", [{"coulomb": ["0"], "antifundamental": ["-1"]}], charge=4), own_setting(typed)
    )
    assert len(named) == 1
    assert "antifundamental m = -1" in named[0]


# ---- colours that never carry a box


@pytest.mark.parametrize(
    ("node", "dead"),
    [
        ({"coulomb": ["1/3", "-1/3"], "antifundamental": ["1/3"]}, [2]),
        ({"coulomb": ["1/3", "-1/3"], "antifundamental": ["1/3", "-1/3"]}, [1, 2]),
        ({"coulomb": ["1/3", "-1/3"], "fundamental": ["1/3 + eps1 + eps2"]}, [1]),
        ({"coulomb": ["1/3 + t", "-1/3"], "antifundamental": ["-1/3 - t"]}, [1]),
        ({"coulomb": ["1/3", "-1/3"], "antifundamental": ["1/3 + t"]}, []),
        ({"coulomb": ["1/3", "-1/3"], "antifundamental": ["-1/3 - eps1"]}, []),
    ],
)
def test_colours_that_never_carry_a_box(node, dead) -> None:
    case = make_case("1", "1", [node], charge=3)
    setting = own_setting(case)
    theory = plain_theory(setting)
    warnings = dead_colours(setting)
    assert [int(text.split("colour ")[1][0]) for text in warnings] == dead
    for configuration in plain.configurations([2], (3,)):
        empty = all(not configuration[0][colour - 1] for colour in dead)
        zero = plain.laurent_weight(theory, configuration, 3) == {}
        assert empty or zero
        if not dead and not any("eps1" in m for m in node.get("antifundamental", [])):
            assert not zero
    assert set(warnings) <= set(ratomega.detect(case).header.warnings)


# ---- paths that stay on the ratio


@pytest.mark.parametrize("point", POINTS)
@pytest.mark.parametrize("difference", ["1/3", "-1/2", "1", "2", "-3", "5"])
@pytest.mark.parametrize("rank", [1, 2])
@pytest.mark.parametrize("moving", [False, True])
def test_a_path_on_the_ratio_is_refused_exactly_where_a_denominator_vanishes(point, difference, rank, moving) -> None:
    """All along the path, that is: of one colour with itself. Between two colours the factor is zero at the end alone,
    or, where the Coulomb parameters move along, they are tilted."""
    e1, e2 = point
    coulomb = ["1/7", f"1/7 + {difference}{f' + {difference}*t' if moving else ''}"][:rank]
    theory = {"eps1": fmpq(int(e1)), "eps2": fmpq(int(e2)), "edges": [], "nodes": [{"coulomb": [fmpq(1, 7)]}]}
    for charge in range(1, 5):
        case = make_case(f"{e1} + {e1}*t", f"{e2} + {e2}*t", [{"coulomb": coulomb}], charge=charge)
        vanishing = any(
            factor == 0 for c in plain.configurations([1], (charge,)) for factor, _ in plain.factors(theory, c)
        )
        if vanishing:
            with pytest.raises(PathError, match="stays on the ratio"):
                check_path(own_setting(case), (charge,))
        else:
            check_path(own_setting(case), (charge,))
        # A path that leaves the ratio is never refused.
        free = make_case(e1, f"{e2} + t", [{"coulomb": coulomb}], charge=charge)
        check_path(own_setting(free), (charge,))
