"""Conformal blocks from cases in either language: published values, three forms, routes, documents, the command."""

from __future__ import annotations

import json
from fractions import Fraction
from itertools import permutations

import plain
import pytest
from building import plain_theory
from flint import fmpq
from test_cli import run

import ratomega
from ratomega.case.setting import own_setting
from ratomega.chain import blocks
from ratomega.conformal.correlator import Correlator
from ratomega.exact.laurent import Laurent
from ratomega.validator.blocks import GRAM, RECURSION

SUM = "the sum over pairs of diagrams"


def case(external, internal, order=3, **central):
    return {"conformal": {**central, "external": external, "internal": internal, "order": order}}


def weight(x):
    return {"weight": x}


def kac(r, s):
    return {"kac": [r, s]}


def block_of(found):
    return [str(one.block) for one in found]


def verdicts(found):
    return {check.name: check.verdict.value for check in found.checks}


# ---- published values


def test_weights_one_sixteenth_and_fifteen_sixteenths_at_h_3_7():
    # (16 q_e)^h [x(1-x)]^(-1/8)/theta_3 and (16 q_e)^(h-1) [x(1-x)]^(-7/8) theta_3^(-3): Al. Zamolodchikov 1986;
    # expanded in fractions without their powers of x.
    first = ratomega.block(case([weight("1/16")] * 4, weight("3/7"), c=1))
    assert block_of(first) == ["1", "3/14", "739/6272", "7123/87808"]
    second = ratomega.block(case([weight("15/16")] * 4, weight("3/7"), c=25))
    assert block_of(second) == ["1", "3/14", "1131/6272", "13787/87808"]
    for found in (first, second):
        assert [one.elliptic for one in found] == [1, 0, 0, 0]
        assert verdicts(found) == dict.fromkeys([GRAM, "the elementary block", SUM], "agrees")
        assert found.route == RECURSION
        assert found.exit_status == 0
    assert (str(first.dictionary.coulomb), str(second.dictionary.coulomb)) == ("1/7*sqrt(21)", "2/7*sqrt(7)")


@pytest.mark.parametrize(
    ("c", "channel", "values"),
    [
        # A. Belavin, A. Polyakov, A. Zamolodchikov 1984.
        ("1/2", (1, 1), "1 0 1/64 1/64 117/8192"),
        ("1/2", (2, 1), "1 1/4 9/64 25/256 613/8192"),
        # (1-x)^(1/5) 2F1(2/5, 3/5; 6/5; x) and (1-x)^(1/5) 2F1(1/5, 2/5; 4/5; x): J. Cardy 1985.
        ("-22/5", (1, 1), "1 0 -1/55 -1/55 -9/550"),
        ("-22/5", (1, 2), "1 -1/10 -4/75 -9/250"),
    ],
)
def test_ising_and_lee_yang_by_kac_labels(c, channel, values):
    expected = values.split()
    found = ratomega.block(case([kac(1, 2)] * 4, kac(*channel), len(expected) - 1, c=c))
    assert block_of(found) == expected
    assert set(verdicts(found).values()) == {"agrees"}
    assert len(found.checks) == 3
    assert found.route == GRAM
    assert found.degenerate[0] in (channel, (1, 3))
    assert {one.independence for one in found} == {"theorem", "agreement"}


def first_two(c, h, h0, hx, h1, hinf):
    """Orders 1 and 2 of a four-point block: A. Belavin, A. Polyakov, A. Zamolodchikov 1984."""

    def f(a, b):
        return (a + b) / 2 + h * (h - 1) / (2 * (2 * h + 1)) - 3 * (a - b) ** 2 / (2 * (2 * h + 1))

    left, right = h + hx - h0, h + h1 - hinf
    second = left * (left + 1) * right * (right + 1) / (4 * h * (2 * h + 1))
    second += 2 * f(h0, hx) * f(h1, hinf) / (c + 2 * h * (8 * h - 5) / (2 * h + 1))
    return [left * right / (2 * h), second]


@pytest.mark.parametrize("order_of_fields", [(0, 1, 2, 3), (2, 0, 3, 1), (3, 2, 1, 0)])
def test_mixed_kinds_against_the_first_two_orders(order_of_fields):
    # b^2 = -4/3: eps1 = 4, eps2 = -3, eps^2/4 = 1/4, so a momentum P has the weight (1/4 - P^2)/(-12).
    fields = [weight("2/7"), {"momentum": "1/5"}, kac(2, 1), {"momentum": "eps1/4 - 1/3"}]
    weights = [Fraction(2, 7)] + [(Fraction(1, 4) - p * p) / -12 for p in (Fraction(1, 5), Fraction(5, 2),
                                                                          Fraction(2, 3))]
    assert weights[2] == Fraction(1, 2)
    found = ratomega.block(case([fields[n] for n in order_of_fields], weight("5/9"), 2, c="1/2"))
    expected = first_two(Fraction(1, 2), Fraction(5, 9), *(weights[n] for n in order_of_fields))
    assert [Fraction(x) for x in block_of(found)] == [1, *expected]
    assert [Fraction(str(one.weight)) for one in found.dictionary.external] == [weights[n] for n in order_of_fields]
    assert str(found.dictionary.internal.weight) == "5/9"
    assert verdicts(found)[GRAM] == "agrees"


