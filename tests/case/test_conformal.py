"""The table [conformal]: what is read, every mistake with its place, the central charge, the gauge case behind it."""

from __future__ import annotations

import copy
from fractions import Fraction

import pytest
from flint import fmpq
from hypothesis import given, settings
from hypothesis import strategies as st

import ratomega
from ratomega.case.conformal import ConformalCase, exact_root, gauge_case, squared_ratio
from ratomega.case.conformal_reading import conformal_from_mapping, conformal_to_mapping
from ratomega.case.reading import case_from_text, load_case_as_written
from ratomega.errors import InputError

TEXT = """
title = "mixed"
[conformal]
c = "1/2"
external = [{ weight = "1/16" }, { momentum = "eps1/2 + 2*eps2/2" }, { kac = [1, 2] }, { momentum = "i/3" }]
internal = { weight = "3/7" }
order = 3
"""
GOOD = {
    "title": "four fields",
    "conformal": {"c": 1, "external": [{"weight": "1/16"}] * 4, "internal": {"kac": [2, 1]}, "order": 2},
}


def changed(**conformal):
    data = copy.deepcopy(GOOD)
    data["conformal"] |= conformal
    return data


def said(data):
    with pytest.raises(InputError) as caught:
        conformal_from_mapping(data, where="demo.toml")
    return [problem.text().removeprefix("demo.toml: ") for problem in caught.value.problems]


# ---- central charges


@pytest.mark.parametrize("c", ["1", "25", "1/2", "7/10", "-22/5", "-2", "28", "-7"])
def test_the_ratio_gives_the_central_charge_back(c):
    # c = 1 + 6 (b + 1/b)^2; minimal models have 1 - 6 (p - p')^2/(p p') (Belavin, Polyakov, Zamolodchikov 1984).
    y = Fraction(str(squared_ratio(fmpq(*map(int, (c + "/1").split("/")[:2])))))
    assert abs(y) >= 1
    assert 13 + 6 * (y + 1 / y) == Fraction(c)


def test_ising_and_lee_yang_by_their_integers():
    assert squared_ratio(fmpq(1, 2)) == fmpq(-4, 3)
    assert squared_ratio(fmpq(-22, 5)) == fmpq(-5, 2)


@given(st.integers(-12, 12).filter(bool), st.integers(1, 12))
def test_every_rational_ratio_is_found_again(p, q):
    y = fmpq(p, q)
    assert squared_ratio(13 + 6 * (y + 1 / y)) == max(y, 1 / y, key=abs)


@given(st.integers(-(10**6), 10**6), st.integers(1, 10**6))
def test_a_root_squares_to_its_number(p, q):
    root = exact_root(fmpq(p, q))
    assert root is not None
    assert root * root == fmpq(p, q)


# ---- reading


def test_mixed_kinds_are_read():
    case = conformal_from_mapping({"title": "", "conformal": GOOD["conformal"]})
    assert (case.b_squared, case.order, case.internal.value) == (-1, 2, (2, 1))
    gauge = case_from_text(TEXT.replace('"i/3"', '"1/3"').replace('"3/7"', '"0"'))
    assert [str(m) for m in gauge.theory.nodes[0].antifundamental] == [
        "1 + eps1 + 3*eps2/2",
        "-1 + eps1 + 3*eps2/2",
        "1/3 + eps1 + 3*eps2/2",
        "-1/3 + eps1 + 3*eps2/2",
    ]
    assert [str(a) for a in gauge.theory.nodes[0].coulomb] == ["1/2", "-1/2"]


def test_writing_and_reading_is_the_identity():
    data = changed(external=[{"weight": "1/3"}, {"momentum": "1/2 - eps1/3 + i*eps2"}, {"kac": [3, 1]}, {"weight": -2}])
    case = conformal_from_mapping(data)
    again = conformal_to_mapping(case)
    assert conformal_from_mapping(again) == case
    assert again["conformal"]["b_squared"] == "-1"
    assert load_case_as_written(case) is case
    assert load_case_as_written(data) == case


