"""The recursion of U(2) over its poles in the Coulomb parameter: ``recursion.py`` the way in, ``problem.py`` data."""
