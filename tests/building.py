"""Small builders for the tests: cases from plain text, settings as plain theories for ``plain``."""

from __future__ import annotations

import plain
from flint import fmpq

import ratomega
from ratomega.case.setting import Setting


def make_case(eps1, eps2, nodes, *, charge=2, edges=(), symbols=()):
    """A case from text expressions: ``nodes`` are mappings with coulomb, ...; edges are (from, to, mass), from 1."""
    mapping = {
        "charge": charge,
        "background": {"eps1": eps1, "eps2": eps2},
        "node": [{"name": f"n{v}", **node} for v, node in enumerate(nodes, 1)],
        "edge": [{"from": f"n{a}", "to": f"n{b}", "mass": mass} for a, b, mass in edges],
    }
    if symbols:
        mapping["symbols"] = list(symbols)
    return ratomega.load_case(mapping)


def symbolic(nodes, *, symbols=("a",), eps1="1", eps2="1", **options):
    """A case with free parameters."""
    return make_case(eps1, eps2, nodes, symbols=symbols, **options)


def symbolic_u2(*, coulomb=("a", "-a"), **options):
    """U(2) with free parameters; matter stands among the options."""
    matter = {key: options.pop(key) for key in ("antifundamental", "fundamental", "adjoint") if key in options}
    return symbolic([{"coulomb": list(coulomb), **matter}], **options)


def plain_number(value):
    """A number of the package as one of ``plain``, from its text."""
    text = str(value)
    if "sqrt" not in text:
        return value
    x, sign, y = ("0", "+", text) if " " not in text else text.split(" ")
    y, _, d = y.removesuffix(")").partition("*sqrt(")
    return plain.Pair(fraction(x), fraction(y) * (-1 if sign == "-" else 1), int(d))


def fraction(text):
    top, _, bottom = text.partition("/")
    return fmpq(int(top), int(bottom or 1))


def plain_theory(setting: Setting):
    """The same theory as a dictionary of ``plain.Line`` for the plain reference."""

    def line(value):
        return plain.Line(plain_number(value.constant), plain_number(value.slope))

    return {
        "eps1": line(setting.eps1),
        "eps2": line(setting.eps2),
        "nodes": [
            {
                "coulomb": [line(x) for x in node.coulomb],
                "antifundamental": [line(x) for x in node.antifundamental],
                "fundamental": [line(x) for x in node.fundamental],
                "adjoint": [line(x) for x in node.adjoint],
            }
            for node in setting.nodes
        ],
        "edges": [(a, b, line(m)) for a, b, m in setting.edges],
    }


def plain_values(setting: Setting):
    """The theory at the limit point itself as plain rationals."""

    theory = plain_theory(setting)
    nodes = [{key: [x.c for x in values] for key, values in node.items()} for node in theory["nodes"]]
    edges = [(a, b, m.c) for a, b, m in theory["edges"]]
    return {"eps1": theory["eps1"].c, "eps2": theory["eps2"].c, "nodes": nodes, "edges": edges}
