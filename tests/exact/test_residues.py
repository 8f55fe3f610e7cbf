"""Residues against exact integers, flint's nmod and sympy's number theory."""

from __future__ import annotations

from fractions import Fraction
from itertools import pairwise
from math import gcd, prod

import numpy as np
import pytest
from flint import fmpq, nmod
from hypothesis import given, settings
from hypothesis import strategies as st
from sympy import isprime, prevprime
from sympy.ntheory.modular import crt

from ratomega.exact.residues import (
    PRIME_BITS,
    BadPrimes,
    Moduli,
    PrimeSource,
    combine,
    longest_dot,
    reconstruct,
    residues_of,
)

PRIMES = PrimeSource().take(7)
LIMIT = 2**53 - 2**26
integers = st.integers(min_value=-LIMIT, max_value=LIMIT) | st.integers(min_value=LIMIT - 2**22, max_value=LIMIT)


def test_primes_are_the_consecutive_primes_below_the_limit():
    expected = [prevprime(2**PRIME_BITS)]
    while len(expected) < 60:
        expected.append(prevprime(expected[-1]))
    source = PrimeSource()
    assert source.take(25) + source.take(35) == tuple(expected)


def test_the_primes_go_on_past_one_sieve():
    taken = PrimeSource().take(5000)
    assert list(taken) == sorted(set(taken), reverse=True)
    assert all(isprime(p) for p in taken[2000:5000:97])
    # No prime is left out where two sieves meet.
    assert all(prevprime(a) == b for a, b in pairwise(taken[2100:2500]))


@pytest.mark.parametrize("last", [False, True])
@given(values=st.lists(integers, min_size=1, max_size=20))
@settings(deadline=None, max_examples=60)
def test_reduce_agrees_with_integers(last, values):
    moduli = Moduli.make(PRIMES, last=last)
    plain = np.array(values, dtype=np.float64)
    table = np.repeat(plain[:, None], len(PRIMES), axis=1) if last else np.repeat(plain[None, :], len(PRIMES), axis=0)
    reduced = moduli.reduce(table)
    for i, p in enumerate(PRIMES):
        row = reduced[:, i] if last else reduced[i]
        assert [int(r) % p for r in row] == [v % p for v in values]
        assert max(abs(row)) <= p / 2 + 1
    work = np.empty_like(table)
    assert moduli.reduce(table, out=table, work=work) is table
    assert (table == reduced).all()


@pytest.mark.parametrize("last", [False, True])
@pytest.mark.parametrize("count", [1, 2, 3, 7, 16, 33])
def test_products_and_inverses_agree_with_nmod(last, count):
    moduli = Moduli.make(PRIMES, last=last)
    numbers = [fmpq(3 * i * i + 7 * i + 1, 5 * i + 2) for i in range(count)]
    table = residues_of(numbers, moduli)
    inverse, square = moduli.inverses(table), moduli.multiply(table, table)
    for i, p in enumerate(PRIMES):
        for j, value in enumerate(numbers):
            place = (j, i) if last else (i, j)
            exact = nmod(int(value.p), p) / nmod(int(value.q), p)
            assert nmod(int(table[place]), p) == exact
            assert nmod(int(inverse[place]), p) == 1 / exact
            assert nmod(int(square[place]), p) == exact * exact


def test_integers_and_rationals_have_the_same_residues():
    numbers = np.array([[0, 1, -5], [2**40 + 1, -(2**52), 97]], dtype=np.int64)
    first, last = Moduli.make(PRIMES), Moduli.make(PRIMES, last=True)
    flat = residues_of([fmpq(int(n)) for n in numbers.reshape(-1)], first)
    assert (first.reduce(first.integers(numbers).reshape(len(PRIMES), -1) - flat) == 0).all()
    assert (np.moveaxis(last.integers(numbers), -1, 0) == first.integers(numbers)).all()
    with pytest.raises(ValueError, match="2\\^53"):
        first.integers(np.array([LIMIT + 1], dtype=np.int64))


