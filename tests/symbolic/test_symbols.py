"""Coefficients as functions of free parameters: published ones, numeric runs at other points, commands, errors."""

from __future__ import annotations

import json

import plain
import pytest
import sympy
from building import make_case, plain_theory, symbolic
from building import symbolic_u2 as u2
from click.testing import CliRunner
from published import charge_one_with_flavours

import ratomega
from ratomega.case.setting import own_setting
from ratomega.chain.job import Job
from ratomega.chain.pipeline import limit_result
from ratomega.cli.main import cli
from ratomega.exact.quadratic import square_root
from ratomega.exact.rational import Rational
from ratomega.symbolic import functions as functions_module
from ratomega.symbolic.functions import Functions, direct_evaluator
from ratomega.symbolic.structure import even_symbols, structure

A, M = sympy.symbols("a m")
FLAVOURS = ["1/2", "1/4", "1/5", "1/7"]


def same(function, expression):
    return sympy.cancel(function.sympy() - expression) == 0


@pytest.mark.parametrize(("e1", "e2"), [("1", "1"), ("1", "2"), ("2", "-3"), ("1/2", "-1/2")])
def test_pure_u2_as_published(e1, e2):
    """Nekrasov hep-th/0206161; Flume, Poghossian hep-th/0208176: the first two coefficients for every a."""
    result = ratomega.limit(u2(eps1=e1, eps2=e2))
    x, y = sympy.Rational(e1), sympy.Rational(e2)
    e = x + y
    assert same(result[1].value, -2 / (x * y * (4 * A**2 - e**2)))
    below = (4 * A**2 - e**2) * (4 * A**2 - (2 * x + y) ** 2) * (4 * A**2 - (x + 2 * y) ** 2)
    assert same(result[2].value, (8 * A**2 - 8 * e**2 - x * y) / (x**2 * y**2 * below))


@pytest.mark.parametrize("ratio", ["1", "2", "-3/4"])
@pytest.mark.parametrize("flavours", [1, 2, 3, 4])
def test_charge_one_with_flavours_as_published(flavours, ratio):
    """U(2): Z_1 eps1 eps2 (4a^2 - e^2) in the symmetric functions of the masses (D'Hoker, Krichever, Phong
    hep-th/9609041 for the leading part; the charge-one sum), in a and one mass together."""
    masses = [M, *(sympy.Rational(x) for x in FLAVOURS[1:flavours])]
    case = u2(antifundamental=["m", *FLAVOURS[1:flavours]], symbols=("a", "m"), charge=1, eps2=ratio)
    assert same(ratomega.limit(case)[1].value, charge_one_with_flavours(masses, sympy.Rational(ratio)))


def test_adjoint_as_published():
    """U(2) with an adjoint at charge 1, and Z = 1 + 2 q + ... at mass 0 (Vafa, Witten hep-th/9408074)."""
    result = ratomega.limit(u2(adjoint=["m"], symbols=("a", "m")))
    e = 2
    assert same(result[1].value, 2 * (M - 1) ** 2 * (1 + M * (e - M) / (4 * A**2 - e**2)))
    assert [c.value.at(m=0) for c in result] == [1, 2, 5]
    assert [c.value.at(m=1) for c in result] == [1, 0, 0]
    # The term linear in the mass at m = eps1 vanishes at the b = 1 point; the square is sum over rectangles.
    assert result[1].value.taylor("m", 1, 1) == (0, 0)
    assert result[1].value.at(a="1/3").taylor("m", 2, 1)[2] == Rational(23, 16)
    assert result[2].value.at(a="1/3").taylor("m", 2, 1)[2] == Rational(14601, 5929)


