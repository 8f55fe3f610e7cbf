"""From TOML, or the same tables as Python objects, to a ``Case``; and back to tables.

A case is a table with the keys ``title``, ``charge``, ``symbols`` (a list of names), ``background`` (``eps1``,
``eps2``), ``node`` (a list of tables with ``name``, ``coulomb``, ``antifundamental``, ``fundamental``, ``adjoint``) and
``edge`` (a list of tables with ``from``, ``to``, ``mass``). All mistakes of a case are collected and raised together;
places count from 1. Tables in conformal terms (``conformal_reading``) become the gauge case that they stand for.
"""

from __future__ import annotations

import os
from collections.abc import Callable, Collection, Iterable, Mapping, Sequence
from typing import Any, TypeGuard, TypeVar

from ratomega.case.affine import Affine
from ratomega.case.background import Background
from ratomega.case.bundled import bundled_names, bundled_text
from ratomega.case.case import Case, checked_charge, checked_symbols, checked_title
from ratomega.case.conformal import ConformalCase, gauge_case
from ratomega.case.conformal_reading import conformal_from_mapping
from ratomega.case.expression import INNER, SYMBOLS, as_affine
from ratomega.case.tables import file_label, text_of_file, toml_tables
from ratomega.case.theory import HIGHEST_RANK, MOST_EDGES, MOST_MASSES, MOST_NODES, Edge, Node, Theory
from ratomega.case.wording import kind, nearest, quoted
from ratomega.errors import InputError, Problem
from ratomega.exact.path import SMALL_PARAMETERS
from ratomega.exact.rational import ONE

__all__ = [
    "CaseSource",
    "case_from_mapping",
    "case_from_text",
    "case_to_mapping",
    "load_case",
    "load_case_as_written",
]

CaseSource = str | os.PathLike[str] | Mapping[str, object] | Case
T = TypeVar("T")

DEFAULT_NAME = "gauge"
MOST_PROBLEMS = 100

_NODE_KEYS = ("name", "coulomb", "antifundamental", "fundamental", "adjoint")
_MISSING = {
    "charge": "the highest total charge such as 4, or a list with one bound per node",
    "background": "a table with eps1 and eps2",
    "node": "one table [[node]] per gauge group",
    "eps1": 'the first rotation parameter, for example "1"',
    "eps2": 'the second rotation parameter, for example "1"',
    "name": "every node has one where there are several",
    "coulomb": 'the Coulomb parameters such as ["1/3", "-1/3"]; their number is the rank',
    "from": "the name of the node where the edge starts",
    "to": "the name of the node where the edge ends",
    "mass": 'the mass of the bifundamental, for example "1/7"',
}
# Stands in for what could not be read, so that reading goes on; never part of a result.
_PLACEHOLDER = Affine(ONE)


def load_case(source: CaseSource) -> Case:
    """A case from a file, from the name of a bundled case, from tables, or unchanged when it is one already.

    Text is a file when it exists as one or ends in ".toml", else the name of a bundled case.
    Raises ``InputError`` with every mistake found.

    >>> case = load_case({"charge": 2, "background": {"eps1": 1, "eps2": "2/3"}, "node": [{"coulomb": ["eps1/2"]}]})
    >>> case.theory.ranks, str(case.background.ratio)
    ((1,), '2/3')
    """
    if isinstance(source, Case):
        return source
    tables, where = _tables(source)
    return case_from_mapping(tables, where=where)


def load_case_as_written(source: CaseSource | ConformalCase) -> Case | ConformalCase:
    """The same, but a case in conformal terms stays one."""
    if isinstance(source, (Case, ConformalCase)):
        return source
    tables, where = _tables(source)
    if "conformal" in tables:
        return conformal_from_mapping(tables, where=where)
    return case_from_mapping(tables, where=where)


