"""Free parameters beside numbers of a quadratic field: published coefficients, numeric runs, conjugation, commands."""

from __future__ import annotations

import csv
import io
import json

import plain
import pytest
import sympy
from building import plain_number, plain_theory, symbolic
from building import symbolic_u2 as u2
from click.testing import CliRunner
from published import charge_one_with_flavours

import ratomega
from ratomega.case.setting import own_setting
from ratomega.cli.main import cli
from ratomega.exact.quadratic import Quadratic, is_quadratic, square_root
from ratomega.symbolic.functions import Functions, direct_evaluator
from ratomega.symbolic.structure import structure

A, M = sympy.symbols("a m")


def equal(one, two):
    (p, q), (r, s) = (sympy.fraction(sympy.together(x)) for x in (one, two))
    return sympy.expand(p * s - r * q) == 0


def values_of(case, charge=None):
    return [c.value for c in ratomega.limit(case if charge is None else case.with_charge(charge))]


C25 = u2(antifundamental=["1+2*i/3", "1", "1+2*i/3", "1"])


def test_the_value_at_central_charge_25():
    """The charge-one sum in symmetric functions of the masses (as in tests/test_beyond_q.py) at a = i/2."""
    function = ratomega.limit(C25)[1].value
    assert str(function.at(a="i/2")) == "-83/72 - 4/3*sqrt(-1)"
    assert function.at(a=square_root(-1) / 2) == ratomega.limit(C25.at(a="i/2"))[1].value
    assert str(function) == "-(9*a**2 + 23 + 24*sqrt(-1))/18"


@pytest.mark.parametrize("ratio", ["1", "2", "-3/4"])
@pytest.mark.parametrize(("flavours", "root"), [(1, "i"), (2, "sqrt(21)"), (3, "i"), (4, "sqrt(-3)")])
def test_charge_one_with_flavours_as_published(flavours, root, ratio):
    """U(2): Z_1 eps1 eps2 (4a^2 - e^2) in the symmetric functions of the masses (D'Hoker, Krichever, Phong
    hep-th/9609041 for the leading part; the charge-one sum), in a and one mass, the others beyond Q."""
    texts = ["m", f"1 + 2*{root}/3", f"{root}/5", "1/7"][:flavours]
    if flavours == 1:
        texts = [f"m - {root}/2"]
    masses = [sympy.sympify(x.replace("i", "I") if root == "i" else x, locals={"m": M}) for x in texts]
    case = u2(antifundamental=texts, symbols=("a", "m"), charge=1, eps2=ratio)
    function = values_of(case)[1]
    assert function.radicand
    assert equal(function.sympy(), charge_one_with_flavours(masses, sympy.Rational(ratio)))


@pytest.mark.parametrize(("e1", "e2"), [("1", "1"), ("1", "2"), ("2", "-3")])
def test_imaginary_momenta_without_matter(e1, e2):
    """a = i p in the first two coefficients of Nekrasov hep-th/0206161; Flume, Poghossian hep-th/0208176: functions
    over Q of p, whose poles are imaginary."""
    z = values_of(u2(coulomb=("i*a", "-i*a"), eps1=e1, eps2=e2))
    x, y = sympy.Rational(e1), sympy.Rational(e2)
    e, square = x + y, -(A**2)
    assert equal(z[1].sympy(), -2 / (x * y * (4 * square - e**2)))
    below = (4 * square - e**2) * (4 * square - (2 * x + y) ** 2) * (4 * square - (x + 2 * y) ** 2)
    assert equal(z[2].sympy(), (8 * square - 8 * e**2 - x * y) / (x**2 * y**2 * below))
    assert z[1].radicand == z[2].radicand == 0
    places = [pole.location for pole in z[1].poles()]
    assert places == sorted(places, key=lambda p: p.y)
    assert [str(sympy.sympify(str(p)) * 2 / sympy.I) for p in places] == [str(-abs(e)), str(abs(e))]


