"""Tables of numbers with a known fault, made by the plain reference and by plain floats: no line of the package.

A theory is a mapping as in a case file. ``FAULTS`` maps a name to a function (draw, theory) -> (table, expected kinds),
None where the fault does not apply to the theory. Tables are lists of (charge, text).
"""

from __future__ import annotations

from fractions import Fraction

import plain
from flint import fmpq

CHARGE = 4
BACKGROUNDS = {"1": (1, 1), "2": (1, 2), "-3/4": (4, -3)}
MASSES = ["1/2", "1/5", "2/7", "-3/5", "5/4", "-1/3", "7/9", "3/8"]
MOMENTA = ["2/7", "3/11", "5/13", "-4/9", "6/17", "-7/19"]


def rational(text):
    top, _, bottom = str(text).partition("/")
    return fmpq(int(top), int(bottom or 1))


def draw_theory(draw, rank, ratio):
    """A generic theory: no resonance among the drawn momenta, up to 2N flavours or one adjoint, typed numbers."""
    eps1, eps2 = BACKGROUNDS[ratio]
    momenta = draw.sample(MOMENTA, rank)
    if rank == 2 and draw.random() < 0.6:
        momenta = [momenta[0], str(-rational(momenta[0]))]
    node = {"coulomb": momenta, "antifundamental": [], "fundamental": [], "adjoint": []}
    kind = draw.choice(["none", "flavours", "flavours", "flavours", "adjoint"])
    if kind == "adjoint":
        node["adjoint"] = [draw.choice(MASSES)]
    if kind == "flavours":
        masses = draw.sample(MASSES, draw.randint(1, 2 * rank))
        cut = draw.randint(0, len(masses))
        node["antifundamental"], node["fundamental"] = masses[:cut], masses[cut:]
    return {"charge": 2, "background": {"eps1": str(eps1), "eps2": str(eps2)}, "node": [node]}


def numbers(mapping, convert=rational, shift=None):
    """The mapping as numbers for ``plain``; eps2 is moved by ``shift``."""
    node = {key: [convert(x) for x in values] for key, values in mapping["node"][0].items()}
    background = mapping["background"]
    eps1, eps2 = convert(background["eps1"]), convert(background["eps2"])
    return {"eps1": eps1, "eps2": eps2 if shift is None else eps2 + shift, "nodes": [node]}


def on_path(mapping):
    """The same on the path eps2 + t."""
    theory = numbers(mapping, lambda text: plain.Line(rational(text)))
    theory["eps2"] = plain.Line(rational(mapping["background"]["eps2"]), 1)
    return theory


def exact_limits(mapping):
    theory = on_path(mapping)
    return [plain.laurent_coefficient(theory, (k,)).get(0, fmpq(0)) for k in range(CHARGE + 1)]


def at_offset(mapping, delta):
    theory = numbers(mapping, shift=delta)
    return [plain.coefficient(theory, (k,)) for k in range(CHARGE + 1)]


def without_singular(mapping):
    theory = on_path(mapping)
    rank = len(mapping["node"][0]["coulomb"])
    found = []
    for k in range(CHARGE + 1):
        total = fmpq(0)
        for configuration in plain.configurations([rank], [k]):
            terms = plain.laurent_weight(theory, configuration, 0)
            if not terms or min(terms) >= 0:
                total += terms.get(0, fmpq(0))
        found.append(total)
    return found


def in_floats(mapping, delta):
    """The sum as a program in double precision does it: every factor a difference of floats."""
    theory = numbers(mapping, lambda text: float(Fraction(text)), float(delta))
    rank = len(mapping["node"][0]["coulomb"])
    found = []
    for k in range(CHARGE + 1):
        total = 0.0
        for configuration in plain.configurations([rank], [k]):
            value = 1.0
            for factor, exponent in plain.factors(theory, configuration):
                value = value * factor if exponent > 0 else value / factor
            total += value
        found.append(total)
    return found


# ---- numbers as text ----


def decimal(value, digits=15):
    """A rational rounded to significant digits, as text."""
    if value == 0:
        return "0.0"
    fraction = Fraction(int(value.p), int(value.q))
    exponent = 0
    while abs(fraction) >= 10:
        fraction, exponent = fraction / 10, exponent + 1
    while abs(fraction) < 1:
        fraction, exponent = fraction * 10, exponent - 1
    scaled = round(abs(fraction) * 10 ** (digits - 1))
    mantissa = str(scaled)
    if len(mantissa) > digits:
        mantissa, exponent = mantissa[:digits], exponent + 1
    sign = "-" if fraction < 0 else ""
    return f"{sign}{'.'.join(filter(None, (mantissa[0], mantissa[1:])))}e{exponent:+03d}"


def table(values, digits=15):
    return [(k, decimal(value, digits)) for k, value in enumerate(values)]


def float_table(values):
    return [(k, repr(value)) for k, value in enumerate(values)]


# ---- power series ----


def logarithm(z):
    found = [fmpq(0)]
    for n in range(1, len(z)):
        rest = sum((found[j] * z[n - j] * j for j in range(1, n)), fmpq(0))
        found.append(z[n] - rest / n)
    return found


