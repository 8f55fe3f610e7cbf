"""Fast sums with numbers x + y sqrt(d): against the plain reference with pairs, the engine, and a formula."""

from __future__ import annotations

import plain
import pytest
from building import make_case, plain_number, plain_theory
from flint import fmpq

import ratomega
from ratomega.case.setting import own_setting
from ratomega.errors import RatomegaError
from ratomega.exact.quadratic import Quadratic, square_root
from ratomega.exact.residues import Moduli, PrimeSource
from ratomega.regulator import routes
from ratomega.regulator.direct import direct_total
from ratomega.regulator.fast import collect
from ratomega.regulator.fast import sums as fast
from ratomega.regulator.fast.sums import applies, fast_sum
from ratomega.regulator.fast.task import FastTask
from ratomega.weights import Weights

CASES = {
    "momentum": (("i/2", "-i/2"), {}),
    "momentum and masses": (("i/2", "-i/2"), {"antifundamental": ["1+2*i/3", "1"], "fundamental": ["2-i/7"]}),
    "masses": (("3/11", "-2/7"), {"antifundamental": ["sqrt(5)/2", "1/3"]}),
    "one momentum": (("1/3+sqrt(21)/7", "-1/5"), {"adjoint": ["2/9"]}),
    "adjoint": (("3/11", "-2/7"), {"adjoint": ["2/9-sqrt(-7)"]}),
    "common part": (("1/3+2*i/3", "-2/7+2*i/3"), {"antifundamental": ["1/5"]}),
    "three colours": (("sqrt(2)/2", "-2/7", "1/13"), {"fundamental": ["1/2+3*sqrt(2)"]}),
    "three colours, adjoint": (("i/2", "-2/7", "1/13"), {"adjoint": ["2/9+i"]}),
}


def setting_of(ratio, coulomb, **matter):
    return own_setting(make_case("1", ratio, [{"coulomb": list(coulomb), **matter}]))


def plain_limits(setting, top):
    powers = [plain.laurent_coefficient(plain_theory(setting), (k,)) for k in range(top + 1)]
    assert all(power >= 0 for found in powers for power in found)
    return [found.get(0, fmpq(0)) for found in powers]


@pytest.mark.parametrize("ratio", ["1", "2", "1/2", "2/3", "-1", "-3/4", "103/71"])
@pytest.mark.parametrize("name", CASES)
def test_against_the_plain_reference(ratio, name):
    coulomb, matter = CASES[name]
    setting = setting_of(ratio, coulomb, **matter)
    top = 4 if len(coulomb) == 2 else 3
    assert applies(setting, top) is None
    answer = fast_sum(setting, top)
    assert min(answer.spare_bits) >= 45
    for value, reference in zip(answer.coefficients, plain_limits(setting, top), strict=True):
        assert reference == plain_number(value)


def test_imaginary_momentum_at_the_self_dual_point():
    """Charges 1 and 2 from Nekrasov hep-th/0206161 and Flume, Poghossian hep-th/0208176 at 4 a^2 = -1, eps = 2."""
    values = fast_sum(setting_of("1", ("i/2", "-i/2")), 2).coefficients
    assert list(values) == [1, fmpq(2) / (4 + 1), fmpq(-2 - 32 - 1) / ((-1 - 4) * (-1 - 9) ** 2)]


def test_conjugate_parameters_give_conjugate_values():
    one = fast_sum(setting_of("1", ("i/2", "1/3"), antifundamental=["1+2*i/3"]), 5).coefficients
    two = fast_sum(setting_of("1", ("-i/2", "1/3"), antifundamental=["1-2*i/3"]), 5).coefficients
    assert isinstance(one[5], Quadratic)
    assert [z.conjugate() if isinstance(z, Quadratic) else z for z in one] == list(two)


@pytest.mark.parametrize(("ratio", "top"), [("1", 8), ("2", 7), ("-2/3", 7)])
def test_moderate_charges_against_the_engine(ratio, top):
    setting = setting_of(ratio, ("i/2", "1/3"), antifundamental=["1+2*i/3", "1/7"], fundamental=["i"])
    weights = Weights(setting)
    expected = [direct_total(weights, (k,)).coefficient(0) for k in range(top + 1)]
    assert list(fast_sum(setting, top).coefficients) == expected


@pytest.mark.parametrize("ratio", ["1", "-1"])
@pytest.mark.parametrize("name", CASES)
def test_certified(ratio, name):
    coulomb, matter = CASES[name]
    setting = setting_of(ratio, coulomb, **matter)
    top = 3 if len(coulomb) == 2 else 2
    answer = fast_sum(setting, top, certify=True)
    assert answer.proved
    for value, reference in zip(answer.coefficients, plain_limits(setting, top), strict=True):
        assert reference == plain_number(value)


@pytest.mark.parametrize("change", [fmpq(1), square_root(-1), fmpq(1, 10007) * square_root(-1)])
def test_certification_refutes_a_wrong_part(change, monkeypatch):
    setting = setting_of("1", ("i/2", "1/3"), antifundamental=["1+2*i/3"])
    right = fast.collect

    def wrong(*given, **options):
        found = right(*given, **options)
        values = [z + change if n == 2 else z for n, z in enumerate(found.coefficients)]
        return collect.Collected(tuple(values), found.spare_bits, found.primes)

    monkeypatch.setattr(fast, "collect", wrong)
    with pytest.raises(RatomegaError, match="charge 2"):
        fast_sum(setting, 3, certify=True)


@pytest.mark.parametrize("part", [0, 1])
def test_the_prime_that_is_kept_out_must_agree_in_both_parts(part):
    setup = fast.prepare(setting_of("1", ("i/2", "1/3")))
    task = FastTask.make(setup, 3)
    primes = PrimeSource(task.bits, -1).take(12)
    table = task.residues(primes)
    found = []
    collect._extend(setup, 3, table, primes, found, [])
    assert len(found) == 4
    table[-1, 2, part] += 1
    found.clear()
    collect._extend(setup, 3, table, primes, found, [])
    assert len(found) == 2


@pytest.mark.parametrize("d", [-1, 2, 5, -7, 21, 10**12 - 11])
def test_primes_that_split_and_their_roots(d):
    """Euler's criterion decides which split."""
    primes = PrimeSource(21, d).take(20)
    every = [p for p in PrimeSource(21).take(300) if p >= primes[-1]]
    assert primes == tuple(p for p in every if pow(d % p, (p - 1) // 2, p) == 1)
    split = Moduli.split(primes, d)
    assert all(root * root % p == d % p for root, p in zip(split.roots, split.primes, strict=True))
    assert all(one != two for one, two in zip(split.roots[0::2], split.roots[1::2], strict=True))


def test_the_command_takes_them(monkeypatch):
    """From so many configurations on; the answer is that of the sum cluster by cluster."""
    node = {"coulomb": ["i/2", "1/3"], "antifundamental": ["1+2*i/3"]}
    case = make_case("1", "1", [node], charge=4)
    exact = [c.value for c in ratomega.limit(case, route="direct")]
    monkeypatch.setattr(routes, "CLUSTERWISE", 20)
    result = ratomega.limit(case, route="direct")
    assert (result.route.method, [c.value for c in result]) == ("residues", exact)
    assert ratomega.limit(case, route="direct", certify=True).route.method == "proved"
    assert ratomega.to_json(ratomega.limit(case, route="direct", workers=2)) == ratomega.to_json(result)
