"""Exponentials of truncated power series modulo many primes, with as few reductions as exactness allows."""

from __future__ import annotations

from math import comb

import numpy as np

from ratomega.exact.residues import EXACT_LIMIT, Floats
from ratomega.regulator.fast.factors import Bench

__all__ = ["exponential"]


def exponential(sums: list[Floats], bound: float, half: float, bench: Bench) -> Floats:
    """D! times the coefficient of t^D of exp(sum_j sums[j-1] t^j / j!), D = len(sums) >= 1, reduced.

    These are the complete Bell polynomials, H_n = sum_j binomial(n-1, j-1) sums[j-1] H_(n-j): no division occurs.
    ``bound`` bounds the absolute values in ``sums``, which need not be reduced; ``half`` bounds residues. Sums of
    products are reduced once, earlier only where they could pass 2^53. The arrays in ``sums`` are overwritten.

    Cost: D (D - 1) / 2 products and about D reductions.
    """
    depth = len(sums)
    if depth > 1 and 2.0 ** (depth - 1) * bound * half >= 4 * EXACT_LIMIT:
        for one in sums:
            bench.reduce(one)
        bound = half
    known = [bench.reduce(sums[0] if depth == 1 else sums[0].copy())]
    product = np.empty_like(sums[0])
    for n in range(2, depth + 1):
        total = sums[n - 1] if n == depth else sums[n - 1].copy()
        size = bound
        for j in range(1, n):
            np.multiply(sums[j - 1], known[n - j - 1], out=product)
            times, term = comb(n - 1, j - 1), bound * half
            if times * term + half >= EXACT_LIMIT:
                bench.reduce(product)
                term = half
            if times > 1:
                product *= times
            if size + times * term >= EXACT_LIMIT:
                bench.reduce(total)
                size = half
            total += product
            size += times * term
        known.append(bench.reduce(total))
    return known[-1]
