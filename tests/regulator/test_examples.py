"""Worked examples through ``ratomega.limit``: three outcomes, tilts, probes, certificates.

The numbers of the examples were computed once by the plain reference (tests/plain.py), and every test lets the plain
reference compute them again on the path that stands beside the result (``check_result``). Where a closed function is
known it is expanded here by sympy.
"""

from __future__ import annotations

import re

import plain
import pytest
import sympy
from building import make_case, plain_theory
from flint import fmpq
from on_path import check_result, line, theory_on

import ratomega
from ratomega.case.setting import own_setting, probe_setting
from ratomega.errors import InputError, PathError
from ratomega.regulator.limits import charge_limit
from ratomega.validator.finiteness import CANCELLATION, PATHS, check_cancellation
from ratomega.validator.verdict import Kind, Verdict
from ratomega.weights import Weights

R = fmpq


def u2(eps, coulomb, masses=(), *, charge):
    return make_case(*eps, [{"coulomb": coulomb, "antifundamental": list(masses)}], charge=charge)


def tilted(value: str, tilt: str):
    return [f"{value} + {tilt}", f"-{value} - ({tilt})"]


def checked(case, **options):
    """The limit, every number of it confirmed by the plain reference."""
    result = ratomega.limit(case, **options)
    check_result(result, last=options.get("terms", 0))
    return result


def verdicts(result):
    return {check.name: check.verdict for check in result.checks}


def statuses(result):
    return [c.status for c in result]


# ---- a pole, and a path-dependent value behind it


@pytest.mark.parametrize(
    ("tilt", "leading", "second"), [("t/7", R(7, 15), R(-403, 1680)), ("-3*t/5", R(5, 33), R(-377, 3696))]
)
def test_a_pole_and_a_path_dependent_value(tilt, leading, second) -> None:
    result = checked(u2(("2", "1"), tilted("3/2", tilt), ["7/2", "5/2"], charge=2))
    assert statuses(result) == ["finite", "pole", "path-dependent"]
    assert (result[1].order, result[1].leading) == (1, leading)
    assert result[1].value is None
    # The coefficient differs from path to path: the own one stands first, and no independence is claimed.
    assert (result[1].values[0].order, result[1].values[0].value) == (1, leading)
    assert result[1].independence is None
    assert result[2].values[0].value == second
    assert {v.order for v in result[2].values} == {0}
    assert (result[2].value, result[2].leading, result[2].independence) == (None, None, None)
    assert result.exit_status == 1
    assert verdicts(result)[CANCELLATION] is verdicts(result)[PATHS] is Verdict.REFUTED
    assert not result.header.path.tilted


@pytest.mark.parametrize(
    ("tilt", "second", "third"),
    [("t/7", R(29, 150), R(563, 2850)), ("-3*t/5", R(19, 66), R(19, 154))],
)
def test_path_dependent_below_and_equal_on_every_path_above(tilt, second, third) -> None:
    case = u2(("2", "1"), tilted("5/2", tilt), ["-1/2", "1/2", "3/2", "9/2"], charge=4)
    result = checked(case, probes=5)
    assert statuses(result) == ["finite", "finite", "path-dependent", "path-dependent", "finite"]
    assert [c.independence for c in result] == ["theorem", "theorem", None, None, "agreement"]
    assert [result[2].values[0].value, result[3].values[0].value] == [second, third]
    assert result[4].value == R(3, 242)
    assert result.exit_status == 1
    # Every negative power cancels; the paths differ.
    assert verdicts(result)[CANCELLATION] is Verdict.PROVED
    assert verdicts(result)[PATHS] is Verdict.REFUTED
    # Five further paths at each charge, all different from the own one and from each other.
    assert len({v.path for v in result[3].values}) == 6
    assert len({str(v.value) for v in result[3].values}) == 6