@pytest.mark.parametrize("masses", [["1+i", "1-i"], ["sqrt(5)/2", "-sqrt(5)/2"], ["i/3", "-i/3", "1 + i", "1 - i"]])
def test_conjugate_masses_give_a_function_over_q(masses):
    """Only symmetric functions of the masses enter, so the result has to be that over Q: at charge 1 and 2 it equals
    the plain reference at rational points with pairs, and its text has no root."""
    case = u2(antifundamental=masses)
    for value, charge in zip(values_of(case), case.charges, strict=True):
        assert value.radicand == 0
        assert "sqrt" not in str(value)
        theory = plain_theory(own_setting(case.at(a="5/9")))
        assert value.at(a="5/9") == plain.laurent_coefficient(theory, charge).get(0, 0)


def test_a_shift_beyond_q_leaves_no_trace():
    """a + sqrt(2) and masses less sqrt(2): only differences enter, and the case over Q comes back, text and all."""
    shifted = u2(coulomb=("a + sqrt(2)", "-a + sqrt(2)"), antifundamental=["1/3 - sqrt(2)", "m - sqrt(2)"],
                 fundamental=["1/5 + sqrt(2)"], symbols=("a", "m"))  # fmt: skip
    rational = u2(antifundamental=["1/3", "m"], fundamental=["1/5"], symbols=("a", "m"))
    assert values_of(shifted) == values_of(rational)
    assert [str(x) for x in values_of(shifted)] == [str(x) for x in values_of(rational)]
    # An imaginary shift of a is a shift of the variable.
    moved = values_of(u2(coulomb=("a + i/3", "-a - i/3"), antifundamental=["1/3"]))
    here = values_of(u2(antifundamental=["1/3"]))
    for one, two in zip(moved, here, strict=True):
        assert equal(one.sympy(), two.sympy().subs(A, A + sympy.I / 3))


# Every kind of matter, several colours and nodes, both signs of the ratio, roots in Coulomb parameters and at symbols.
CASES = {
    "four flavours": C25,
    "degenerate mass, ratio 2": u2(antifundamental=["sqrt(21)/7"], fundamental=["1/5 + eps1"], eps2="2"),
    "a and a mass": u2(antifundamental=["m", "i", "1/2 - i/3"], symbols=("a", "m")),
    "root beside a": u2(coulomb=("a + i/2", "-a"), antifundamental=["1/3 + i"]),
    "root at a": u2(coulomb=("(1+sqrt(2))*a", "-a"), antifundamental=["1/3"]),
    "imaginary momentum": u2(coulomb=("i*a", "-i*a"), antifundamental=["1/2", "i"]),
    "adjoint and a colour": u2(coulomb=("a", "sqrt(2)"), adjoint=["m - sqrt(2)/2"], symbols=("a", "m"), charge=1),
    "three colours": symbolic([{"coulomb": ["a", "i", "-a"], "antifundamental": ["i/2"]}]),
    "negative ratio": u2(antifundamental=["2*a + sqrt(-3)"], eps1="3", eps2="-2"),
    "quiver": symbolic(
        [{"coulomb": ["a", "-a"]}, {"coulomb": ["b"], "fundamental": ["i/3"]}],
        symbols=("a", "b"), edges=[(1, 2, "1/7 - i")], charge=2,
    ),
    "equal roots": symbolic([{"coulomb": ["a", "i", "i"]}], charge=1),
}  # fmt: skip
POINTS = {"Q": {"a": "5/9", "b": "-7/13", "m": "3/8"}, "K": {"a": "-3/11 + {}/2", "b": "2*{}/19", "m": "2 - {}/5"}}


def root_of(case):
    numbers = [x for _, parameter in case.theory.parameters() for x in parameter.numbers()]
    return next(f"sqrt({x.d})" for x in numbers if is_quadratic(x))


