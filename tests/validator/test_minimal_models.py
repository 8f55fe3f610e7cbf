"""Minimal-model points of U(2): Burge pairs, their restricted sum, and limits against blocks known from elsewhere.

Counts: characters of A. Rocha-Caridi 1985, by M. Bershtein, O. Foda, arXiv 1404.7075 and K. Alkalaev, V. Belavin, arXiv
1404.7094. Blocks: Gram matrices of irreducible modules (tests/irreducible.py), and the known functions of A. Belavin,
A. Polyakov, A. Zamolodchikov 1984 (Ising), J. Cardy 1985 (Lee-Yang), D. Friedan, Z. Qiu, S. Shenker 1985 (tricritical
Ising) as values of the closed forms.
"""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction
from itertools import product
from math import comb

import pytest
import sympy
from building import make_case
from irreducible import block

import ratomega.weights
from ratomega.case.setting import NodeSetting, Setting, own_setting
from ratomega.chain.job import Job
from ratomega.conformal.minimal import MinimalModel, minimal_point
from ratomega.detector.zeros import scan
from ratomega.exact.path import Linear
from ratomega.exact.rational import Rational, as_fraction
from ratomega.regulator.direct import direct_total
from ratomega.regulator.outcome import FiniteLimit, Independence
from ratomega.validator.burge import check_burge_pairs, check_burge_sum, expected_counts, is_burge_pair
from ratomega.validator.closed_forms_minimal import minimal_forms
from ratomega.validator.comparison import compare
from ratomega.validator.verdict import Kind, Verdict
from ratomega.weights import Weights

BURGE_MODELS = [(2, 3), (2, 5), (2, 7), (3, 4), (3, 5), (4, 5)]


def double(label):
    return f"({label[0]}*eps1 + {label[1]}*eps2)"


def four_point(pair, fields, internal, charge, *, tilt="t/7", moves=None):
    """The case of four fields at 0, x, 1, infinity; ``moves`` are added to the masses."""
    p, q = pair
    at0, x, at1, infinity = (double(label) for label in fields)
    masses = [f"({x} + {at0})/2", f"({x} - {at0})/2", f"({at1} + {infinity})/2", f"({at1} - {infinity})/2"]
    masses = [f"{m} + (eps1 + eps2)/2 + {move}" for m, move in zip(masses, moves or ["0"] * 4, strict=True)]
    half = f"{double(internal)}/2"
    node = {"coulomb": [f"{half} + {tilt}", f"-{half} - ({tilt})"], "antifundamental": masses}
    return make_case(str(q), str(-p), [node], charge=charge)


def run(case, *, probes=1):
    job = Job.prepare(case, clusterwise=True)
    return job, list(job.limits(probes=probes))


def z_of_gram(pair, fields, internal, level):
    """(1 - q)^(2 m0 m1 / (eps1 eps2)) times the block from the Gram matrix, in plain fractions."""
    p, q = pair
    e1, e2 = Fraction(q), Fraction(-p)

    def momentum(label):
        return (label[0] * e1 + label[1] * e2) / 2

    def weight(label):
        return ((e1 + e2) ** 2 / 4 - momentum(label) ** 2) / (e1 * e2)

    c = 1 + 6 * (e1 + e2) ** 2 / (e1 * e2)
    values, _ = block(c, weight(internal), [weight(label) for label in fields], level)
    exponent = 2 * (momentum(fields[1]) + (e1 + e2) / 2) * (momentum(fields[2]) + (e1 + e2) / 2) / (e1 * e2)
    power = [Fraction(1)]
    for n in range(level):
        power.append(power[-1] * (n - exponent) / (n + 1))
    return [sum(power[j] * values[n - j] for j in range(n + 1)) for n in range(level + 1)]


def z_values(limits):
    assert all(isinstance(limit.outcome, FiniteLimit) for limit in limits)
    return [as_fraction(limit.outcome.value) for limit in limits]


# ---- Burge pairs