def test_a_pole_on_a_tilted_vacuum() -> None:
    """U(2) without matter at (1, 1 + t), a = 1 + t/7: the residue of Nekrasov's 2/(eps1 eps2 (eps^2 - 4 a^2))."""
    case = u2(("1", "1 + t"), ["1 + t/7", "-1 - t/7"], charge=3)
    result = checked(case, terms=2)
    assert (result[1].status, result[1].order, result[1].leading) == ("pole", 1, R(7, 10))
    assert result.exit_status == 1
    t = sympy.Symbol("t")
    eps2, a = 1 + t, 1 + t / 7
    series = sympy.series(2 / (eps2 * ((1 + eps2) ** 2 - 4 * a**2)), t, 0, 3).removeO().expand()
    expected = [(power, series.coeff(t, power)) for power in range(-1, 3)]
    assert [(power, sympy.Rational(int(c.p), int(c.q))) for power, c in result[1].terms] == expected


def test_finite_on_the_own_path_and_a_pole_on_the_others() -> None:
    """One flavour at (1, -1), a -> 0: (eps - 2 m) / (eps1 eps2 (4 a^2 - eps^2)) vanishes on the path eps = t, m = t/2;
    it keeps a pole wherever the background moves in another direction."""
    result = checked(u2(("1", "-1"), ["t/3", "-t/3"], ["t/2"], charge=1))
    assert (result[1].status, result[1].independence) == ("path-dependent", None)
    assert [v.order for v in result[1].values] == [0, 1, 1, 1]
    assert result[1].values[0].value == 0
    for v in result[1].values[1:]:
        theory = theory_on(result.header.case, v.path)
        a, eps = theory["nodes"][0]["coulomb"][0].d, theory["eps1"].d + theory["eps2"].d
        assert v.value == -(eps - 1) / (4 * a * a - eps * eps)
    assert result.exit_status == 1
    # The other way round: one of the probed directions as the own path has the pole.
    other = checked(u2(("1 + t/2", "-1 + t/3"), ["t/3", "-t/3"], ["t/2"], charge=1))
    assert (other[1].status, other[1].order) == ("pole", 1)
    assert other[1].leading == R(-1) * (R(5, 6) - 1) / (R(4, 9) - R(25, 36))


# ---- the kappa family


UNREFINED = ["1/2 + (eps1 + eps2)/2"] * 2 + ["(eps1 + eps2)/2"] * 2


def kappa_value(kappa):
    return R(1559, 32768) + 1 / (131072 * (kappa * kappa - 1))


@pytest.mark.parametrize("kappa", ["1/3", "-2/5", "7/3"])
def test_kappa_family(kappa) -> None:
    """c = 1, weights 1/16, all of it at h -> 0: the value at charge 4 depends on how a goes to 0 with eps."""
    top, _, bottom = kappa.partition("/")
    result = checked(u2(("1", "-1"), [f"{kappa}*t", f"-({kappa})*t"], UNREFINED, charge=4))
    assert statuses(result) == ["finite", "finite", "finite", "finite", "path-dependent"]
    assert [c.value for c in result][:4] == [1, R(1, 8), R(5, 64), R(15, 256)]
    assert [c.independence for c in result] == ["theorem", "agreement", "agreement", "agreement", None]
    assert result[4].values[0].value == kappa_value(R(int(top), int(bottom or 1)))
    check_kappa_on_every_path(result)
    # No weight is singular here: what depends on the path is 0/0.
    assert all(c.singular == 0 for c in result)
    assert result[4].indeterminate > 0


def check_kappa_on_every_path(result):
    """The same formula holds on the probed paths, where kappa is the slope of a over the slope of eps1 + eps2."""
    for v in result[4].values:
        theory = theory_on(result.header.case, v.path)
        (a, b), eps = theory["nodes"][0]["coulomb"], theory["eps1"].d + theory["eps2"].d
        assert a.d == -b.d
        assert v.value == kappa_value(a.d / eps)


