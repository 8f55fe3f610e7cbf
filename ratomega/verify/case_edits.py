"""The ways in which the same case is written in another convention: masses, Coulomb parameters, eps, edges.

An edit changes the case; it is shown as the lines of the case file that become others. Edits that lead to one theory
(an antifundamental of mass eps - m is a fundamental of mass m; colours have no order) share a ``theory_key``.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace

from ratomega.case.affine import Affine
from ratomega.case.background import Background
from ratomega.case.case import Case
from ratomega.case.reading import case_to_mapping
from ratomega.case.setting import Setting
from ratomega.case.theory import Edge, Theory
from ratomega.exact.quadratic import number_text
from ratomega.exact.rational import ONE, Rational

__all__ = ["CaseEdit", "case_edits", "changed_lines", "theory_key"]

HALF = Rational(1, 2)
EPS = Affine(eps1=ONE, eps2=ONE)

Change = Callable[[Affine], Affine]

MASS_CHANGES: tuple[tuple[str, Callable[[Affine, Affine], Affine]], ...] = (
    ("eps1 + eps2 - m", lambda m, eps: eps - m),
    ("m + (eps1 + eps2)/2", lambda m, eps: m + eps.times(HALF)),
    ("m - (eps1 + eps2)/2", lambda m, eps: m - eps.times(HALF)),
    ("m + eps1 + eps2", lambda m, eps: m + eps),
    ("m - eps1 - eps2", lambda m, eps: m - eps),
    ("-m", lambda m, _: -m),
)
COULOMB_CHANGES: tuple[tuple[str, Change], ...] = (
    ("2*a", lambda a: a.times(Rational(2))),
    ("a/2", lambda a: a.times(HALF)),
    ("-a", lambda a: -a),
)
FLAVOURS = ("antifundamental", "fundamental")


@dataclass(frozen=True, slots=True)
class CaseEdit:
    """One change in words, what it touches, and the change itself.

    ``typed`` is the same at the limit point with eps1 + eps2 as a number, which stays where it is at an offset; None
    where there is no difference.
    """

    words: str
    places: frozenset[str]
    apply: Callable[[Case], Case]
    typed: Callable[[Case], Case] | None = None


def case_edits(case: Case) -> Iterator[CaseEdit]:
    """Every single edit, the plainest first."""
    masses = {where: value for where, value in case.theory.parameters() if ".coulomb" not in where}
    for text, change in MASS_CHANGES:
        for where in masses:
            yield _mass_edit(case, f"{_label(where, case)} m -> {text}{_other_name(where, text)}", {where}, change)
    for text, change in MASS_CHANGES:
        for kind in (*FLAVOURS, "adjoint", "mass"):
            places = {where for where in masses if f".{kind}" in where}
            if len(places) > 1:
                name = "bifundamental" if kind == "mass" else kind
                yield _mass_edit(case, f"every {name} mass m -> {text}", places, change)
        flavours = {where for where in masses if any(f".{kind}" in where for kind in FLAVOURS)}
        if len({where.split(".")[1].split("[")[0] for where in flavours}) > 1:
            yield _mass_edit(case, f"every flavour mass m -> {text}", flavours, change)
    for text, scaled in COULOMB_CHANGES:
        places = {where for where, _ in case.theory.parameters() if ".coulomb" in where}
        yield _edit(f"every Coulomb parameter a -> {text}", places, scaled)
    yield CaseEdit("eps1, eps2 -> -eps1, -eps2", frozenset({"background"}), _negated)
    for number in range(len(case.theory.edges)):
        yield _reversed(case, number)


def _edit(words: str, places: set[str], change: Change, typed: Change | None = None) -> CaseEdit:
    def by(change: Change) -> Callable[[Case], Case]:
        return lambda case: replace(case, theory=_changed(case.theory, places, change))

    return CaseEdit(words, frozenset(places), by(change), None if typed is None else by(typed))


def _mass_edit(case: Case, words: str, places: set[str], change: Callable[[Affine, Affine], Affine]) -> CaseEdit:
    number = Affine(constant=case.background.eps1.constant + case.background.eps2.constant)
    typed: Change | None = None if change(EPS, EPS) == change(EPS, number) else lambda m: change(m, number)
    return _edit(words, places, lambda m: change(m, EPS), typed)


def _label(where: str, case: Case) -> str:
    """What stands at a place, in words.

    ``node[2].antifundamental[1]`` is "antifundamental mass 1 of right" in a quiver.
    """
    place, _, key = where.partition(".")
    number = int(place.split("[")[1].rstrip("]")) - 1
    if key == "mass":
        edge = case.theory.edges[number]
        names = [case.theory.nodes[end].name for end in (edge.source, edge.target)]
        return f"bifundamental mass of {names[0]} -> {names[1]}:"
    kind, _, position = key.rstrip("]").partition("[")
    node = f" of {case.theory.nodes[number].name}" if len(case.theory.nodes) > 1 else ""
    return f"{kind} mass {position}{node}:"


def _other_name(where: str, text: str) -> str:
    """A reflected flavour is one of the other kind: the same theory under two names."""
    if text != "eps1 + eps2 - m":
        return ""
    if ".antifundamental" in where:
        return " (the same as reading it as a fundamental of mass m)"
    if ".fundamental" in where:
        return " (the same as reading it as an antifundamental of mass m)"
    return ""


def _changed(theory: Theory, places: set[str], change: Change) -> Theory:
    flags = iter([where in places for where, _ in theory.parameters()])

    # ``each`` meets the parameters node by node and key by key, as ``parameters`` does.
    return theory.each(lambda x: change(x) if next(flags) else x)


def _negated(case: Case) -> Case:
    own = case.background
    background = Background(-own.eps1, -own.eps2, (-own.inner[0], -own.inner[1]))
    return replace(case, background=background)


def _reversed(case: Case, number: int) -> CaseEdit:
    edge = case.theory.edges[number]
    names = [case.theory.nodes[end].name for end in (edge.source, edge.target)]

    def apply(other: Case) -> Case:
        edges = list(other.theory.edges)
        old = edges[number]
        edges[number] = Edge(old.target, old.source, old.mass)
        return replace(other, theory=replace(other.theory, edges=tuple(edges)))

    words = f"the edge {names[0]} -> {names[1]} reversed"
    return CaseEdit(words, frozenset({f"edge[{number + 1}]"}), apply)


def theory_key(setting: Setting) -> tuple[object, ...]:
    """What a theory is at the limit point, whatever it is called there."""
    e1, e2 = setting.eps1.constant, setting.eps2.constant
    nodes = []
    for node in setting.nodes:
        flavours = [x.constant for x in node.antifundamental] + [e1 + e2 - x.constant for x in node.fundamental]
        adjoints = [min(number_text(x.constant), number_text(e1 + e2 - x.constant)) for x in node.adjoint]
        coulomb = sorted(number_text(x.constant) for x in node.coulomb)
        nodes.append((tuple(coulomb), tuple(sorted(number_text(x) for x in flavours)), tuple(sorted(adjoints))))
    edges = tuple(sorted((a, b, number_text(m.constant)) for a, b, m in setting.edges))
    return tuple(sorted((number_text(e1), number_text(e2)))), tuple(nodes), edges


def changed_lines(case: Case, edited: Case) -> tuple[str, ...]:
    """The lines of the case file that become others, as they become."""
    old, new = case_to_mapping(case), case_to_mapping(edited)
    lines = [f'{key} = "{new["background"][key]}"' for key in ("eps1", "eps2") if _differ(old, new, "background", key)]
    for before, after in zip(old["node"], new["node"], strict=True):
        place = f"node {after['name']}: " if len(old["node"]) > 1 else ""
        for key in ("coulomb", *FLAVOURS, "adjoint"):
            if before.get(key) != after.get(key):
                values = ", ".join(f'"{value}"' for value in after[key])
                lines.append(f"{place}{key} = [{values}]")
    for number, (before, after) in enumerate(zip(old.get("edge", []), new.get("edge", []), strict=True), 1):
        for key in ("from", "to", "mass"):
            if before[key] != after[key]:
                lines.append(f'edge {number}: {key} = "{after[key]}"')
    return tuple(lines)


def _differ(old: dict[str, dict[str, object]], new: dict[str, dict[str, object]], table: str, key: str) -> bool:
    return old[table][key] != new[table][key]
