"""H as a function of the symbols, from Z: against the recursion over its poles written out here, and closed forms.

The recursion is that of Al. Zamolodchikov 1984 and R. Poghossian, arXiv 0909.3412: with mu = m - eps/2 and generic
eps1, eps2,

    H_k(a) = delta_k0 + sum_(mn <= k) 2 R_mn/((m eps1 + n eps2)^2 - 4 a^2) H_(k - mn)((m eps1 - n eps2)/2).
"""

from __future__ import annotations

from fractions import Fraction
from functools import cache

import pytest

import ratomega
from ratomega.conformal.nome import nome_matrix, nome_variable
from ratomega.exact.rational import as_fraction

LAST = 4


def residue(m, n, eps1, eps2, mu, adjoint):
    """R_mn; the range of the numerator is twice as wide for an adjoint."""
    wide = 2 if adjoint else 1
    value = Fraction(1)
    for p in range(1 - wide * m, wide * m, 2):
        for r in range(1 - wide * n, wide * n, 2):
            for x in mu:
                value *= x + (p * eps1 + r * eps2) / 2
    for k in range(1 - m, m + 1):
        for ell in range(1 - n, n + 1):
            if (k, ell) not in ((0, 0), (m, n)):
                value /= k * eps1 + ell * eps2
    return value


def recursion(eps1, eps2, mu, adjoint):
    @cache
    def coefficient(k, a):
        total = Fraction(int(k == 0))
        for m in range(1, k + 1):
            for n in range(1, k // m + 1):
                pole = (m * eps1 + n * eps2) ** 2 - 4 * a * a
                rest = coefficient(k - m * n, (m * eps1 - n * eps2) / 2)
                total += 2 * residue(m, n, eps1, eps2, mu, adjoint) / pole * rest
        return total

    return coefficient


def functions(mapping):
    """H_0 ... as functions: the matrix times Z."""
    case = ratomega.load_case({"charge": LAST, **mapping})
    z = [one.value for one in ratomega.limit(case)]
    rows = nome_matrix(case, LAST)
    assert [len(row) for row in rows] == list(range(1, LAST + 2))
    return case, [sum(t * f for t, f in zip(row, z, strict=False)) for row in rows]


@pytest.mark.parametrize("a", ["3/11", "-5/7", "13/4"])
def test_four_flavours_at_a_ratio_without_singular_weights(a):
    """eps1 : eps2 = 5 : 7, where nothing is singular up to this order. One flavour is a fundamental, and the Coulomb
    parameters have a common shift of 1/5."""
    eps1, eps2, eps = Fraction(5), Fraction(7), Fraction(12)
    node = {"coulomb": ["a + 1/5", "1/5 - a"], "antifundamental": ["1/2", "eps1/3", "5/7"], "fundamental": ["2/9"]}
    _, found = functions({"symbols": ["a"], "background": {"eps1": 5, "eps2": 7}, "node": [node]})
    masses = [Fraction(1, 2), eps1 / 3, Fraction(5, 7), eps - Fraction(2, 9)]
    expected = recursion(eps1, eps2, tuple(m + Fraction(1, 5) - eps / 2 for m in masses), False)
    assert [as_fraction(h.at(a=a)) for h in found] == [expected(k, Fraction(a)) for k in range(LAST + 1)]
    assert expected(2, Fraction(a)) != 0


def test_an_adjoint_whose_mass_is_a_symbol_too():
    eps1, eps2 = Fraction(5), Fraction(-7)
    node = {"coulomb": ["a", "-a"], "adjoint": ["m + eps1/3"]}
    mapping = {"symbols": ["a", "m"], "background": {"eps1": 5, "eps2": -7}, "node": [node]}
    case, found = functions({**mapping, "charge": LAST})
    assert nome_variable(case) == "q"
    for a, m in (("3/11", "2/7"), ("13/4", "-5/3")):
        mu = Fraction(m) + eps1 / 3 - (eps1 + eps2) / 2
        expected = recursion(eps1, eps2, (mu,), True)
        assert [as_fraction(h.at(a=a, m=m)) for h in found] == [expected(k, Fraction(a)) for k in range(LAST + 1)]


@pytest.mark.parametrize("eps2", [1, -1])
def test_the_elementary_blocks(eps2):
    """H = 1 for every internal weight: c = 1 with weights 1/16 (Al. Zamolodchikov 1986) and c = 25 with 15/16
    (V. Fateev, A. Litvinov, A. Neveu, E. Onofri, arXiv 0902.1331)."""
    half = f"1/2 + (1 + {eps2})/2"
    node = {"coulomb": ["a", "-a"], "antifundamental": [half, "(eps1 + eps2)/2"] * 2}
    case, found = functions({"symbols": ["a"], "background": {"eps1": 1, "eps2": eps2}, "node": [node]})
    assert nome_variable(case) == "16 q_e"
    assert [str(h) for h in found] == ["1", "0", "0", "0", "0"]


@pytest.mark.parametrize("mass", ["0", "eps1", "eps2", "eps1 + eps2"])
def test_special_adjoint_masses(mass):
    """Z = prod (1 - q^n)^-2 at m = 0, and 1 at m = eps1 (C. Vafa, E. Witten, hep-th/9408074; the factors cancel): the
    field has weight 0 or 1 and H = 1."""
    node = {"coulomb": ["a", "-a"], "adjoint": [mass]}
    _, found = functions({"symbols": ["a"], "background": {"eps1": 1, "eps2": 2}, "node": [node]})
    assert [str(h) for h in found] == ["1", "0", "0", "0", "0"]
