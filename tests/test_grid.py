"""`ratomega grid` and `ratomega.grid`: values at points against outside values, poles, sums, output, bad input."""

from __future__ import annotations

import contextlib
import csv
import io
import json
import math
from fractions import Fraction

import mpmath
import plain
import pytest
import sympy
from building import plain_number, plain_theory

import ratomega
from ratomega.case.setting import own_setting
from ratomega.cli.main import main
from ratomega.errors import InputError
from ratomega.exact.quadratic import Quadratic

B1 = {"eps1": 1, "eps2": 1}
PURE = {"charge": 2, "symbols": ["a"], "background": B1, "node": [{"coulomb": ["a", "-a"]}]}


def run(*words):
    out, err = io.StringIO(), io.StringIO()
    with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err), pytest.raises(SystemExit) as stopped:
        main(["grid", *words])
    return stopped.value.code, out.getvalue(), err.getvalue()


def cells(text):
    return list(csv.DictReader(io.StringIO(text)))


def u2(*masses, charge=3, eps2=1, symbols=("a",), **more):
    node = {"coulomb": ["a", "-a"], "antifundamental": list(masses), **more}
    return {"charge": charge, "symbols": list(symbols), "background": {"eps1": 1, "eps2": eps2}, "node": [node]}


# ---- values ----

CASES = {
    "four flavours, b = 1": (u2("1/2", "1/3", "5/7", charge=2, fundamental=["2/5"]), {"a": "1/5, i/7, -3/4"}),
    "two flavours, ratio -3/2": (u2("1/2", "1/3", eps2="-3/2"), {"a": "1/5, 3/7 + i/7, sqrt(2)/3"}),
    "adjoint, ratio 2": (u2(eps2=2, adjoint=["1/3"], charge=2), {"a": "1/5, i/7"}),
    "a mass as well": (u2("m", "m + 1/3", symbols=("a", "m"), charge=2), {"a": "1/5, i/7", "m": "1/2, 3/11"}),
    "three colours": (
        {"charge": 2, "symbols": ["a"], "background": B1, "node": [{"coulomb": ["a", "1/3", "-a"]}]},
        {"a": "1/5, 3/7*i"},
    ),
    "two nodes": (
        {
            "charge": 2,
            "symbols": ["a", "b"],
            "background": B1,
            "node": [
                {"name": "left", "coulomb": ["a", "-a"], "antifundamental": ["1/7"]},
                {"name": "right", "coulomb": ["b"]},
            ],
            "edge": [{"from": "left", "to": "right", "mass": "2/9"}],
        },
        {"a": "1/5, 2/5", "b": "1/3, 1/11"},
    ),
}


@pytest.mark.parametrize("name", CASES)
def test_values_against_the_plain_reference(name):
    """Whatever the way: by functions, and limits at the points where those are few."""
    mapping, at = CASES[name]
    case = ratomega.load_case(mapping)
    few = {symbol: texts.split(",")[:1] for symbol, texts in at.items()}
    many = {symbol: [*texts.split(","), *(f"{n}/{101 + n}" for n in range(1, 60))] for symbol, texts in at.items()}
    if len(at) > 1:
        many = {symbol: values[:12] for symbol, values in many.items()}
    functions, points = ratomega.grid(mapping, many), ratomega.grid(mapping, few)
    assert (functions.way, points.way) == ("functions", "points")
    found = {(row.point, row.charge): row.value for row in functions}
    assert all(found[row.point, row.charge] == row.value for row in points)
    for row in ratomega.grid(mapping, at):
        theory = plain_theory(own_setting(case.at(**dict(zip(case.symbols, row.point, strict=True)))))
        expected = plain.laurent_coefficient(theory, row.charge).get(0, 0)
        assert plain_number(row.value) == expected
        assert plain_number(found[row.point, row.charge]) == expected


