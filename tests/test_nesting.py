"""Limits inside limits: u -> 0 before t -> 0."""

from __future__ import annotations

from dataclasses import replace

import irreducible
import plain
import pytest
from flint import fmpq

import ratomega
from ratomega.case.case import Case
from ratomega.case.reading import case_from_mapping, case_to_mapping, load_case
from ratomega.chain.nesting import nested_checks, nested_result
from ratomega.cli.main import main
from ratomega.errors import InputError
from ratomega.exact.quadratic import Quadratic
from ratomega.exact.rational import Rational
from ratomega.regulator.nested import nested_limits
from ratomega.validator.verdict import Verdict

HALF = "1/2 + (eps1 + eps2)/2"
SMALL = "(eps1 + eps2)/2"


def nested(eps2, coulomb, *, eps1="1", charge=3, **matter) -> Case:
    node = {"coulomb": coulomb, **matter}
    return load_case({"charge": charge, "background": {"eps1": eps1, "eps2": eps2}, "node": [node]})


def stripped(name):
    """The block behind four flavours of weights 1/16: Z times (1 - x)^(1/8)."""
    z = [c.value for c in ratomega.limit(name)]
    power = [Rational(1)]
    for n in range(1, len(z)):
        power.append(power[-1] * (Rational(n - 1) - Rational(1, 8)) / n)
    return [sum((power[j] * z[n - j] for j in range(n + 1)), Rational(0)) for n in range(len(z))]


def test_both_vacuum_blocks_at_central_charge_one():
    """Al. Zamolodchikov 1986 at h -> 0; and the irreducible vacuum, a degenerate field reached by a limit in the
    central charge (Nemkov, Ribault 2106.15132)."""
    assert [str(x) for x in stripped("vacuum-from-momentum")] == ["1", "0", "1/128", "1/128", "117/16384"]
    assert [str(x) for x in stripped("vacuum-degenerate")] == ["1", "0", "1/128", "1/128", "701/98304"]


def test_the_degenerate_vacuum_is_that_of_the_irreducible_module():
    """The Gram matrix without its null vectors, at c = 1, h = 0 and external weights 1/16."""
    from fractions import Fraction

    fields = [Fraction(1, 16)] * 4
    expected, _ = irreducible.block(Fraction(1), Fraction(0), fields, 4)
    assert [str(x) for x in stripped("vacuum-degenerate")] == [str(x) for x in expected]


ROUTES = ["pole recursion in the Coulomb parameter", "Gram matrix of Virasoro descendants"]


def test_validate_says_why_they_differ():
    for name, value in (("vacuum-degenerate", "1169/24576"), ("vacuum-from-momentum", "1559/32768")):
        result = ratomega.validate(name)
        assert result.exit_status == 0
        order = next(check for check in result.checks if check.name == "order of the two limits")
        assert order.verdict is Verdict.AGREES
        assert "do not commute" in order.evidence
        assert f"charge 4: u before t gives {value}; u = " in order.evidence
        assert [check.name for check in result.routes] == ROUTES
        assert ratomega.load_result(ratomega.to_json(result)) == result
        limits = ratomega.limit(name)
        assert ratomega.load_result(ratomega.to_json(limits)) == limits
        assert limits.header.path.parameters == ("u", "t")


# ---- against the plain sum at numbers t = P and u = P^m: modulo the prime P it is the nested limit ----

PRIME = 2**89 - 1
CASES = {
    "smooth": nested("1 + t", ["1/3 + u", "-1/3"], antifundamental=["1/2"]),
    "degenerate momentum": nested(
        "-2 + t",
        ["(eps1 + 2*eps2)/2 + u/5", "-(eps1 + 2*eps2)/2 - u/5"],
        eps1="3",
        antifundamental=["2*eps1 - eps1/2", "eps2", "1/2", "1/7"],
    ),
    "vacuum": nested(
        "-1 + t",
        ["(eps1 + eps2)/2 + u/3", "-(eps1 + eps2)/2 - u/3"],
        antifundamental=[HALF, SMALL, HALF, SMALL],
        charge=4,
    ),
    "vacuum, other order": nested("-1 + u", ["t", "-t"], antifundamental=[HALF, SMALL, HALF, SMALL], charge=4),
    "equal momenta": nested("1 + t", ["u", "-u"]),
    "ratio two": nested("2 + u", ["3/2 + t", "-3/2"], antifundamental=["5/2", "7/2"], charge=2),
    "three colours": nested("1 + t", ["1 + u/2", "2*t", "-1"], charge=2),
    "adjoint": nested("1 + u", ["1/2 + t", "-1/3"], adjoint=["1 + t/5 + u"]),
}