@pytest.mark.parametrize("pair", BURGE_MODELS, ids=str)
def test_counts_of_configurations_without_a_vanishing_denominator(pair) -> None:
    """All labels, up to charge 8: the detector's counts, the inequalities one by one, the character."""
    model, (p, q) = MinimalModel.make(*pair), pair
    for label in product(range(1, p), range(1, q)):
        half = f"{double(label)}/2"
        case = make_case(str(q), str(-p), [{"coulomb": [f"{half} + t/7", f"-{half} - t/7"]}], charge=8)
        weights = Weights(own_setting(case))
        counts = []
        for (k,) in case.charges:
            found = [(z.configuration, z.vanishing_denominators == 0) for z in scan(weights, (k,))]
            assert all(regular == is_burge_pair(model, label, *pairs[0]) for pairs, regular in found)
            counts.append(sum(regular for _, regular in found))
        assert counts == expected_counts(model, label, 8)


def test_published_counts() -> None:
    """Products of Rogers and Ramanujan times prod 1/(1 - q^n), expanded by hand; Ising from its fermions."""
    table = {
        ((2, 5), (1, 1)): [1, 1, 3, 5, 9, 14, 24],
        ((2, 5), (1, 2)): [1, 2, 4, 7, 13, 21, 35],
        ((3, 4), (1, 1)): [1, 1, 3, 5, 10, 16, 28],
        ((3, 4), (1, 2)): [1, 2, 4, 8, 14, 24, 40],
    }
    for (pair, label), counts in table.items():
        assert expected_counts(MinimalModel.make(*pair), label, 6) == counts
    # M(2,3) is trivial: the U(1) factor alone is left.
    assert expected_counts(MinimalModel.make(2, 3), (1, 1), 8) == [1, 1, 2, 3, 5, 7, 11, 15, 22]


@pytest.mark.parametrize("matter", [{}, {"antifundamental": ["1/2"]}, {"adjoint": ["1/3"]}])
def test_the_check_counts_with_any_matter(matter) -> None:
    coulomb = ["(eps1 + 2*eps2)/2 + t/7", "-(eps1 + 2*eps2)/2 - t/7"]
    case = make_case("5", "-2", [{"coulomb": coulomb, **matter}], charge=4)
    job, limits = run(case)
    check = check_burge_pairs(job.weights, limits)
    assert (check.verdict, check.kind) == (Verdict.AGREES, Kind.CONSISTENCY)
    assert "M(2,5), a1 - a2 = eps1 + 2*eps2" in check.evidence
    assert "1, 2, 4, 7, 13" in check.evidence
    # No four degenerate fields: nothing is said on sums.
    assert check_burge_sum(job.weights, limits) is None
    assert minimal_forms(job.setting, case.charges) == ()


# ---- limits, restricted sums, known functions

FOUR_POINTS = [
    ((3, 4), ((1, 2),) * 4, (1, 1), "Ising: four spins, identity channel"),
    ((3, 4), ((1, 2),) * 4, (1, 3), "Ising: four spins, energy channel"),
    ((3, 4), ((2, 2),) * 4, (2, 1), "Ising: four spins, energy channel"),
    ((3, 4), ((1, 3),) * 4, (1, 1), "Ising: four energies"),
    ((3, 4), ((2, 1), (1, 2), (1, 3), (2, 2)), (2, 2), "Ising: two energies between spins"),
    ((4, 3), ((2, 1), (2, 1), (3, 1), (3, 1)), (1, 1), ""),
    ((2, 5), ((1, 2),) * 4, (1, 1), "Lee-Yang: identity channel"),
    ((2, 5), ((1, 3),) * 4, (1, 4), "Lee-Yang: identity channel"),
    ((2, 5), ((1, 2),) * 4, (1, 2), "Lee-Yang: phi channel"),
    ((4, 5), ((3, 1),) * 4, (1, 1), "tricritical Ising: four supercurrents"),
    ((4, 5), ((2, 2), (3, 1), (1, 4), (2, 2)), (2, 2), "tricritical Ising: two supercurrents between fields (2,2)"),
    ((4, 5), ((3, 1), (3, 1), (2, 3), (2, 2)), (1, 1), "tricritical Ising: two supercurrents and fields (2,2)"),
    ((4, 5), ((2, 1), (3, 1), (2, 1), (1, 4)), (2, 4), "tricritical Ising: two supercurrents between fields (2,1)"),
    ((4, 5), ((3, 1), (3, 1), (2, 1), (2, 1)), (1, 1), "tricritical Ising: two supercurrents and fields (2,1)"),
    ((2, 7), ((1, 2), (1, 3), (1, 3), (1, 2)), (1, 2), ""),
    ((3, 5), ((1, 2), (2, 2), (1, 3), (1, 2)), (1, 4), ""),
    ((4, 5), ((2, 2),) * 4, (1, 3), ""),
]
IDS = [f"M{pair} {internal} {name or fields}" for pair, fields, internal, name in FOUR_POINTS]


