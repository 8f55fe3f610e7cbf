"""The dictionary between U(2) theories and conformal data, and the exact elimination below it."""

from __future__ import annotations

import pytest
from building import make_case
from flint import fmpq

from ratomega.case.setting import own_setting
from ratomega.conformal.dictionary import (
    Dealing,
    GaugePath,
    SphereBlock,
    TorusBlock,
    conformal_block,
    dealings,
    gauge_path,
    kac_order,
    why_not_covered,
)
from ratomega.conformal.vertex import Vertex, Whittaker
from ratomega.errors import InputError, PathError
from ratomega.exact.path import Linear


def path_of(eps1, eps2, **node) -> GaugePath:
    return gauge_path(own_setting(make_case(eps1, eps2, [node])))


def value(x):
    return x.coefficient(0)


def test_central_charge_and_weights() -> None:
    # Alday, Gaiotto, Tachikawa, arXiv 0906.3219: four flavours of masses m0 ± alpha0 and m1 ± alpha1.
    eps1, eps2 = fmpq(7), fmpq(5)
    area, eps = eps1 * eps2, eps1 + eps2
    m0, alpha0, m1, alpha1, a = fmpq(1, 3), fmpq(2, 7), fmpq(-3, 5), fmpq(1, 11), fmpq(3, 13)
    masses = [str(x) for x in (m0 + alpha0, m0 - alpha0, m1 + alpha1, m1 - alpha1)]
    gauge = path_of("7", "5", coulomb=[str(a), str(-a)], antifundamental=masses)
    dealing = Dealing(left=gauge.flavours[2:], right=gauge.flavours[:2])
    block = conformal_block(gauge, precision=1, dealing=dealing)

    def delta(alpha):
        return alpha * (eps - alpha) / area

    assert isinstance(block, SphereBlock)
    assert isinstance(block.left, Vertex)
    assert isinstance(block.right, Vertex)
    assert value(block.central) == 1 + 6 * eps**2 / area
    assert value(block.internal) == delta(eps / 2 + a)
    assert (value(block.right.field), value(block.right.external)) == (delta(m0), delta(eps / 2 + alpha0))
    assert (value(block.left.field), value(block.left.external)) == (delta(m1), delta(eps / 2 + alpha1))
    # The factor (1 - q)^(2 m0 m1/(eps1 eps2)), its first coefficient.
    assert value(block.dressing.coefficients(1)[1]) == -2 * m0 * m1 / area


def test_one_flavour_and_none() -> None:
    # L_1 = m - eps/2 and L_2 = -eps1 eps2/4 against L_1 = 1, L_2 = 0, with generators eps1 eps2 L_n and q -> -q
    # (Gaiotto, arXiv 0908.0307; Marshakov, Mironov, Morozov, arXiv 0909.2052).
    gauge = path_of("7", "5", coulomb=["1/3", "-1/3"], antifundamental=["2/9"])
    block = conformal_block(gauge, precision=1)
    assert isinstance(block, SphereBlock)
    assert isinstance(block.left, Whittaker)
    assert isinstance(block.right, Whittaker)
    assert (value(block.left.first), value(block.left.second)) == (fmpq(-1, 35), 0)
    assert (value(block.right.first), value(block.right.second)) == (-(fmpq(2, 9) - 6) / 35, fmpq(-1, 140))
    assert [value(x) for x in block.dressing.coefficients(3)] == [1, 0, 0, 0]


def test_adjoint() -> None:
    gauge = path_of("7", "5", coulomb=["1/3", "-1/3"], adjoint=["2/9"])
    block = conformal_block(gauge, precision=1)
    assert isinstance(block, TorusBlock)
    weight = fmpq(2, 9) * (12 - fmpq(2, 9)) / 35
    assert value(block.field) == weight
    assert value(block.dressing.coefficients(1)[1]) == 1 - 2 * weight


def test_everything_moves_along_the_path() -> None:
    gauge = path_of("1", "1 + 2*t", coulomb=["1/3 + t", "-1/3"], antifundamental=["eps2", "t/5"])
    block = conformal_block(gauge, precision=3)
    t = fmpq(1, 10**6)
    eps, area = 2 + 2 * t, 1 + 2 * t
    a = (fmpq(2, 3) + t) / 2
    expected = (eps**2 / 4 - a**2) / area
    series = sum((block.internal.coefficient(n) * t**n for n in range(3)), fmpq(0))
    assert abs(series - expected) < 100 * t**3
    assert block.internal.precision == 3