def test_kappa_family_on_the_engine_s_own_tilt() -> None:
    """With a = 0 all along the path the engine tilts, once for all charges; mirror images would agree."""
    result = checked(u2(("1", "-1"), ["0", "0"], UNREFINED, charge=4))
    assert result.header.path.tilted
    assert any("tilted" in warning for warning in result.header.warnings)
    assert statuses(result)[4] == "path-dependent"
    check_kappa_on_every_path(result)
    sizes = {abs(line(text).d) for _, values in result.header.path.coulomb for text in values}
    assert len(sizes) == 1
    ratios = []
    for v in result[4].values:
        theory = theory_on(result.header.case, v.path)
        ratios.append(theory["nodes"][0]["coulomb"][0].d / (theory["eps1"].d + theory["eps2"].d))
    # No two paths are mirror images of each other.
    assert len({abs(ratio) for ratio in ratios}) == len(ratios)


def test_a_whole_number_is_a_resonance_of_its_own() -> None:
    """kappa = 3 at (1, -1 + t): 2a = 6t is 6 eps1 + 6 eps2 all along the path: tilted, whatever the charge."""
    result = checked(u2(("1", "-1"), ["3*t", "-3*t"], UNREFINED, charge=4))
    assert result.header.path.tilted
    check_kappa_on_every_path(result)
    with pytest.raises(PathError, match=r"6\*eps1 \+ 6\*eps2"):
        ratomega.limit(result.header.case, allow_tilt=False)


def test_the_irreducible_vacuum_is_a_limit_inside_a_limit() -> None:
    """c = 1, h -> 0 in the formula: 1, 0, 1/128, 1/128, 117/16384 for the block (Al. Zamolodchikov 1986), reached with
    kappa -> infinity; kappa = 1 is the pole of the family."""
    block = [R(1), R(0), R(1, 128), R(1, 128), R(117, 16384)]
    x = sympy.Symbol("x")
    power = sympy.series((1 - x) ** sympy.Rational(-1, 8), x, 0, 5).removeO()
    factor = [R(int(c.p), int(c.q)) for c in (power.coeff(x, n) for n in range(5))]
    z = [sum((block[j] * factor[k - j] for j in range(k + 1)), R(0)) for k in range(5)]
    assert z[:4] == [1, R(1, 8), R(5, 64), R(15, 256)]
    assert z[4] == R(1559, 32768)
    result = ratomega.limit(u2(("1", "-1"), ["1000000*t/3", "-1000000*t/3"], UNREFINED, charge=4))
    assert abs(result[4].values[0].value - z[4]) < R(1, 10**15)


# ---- resonant and finite by a theorem


def test_equal_coulomb_parameters() -> None:
    result = checked(u2(("1", "1"), ["0", "0"], charge=3))
    assert [c.value for c in result] == [1, R(1, 2), R(11, 108), R(61, 5184)]
    assert {c.independence for c in result} == {"theorem"}
    assert [c.worst_order for c in result] == [0, 1, 2, 3]
    assert result.header.path.tilted
    assert result.exit_status == 0
    assert set(verdicts(result).values()) == {Verdict.PROVED}


@pytest.mark.parametrize("tilt", ["t/7", "-3*t/5", "31*t/3"])
@pytest.mark.parametrize("eps", [("1", "1"), ("1 + t/2", "1 - t/3"), ("1 - t", "1")])
def test_explicit_tilts_agree_where_the_components_are_compact(tilt, eps) -> None:
    result = checked(u2(eps, tilted("0", tilt), charge=3))
    assert [c.value for c in result] == [1, R(1, 2), R(11, 108), R(61, 5184)]
    assert not result.header.path.tilted
    assert {c.independence for c in result} == {"theorem"}


def test_compact_at_low_charge_and_not_beyond() -> None:
    """2a = 2 eps1 + eps2: a theorem at charge 1, probes from charge 2 on."""
    result = checked(u2(("1", "2"), ["2", "-2"], charge=3))
    assert [c.independence == "theorem" for c in result] == [True, True, False, False]
    assert statuses(result) == ["finite", "finite", "pole", "pole"]


