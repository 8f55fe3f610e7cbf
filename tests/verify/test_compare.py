"""`ratomega compare` and `ratomega.compare`: quantities, equal explanations, luck, documents, exit statuses."""

from __future__ import annotations

import json
import subprocess
import sys
from fractions import Fraction

import faulty_tables
import pytest
from building import make_case
from faulty_tables import decimal, exact_limits, table
from flint import fmpq

import ratomega
from ratomega.desk.compare_text import compare_text
from ratomega.errors import InputError
from ratomega.exact.rational import as_rational
from ratomega.verify.single_entry import misprint
from ratomega.verify.table import read_table

U2 = {
    "charge": 2,
    "background": {"eps1": "1", "eps2": "1"},
    "node": [{"coulomb": ["2/7", "3/11"], "antifundamental": ["1/5", "-3/5"], "fundamental": ["5/4"], "adjoint": []}],
}
FOUR = {
    "charge": 2,
    "background": {"eps1": "1", "eps2": "1"},
    "node": [
        {"coulomb": ["2/7", "-2/7"], "antifundamental": ["1/2", "1/5", "2/7", "7/9"], "fundamental": [], "adjoint": []}
    ],
}
# Fields of Liouville theory: Z has a complex U(1) factor, the block is real.
LIOUVILLE = {
    "charge": 2,
    "background": {"eps1": "1", "eps2": "1"},
    "node": [
        {
            "coulomb": ["i/2", "-i/2"],
            "antifundamental": ["1 + i/4 + i/3", "1 + i/4 - i/3", "1 + i/5 + i/6", "1 + i/5 - i/6"],
        }
    ],
}
THREE = {
    "charge": 2,
    "background": {"eps1": "1", "eps2": "1"},
    "node": [{"coulomb": ["1/3", "-1/3"], "antifundamental": ["1/2", "1/4"], "fundamental": ["1/5"]}],
}
QUIVER = {
    "charge": 2,
    "background": {"eps1": 1, "eps2": 2},
    "node": [{"name": "left", "coulomb": ["2/7"]}, {"name": "right", "coulomb": ["3/11"], "antifundamental": ["1/5"]}],
    "edge": [{"from": "left", "to": "right", "mass": "3/8"}],
}


def kinds(result):
    return [one.kind for one in result.diagnosis]


def run(*words):
    return subprocess.run(
        [sys.executable, "-m", "ratomega", "compare", *words], capture_output=True, text=True, check=False
    )


def as_case_file(tmp_path, mapping):
    node = mapping["node"][0]
    lines = ["charge = 2", "[background]", *(f'{k} = "{v}"' for k, v in mapping["background"].items()), "[[node]]"]
    lines += [f"{key} = {json.dumps(values)}" for key, values in node.items()]
    path = tmp_path / "case.toml"
    path.write_text("\n".join(lines), encoding="utf-8")
    return str(path)


# ---- what the numbers are ----


def test_each_quantity_is_tried_and_found():
    z = exact_limits(FOUR)
    log = faulty_tables.logarithm(z)
    # Z = (1 - q)^(2 m m'/(eps1 eps2)) times the block, m and m' half-sums of pairs of masses:
    # Alday, Gaiotto, Tachikawa, arXiv 0906.3219.
    half = fmpq(1, 2)
    exponent = 2 * (half + fmpq(1, 5)) * half * (fmpq(2, 7) + fmpq(7, 9)) * half
    block = faulty_tables.product(z, faulty_tables.power(-1, -exponent))
    for name, values in (("z", z), ("log", log), ("prepotential", [-x for x in log]), ("block", block)):
        result = ratomega.compare(FOUR, table(values))
        assert (result.quantity, result.agree, kinds(result)) == (name, True, [])
        assert ratomega.compare(FOUR, table(values), as_=name).agree


def test_a_block_taken_for_z_is_a_factor():
    z = exact_limits(U2)
    values = faulty_tables.product(z, faulty_tables.power(-1, fmpq(3, 7)))
    first = ratomega.compare(U2, table(values), as_="z").diagnosis[0]
    assert first.kind == "convention"
    assert first.parameters == (("s", "3/7"),)


def test_what_most_rows_agree_with_is_what_the_numbers_are():
    """Read as a block the two low rows would fit as well, with a U(1) factor of its own."""
    result = ratomega.compare(THREE, {1: "-0.60625", 2: "0.1756574675", 14: "1e-20"})
    assert (result.quantity, [row.agrees for row in result.rows]) == ("z", [True, True, False])
    assert [(one.kind, one.charges) for one in result.diagnosis] == [("single-entry", ((14,),))]


