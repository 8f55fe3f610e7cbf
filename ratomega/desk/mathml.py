"""Formulas as MathML, which browsers show and screen readers read without any help."""

from __future__ import annotations

from collections.abc import Sequence

from ratomega.desk.markup import Child, Markup, element, joined
from ratomega.exact.rational import Rational

__all__ = ["formula", "fraction", "polynomial", "ratio", "series"]

# In characters: what a line holds, and where reading a series ends.
LONGEST_TERM, LONGEST_SERIES = 20, 60
MOST_TERMS = 6


def formula(*children: Child, large: bool = False) -> Markup:
    """A formula in a line of text; ``large`` is with fractions of full size."""
    return element("math", element("mrow", *children), display="inline", displaystyle="true" if large else None)


def _name(letter: str, below: str = "") -> Markup:
    name = element("mi", letter)
    return element("msub", name, element("mn", below)) if below else name


def _sign(text: str) -> Markup:
    return element("mo", text)


def _joint(text: str) -> Markup:
    """A sign at the beginning of a formula that goes on from the one before it: not the sign of what follows."""
    return element("mo", text, form="infix")


def fraction(value: Rational) -> Markup:
    """A rational number, as a fraction where it is one."""
    top, bottom = abs(int(value.p)), int(value.q)
    size = element("mn", top) if bottom == 1 else element("mfrac", element("mn", top), element("mn", bottom))
    return element("mrow", _sign("−"), size) if value < 0 else size


def ratio(value: Rational) -> Markup:
    """eps2/eps1 = value."""
    return formula(element("mfrac", _name("ε", "2"), _name("ε", "1")), _sign("="), fraction(value))


def _power(name: Markup, exponent: int) -> Markup:
    return name if exponent == 1 else element("msup", name, element("mn", exponent))


def polynomial(coefficients: Sequence[int]) -> Markup:
    """A polynomial in q with coefficients of 1, q, q^2, ..., none of them negative.

    >>> print(polynomial((1, 2)))
    <math display="inline"><mrow><mn>1</mn><mo>+</mo><mn>2</mn><mi>q</mi></mrow></math>
    """
    parts: list[Child] = []
    for exponent, count in enumerate(coefficients):
        if not count:
            continue
        if parts:
            parts.append(_sign("+"))
        if count != 1 or not exponent:
            parts.append(element("mn", count))
        if exponent:
            parts.append(_power(_name("q"), exponent))
    return formula(*(parts or [element("mn", 0)]))


def series(values: Sequence[tuple[tuple[int, ...], Rational]]) -> Markup:
    """Z = the first terms that are short, and an ellipsis. ``values`` are (charge, coefficient) in their order.

    A paragraph with a formula for every term: browsers break lines between formulas, never inside one.
    """
    terms = [formula(_name("Z"), _joint("="))]
    shown = length = 0
    for charge, value in values:
        length += len(str(value))
        if len(str(value)) > LONGEST_TERM or length > LONGEST_SERIES or shown == MOST_TERMS:
            break
        if value == 0:
            continue
        parts: list[Child] = []
        if shown or value < 0:
            parts.append(_joint("−" if value < 0 else "+") if shown else _sign("−"))
        several = len(charge) > 1
        powers = [
            _power(_name("q", str(n) if several else ""), k) for n, k in enumerate(charge, 1) if k
        ]
        if abs(value) != 1 or not powers:
            parts.append(fraction(abs(value)))
        terms.append(formula(*parts, *powers, large=True))
        shown += 1
    terms.append(formula(_joint("+"), element("mi", "⋯")))
    return element("p", *(joined(term, element("wbr")) for term in terms), class_="series")
