"""Conformal blocks by the representation theory of the Virasoro algebra: U(2) sums without a Young diagram."""
