"""A first case file, with comments, from a few answers: what ``ratomega new`` writes."""

from __future__ import annotations

from collections.abc import Sequence
from math import gcd

from ratomega.case.reading import case_from_text
from ratomega.case.theory import HIGHEST_RANK, MOST_MASSES
from ratomega.errors import InputError
from ratomega.exact.rational import Rational, as_rational, exact_text

__all__ = ["draft", "draft_minimal"]

Label = tuple[int, int]

_HEAD = """\
# A case for ratomega. Every number is a quoted exact expression in eps1, eps2 and t:
# "3/11", "eps1/2 + 2*eps2 - t/7", "0.25". A typed number stays fixed while the background moves to the
# limit point; an expression in eps1 and eps2 moves with it.
"""
_BACKGROUND = """\
# No t occurs, so the path to the limit point is eps2 + t.
"""
_COULOMB = "# Coulomb parameters; their number is the rank. Here: drawn so that nothing is resonant; put your own."
_MASSES = "# Masses: each antifundamental m gives the product of content + m over all boxes."
_ADJOINT = "# The adjoint, of mass m."


def draft(
    *, rank: int, flavours: int = 0, adjoint: bool = False, ratio: object = 1, charge: int = 4, title: str = ""
) -> str:
    """The text of a case: U(rank) with antifundamentals or an adjoint at eps2/eps1 = ratio, generic parameters.

    Raises ``InputError`` for what no case can have. The text reads back to a case.

    >>> from ratomega.case.reading import case_from_text
    >>> case_from_text(draft(rank=2, flavours=1, ratio="-3/4")).background.steps
    (4, -3)
    """
    if not 1 <= rank <= HIGHEST_RANK:
        raise InputError.single(f"a rank is between 1 and {HIGHEST_RANK}, not {rank}", "rank")
    if not 0 <= flavours <= MOST_MASSES:
        raise InputError.single(f"the number of flavours is between 0 and {MOST_MASSES}, not {flavours}", "flavours")
    at = as_rational(ratio, "ratio")
    if at == 0:
        raise InputError.single("the ratio eps2/eps1 is not zero", "ratio")
    lines = [_HEAD, _title(title or _generic_title(rank, flavours, adjoint)), f"charge = {charge}", ""]
    lines += ["[background]", _BACKGROUND + 'eps1 = "1"', f'eps2 = "{exact_text(at)}"', "", "[[node]]"]
    lines += [_COULOMB, f"coulomb = {_listed(_generic(rank, 7))}"]
    if flavours:
        lines += [_MASSES, f"antifundamental = {_listed(_generic(flavours, 11))}"]
    if adjoint:
        lines += [_ADJOINT, 'adjoint = ["3/13"]']
    return _checked("\n".join(lines) + "\n")


def draft_minimal(
    *, model: Label, external: Sequence[Label], internal: Label, order: int = 4, title: str = ""
) -> str:
    """The text of a case: the four-point block of M(p, p') with fields of Kac labels at 0, x, 1 and infinity.

    A label (r, s) has 1 <= r < p and 1 <= s < p'. Raises ``InputError``.

    >>> text = draft_minimal(model=(3, 4), external=[(1, 2)] * 4, internal=(1, 1))
    >>> [line for line in text.splitlines() if line.startswith(("c ", "internal"))]
    ['c = "1/2"', 'internal = { kac = [1, 1] }']
    """
    p, q = model
    if p < 2 or q < 2 or gcd(p, q) != 1:
        raise InputError.single(f"a minimal model M(p,p') has coprime p, p' of at least 2, not {p},{q}", "minimal")
    if len(external) != 4:
        message = f"four external fields are given, at 0, x, 1 and infinity, not {len(external)}"
        raise InputError.single(message, "external")
    for where, (r, s) in [*(("external", label) for label in external), ("internal", internal)]:
        if not (1 <= r < p and 1 <= s < q):
            message = f"the label {r},{s} is not one of M({p},{q}): 1 <= r < {p} and 1 <= s < {q}"
            raise InputError.single(message, where)
    fields = ", ".join(f"({r},{s})" for r, s in external)
    charge_value = exact_text(1 - Rational(6 * (p - q) ** 2, p * q))
    lines = [
        _HEAD,
        _title(title or f"M({p},{q}): fields {fields}, internal ({internal[0]},{internal[1]})"),
        "",
        "[conformal]",
        f"# The central charge of M({p},{q}): 1 - 6*({p} - {q})^2/({p}*{q}); eps1 = {q}, eps2 = -{p} belong to it.",
        f'c = "{charge_value}"',
        "# Kac labels (r, s), 1 <= r < p and 1 <= s < p', of the fields at 0, x, 1 and infinity, and between them.",
        "external = [",
        *(f"  {{ kac = [{r}, {s}] }}," for r, s in external),
        "]",
        f"internal = {{ kac = [{internal[0]}, {internal[1]}] }}",
        f"order = {order}",
    ]
    return _checked("\n".join(lines) + "\n")


def _generic(number: int, prime: int) -> list[str]:
    """Different numbers off the lattice: 1/p, -1/p, 2/(p + 4), ..., no two of them alike or opposite beyond pairs."""
    found: list[str] = []
    step = 0
    while len(found) < number:
        step += 1
        value = Rational(step, prime + 4 * step)
        found += [exact_text(value), exact_text(-value)]
    return found[:number]


def _listed(values: Sequence[str]) -> str:
    return "[" + ", ".join(f'"{value}"' for value in values) + "]"


def _title(text: str) -> str:
    quoted = text.replace("\\", "\\\\").replace('"', '\\"')
    return f'title = "{quoted}"'


def _generic_title(rank: int, flavours: int, adjoint: bool) -> str:
    matter = [f"{flavours} antifundamental{'s' if flavours > 1 else ''}"] if flavours else []
    matter += ["an adjoint"] if adjoint else []
    return f"U({rank})" + (f" with {' and '.join(matter)}" if matter else " without matter")


def _checked(text: str) -> str:
    """The text, which must read as a case; a title with line breaks or a charge out of bounds does not."""
    case_from_text(text, where="new case")
    return text