def at_numbers(case, t, u):
    """The plain theory at numbers t and u."""

    def eps(affine):
        return affine.constant + affine.t * t + affine.coefficient("u") * u

    eps1, eps2 = (eps(x) for x in case.background.affine())

    def value(x):
        return x.constant + x.eps1 * eps1 + x.eps2 * eps2 + x.t * t + x.coefficient("u") * u

    nodes = [
        {
            key: [value(x) for x in getattr(node, key)]
            for key in ("coulomb", "antifundamental", "fundamental", "adjoint")
        }
        for node in case.theory.nodes
    ]
    return {"eps1": eps1, "eps2": eps2, "nodes": nodes, "edges": []}


@pytest.mark.parametrize("name", CASES)
def test_the_nested_limit_is_the_plain_sum_modulo_a_prime(name):
    case = CASES[name]
    found = nested_limits(case)
    assert found.spare_bits >= 64
    t, u = fmpq(PRIME), fmpq(PRIME) ** 60
    theory = at_numbers(case, t, u)
    for limit in found.limits:
        rest = plain.coefficient(theory, limit.charge) * t**limit.order * u**limit.inner_order - limit.value
        assert int(rest.p) % PRIME == 0
        assert int(rest.q) % PRIME != 0


def test_a_wrong_value_is_refuted_by_both_routes():
    case = load_case("vacuum-degenerate")
    result = nested_result(case, allow_tilt=True, most_configurations=1000)
    last = result.coefficients[-1]
    assert last.value is not None
    wrong = replace(
        result, coefficients=(*result.coefficients[:-1], replace(last, value=last.value + Rational(1, 98304)))
    )
    refuted = {check.name: check for check in nested_checks(case, wrong) if check.verdict is Verdict.REFUTED}
    assert set(refuted) == set(ROUTES)
    for check in refuted.values():
        assert "first difference at charge 4: this way " in check.evidence
        assert check.evidence.endswith(" modulo P")
        assert not check.complete


def test_where_all_is_compact_the_order_does_not_matter():
    case = CASES["smooth"]
    result = ratomega.validate(case)
    assert {c.independence for c in ratomega.limit(case)} == {"theorem"}
    order = next(check for check in result.checks if check.name == "order of the two limits")
    assert "equal at all charges" in order.evidence
    plain_path = load_case(
        {
            "charge": 3,
            "background": {"eps1": "1", "eps2": "1"},
            "node": [{"coulomb": ["1/3", "-1/3"], "antifundamental": ["1/2"]}],
        }
    )
    assert [c.value for c in ratomega.limit(case)] == [c.value for c in ratomega.limit(plain_path)]


def test_poles_in_u_and_in_t_are_results():
    inner = ratomega.limit(nested("2 + t", ["(eps1 + eps2)/2 + u", "-(eps1 + eps2)/2"], charge=1))
    outer = ratomega.limit(nested("2 + u", ["3/2 + t", "-3/2"], charge=1))
    for result in (inner, outer):
        assert (result[1].status, result[1].order, result.exit_status) == ("pole", 1, 1)
    # The published first coefficient, -2/(eps1 eps2 ((a1-a2)^2 - eps^2)) (Nekrasov hep-th/0206161): by hand.
    assert str(inner[1].leading) == "-1/6"
    assert str(outer[1].leading) == "-1/6"