def test_a_block_known_for_every_momentum():
    """Central charge 25, weights 15/16 (Fateev, Litvinov, Neveu, Onofri 0902.1331), as a function of h:
    from memory at h = 3/7, without the power of x, the coefficients are 1, 3/14, 1131/6272, 13787/87808."""
    masses = ["1/2 + (eps1 + eps2)/2", "(eps1 + eps2)/2"] * 2
    result = ratomega.limit(u2(antifundamental=masses, charge=3))
    # The block is (1 - q)^(-2 m0 m1/(eps1 eps2)) Z with m0 = m1 = 5/4, and h = 1 - a^2.
    # a^2 = 1 - h = 4/7, so a is no rational number.
    z = [c.value.at(a=square_root(7) * Rational(2, 7)) for c in result]
    x = sympy.Symbol("x")
    prefactor = sympy.series((1 - x) ** sympy.Rational(-25, 8), x, 0, 4).removeO()
    block = sympy.expand(prefactor * sum(sympy.Rational(str(c)) * x**n for n, c in enumerate(z)))
    assert [str(block.coeff(x, n)) for n in range(4)] == ["1", "3/14", "1131/6272", "13787/87808"]


# Every kind of matter, several colours and nodes, both signs of the ratio, resonances among fixed colours.
CASES = {
    "two flavours, ratio 2": u2(antifundamental=["1/3"], fundamental=["1/5 + eps1"], eps2="2", charge=3),
    "not centred": u2(coulomb=("a", "1/5 - 2*a"), antifundamental=["a/2"], charge=3),
    "grid on a pole": u2(coulomb=("2*a", "-a"), charge=3),
    "a and a mass": u2(antifundamental=["m", *FLAVOURS[1:]], symbols=("a", "m"), charge=4),
    "three colours": symbolic([{"coulomb": ["a", "0", "-a"]}], charge=4),
    "three colours, one free": symbolic([{"coulomb": ["a", "1/5", "1/7"]}], charge=2, eps2="2"),
    "two free colours": symbolic([{"coulomb": ["a", "b", "-a - b"]}], symbols=("a", "b"), charge=2),
    "equal fixed colours": symbolic([{"coulomb": ["a", "1/3", "1/3"]}], charge=2),
    "negative ratio": u2(antifundamental=["2*a"], eps1="3", eps2="-2", charge=3),
    "quiver": symbolic(
        [{"coulomb": ["a", "-a"]}, {"coulomb": ["b"], "fundamental": ["1/3"]}],
        symbols=("a", "b"), edges=[(1, 2, "1/7")], charge=2,
    ),
    "only masses": symbolic([{"coulomb": ["1/3"], "antifundamental": ["m"], "adjoint": ["n"]}], symbols=("m", "n")),
}  # fmt: skip
POINTS = [{"a": "5/9", "b": "-7/13", "m": "3/8", "n": "8/17"}, {"a": "-31/11", "b": "2/19", "m": "-5", "n": "0"}]


@pytest.mark.parametrize("name", CASES)
def test_numeric_runs_and_the_plain_reference_at_points_not_used(name):
    case = CASES[name]
    result = ratomega.limit(case)
    assert all(c.status == "finite" and c.independence == "theorem" for c in result)
    assert {c.name: c.verdict.value for c in result.checks}["functions of the symbols"] == "agrees"
    for point in POINTS:
        values = {symbol: point[symbol] for symbol in case.symbols}
        there = case.at(**values)
        run = ratomega.limit(there, probes=0)
        theory = plain_theory(own_setting(there))
        for c in result:
            value = c.value.at(**values)
            assert value == run[c.charge].value
            assert value == plain.laurent_coefficient(theory, c.charge).get(0, 0)


@pytest.mark.long
@pytest.mark.parametrize("ratio", ["1", "2"])
@pytest.mark.parametrize("flavours", [[], FLAVOURS])
def test_ten_boxes(flavours, ratio):
    case = u2(antifundamental=flavours, eps2=ratio, charge=10)
    result = ratomega.limit(case)
    assert {c.name: c.verdict.value for c in result.checks}["functions of the symbols"] == "agrees"
    run = ratomega.limit(case.at(a="5/23"))
    assert [c.value.at(a="5/23") for c in result] == [c.value for c in run]


@pytest.mark.parametrize("name", CASES)
def test_documents_read_back(name):
    for command in (ratomega.limit, ratomega.detect, ratomega.validate):
        result = command(CASES[name].with_charge(2))
        text = ratomega.to_json(result)
        assert ratomega.load_result(text) == result
        assert ratomega.to_json(ratomega.load_result(text)) == text


