"""Published formulas that several tests hold against the program, as sympy expressions in a and the masses."""

from __future__ import annotations

from itertools import combinations

import sympy

A = sympy.Symbol("a")


def charge_one_with_flavours(masses, y):
    """Z_1 of U(2) at a, -a with one to four antifundamentals, eps1 = 1 and eps2 = y.

    Z_1 eps1 eps2 (4a^2 - e^2) in the symmetric functions of the masses (D'Hoker, Krichever, Phong hep-th/9609041 for
    the leading part; the charge-one sum).
    """
    s = [sum(sympy.prod(c) for c in combinations(masses, n)) for n in range(len(masses) + 1)] + [0] * 4
    e = 1 + y
    above = {
        1: -2 * s[1] + e,
        2: -2 * (s[2] + A**2) + e * s[1],
        3: -2 * (s[3] + s[1] * A**2) + e * (s[2] + A**2),
        4: -2 * (s[4] + s[2] * A**2 + A**4) + e * (s[3] + s[1] * A**2),
    }[len(masses)]
    return above / (y * (4 * A**2 - e**2))