def test_beyond_the_rationals():
    case = nested("1 + t", ["i/2 + u", "-i/2"], charge=2)
    values = [c.value for c in ratomega.limit(case)]
    assert [str(x) for x in values] == ["1", "2/5", "7/100"]
    shifted = ratomega.limit(nested("1 + t", ["i/2 + u", "-i/2"], charge=1, antifundamental=["i"]))
    assert isinstance(shifted[1].value, Quadratic)


@pytest.mark.parametrize("name", CASES)
def test_reading_back(name):
    case = CASES[name]
    assert case_from_mapping(case_to_mapping(case)) == case
    assert case.nested
    assert not case.inner(Rational(5)).nested


def test_u_counts_in_the_hash():
    one, two = nested("1 + u", ["t", "1/3"]), nested("1 + t", ["t", "1/3"])
    assert one.hash != two.hash
    assert not two.nested


@pytest.mark.parametrize("call", [ratomega.detect, ratomega.clusters, lambda case: ratomega.average(case, of="size")])
def test_commands_that_follow_one_path_refuse(call):
    arguments = (CASES["smooth"], 1) if call is ratomega.clusters else (CASES["smooth"],)
    with pytest.raises(InputError, match="u stands for a limit inside the limit"):
        call(*arguments)


@pytest.mark.parametrize(
    "options", [{"terms": 1}, {"route": "poles"}, {"certify": True}, {"workers": 2}, {"keep": "nowhere.sqlite"}]
)
def test_options_of_other_ways_are_refused(options):
    with pytest.raises(InputError, match="taken in one way"):
        ratomega.limit(CASES["smooth"], **options)


@pytest.mark.parametrize("number", [0, 1, 3])
def test_a_number_of_further_paths_is_refused(number, capsys):
    """Also 0, and the number that other cases take by themselves."""
    for call in (ratomega.limit, ratomega.validate):
        with pytest.raises(InputError, match=r"probes: .*follows no single path"):
            call(CASES["smooth"], probes=number)
    for command in ("limit", "validate"):
        with pytest.raises(SystemExit) as stopped:
            main([command, "vacuum-degenerate", "--probes", str(number)])
        assert stopped.value.code == 2
        shown = capsys.readouterr()
        assert shown.out == ""
        assert shown.err.startswith("ratomega: probes: a limit inside the limit (u) follows no single path")
        assert shown.err.count("\n") == 1


def test_symbols_and_u_do_not_go_together():
    with pytest.raises(InputError, match="takes no symbols"):
        load_case(
            {"charge": 1, "symbols": ["a"], "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["a", "u"]}]}
        )
    with pytest.raises(InputError, match="u has its own meaning"):
        load_case({"charge": 1, "symbols": ["u"], "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["u"]}]})


def test_a_tilt_of_the_inner_limit_is_said():
    """Equal Coulomb parameters that u does not move: tilted where that is harmless, refused where the limit would
    depend on the tilt, as at a1 - a2 = t = eps1 + eps2."""
    result = ratomega.limit(nested("1 + t", ["0", "0"], antifundamental=["1/3 + u"], charge=1))
    assert any("tilted by multiples of u" in warning for warning in result.header.warnings)
    # Parameters that meet at t = 0 alone are no reason for a warning.
    for untilted in (CASES["smooth"], load_case("vacuum-from-momentum"), load_case("vacuum-degenerate")):
        assert not ratomega.limit(untilted).header.warnings
    with pytest.raises(InputError, match="give multiples of u of your own"):
        ratomega.limit(nested("-1 + t", ["t/2", "-t/2"], antifundamental=["1/3 + u"], charge=1))


def test_a_pole_in_u_is_not_called_one_in_t():
    from ratomega.desk.latex import limit_latex
    from ratomega.desk.text import limit_text

    result = ratomega.limit(nested("2 + t", ["(eps1 + eps2)/2 + u", "-(eps1 + eps2)/2"], charge=1))
    for text in (limit_text(result), limit_latex(result)):
        assert "pole of order 1" in text
        assert "pole t^" not in text
        assert "pole $t" not in text
    assert "u^-1 t^-0" in result.checks[0].evidence
