"""Gram matrices and elementary blocks as checks: what they say, where they apply, how deep they go."""

from __future__ import annotations

from dataclasses import replace

import pytest
from building import make_case, plain_theory
from flint import fmpq
from plain import laurent_coefficient

import ratomega
from ratomega.case.setting import own_setting
from ratomega.conformal.dictionary import gauge_path
from ratomega.regulator.limits import charge_limit
from ratomega.validator.path_comparison import check_elementary_path, check_gram, compare_on_path
from ratomega.validator.verdict import Kind, Verdict
from ratomega.validator.virasoro import (
    Leading,
    PathForm,
    deepest_level,
    elementary_path_form,
    gram_form,
    gram_path_form,
)
from ratomega.weights import Weights

C25 = {"coulomb": ["2/7", "-2/7"], "antifundamental": ["1/2 + (eps1+eps2)/2", "(eps1+eps2)/2"] * 2}
POLE = {"coulomb": ["3/2 + t/7", "-3/2 - t/7"], "antifundamental": ["7/2", "5/2"]}
VACUUM = {
    "coulomb": ["3*t/5", "-3*t/5"],
    "antifundamental": ["eps1/2 + (eps1+eps2)/2", "(eps1+eps2)/2", "(eps1+eps2)/2 + eps2/2", "eps1 + eps2"],
}


def limits_of(case):
    weights = Weights(own_setting(case))
    return [charge_limit(weights, charge) for charge in case.charges]


def gram(case, **options):
    (check,) = check_gram(case, own_setting(case), limits_of(case), **options)
    return check


def test_agreement_at_c_25() -> None:
    case = make_case("1", "1", [C25], charge=4)
    check = gram(case)
    assert (check.name, check.verdict, check.kind) == (
        "Gram matrix of Virasoro descendants", Verdict.AGREES, Kind.INDEPENDENT,
    )  # fmt: skip
    assert check.evidence.endswith("times the U(1) factor; equal up to charge 4")
    assert "0906.3219" in check.source
    form = gram_form(case, own_setting(case))
    reference = plain_theory(own_setting(case))
    for charge, value in form.values.items():
        assert laurent_coefficient(reference, charge) == {0: value}
    assert set(form.values) == set(case.charges)


def test_a_surviving_pole_is_the_same_pole() -> None:
    # eps1 : eps2 = 2 : 1: charge 1 keeps 7/15 on the tilt t/7 (plain reference: tests/regulator/test_examples.py).
    case = make_case("2", "1", [POLE], charge=2)
    form = gram_path_form(case, own_setting(case))
    assert form.values[(1,)] == Leading(1, fmpq(7, 15))
    check = gram(case)
    assert check.verdict is Verdict.AGREES
    assert "in series in t from level 1 on, where the Kac determinant vanishes" in check.evidence
    assert check.evidence.endswith("equal up to charge 2; the same surviving pole at charge 1")
    # Charges with resonance belong to one path and are not among the values for every path.
    assert set(gram_form(case, own_setting(case)).values) == {(0,)}


@pytest.mark.parametrize(
    ("charge", "own"), [(1, {"value": fmpq(1, 2)}), (1, {"order": 0}), (2, {"value": fmpq(0)}), (2, {"order": 1})]
)
def test_every_difference_is_refuted(charge, own) -> None:
    case = make_case("2", "1", [POLE], charge=2)
    limits = limits_of(case)
    limits[charge] = replace(limits[charge], own=replace(limits[charge].own, **own))
    (check,) = check_gram(case, own_setting(case), limits)
    assert check.verdict is Verdict.REFUTED
    assert f"first difference at charge {charge}: this way" in check.evidence


def test_a_pole_is_written_with_its_order() -> None:
    form = PathForm("form", "a form", "nowhere", {(1,): Leading(2, fmpq(1, 3))})
    limits = limits_of(make_case("2", "1", [POLE], charge=1))
    check = compare_on_path(form, limits)
    assert check.evidence == (
        "a form; first difference at charge 1: this way 1/3 t^-2, sum over diagrams 7/15 t^-1"
    )  # fmt: skip
    assert compare_on_path(PathForm("form", "a form", "nowhere", {(0,): Leading(0, fmpq(1))}), limits) is None


def test_only_what_was_computed_is_compared() -> None:
    case = make_case("1", "1", [C25], charge=5)
    limits = limits_of(case.with_charge(2))
    (check,) = check_gram(case, own_setting(case), limits)
    assert check.evidence.endswith("equal up to charge 2")
    assert check_gram(case, own_setting(case), limits[:1]) == ()
    assert check_gram(case, own_setting(case), []) == ()


def test_levels_left_out_are_named() -> None:
    case = make_case("1", "1", [C25], charge=4)
    check = gram(case, most_level=3)
    assert check.evidence.endswith(
        "equal up to charge 3; charges beyond 3 were not computed this way (Gram matrices to level 3 here, to level 10 "
        "with --depth full)"
    )
    assert check.verdict is Verdict.AGREES