@pytest.mark.parametrize(
    ("point", "coulomb"), [(("1", "1"), ["1/3", "-1/3"]), (("1", "2"), ["1/3", "-1/5"]), (("3", "-2"), ["1/3", "-1/5"])]
)
def test_a_generic_case_is_proved(point, coulomb) -> None:
    result = checked(u2(point, coulomb, ["1/2", "1/4", "1/5", "1/7"], charge=4))
    assert set(statuses(result)) == {"finite"}
    assert {c.independence for c in result} == {"theorem"}
    assert all(not c.values for c in result)
    assert set(verdicts(result).values()) == {Verdict.PROVED}
    assert result.exit_status == 0


# ---- Ising


X = sympy.Symbol("x")
ROOT = sympy.sqrt(1 - X)
ISING = {
    (1, 1): ((1 + ROOT) / 2) ** sympy.Rational(1, 2),
    (1, 3): (2 * (1 - ROOT) / X) ** sympy.Rational(1, 2),
}
BLOCKS = {(1, 1): ["1", "0", "1/64", "1/64", "117/8192"], (1, 3): ["1", "1/4", "9/64", "25/256", "613/8192"]}


def expansion(function, top):
    series = sympy.series(function, X, 0, top + 1).removeO()
    return [series.coeff(X, n) for n in range(top + 1)]


@pytest.mark.parametrize("field", ISING, ids=["identity", "energy"])
@pytest.mark.parametrize("tilt", ["t/7", "-3*t/5"])
def test_ising_blocks(field, tilt) -> None:
    """Ratio -3/4, c = 1/2, external field (1, 2) four times (Belavin, Polyakov, Zamolodchikov 1984). The Coulomb
    parameter is a pole value; numerators save the limit, and the tilt drops out."""
    m, n = field
    masses = ["(eps1 + eps2)/2 + eps1 + 2*eps2", "(eps1 + eps2)/2"] * 2
    case = u2(("4", "-3"), tilted(f"({m}*eps1 + {n}*eps2)/2", tilt), masses, charge=6)
    block = (1 - X) ** sympy.Rational(-1, 8) * ISING[field]
    assert expansion(block, 4) == [sympy.Rational(c) for c in BLOCKS[field]]
    expected = expansion((1 - X) ** sympy.Rational(-1, 24) * block, 6)
    result = checked(case)
    assert set(statuses(result)) == {"finite"}
    assert [sympy.Rational(int(c.value.p), int(c.value.q)) for c in result] == expected
    # Beyond the first resonance the parameters alone prove nothing: further paths agree.
    assert result[6].independence == "agreement"
    assert result.exit_status == 0
    assert verdicts(result)[PATHS] is Verdict.AGREES


# ---- tilts


FROZEN = [
    (("1", "1"), ["0", "0"]),
    (("2", "1"), ["(eps1 + eps2)/2", "-(eps1 + eps2)/2"]),
    (("1", "3"), ["1", "-1"]),
    (("3", "-2"), ["1/3 + 2*eps1", "1/3", "1/3 - eps2"]),
]


