"""The pole recursion of U(2) at plain numbers eps1, eps2, and its limit by interpolation: no series, no windows.

Nothing is imported from the package. W_k times (eps1 eps2)^k prod_{mn<=k} ((m eps1 + n eps2)^2 - x^2) is a polynomial
in eps1, eps2, so along a line it is a polynomial in t; evaluated at numbers t where nothing collides it is interpolated
at t = 0. One point more than the degree asks for must lie on it too.

(Al. Zamolodchikov 1984, 1987; R. Poghossian 2009.)
"""

from __future__ import annotations

from flint import fmpq


def pairs(charge):
    return sorted((m * n, m, n) for m in range(1, charge + 1) for n in range(1, charge // m + 1))


def residue(m, n, e1, e2, mu, adjoint):
    value = fmpq(1)
    if adjoint is not None:
        for p in range(1 - 2 * m, 2 * m, 2):
            for r in range(1 - 2 * n, 2 * n, 2):
                value *= adjoint + (p * e1 + r * e2) / 2
    for p in range(1 - m, m, 2):
        for r in range(1 - n, n, 2):
            for one in mu:
                value *= one + (p * e1 + r * e2) / 2
    for i in range(1 - m, m + 1):
        for j in range(1 - n, n + 1):
            if (i, j) not in ((0, 0), (m, n)):
                value /= i * e1 + j * e2
    return value


def recursion(e1, e2, square, charge, mu=(), adjoint=None):
    """W_0 ... W_charge at generic numbers; ``square`` is (a1 - a2)^2."""
    table = pairs(charge)
    strength = [2 * residue(m, n, e1, e2, mu, adjoint) for _, m, n in table]
    inner = [[fmpq(1)] + [fmpq(0)] * (charge - w) for w, _, _ in table]

    def value(order, x_square):
        total = fmpq(1 if order == 0 else 0)
        for index, (w, m, n) in enumerate(table):
            if w <= order:
                total += strength[index] * inner[index][order - w] / ((m * e1 + n * e2) ** 2 - x_square)
        return total

    for order in range(1, charge + 1):
        for index, (w, m, n) in enumerate(table):
            if w + order <= charge:
                inner[index][order] = value(order, (m * e1 - n * e2) ** 2)
    return [value(order, square) for order in range(charge + 1)]


def limit(steps, direction, square, charge, mu=(), adjoint=None):
    """W_0 ... W_charge at t -> 0 on eps = steps + direction t."""
    count = len(pairs(charge))
    flavours = len(mu)
    degree = 2 * count + ((flavours - 2) if adjoint is None else 2) * charge
    nodes = [fmpq(1, 1009 + 2 * i) for i in range(degree + 2)]
    rows = []
    for t in nodes:
        e1, e2 = steps[0] + direction[0] * t, steps[1] + direction[1] * t
        values = recursion(e1, e2, square, charge, mu, adjoint)
        rows.append([v * scale for v, scale in zip(values, scales(e1, e2, square, charge), strict=True)])
    last = scales(fmpq(steps[0]), fmpq(steps[1]), square, charge)
    answer = []
    for order in range(charge + 1):
        column = [row[order] for row in rows]
        assert lagrange(nodes[:-1], column[:-1], nodes[-1]) == column[-1], "not a polynomial of this degree"
        answer.append(lagrange(nodes[:-1], column[:-1], fmpq(0)) / last[order])
    return answer


def scales(e1, e2, square, charge):
    result = [fmpq(1)]
    for order in range(1, charge + 1):
        value = result[-1] * e1 * e2
        for m in range(1, order + 1):
            if order % m == 0:
                value *= (m * e1 + order // m * e2) ** 2 - square
        result.append(value)
    return result


def lagrange(nodes, values, point):
    total = fmpq(0)
    for i, (node, value) in enumerate(zip(nodes, values, strict=True)):
        weight = value
        for j, other in enumerate(nodes):
            if j != i:
                weight *= (point - other) / (node - other)
        total += weight
    return total