@pytest.mark.parametrize("ratio", ["2", "-1/2", "7/5", "-4/3"])
def test_first_order_on_the_torus(ratio):
    # 1 + D(D - 1)/(2h), with the U(1) factor stripped (V. Fateev, A. Litvinov, arXiv 0912.0504); Z has
    # 2 (m - eps1)(m - eps2)/(eps1 eps2) (1 + m (eps - m)/(4 a^2 - eps^2)) (Flume, Poghossian hep-th/0208176).
    d, h = Fraction(3, 8), Fraction(5, 11)
    found = ratomega.block(case([weight(str(d))], weight(str(h)), 2, b_squared=ratio))
    first = 1 + d * (d - 1) / (2 * h)
    assert Fraction(str(found[1].block)) == first
    assert Fraction(str(found[1].elliptic)) == first - 1
    assert Fraction(str(found[1].gauge)) == first + 1 - 2 * d
    assert verdicts(found)[GRAM] == "agrees"


@pytest.mark.parametrize("ratio", ["3/2", "-5/3", "2"])
@pytest.mark.parametrize("sign", ["+", "-"])
def test_the_family_with_h_1_by_momenta(ratio, sign):
    # V. Fateev, A. Litvinov, A. Neveu, E. Onofri, arXiv 0902.1331: eps1^2/16 three times, (eps1/4 ± eps2/2)^2 once.
    fields = [{"momentum": "eps1/4"}] * 3 + [{"momentum": f"eps1/4 {sign} eps2/2"}]
    for external in set(map(tuple, permutations([0, 0, 0, 3]))):
        found = ratomega.block(case([fields[n] for n in external], weight("2/9"), b_squared=ratio))
        assert [one.elliptic for one in found] == [1, 0, 0, 0]
        assert verdicts(found)["the elementary block"] == "agrees"


# ---- what is given and what is left out


def test_a_weight_needs_no_rational_momentum():
    found = ratomega.block(case([weight(x) for x in ("5/7", "1/3", "2/5", "1")], weight("8/9"), 2, b_squared=2))
    expected = first_two(28, Fraction(8, 9), *(Fraction(x) for x in ("5/7", "1/3", "2/5", "1")))
    assert [Fraction(x) for x in block_of(found)] == [1, *expected]
    assert found.gauge is None
    assert "occur together" in found.gauge_reason
    assert found.z_reason.startswith("the momenta at x and 1, which the exponent of the U(1) factor needs")
    assert all(one.gauge is None for one in found)
    assert [check.name for check in found.checks] == [GRAM]


def test_z_is_there_where_only_its_prefactor_is_rational():
    # Momenta sqrt(2)/3 at x and 3 sqrt(2) at 1 have the exponent -2 (sqrt(2)/3)(3 sqrt(2)) = -4 at c = 1; the others
    # lie in other fields, and so does a.
    external = [weight("1/3"), {"momentum": "sqrt(2)/3"}, {"momentum": "3*sqrt(2)"}, weight("1/5")]
    found = ratomega.block(case(external, weight("1/7"), 2, c=1))
    assert found.gauge is None
    assert (found.z_reason, found.dictionary.exponent) == ("", -4)
    assert found[1].gauge == found[1].block + 4
    external[2] = {"momentum": "1/5"}
    assert ratomega.block(case(external, weight("1/7"), 2, c=1)).z_reason == (
        "the exponent -2/15*sqrt(2) of the U(1) factor is not rational"
    )


def test_z_in_gauge_terms_is_that_of_the_gauge_case():
    for name in ("b1-four-flavours", "adjoint-on-the-path", "block-mixed-fields", "block-torus"):
        found = ratomega.block(name, order=3)
        limits = ratomega.limit(ratomega.load_case(name).with_charge(3))
        assert [one.gauge for one in found] == [one.value for one in limits]
        assert verdicts(found)[SUM] == "agrees"


def test_the_conformal_form_of_a_gauge_case():
    # Masses m0 ± P_0, m1 ± P_inf with eps/2 = 1: here 1 + 1/2, 1, 1 + 1/2, 1, so all P are 1/4 and weights 15/16.
    d = ratomega.block("c25-closed-form").dictionary
    assert (d.central_charge, d.b_squared, d.coulomb, d.exponent) == (25, 1, fmpq(2, 7), 2 * fmpq(25, 16))
    assert [one.weight for one in d.external] == [fmpq(15, 16)] * 4
    assert d.internal.weight == 1 - fmpq(4, 49)