def test_a_row_that_is_too_costly_for_the_diagnosis_counts_in_it():
    """One wrong entry is not two: the other one is at a charge from which nothing is diagnosed."""
    rows = {1: "-0.60625", 2: "0.1756574675", 3: "-0.03205464"}
    one = ratomega.compare(THREE, {**rows, 2: "0.1856574675"})
    assert kinds(one) == ["single-entry"]
    two = ratomega.compare(THREE, {**rows, 2: "0.1856574675", 15: "1e-12", 16: "1e-3"}, as_="z")
    assert (kinds(two), two.used) == (["unexplained"], 3)


def test_one_high_charge_takes_no_diagnosis_of_its_own():
    """Forty thousand configurations: with the diagnosis made from them this would not come to an end."""
    result = ratomega.compare(THREE, {1: "-0.60625", 22: "1e-20"})
    assert (kinds(result), result.used) == (["single-entry"], 1)
    alone = ratomega.compare(THREE, {22: "1e-20"})
    assert (kinds(alone), alone.used) == (["unexplained"], 0)
    assert "charges too high for a diagnosis" in alone.diagnosis[0].sentence


def test_costly_rows_alone_are_asked_for_one_change_and_it_is_said():
    """Several hundred configurations at the least: pairs of changes and noise would take minutes."""
    result = ratomega.compare(THREE, {11: "1.234e-3", 9: "1.234e-3"}, as_="z")
    assert (kinds(result), result.used) == (["unexplained"], 2)
    assert "two changes at once were not looked for" in result.diagnosis[0].sentence


def test_factors_of_blocks_that_are_dealt_in_other_ways_are_not_the_same_change():
    result = ratomega.compare(THREE, {1: "-0.60625", 2: "0.1756574675"}, as_="block")
    assert kinds(result) == ["convention"]
    assert result.diagnosis[0].equal == ()


def test_readings_that_are_not_real_are_passed_over():
    # The block of these weights from the recursion of Al. Zamolodchikov, Theor. Math. Phys. 73 (1987), in ``block``.
    block = {n: str(one.block) for n, one in enumerate(ratomega.block(LIOUVILLE, order=3).coefficients) if n}
    result = ratomega.compare(LIOUVILLE, block)
    assert (result.quantity, result.agree) == ("block", True)
    block[3] = "1/2"
    assert kinds(ratomega.compare(LIOUVILLE, block)) == ["single-entry"]


# ---- rows ----


def test_digits_are_counted_against_those_given():
    result = ratomega.compare("u2-pure", {1: "0.5625", 2: "0.1233819", 3: "0.0152"})
    assert [(row.agrees, row.digits, row.given_digits) for row in result.rows] == [
        (True, 4, 4),
        (True, 7, 7),
        (False, 1, 3),
    ]


def test_an_uncertainty_widens_a_row():
    assert not ratomega.compare("u2-pure", [[1, "0.5640"], [2, "0.123382"]]).agree
    assert ratomega.compare("u2-pure", [[1, "0.5640", "0.0006"], [2, "0.123382"]]).agree


# ---- the diagnosis ----


def test_exact_symmetries_are_not_offered_and_equal_names_are_one_answer():
    adjoint = {**U2, "node": [{"coulomb": ["2/7", "-2/7"], "adjoint": ["1/5"]}]}
    values = [x * (-1) ** k for k, x in enumerate(exact_limits(adjoint))]
    (only,) = ratomega.compare(adjoint, table(values), as_="z").diagnosis
    assert only.changes == ("q -> -q",)
    assert only.equal == ()


def test_an_edit_of_the_case_gives_the_numbers():
    node = dict(U2["node"][0])
    other = {**U2, "node": [{**node, "antifundamental": ["1/5", str(fmpq(2) + fmpq(3, 5))]}]}
    first = ratomega.compare(U2, table(exact_limits(other))).diagnosis[0]
    assert first.kind == "convention"
    assert "fundamental of mass m" in first.changes[0]
    assert first.edits == ('antifundamental = ["1/5", "3/5 + eps1 + eps2"]',)
    corrected = {**U2, "node": [{**node, "antifundamental": ["1/5", "3/5 + eps1 + eps2"]}]}
    assert ratomega.compare(corrected, table(exact_limits(other))).agree


def test_one_cluster_left_out_is_found():
    lost = fmpq(0)
    theory = faulty_tables.on_path(U2)
    for diagrams in (((2,), ()), ((1, 1), ())):
        lost += faulty_tables.plain.laurent_weight(theory, (diagrams,), 0).get(0, fmpq(0))
    values = exact_limits(U2)
    values[2] -= lost
    first = ratomega.compare(U2, table(values), as_="z").diagnosis[0]
    assert first.kind == "dropped-singular"
    assert "one singular cluster of 2 configurations" in first.sentence