def test_values_against_sympy():
    """The functions of `limit` with the numbers put in by sympy."""
    mapping = u2("1/2", "1/3")
    limits = ratomega.limit(mapping)
    for row in ratomega.grid(mapping, {"a": "1/7 + i/3 to 2 + i/3 in 3"}):
        (point,) = row.point
        expected = limits[row.charge].value.sympy().subs(sympy.Symbol("a"), number(point))
        assert abs(sympy.N(expected - number(row.value), 60, maxn=400)) < sympy.Float("1e-50")


def number(value):
    if isinstance(value, Quadratic):
        return number(value.x) + number(value.y) * sympy.sqrt(value.d)
    return sympy.Rational(int(value.p), int(value.q))


def test_one_colour_against_the_binomial_series():
    """U(1) with two antifundamentals: (1 + q)^((a + m1)(a + m2)/(eps1 eps2)) (N. Nekrasov, hep-th/0206161)."""
    node = {"coulomb": ["a"], "antifundamental": ["1/3", "m"]}
    mapping = {"charge": 4, "symbols": ["a", "m"], "background": {"eps1": 2, "eps2": -1}, "node": [node]}
    found = ratomega.grid(mapping, {"a": "-1 to 2 in 7", "m": [0, "5/2"]})
    assert len(found.rows) == 7 * 2 * 5
    for row in found:
        a, m = (Fraction(str(x)) for x in row.point)
        exponent = (a + Fraction(1, 3)) * (a + m) / -2
        expected = Fraction(1)
        for n in range(row.charge[0]):
            expected *= (exponent - n) / (n + 1)
        assert Fraction(str(row.value)) == expected


def test_poles_are_rows_with_a_note():
    """Pure U(2) at eps1 = eps2 = 1: Z_1 = -1/(2 (a^2 - 1)); Z_2 = (8 a^2 - 33)/((4a^2 - 4)(4a^2 - 9)^2)
    (R. Flume, R. Poghossian, hep-th/0208176)."""
    found = ratomega.grid(PURE, {"a": "1/2 to 3/2 by 1/2"})
    assert found.exit_status == 1
    assert found.missing == 3
    assert [(str(row.point[0]), row.charge[0], str(row.value), row.note) for row in found] == [
        ("1/2", 0, "1", ""),
        ("1/2", 1, "2/3", ""),
        ("1/2", 2, str(Fraction(8, 4) - 33).replace("-31", "31/192"), ""),
        ("1", 0, "1", ""),
        ("1", 1, "None", "pole of order 1"),
        ("1", 2, "None", "pole of order 1"),
        ("3/2", 0, "1", ""),
        ("3/2", 1, "-2/5", ""),
        ("3/2", 2, "None", "pole of order 2"),
    ]
    with pytest.raises(ValueError, match="there is no value: pole of order 2"):
        complex(found.rows[-1])
    status, out, err = run("free-momentum", "--charge", "1", "--at", "a = 1, -1/2")
    assert (status, err) == (1, "")
    assert out == "a,charge,value,note\n1,0,1,\n1,1,,pole of order 1\n-1/2,0,1,\n-1/2,1,-5/18,\n"


def test_a_point_where_numerator_and_denominator_vanish():
    """Z_1 = (D + ...)/(2(a^2 - 1)) with two masses: at a = 1 the numerator vanishes for one m."""
    mapping = u2("m", "m", symbols=("a", "m"), charge=1)
    numerator = sympy.sympify(str(ratomega.limit(mapping)[1].value)).as_numer_denom()[0]
    zeros = sympy.solve(numerator.subs(sympy.Symbol("a"), 1), sympy.Symbol("m"))
    rows = ratomega.grid(mapping, {"a": [1, "1/3"], "m": [str(zeros[0]), "3/7"]})[1]
    assert [row.note.partition(":")[0] for row in rows] == ["0/0", "pole", "", ""]


# ---- decimals and sums ----


