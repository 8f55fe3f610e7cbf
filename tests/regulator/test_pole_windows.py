"""The planning of powers of t, against an oracle without series and by faults that must be seen."""

from __future__ import annotations

import functools

import numpy as np
import pytest
from flint import fmpq
from pole_oracle import limit

from ratomega.exact.residues import Moduli, PrimeSource, residues_of
from ratomega.regulator.poles import engine, plan, schedule, task
from ratomega.regulator.poles.bound import ProvedBound
from ratomega.regulator.poles.engine import PoleEngine, PoleSolver
from ratomega.regulator.poles.fractions import ConsistencyError
from ratomega.regulator.poles.lattice import PolePath
from ratomega.regulator.poles.plan import NOT_NEEDED, Windows
from ratomega.regulator.poles.problem import PoleMatter, gauge_problem, mixed_problem, torus_problem
from ratomega.regulator.poles.recursion import pole_coefficients
from ratomega.regulator.poles.residues import ResidueLattice
from ratomega.regulator.poles.series import regular_functions, residue_series

SQUARE = fmpq(3, 11) ** 2
MU = [fmpq(1, 3), fmpq(-2, 5), fmpq(3, 7), fmpq(5, 4)]
MATTER = {"none": (), "two": tuple(MU[:2]), "four": tuple(MU), "adjoint": None}
RATIOS = [(1, 1), (1, -1), (1, 2), (2, 1), (3, -2)]


def problem_of(ratio, mu):
    e1, e2 = fmpq(ratio[0]), fmpq(ratio[1])
    return torus_problem(e1, e2, SQUARE, mu_square=MU[0] ** 2) if mu is None else mixed_problem(e1, e2, SQUARE, mu=mu)


def oracle(ratio, direction, mu, charge):
    if mu is None:
        return limit(ratio, direction, 4 * SQUARE, charge, adjoint=MU[0])
    return limit(ratio, direction, 4 * SQUARE, charge, mu=mu)


@pytest.mark.parametrize("name", MATTER)
@pytest.mark.parametrize("ratio", RATIOS, ids=str)
def test_equal_to_the_interpolated_recursion(ratio, name):
    charge = 6
    # The direction of the oracle is none of those that the engine takes.
    expected = oracle(ratio, (2, 5), MATTER[name], charge)
    problem = problem_of(ratio, MATTER[name])
    assert list(pole_coefficients(problem, charge, exact=True).regular) == expected
    assert list(pole_coefficients(problem, charge, exact=False).regular) == expected


@pytest.mark.parametrize("ratio", [(1, 1), (1, -1), (1, 2), (3, -2)], ids=str)
def test_equal_to_the_interpolated_recursion_without_matter(ratio):
    expected = oracle(ratio, (2, 5), (), 10)
    assert list(pole_coefficients(problem_of(ratio, ()), 10, exact=False).regular) == expected


@pytest.mark.long
@pytest.mark.parametrize("ratio", [(1, 1), (1, -1), (1, 2), (3, -2), (4, -3)], ids=str)
def test_equal_to_the_interpolated_recursion_to_charge_twenty(ratio):
    expected = oracle(ratio, (2, 5), (), 20)
    assert list(pole_coefficients(problem_of(ratio, ()), 20, exact=False).regular) == expected


@pytest.mark.long
@pytest.mark.parametrize("name", MATTER)
@pytest.mark.parametrize("ratio", [(1, 1), (1, -1), (2, 3), (4, -3)], ids=str)
def test_equal_to_the_interpolated_recursion_to_charge_twelve(ratio, name):
    expected = oracle(ratio, (2, 5), MATTER[name], 12)
    assert list(pole_coefficients(problem_of(ratio, MATTER[name]), 12, exact=False).regular) == expected