def test_one_row_that_agrees_by_luck_changes_nothing():
    values = faulty_tables.at_offset(U2, fmpq(1, 1000))
    rows = table(values)
    rows[2] = (2, decimal(values[2], 2))
    result = ratomega.compare(U2, rows)
    assert [row.agrees for row in result.rows] == [True, False, True, False, False]
    assert kinds(result)[0] == "offset"


def test_two_different_faults_are_unexplained():
    result = ratomega.compare("u2-pure", {1: "0.5625", 2: "0.22338189", 3: "0.2150363", 4: "0.001"})
    assert kinds(result) == ["unexplained"]
    assert result.diagnosis[0].charges[:2] == ((2,), (3,))


def test_a_number_fitted_to_the_only_deviating_row_is_no_explanation():
    values = exact_limits(U2)
    values[1] += fmpq(1, 7)
    result = ratomega.compare(U2, table(values)[:2])
    assert kinds(result) == ["unexplained"]


@pytest.mark.parametrize(
    ("change", "how"),
    [
        (lambda text: f"-{text}", "the sign"),
        (lambda text: f"{text[:-2]}{text[-1]}{text[-2]}", "neighbouring digits exchanged"),
        (lambda text: f"{text[:-4]}{9 - int(text[-4])}{text[-3:]}", "one digit"),
        (lambda text: text[:-4] + text[-3:], "one digit left out or added"),
        (lambda text: text.replace("0.0", "0."), "a factor 10"),
    ],
)
def test_how_an_entry_was_miswritten(change, how):
    # The coefficients of two colours without matter at a = (1/3, -1/3): 9/16, 23409/189728, 142641/9486400.
    rows = {1: "0.5625", 2: "0.123381894", 3: change("0.0150363679")}
    (only,) = ratomega.compare("u2-pure", rows).diagnosis
    assert only.kind == "single-entry"
    assert dict(only.parameters).get("misprint", "") == how


@pytest.mark.parametrize(
    ("given", "value", "how"),
    [
        # One digit, or none that shows at the last place given: any digit is another one, and anything a power of ten.
        ("1e-20", "3e-26", ""),
        ("0.3", "0.7", ""),
        ("-0.3", "0.3", ""),
        ("1.0e-20", "5.1e-27", ""),
        ("0.10", "0.00321", ""),
        ("1.7e-20", "2.2e-23", ""),
        ("1.7e-20", "1.7e-23", "a factor 1000"),
        ("1.7e-20", "2.7e-20", "one digit"),
        ("1.7e-20", "7.1e-20", "neighbouring digits exchanged"),
        ("-1.7e-20", "1.7e-20", "the sign"),
    ],
)
def test_no_story_is_told_about_few_digits(given, value, how):
    (row,) = read_table({1: given}, ["gauge"])
    assert misprint(row, as_rational(value)) == how


def test_the_edit_of_a_quiver_names_its_nodes():
    z = {c.charge: c.value for c in ratomega.limit({**QUIVER, "charge": [2, 2]})}
    turned = {(a, b): decimal(value * (-1) ** b, 12) for (a, b), value in z.items()}
    advice = {one.changes: one.edits for one in ratomega.compare(QUIVER, turned).diagnosis}
    edit = "multiply the coefficient of charge (k_left, k_right) by (-1)^k_right"
    assert advice[("q of right -> -q of right",)] == (edit,)
    turned = {(a, b): decimal(value * (-1) ** (a + b), 12) for (a, b), value in z.items()}
    advice = {one.changes: one.edits for one in ratomega.compare(QUIVER, turned).diagnosis}
    edit = "multiply the coefficient of charge (k_left, k_right) by (-1)^(k_left + k_right)"
    assert advice[("every q -> -q",)] == (edit,)


def test_the_next_orders_of_an_offset_are_said_plainly():
    first = ratomega.compare(U2, table(faulty_tables.at_offset(U2, fmpq(1, 1000)))).diagnosis[0]
    assert first.sentence.endswith("gives all 5 rows (the first derivative alone would miss 4 of them).")


def test_one_row_is_not_all_rows():
    text = compare_text(ratomega.compare(U2, {0: "1"}))
    assert text.endswith("\nthe one row agrees\n")
    assert "\nthe one row deviates\n" in compare_text(ratomega.compare("u2-pure", {1: "0.6625"}))


