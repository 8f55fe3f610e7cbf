"""Averages in the plainest way, on top of ``plain``: for one number x, box by box, nothing cancelled by hand.

Y(x) on a configuration is prod (x - a) prod (x - phi - eps1)(x - phi - eps2)/((x - phi)(x - phi - eps)) over the boxes
(Nekrasov 1512.05388), Tr phi^n comes from exp(z phi) with the factor (1 - exp(z eps1))(1 - exp(z eps2)) (Losev,
Marshakov, Nekrasov hep-th/0302191). Parameters are ``plain.Line`` (c + d t) throughout; a series is {power: value}.
Nothing is imported from the package.
"""

from __future__ import annotations

from itertools import product
from math import comb

import plain
from flint import fmpq


def line(number):
    return number if isinstance(number, plain.Line) else plain.Line(number)


def contents(theory, configuration, node):
    """The contents of all boxes of one node."""
    a = theory["nodes"][node]["coulomb"]
    for alpha, diagram in enumerate(configuration[node]):
        for i, j in plain.boxes(diagram):
            yield a[alpha] + theory["eps1"] * (i - 1) + theory["eps2"] * (j - 1)


def y_factors(theory, configuration, node, x, exponent=1):
    """The factors of Y(x)^exponent as (value, exponent); x may itself be a Line."""
    e1, e2 = theory["eps1"], theory["eps2"]
    x = line(x)
    for a in theory["nodes"][node]["coulomb"]:
        yield x - a, exponent
    for phi in contents(theory, configuration, node):
        yield x - phi - e1, exponent
        yield x - phi - e2, exponent
        yield x - phi, -exponent
        yield x - phi - e1 - e2, -exponent


def expand(factors, last):
    """A product of (c + d t)^(+-1) as {power: coefficient}, all powers up to ``last``; {} when it is zero."""
    low, lines = 0, []
    for value, exponent in factors:
        value = line(value)
        if value.c == 0 and value.d == 0:
            if exponent > 0:
                return {}
            raise ZeroDivisionError("a denominator is identically zero on this path")
        low += exponent if value.c == 0 else 0
        lines.append((value.d, fmpq(0), exponent) if value.c == 0 else (value.c, value.d, exponent))
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


def add(one, other, factor=1):
    found = dict(one)
    for power, value in other.items():
        found[power] = found.get(power, fmpq(0)) + value * factor
    return found


def times(one, other):
    found = {}
    for n, a in one.items():
        for m, b in other.items():
            found[n + m] = found.get(n + m, fmpq(0)) + a * b
    return found


def power(value, n):
    """(c + d t)^n."""
    value = line(value)
    found, c_powers, d_powers = {}, [fmpq(1)], [fmpq(1)]
    for _ in range(n):
        c_powers.append(c_powers[-1] * value.c)
        d_powers.append(d_powers[-1] * value.d)
    for j in range(n + 1):
        found[j] = c_powers[n - j] * d_powers[j] * comb(n, j)
    return found


def trace(theory, configuration, node, n):
    """Tr phi^n on a configuration: n! times the coefficient of z^n."""
    e1, e2 = theory["eps1"], theory["eps2"]
    found = {}
    for a in theory["nodes"][node]["coulomb"]:
        found = add(found, power(a, n))
    for phi in contents(theory, configuration, node):
        for shift, sign in ((phi, -1), (phi + e1, 1), (phi + e2, 1), (phi + e1 + e2, -1)):
            found = add(found, power(shift, n), sign)
    return found


def ranks(theory):
    return [len(node["coulomb"]) for node in theory["nodes"]]


def below(charge):
    return list(product(*(range(k + 1) for k in charge)))


def average(theory, charge, sums, depth=0):
    """The coefficient of q^charge of (sums)/Z as a series in t, right up to t^0 when ``depth`` is large enough.

    ``sums(charge, last)`` is the sum of weight times observable. With poles t^-p in Z or in the sums a depth of p at
    every charge on the way is needed; without any, 0 is.
    """
    known, z = {}, {}
    for part in below(charge):
        z[part] = plain.laurent_coefficient(theory, part, depth)
        known[part] = sums(part, depth)
        for first in below(part):
            if any(first):
                rest = tuple(a - b for a, b in zip(part, first, strict=True))
                known[part] = add(known[part], times(z[first], known[rest]), -1)
    return {p: value for p, value in sorted(known[charge].items()) if p <= 0 and value != 0}


def product_sums(theory, factors_of):
    """The sums of weight times a product of factors; ``factors_of(configuration)`` yields them."""

    def sums(charge, last):
        total = {}
        for c in plain.configurations(ranks(theory), charge):
            total = add(total, expand([*plain.factors(theory, c), *factors_of(c)], last))
        return total

    return sums


def trace_sums(theory, node, n):
    def sums(charge, last):
        total = {}
        for c in plain.configurations(ranks(theory), charge):
            # Traces are polynomials in t: a weight is needed up to t^last, whatever its pole is.
            series = times(plain.laurent_weight(theory, c, last), trace(theory, c, node, n))
            total = add(total, {p: value for p, value in series.items() if p <= last})
        return total

    return sums


def size_sums(theory, node):
    def sums(charge, last):
        return {p: value * charge[node] for p, value in plain.laurent_coefficient(theory, charge, last).items()}

    return sums


def value(series):
    """The limit of a series that has one."""
    assert not any(p < 0 for p in series), series
    return series.get(0, fmpq(0))
