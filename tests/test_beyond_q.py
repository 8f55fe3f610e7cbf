"""Cases with i and square roots: published formulas, the plain reference with pairs, JSON, what is refused."""

from __future__ import annotations

import json
from random import Random

import plain
import pytest
from building import make_case, plain_number, plain_theory
from click.testing import CliRunner
from flint import fmpq

import ratomega
from ratomega.case.setting import own_setting, probe_setting
from ratomega.cli.main import cli
from ratomega.exact.quadratic import Quadratic, quadratic, square_root
from ratomega.weights import Weights


def u2(a, *, charge=4, eps1="1", eps2="1", **matter):
    return make_case(eps1, eps2, [{"coulomb": [a, f"-({a})"], **matter}], charge=charge)


def texts(case):
    return [str(c.value) for c in ratomega.limit(case)]


def test_imaginary_momentum_without_matter():
    """a = i/2 at the b = 1 point; charges 1 and 2 from Nekrasov hep-th/0206161, Flume, Poghossian hep-th/0208176:
    2/(e^2 - 4a^2) and (8a^2 - 8e^2 - 1)/((4a^2 - e^2)(4a^2 - 9)^2) at e = 2, a^2 = -1/4."""
    values = texts(u2("i/2"))
    assert values[1] == str(fmpq(2) / (4 + 1)) == "2/5"
    assert values[2] == str(fmpq(-2 - 32 - 1) / ((-1 - 4) * (-1 - 9) ** 2)) == "7/100"
    assert values[3:] == ["313/43350", "498379/996356400"]


def test_charge_one_with_four_flavours_and_complex_masses():
    """Z_1 (4a^2 - e^2) = e (s3 + s1 a^2) - 2 (s4 + s2 a^2 + a^4), s the elementary symmetric functions of the masses
    (D'Hoker, Krichever, Phong hep-th/9609041 and the charge-one sum), at central charge 25."""
    m = plain.Pair(1, fmpq(2, 3), -1)
    masses = [m, fmpq(1), m, fmpq(1)]
    s = [fmpq(1), *[fmpq(0)] * 4]
    for x in masses:
        for n in range(4, 0, -1):
            s[n] = s[n] + s[n - 1] * x
    square = fmpq(-1, 4)
    value = ((s[3] + s[1] * square) * 2 - (s[4] + s[2] * square + square * square) * 2) / (4 * square - 4)
    case = u2("i/2", antifundamental=["1+2*i/3", "1", "1+2*i/3", "1"])
    assert value == plain_number(ratomega.limit(case)[1].value)
    assert texts(case)[1] == "-83/72 - 4/3*sqrt(-1)"


def test_quadratic_momentum():
    """a = sqrt(21)/7, 4a^2 = 12/7, in the formulas of the first test."""
    square = fmpq(12, 7)
    values = texts(u2("sqrt(21)/7", charge=2))
    assert values[1] == str(2 / (4 - square))
    assert values[2] == str((2 * square - 32 - 1) / ((square - 4) * (square - 9) ** 2))


def test_u1_exponent_beyond_q():
    """Two flavours: (1+q)^((a+m1)(a+m2)/(eps1 eps2)) (Carlsson, Okounkov 0801.2565), here with exponent i/2."""
    case = make_case("1", "2", [{"coulomb": ["i"], "antifundamental": ["1 - i", "0"]}], charge=3)
    x = square_root(-1) / 2
    expected = [1, x, x * (x - 1) / 2, x * (x - 1) * (x - 2) / 6]
    assert [c.value for c in ratomega.limit(case)] == expected
    verdicts = {c.name: c.verdict.value for c in ratomega.validate(case).checks}
    assert verdicts["U(1) with two flavours"] == "agrees"