def check_all(pair, fields, internal, name, charge, **path):
    case = four_point(pair, fields, internal, charge, **path)
    job, limits = run(case)
    assert z_values(limits) == z_of_gram(pair, fields, internal, charge)
    pairs, restricted = check_burge_pairs(job.weights, limits), check_burge_sum(job.weights, limits)
    for check in (pairs, restricted):
        assert (check.verdict, check.kind) == (Verdict.AGREES, Kind.CONSISTENCY)
        assert "the fusion rules hold" in check.evidence
    forms = minimal_forms(job.setting, case.charges)
    assert len(forms) == bool(name)
    for form in forms:
        assert form.name.startswith(name)
        check = compare(form, limits)
        assert (check.verdict, check.kind) == (Verdict.AGREES, Kind.INDEPENDENT)
        assert f"up to charge {charge}" in check.evidence
    return restricted


@pytest.mark.parametrize(("pair", "fields", "internal", "name"), FOUR_POINTS, ids=IDS)
def test_four_points(pair, fields, internal, name) -> None:
    check_all(pair, fields, internal, name, 4)


@pytest.mark.long
@pytest.mark.parametrize(("pair", "fields", "internal", "name"), FOUR_POINTS, ids=IDS)
def test_four_points_to_charge_8(pair, fields, internal, name) -> None:
    check_all(pair, fields, internal, name, 8)


@pytest.mark.parametrize(
    ("tilt", "moves"),
    [("-3*t/5", None), ("t/700", None), ("t/7", ["t/3", "2*t/5", "-t/7", "3*t/11"]), ("t/7", ["t/3", "0", "0", "0"])],
)
def test_any_path_to_the_lee_yang_identity(tilt, moves) -> None:
    """Up to charge 8: at p p' - |r p' - s p| = 7 a null vector of the second step begins, whose norm vanishes twice."""
    charge = 8 if moves and moves[1] != "0" else 5
    check_all((2, 5), ((1, 2),) * 4, (1, 1), "Lee-Yang: identity channel", charge, tilt=tilt, moves=moves)


@pytest.mark.parametrize("scaled", [False, True])
def test_a_path_that_stays_on_the_ratio(scaled) -> None:
    """eps1 and eps2 keep their ratio, a alone moves against them: the same block."""
    e1, e2 = (Linear(Rational(x), Rational(x * scaled)) for x in (5, -2))

    def momentum(r, s):
        return e1.scaled(Rational(r, 2)) + e2.scaled(Rational(s, 2))

    phi, eps = momentum(1, 2), (e1 + e2).scaled(Rational(1, 2))
    a = momentum(1, 1) + Linear(Rational(0), Rational(2, 7))
    node = NodeSetting("gauge", (a, -a), (phi + phi + eps, eps) * 2, (), ())
    weights = Weights(Setting(e1, e2, (node,), ()))
    found = [direct_total(weights, (k,)) for k in range(6)]
    assert all(series.valuation >= 0 for series in found)
    expected = z_of_gram((2, 5), ((1, 2),) * 4, (1, 1), 5)
    assert [as_fraction(series.coefficient(0)) for series in found] == expected


def test_typed_numbers_that_do_not_move() -> None:
    node = {"coulomb": ["1/2", "-1/2"], "antifundamental": ["5/2", "3/2", "5/2", "3/2"]}
    job, limits = run(make_case("5", "-2", [node], charge=5))
    assert z_values(limits) == z_of_gram((2, 5), ((1, 2),) * 4, (1, 2), 5)
    (form,) = minimal_forms(job.setting, [limit.charge for limit in limits])
    assert compare(form, limits).verdict is Verdict.AGREES