def test_the_hash_covers_the_physics_alone():
    case = conformal_from_mapping(GOOD)
    same = conformal_from_mapping({**changed(order=5), "title": "x"})
    assert same.hash == case.hash
    assert conformal_from_mapping(changed(c=25)).hash != case.hash


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"c": "2"}, "conformal.c: c = 2 has no rational b^2, because (c - 1)(c - 25) is not the square"),
        ({"c": "sqrt(2)"}, "conformal.c: 1*sqrt(2) is not rational"),
        ({"c": 0.5}, "conformal.c: the float 0.5 is not exact"),
        ({"b_squared": "1"}, "conformal: give c or b_squared, not both"),
        ({"external": {"weight": 1}}, "conformal.external: expected a list of four fields"),
        ({"external": [{"weight": 1}] * 3}, "conformal.external: give four fields (at 0, x, 1, infinity), or one"),
        ({"external": ["1/16"]}, "conformal.external[1]: expected a table such as"),
        ({"external": [{"wieght": 1}]}, 'conformal.external[1]: unknown key "wieght"; the nearest known'),
        ({"external": [{"weight": 1, "kac": [1, 1]}]}, "conformal.external[1]: a field has one of the keys"),
        ({"external": [{"weight": "1/0"}]}, 'conformal.external[1].weight: "1/0" divides by zero'),
        ({"external": [{"weight": "i"}]}, "conformal.external[1].weight: 1*sqrt(-1) is not rational"),
        ({"external": [{"weight": "eps1"}]}, 'conformal.external[1].weight: "eps1" contains eps1'),
        ({"external": [{"momentum": "t"}]}, 'conformal.external[1].momentum: "t" contains t'),
        ({"external": [{"momentum": []}]}, "conformal.external[1].momentum: expected an exact number"),
        ({"external": [{"momentum": "sqrt(2)"}, *[{"momentum": "i"}] * 3]}, "conformal: sqrt(2) and i occur together"),
        ({"internal": {"kac": [1]}}, "conformal.internal.kac: a Kac label is a list of two integers [r, s], not a"),
        ({"internal": {"kac": "12"}}, "conformal.internal.kac: a Kac label is a list of two integers [r, s], not text"),
        ({"internal": {"kac": [1, True]}}, "conformal.internal.kac: a Kac label is a list of two integers"),
        ({"internal": {"kac": [0, 1]}}, "conformal.internal.kac: the integers of a Kac label are between 1 and"),
        ({"internal": {}}, "conformal.internal: a field has one of the keys weight, momentum, kac, not none"),
        ({"internal": 3}, "conformal.internal: expected a table such as"),
        ({"order": "4"}, "conformal.order: the order is an integer, not text"),
        ({"order": -1}, "conformal.order: the order is between 0 and 150, not -1"),
        ({"order": 10**6}, "conformal.order: the order is between 0 and 150"),
        ({"levels": 3}, 'conformal: unknown key "levels"'),
    ],
)
def test_one_sentence_a_mistake(change, message):
    (only,) = said(changed(**change))
    assert only.startswith(message)


def test_b_squared_of_zero_and_what_is_missing():
    data = changed(b_squared=0)
    del data["conformal"]["c"]
    assert said(data) == ["conformal.b_squared: b^2 = eps1/eps2 is not zero"]
    missing = said({"conformal": {}})
    assert [text.split(":")[0] for text in missing] == ["conformal." + k for k in ("external", "internal", "order")] + [
        "conformal"
    ]
    (only,) = said({"conformal": 3})
    assert only == "conformal: expected a table with c, b_squared, external, internal, order, not an integer"