# Every multiplet, both signs of the ratio, irrational slopes, resonances between irrational colours, several nodes.
CASES = {
    "four flavours": u2("3/11 + i/5", fundamental=["i", "1/2"], antifundamental=["2*i/3 + eps1", "i*eps2/7 + t"]),
    "adjoint, ratio 2": u2("sqrt(5)/3", eps2="2", adjoint=["1/4 + sqrt(5)"]),
    "irrational slope": u2("1/3 + sqrt(2)*t", adjoint=["sqrt(2)*t/5"]),
    "negative ratio": u2("sqrt(-3)/2", eps1="3", eps2="-2", antifundamental=["eps1/2 + sqrt(-3)"]),
    "equal colours": make_case("1", "1", [{"coulomb": ["sqrt(7)", "sqrt(7)"], "antifundamental": ["1/2"]}], charge=3),
    "pole value": make_case("1", "1", [{"coulomb": ["i + 1 + t/3", "i - 1"], "antifundamental": ["2*i"]}], charge=2),
    "mass on a content": u2("i/2", antifundamental=["-i/2 - eps1", "i/2"], charge=3),
    "three colours": make_case("1", "1", [{"coulomb": ["sqrt(2)", "1/5", "-sqrt(2)/3 + 1"]}], charge=3),
    "quiver": make_case(
        "1", "1", [{"coulomb": ["i/3", "-i/3"]}, {"coulomb": ["1/5"], "fundamental": ["i"]}], edges=[(1, 2, "1/7 - i")]
    ),
}


@pytest.mark.parametrize("name", CASES)
def test_against_the_plain_reference_with_pairs(name):
    case = CASES[name]
    for setting in (own_setting(case), probe_setting(case, 1)):
        theory = plain_theory(setting)
        result = ratomega.limit(case, terms=1, probes=0) if setting == own_setting(case) else None
        for charge in case.charges:
            expected = plain.laurent_coefficient(theory, charge, 1)
            if result is not None:
                found = {power: value for power, value in result[charge].terms if value != 0}
                assert {power: plain_number(value) for power, value in found.items()} == expected
            weights = Weights(setting)
            for configuration in plain.configurations(setting.ranks, charge):
                series = weights.weight(configuration).laurent(0).coefficients()
                one = plain.laurent_weight(theory, configuration, 0)
                assert {p: plain_number(v) for p, v in series.items()} == {p: v for p, v in one.items() if v != 0}


def test_random_numbers_of_random_fields_against_the_plain_reference():
    dice = Random(77)
    for _ in range(6):
        d = dice.choice(["i", "sqrt(-2)", "sqrt(3)", "sqrt(13)"])
        a, b, m, n = (f"{dice.randrange(-9, 10)}/7 + {dice.randrange(-4, 5)}*{d}/3" for _ in range(4))
        node = {"coulomb": [a, b], "antifundamental": [m], "fundamental": [n]}
        case = make_case("1", dice.choice(["1", "2", "-1/3"]), [node], charge=3)
        theory = plain_theory(own_setting(case))
        for c in ratomega.limit(case, probes=0):
            expected = plain.laurent_coefficient(theory, c.charge)
            assert plain_number(c.value) == expected.get(0, fmpq(0))


@pytest.mark.parametrize("name", CASES)
def test_the_conjugate_case_has_the_conjugate_values(name):
    """The weights have rational coefficients: sqrt(d) -> -sqrt(d) in all parameters conjugates every coefficient."""

    def flipped(text):
        return text.replace("sqrt", "0 - sqrt").replace("0 - sqrt", "(-1)*sqrt")

    mapping = json.loads(ratomega.to_json(ratomega.limit(CASES[name], probes=0)))["case"]
    other = ratomega.load_case(json.loads(flipped(json.dumps(mapping))))
    assert other.hash != CASES[name].hash
    if own_setting(other).tilted:
        return
    for one, two in zip(ratomega.limit(CASES[name], probes=0), ratomega.limit(other, probes=0), strict=True):
        value, image = (c.value if c.value is not None else c.leading for c in (one, two))
        assert image == (value.conjugate() if isinstance(value, Quadratic) else value)


def test_clusters_of_irrational_colours():
    """Equal irrational colours meet in contents, colours of different irrational part never do."""
    equal = ratomega.detect(make_case("1", "1", [{"coulomb": ["i", "i"]}], charge=4))
    rational = ratomega.detect(make_case("1", "1", [{"coulomb": ["0", "0"]}], charge=4))
    # From rank 2 at equal colours: 1, 1, 2, 3, 4 clusters at charges 0 to 4.
    assert [c.all_clusters for c in equal.charges] == [c.all_clusters for c in rational.charges] == [1, 1, 2, 3, 4]
    apart = ratomega.detect(make_case("1", "1", [{"coulomb": ["i", "2*i"]}], charge=4))
    generic = ratomega.detect(make_case("1", "1", [{"coulomb": ["1/3", "1/5"]}], charge=4))
    assert [c.all_clusters for c in apart.charges] == [c.all_clusters for c in generic.charges]
    assert [c.singular for c in apart.charges] == [c.singular for c in generic.charges]


