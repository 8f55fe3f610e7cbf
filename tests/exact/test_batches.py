"""Streams of residues: the good primes in their order, however they are batched. The residues are recomputed by pow."""

from __future__ import annotations

from math import prod

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from ratomega.errors import RatomegaError
from ratomega.exact.batches import Batch, ResidueStream, computed, here
from ratomega.exact.residues import BadPrimes, PrimeSource

PRIMES = PrimeSource(21).take(60)


class Inverses:
    """1/d and 2/d modulo primes. What divides d is found out one prime at a time, as in the worst case."""

    name, charge, bits, radicand, shape, seconds, overhead = "inverses", 0, 21, 0, (2,), 1e-6, 1

    def __init__(self, denominator, largest=7):
        self.denominator, self.largest = denominator, largest
        self.batches = []

    def residues(self, primes):
        self.batches.append(tuple(primes))
        for p in primes:
            if self.denominator % p == 0:
                raise BadPrimes([p])
        return np.array([[float(n * pow(self.denominator, -1, p) % p) for n in (1, 2)] for p in primes])


def expected(denominator, count):
    good = [p for p in PRIMES if denominator % p][:count]
    return tuple(good), [[pow(denominator, -1, p), 2 * pow(denominator, -1, p) % p] for p in good]


DENOMINATORS = {
    "none bad": 3,
    "the first": PRIMES[0],
    "several": prod((PRIMES[1], PRIMES[2], PRIMES[6], PRIMES[9])),
    "all of a batch": prod(PRIMES[:9]),
}


@pytest.mark.parametrize("name", DENOMINATORS)
@settings(deadline=None, max_examples=12)
@given(data=st.data())
def test_batches_of_any_size_give_the_same_stream(name, data):
    d = DENOMINATORS[name]
    task = Inverses(d)

    def odd_sizes():
        rest = list(PRIMES)
        while rest:
            size = data.draw(st.integers(1, 9))
            yield computed(task, rest[:size])
            del rest[:size]

    supply = odd_sizes()
    counts = data.draw(st.lists(st.integers(1, 40), min_size=1, max_size=6))
    for stream in (ResidueStream(here(Inverses(d))), ResidueStream(lambda _: next(supply))):
        for count in counts:
            primes, values = stream.first(count)
            assert (primes, values.tolist()) == expected(d, count)


def test_here_computes_just_what_is_asked_for():
    task = Inverses(3)
    stream = ResidueStream(here(task, (40,)))
    stream.first(10)
    stream.first(4)
    stream.first(13)
    assert [len(batch) for batch in task.batches] == [5, 5, 3]


def test_bad_primes_are_named_in_order():
    batch = computed(Inverses(prod((PRIMES[4], PRIMES[1]))), PRIMES[:6])
    assert batch.bad == (PRIMES[1], PRIMES[4])
    assert batch.primes == tuple(p for p in PRIMES[:6] if p not in batch.bad)
    nothing = computed(Inverses(prod(PRIMES[:3])), PRIMES[:3])
    assert (nothing.primes, nothing.bad, nothing.values.shape) == ((), PRIMES[:3], (0, 2))


def test_a_denominator_that_is_zero_ends_the_search():
    with pytest.raises(RatomegaError, match="so it is zero"):
        ResidueStream(here(Inverses(0))).first(5)


def test_no_prime_is_no_question():
    with pytest.raises(ValueError, match="at least one prime"):
        ResidueStream(lambda _: Batch((), (), np.zeros((0, 2)))).first(0)
