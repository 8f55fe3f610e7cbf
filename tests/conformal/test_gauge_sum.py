"""Z of U(2) from Gram matrices against the plain reference, the sum over diagrams and the pole recursion.

The plain reference (tests/plain.py) expands every weight on the case's path and imports nothing from the package. The
sum and the recursion are the package's other two ways; the three share exact arithmetic alone.
"""

from __future__ import annotations

from random import Random

import pytest
from building import make_case, plain_number, plain_theory
from flint import fmpq, fmpq_mat
from plain import coefficient, laurent_coefficient

import ratomega
from ratomega.case.setting import own_setting
from ratomega.conformal.dictionary import dealings, gauge_path
from ratomega.conformal.dressing import Dressing
from ratomega.conformal.gauge_sum import first_singular_level, gauge_coefficients
from ratomega.conformal.gram import verma_module
from ratomega.conformal.vertex import Vertex, state_column, vertex_matrices
from ratomega.exact.laurent import Laurent

# 2, 1/2 and the like are eps2/eps1; generic Coulomb parameters off centre, no colour dead.
RATIOS = [("1", "1"), ("1", "2"), ("2", "1"), ("2", "3"), ("1", "-1"), ("4", "-3"), ("3", "-2")]
COULOMB = ["3/11", "-2/7"]
CENTRED = ["3/11", "-3/11"]
MASSES = ["2/5", "-3/8", "5/9", "7/6"]
THEORIES = {
    "pure": ({"coulomb": COULOMB}, 8),
    "one flavour": ({"coulomb": COULOMB, "antifundamental": MASSES[:1]}, 8),
    "two flavours": ({"coulomb": COULOMB, "antifundamental": MASSES[:1], "fundamental": MASSES[1:2]}, 8),
    "three flavours": ({"coulomb": COULOMB, "antifundamental": MASSES[:2], "fundamental": MASSES[2:3]}, 7),
    "four antifundamentals": ({"coulomb": CENTRED, "antifundamental": MASSES}, 6),
    "two and two": ({"coulomb": COULOMB, "antifundamental": MASSES[:2], "fundamental": MASSES[2:]}, 6),
    "adjoint": ({"coulomb": COULOMB, "adjoint": ["2/5"]}, 5),
}


def gram_values(case, last):
    gauge = gauge_path(own_setting(case))
    assert first_singular_level(gauge, last) == last + 1
    return [z.coefficient(0) for z in gauge_coefficients(gauge, last)]


def three_routes(eps, name) -> None:
    node, last = THEORIES[name]
    case = make_case(*eps, [node], charge=last)
    found = gram_values(case, last)
    assert all(x != 0 for x in found)
    assert found == [c.value for c in ratomega.limit(case, route="direct")]
    assert found == [c.value for c in ratomega.limit(case, route="poles")]


@pytest.mark.parametrize("name", THEORIES)
def test_three_routes_agree(name) -> None:
    three_routes(("1", "1"), name)


@pytest.mark.long
@pytest.mark.parametrize("name", THEORIES)
@pytest.mark.parametrize("eps", RATIOS)
def test_three_routes_agree_at_every_ratio(eps, name) -> None:
    three_routes(eps, name)


@pytest.mark.long
def test_level_10() -> None:
    case = make_case("1", "1", [THEORIES["four antifundamentals"][0]], charge=10)
    assert gram_values(case, 10) == [c.value for c in ratomega.limit(case, route="poles")]


# ---- the plain reference


def plain_point(case):
    theory = plain_theory(own_setting(case))
    nodes = [{key: [x.c for x in xs] for key, xs in node.items()} for node in theory["nodes"]]
    return {"eps1": theory["eps1"].c, "eps2": theory["eps2"].c, "nodes": nodes}


@pytest.mark.parametrize("name", THEORIES)
def test_generic_ratio_every_way_of_dealing(name) -> None:
    # At a ratio without singular weights, box by box. The factor of three flavours, exp(-q m/(eps1 eps2)), was derived
    # as a limit and is confirmed here: every way of dealing the flavours has a factor of its own.
    case = make_case("7", "5", [THEORIES[name][0]])
    expected = [coefficient(plain_point(case), (k,)) for k in range(4)]
    gauge = gauge_path(own_setting(case))
    ways = list(dealings(gauge.flavours)) if gauge.adjoint is None else [None]
    assert len(ways) == {"one flavour": 1, "pure": 1, "adjoint": 1, "two flavours": 2}.get(name, 3)
    for way in ways:
        assert [z.coefficient(0) for z in gauge_coefficients(gauge, 3, dealing=way)] == expected