def test_decimals_hold_the_exact_value():
    exact = ratomega.grid(PURE, {"a": "1/3 to 1/3 + 2*i in 5"})
    shown = ratomega.grid(PURE, {"a": "1/3 to 1/3 + 2*i in 5"}, digits=30)
    assert all(row.value is None and row.decimals is not None for row in shown)
    with mpmath.workdps(60):
        for one, two in zip(exact, shown, strict=True):
            value = one.value if isinstance(one.value, Quadratic) else Quadratic(one.value, one.value * 0, -1)
            for part, text in ((value.x, two.decimals.real), (value.y, two.decimals.imaginary)):
                error = abs(mpmath.mpf(int(part.p)) / int(part.q) - mpmath.mpf(text))
                assert error <= mpmath.mpf(two.decimals.radius) < mpmath.mpf(10) ** -29
            assert complex(one) == pytest.approx(complex(two), rel=1e-15)


def test_sums_against_the_plain_reference():
    mapping = u2("1/2", "1/3", charge=3)
    q = Fraction(2, 7)
    for point, row in zip(("1/5", "3/7"), ratomega.grid(mapping, {"a": "1/5, 3/7"}, q="2/7"), strict=True):
        theory = plain_theory(own_setting(ratomega.load_case(mapping).at(a=point)))
        terms = [Fraction(str(plain.laurent_coefficient(theory, (k,)).get(0, 0))) * q**k for k in range(4)]
        assert Fraction(str(row.value)) == sum(terms)
        bound = abs(terms[2]) + abs(terms[3])
        assert bound <= Fraction(row.last) <= bound * Fraction(102, 100)
        assert row.charge is None


def test_sums_of_two_nodes_have_a_parameter_each():
    mapping, _ = CASES["two nodes"]
    at = {"a": ["1/5"], "b": ["1/3"]}
    values = {row.charge: Fraction(str(row.value)) for row in ratomega.grid(mapping, at)}
    (row,) = ratomega.grid(mapping, at, q="1/3, 1/5")
    third, fifth = Fraction(1, 3), Fraction(1, 5)
    assert Fraction(str(row.value)) == sum(z * third**k * fifth**n for (k, n), z in values.items())
    (both,) = ratomega.grid(mapping, at, q="1/3")
    assert Fraction(str(both.value)) == sum(z * third ** (k + n) for (k, n), z in values.items())
    boxed = ratomega.grid({**mapping, "charge": [1, 1]}, at, q="1/3, 1/5")
    last = sum(abs(z) * third**k * fifth**n for (k, n), z in values.items() if max(k, n) < 2)
    assert last <= Fraction(boxed.rows[0].last) <= last * Fraction(102, 100)


def test_a_ball_for_q_holds_every_sum_inside():
    at = {"a": "1/3, i/2"}
    ball = ratomega.grid(PURE, at, q="0.3 + 0.1*i +/- 1e-6", digits=20)
    for row, low, high in zip(
        ball,
        ratomega.grid(PURE, at, q="0.299999 + 0.099999*i"),
        ratomega.grid(PURE, at, q="0.300001 + 0.100001*i"),
        strict=True,
    ):
        for end in (low, high):
            assert abs(complex(end) - complex(row)) <= math.sqrt(2) * float(row.decimals.radius)
        assert 1e-7 < float(row.decimals.radius) < 1e-4


def test_a_point_and_q_of_two_fields_are_summed_in_balls():
    (row,) = ratomega.grid(PURE, {"a": ["sqrt(2)/3"]}, q="i/5", digits=40)
    with mpmath.workdps(60):
        a2, q = mpmath.mpf(2) / 9, mpmath.mpc(0, 1) / 5
        expected = 1 - q / (2 * (a2 - 1)) + q**2 * (8 * a2 - 33) / ((4 * a2 - 4) * (4 * a2 - 9) ** 2)
        assert abs(mpmath.mpf(row.decimals.real) - expected.real) <= mpmath.mpf(row.decimals.radius)
        assert abs(mpmath.mpf(row.decimals.imaginary) - expected.imag) <= mpmath.mpf(row.decimals.radius)
        assert mpmath.mpf(row.decimals.radius) < mpmath.mpf(10) ** -39