def test_poles_are_where_theory_puts_them():
    """2a = +-(m eps1 + n eps2), m n <= k, and at ratio 1 the multiplicities of m + n = 3 add up."""
    result = ratomega.limit(u2(charge=3))
    assert [(str(p.location), p.order) for p in result[2].value.poles()] == [
        ("-3/2", 2), ("-1", 1), ("1", 1), ("3/2", 2)
    ]  # fmt: skip
    assert {str(p.location) for p in result[3].value.poles()} == {"-2", "-3/2", "-1", "1", "3/2", "2"}
    function = result[1].value
    assert [function.residue(p.location) for p in function.poles()] == [Rational(1, 4), Rational(-1, 4)]


def test_structure_of_the_four_flavour_sum():
    """Charge 2, ratio 1: (m, n) = (1,1), (1,2), (2,1) in both orders of the colours; 2 factors a box and flavour."""
    case = u2(antifundamental=FLAVOURS)
    found = structure(case, (2,))
    assert found.planes == (((-3, 2), 2), ((-1, 1), 1), ((1, 1), 1), ((3, 2), 2))
    assert found.degrees == (6 + 2 * 2,)
    assert found.nodes == (6,)


@pytest.mark.parametrize(
    ("coulomb", "matter", "even"),
    [
        (("a", "-a"), {}, True),
        (("a", "0", "-a"), {"fundamental": ["1/3"]}, True),
        (("a", "-a"), {"antifundamental": ["a", "-a"]}, True),
        (("a", "-a"), {"antifundamental": ["a"]}, False),
        (("a", "1/5"), {}, False),
        (("a + 1", "-a - 1"), {}, False),
    ],
)
def test_when_a_function_is_even(coulomb, matter, even):
    assert even_symbols(u2(coulomb=coulomb, **matter)) == (even,)


def test_symmetry_saves_half_of_the_points():
    even, odd = (
        Functions(u2(coulomb=c), most_configurations=10**6, interpolate=True)
        for c in (("a", "-a"), ("a + 1", "-a - 1"))
    )
    assert even.at((2,)).points == 2
    assert odd.at((2,)).points == 3
    assert same(odd.at((2,)).function, even.at((2,)).function.sympy().subs(A, A + 1))


def test_another_evaluator():
    """The function needs limits alone, wherever they come from."""
    asked = []

    def recording(setting, highest):
        assert highest == (2,)
        values = direct_evaluator(setting, highest)
        asked.append(setting)
        return values

    found = Functions(u2(charge=2), most_configurations=10**6, evaluator=recording, interpolate=True)
    assert found.at((2,)).function == ratomega.limit(u2(charge=2))[2].value
    assert len(asked) == 2 + 2


def test_a_wrong_limit_is_found_out():
    """The points beside the grid catch a value that is no function of the right kind."""

    def wrong(setting, highest):
        values = direct_evaluator(setting, highest)
        spoilt = setting.nodes[0].coulomb[0].constant == Rational(1, 3)
        return lambda charge: values(charge) + (Rational(1, 10**6) if spoilt else 0)

    found = Functions(u2(charge=2), most_configurations=10**6, evaluator=wrong, interpolate=True).at((2,))
    assert len(found.refuted) == 2
    assert not found.confirmed


def test_a_missing_pole_is_found_out(monkeypatch):
    real = functions_module.structure

    def poorer(case, charge):
        found = real(case, charge)
        return type(found)(found.planes[1:-1], found.degrees, found.even)

    monkeypatch.setattr(functions_module, "structure", poorer)
    job = Job.prepare(u2(coulomb=("a", "1/5"), charge=2))
    result = limit_result(job, list(job.limits(probes=0)))
    assert {c.name: c.verdict.value for c in result.checks}["functions of the symbols"] == "refuted"
    assert result.exit_status == 1