@pytest.mark.parametrize("name", CASES)
def test_numeric_runs_and_the_plain_reference_at_points_not_used(name):
    case = CASES[name]
    result = ratomega.limit(case)
    assert all(c.status == "finite" and c.independence == "theorem" for c in result)
    assert {c.name: c.verdict.value for c in result.checks}["functions of the symbols"] == "agrees"
    for texts in POINTS.values():
        point = {symbol: texts[symbol].format(root_of(case)) for symbol in case.symbols}
        there = case.at(**point)
        run = ratomega.limit(there, probes=0)
        theory = plain_theory(own_setting(there))
        for c in result:
            value = c.value.at(**point)
            assert value == run[c.charge].value
            assert plain_number(value) == plain.laurent_coefficient(theory, c.charge).get(0, 0)


@pytest.mark.long
def test_four_flavours_to_six_boxes():
    case = u2(antifundamental=["1+2*i/3", "1/7", "1+2*i/5", "1/11 - i"], charge=6)
    run = ratomega.limit(case.at(a="5/23 + i/3"), probes=0)
    assert [c.value.at(a="5/23 + i/3") for c in ratomega.limit(case)] == [c.value for c in run]


@pytest.mark.parametrize("name", CASES)
def test_the_conjugate_case_has_the_conjugate_function(name):
    mapping = json.loads(ratomega.to_json(ratomega.limit(CASES[name].with_charge(1))))["case"]
    other = ratomega.load_case(json.loads(json.dumps(mapping).replace("sqrt", "(-1)*sqrt")))
    for one, two in zip(values_of(CASES[name]), values_of(other.with_charge(CASES[name].charge)), strict=True):
        assert two == one.conjugate()
        if one.radicand == 0:
            assert two == one


@pytest.mark.parametrize("name", CASES)
def test_text_and_documents_read_back(name):
    result = ratomega.limit(CASES[name])
    text = ratomega.to_json(result)
    assert ratomega.load_result(text) == result
    assert ratomega.to_json(ratomega.load_result(text)) == text
    point = {symbol: sympy.Rational(5 + n, 17) for n, symbol in enumerate(CASES[name].symbols)}
    for c in result:
        parsed = sympy.sympify(str(c.value), locals={s: sympy.Symbol(s) for s in point})
        shown = c.value.sympy()
        for expression in (parsed, shown):
            assert equal(expression.subs(point), sympy.sympify(str(c.value.at(**point))))


@pytest.mark.parametrize("command", [ratomega.detect, ratomega.validate, ratomega.explain])
@pytest.mark.parametrize("name", ["a and a mass", "root beside a", "quiver"])
def test_other_results_read_back(name, command):
    result = command(CASES[name].with_charge(1))
    text = ratomega.to_json(result)
    assert ratomega.load_result(text) == result
    assert ratomega.to_json(ratomega.load_result(text)) == text


def test_validate_at_the_generic_point():
    result = ratomega.validate(C25)
    verdicts = {c.name: (c.verdict.value, c.kind.value) for c in result.checks}
    assert verdicts["functions of the symbols"] == ("agrees", "consistency")
    assert verdicts["Gram matrix of Virasoro descendants"][0] == "agrees"
    assert "refuted" not in {verdict for verdict, _ in verdicts.values()}


def test_poles_residues_and_taylor_coefficients():
    """A Coulomb parameter a + i/2 beside -a moves the poles to 2a + i/2 = +-(m + n), m n <= 2."""
    z = values_of(CASES["root beside a"])
    poles = z[2].poles()
    assert [str(p.location) for p in poles] == [
        "-3/2 - 1/4*sqrt(-1)", "-1 - 1/4*sqrt(-1)", "1 - 1/4*sqrt(-1)", "3/2 - 1/4*sqrt(-1)"
    ]  # fmt: skip
    assert [p.order for p in poles] == [2, 1, 1, 2]
    # Moved back by -i/4 it is a case with poles at rational numbers, and residues are the same.
    centred = values_of(u2(coulomb=("a + i/4", "-a + i/4"), antifundamental=["1/3 + i"]))
    for pole in poles:
        assert z[2].residue(pole.location) == centred[2].residue(pole.location + square_root(-1) / 4)
    two = values_of(CASES["a and a mass"])
    series = two[2].taylor("m", 2, "i/3")
    rebuilt = sum((c * (M - sympy.I / 3) ** n for n, c in enumerate(x.sympy() for x in series)), sympy.Integer(0))
    assert equal(rebuilt, two[2].sympy())
    assert two[2].at(m="i/3") == series[0] == values_of(CASES["a and a mass"].at(m="i/3"))[2]