@pytest.mark.parametrize(
    "node",
    [
        {"coulomb": ["1/3"]},
        {"coulomb": ["0", "1/3", "1/5"]},
        {"coulomb": ["1/3", "1/5"], "antifundamental": ["1", "2", "3", "4", "5"]},
        {"coulomb": ["1/3", "1/5"], "adjoint": ["1/7"], "fundamental": ["1"]},
    ],
)
def test_not_offered_where_it_does_not_apply(node) -> None:
    case = make_case("1", "2", [node], charge=1)
    assert check_gram(case, own_setting(case), limits_of(case)) == ()
    assert gram_form(case, own_setting(case)) is None
    assert elementary_path_form(case, own_setting(case)) is None


def test_not_offered_at_charge_0() -> None:
    case = make_case("1", "1", [C25], charge=0)
    assert check_gram(case, own_setting(case), limits_of(case)) == ()


LONG = "1234567890" * 5


@pytest.mark.parametrize(
    ("node", "level"),
    [
        ({"coulomb": ["1/3", "1/5"]}, 10),
        ({"coulomb": ["1/3", "i/5"]}, 10),
        ({"coulomb": ["1", "-1"]}, 10),
        ({"coulomb": ["1/1234567890123", "1/5"]}, 8),
        ({"coulomb": ["1/3", "1/5"], "adjoint": ["1/1234567"]}, 8),
        ({"coulomb": ["1/3", "1/5"], "antifundamental": [f"{LONG}/7"]}, 6),
        ({"coulomb": ["1/3", "1/5"], "fundamental": [f"1/7 + t/{LONG}"]}, 6),
        ({"coulomb": ["1/3", "1/5"], "antifundamental": [f"i/{LONG}"], "fundamental": [f"{LONG}/3"]}, 6),
        ({"coulomb": ["1/3", "1/5"], "adjoint": [f"{LONG}/7"]}, 6),
        ({"coulomb": ["1/3", "i/5"], "adjoint": [f"{LONG}/7"]}, 4),
    ],
)
def test_longer_numbers_go_less_deep(node, level) -> None:
    gauge = gauge_path(own_setting(make_case("1", "1", [node])))
    assert deepest_level(gauge, 10) == level
    assert deepest_level(gauge, 3) == 3


def test_long_numbers_still_agree() -> None:
    case = make_case("1", "1", [{"coulomb": ["1/3", "i/5"], "adjoint": [f"{LONG}/7"]}], charge=5)
    setting = own_setting(case)
    form = gram_path_form(case, setting)
    assert max(form.values) == (4,)
    assert form.note == "charges beyond 4 were not computed this way (Gram matrices to level 4 here)"
    assert compare_on_path(form, limits_of(case.with_charge(2))).verdict is Verdict.AGREES


# ---- elementary blocks along the path


def test_elementary_block_at_a_resonance() -> None:
    # a -> 0 at (1, -1) with masses that keep H = 1 all along the path.
    case = make_case("1", "-1 + t", [VACUUM], charge=5)
    setting = own_setting(case)
    form = elementary_path_form(case, setting)
    assert set(form.values) == {(k,) for k in range(1, 6)}
    reference = plain_theory(setting)
    for charge in [(1,), (2,), (3,), (4,)]:
        value = form.values[charge].value
        assert laurent_coefficient(reference, charge) == ({0: value} if value else {})
    (check,) = check_elementary_path(case, setting, limits_of(case))
    assert (check.verdict, check.kind) == (Verdict.AGREES, Kind.INDEPENDENT)
    assert check.evidence.endswith("where a is resonant; equal from charge 1 to charge 5")
    assert gram(case).verdict is Verdict.AGREES


def test_elementary_block_is_refuted_by_another_value() -> None:
    case = make_case("1", "-1 + t", [VACUUM], charge=2)
    limits = limits_of(case)
    limits[2] = replace(limits[2], own=replace(limits[2].own, value=fmpq(5)))
    (check,) = check_elementary_path(case, own_setting(case), limits)
    assert check.verdict is Verdict.REFUTED


@pytest.mark.parametrize(
    ("eps2", "node"),
    [
        # without resonance, where the closed form of the limit point speaks
        ("1", C25),
        # the masses are in the family at the end of the path only; there the limit depends on the path
        ("-1", {**C25, "coulomb": ["3*t/5", "-3*t/5"]}),
    ],
)
def test_elementary_path_form_is_not_offered(eps2, node) -> None:
    case = make_case("1", eps2, [node], charge=4)
    assert check_elementary_path(case, own_setting(case), limits_of(case)) == ()


# ---- every bundled case


ON_ONE_PATH = [name for name in ratomega.bundled_names() if not ratomega.load_case(name).nested]


@pytest.mark.parametrize("name", ON_ONE_PATH)
def test_bundled_cases(name) -> None:
    case = ratomega.load_case(name)
    case = case.with_charge(min(case.bounds[0], 4)) if isinstance(case.charge, int) else case
    if case.symbols:
        case = case.at(**{symbol: fmpq(8, 7) for symbol in case.symbols})
    setting = own_setting(case)
    if setting.ranks != (2,):
        assert check_gram(case, setting, []) == ()
        assert gram_form(case, setting) is None
        return
    check = gram(case)
    assert check.verdict is Verdict.AGREES
    assert f"up to charge {case.charge}" in check.evidence
