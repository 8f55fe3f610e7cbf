"""The layer rule: imports point down, flint stays in one room, an independent route never imports what it checks."""

from __future__ import annotations

import ast
from functools import cache
from pathlib import Path

import pytest

import ratomega

ROOT = Path(ratomega.__file__).parent
LAYERS = [
    {"version", "errors"},
    {"exact"},
    {"diagrams"},
    {"case"},
    {"conformal"},
    {"weights"},
    {"detector"},
    {"regulator"},
    {"averages"},
    {"validator"},
    {"symbolic"},
    {"results"},
    {"workers"},
    {"chain"},
    {"verify"},
    {"documents"},
    {"desk"},
    {"cli"},
    {"api"},
    {"__init__", "__main__"},
]
CHAIN = [{"reports"}, {"job"}, {"nesting"}, {"pipeline"}, {"averaging", "blocks", "explaining", "grids"}]
"""The same within that room."""
LEVEL = {room: level for level, rooms in enumerate(LAYERS) for room in rooms}
MODULES = sorted(ROOT.rglob("*.py"))


@cache
def imported(path):
    """The modules of every import statement, also of those inside functions."""
    return tuple(_imported(path))


def _imported(path):
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            for alias in node.names:
                yield alias.name
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: relative import"
            yield node.module


def room(path):
    return path.relative_to(ROOT).parts[0].removesuffix(".py")


def test_every_module_has_a_room():
    assert {room(path) for path in MODULES} == set(LEVEL)


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(ROOT)))
def test_imports_point_down(path):
    for name in imported(path):
        if name == "ratomega" or name.startswith("ratomega."):
            target = name.split(".")[1] if "." in name else "__init__"
            assert LEVEL[target] <= LEVEL[room(path)], f"{path} imports {name}"


def test_imports_point_down_within_the_chain():
    level = {name: number for number, names in enumerate(CHAIN) for name in names}
    modules = {path.stem: path for path in (ROOT / "chain").glob("*.py") if path.stem != "__init__"}
    assert set(modules) == set(level)
    for name, path in modules.items():
        for other in imported(path):
            if other.startswith("ratomega.chain."):
                assert level[other.split(".")[2]] < level[name], f"{path} imports {other}"


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(ROOT)))
def test_flint_is_imported_in_exact_alone(path):
    uses_flint = any(name.split(".")[0] == "flint" for name in imported(path))
    assert not uses_flint or room(path) == "exact"


def reached(start):
    """Every file of the package that ``start`` imports, directly or not."""
    found, todo = set(), [start]
    while todo:
        for name in imported(todo.pop()):
            if not name.startswith("ratomega."):
                continue
            base = ROOT.joinpath(*name.split(".")[1:])
            path = base.with_suffix(".py") if base.with_suffix(".py").exists() else base / "__init__.py"
            if path not in found:
                found.add(path)
                todo.append(path)
    return found


@pytest.mark.parametrize("path", sorted(ROOT.glob("validator/closed_forms*.py")), ids=lambda p: p.name)
def test_closed_forms_share_no_code_with_the_sum(path):
    rooms = {room(found) for found in reached(path)}
    assert not rooms & {"weights", "detector", "regulator", "pipeline"}


IDENTITIES = [p for p in sorted(ROOT.glob("validator/identities/*.py")) if p.stem != "special_clusters"]


@pytest.mark.parametrize("path", IDENTITIES, ids=lambda p: p.name)
def test_identities_share_no_code_with_the_sums(path):
    """They ask for limits through a function that is given to them."""
    rooms = {room(found) for found in reached(path)}
    assert not rooms & {"weights", "detector", "regulator", "pipeline"}


@pytest.mark.parametrize(
    "path", [*sorted(ROOT.glob("conformal/*.py")), ROOT / "validator" / "virasoro.py"], ids=lambda p: p.name
)
def test_conformal_forms_share_no_code_with_the_sum(path):
    rooms = {room(found) for found in reached(path)}
    assert not rooms & {"weights", "detector", "regulator", "pipeline"}


POLE_ROUTE = sorted(ROOT.glob("regulator/poles/*.py"))
SUMS = [ROOT / "regulator" / "direct.py", *sorted(ROOT.glob("regulator/fast/*.py"))]


@pytest.mark.parametrize("path", POLE_ROUTE, ids=lambda p: p.name)
def test_the_recursion_shares_no_code_with_the_sums(path):
    found = reached(path)
    assert not {room(other) for other in found} & {"weights", "detector"}
    assert not found & set(SUMS)


@pytest.mark.parametrize("path", SUMS, ids=lambda p: p.name)
def test_the_sums_share_no_code_with_the_recursion(path):
    assert not reached(path) & set(POLE_ROUTE)


def test_the_plain_reference_imports_nothing_from_the_package():
    plain = Path(__file__).with_name("plain.py")
    assert not any(name.split(".")[0] == "ratomega" for name in imported(plain))


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(ROOT)))
def test_no_star_import_and_no_eval(path):
    tree = ast.parse(path.read_text(encoding="utf-8"))
    for node in ast.walk(tree):
        # The face of the package repeats the names of ``api`` for type checkers alone.
        if room(path) != "__init__":
            assert not (isinstance(node, ast.ImportFrom) and any(a.name == "*" for a in node.names))
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Name):
            assert node.func.id not in {"eval", "exec", "compile", "__import__"}
    assert not any(name.split(".")[0] in {"pickle", "marshal", "shelve"} for name in imported(path))