def on_the_path(case, last) -> int:
    """Everything up to t^0 against the reference on the same path; the worst pole seen."""
    setting = own_setting(case)
    theory, gauge = plain_theory(setting), gauge_path(setting)
    worst = 0
    for way in dealings(gauge.flavours) if gauge.adjoint is None else [None]:
        for k, z in enumerate(gauge_coefficients(gauge, last, dealing=way)):
            found = {n: plain_number(c) for n, c in z.coefficients().items() if n <= 0}
            assert z.precision >= 1
            assert found == laurent_coefficient(theory, (k,)), (k, way)
            worst = max(worst, -z.valuation)
    return worst


QUADRATIC = {
    "imaginary momenta": {"coulomb": ["2*i/5", "-2*i/5"], "antifundamental": ["1/2 + i/3", "1/3", "1/5", "1/2 - i/3"]},
    "root of five": {"coulomb": ["sqrt(5)/3", "1/7"], "antifundamental": ["1/2"], "fundamental": ["sqrt(5)", "1/9"]},
    "imaginary adjoint": {"coulomb": ["1/3", "-1/5"], "adjoint": ["1 + i/2"]},
    "square of a root": {"coulomb": ["sqrt(21)/7", "-sqrt(21)/7"]},
}


@pytest.mark.parametrize("eps", [("1", "1"), ("3", "-2")])
@pytest.mark.parametrize("name", QUADRATIC)
def test_quadratic_fields(eps, name) -> None:
    assert on_the_path(make_case(*eps, [QUADRATIC[name]]), 3) == 0


RESONANT = {
    # (background, node, last, worst pole that survives)
    "a pole at (1,1)": (("1", "1"), {"coulomb": ["1 + t/7", "-1 - t/7"]}, 4, 1),
    "finite and dependent": (("2", "1"), {"coulomb": ["5/2 + t/5", "-5/2 - t/5"],
                             "antifundamental": ["-1/2", "1/2", "3/2", "9/2"]}, 4, 0),
    "a pole, then none": (("2", "1"), {"coulomb": ["3/2 + t/7", "-3/2 - t/7"],
                          "antifundamental": ["7/2", "5/2"]}, 4, 1),
    "c = 1 vacuum": (("1", "-1"), {"coulomb": ["3*t/5", "-3*t/5"], "antifundamental":
                     ["1/2 + (eps1+eps2)/2", "(eps1+eps2)/2"] * 2}, 4, 0),
    "many zeros": (("1", "1"), {"coulomb": ["5/2 + t/3", "-5/2"], "antifundamental": ["1/7", "eps2"]}, 5, None),
    "adjoint": (("1", "-1"), {"coulomb": ["1 + t/3", "-1"], "adjoint": ["1/5 + t"]}, 4, None),
    "beyond Q": (("1", "2"), {"coulomb": ["3/2 + t/3", "-3/2"], "fundamental": ["i/2", "1/3", "1/5"]}, 3, None),
    "both move": (("1 + t", "-2 + t/3"), {"coulomb": ["t/5", "-t"], "antifundamental": ["1/3", "eps2 + t"]}, 4, None),
    "tilted": (("1", "1"), {"coulomb": ["(eps1+eps2)/2", "-(eps1+eps2)/2"], "antifundamental": ["1/3"]}, 4, None),
}  # fmt: skip


@pytest.mark.parametrize("name", RESONANT)
def test_resonances_on_the_path(name) -> None:
    eps, node, last, pole = RESONANT[name]
    case = make_case(*eps, [node])
    assert first_singular_level(gauge_path(own_setting(case)), last) <= last
    worst = on_the_path(case, last)
    assert pole is None or worst == pole


def test_published_values_on_a_path() -> None:
    # Pure U(2) at (1, 1 + t), a = 1 + t/7: Z_1 = 2/(eps1 eps2 (eps^2 - 4a^2)) has a pole of residue 7/10 (Nekrasov
    # hep-th/0206161).
    case = make_case("1", "1 + t", [{"coulomb": ["1 + t/7", "-1 - t/7"]}])
    first = gauge_coefficients(gauge_path(own_setting(case)), 1)[1]
    assert (first.valuation, first.coefficient(-1)) == (-1, fmpq(7, 10))