def test_last_terms_are_not_hidden_by_a_symmetry():
    """H of four equal fields has even orders alone: the last one is not nothing because order 3 is."""
    mapping = u2("11/9", "1", "11/9", "1", charge=3)
    (row,) = ratomega.grid(mapping, {"a": ["1/3"]}, nome=True, q="1/2")
    values = [Fraction(str(one.value)) for one in ratomega.grid(mapping, {"a": ["1/3"]}, nome=True)]
    assert values[1] == values[3] == 0 != values[2]
    assert Fraction(row.last) >= abs(values[2]) / 4 > 0


def test_a_sum_at_a_pole_says_at_which_charge():
    found = ratomega.grid(PURE, {"a": "1, 3/2, 2"}, q="1/9")
    assert [row.note for row in found] == ["charge 1: pole of order 1", "charge 2: pole of order 2", ""]
    status, out, err = run("free-momentum", "--at", "a = 3/2", "--q", "1/9", "--digits", "8")
    assert (status, err) == (1, "")
    assert out.splitlines() == [
        "a,a real,a imaginary,real,imaginary,radius,last terms,note",
        "3/2,1.5,0,,,,,charge 2: pole of order 1",
    ]


# ---- contour integrals ----


def test_an_integral_along_the_imaginary_line():
    """Z_1(i P) = 1/(2 (P^2 + 1)) for pure U(2) at b = 1, and the integral of exp(-P^2)/(P^2 + 1) is pi e erfc(1). The
    trapezoidal rule with step h misses terms of size exp(-2 pi/h) (the pole is at distance 1) and exp(-(pi/h)^2)."""
    found = ratomega.grid({**PURE, "charge": 1}, {"a": "0 to 12*i by i/12"}, digits=40)
    with mpmath.workdps(50):
        h = mpmath.mpf(1) / 12
        values = [mpmath.mpf(row.decimals.real) for row in found[1]]
        total = h * sum((2 if n else 1) * z * mpmath.exp(-((n * h) ** 2)) for n, z in enumerate(values))
        expected = mpmath.pi * mpmath.e * mpmath.erfc(1) / 2
        assert abs(total - expected) < mpmath.mpf(10) ** -31


def test_crossing_symmetry_of_a_liouville_correlator():
    """Four equal fields at c = 25, of momentum 1/9: the integral over P of C C |block|^2 is symmetric under x -> 1 - x.

    Structure constants: H. Dorn, H. Otto, hep-th/9403141; A. Zamolodchikov, Al. Zamolodchikov, hep-th/9506136; at b = 1
    Upsilon(x) is G(x) G(2 - x) up to a constant, G of Barnes. With H left out the symmetry is broken by 1e-3.
    """
    mapping = u2("11/9", "1", "11/9", "1", charge=6)
    with mpmath.workdps(18):
        momentum, h, last = mpmath.mpf(1) / 9, mpmath.mpf(1) / 6, 16
        weight = 1 - momentum**2

        def upsilon(x):
            return mpmath.barnesg(x) * mpmath.barnesg(2 - x)

        def constants(s):
            below = upsilon(1 - 2 * momentum + s) * upsilon(1 - 2 * momentum - s) * upsilon(1 + s) * upsilon(1 - s)
            return (upsilon(2 + 2 * s) * upsilon(2 - 2 * s) / below**2).real

        measure = [(2 if n else 1) * h * constants(mpmath.mpc(0, n * h)) for n in range(last + 1)]
        whole, bare = [], []
        for x in (mpmath.mpf(2) / 5, mpmath.mpf(3) / 5):
            nome = mpmath.exp(-mpmath.pi * mpmath.ellipk(1 - x) / mpmath.ellipk(x))
            q = f"{mpmath.nstr(16 * nome, 18)} +/- 1e-17"
            found = ratomega.grid(mapping, {"a": "0 to 16/6*i by i/6"}, nome=True, digits=16, q=q)
            # |16 q_e|^(2 P^2) theta_3^(2 (12 - 16 weight)) [x (1 - x)]^...; the last factor is symmetric itself.
            theta = mpmath.jtheta(3, 0, nome) ** (24 - 32 * weight)
            gauss = [m * (16 * nome) ** (2 * (n * h) ** 2) for n, m in enumerate(measure)]
            values = [mpmath.mpf(row.decimals.real) for row in found]
            assert all(float(row.last) < 1e-8 for row in found)
            whole.append(theta * sum(g * z**2 for g, z in zip(gauss, values, strict=True)))
            bare.append(theta * sum(gauss))
        assert abs(whole[0] / whole[1] - 1) < 1e-8
        assert abs(bare[0] / bare[1] - 1) > 5e-4