@pytest.mark.parametrize(("eps", "coulomb"), FROZEN)
def test_no_tilt_names_a_factor_and_a_cure(eps, coulomb) -> None:
    case = make_case(*eps, [{"coulomb": coulomb}], charge=3)
    with pytest.raises(PathError) as caught:
        ratomega.limit(case, allow_tilt=False)
    (problem,) = caught.value.problems
    assert caught.value.exit_status == 2
    factor = re.search(r"the vector factor (.+) of colours (\d), (\d) vanishes identically", problem.message)
    assert factor is not None, problem.message
    # The named factor vanishes all along the case's own path.
    values = {f"a{c + 1}": sympy.sympify(text) for c, text in enumerate(coulomb)}
    parameters = {"eps1": sympy.sympify(eps[0]), "eps2": sympy.sympify(eps[1]) + sympy.Symbol("t")}
    named = sympy.sympify(factor[1])
    assert {f"a{factor[2]}", f"a{factor[3]}"} <= {str(symbol) for symbol in named.free_symbols}
    assert named.subs(values).subs(parameters).expand() == 0
    # And the named tilt is a cure.
    cure = re.findall(r'"([^"]+)"', problem.message)
    assert len(cure) == len(coulomb)
    cured = make_case(*eps, [{"coulomb": cure}], charge=3)
    result = ratomega.limit(cured, allow_tilt=False)
    assert not result.header.path.tilted
    assert all(line(x).c == line(y).c for x, y in zip(cure, result.header.path.coulomb[0][1], strict=True))
    # It is the tilt that the engine takes when it may.
    assert [(c.status, c.value, c.leading) for c in result] == [
        (c.status, c.value, c.leading) for c in ratomega.limit(case)
    ]


@pytest.mark.parametrize(("eps", "coulomb"), FROZEN)
def test_an_untilted_path_would_divide_by_zero(eps, coulomb) -> None:
    """The tilt is needed: on the case's own path the plain reference meets a denominator that is zero all along it."""
    case = make_case(*eps, [{"coulomb": coulomb}], charge=4)
    theory = theory_on(case, own_setting(case).text())
    e1, e2 = theory["eps1"], theory["eps2"]
    theory["nodes"][0]["coulomb"] = [
        plain.Line(a.constant, a.t) + e1 * a.eps1 + e2 * a.eps2 for a in case.theory.nodes[0].coulomb
    ]
    with pytest.raises(ZeroDivisionError):
        [plain.laurent_coefficient(theory, (k,)) for k in range(5)]


def test_the_tilt_is_one_for_the_whole_case() -> None:
    """Seeded by the physics alone: the same for every charge and title, whatever is asked."""
    paths = set()
    for charge in range(5):
        case = u2(("1", "-1"), ["0", "0"], UNREFINED, charge=charge)
        for result in (ratomega.limit(case), ratomega.detect(case), ratomega.validate(case)):
            paths.add(result.header.path.text())
    assert len(paths) == 1
    # Other physics, another tilt.
    assert own_setting(u2(("1", "-1"), ["0", "0"], charge=2)).text() not in paths


def test_tilts_of_one_case_are_not_mirror_images() -> None:
    for rank in (2, 3, 4):
        case = make_case("1", "1", [{"coulomb": ["1/3"] * rank}], charge=2)
        tilts = [dict(own_setting(case).tilts)["n1"]]
        tilts += [dict(probe_setting(case, number).tilts)["n1"] for number in range(1, 8)]
        # Same sum as before the tilt; no entry integral; no two paths share an entry up to sign.
        assert all(sum(tilt, R(0)) == 0 for tilt in tilts)
        assert all(s.q > 1 for tilt in tilts for s in tilt)
        sizes = [abs(tilt[0]) for tilt in tilts]
        assert len(set(map(str, sizes))) == len(sizes)
        if rank > 2:
            assert all(len({str(abs(s)) for s in tilt}) == rank for tilt in tilts)
        # The background leaves its ratio in another direction on each of them.
        directions = {str(probe_setting(case, n).eps2.slope / probe_setting(case, n).eps1.slope) for n in range(1, 8)}
        assert len(directions) > 4
        assert "1" not in directions


def test_only_the_resonant_node_is_tilted() -> None:
    nodes = [{"coulomb": ["1/3", "1/3"]}, {"coulomb": ["1/5", "-1/4"]}]
    result = checked(make_case("1", "1", nodes, charge=2, edges=[(1, 2, "1/7")]))
    path = dict(result.header.path.coulomb)
    assert [line(x).d != 0 for x in path["n1"]] == [True, True]
    assert path["n2"] == ("1/5", "-1/4")