def test_quivers_too():
    z = {c.charge: c.value for c in ratomega.limit({**QUIVER, "charge": [2, 2]})}
    good = {charge: decimal(value, 12) for charge, value in z.items()}
    assert ratomega.compare(QUIVER, good).agree
    turned = {(a, b): decimal(value * (-1) ** b, 12) for (a, b), value in z.items()}
    first = ratomega.compare(QUIVER, turned).diagnosis[0]
    assert first.kind == "convention"
    assert ("q of right -> -q of right",) in (first.changes, *first.equal)


# ---- what cannot be compared ----


def test_cases_that_have_no_numbers_are_refused():
    with pytest.raises(InputError, match="values for a"):
        ratomega.compare("free-momentum", {1: "1"})
    with pytest.raises(InputError, match="pole survives"):
        ratomega.compare("surviving-pole", {1: "1"})
    with pytest.raises(InputError, match="not real"):
        ratomega.compare("imaginary-momenta", {1: "1"}, as_="z")
    # The adjoint mass makes the block complex as well.
    with pytest.raises(InputError, match="not real"):
        ratomega.compare({**LIOUVILLE, "node": [{"coulomb": ["i/2", "-i/2"], "adjoint": ["i/3"]}]}, {1: "1"})
    with pytest.raises(InputError, match="choose one of"):
        ratomega.compare("u2-pure", {1: "1"}, as_="y")
    with pytest.raises(InputError, match="no conformal block"):
        ratomega.compare("u3-pure", {1: "1"}, as_="block")


# ---- the command ----


def test_documents_read_back_and_have_the_promised_shape(tmp_path):
    values = [x * (-1) ** k for k, x in enumerate(exact_limits(U2))]
    result = ratomega.compare(U2, table(values))
    text = ratomega.to_json(result)
    read = ratomega.load_result(text)
    assert read == result
    document = json.loads(text)
    assert [row["charge"] for row in document["rows"]] == [[0], [1], [2], [3], [4]]
    assert all(isinstance(row["agrees"], bool) and isinstance(row["digits"], int) for row in document["rows"])
    assert document["diagnosis"][0]["kind"] == "convention"
    for key, bad in (("as", "y"), ("used", "3"), ("rows", 1), ("diagnosis", [{"kind": "x"}])):
        with pytest.raises(InputError):
            ratomega.load_result(json.dumps({**document, key: bad}))


def test_exit_statuses(tmp_path):
    case = as_case_file(tmp_path, U2)
    rows = table(exact_limits(U2))
    good, bad, broken = tmp_path / "good.csv", tmp_path / "bad.csv", tmp_path / "broken.csv"
    good.write_text("charge,value\n" + "".join(f"{k},{text}\n" for k, text in rows), encoding="utf-8")
    rows[3] = (3, "1.5")
    bad.write_text("charge,value\n" + "".join(f"{k},{text}\n" for k, text in rows), encoding="utf-8")
    broken.write_text("charge,value\n1,<script>\n", encoding="utf-8")
    assert ratomega.compare(case, good).exit_status == 0
    deviates = run(case, str(bad))
    assert deviates.returncode == 1
    assert "1. single-entry: One coefficient is wrong, at charge 3" in deviates.stdout
    refused = run(case, str(broken), "--json")
    assert refused.returncode == 2
    assert "row 2, column value" in refused.stderr
    assert "error" in json.loads(refused.stdout)


@pytest.mark.parametrize("ends", [((0, 1), (2, 3)), ((0, 2), (1, 3)), ((0, 3), (1, 2))])
def test_a_block_is_known_by_each_way_of_dealing_four_flavours(ends):
    """Z = (1 - q)^s times the block, s = (m_a + m_b)(m_c + m_d)/(2 eps1 eps2) for the masses at the two ends (Alday,
    Gaiotto, Tachikawa 0906.3219): three factors, three series."""
    masses = ["1/3", "1/7", "2/5", "3/11"]
    case = make_case("1", "1", [{"coulomb": ["1/3", "-1/3"], "antifundamental": masses}], charge=3)
    (a, b), (c, d) = ([Fraction(masses[n]) for n in end] for end in ends)
    s = (a + b) * (c + d) / 2
    z = [Fraction(str(one.value)) for one in ratomega.limit(case)]
    # (1 - q)^(-s)
    factor = [Fraction(1)]
    for k in range(1, 4):
        factor.append(factor[-1] * (s + k - 1) / k)
    block = {k: str(sum(factor[k - j] * z[j] for j in range(k + 1))) for k in range(1, 4)}
    found = ratomega.compare(case, block)
    assert (found.agree, found.quantity) == (True, "block")