# ---- the way ----


def test_the_rule_of_the_way():
    """Limits at the points while they are no more than interpolation asks for; never at a resonance."""
    mapping = u2("1/2", "1/3")
    needed = 6
    rational = [f"1/{n}" for n in range(2, 2 + needed)]
    assert ratomega.grid(mapping, {"a": rational}).way == "points"
    more = ratomega.grid(mapping, {"a": [*rational, "1/99"]})
    assert (more.way, more.why.split(",")[0]) == ("functions", "7 points")
    assert ratomega.grid(mapping, {"a": "i"}).way == "points"
    assert ratomega.grid(mapping, {"a": "i, i/2"}).why.startswith("2 points, counted as 8, more than the 6 limits")
    resonant = ratomega.grid(mapping, {"a": "1/3, 2"})
    assert resonant.way == "functions"
    assert "not every component is compact at a = 2" in resonant.why
    few = ratomega.grid(mapping, {"a": rational})
    assert few.checks[0].verdict.value == "proved"
    assert [row.value for row in few] == [row.value for row in more][: len(few.rows)]
    # Equal Coulomb parameters are tilted and no resonance.
    assert ratomega.grid(mapping, {"a": "0"}).way == "points"


def test_where_functions_are_too_much_limits_at_points_still_go():
    mapping = u2("1/2", "1/3", charge=25)
    with pytest.raises(InputError, match="the functions of a need"):
        ratomega.grid(mapping, {"a": "1/3 to 2/3 in 100"})
    (row,) = ratomega.grid(mapping, {"a": "1/3"})[24]
    assert row.value == ratomega.limit(ratomega.load_case(mapping).at(a="1/3"))[24].value


def test_h_by_both_ways_and_as_a_block_has_it():
    mapping = u2("1/2", "1/3", "5/7", "2/5", charge=3)
    few = ratomega.grid(mapping, {"a": "1/3, 2/7"}, nome=True)
    many = ratomega.grid(mapping, {"a": "1/3, 2/7, i/2, i, 3*i, 2*i, 5*i"}, nome=True)
    assert (few.way, many.way, few.of, few.variable) == ("points", "functions", "H", "16 q_e")
    assert few.rows == many.rows[: len(few.rows)]
    block = ratomega.block(ratomega.load_case(mapping).at(a="1/2*sqrt(-1)"))
    assert [row.value for row in many.rows[8:12]] == [one.elliptic for one in block]


# ---- output ----


def test_numbers_stay_numbers_and_formulas_are_guarded():
    status, out, _ = run("free-momentum", "--charge", "1", "--at", "a = -1/2, -i/3, sqrt(2)/9 - 1")
    assert status == 0
    rows = cells(out)
    assert [row["a"] for row in rows][::2] == ["-1/2", "'-1/3*sqrt(-1)", "'-1 + 1/9*sqrt(2)"]
    assert [row["value"] for row in rows[1:4:2]] == ["-5/18", "-7/20"]
    assert rows[5]["value"].startswith("'-")
    status, out, _ = run("free-momentum", "--charge", "1", "--at", "a = -1/2, -i/3", "--digits", "6")
    rows = cells(out)
    for column in ("real", "imaginary", "radius", "a real", "a imaginary"):
        assert all(math.isfinite(float(row[column])) for row in rows)
    assert (rows[1]["a real"], rows[3]["a imaginary"], rows[1]["real"]) == ("-0.5", "-0.333333", "-0.277778")