@pytest.mark.parametrize(
    "name", ["u2-pure", "surviving-pole", "two-ranks", "u3-pure", "free-momentum", "vacuum-degenerate"]
)
def test_other_theories_have_no_block_of_primary_fields(name):
    with pytest.raises(ratomega.InputError, match=r"four flavours or one adjoint|give numbers for a|limit inside"):
        ratomega.block(name)


# ---- degenerate internal weights


def test_a_pole_that_survives_is_a_result():
    # The leading coefficient is that of Z on the same path, from the plain reference.
    found = ratomega.block(case([weight("5/8")], kac(2, 1), b_squared=2))
    assert found.degenerate == ((2, 1), (1, 3))
    assert [one.status for one in found] == ["finite", "finite", "pole", "pole"]
    assert (found[2].block, found[2].gauge, found[2].elliptic) == (None, None, None)
    setting = own_setting(found.gauge)
    assert not setting.tilted
    expected = plain.laurent_coefficient(plain_theory(setting), (2,))
    assert (-found[2].pole_order, found[2].leading) == min(expected.items())
    assert verdicts(found)[RECURSION] == "agrees"
    assert found.exit_status == 1


def test_the_vacuum_at_c_1_depends_on_the_path():
    # (16 q_e)^0 form: 1, 0, 1/128, 1/128 for every order of limits, then two published answers (Al. Zamolodchikov 1986
    # against the irreducible vacuum): no single value at order 4.
    found = ratomega.block(case([weight("1/16")] * 4, weight(0), 4, c=1))
    assert block_of(found) == ["1", "0", "1/128", "1/128", "None"]
    assert found[4].status == "path-dependent"
    assert len({v.value for v in found[4].values}) == 4
    # On the path the momenta leave the family with H = 1, so that its value does not speak for it.
    assert verdicts(found) == dict.fromkeys([RECURSION, SUM], "agrees")
    assert found.exit_status == 1
    assert "internal momentum 0;" in found.path
    assert "eps2 = -1 + t" in found.path


def test_the_family_with_h_1_at_a_degenerate_weight():
    # Its residues vanish, so that there is no pole; it holds all along the path, since the fields move along.
    fields = [{"momentum": "eps1/4"}] * 3 + [{"momentum": "eps1/4 + eps2/2"}]
    found = ratomega.block(case(fields, kac(1, 2), b_squared=2))
    assert found.degenerate == ((1, 2),)
    assert [one.elliptic for one in found] == [1, 0, 0, 0]
    assert verdicts(found) == dict.fromkeys([RECURSION, "the elementary block", SUM], "agrees")


def test_a_field_that_is_the_identity_leaves_a_torus_character():
    # The identity on the torus counts states: partitions, degenerate or not.
    found = ratomega.block(case([kac(1, 1)], kac(1, 2), 5, b_squared=2))
    assert block_of(found) == ["1", "1", "2", "3", "5", "7"]
    assert found[2].independence == "agreement"


# ---- orders and refusals


def test_a_high_order_by_the_recursion():
    found = ratomega.block(case([weight("15/16")] * 4, weight("3/7"), 14, c=25))
    assert all(one.elliptic == 0 for one in found.coefficients[1:])
    checks = {check.name: check for check in found.checks}
    assert checks["the elementary block"].complete
    assert not checks[GRAM].complete
    assert checks[GRAM].evidence.endswith("up to x^10")


def test_an_order_that_nothing_reaches_is_refused():
    with pytest.raises(ratomega.InputError, match=r"order: the internal weight is h_\(1,1\).* order 10 at most"):
        ratomega.block(case([weight("1/16")] * 4, weight(0), 40, c=1))
    irrational = [{"momentum": "1 + i"}] * 4
    with pytest.raises(ratomega.InputError, match=r"does not go to order 12 here .* ask for order 10 at most"):
        ratomega.block(case(irrational, weight(3), 12, c=1))
    assert len(ratomega.block(case(irrational, weight(3), 2, c=1)).coefficients) == 3
    with pytest.raises(ratomega.InputError, match=r"order 60 here .* and short numbers\), .* ask for order 24 at most"):
        ratomega.block(case([weight(f"{10**150 + 1}/7")], weight("1/3"), 60, c=1))
    with pytest.raises(ratomega.InputError, match=r"order 150 here .* ask for order 20 at most"):
        ratomega.block(case([weight(3)], weight("1/3"), 150, b_squared="999999/1000000"))
    with pytest.raises(ratomega.InputError, match="between 0 and 150"):
        ratomega.block("block-torus", order=151)
    assert block_of(ratomega.block("block-torus", order=0)) == ["1"]