def test_configurations_outside_can_have_weights_that_cancel() -> None:
    inside = check_all((2, 5), ((1, 2),) * 4, (1, 2), "Lee-Yang: phi channel", 3)
    assert "every other configuration vanishes" in inside.evidence
    outside = check_all((2, 5), ((1, 2),) * 4, (1, 1), "Lee-Yang: identity channel", 5)
    assert "of the other configurations 6 do not vanish one by one on the path; they cancel" in outside.evidence


def test_without_the_fusion_rules_nothing_is_claimed() -> None:
    """A spin in the product of two spins: a true pole. The pairs are still counted."""
    job, limits = run(four_point((3, 4), ((1, 2),) * 4, (1, 2), 3))
    assert any(not isinstance(limit.outcome, FiniteLimit) for limit in limits)
    check = check_burge_pairs(job.weights, limits)
    assert check.verdict is Verdict.AGREES
    assert "the fusion rules do not hold" in check.evidence
    assert check_burge_sum(job.weights, limits) is None
    assert minimal_forms(job.setting, [limit.charge for limit in limits]) == ()


def test_the_rules_on_one_side_only_leave_a_path_dependent_limit() -> None:
    """Two spins and two fields that are none: overlaps with the null vector at level 2 vanish on one side alone."""
    masses = ["eps1 + 2*eps2 + (eps1 + eps2)/2", "(eps1 + eps2)/2", "11/10", "11/14"]
    half = "(eps1 + 3*eps2)/2"
    node = {"coulomb": [f"{half} + t/7", f"-{half} - t/7"], "antifundamental": masses}
    job, limits = run(make_case("4", "-3", [node], charge=2), probes=2)
    assert [limit.outcome.status for limit in limits] == ["finite", "finite", "path-dependent"]
    assert minimal_point(job.setting).four_points == ()


@pytest.mark.parametrize("name", ["ising-identity", "ising-energy", "lee-yang-identity", "lee-yang-field"])
def test_bundled_cases_with_functions_by_sympy(name) -> None:
    x = sympy.Symbol("x")
    root = sympy.sqrt(1 - x)
    spins = (1 - x) ** sympy.Rational(-1, 24) * (1 - x) ** sympy.Rational(-1, 8)

    def second(a, b, c):
        terms, value = [], sympy.Integer(1)
        for n in range(5):
            terms.append(value * x**n)
            value *= sympy.Rational(a + 5 * n, 5) * sympy.Rational(b + 5 * n, 5)
            value /= sympy.Rational(c + 5 * n, 5) * (n + 1)
        return (1 - x) ** sympy.Rational(-4, 5) * (1 - x) ** sympy.Rational(1, 5) * sum(terms)

    function = {
        "ising-identity": spins * sympy.sqrt((1 + root) / 2),
        "ising-energy": spins * sympy.sqrt(2 * (1 - root) / x),
        "lee-yang-identity": second(2, 3, 6),
        "lee-yang-field": second(1, 2, 4),
    }[name]
    series = sympy.series(function, x, 0, 5).removeO()
    job, limits = run(name)
    assert [Fraction(str(series.coeff(x, n))) for n in range(5)] == z_values(limits)[:5]
    (form,) = minimal_forms(job.setting, [limit.charge for limit in limits])
    assert compare(form, limits).verdict is Verdict.AGREES


