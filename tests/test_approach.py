"""Balls at irrational ratios against the exact limits, and against an evaluation in plain high-precision arithmetic."""

from __future__ import annotations

import re
from itertools import pairwise

import mpmath
import plain
import pytest
from click.testing import CliRunner

import ratomega
from ratomega.cli.main import cli
from ratomega.errors import InputError

CASE = {"charge": 4, "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["1/3", "-1/3"]}]}


def plain_value(charge, offset, *, ratio=1, antifundamental=()):
    """The sum at eps2 = ratio + offset sqrt(2) in 200 digits, box by box (the weights of Nekrasov hep-th/0206161)."""
    with mpmath.workdps(200):
        third = mpmath.mpf(1) / 3
        node = {"coulomb": [third, -third], "antifundamental": [mpmath.mpf(m) for m in antifundamental]}
        node |= {"fundamental": [], "adjoint": []}
        eps2 = ratio + mpmath.mpf(offset) * mpmath.sqrt(2)
        theory = {"eps1": mpmath.mpf(1), "eps2": eps2, "nodes": [node], "edges": []}
        total = mpmath.mpf(0)
        for configuration in plain.configurations([2], (charge,)):
            weight = mpmath.mpf(1)
            for factor, exponent in plain.factors(theory, configuration):
                weight *= mpmath.mpf(factor) ** exponent
            total += weight
        return total


@pytest.mark.parametrize("charge", [1, 2, 3, 4])
@pytest.mark.parametrize("offset", ["1e-2", "1e-5"])
def test_the_balls_hold_the_plain_sum(charge, offset):
    point = ratomega.approach(CASE, offsets=[offset], digits=60)[charge].points[0]
    assert abs(plain_value(charge, offset) - mpmath.mpf(point.value)) < mpmath.mpf(10) ** -14


def test_at_ratio_one_digits_are_lost_as_the_worst_order_says():
    """At ratio 1 the worst order at charge k is k // 2 (Buryak, Feigin 1206.5640): that many digits for each of
    1/offset."""
    result = ratomega.approach({**CASE, "charge": 6}, offsets=["1e-4", "1e-8", "1e-12"], digits=150)
    for one in result.charges[1:]:
        k = one.charge[0]
        assert one.worst_order == k // 2
        lost = [point.lost for point in one.points]
        assert [round((b - a) / 4) for a, b in pairwise(lost)] == [k // 2, k // 2]
        assert one.order == pytest.approx(1, abs=0.01)
        assert all(point.consistent for point in one.points)
        distances = [float(point.distance) for point in one.points]
        assert distances[0] > 1e3 * distances[1] > 1e6 * distances[2]
        assert float(one.left_over) < 1e-20
    assert result.exit_status == 0
    assert not result.nothing_lost


def test_too_little_precision_shows_in_the_radius_and_not_as_a_wrong_digit():
    result = ratomega.approach({**CASE, "charge": 6}, offsets=["1e-2", "1e-6"], digits=15)
    blind = result[6].points[-1]
    assert blind.value == "?"
    assert blind.consistent
    assert result[6].order is None
    # With the digits that it says are needed the value is seen.
    sharp = ratomega.approach({**CASE, "charge": 6}, offsets=["1e-6"], digits=blind.needed + 3)[6].points[0]
    assert sharp.value != "?"
    assert float(sharp.radius) < float(sharp.distance)


def test_at_a_negative_ratio_there_is_nothing_to_lose():
    result = ratomega.approach({**CASE, "background": {"eps1": 1, "eps2": "-3/4"}}, offsets=["1e-3"])
    assert result.nothing_lost
    assert all(point.lost < 3 for one in result.charges for point in one.points)


def test_a_wrong_limit_is_not_consistent(monkeypatch):
    """The exact expansion with one coefficient changed by 1e-3: the balls say so."""
    from ratomega.regulator.limits import ChargeLimit

    true = ChargeLimit.terms
    monkeypatch.setattr(
        ChargeLimit, "terms", lambda self, last: tuple((n, z + (1 if n == 1 else 0)) for n, z in true(self, last))
    )
    result = ratomega.approach({**CASE, "charge": 2}, offsets=["1e-4", "1e-6"], digits=60)
    assert result.exit_status == 1
    assert not result[2].points[0].consistent


def test_masses_numbers_beyond_the_rationals_and_poles():
    four = {"coulomb": ["1/3", "-1/3"], "antifundamental": ["1/2", "1/5"]}
    point = ratomega.approach({**CASE, "charge": 3, "node": [four]}, offsets=["1e-3"], digits=50)[3].points[0]
    expected = plain_value(3, "1e-3", antifundamental=["0.5", "0.2"])
    assert abs(expected - mpmath.mpf(point.value)) < mpmath.mpf(10) ** -13
    imaginary = ratomega.approach("imaginary-momenta", offsets=["1e-3", "1e-6"])
    assert imaginary.exit_status == 0
    assert "*i" in imaginary[1].points[0].value
    pole = ratomega.approach("surviving-pole", offsets=["1e-3", "1e-6"])
    assert pole.exit_status == 1
    assert any(one.exact is None for one in pole.charges)
    assert all(point.consistent for one in pole.charges for point in one.points)


def test_the_document_reads_back():
    result = ratomega.approach({**CASE, "charge": 2}, offsets=["1e-3", "1/7"])
    assert ratomega.load_result(ratomega.to_json(result)) == result


@pytest.mark.parametrize(
    ("options", "said"),
    [
        ({"offsets": []}, "between 1 and 50 offsets"),
        ({"offsets": ["0"]}, "not zero"),
        ({"offsets": ["1e-3", "0.001"]}, "listed twice"),
        ({"offsets": ["2"]}, "at most 1"),
        ({"offsets": [0.5]}, "float"),
        ({"offsets": ["x"]}, "x"),
        ({"digits": 2}, "between 5 and 20000 digits"),
        ({"digits": 10**9}, "between 5 and 20000 digits"),
    ],
)
def test_bad_options(options, said):
    with pytest.raises(InputError, match=re.escape(said)):
        ratomega.approach(CASE, **options)


def test_symbols_are_refused():
    with pytest.raises(InputError, match="balls are taken at numbers"):
        ratomega.approach("free-momentum")


def test_the_command():
    words = ["approach", "u2-pure", "--charge", "2", "--offsets", "1e-2,1e-4", "--digits", "20"]
    done = CliRunner().invoke(cli, words, standalone_mode=False)
    assert done.return_value == 0
    assert "order of convergence" in done.output
    assert "every ball is where the exact expansion says" in done.output