@pytest.mark.parametrize("command", [ratomega.limit, ratomega.detect, ratomega.validate])
@pytest.mark.parametrize("name", CASES)
def test_documents_read_back(name, command):
    result = command(CASES[name].with_charge(2))
    text = ratomega.to_json(result)
    assert ratomega.load_result(text) == result
    assert ratomega.to_json(ratomega.load_result(text)) == text


def test_the_hash_covers_the_field_numbers():
    hashes = {u2(a).hash for a in ("i/2", "-i/2", "i/3", "sqrt(2)/2", "sqrt(-2)/2", "1/2")}
    assert len(hashes) == 6
    assert u2("sqrt(-1)/2").hash == u2("i/2").hash == u2("2*i/4").hash


def test_numbers_from_python():
    case = ratomega.load_case(
        {"charge": 1, "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": [square_root(-1) / 2, "-i/2"]}]}
    )
    assert ratomega.limit(case)[1].value == fmpq(2, 5)


def test_command_lines(tmp_path):
    file = tmp_path / "imaginary.toml"
    file.write_text(
        'charge = 2\n[background]\neps1 = "1"\neps2 = "1"\n[[node]]\ncoulomb = ["i/2", "-i/2"]\n'
        'antifundamental = ["1+2*i/3", "1", "1+2*i/3", "1"]\n'
    )
    runner = CliRunner()
    shown = runner.invoke(cli, ["limit", str(file)], standalone_mode=False).stdout
    assert "~-1.15277777778 - 1.33333333333*i" in shown
    document = json.loads(runner.invoke(cli, ["limit", str(file), "--json"], standalone_mode=False).stdout)
    assert document["coefficients"][1]["value"] == "-83/72 - 4/3*sqrt(-1)"
    assert document["case"]["node"][0]["coulomb"] == ["1/2*sqrt(-1)", "-1/2*sqrt(-1)"]
    for command in ("detect", "validate"):
        assert runner.invoke(cli, [command, str(file)], standalone_mode=False).return_value == 0


def refusal(make):
    with pytest.raises(ratomega.InputError) as caught:
        make()
    (problem,) = caught.value.problems
    return problem


def test_the_background_is_rational():
    for eps1, eps2, key in (("i", "1", "eps1"), ("1", "1 + sqrt(2)", "eps2"), ("1", "1 + i*t", "eps2")):
        problem = refusal(lambda eps1=eps1, eps2=eps2: u2("1/3", eps1=eps1, eps2=eps2))
        assert "is not rational" in problem.message
        assert problem.where == f"case: background.{key}"


def test_one_field_a_case():
    problem = refusal(lambda: u2("sqrt(2)", antifundamental=["1", "i"]))
    assert problem.message.startswith("sqrt(2) and i occur together")
    assert problem.where == "case: node[1].antifundamental[2]"
    problem = refusal(lambda: make_case("1", "1", [{"coulomb": ["i"]}] * 2, edges=[(1, 2, "sqrt(3)*eps1")]))
    assert problem.where == "case: edge[1].mass"


@pytest.mark.parametrize("value", ["1*sqrt(8)", "1 + sqrt(2)", "1.5*sqrt(2)", "1*sqrt(2"])
def test_a_damaged_document_is_refused(value):
    document = json.loads(ratomega.to_json(ratomega.limit(u2("i/2", charge=1))))
    document["coefficients"][1]["value"] = value
    with pytest.raises(ratomega.InputError, match="not a result of ratomega"):
        ratomega.load_result(json.dumps(document))


def test_a_value_of_normal_form_is_what_arithmetic_gives():
    assert ratomega.limit(u2("i/2"))[1].value == quadratic(fmpq(2, 5), fmpq(0), -1)
