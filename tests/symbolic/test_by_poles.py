"""Functions from the pole recursion: against interpolated limits and the plain reference, and when they are taken."""

from __future__ import annotations

import plain
import pytest
from building import plain_theory

import ratomega
from ratomega.case.setting import own_setting
from ratomega.exact.rational import Rational
from ratomega.regulator.poles import functions as dressing_module
from ratomega.regulator.routes import point_values
from ratomega.symbolic import functions as functions_module
from ratomega.symbolic.by_poles import PoleWay, pole_way
from ratomega.symbolic.functions import Functions

MASSES = ["1/3", "2/5 + eps1", "3/7", "1/2 - eps2/3"]
MATTER = {
    f"{n} flavours": {"antifundamental": MASSES[: n - n // 2], "fundamental": MASSES[n - n // 2 : n]} for n in range(5)
}
MATTER["adjoint"] = {"adjoint": ["2/7 + eps1/5"]}
RATIOS = ["1", "2", "1/2", "-3/4"]
CENTRED, SHIFTED = ("a", "-a"), ("2/9 + 3*a/2", "1/5 - 3*a/2 + eps2")


def u2(coulomb=CENTRED, *, charge=4, ratio="1", symbols=("a",), more=(), **matter):
    nodes = [{"name": "n", "coulomb": list(coulomb), **matter}, *more]
    background = {"eps1": "1", "eps2": ratio}
    return ratomega.load_case({"charge": charge, "symbols": list(symbols), "background": background, "node": nodes})


def functions(case, **options):
    return Functions(case, most_configurations=10**7, **options)


def check_equal(case):
    """Interpolation takes limits of the sum over diagrams, which shares no code with the recursion."""
    assert pole_way(case) is not None
    found, expected = functions(case), functions(case, interpolate=True)
    for charge in case.charges:
        one, other = found.at(charge), expected.at(charge)
        assert one.function == other.function
        assert (one.points, len(one.confirmed), one.refuted) == (0, 2, ())
        assert other.points > 0


@pytest.mark.parametrize("ratio", RATIOS)
@pytest.mark.parametrize("matter", MATTER)
@pytest.mark.parametrize(("coulomb", "charge"), [(CENTRED, 4), (SHIFTED, 3)], ids=["centred", "shifted"])
def test_equal_to_the_interpolated_limits(coulomb, charge, matter, ratio):
    check_equal(u2(coulomb, charge=charge, ratio=ratio, **MATTER[matter]))


@pytest.mark.long
@pytest.mark.parametrize("ratio", RATIOS)
@pytest.mark.parametrize("matter", MATTER)
def test_equal_to_the_interpolated_limits_to_charge_five(matter, ratio):
    check_equal(u2(SHIFTED, charge=5, ratio=ratio, **MATTER[matter]))


@pytest.mark.parametrize("matter", ["3 flavours", "4 flavours", "adjoint"])
def test_the_plain_reference(matter):
    case = u2(SHIFTED, charge=3, ratio="2", **MATTER[matter])
    found = ratomega.limit(case)
    theory = plain_theory(own_setting(case.at(a="5/13")))
    for c in found:
        assert c.value.at(a="5/13") == plain.laurent_coefficient(theory, c.charge).get(0, 0)


def test_the_check_tells_the_way():
    def evidence(case):
        return {c.name: c.evidence for c in ratomega.limit(case).checks}["functions of the symbols"]

    by_poles = "from the partial fractions of the pole recursion in (a1 - a2)^2, found"
    low, high = evidence(u2(charge=2)), evidence(u2(charge=9))
    assert low.startswith(f"{by_poles} in exact series; no limit was taken for that; equal to limits of the sum")
    assert high.startswith(f"{by_poles} modulo ")
    assert evidence(u2(antifundamental=["a"], charge=2)).startswith("interpolated from at most ")


def test_nine_boxes_modulo_primes():
    case = u2(charge=9, antifundamental=MASSES[:2])
    way = pole_way(case)
    function = way.function(9)
    assert way.primes > 0
    by_diagrams = point_values(own_setting(case.at(a="5/23")), (9,))
    assert function.at(a="5/23") == by_diagrams((9,))


@pytest.mark.parametrize(
    "case",
    [
        u2(("a", "1/3")),
        u2(("a", "a")),
        u2(("a", "2*a")),
        u2(("a", "-a", "0")),
        u2(("a", "-a"), antifundamental=["a"]),
        u2(("a", "-a"), antifundamental=["m"], symbols=("a", "m")),
        u2(("1/3", "-1/3"), antifundamental=["a"]),
        u2(("i*a", "-i*a")),
        u2(("a + i", "-a - i")),
        u2(("a", "-a"), antifundamental=["1 + i"]),
        u2(("a", "-a"), antifundamental=["1"], adjoint=["1/3"]),
        u2(("a", "-a"), adjoint=["1/3", "1/5"]),
        u2(("a", "-a"), antifundamental=["1"] * 5),
        u2(("a", "-a"), charge=1, more=({"name": "other", "coulomb": ["1/7"]},)),
        u2(("a", "-a"), charge=9, ratio="100000001/100000000"),
    ],
    ids=lambda case: str(case.theory.nodes[0].coulomb),
)
def test_everything_else_is_interpolated(case):
    assert pole_way(case) is None


def test_a_ratio_of_long_numbers_where_exact_series_take_it():
    assert pole_way(u2(ratio="100000001/100000000", charge=8)) is not None


def test_a_wrong_function_is_found_out(monkeypatch):
    class Wrong(PoleWay):
        def function(self, charge):
            return super().function(charge) + (Rational(1, 10**9) if charge == 2 else 0)

    def wrong_way(case):
        way = pole_way(case)
        return Wrong(way.case, way.problem, Rational(2), Rational(0))

    monkeypatch.setattr(functions_module, "pole_way", wrong_way)
    result = ratomega.limit(u2(charge=2))
    assert {c.name: c.verdict.value for c in result.checks}["functions of the symbols"] == "refuted"
    assert result.exit_status == 1


def test_a_wrong_power_of_the_nome_is_found_out(monkeypatch):
    """With four flavours the dressing depends on a; with that factor wrong no function is right from charge 1 on."""
    real = dressing_module._nome_powers

    def twice(problem, length):
        first, *others = real(problem, length)
        return [first, *(p + p for p in others)]

    monkeypatch.setattr(dressing_module, "_nome_powers", twice)
    found = functions(u2(charge=1, **MATTER["4 flavours"])).at((1,))
    assert len(found.refuted) == 2


def test_the_work_is_that_of_two_limits_and_the_generic_point():
    """So charges are within the limit on work that interpolation could not reach."""
    case = u2(charge=6)
    needed = 3 * sum((1, 2, 5, 10, 20, 36, 65))
    Functions(case, most_configurations=needed)
    with pytest.raises(ratomega.InputError, match=f"need {needed} weights"):
        Functions(case, most_configurations=needed - 1)
    with pytest.raises(ratomega.InputError, match="weights"):
        Functions(case, most_configurations=needed, interpolate=True)