def test_structure_with_planes_beyond_q():
    i = square_root(-1)
    found = structure(CASES["root beside a"], (2,))
    assert found.planes == (
        ((Quadratic(-6 * i.y, i.y, -1), 4), 2), ((Quadratic(-4 * i.y, i.y, -1), 4), 1),
        ((Quadratic(4 * i.y, i.y, -1), 4), 1), ((Quadratic(6 * i.y, i.y, -1), 4), 2),
    )  # fmt: skip
    # i a: 2 i a - (m + n), in the normal form 2 a + (m + n) i.
    assert structure(u2(coulomb=("i*a", "-i*a"), charge=1), (1,)).planes == (
        ((-i, 1), 1), ((i, 1), 1)
    )  # fmt: skip
    # For rational numbers nothing changes: the planes are integers.
    assert structure(C25, (1,)).planes == (((-1, 1), 1), ((1, 1), 1))


def test_a_wrong_irrational_part_is_found_out():
    def wrong(setting, highest):
        values = direct_evaluator(setting, highest)
        spoilt = setting.nodes[0].coulomb[0].constant.q == 3
        return lambda charge: values(charge) + (square_root(-1) / 10**9 if spoilt else 0)

    case = u2(antifundamental=["1 + i"])
    assert not Functions(case, most_configurations=10**6).at((2,)).refuted
    primes = {x.q for x in Functions(case, most_configurations=10**6).grid.axes[0]}
    assert 3 in primes
    assert len(Functions(case, most_configurations=10**6, evaluator=wrong).at((2,)).refuted) == 2


def test_the_commands(tmp_path):
    file = tmp_path / "complex.toml"
    file.write_text(
        'charge = 1\nsymbols = ["a"]\n[background]\neps1 = "1"\neps2 = "1"\n[[node]]\ncoulomb = ["a", "-a"]\n'
        'antifundamental = ["1+2*i/3", "1", "1+2*i/3", "1"]\n'
    )
    text = "-(9*a**2 + 23 + 24*sqrt(-1))/18"

    def run(*words):
        return CliRunner().invoke(cli, [*words], standalone_mode=False)

    assert text in run("limit", str(file)).stdout
    assert json.loads(run("limit", str(file), "--json").stdout)["coefficients"][1]["value"] == text
    assert r"$- \frac{9 a^{2} + 23 + 24 i}{18}$" in run("limit", str(file), "--latex").stdout
    rows = list(csv.DictReader(io.StringIO(run("limit", str(file), "--csv").stdout)))
    assert rows[1]["numerator"] == f"'{text}"
    for command in ("detect", "validate", "explain"):
        assert run(command, str(file)).return_value == 0
    page = tmp_path / "page.html"
    assert run("report", str(file), "-o", str(page)).return_value == 0
    assert text in page.read_text(encoding="utf-8")
    for words in (["average"], ["block"], ["approach"], ["limit", "--route", "poles"], ["limit", "--terms", "1"]):
        problem = run(words[0], str(file), *words[1:]).exception
        assert isinstance(problem, ratomega.InputError)
        assert len(problem.problems) == 1