# ---- probes and terms


def test_without_probes_independence_is_undecided() -> None:
    case = u2(("4", "-3"), tilted("(eps1 + eps2)/2", "t/7"), ["3*eps1/2 + 5*eps2/2", "(eps1 + eps2)/2"] * 2, charge=2)
    with_probes, without = checked(case), checked(case, probes=0)
    assert [c.value for c in without] == [c.value for c in with_probes]
    assert [c.independence for c in without] == ["theorem", "undecided", "undecided"]
    assert [c.independence for c in with_probes] == ["theorem", "agreement", "agreement"]
    assert (without.exit_status, with_probes.exit_status) == (3, 0)
    assert verdicts(without)[PATHS] is Verdict.UNDECIDED
    assert ratomega.validate(case, probes=0).exit_status == 3


def test_a_difference_outranks_what_is_undecided() -> None:
    case = u2(("1", "1 + t"), ["1 + t/7", "-1 - t/7"], charge=2)
    result = checked(case, probes=0)
    assert verdicts(result)[PATHS] is Verdict.UNDECIDED
    assert result.exit_status == 1
    assert result[1].independence == "undecided"


def test_probes_cannot_be_seen_where_compactness_decides() -> None:
    case = u2(("1", "1"), ["1/3", "-1/3"], charge=3)
    assert ratomega.limit(case, probes=0).coefficients == ratomega.limit(case).coefficients
    assert ratomega.limit(case, probes=0).exit_status == 0


@pytest.mark.parametrize("bad", [-1, 21])
def test_the_number_of_probes_is_bounded(bad) -> None:
    with pytest.raises(InputError, match="between 0 and 20"):
        ratomega.limit(u2(("1", "1"), ["1/3", "-1/3"], charge=1), probes=bad)


@pytest.mark.parametrize("terms", [0, 1, 4])
def test_terms(terms) -> None:
    for case in (
        u2(("1", "1"), ["1/3", "1/3"], ["1/2", "3/11"], charge=3),
        u2(("2", "1"), tilted("3/2", "t/7"), ["7/2", "5/2"], charge=2),
        u2(("1", "-1"), tilted("0", "t/3"), UNREFINED, charge=4),
    ):
        result = ratomega.limit(case, terms=terms)
        check_result(result, last=terms)
        plainly = ratomega.limit(case)
        for c in result:
            assert c.terms[-1][0] == terms
            assert plainly[c.charge].terms is None
            shown = c.leading if c.status == "pole" else dict(c.terms)[0]
            assert shown == dict(c.terms)[-c.order]


@pytest.mark.parametrize("bad", [-1, 1000])
def test_terms_are_bounded(bad) -> None:
    with pytest.raises(InputError, match="last power of t"):
        ratomega.limit(u2(("1", "1"), ["1/3", "-1/3"], charge=1), terms=bad)


# ---- certificates


def cluster_sums(theory, charge, last=0):
    """{limiting contents: {power: coefficient}}, by the plain reference, for one node."""
    values, node = {}, theory["nodes"][0]
    for c in plain.configurations([len(node["coulomb"])], (charge,)):
        contents = [
            str(a.c + (i - 1) * theory["eps1"].c + (j - 1) * theory["eps2"].c)
            for a, diagram in zip(node["coulomb"], c[0], strict=True)
            for i, j in plain.boxes(diagram)
        ]
        sums = values.setdefault(tuple(sorted(contents)), {})
        for power, value in plain.laurent_weight(theory, c, last).items():
            sums[power] = sums.get(power, R(0)) + value
    return {key: {power: v for power, v in sums.items() if v != 0} for key, sums in values.items()}