def test_the_commands(tmp_path):
    file = tmp_path / "free.toml"
    file.write_text(
        'charge = 1\nsymbols = ["a"]\n[background]\neps1 = "1"\neps2 = "1"\n[[node]]\ncoulomb = ["a", "-a"]\n'
    )
    runner = CliRunner()

    def run(*words):
        return runner.invoke(cli, [*words], standalone_mode=False)

    shown = run("limit", str(file)).stdout
    assert "-1/(2*(a + 1)*(a - 1))" in shown
    assert "symbols  a" in shown
    assert "generic point a = 6/5" in shown
    document = json.loads(run("limit", str(file), "--json").stdout)
    assert document["coefficients"][1]["value"] == "-1/(2*(a + 1)*(a - 1))"
    assert document["case"]["symbols"] == ["a"]
    assert "generic point" in run("detect", str(file)).stdout
    assert "functions of the symbols" in run("validate", str(file)).stdout
    assert isinstance(run("limit", str(file), "--terms", "1").exception, ratomega.InputError)


def test_the_hash_and_the_case():
    free, other = u2(), u2(symbols=("a", "b"))
    assert free.hash != other.hash
    assert free.at(a="1/3") == make_free_of_symbols()
    assert free.at(a="1/3").hash == make_free_of_symbols().hash
    assert other.at(b="7").symbols == ("a",)
    assert free.at(a="eps1/2 + t").theory.nodes[0].coulomb[1].t == -1


def make_free_of_symbols():
    return make_case("1", "1", [{"coulomb": ["1/3", "-1/3"]}])


def problems(make):
    with pytest.raises(ratomega.InputError) as caught:
        make()
    return {(p.where, p.message) for p in caught.value.problems}


@pytest.mark.parametrize(
    ("symbols", "where", "said"),
    [
        ("a", "case: symbols", "expected a list of names"),
        (["a", "a"], "case: symbols[2]", "listed twice"),
        (["t"], "case: symbols[1]", "its own meaning"),
        (["sqrt"], "case: symbols[1]", "its own meaning"),
        (["i"], "case: symbols[1]", "its own meaning"),
        (["lambda"], "case: symbols[1]", "is not a name"),
        (["1a"], "case: symbols[1]", "is not a name"),
        (["a b"], "case: symbols[1]", "is not a name"),
        (["x" * 33], "case: symbols[1]", "is not a name"),
        ([3], "case: symbols[1]", "a name in quotes"),
        (["a", "b", "c", "d"], "case: symbols", "at most 3"),
    ],
)
def test_bad_symbols(symbols, where, said):
    case = {"charge": 1, "symbols": symbols, "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["1/3"]}]}
    found = problems(lambda: ratomega.load_case(case))
    assert any(place == where and said in message for place, message in found), found


@pytest.mark.parametrize(
    ("change", "said"),
    [
        ({"coulomb": ("a", "b")}, "unknown name"),
        ({"coulomb": ("a*a", "-a")}, "multiplies a by a"),
        ({"eps2": "a"}, "only t may occur in eps1 and eps2"),
    ],
)
def test_where_symbols_may_stand(change, said):
    found = problems(lambda: u2(**change))
    assert any(said in message for _, message in found), found


def test_what_has_no_limit_as_a_function_is_refused():
    case = u2(coulomb=("a + 2", "a"))
    assert any("whatever the symbols are" in message for _, message in problems(lambda: ratomega.limit(case)))
    large = u2(coulomb=("a", "1/5"), antifundamental=FLAVOURS, charge=6)
    found = problems(lambda: ratomega.limit(large, most_configurations=500))
    assert any("configurations times points" in message for _, message in found)
    assert any("no symbol" in message for _, message in problems(lambda: u2().at(b=1)))


@pytest.mark.parametrize("value", ["1/(a", "2**2", "b", "import os", "1/(a - a)"])
def test_a_damaged_function_is_refused(value):
    document = json.loads(ratomega.to_json(ratomega.limit(u2(charge=1))))
    document["coefficients"][1]["value"] = value
    with pytest.raises(ratomega.InputError, match="not a result of ratomega"):
        ratomega.load_result(json.dumps(document))