@pytest.mark.parametrize("seed", range(10))
def test_random_cases_on_their_paths(seed) -> None:
    dice = Random(1000 + seed)

    def number():
        return f"{dice.randrange(-6, 7)}/{dice.choice([1, 1, 2, 3])}"

    def moving():
        slope = f"{dice.randrange(1, 4)}*t/{dice.choice([1, 3, 5])}" if dice.random() < 0.5 else "0"
        return f"{number()} + {slope} + {dice.choice(['0', 'eps1', '-eps2/2'])}"

    eps = dice.choice([("1", "1"), ("1", "2"), ("2", "-3"), ("1", "-1"), ("1 + t", "2 - t")])
    difference = dice.choice([2, 3, -3, 0, 4, 1])
    start = number()
    node = {"coulomb": [f"{start} + {difference} + t/7", start]}
    flavours = dice.randrange(6)
    if flavours == 5:
        node["adjoint"] = [moving()]
    else:
        split = dice.randrange(flavours + 1)
        node["antifundamental"] = [moving() for _ in range(split)]
        node["fundamental"] = [moving() for _ in range(flavours - split)]
    on_the_path(make_case(*eps, [node]), 3)


# ---- a chain of fields


def sides(masses, eps, area):
    """Two antifundamentals of masses m ± b: the fields of Delta(m) and (eps^2/4 - b^2)/A."""
    mean, b = (masses[0] + masses[1]) / 2, (masses[0] - masses[1]) / 2
    return mean, Vertex(number(mean * (eps - mean) / area), number((eps**2 / 4 - b**2) / area))


def number(x) -> Laurent:
    return Laurent.constant(x, precision=1)


def matrix(rows) -> fmpq_mat:
    return fmpq_mat([[x.coefficient(0) for x in row] for row in rows])


def test_a_chain_of_three_fields_is_a_quiver_of_two_nodes() -> None:
    # Alday, Gaiotto, Tachikawa, arXiv 0906.3219: the five-point block, with a factor (1 - q)^(2 m (eps - m')/A) for
    # every run of nodes between two fields, against the quiver box by box. The bifundamental of mass m is the field of
    # Delta(m) between descendants of both nodes.
    eps1, eps2, last = fmpq(7), fmpq(5), 3
    eps, area = eps1 + eps2, eps1 * eps2
    a, b, m = fmpq(2, 7), fmpq(3, 11), fmpq(5, 9)
    flavours = [fmpq(1, 3), fmpq(-2, 5)], [fmpq(3, 8), fmpq(7, 6)]
    nodes = [{"coulomb": [x, -x], "antifundamental": masses} for x, masses in zip((a, b), flavours, strict=True)]
    quiver = {"eps1": eps1, "eps2": eps2, "nodes": nodes, "edges": [(0, 1, m)]}
    charges = [(i, j) for i in range(last + 1) for j in range(last + 1 - i)]
    central = number(1 + 6 * eps**2 / area)
    first, second = (verma_module(number((eps**2 / 4 - x**2) / area), central, last) for x in (a, b))
    (left_mass, left), (right_mass, right) = (sides(masses, eps, area) for masses in flavours)
    middle = vertex_matrices(first, second, number(m * (eps - m) / area), last)

    def block(i, j):
        start, end = ([[x] for x in state_column(*args)] for args in ((first, left, i), (second, right, j)))
        inverses = matrix(first.gram[i]).inv(), matrix(second.gram[j]).inv()
        return (matrix(start).transpose() * inverses[0] * matrix(middle[i, j]) * inverses[1] * matrix(end))[0, 0]

    zero = number(0)
    runs = ((1, 0), left_mass * (eps - m)), ((0, 1), m * right_mass), ((1, 1), left_mass * right_mass)
    values = {charge: block(*charge) for charge in charges}
    for (di, dj), exponent in runs:
        factor = Dressing(zero, number(2 * exponent / area), zero).coefficients(last)
        values = {
            (i, j): sum(
                (factor[n].coefficient(0) * values[i - n * di, j - n * dj]
                 for n in range(last + 1) if i >= n * di and j >= n * dj),
                fmpq(0),
            )
            for i, j in charges
        }  # fmt: skip
    assert values == {charge: coefficient(quiver, charge) for charge in charges}