def test_keys_of_the_other_language_are_refused():
    found = said({**GOOD, "charge": 2, "background": {}, "titel": "x", "title": 3})
    assert found[0].startswith('a case in conformal terms has no key "charge" of a case in gauge terms; its order')
    assert found[1].startswith('a case in conformal terms has no key "background"')
    assert found[2].startswith("title: a title is text") or 'unknown key "titel"' in found[2]
    assert len(found) == 4
    assert said({**GOOD, "title": "a\nb"})[0].startswith("title: the title")


def test_a_file_names_itself(tmp_path):
    path = tmp_path / "fields.toml"
    path.write_text(TEXT.replace("order = 3", "order = 1000"), encoding="utf-8")
    with pytest.raises(InputError, match=r"fields\.toml: conformal\.order"):
        ratomega.limit(path)


# ---- the gauge case


def test_what_cannot_be_translated_says_so_and_points_on():
    two = changed(external=[{"momentum": "sqrt(2)"}], internal={"momentum": "sqrt(2)"})
    assert ratomega.load_case(two).theory.nodes[0].adjoint
    with pytest.raises(InputError, match=r'sqrt\(2\) and sqrt\(3\) occur together.*"ratomega block" takes the case'):
        ratomega.load_case(changed(external=[{"momentum": "sqrt(2)"}], internal={"weight": 3}))
    with pytest.raises(InputError, match=r'internal: .*the root of 1000.*"ratomega block" takes the case as it is'):
        ratomega.limit(changed(internal={"weight": 10**40 + 1}))


def test_every_command_takes_a_conformal_case():
    # The energy channel of four Ising spins: (1-x)^(-1/24) times 1, 1/4, 9/64 (Belavin, Polyakov, Zamolodchikov 1984).
    data = {"conformal": {"c": "1/2", "external": [{"kac": [1, 2]}] * 4, "internal": {"kac": [1, 3]}, "order": 2}}
    z = [fmpq(1), fmpq(1, 4) + fmpq(1, 24), fmpq(9, 64) + fmpq(1, 96) + fmpq(1, 24) * fmpq(25, 24) / 2]
    assert [one.value for one in ratomega.limit(data)] == z
    assert ratomega.detect(data)[2].configurations == 5
    assert not [c for c in ratomega.validate(data).checks if c.verdict is ratomega.Verdict.REFUTED]


small = st.builds(lambda p, q: f"{p}/{q}", st.integers(-5, 5), st.integers(1, 5))
fields = st.one_of(
    small.map(lambda x: {"weight": x}),
    small.map(lambda x: {"momentum": x}),
    st.builds(lambda x, y: {"momentum": f"({x})*eps1 + ({y})*eps2"}, small, small),
    st.lists(st.integers(1, 4), min_size=2, max_size=2).map(lambda x: {"kac": x}),
)


@st.composite
def conformal_cases(draw):
    ratio = draw(st.sampled_from(["1", "-1", "2", "1/2", "-4/3", "-5/2", "7/5", "-2"]))
    number = draw(st.sampled_from([1, 4]))
    external = draw(st.lists(fields, min_size=number, max_size=number))
    table = {"b_squared": ratio, "external": external, "internal": draw(fields), "order": 1}
    return conformal_from_mapping({"conformal": table})


@settings(max_examples=60, deadline=None)
@given(conformal_cases())
def test_reading_what_was_written(case: ConformalCase):
    assert conformal_from_mapping(conformal_to_mapping(case)) == case


@settings(max_examples=60, deadline=None)
@given(conformal_cases())
def test_conformal_to_gauge_and_back(case: ConformalCase):
    found = ratomega.block(case)
    if found.gauge is None:
        assert "no gauge theory with exact masses" in found.gauge_reason
        return
    assert found.gauge == gauge_case(case)
    back = ratomega.block(found.gauge)
    assert back.dictionary == found.dictionary
    if not found.degenerate:
        assert back.coefficients == found.coefficients
    assert not [c for c in (*found.checks, *back.checks) if c.verdict is ratomega.Verdict.REFUTED]