# ---- faults


def test_a_wrong_recursion_is_refuted_by_all_others(monkeypatch):
    def wrong(correlator, last):
        values = blocks_recursion(correlator, last)
        return [*values[:2], values[2] + 1, *values[3:]]

    blocks_recursion = blocks.recursion_values
    monkeypatch.setattr(blocks, "recursion_values", wrong)
    found = ratomega.block(case([weight("15/16")] * 4, weight("3/7"), c=25))
    assert verdicts(found) == dict.fromkeys([GRAM, "the elementary block", SUM], "refuted")
    assert found.exit_status == 1
    assert "first difference at x^2" in found.checks[0].evidence
    assert found.summary.startswith("coefficients from the pole recursion in the internal weight; no other route")
    assert ratomega.load_result(ratomega.to_json(found)) == found


def test_a_wrong_gram_series_is_refuted_at_a_degenerate_weight(monkeypatch):
    right = Correlator.coefficients

    def wrong(self, last):
        values = right(self, last)
        return (*values[:2], values[2] + Laurent.constant(fmpq(1, 10**6), precision=values[2].precision), *values[3:])

    monkeypatch.setattr(Correlator, "coefficients", wrong)
    found = ratomega.block(case([kac(1, 2)] * 4, kac(1, 1), c="1/2"))
    assert set(verdicts(found).values()) == {"refuted"}
    assert len(found.checks) == 3


# ---- documents and command


@pytest.mark.parametrize(
    "source",
    [
        "block-mixed-fields",
        "ising-energy",
        "imaginary-momenta",
        case([weight("2/3")], kac(1, 2), b_squared=2),
        case([weight("1/16")] * 4, weight(0), 4, c=1),
        case([weight(x) for x in ("5/7", "1/3", "2/5", "1")], weight("8/9"), 2, b_squared=2),
    ],
)
def test_a_result_travels_as_json(source):
    found = ratomega.block(source)
    text = ratomega.to_json(found)
    assert ratomega.load_result(text) == found
    assert ratomega.to_json(ratomega.load_result(text)) == text
    assert isinstance(found, ratomega.BlockResult)
    assert [one.order for one in found] == list(range(len(found.coefficients)))
    with pytest.raises(KeyError):
        found[len(found.coefficients)]


@pytest.mark.parametrize(
    ("change", "said"),
    [
        (lambda d: d.update(hash="0" * 16), "does not belong to the case"),
        (lambda d: d.update(summary="fine"), "summary"),
        (lambda d: d["coefficients"][1].update(block="2/4"), "lowest terms"),
        (lambda d: d["coefficients"][1].update(order="1"), "integer"),
        (lambda d: d["dictionary"].update(c="sqrt"), "not an exact number"),
        (lambda d: d["dictionary"].update(eps1="1*sqrt(2)"), "not rational"),
        (lambda d: d["case"]["conformal"].update(order=-1), "between 0 and 150"),
        (lambda d: d.update(degenerate={}), "expected a list"),
        (lambda d: d.update(z_reason=3), "expected a text"),
    ],
)
def test_a_damaged_document_is_refused(change, said):
    document = json.loads(ratomega.to_json(ratomega.block("block-torus", order=1)))
    change(document)
    with pytest.raises(ratomega.InputError, match=said):
        ratomega.load_result(json.dumps(document))


def test_the_command(tmp_path):
    done = run("block", "block-mixed-fields", "--order", "2")
    assert (done.returncode, done.stderr) == (0, "")
    assert "U(1) factor Z/block            (1 - x)^(6)" in done.stdout
    assert "internal: weight; momentum     3/7; 2/7*sqrt(7)" in done.stdout
    same = run("block", "block-mixed-fields", "--charge", "2", "--json")
    assert ratomega.load_result(same.stdout) == ratomega.block("block-mixed-fields", order=2)
    path = tmp_path / "pole.toml"
    path.write_text(
        '[conformal]\nb_squared = 2\nexternal = [{ weight = "2/3" }]\ninternal = { kac = [1, 2] }\norder = 2\n'
    )
    done = run("block", str(path))
    assert done.returncode == 1
    assert "pole t^-1" in done.stdout
    assert "(r,s) = (1,2); from order 2 on limits t -> 0" in done.stdout
    assert "the central charge moves" in done.stdout
    assert "q^2, path by path" in done.stdout
    done = run("block", "u2-pure")
    assert (done.returncode, done.stdout) == (2, "")
    assert "four flavours or one adjoint" in done.stderr
    left_out = run("block", "imaginary-momenta", "--order", "1").stdout
    assert "Z is left out: the exponent 2 + 1*sqrt(-1) of the U(1) factor is not rational" in left_out