# --- parts ------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("steps", [(1, 1), (1, -1), (1, 2), (3, -2)], ids=str)
@pytest.mark.parametrize(
    "matter",
    [
        PoleMatter.of_flavours([]),
        PoleMatter.of_flavours(MU),
        # numerators that vanish at the limit point, identically on some paths, and at the centre
        PoleMatter.of_flavours([fmpq(1), fmpq(3, 2), fmpq(-1, 2)]),
        PoleMatter.of_flavours([fmpq(0), fmpq(1, 7)]),
        PoleMatter.of_adjoint(fmpq(9, 49)),
        PoleMatter.of_adjoint(fmpq(1, 4)),
    ],
    ids=["none", "four", "vanishing", "centre", "adjoint", "special adjoint"],
)
def test_residues_of_all_pairs_agree_with_exact_series(matter, steps):
    path, charge, length = PolePath.towards(steps), 9, 6
    lattice = ResidueLattice.make(matter, path, charge)
    moduli = Moduli.make(PrimeSource().take(3))
    ours = lattice.series(moduli, length)
    for m in range(1, charge + 1):
        for n in range(1, charge // m + 1):
            exact = residue_series(matter, path, (m, n), length)
            if exact.is_zero():
                assert (m, n) not in lattice.pairs
            elif m >= n or not path.mirror:
                column = lattice.pairs.index((m, n))
                assert lattice.valuation[column] == exact.valuation
                wanted = [2 * exact.coefficient(exact.valuation + i) for i in range(length)]
                assert not moduli.reduce(residues_of(wanted, moduli) - ours[:, :, column]).any()


def test_windows_are_as_planned_by_hand():
    # Ratio 1, no matter. R_21 has one vanishing factor in its denominator, (i, j) = (-1, 1); R_22 has two.
    lattice = ResidueLattice.make(PoleMatter.of_flavours([]), PolePath.towards((1, 1)), 8)
    windows = Windows.make(lattice)
    row = {pair: index for index, pair in enumerate(windows.pairs)}
    assert list(row) == [(1, 1), (2, 1), (3, 1), (2, 2), (4, 1), (5, 1), (3, 2), (6, 1), (7, 1), (4, 2), (8, 1)]
    assert windows.valuation[[row[1, 1], row[2, 1], row[2, 2], row[3, 2]]].tolist() == [0, -1, -2, -3]
    # V of (3, 1) sits at x = 2 eps1 + ..., where (1, 1) collides from order 1 on; (4, 1) at 3 with (1, 2), (2, 1).
    assert windows.low[row[3, 1], :6].tolist() == [0, -1, -1, -1, -1, -1]
    assert windows.low[row[4, 1], :5].tolist() == [0, 0, -2, -2, -2]
    # The answer reads V up to minus the valuation of R; (2, 1) asks itself for one power more at every second order.
    assert [windows.need[row[2, 1], j] for j in (6, 4, 2, 0)] == [1, 2, 3, 4]
    assert windows.need[row[8, 1], 1] == NOT_NEEDED


@functools.cache
def exact_series(ratio, name, charge):
    return regular_functions(problem_of(ratio, MATTER[name]), charge)


def agree(ratio, name, charge):
    """Does the engine give the residues of the exact partial fractions?"""
    moduli = Moduli.make(PrimeSource().take(2))
    engine = PoleEngine.make(problem_of(ratio, MATTER[name]), charge)
    terms = {key: index for index, key in enumerate(engine.layout.keys)}
    wanted = np.zeros((2, charge + 1, len(terms)))
    for order, function in enumerate(exact_series(ratio, name, charge)):
        for term in function.terms:
            wanted[:, order, terms[term.square, term.power]] = residues_of([term.coefficient], moduli)[:, 0]
    return not moduli.reduce(wanted - PoleSolver(engine, 2).solve(moduli)).any()


@pytest.mark.parametrize("ratio", [(1, 1), (1, -1)], ids=str)
@pytest.mark.parametrize("direction", [(0, 1), (1, 0), (2, -3)], ids=str)
@pytest.mark.parametrize("name", ["none", "four"])
def test_the_mirror_and_the_direction_of_the_path_change_nothing(ratio, direction, name, monkeypatch):
    monkeypatch.setattr(PolePath, "towards", classmethod(lambda cls, steps: cls(steps, direction, False)))
    problem = problem_of(ratio, MATTER[name])
    ours = PoleSolver(PoleEngine.make(problem, 10), 2).solve(Moduli.make(PrimeSource().take(2)))
    monkeypatch.undo()
    assert PolePath.towards(ratio).mirror
    mirrored = PoleSolver(PoleEngine.make(problem, 10), 2).solve(Moduli.make(PrimeSource().take(2)))
    assert (ours == mirrored).all()


@pytest.mark.parametrize("charge", [1, 2, 3, 4, 7, 8, 13])
@pytest.mark.parametrize("ratio", RATIOS, ids=str)
def test_the_engine_at_charges_around_the_sizes_of_its_blocks(ratio, charge):
    assert agree(ratio, "two", charge)


@pytest.mark.parametrize(("width", "spread", "block"), [(1, 1, 1), (5, 2, 4), (200, 50, 64)])
@pytest.mark.parametrize("ratio", RATIOS, ids=str)
def test_the_schedule_does_not_change_the_result(ratio, width, spread, block, monkeypatch):
    monkeypatch.setattr(schedule, "WIDTH", width)
    monkeypatch.setattr(schedule, "SPREAD", spread)
    monkeypatch.setattr(schedule, "LONGEST_BLOCK", block)
    assert agree(ratio, "two", 13)


@pytest.mark.parametrize("ratio", [(1, 1), (1, 2)], ids=str)
def test_sums_that_must_be_reduced_early(ratio, monkeypatch):
    # As if the sums were near 2^53 all the time.
    monkeypatch.setattr(engine, "_longest_sum", lambda moduli, *, mirror: 12)
    assert agree(ratio, "four", 12)


@pytest.mark.parametrize("mirror", [False, True])
def test_sums_stay_exact_however_many_products_come(mirror):
    primes = PrimeSource().take(2)
    sums = engine._Sums(Moduli.make(primes), np.zeros((2, 4, 3, 5)), -1, mirror)
    step = schedule.Step(begin=5, end=7, first=-1, count=2, stride=2, rows=4, low=-1)
    largest = sums.longest * (primes[0] // 2) ** 2 * (2 if mirror else 1) - 3
    for _ in range(7):
        sums.add(step, np.full((2, 4, 4), float(largest)), sums.longest)
    out = np.empty((2, 3, 5))
    for order in (5, 6):
        sums.take(order, out, np.empty_like(out))
        for p, table in zip(primes, out, strict=True):
            assert {int(x) % p for x in table[0::2, :4].ravel()} == {7 * largest % p}
            assert not table[1].any()
            assert not table[:, 4].any()
    sums.take(5, out, np.empty_like(out))
    assert not out.any()


# --- faults -----------------------------------------------------------------------------------------------------------


def seen(ratio):
    """Is a fault in the machinery noticed, by its own checks or by comparison with exact series?"""
    try:
        return not agree(ratio, "none", 12)
    except ConsistencyError:
        return True


FAULTY_RATIOS = [(1, 1), (1, -1), (1, 2), (3, -2)]


@pytest.mark.parametrize("ratio", FAULTY_RATIOS, ids=str)
def test_a_lower_end_one_too_high_is_seen(ratio, monkeypatch):
    true_ends = plan._lower_ends

    def faulty(*arguments):
        low = true_ends(*arguments)
        return np.where(low < 0, low + 1, low)

    monkeypatch.setattr(plan, "_lower_ends", faulty)
    assert seen(ratio)


@pytest.mark.parametrize("ratio", FAULTY_RATIOS, ids=str)
def test_an_upper_end_one_too_low_is_seen(ratio, monkeypatch):
    true_ends = plan._upper_ends

    def faulty(*arguments):
        need = true_ends(*arguments)
        return np.where(need > 0, need - 1, need)

    monkeypatch.setattr(plan, "_upper_ends", faulty)
    assert seen(ratio)


@pytest.mark.parametrize("ratio", FAULTY_RATIOS, ids=str)
def test_forgetting_that_a_kernel_can_be_singular_is_seen(ratio, monkeypatch):
    true_ends = plan._upper_ends
    monkeypatch.setattr(
        plan, "_upper_ends", lambda weight, valuation, hits, charge: true_ends(weight, valuation, 0 * hits, charge)
    )
    assert seen(ratio)


@pytest.mark.parametrize("ratio", FAULTY_RATIOS, ids=str)
def test_kernel_tables_two_powers_too_short_are_seen(ratio, monkeypatch):
    # Two, because the tables are rectangles around what is needed: their last power alone can meet nothing but zeros.
    true_group = schedule._group

    def faulty(*arguments):
        group = true_group(*arguments)
        group.depth[-2:] = 0
        return group

    monkeypatch.setattr(schedule, "_group", faulty)
    assert seen(ratio)


@pytest.mark.parametrize("ratio", [(1, 1), (1, -1)], ids=str)
def test_halving_on_a_path_that_is_no_mirror_is_seen(ratio, monkeypatch):
    monkeypatch.setattr(PolePath, "towards", classmethod(lambda cls, steps: cls(steps, (0, 1), True)))
    assert seen(ratio)


@pytest.mark.parametrize("ratio", [(1, 2), (3, -2)], ids=str)
def test_halving_at_a_ratio_without_mirror_is_seen(ratio, monkeypatch):
    monkeypatch.setattr(PolePath, "towards", classmethod(lambda cls, steps: cls(steps, (-1, 1), True)))
    assert seen(ratio)


def test_the_engine_itself_refuses_what_does_not_cancel(monkeypatch):
    true_series = ResidueLattice.series

    def faulty(self, moduli, length):
        values = true_series(self, moduli, length)
        values[:, 0, 5] += 1
        return values

    monkeypatch.setattr(ResidueLattice, "series", faulty)
    with pytest.raises(ConsistencyError, match=r"cancel|vanish"):
        PoleSolver(PoleEngine.make(problem_of((1, 1), ()), 12), 1).solve(Moduli.make(PrimeSource().take(1)))


# --- recovery and bound -----------------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", MATTER)
@pytest.mark.parametrize("ratio", [(1, 1), (1, -1), (1, 2), (3, -2), (7, 5)], ids=str)
def test_the_proved_bound_holds(ratio, name):
    charge = 9
    problem = problem_of(ratio, MATTER[name])
    bound = ProvedBound.make(problem, charge)
    functions = regular_functions(problem, charge)
    for function, denominator, bits in zip(functions, bound.denominators, bound.bits, strict=True):
        whole = function.at(problem.square) * denominator
        assert whole.q == 1
        assert abs(int(whole.p)).bit_length() <= bits


@pytest.mark.parametrize("square", [fmpq(-1, 4), fmpq(3, 7), fmpq(22801, 22500)], ids=str)
def test_the_bound_by_squares_and_near_a_pole(square):
    for mu in ((), tuple(MU)):
        problem = mixed_problem(fmpq(1), fmpq(1), square, mu=mu)
        exact = pole_coefficients(problem, 7, exact=True)
        assert pole_coefficients(problem, 7, exact=False, certify=True).coefficients == exact.coefficients


def test_a_prime_that_divides_a_parameter_is_passed_over():
    first = PrimeSource().take(3)
    a = fmpq(1, first[1])
    problem = gauge_problem(fmpq(1), fmpq(1), (a, -a), antifundamental=[fmpq(1, first[2])])
    exact = pole_coefficients(problem, 6, exact=True)
    for certify in (False, True):
        ours = pole_coefficients(problem, 6, exact=False, certify=certify)
        assert ours.coefficients == exact.coefficients


def test_the_prime_that_confirms_was_not_used_and_can_refute(monkeypatch):
    problem = problem_of((1, 1), ())
    true_solve = PoleSolver.solve
    result = pole_coefficients(problem, 9, exact=False)
    confirmed = result.evidence[3].confirmed
    assert all(e.confirmed == confirmed for e in result.evidence[1:])

    def faulty(self, moduli):
        values = true_solve(self, moduli)
        if confirmed in moduli.primes:
            values[moduli.primes.index(confirmed), 3, 0] += 1
        return values

    # The fault sits in the prime that only confirms: the fraction is given up, and since the prime then counts as an
    # ordinary one, no fraction fits any more.
    monkeypatch.setattr(PoleSolver, "solve", faulty)
    with pytest.raises(ConsistencyError, match="no fraction fits"):
        pole_coefficients(problem, 9, exact=False)


def test_the_search_is_the_same_every_time():
    problem = problem_of((3, -2), MATTER["four"])
    assert pole_coefficients(problem, 12, exact=False) == pole_coefficients(problem, 12, exact=False)


def test_batches_of_any_size_give_the_same(monkeypatch):
    problem = problem_of((1, 2), MATTER["two"])
    whole = pole_coefficients(problem, 12, exact=False)
    monkeypatch.setattr(task, "BATCH_BYTES", 1)
    assert pole_coefficients(problem, 12, exact=False) == whole
    solver = PoleSolver(PoleEngine.make(problem, 5), 2)
    with pytest.raises(ValueError, match="2 primes at a time, not 3"):
        solver.solve(Moduli.make(PrimeSource().take(3)))
