"""The combinations of Y's whose averages are polynomials in x.

Adding a box to a configuration gives Y_v(x + eps) a pole that cancels against the term obtained from it by

    Y_v(x + eps)  ->  (-1)^N_v q_v P_v(x) prod Y_w(x + eps - m) prod (-1)^N_u Y_u(x + m) / Y_v(x),

with a product over edges v -> w of mass m and one over edges u -> v of mass m; P_v(x) = prod (x + m) over the
antifundamentals, a fundamental of mass m being the antifundamental eps - m. (An edge u -> v of mass m is the edge
v -> u of mass eps - m with q_v times (-1)^N_u, whence the signs.) Starting from Y_v(x + eps) and going on with every Y
in a numerator gives for one node

    T(x) = Y(x + eps) + (-1)^N q P(x)/Y(x),

and for a linear quiver of r nodes the binomial(r + 1, v) terms of the v-th fundamental representation of A_r, each
once. With an adjoint, or another graph, there are infinitely many terms, or terms with derivatives: not here.
Source: Nekrasov, Pestun, Shatashvili 1312.6689; Nekrasov 1512.05388.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from ratomega.averages.observables import Monomial, Term
from ratomega.averages.series import minus
from ratomega.case.setting import Setting
from ratomega.diagrams.tuples import Charge
from ratomega.exact.path import Linear

__all__ = ["character_terms", "is_linear"]

Exponents = dict[tuple[int, Linear], int]


def is_linear(setting: Setting, node: int) -> bool:
    """Is the connected part of the quiver with this node a line without adjoints (a single node counts)?"""
    part, todo = {node}, [node]
    while todo:
        v = todo.pop()
        for other in _neighbours(setting, v):
            if other not in part:
                part.add(other)
                todo.append(other)
    edges = [(a, b) for a, b, _ in setting.edges if a in part]
    if any(setting.nodes[v].adjoint for v in part) or len(edges) != len(part) - 1:
        return False
    return all(len(_neighbours(setting, v)) <= 2 for v in part)


def _neighbours(setting: Setting, node: int) -> list[int]:
    return [b if a == node else a for a, b, _ in setting.edges if node in (a, b)]


def character_terms(setting: Setting, node: int, charges: Sequence[Charge]) -> tuple[Term, ...]:
    """The terms of T for one node of a linear quiver, those left out that enter at none of ``charges``.

    Raises ``ValueError`` when the part of the quiver is not linear.
    """
    if not is_linear(setting, node):
        raise ValueError(f"the quiver around node {node + 1} is not a line without adjoints")
    eps = setting.eps1 + setting.eps2
    zero = (0,) * len(setting.nodes)
    first = Term(1, zero, Monomial(((node, eps, 1),)))
    found = {_key(first): first}
    todo = [first]
    while todo:
        term = todo.pop()
        for v, shift, exponent in term.monomial.factors:
            if exponent < 0:
                continue
            new = _reflected(setting, term, v, shift - eps)
            wanted = any(minus(charge, new.charge) is not None for charge in charges)
            if wanted and _key(new) not in found:
                found[_key(new)] = new
                todo.append(new)
    return tuple(found.values())


def _key(term: Term) -> tuple[object, ...]:
    """Equal for equal terms, however they were reached."""
    return term.charge, frozenset(term.monomial.factors)


def _reflected(setting: Setting, term: Term, v: int, y: Linear) -> Term:
    """The term with Y_v(x + y + eps) replaced by what cancels its poles."""
    eps = setting.eps1 + setting.eps2
    here = setting.nodes[v]
    sign = term.sign * (-1) ** here.rank
    exponents: Exponents = {(u, shift): exponent for u, shift, exponent in term.monomial.factors}
    _multiply(exponents, (v, y + eps), -1)
    _multiply(exponents, (v, y), -1)
    for source, target, mass in setting.edges:
        if source == v:
            _multiply(exponents, (target, y + eps - mass), 1)
        elif target == v:
            _multiply(exponents, (source, y + mass), 1)
            sign *= (-1) ** setting.nodes[source].rank
    masses = [y + m for m in here.antifundamental] + [y + eps - m for m in here.fundamental]
    charge = tuple(k + (n == v) for n, k in enumerate(term.charge))
    return Term(sign, charge, Monomial(_factors(exponents), (*term.monomial.masses, *masses)))


def _multiply(exponents: Exponents, factor: tuple[int, Linear], exponent: int) -> None:
    exponents[factor] = exponents.get(factor, 0) + exponent


def _factors(exponents: Mapping[tuple[int, Linear], int]) -> tuple[tuple[int, Linear, int], ...]:
    return tuple((v, shift, exponent) for (v, shift), exponent in exponents.items() if exponent)
