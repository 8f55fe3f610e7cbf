"""Regulators: the exact limit of the partition function, by the sum over diagrams or by the pole recursion."""