def test_a_prime_in_a_denominator_is_named():
    moduli = Moduli.make(PRIMES)
    with pytest.raises(BadPrimes) as caught:
        residues_of([fmpq(1, PRIMES[2] * PRIMES[4])], moduli)
    assert caught.value.primes == (PRIMES[2], PRIMES[4])
    table = residues_of([fmpq(2), fmpq(PRIMES[3]), fmpq(5)], moduli)
    with pytest.raises(BadPrimes) as caught:
        moduli.inverses(table)
    assert caught.value.primes == (PRIMES[3],)


@pytest.mark.parametrize("bad", [[2], [4], [2**26 + 1]])
def test_unfit_moduli_are_refused(bad):
    with pytest.raises(ValueError, match="odd prime"):
        Moduli.make(bad)


def test_the_longest_dot_is_exact_and_stops_where_it_must():
    half = PRIMES[0] // 2
    count = longest_dot(half, half)
    assert count * half * half <= LIMIT < (count + 1) * half * half
    full = np.full(count, float(half))
    assert int(full @ full) == count * half * half
    moduli = Moduli.make(PRIMES)
    total = moduli.reduce(np.full((len(PRIMES), 1), full @ full))
    assert [int(r) % p for r, p in zip(total[:, 0], PRIMES, strict=True)] == [count * half * half % p for p in PRIMES]


def test_combine_agrees_with_sympy():
    numbers = [0, 1, -1, 10**30 + 7, -(10**35)]
    moduli = Moduli.make(PRIMES)
    table = residues_of([fmpq(n) for n in numbers], moduli)
    found, modulus = combine(table, PRIMES)
    assert modulus == prod(PRIMES)
    for n, value in zip(numbers, found, strict=True):
        assert value == n % modulus
        assert crt(list(PRIMES), [n % p for p in PRIMES]) == (value, modulus)


@given(
    top=st.integers(min_value=-(10**25), max_value=10**25),
    bottom=st.integers(min_value=1, max_value=10**20),
    spare=st.integers(min_value=30, max_value=60),
)
@settings(deadline=None, max_examples=150)
def test_a_fraction_with_room_to_spare_is_found_and_its_spare_bits_are_right(top, bottom, spare):
    value = Fraction(top, bottom)
    source, primes = PrimeSource(), []
    while prod(primes) <= (2**spare + 2) * abs(value.numerator) * value.denominator or not primes:
        primes += source.take(1)
    modulus = prod(primes)
    if gcd(value.denominator, modulus) != 1:
        return
    residue = value.numerator * pow(value.denominator, -1, modulus) % modulus
    found = reconstruct(residue, modulus, spare_bits=spare)
    assert found is not None
    assert Fraction(int(found.value.p), int(found.value.q)) == value
    if value:
        room = modulus // (abs(value.numerator) * value.denominator)
        assert spare <= found.spare_bits <= room.bit_length() <= found.spare_bits + 2


def test_too_few_primes_give_no_fraction_and_one_more_gives_it():
    value = fmpq(10**20 + 39, 3**25)
    source = PrimeSource()
    primes = list(source.take(7))
    answers = []
    for _ in range(4):
        table = residues_of([value], Moduli.make(primes))
        (residue,), modulus = combine(table, primes)
        answers.append(reconstruct(residue, modulus, spare_bits=45))
        primes += source.take(1)
    assert answers[0] is None
    assert answers[-1] is not None
    assert answers[-1].value == value
    assert answers[-1].spare_bits >= 45


def test_zero_and_bad_requests():
    modulus = prod(PRIMES)
    zero = reconstruct(0, modulus, spare_bits=20)
    assert zero is not None
    assert (zero.value, zero.spare_bits) == (0, modulus.bit_length() - 1)
    with pytest.raises(ValueError, match="spare bit"):
        reconstruct(5, modulus, spare_bits=0)