def test_flavours_are_centred_and_reflected() -> None:
    gauge = path_of("7", "5", coulomb=["1/3", "5/3"], antifundamental=["1/4"], fundamental=["1/9"])
    moving = fmpq(1)
    assert gauge.difference == Linear(fmpq(-4, 3), fmpq(0))
    assert gauge.flavours == (Linear(fmpq(5, 4), fmpq(0)), Linear(13 - fmpq(1, 9), moving))


def test_ways_of_dealing() -> None:
    masses = [Linear(fmpq(n)) for n in range(4)]
    counts = {n: [(len(d.left), len(d.right)) for d in dealings(masses[:n])] for n in range(5)}
    assert counts == {
        0: [(0, 0)],
        1: [(0, 1)],
        2: [(1, 1), (0, 2)],
        3: [(1, 2)] * 3,
        4: [(2, 2)] * 3,
    }
    pairs = {frozenset((frozenset(x.constant for x in d.left), len(d.right))) for d in dealings(masses)}
    assert len(pairs) == 3


@pytest.mark.parametrize(
    ("masses", "states"),
    [
        (["1/2 + i/3", "1/5", "1/2 - i/3", "1/7"], (Vertex, Vertex)),
        (["1/2 + i/3", "1/5", "1/2 - i/3"], (Whittaker, Vertex)),
        (["1/2 + i/3", "1/2 - i/3"], (Whittaker, Vertex)),
        (["1/3", "1/2"], (Whittaker, Whittaker)),
    ],
)
def test_conjugate_masses_stand_together(masses, states) -> None:
    block = conformal_block(path_of("1", "2", coulomb=["i", "-i"], antifundamental=masses), precision=2)
    assert (type(block.left), type(block.right)) == states
    series = [block.internal]
    for end in (block.left, block.right):
        series += [end.field, end.external] if isinstance(end, Vertex) else [end.first, end.second]
    assert all("sqrt" not in str(x) for x in series)


@pytest.mark.parametrize(
    ("node", "reason"),
    [
        ({"coulomb": ["0"]}, "U(1)"),
        ({"coulomb": ["0", "1/3", "1/5"]}, "U(3)"),
        ({"coulomb": ["1/3", "1/5"], "adjoint": ["1/7"], "fundamental": ["1"]}, "one adjoint alone or flavours alone"),
        ({"coulomb": ["1/3", "1/5"], "adjoint": ["1/7", "1/9"]}, "one adjoint alone or flavours alone"),
        ({"coulomb": ["1/3", "1/5"], "antifundamental": ["1", "2", "3", "4", "5"]}, "this node has 5"),
    ],
)
def test_what_is_not_covered(node, reason) -> None:
    setting = own_setting(make_case("1", "2", [node]))
    assert reason in why_not_covered(setting)
    with pytest.raises(InputError, match="covers"):
        gauge_path(setting)


def test_a_quiver_is_not_covered() -> None:
    node = {"coulomb": ["1/3", "-1/3"]}
    setting = own_setting(make_case("1", "2", [node, node], edges=[(1, 2, "1/5")]))
    assert "one gauge node" in why_not_covered(setting)


@pytest.mark.parametrize(
    ("eps", "difference", "orders"),
    [
        # a1 - a2 = r eps1 + s eps2 at the end of the path; every (r, s) with rs up to the level, and both signs, count
        (("1", "1"), "5", [0, 0, 0, 2, 2, 4, 4]),
        (("1", "1"), "-2", [1] * 7),
        (("2", "1"), "5", [0, 1, 2, 2, 2, 2, 2]),
        (("1", "-1"), "0", [2, 2, 2, 4, 4, 4, 4]),
        (("4", "-3"), "-5", [0, 1, 2, 2, 2, 2, 2]),
        (("4", "-3"), "7", [0, 0, 0, 0, 0, 0, 0]),
        (("1", "1"), "1/3", [0] * 7),
        (("1", "1"), "2*i", [0] * 7),
    ],
)
def test_order_of_the_kac_determinant(eps, difference, orders) -> None:
    gauge = path_of(*eps, coulomb=[difference, "t/7"])
    assert [kac_order(gauge, level) for level in range(1, 8)] == orders


def test_a_path_inside_the_kac_determinant_is_refused() -> None:
    one, moving = Linear(fmpq(1)), Linear(fmpq(1), fmpq(1))
    frozen = GaugePath(one, moving, one.scaled(2) + moving, (), None)
    assert kac_order(frozen, 1) == 0
    with pytest.raises(PathError, match=r"2\*eps1 \+ 1\*eps2\) all along the path"):
        kac_order(frozen, 2)
