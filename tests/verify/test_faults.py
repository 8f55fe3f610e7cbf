"""Tables with one known fault, drawn at random: each is diagnosed as what it is; correct numbers are not accused."""

from __future__ import annotations

import random

import faulty_tables
import pytest
from faulty_tables import BACKGROUNDS, FAULTS, draw_theory

import ratomega

QUICK = [0, 2]


def drawn(fault, seed):
    """The first theory of this seed to which the fault applies: (mapping, table, kinds)."""
    draw = random.Random(f"{fault}/{seed}")
    while True:
        mapping = draw_theory(draw, draw.choice([1, 2, 3]), draw.choice(list(BACKGROUNDS)))
        made = FAULTS[fault](draw, mapping)
        if made is not None:
            return mapping, *made


def check(fault, seed):
    mapping, rows, kinds = drawn(fault, seed)
    result = ratomega.compare(mapping, rows)
    found = [one.kind for one in result.diagnosis]
    if fault in ("correct", "log"):
        assert result.agree
        assert (found, result.exit_status) == ([], 0)
        assert result.quantity == ("log" if fault == "log" else "z")
        return
    assert result.exit_status == 1
    assert found[0] in kinds, (mapping, rows, result.diagnosis)
    assert all(one.fitted < 2 for one in result.diagnosis)


@pytest.mark.parametrize("seed", QUICK)
@pytest.mark.parametrize("fault", FAULTS)
def test_faults(fault, seed):
    check(fault, seed)


@pytest.mark.long
@pytest.mark.parametrize("seed", [seed for seed in range(30) if seed not in QUICK])
@pytest.mark.parametrize("fault", FAULTS)
def test_many_faults(fault, seed):
    check(fault, seed)


@pytest.mark.parametrize("fault", ["offset 1e-3", "offset 1e-4"])
def test_the_offset_is_found(fault):
    mapping, rows, _ = drawn(fault, 100)
    first = ratomega.compare(mapping, rows).diagnosis[0]
    assert dict(first.parameters)["offset"] == {"offset 1e-3": "0.001", "offset 1e-4": "0.0001"}[fault]


def test_the_offset_and_the_precision_of_floats_are_estimated():
    mapping = {"charge": 2, "background": {"eps1": "1", "eps2": "1"}, "node": [{"coulomb": ["1/3", "-1/3"]}]}
    rows = faulty_tables.float_table(faulty_tables.in_floats(mapping, faulty_tables.fmpq(1, 10**6)))
    first = ratomega.compare(mapping, rows).diagnosis[0]
    assert first.kind == "precision-loss"
    assert abs(float(dict(first.parameters)["offset"]) - 1e-6) < 1e-11
    assert dict(first.parameters)["digits"] == "16"


@pytest.mark.parametrize("digits", [1, 2, 3, 5, 8, 15, 30])
def test_correct_numbers_to_any_number_of_digits(digits):
    for seed in range(4):
        draw = random.Random(f"correct to {digits}/{seed}")
        mapping = draw_theory(draw, draw.choice([1, 2, 3]), draw.choice(list(BACKGROUNDS)))
        result = ratomega.compare(mapping, faulty_tables.table(faulty_tables.exact_limits(mapping), digits))
        assert result.agree, result


def test_correct_numbers_of_double_precision_at_a_negative_ratio():
    for seed in range(6):
        draw = random.Random(f"correct floats/{seed}")
        mapping = draw_theory(draw, draw.choice([1, 2, 3]), "-3/4")
        result = ratomega.compare(mapping, dict(enumerate(faulty_tables.in_floats(mapping, 0))))
        assert result.agree, result


def test_lost_precision_is_seen_by_its_growth_where_no_row_shows_the_offset():
    """Without charge 1, which shows the offset at the twelfth digit, and with few digits."""
    mapping = {"charge": 2, "background": {"eps1": "1", "eps2": "1"}, "node": [{"coulomb": ["1/3", "-1/3"]}]}
    values = faulty_tables.in_floats(mapping, faulty_tables.fmpq(1, 10**6))
    rows = [(k, f"{value:.6e}") for k, value in enumerate(values) if k >= 2]
    first = ratomega.compare(mapping, rows, as_="z").diagnosis[0]
    assert first.kind == "precision-loss"
    assert 1e-7 <= float(dict(first.parameters)["offset"]) <= 1e-5


def test_random_numbers_are_unexplained():
    for seed in range(4):
        draw = random.Random(f"junk/{seed}")
        mapping = draw_theory(draw, draw.choice([1, 2]), "1")
        exact = faulty_tables.exact_limits(mapping)
        values = [exact[0], *(x * faulty_tables.fmpq(draw.randint(500, 900), 1000) for x in exact[1:])]
        result = ratomega.compare(mapping, faulty_tables.table(values, draw.choice([3, 4, 12])), as_="z")
        assert [one.kind for one in result.diagnosis] == ["unexplained"], result.diagnosis


def test_what_was_left_out_is_said():
    mapping, rows, _ = drawn("singular terms", 7)
    first = ratomega.compare(mapping, rows).diagnosis[0]
    assert first.changes == ("the singular configurations were left out",)


def test_few_digits_prove_no_explanation():
    """One digit a row: a factor exp(-q/5) and others fit, as something among so many always does."""
    mapping = {**draw_theory(random.Random(0), 2, "1"), "node": [{"coulomb": ["2/7", "-2/7"]}]}
    mapping["node"][0]["antifundamental"] = ["1/2", "1/5"]
    result = ratomega.compare(mapping, {1: "-0.5", 2: "0.06"}, as_="z")
    assert [one.kind for one in result.diagnosis] == ["unexplained"]