def test_hostile_names_stay_text():
    mapping = {
        "title": "=1+1",
        "charge": 1,
        "symbols": ["a"],
        "background": B1,
        "node": [{"name": "=cmd|' /C calc'!A0", "coulomb": ["a"]}, {"name": "@x,\"y", "coulomb": ["1/5"]}],
    }
    text = ratomega.grid_csv(ratomega.grid(mapping, {"a": "1/3"}))
    rows = list(csv.reader(io.StringIO(text)))
    assert rows[0] == ["a", "charge =cmd|' /C calc'!A0", 'charge @x,"y', "value", "note"]
    assert all(len(row) == 5 for row in rows)


RESULTS = [
    {"at": {"a": "1/3, i/2, 1"}},
    {"at": {"a": "1/3, i/2, 1"}, "digits": 12},
    {"at": {"a": "1/3, 1"}, "q": "1/7"},
    {"at": {"a": "1/3, 1"}, "q": "1/7 + i +/- 1e-9", "digits": 12},
    {"at": {"a": "1/3"}},
]


@pytest.mark.parametrize("asked", RESULTS, ids=str)
def test_every_result_reads_back_equal(asked):
    result = ratomega.grid(PURE, **asked)
    text = ratomega.to_json(result)
    again = ratomega.load_result(text)
    assert again == result
    assert ratomega.to_json(again) == text
    assert ratomega.grid_csv(again) == ratomega.grid_csv(result)


def test_the_command_prints_what_python_computes():
    words = ["--at", "a = 0 to i in 3", "--digits", "9", "--q", "0.25", "--charge", "2"]
    status, out, err = run("free-momentum", *words, "--json")
    case = ratomega.load_case("free-momentum").with_charge(2)
    result = ratomega.grid(case, {"a": "0 to i in 3"}, digits=9, q="0.25")
    assert (status, err) == (0, "")
    assert ratomega.load_result(out) == result
    assert run("free-momentum", *words)[1] == ratomega.grid_csv(result)
    # The background of the case can be another one, as everywhere.
    case = {**u2("1/2", "1/3", eps2=-2), "charge": 1}
    _, out, _ = run("free-momentum", "--eps2", "-2", "--charge", "1", "--at", "a = 1/3")
    assert [row["value"] for row in cells(out)] == [str(row.value) for row in ratomega.grid(case, {"a": "1/3"})]


@pytest.mark.parametrize(
    "damage",
    [
        lambda d: d["rows"].pop(),
        lambda d: d["rows"][1].update(place=[1]),
        lambda d: d["rows"][1].update(charge=[2]),
        lambda d: d["rows"][1].update(value="1.5"),
        lambda d: d["rows"][1].update(note="pole"),
        lambda d: d["rows"][1].update(real="1", imaginary="0", radius="0"),
        lambda d: d["rows"][1].pop("value"),
        lambda d: d["at"].update(b=["1"]),
        lambda d: d["at"].update(a="1/3"),
        lambda d: d.update(way="guess"),
        lambda d: d.update(of="W"),
        lambda d: d.update(q=[1]),
        lambda d: d.update(digits="9"),
    ],
)
def test_a_damaged_document_is_refused(damage):
    document = json.loads(ratomega.to_json(ratomega.grid(PURE, {"a": "1/3, 1/2"})))
    damage(document)
    with pytest.raises(InputError, match="not a result of ratomega"):
        ratomega.load_result(json.dumps(document))


def test_a_document_whose_axis_has_a_value_twice_is_refused():
    """As a grid that is asked for; rows name their points by places, which two equal values would share."""
    document = json.loads(ratomega.to_json(ratomega.grid(PURE, {"a": "1/3, 1/2"})))
    document["at"]["a"] = ["1/3", "1/3"]
    with pytest.raises(InputError, match='"at" lists a value twice'):
        ratomega.load_result(json.dumps(document))