def _tables(source: str | os.PathLike[str] | Mapping[str, object]) -> tuple[Mapping[str, object], str]:
    """The tables of a case, and the name that messages give it."""
    if isinstance(source, Mapping):
        return source, "case"
    if not isinstance(source, (str, os.PathLike)):
        message = f"a case is the name of a file, the name of a bundled case, or a mapping, not {kind(source)}"
        raise InputError.single(message, "case")
    path = os.fsdecode(source)
    # A pipe or a directory is taken for a file too, unless a bundled case has that name, to say what it is.
    if os.path.isfile(path) or path.endswith(".toml") or (os.path.exists(path) and path not in bundled_names()):
        label = file_label(path)
        return toml_tables(text_of_file(path), label), label
    return toml_tables(bundled_text(path), path), path


def case_from_text(text: str, where: str = "case") -> Case:
    """A case from the text of a TOML file; ``where`` names it in messages. Raises ``InputError``."""
    return case_from_mapping(toml_tables(text, where), where=where)


def case_from_mapping(data: Mapping[str, object], *, where: str = "case") -> Case:
    """A case from tables as TOML gives them; numbers may also be ``int``, ``Fraction``, ``fmpq`` or exact sympy ones.

    Raises one ``InputError`` with every mistake; cost linear in the size of ``data``, which is bounded.

    >>> case_from_mapping({"charge": -1, "background": {"eps1": 1, "eps2": "1+"}, "node": [{"coulomb": []}]})
    Traceback (most recent call last):
    ...
    ratomega.errors.InputError: case: charge: a charge is zero or more, not -1
    case: background.eps2: "1+" ends where a number or a name is expected
    case: node[1].coulomb: a node needs at least one Coulomb parameter; their number is the rank
    """
    reader = _Reader(where)
    if "conformal" in data:
        conformal = conformal_from_mapping(data, where=where)
        translated = reader.attempt(lambda: gauge_case(conformal), "conformal")
        reader.finish()
        assert translated is not None
        return translated
    known = ("title", "charge", "symbols", "background", "node", "edge")
    reader.keys(data, "", known, needed=("charge", "background", "node"))
    title = reader.title(data)
    reader.read_symbols(data)
    charge = reader.charge(data)
    background = reader.background(data)
    theory = reader.theory(data)
    reader.finish()
    assert background is not None
    assert theory is not None
    case = reader.attempt(lambda: Case.make(theory, background, charge, title, reader.free))
    reader.finish()
    assert case is not None
    return case


def case_to_mapping(case: Case) -> dict[str, Any]:
    """The canonical tables of a case, all numbers as text: reading them back gives an equal case.

    >>> case = load_case({"charge": 1, "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": [0]}]})
    >>> case_to_mapping(case)["background"], case_from_mapping(case_to_mapping(case)) == case
    ({'eps1': '1', 'eps2': '1 + t'}, True)
    """
    names = [node.name for node in case.theory.nodes]
    return {
        "title": case.title,
        "charge": case.charge if isinstance(case.charge, int) else list(case.charge),
        **({"symbols": list(case.symbols)} if case.symbols else {}),
        "background": dict(zip(("eps1", "eps2"), map(str, case.background.affine()), strict=True)),
        "node": [
            {
                "name": node.name,
                "coulomb": _texts(node.coulomb),
                "antifundamental": _texts(node.antifundamental),
                "fundamental": _texts(node.fundamental),
                "adjoint": _texts(node.adjoint),
            }
            for node in case.theory.nodes
        ],
        "edge": [
            {"from": names[edge.source], "to": names[edge.target], "mass": str(edge.mass)}
            for edge in case.theory.edges
        ],
    }


def _texts(values: Iterable[Affine]) -> list[str]:
    return [str(value) for value in values]


def _is_list(value: object) -> TypeGuard[Sequence[object]]:
    return isinstance(value, Sequence) and not isinstance(value, (str, bytes, bytearray))


