"""Averages over configurations: observables on the same weights, order by order in the counting parameters."""
