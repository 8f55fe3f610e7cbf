"""The pole recursion as a check: at the limit point, and beside it where a is resonant or not rational."""

from __future__ import annotations

from dataclasses import replace

import pytest

from ratomega.case.reading import load_case
from ratomega.case.setting import own_setting
from ratomega.exact.laurent import Laurent
from ratomega.regulator.limits import charge_limit
from ratomega.validator.recursion import LEAST, check_recursion, split_prime
from ratomega.validator.verdict import Kind, Verdict
from ratomega.weights import Weights

# Case, and how many charges keep a pole. The first two limits are values of the published first two coefficients
# (Nekrasov hep-th/0206161; Flume, Poghossian hep-th/0208176), all of them sums over diagrams on one path.
CASES = {
    "equal Coulomb parameters": ({"coulomb": ["0", "0"]}, "1", "1", 4, 0),
    "degenerate momentum, a pole": ({"coulomb": ["3/2 + t/7", "-3/2 - t/7"]}, "2", "1", 3, 3),
    "a pole that the masses soften": (
        {"coulomb": ["3/2 + t/7", "-3/2 - t/7"], "antifundamental": ["7/2", "5/2"]}, "2", "1", 3, 1
    ),
    "vacuum at c = 1 on a path": (
        {"coulomb": ["t/3", "-t/3"], "antifundamental": ["1/2 + t/2", "1/2 + t/2", "t/2", "t/2"]}, "1", "-1 + t", 4, 0
    ),
    "resonant adjoint": ({"coulomb": ["1 + t/5", "-1"], "adjoint": ["1/3"]}, "1", "1", 4, None),
    "imaginary masses": ({"coulomb": ["i/2", "-i/2"], "antifundamental": ["1 + 2*i/3", "1"] * 2}, "1", "1", 3, 0),
    "a real root, resonant": (
        {"coulomb": ["(eps1 + eps2)/2 + t/3", "-(eps1 + eps2)/2 - t/3"], "antifundamental": ["sqrt(2)", "1/3"]},
        "3", "-2", 3, None,
    ),
}


def limits_of(name):
    node, eps1, eps2, charge, poles = CASES[name]
    case = load_case({"charge": charge, "background": {"eps1": eps1, "eps2": eps2}, "node": [node]})
    setting = own_setting(case)
    weights = Weights(setting)
    return case, setting, [charge_limit(weights, k) for k in case.charges], poles


@pytest.mark.parametrize("name", CASES)
def test_the_recursion_agrees_with_the_sum(name):
    case, setting, limits, poles = limits_of(name)
    (check,) = check_recursion(case, setting, limits)
    assert (check.verdict, check.kind, check.complete) == (Verdict.AGREES, Kind.INDEPENDENT, True)
    if poles is not None:
        assert sum(1 for limit in limits if limit.own.order > 0) == poles
        assert ("the same surviving pole" in check.evidence) == bool(poles)


@pytest.mark.parametrize("name", [name for name in CASES if name != "equal Coulomb parameters"])
@pytest.mark.parametrize("power", [0, -1])
def test_a_wrong_coefficient_is_refuted(name, power):
    """The coefficient of t^0 or of 1/t at the last charge changed by 1."""
    case, setting, limits, _ = limits_of(name)
    last = limits[-1]
    wrong = last.sum.series + Laurent.from_coefficients(power, [1], precision=1)
    changed = replace(last, sum=replace(last.sum, series=wrong))
    (check,) = check_recursion(case, setting, [*limits[:-1], changed])
    assert check.verdict is Verdict.REFUTED
    assert f"first difference at charge {case.charge}" in check.evidence


def test_a_split_prime_has_a_root():
    """Quadratic residues: Euler's criterion, in plain integers."""
    for d in (-1, 2, -3, 5, 21, -163):
        prime, roots = split_prime(d)
        assert prime >= LEAST
        assert pow(d, (prime - 1) // 2, prime) == 1
        assert [root * root % prime for root in roots] == [d % prime] * 2
        assert roots[0] != roots[1]
        for power in (2, 3, 5):
            _, lifted = split_prime(d, power)
            assert [(root * root - d) % prime**power for root in lifted] == [0, 0]
    assert split_prime(0) == (LEAST, (0,))