@pytest.mark.parametrize(
    ("change", "said"),
    [
        ({"coulomb": ("i*a", "-sqrt(2)*a")}, "i and sqrt(2) occur together"),
        ({"antifundamental": ["i", "a + sqrt(3)"]}, "i and sqrt(3) occur together"),
        ({"antifundamental": ["i*a*a"]}, "multiplies"),
        ({"antifundamental": ["i + u"]}, "takes no symbols"),
        ({"eps2": "i"}, "is not rational"),
    ],
)
def test_bad_input(change, said):
    with pytest.raises(ratomega.InputError) as caught:
        u2(**change)
    assert any(said in p.message for p in caught.value.problems), caught.value


def test_a_pole_whatever_the_symbols_are():
    with pytest.raises(ratomega.InputError, match="whatever the symbols are"):
        ratomega.limit(u2(coulomb=("a + i + 2", "a + i")))
    assert ratomega.limit(u2(coulomb=("a + i + 2", "a"), antifundamental=["a"]))[1].status == "finite"


@pytest.mark.parametrize("value", ["sqrt(8)", "sqrt(-1)*sqrt(2)", "sqrt(a)", "1/(sqrt(-1)*a - sqrt(-1)*a)", "i*a"])
def test_a_damaged_function_is_refused(value):
    document = json.loads(ratomega.to_json(ratomega.limit(C25.with_charge(1))))
    document["coefficients"][1]["value"] = value
    with pytest.raises(ratomega.InputError, match="not a result of ratomega"):
        ratomega.load_result(json.dumps(document))


@pytest.mark.parametrize("nome", [False, True])
def test_a_grid_of_values(nome):
    """Values on a grid against limits at the points one by one, and H against Z by its definition."""
    case = u2(antifundamental=["1+2*i/3", "1", "1/2 + i/3", "1/5"], charge=2)
    many = ratomega.grid(case, at={"a": "i/7 to 2*i in 15"}, nome=nome)
    assert many.way == "functions"
    for place in ("1/7*sqrt(-1)", "2*sqrt(-1)"):
        few = ratomega.grid(case, at={"a": [place]}, nome=nome)
        assert few.way == "points"
        for charge in range(3):
            (value,) = (row.value for row in few[charge])
            assert value in [row.value for row in many[charge]]
            if not nome:
                assert value == ratomega.limit(case.at(a=place))[charge].value
    if nome:
        # Order q of Z = (16 q_e/q)^(-a^2) (1-q)^((sum mu + 2)^2/4) theta_3^(2 sum mu^2 - 4) H(16 q_e), eps1 = eps2 = 1,
        # with 16 q_e = q + q^2/2 + ... and theta_3 = 1 + q/8 + ... (Al. Zamolodchikov 1987; R. Poghossian 0909.3412).
        mu = [2 * sympy.I / 3, sympy.Integer(0), sympy.I / 3 - sympy.Rational(1, 2), sympy.Rational(-4, 5)]
        a = 2 * sympy.I
        factor = -(a**2) / 2 - (sum(mu) + 2) ** 2 / 4 + (2 * sum(x**2 for x in mu) - 4) / 8
        z = sympy.sympify(str(ratomega.limit(case.at(a="2*i"))[1].value))
        (row,) = ratomega.grid(case.with_charge(1), at={"a": ["2*i"]}, nome=True)[1]
        assert sympy.expand(z - factor - sympy.sympify(str(row.value))) == 0
    with pytest.raises(ratomega.InputError, match="that of the case"):
        ratomega.grid(case, at={"a": "sqrt(2)"})
    # The pole i/4 - 1 of a + i/2 is named, and at its conjugate there is a value.
    moved = CASES["root beside a"]
    rows = ratomega.grid(moved, at={"a": ["-1 - i/4", "-1 + i/4"] + [f"{n}/29" for n in range(1, 20)]}).rows
    notes = {(str(row.point[0]), row.charge): row.note for row in rows if row.note}
    assert notes == {("-1 - 1/4*sqrt(-1)", (k,)): "pole of order 1" for k in (1, 2)}