# ---- bad input ----


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (["free-momentum"], "no values are given for a"),
        (["free-momentum", "--at", "0 to 1 in 3"], "names no symbol"),
        (["free-momentum", "--at", "b = 1/3", "--at", "a = 1/3"], 'no symbol "b"'),
        (["free-momentum", "--at", "a = 1/3", "--at", "a = 1/5"], "given twice"),
        (["free-momentum", "--at", "a = 0 to 1"], "how many"),
        (["free-momentum", "--at", "a = 0 to 1 in 50000"], "20000 values"),
        (["free-momentum", "--at", "a = x"], "unknown name"),
        (["free-momentum", "--at", "a = 1/3", "--digits", "0"], "between 1 and 1000"),
        (["free-momentum", "--at", "a = 1/3", "--digits", "1001"], "between 1 and 1000"),
        (["free-momentum", "--at", "a = 1/3", "--digits", "x"], "integer"),
        (["free-momentum", "--at", "a = 1/3", "--q", "x"], "unknown name"),
        (["free-momentum", "--at", "a = 1/3", "--q", "1/3, 1/5"], "1 expected, 2 given"),
        (["free-momentum", "--at", "a = 1/3", "--q", "0.1 +/- 1e-9"], "say to how many digits"),
        (["free-momentum", "--at", "a = sqrt(2)", "--q", "i"], "two quadratic fields"),
        (["free-momentum", "--at", "a = 1/3", "--nome"], "this node has 2 flavours and 0 adjoints"),
        (["u2-pure", "--at", "a = 1/3"], "this case has none"),
        (["vacuum-degenerate", "--at", "a = 1/3"], "this case has none"),
        (["free-momentum", "--at", "a = 0 to 1 in 20000", "--charge", "20"], "420000 values"),
        (["free-momentum", "--at", "a = 1/3", "--charge", "400"], "configurations"),
        (["free-momentum", "--at", "a = 1/3 to 1 in 500", "--charge", "25"], "need"),
        (["free-momentum", "--at", "a = 0 to 1 in 20000", "--digits", "1000"], "digits in all"),
        (["free-momentum", "--at", "a = 0 to 1/" + 190 * "7" + " in 19000", "--charge", "8"], "ask for digits"),
    ],
)
def test_wrong_words_are_one_sentence(words, said):
    status, out, err = run(*words)
    assert (status, out) == (2, "")
    assert err.startswith("ratomega: ")
    assert err.count("\n") == 1
    assert said in err
    assert len(err) < 600


@pytest.mark.parametrize(
    ("more", "said"),
    [
        ({"at": "a = 1"}, "by symbol"),
        ({"at": {"a": 0.5}}, "text or a list"),
        ({"at": {"a": [0.5]}}, "is not exact"),
        ({"at": {"a": "1/3"}, "digits": True}, "an integer, not bool"),
        ({"at": {"a": "1/3"}, "digits": "9"}, "an integer, not str"),
        ({"at": {"a": "1/3"}, "q": 0.1}, "is not exact"),
        ({"at": {"a": "1/3"}, "q": object()}, "expected an exact number"),
    ],
)
def test_wrong_python_values_are_one_sentence(more, said):
    with pytest.raises(InputError, match=said):
        ratomega.grid(PURE, **more)


def test_a_symbol_that_is_a_column_and_a_pole_everywhere():
    named = {**PURE, "symbols": ["note"], "node": [{"coulomb": ["note", "-note"]}]}
    with pytest.raises(InputError, match="note is a column"):
        ratomega.grid(named, {"note": "1/3"})
    everywhere = {**PURE, "node": [{"coulomb": ["a", "a + 2"]}]}
    with pytest.raises(InputError, match="whatever the symbols are"):
        ratomega.grid(everywhere, {"a": "1/3"})


def test_a_field_mix_at_one_point_is_refused():
    mapping = u2("m", "1/3", symbols=("a", "m"), charge=1)
    with pytest.raises(InputError, match="one quadratic field"):
        ratomega.grid(mapping, {"a": "i", "m": "sqrt(2)"})
