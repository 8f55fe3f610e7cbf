"""The plainest possible evaluation, kept for ever as the reference for the engine.

Nothing is imported from the package.  A theory is a dictionary of plain numbers:

    {"eps1": x, "eps2": y,
     "nodes": [{"coulomb": [...], "antifundamental": [...], "fundamental": [...], "adjoint": [...]}],
     "edges": [(source, target, mass)]}

Every number is a ``flint.fmpq`` (``weight``) or a pair of them standing for c + d t
(``laurent_weight``).  Beyond Q a number is a ``Pair`` x + y sqrt(d).
The formulas are written box by box, exactly as they are printed in the literature (Nekrasov
hep-th/0206161; Flume, Poghossian hep-th/0208176 for the product over boxes).
No caching, no shared tables, no cancellation of factors.
"""

from __future__ import annotations

from itertools import product

from flint import fmpq


def partitions(n, largest=None):
    """All weakly decreasing tuples of positive integers with sum n."""
    if n == 0:
        yield ()
        return
    for first in range(min(n, n if largest is None else largest), 0, -1):
        for rest in partitions(n - first, first):
            yield (first, *rest)


def compositions(n, parts):
    if parts == 0:
        if n == 0:
            yield ()
        return
    for first in range(n + 1):
        for rest in compositions(n - first, parts - 1):
            yield (first, *rest)


def configurations(ranks, charges):
    """All tuples (one per node) of tuples (one per colour) of diagrams with the given sizes."""
    per_node = []
    for rank, charge in zip(ranks, charges, strict=True):
        node = []
        for sizes in compositions(charge, rank):
            node.extend(product(*[list(partitions(n)) for n in sizes]))
        per_node.append(node)
    return list(product(*per_node))


def boxes(diagram):
    return [(i, j) for i, row in enumerate(diagram, 1) for j in range(1, row + 1)]


def arm(diagram, box):
    i, j = box
    return (diagram[i - 1] if i <= len(diagram) else 0) - j


def leg(diagram, box):
    i, j = box
    return sum(1 for row in diagram if row >= j) - i


def factors(theory, configuration):
    """Yield (value, exponent) for every factor of the weight of one configuration.

    Works for any number type with + - * (fmpq, or ``Line`` below).
    """
    e1, e2 = theory["eps1"], theory["eps2"]
    eps = e1 + e2
    for node, diagrams in zip(theory["nodes"], configuration, strict=True):
        a = node["coulomb"]
        for alpha, lam in enumerate(diagrams):
            for beta, mu in enumerate(diagrams):
                for s in boxes(lam):
                    e = a[alpha] - a[beta] - e1 * leg(mu, s) + e2 * (arm(lam, s) + 1)
                    yield e, -1
                    yield eps - e, -1
                    for m in node.get("adjoint", []):
                        yield e - m, 1
                        yield eps - e - m, 1
        for alpha, lam in enumerate(diagrams):
            for i, j in boxes(lam):
                phi = a[alpha] + e1 * (i - 1) + e2 * (j - 1)
                for m in node.get("antifundamental", []):
                    yield phi + m, 1
                for m in node.get("fundamental", []):
                    yield phi - m + eps, 1
    for source, target, m in theory.get("edges", []):
        a, b = theory["nodes"][source]["coulomb"], theory["nodes"][target]["coulomb"]
        for alpha, lam in enumerate(configuration[source]):
            for beta, mu in enumerate(configuration[target]):
                for s in boxes(lam):
                    yield a[alpha] - b[beta] - e1 * leg(mu, s) + e2 * (arm(lam, s) + 1) - m, 1
                for s in boxes(mu):
                    e = b[beta] - a[alpha] - e1 * leg(lam, s) + e2 * (arm(mu, s) + 1)
                    yield eps - e - m, 1


def weight(theory, configuration):
    """The weight of one configuration at a point where no denominator vanishes."""
    value = fmpq(1)
    for factor, exponent in factors(theory, configuration):
        value = value * factor if exponent > 0 else value / factor
    return value


def coefficient(theory, charges):
    """Z at the given charges (one per node), summed configuration by configuration."""
    ranks = [len(node["coulomb"]) for node in theory["nodes"]]
    return sum((weight(theory, c) for c in configurations(ranks, charges)), fmpq(0))


class Pair:
    """x + y sqrt(d), as a pair of fmpq; mixes with plain numbers on either side."""

    def __init__(self, x, y, d):
        self.x, self.y, self.d = fmpq(x), fmpq(y), d

    def lifted(self, other):
        assert not isinstance(other, Pair) or other.d == self.d
        return other if isinstance(other, Pair) else Pair(other, 0, self.d)

    def __add__(self, other):
        other = self.lifted(other)
        return Pair(self.x + other.x, self.y + other.y, self.d)

    def __mul__(self, other):
        other = self.lifted(other)
        return Pair(self.x * other.x + self.d * self.y * other.y, self.x * other.y + self.y * other.x, self.d)

    def __truediv__(self, other):
        other = self.lifted(other)
        return self * Pair(other.x, -other.y, self.d) * (1 / (other.x**2 - self.d * other.y**2))

    def __sub__(self, other):
        return self + self.lifted(other) * -1

    def __rsub__(self, other):
        return self.lifted(other) - self

    def __rtruediv__(self, other):
        return self.lifted(other) / self

    __radd__, __rmul__ = __add__, __mul__

    def __eq__(self, other):
        other = self.lifted(other)
        return self.x == other.x and self.y == other.y

    __hash__ = None


def exact(number):
    return number if isinstance(number, Pair) else fmpq(number)


class Line:
    """c + d t, with the operations that the factors need."""

    def __init__(self, c, d=0):
        self.c, self.d = exact(c), exact(d)

    def __add__(self, other):
        return Line(self.c + other.c, self.d + other.d)

    def __sub__(self, other):
        return Line(self.c - other.c, self.d - other.d)

    def __mul__(self, integer):
        return Line(self.c * integer, self.d * integer)


def laurent_weight(theory, configuration, last):
    """{power of t: coefficient} of one weight, all powers up to ``last``, factor by factor.

    Each factor multiplies or divides a plain list of coefficients; nothing is expanded in logarithms.
    """
    low = 0
    lines = []
    for line, exponent in factors(theory, configuration):
        if line.c == 0 and line.d == 0:
            if exponent > 0:
                return {}
            raise ZeroDivisionError("a denominator is identically zero on this path")
        if line.c == 0:
            low += exponent
            lines.append((line.d, fmpq(0), exponent))
        else:
            lines.append((line.c, line.d, exponent))
    length = last - low + 1
    if length <= 0:
        return {}
    series = [fmpq(1)] + [fmpq(0)] * (length - 1)
    for c, d, exponent in lines:
        if exponent > 0:
            for n in range(length - 1, 0, -1):
                series[n] = c * series[n] + d * series[n - 1]
            series[0] = c * series[0]
        else:
            series[0] = series[0] / c
            for n in range(1, length):
                series[n] = (series[n] - d * series[n - 1]) / c
    return {low + n: value for n, value in enumerate(series) if value != 0}


def laurent_coefficient(theory, charges, last=0):
    """{power of t: coefficient} of Z at the given charges, all powers up to ``last``."""
    ranks = [len(node["coulomb"]) for node in theory["nodes"]]
    total = {}
    for configuration in configurations(ranks, charges):
        for power, value in laurent_weight(theory, configuration, last).items():
            total[power] = total.get(power, fmpq(0)) + value
    return {power: value for power, value in sorted(total.items()) if value != 0}