class _Reader:
    """Reads one case and collects its mistakes; what cannot be read is replaced so that the rest is read too."""

    def __init__(self, where: str) -> None:
        self.where = where
        self.problems: list[Problem] = []
        self.unlisted = 0
        self.free: tuple[str, ...] = ()

    def at(self, key: str) -> str:
        return ": ".join(part for part in (self.where, key) if part)

    def add(self, message: str, key: str = "") -> None:
        if len(self.problems) < MOST_PROBLEMS:
            self.problems.append(Problem(message, self.at(key)))
        else:
            self.unlisted += 1

    def attempt(self, make: Callable[[], T], inside: str = "") -> T | None:
        """``make()``, or None when it raises ``InputError``; its mistakes are added, their places below ``inside``."""
        try:
            return make()
        except InputError as error:
            for problem in error.problems:
                self.add(problem.message, ".".join(part for part in (inside, problem.where) if part))
            return None

    def finish(self) -> None:
        if self.unlisted:
            self.problems.append(Problem(f"{self.unlisted} more mistakes are not listed", self.where))
        if self.problems:
            raise InputError(self.problems)

    def keys(self, table: Mapping[str, object], key: str, known: Sequence[str], *, needed: Collection[str]) -> None:
        """Unknown and missing keys of a table."""
        prefix = f"{key}." if key else ""
        for found in table:
            if found not in known:
                word = found if isinstance(found, str) else str(kind(found))
                hint = nearest(word, known) if len(self.problems) < MOST_PROBLEMS else ""
                self.add(f"unknown key {quoted(word)}{hint or '; known are ' + ', '.join(known)}", key)
        for missing in needed:
            if missing not in table:
                self.add(f"this key is missing: {_MISSING[missing]}", prefix + missing)

    def tables(self, value: object, key: str, most: int) -> list[Mapping[str, object] | None]:
        """A list of tables; None stands for an entry that is none. Empty when there is no list at all."""
        if not _is_list(value):
            self.add(f"expected a list of tables, written [[{key}]] in TOML, not {kind(value)}", key)
            return []
        if len(value) > most:
            self.add(f"at most {most} are read, {len(value)} given", key)
        result: list[Mapping[str, object] | None] = []
        for number, entry in enumerate(value[:most], 1):
            if not isinstance(entry, Mapping):
                self.add(f"expected a table, not {kind(entry)}", f"{key}[{number}]")
            result.append(entry if isinstance(entry, Mapping) else None)
        return result

    def read_symbols(self, data: Mapping[str, object]) -> None:
        """The free parameters, which may occur in every expression but eps1 and eps2."""
        value = data.get("symbols", ())
        if not _is_list(value):
            self.add(f'expected a list of names such as ["a"], not {kind(value)}', "symbols")
            return
        self.free = self.attempt(lambda: checked_symbols(value)) or ()  # type: ignore[arg-type]

    def affine(self, value: object, key: str, symbols: Collection[str] | None = None) -> Affine:
        symbols = (*SYMBOLS, INNER, *self.free) if symbols is None else symbols
        read = self.attempt(lambda: as_affine(value, symbols=symbols), key)
        return _PLACEHOLDER if read is None else read

    def affines(self, table: Mapping[str, object], name: str, key: str, most: int) -> tuple[Affine, ...]:
        value = table.get(name, ())
        if not _is_list(value):
            self.add(f'expected a list such as ["1/3", "-1/3"], not {kind(value)}', f"{key}.{name}")
            return (_PLACEHOLDER,)
        if len(value) > most:
            self.add(f"at most {most} are read, {len(value)} given", f"{key}.{name}")
        return tuple(self.affine(x, f"{key}.{name}[{number}]") for number, x in enumerate(value[:most], 1))

    def title(self, data: Mapping[str, object]) -> str:
        title = data.get("title", "")
        if not isinstance(title, str):
            self.add(f"a title is text, not {kind(title)}", "title")
            return ""
        return self.attempt(lambda: checked_title(title)) or ""

    def charge(self, data: Mapping[str, object]) -> int | tuple[int, ...]:
        charge, nodes = data.get("charge", 0), data.get("node")
        # Without a list of nodes their number is unknown, and the length of a list of charges cannot be judged.
        expected = len(nodes) if _is_list(nodes) else len(charge) if _is_list(charge) else 1
        return self.attempt(lambda: checked_charge(charge, expected)) or 0

    def background(self, data: Mapping[str, object]) -> Background | None:
        table = data.get("background")
        if not isinstance(table, Mapping):
            if "background" in data:
                self.add(f"expected a table with eps1 and eps2, not {kind(table)}", "background")
            return None
        self.keys(table, "background", ("eps1", "eps2"), needed=("eps1", "eps2"))
        small = (*SMALL_PARAMETERS, INNER)
        eps1, eps2 = (
            self.affine(table[name], f"background.{name}", small) if name in table else _PLACEHOLDER
            for name in ("eps1", "eps2")
        )
        return self.attempt(lambda: Background.make(eps1, eps2), "background")

    def theory(self, data: Mapping[str, object]) -> Theory | None:
        if not _is_list(data.get("node")):
            if "node" in data:
                self.tables(data["node"], "node", MOST_NODES)
            return None
        tables = self.tables(data["node"], "node", MOST_NODES)
        nodes = [self.node(table, number, len(tables)) for number, table in enumerate(tables, 1)]
        names: dict[str, int] = {}
        for index, node in enumerate(nodes):
            names.setdefault(node.name, index)
        # Whether an edge goes nowhere can be judged when the names of all nodes are known.
        named = [table is not None and isinstance(table.get("name", len(tables) > 1 or ""), str) for table in tables]
        known = names if all(named) else None
        edge_tables = self.tables(data.get("edge", []), "edge", MOST_EDGES)
        read = [self.edge(table, number, known) for number, table in enumerate(edge_tables, 1)]
        return self.attempt(lambda: Theory.make(nodes, [edge for edge in read if edge is not None]))

    def node(self, table: Mapping[str, object] | None, number: int, nodes: int) -> Node:
        key = f"node[{number}]"
        if table is None:
            return Node(key, (_PLACEHOLDER,))
        self.keys(table, key, _NODE_KEYS, needed=("coulomb",) if nodes == 1 else ("name", "coulomb"))
        name = table.get("name", DEFAULT_NAME if nodes == 1 else key)
        if not isinstance(name, str):
            self.add(f"a name is text, not {kind(name)}", f"{key}.name")
            name = key
        coulomb = self.affines(table, "coulomb", key, HIGHEST_RANK) if "coulomb" in table else (_PLACEHOLDER,)
        masses = [self.affines(table, which, key, MOST_MASSES) for which in _NODE_KEYS[2:]]
        return Node(name, coulomb, *masses)

    def edge(self, table: Mapping[str, object] | None, number: int, names: Mapping[str, int] | None) -> Edge | None:
        key = f"edge[{number}]"
        if table is None:
            return None
        self.keys(table, key, ("from", "to", "mass"), needed=("from", "to", "mass"))
        mass = self.affine(table["mass"], f"{key}.mass") if "mass" in table else _PLACEHOLDER
        source = self.end(table["from"], f"{key}.from", names) if "from" in table else None
        target = self.end(table["to"], f"{key}.to", names) if "to" in table else None
        return None if source is None or target is None else Edge(source, target, mass)

    def end(self, value: object, key: str, names: Mapping[str, int] | None) -> int | None:
        """The number of the node that an edge names."""
        if not isinstance(value, str):
            self.add(f"an edge names its nodes by text, not {kind(value)}", key)
            return None
        if names is None:
            return None
        if value not in names:
            known = ", ".join(quoted(name) for name in names) or "none"
            self.add(f"there is no node {quoted(value)}; the nodes are {known}", key)
            return None
        return names[value]