def test_bundled_supercurrents() -> None:
    """(1 - q)^(-18/5) times a rational function: binomials of 18/5 times partial sums, by hand."""
    power = [Fraction(1)]
    for n in range(6):
        power.append(power[-1] * (Fraction(18, 5) + n) / (n + 1))
    # (1 - 3x + 3x^2 - x^3 + 3x^4 - 3x^5 + x^6)/(1-x)^3 and x^2/(1-x)
    top, h = [1, -3, 3, -1, 3, -3, 1], Fraction(3, 80)
    currents = [
        sum(top[j] * comb(n - j + 2, 2) for j in range(n + 1)) + (Fraction(45, 7) if n >= 2 else 0) for n in range(7)
    ]
    # 2h + (c/3)(n^2 - 1/4) over h - c/24 = 1/120
    spins = [Fraction(1), *((2 * h + Fraction(7, 30) * (n * n - Fraction(1, 4))) * 120 for n in range(1, 7))]
    for name, values in (("tricritical-supercurrents", currents), ("tricritical-spin", spins)):
        _, limits = run(name)
        assert z_values(limits) == [sum(power[j] * values[n - j] for j in range(n + 1)) for n in range(7)]


# ---- checks that must fail, and checks that cannot run


def test_limits_of_another_channel_are_refuted() -> None:
    job, limits = run("ising-identity")
    _, others = run("ising-energy")
    restricted = check_burge_sum(job.weights, others)
    assert restricted.verdict is Verdict.REFUTED
    assert "charge 1: sum over Burge pairs 1/24, limit 7/24" in restricted.evidence
    (form,) = minimal_forms(job.setting, [limit.charge for limit in limits])
    refuted = compare(form, others)
    assert refuted.verdict is Verdict.REFUTED
    assert "charge 1" in refuted.evidence


def test_a_value_that_is_off_is_refuted() -> None:
    job, limits = run("lee-yang-identity")
    wrong = FiniteLimit(Rational(1, 3), Independence.AGREEMENT)
    changed = [*limits[:-1], replace(limits[-1], outcome=wrong)]
    assert check_burge_sum(job.weights, changed).verdict is Verdict.REFUTED
    (form,) = minimal_forms(job.setting, [limit.charge for limit in limits])
    assert "first difference at charge 6" in compare(form, changed).evidence


def test_a_wrong_leg_is_refuted(monkeypatch) -> None:
    """Legs of the wrong diagram in the factors of two colours: both checks see it, and so does the function."""
    right = ratomega.weights.pair_points

    def wrong(lam, mu, lam_columns, mu_columns):
        if lam == mu:
            return right(lam, mu, lam_columns, mu_columns)
        return right(lam, mu, mu_columns, lam_columns)

    job, limits = run("lee-yang-field")
    monkeypatch.setattr(ratomega.weights, "pair_points", wrong)
    broken = Weights(job.setting)
    assert check_burge_pairs(broken, limits).verdict is Verdict.REFUTED
    assert check_burge_sum(broken, limits).verdict is Verdict.REFUTED


def test_a_wrong_count_is_refuted(monkeypatch) -> None:
    """The character of another field."""
    job, limits = run("lee-yang-field")
    true = MinimalModel.character
    monkeypatch.setattr(MinimalModel, "character", lambda self, label, order: true(self, (1, 1), order))
    check = check_burge_pairs(job.weights, limits)
    assert check.verdict is Verdict.REFUTED
    assert "charge 1: 2 configurations without a vanishing vector factor, the character gives 1" in check.evidence


def test_too_many_configurations_leave_it_undecided() -> None:
    job, limits = run("ising-energy")
    for check in (check_burge_pairs, check_burge_sum):
        found = check(job.weights, limits, most_configurations=138)
        assert found.verdict is Verdict.UNDECIDED
        assert "139 configurations, more than 138; ask for it with --depth full" in found.evidence
        assert check(job.weights, limits, most_configurations=139).verdict is Verdict.AGREES


@pytest.mark.parametrize("name", ["b1-four-flavours", "u2-unrefined", "unrefined-vacuum", "u3-pure", "linear-quiver"])
def test_no_check_away_from_minimal_models(name) -> None:
    job, limits = run(name)
    assert check_burge_pairs(job.weights, limits) is None
    assert check_burge_sum(job.weights, limits) is None
    assert minimal_forms(job.setting, [limit.charge for limit in limits]) == ()


def test_charge_0_alone_is_no_check() -> None:
    job, limits = run("ising-energy")
    assert check_burge_pairs(job.weights, limits[:1]) is None
    assert check_burge_sum(job.weights, limits[:1]) is None
    assert minimal_forms(job.setting, []) == ()