def product(one, other):
    return [sum((one[j] * other[n - j] for j in range(n + 1)), fmpq(0)) for n in range(len(one))]


def power(base_sign, s):
    """(1 + base_sign q)^s."""
    found = [fmpq(1)]
    for n in range(1, CHARGE + 1):
        found.append(found[-1] * (s - n + 1) / n * base_sign)
    return found


def exponential(s):
    found = [fmpq(1)]
    for n in range(1, CHARGE + 1):
        found.append(found[-1] * s / n)
    return found


# ---- the faults ----


def changed(values, exact):
    return sum(1 for a, b in zip(values, exact, strict=True) if a != b)


def exact_offset(delta):
    def make(draw, mapping):
        values = at_offset(mapping, delta)
        return (table(values), ["offset"]) if changed(values, exact_limits(mapping)) >= 2 else None

    return make


def float_offset(delta):
    def make(draw, mapping):
        values = in_floats(mapping, delta)
        # At a negative ratio nothing cancels: what is left is the offset alone.
        kinds = ["precision-loss"] if mapping["background"]["eps2"][0] != "-" else ["offset", "precision-loss"]
        return float_table(values), kinds

    return make


def singular_terms(draw, mapping):
    values = without_singular(mapping)
    return (table(values), ["dropped-singular"]) if changed(values, exact_limits(mapping)) >= 2 else None


def sign(draw, mapping):
    exact = exact_limits(mapping)
    values = [value * (-1) ** k for k, value in enumerate(exact)]
    return (table(values), ["convention"]) if changed(values, exact) >= 2 else None


def _reflected(draw, mapping):
    node = dict(mapping["node"][0])
    kinds = [key for key in ("antifundamental", "fundamental", "adjoint") if node[key]]
    if not kinds:
        return None
    key = draw.choice(kinds)
    place = draw.randrange(len(node[key]))
    eps = rational(mapping["background"]["eps1"]) + rational(mapping["background"]["eps2"])
    masses = list(node[key])
    masses[place] = str(eps - rational(masses[place]))
    return {**mapping, "node": [{**node, key: masses}]}


def reflected(draw, mapping):
    other = _reflected(draw, mapping)
    if other is None:
        return None
    values = exact_limits(other)
    return (table(values), ["convention"]) if changed(values, exact_limits(mapping)) >= 2 else None


def abelian_factor(draw, mapping):
    """Divided by the partition function of one colour: exp(q/(eps1 eps2)), or a power of 1 - q for 2N flavours."""
    theory = numbers(mapping)
    area = theory["eps1"] * theory["eps2"]
    node = theory["nodes"][0]
    flavours = node["antifundamental"] + node["fundamental"]
    if len(flavours) == 2 * len(node["coulomb"]):
        factor = power(-1, -2 * flavours[0] * flavours[-1] / area)
    else:
        factor = exponential(-1 / area)
    exact = exact_limits(mapping)
    values = product(exact, factor)
    return (table(values), ["convention"]) if changed(values, exact) >= 2 else None


def two_changes(draw, mapping):
    other = _reflected(draw, mapping)
    if other is None:
        return None
    exact = exact_limits(mapping)
    if draw.random() < 0.5:
        values = [value * (-1) ** k for k, value in enumerate(exact_limits(other))]
    else:
        theory = numbers(mapping)
        values = product(exact_limits(other), exponential(1 / (theory["eps1"] * theory["eps2"])))
    return (table(values), ["convention"]) if changed(values, exact) >= 2 else None


def corrupted(draw, mapping):
    exact = exact_limits(mapping)
    places = [k for k in range(1, CHARGE + 1) if exact[k] != 0]
    if len(places) < 2:
        return None
    rows = table(exact)
    k = draw.choice(places)
    text = rows[k][1]
    head, _, tail = text.partition("e")
    digits = [n for n, c in enumerate(head) if c.isdigit()]
    place = digits[draw.randrange(0, 12)]
    if draw.random() < 0.5:
        new = str((int(head[place]) + draw.randint(1, 9)) % 10)
        head = head[:place] + new + head[place + 1 :]
    else:
        following = digits[digits.index(place) + 1]
        a, b = head[place], head[following]
        if a == b:
            return None
        characters = list(head)
        characters[place], characters[following] = b, a
        head = "".join(characters)
    rows[k] = (k, f"{head}e{tail}")
    return rows, ["single-entry"]


def logarithms(draw, mapping):
    exact = exact_limits(mapping)
    values = logarithm(exact)
    return (table(values), ["log"]) if changed(values[1:], exact[1:]) >= 2 else None


def correct(draw, mapping):
    return table(exact_limits(mapping), draw.choice([2, 3, 4, 6, 9, 12, 15, 20])), []


FAULTS = {
    "offset 1e-3": exact_offset(fmpq(1, 1000)),
    "offset 1e-4": exact_offset(fmpq(1, 10000)),
    "floats 1e-6": float_offset(fmpq(1, 10**6)),
    "floats 1e-8": float_offset(fmpq(1, 10**8)),
    "singular terms": singular_terms,
    "sign": sign,
    "reflected mass": reflected,
    "U(1) factor": abelian_factor,
    "two changes": two_changes,
    "corrupted": corrupted,
    "log": logarithms,
    "correct": correct,
}