def test_clusters_that_cancel_only_against_each_other() -> None:
    """Non-compact clusters may keep a pole where the total has none: that is no fault of the total."""
    case = u2(("1", "-1"), ["-1 + 2*t/7", "-1 + t/3"], ["1"], charge=2)
    weights = Weights(own_setting(case))
    limits = [charge_limit(weights, (k,), [Weights(probe_setting(case, 1))]) for k in (0, 2)]
    check = check_cancellation(limits)
    assert (check.verdict, check.kind) == (Verdict.PROVED, Kind.THEOREM)
    assert "2 non-compact clusters cancel only against each other" in check.evidence
    alone = [sums[-1] for sums in cluster_sums(plain_theory(own_setting(case)), 2).values() if -1 in sums]
    assert sorted(alone) == [R(-21, 220), R(21, 220)]
    assert -1 not in plain.laurent_coefficient(plain_theory(own_setting(case)), (2,))
    # At charge 1 a pole survives.
    check = check_cancellation([*limits, charge_limit(weights, (1,))])
    assert check.verdict is Verdict.REFUTED
    assert "charge 1: pole of order 1, leading coefficient 21/55" in check.evidence


def test_the_total_is_the_same_on_every_path_and_its_clusters_are_not() -> None:
    """(2, 1), 2a = 5, charge 4: 3/242 in total, while single clusters depend on the path (plain reference)."""
    masses = ["-1/2", "1/2", "3/2", "9/2"]
    one, other = (u2(("2", "1"), tilted("5/2", tilt), masses, charge=4) for tilt in ("t/7", "-3*t/5"))
    first, second = (cluster_sums(plain_theory(own_setting(case)), 4) for case in (one, other))
    assert any(first[key] != second[key] for key in first)
    for sums in (first, second):
        assert sum((x.get(0, R(0)) for x in sums.values()), R(0)) == R(3, 242)
    assert ratomega.limit(one)[4].value == ratomega.limit(other)[4].value == R(3, 242)


def test_foresight_is_compared_with_what_happened() -> None:
    proved = ratomega.limit(u2(("1", "2"), ["1/3", "-1/5"], charge=3)).checks[2]
    assert (proved.verdict, proved.kind) == (Verdict.PROVED, Kind.THEOREM)
    unforeseen = ratomega.limit(u2(("2", "1"), tilted("5/2", "t/7"), ["-1/2", "1/2", "3/2", "9/2"], charge=4)).checks[2]
    assert unforeseen.verdict is Verdict.UNDECIDED
    assert "from charge 2 on" in unforeseen.evidence
    assert "charge 3: path-dependent, charge 4: finite" in unforeseen.evidence


def test_orders_inside_clusters_are_certified() -> None:
    result = ratomega.validate(u2(("1", "1"), ["0", "0"], ["1/2", "-1"], charge=4))
    orders = next(check for check in result.checks if check.name == "equal orders in a cluster")
    assert (orders.verdict, orders.kind) == (Verdict.PROVED, Kind.CONSISTENCY)
    # 1 + 1 + 2 + 3 + 4 clusters of two equal colours at ratio 1:1, charges 0 to 4.
    assert orders.evidence.startswith("11 clusters")


def test_validate_probes_also_where_a_theorem_decides() -> None:
    result = ratomega.validate(u2(("1", "1"), ["1/3", "-1/3"], charge=2), probes=4)
    paths = next(check for check in result.checks if check.name == PATHS)
    assert paths.verdict is Verdict.PROVED
    assert "4 further paths give the same values" in paths.evidence


# ---- a path that stays on the ratio


def test_a_path_on_the_ratio_is_refused_where_something_is_singular() -> None:
    stuck = make_case("1 + t", "1 + t", [{"coulomb": ["1/3", "-1/3"]}], charge=2)
    with pytest.raises(PathError, match="stays on the ratio 1"):
        ratomega.limit(stuck)
    # Below the first singular charge nothing is: the values are those of any path.
    for eps, charge in ((("1 + t", "1 + t"), 1), (("1 + t", "-1 - t"), 3)):
        case = make_case(*eps, [{"coulomb": ["1/3", "-1/5"]}], charge=charge)
        checked(case)
