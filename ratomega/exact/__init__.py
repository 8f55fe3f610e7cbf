"""Exact arithmetic. python-flint is imported in this folder and nowhere else in the package."""
