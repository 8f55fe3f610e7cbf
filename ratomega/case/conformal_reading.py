"""The table ``[conformal]`` to a ``ConformalCase`` and back.

Its keys are ``c`` or ``b_squared``, ``external`` (four fields, or one on the torus), ``internal`` (a field) and
``order``. A field is a table with one key: ``weight``, ``momentum`` or ``kac``. Beside the table stands only ``title``.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any, TypeVar

from ratomega.case.affine import Affine
from ratomega.case.conformal import HIGHEST_LABEL, ConformalCase, Field, checked_order, squared_ratio
from ratomega.case.expression import as_affine
from ratomega.case.wording import kind, nearest, quoted
from ratomega.errors import InputError, Problem
from ratomega.exact.quadratic import is_quadratic, number_text, only_rational
from ratomega.exact.rational import ONE, Rational, exact_text

__all__ = ["conformal_from_mapping", "conformal_to_mapping"]

T = TypeVar("T")

FIELD_KINDS = ("weight", "momentum", "kac")
_KEYS = ("c", "b_squared", "external", "internal", "order")
_EXAMPLE = 'such as { weight = "1/16" }, { momentum = "eps1/4" } or { kac = [1, 2] }'
_MISSING = {
    "external": "a list of four fields (at 0, x, 1, infinity), or of one on the torus",
    "internal": f"the field in the channel, {_EXAMPLE}",
    "order": "the highest power of x, or of q on the torus, such as 4",
}
_PLACEHOLDER = Field("weight", ONE)
MOST_PROBLEMS = 100


def conformal_from_mapping(data: Mapping[str, object], *, where: str = "case") -> ConformalCase:
    """A conformal case from tables as TOML gives them. Raises one ``InputError`` with every mistake.

    >>> field = {"weight": "1/16"}
    >>> case = conformal_from_mapping(
    ...     {"conformal": {"c": 1, "external": [field] * 4, "internal": {"kac": [1, 1]}, "order": 2}}
    ... )
    >>> case.b_squared, case.internal.text()
    (-1, '(1,1)')
    >>> conformal_from_mapping({"conformal": {"c": 1, "external": [field], "internal": {}, "order": -2}})
    Traceback (most recent call last):
    ...
    ratomega.errors.InputError: case: conformal.internal: a field has one of the keys weight, momentum, kac, not none
    case: conformal.order: the order is between 0 and 150, not -2
    """
    reader = _Mistakes(where)
    for found in data:
        if found in ("charge", "background", "node", "edge", "symbols"):
            instead = "; its order stands in [conformal]" if found == "charge" else ""
            reader.add(f"a case in conformal terms has no key {quoted(found)} of a case in gauge terms{instead}", "")
        elif found not in ("title", "conformal"):
            reader.unknown(found, ("title", "conformal"), "")
    title = data.get("title", "")
    if not isinstance(title, str):
        reader.add(f"a title is text, not {kind(title)}", "title")
        title = ""
    table = data.get("conformal")
    if not isinstance(table, Mapping):
        reader.add(f"expected a table with {', '.join(_KEYS)}, not {kind(table)}", "conformal")
        reader.finish()
        raise AssertionError("unreachable: a mistake was added")
    for found in table:
        if found not in _KEYS:
            reader.unknown(found, _KEYS, "conformal")
    for missing, what in _MISSING.items():
        if missing not in table:
            reader.add(f"this key is missing: {what}", f"conformal.{missing}")
    ratio = _ratio(table, reader)
    external = _external(table["external"], reader) if "external" in table else ()
    internal = _field(table["internal"], "conformal.internal", reader) if "internal" in table else _PLACEHOLDER
    if "order" in table:
        reader.attempt(lambda: checked_order(table["order"]), "conformal")
    reader.finish()
    made = reader.attempt(
        lambda: ConformalCase.make(ratio, external, internal, table["order"], title), "conformal", top=("title",)
    )
    reader.finish()
    assert made is not None
    return made


def conformal_to_mapping(case: ConformalCase) -> dict[str, Any]:
    """The canonical tables of a conformal case: reading them back gives an equal case.

    >>> case = ConformalCase.make(ONE, [Field("kac", (1, 2))], Field("weight", Rational(1, 3)), 4)
    >>> conformal_to_mapping(case)["conformal"]["external"], conformal_from_mapping(conformal_to_mapping(case)) == case
    ([{'kac': [1, 2]}], True)
    """
    return {
        "title": case.title,
        "conformal": {
            "b_squared": exact_text(case.b_squared),
            "external": [_field_table(field) for field in case.external],
            "internal": _field_table(case.internal),
            "order": case.order,
        },
    }


def _field_table(field: Field) -> dict[str, Any]:
    if isinstance(field.value, tuple):
        return {field.kind: list(field.value)}
    return {field.kind: str(field.value) if isinstance(field.value, Affine) else exact_text(field.value)}


class _Mistakes:
    """Collects mistakes with their places."""

    def __init__(self, where: str) -> None:
        self.where = where
        self.problems: list[Problem] = []

    def add(self, message: str, key: str) -> None:
        # Lists and tables may be long; the first mistakes are enough to go on.
        if len(self.problems) < MOST_PROBLEMS:
            self.problems.append(Problem(message, ": ".join(part for part in (self.where, key) if part)))

    def unknown(self, found: object, known: Sequence[str], key: str) -> None:
        word = found if isinstance(found, str) else kind(found)
        hint = nearest(word, known) if len(self.problems) < MOST_PROBLEMS else ""
        self.add(f"unknown key {quoted(word)}{hint or '; known are ' + ', '.join(known)}", key)

    def attempt(self, make: Callable[[], T], inside: str, *, top: Sequence[str] = ()) -> T | None:
        """``make()``, or None when it raises; its mistakes are added below ``inside``, unless at a place of ``top``."""
        try:
            return make()
        except InputError as error:
            for problem in error.problems:
                key = problem.where if problem.where in top else f"{inside}.{problem.where}".rstrip(".")
                self.add(problem.message, key)
            return None

    def finish(self) -> None:
        if self.problems:
            raise InputError(self.problems)


def _rational(value: object, key: str, reader: _Mistakes) -> Rational | None:
    read = reader.attempt(lambda: as_affine(value, symbols=()), key)
    if read is None:
        return None
    number = read.constant
    if is_quadratic(number):
        reader.add(f"{number_text(number)} is not rational; only a momentum may lie in a quadratic field", key)
        return None
    return only_rational(number)


def _ratio(table: Mapping[str, object], reader: _Mistakes) -> Rational:
    """b^2; a placeholder where it could not be read."""
    given = [name for name in ("c", "b_squared") if name in table]
    if len(given) != 1:
        message = "give c or b_squared, not both" if given else "give the central charge as c or as b_squared"
        reader.add(message, "conformal")
        return ONE
    key = f"conformal.{given[0]}"
    value = _rational(table[given[0]], key, reader)
    if value is None:
        return ONE
    if given[0] == "b_squared":
        if value == 0:
            reader.add("b^2 = eps1/eps2 is not zero", key)
        return value
    return reader.attempt(lambda: squared_ratio(value), "conformal") or ONE


def _external(value: object, reader: _Mistakes) -> tuple[Field, ...]:
    key = "conformal.external"
    if not isinstance(value, Sequence) or isinstance(value, (str, bytes, bytearray)):
        reader.add(f"expected a list of four fields (at 0, x, 1, infinity), or of one, not {kind(value)}", key)
        return ()
    if len(value) not in (1, 4):
        reader.add(f"give four fields (at 0, x, 1, infinity), or one on the torus, not {len(value)}", key)
        return ()
    return tuple(_field(one, f"{key}[{number}]", reader) for number, one in enumerate(value, 1))


def _field(value: object, key: str, reader: _Mistakes) -> Field:
    if not isinstance(value, Mapping):
        reader.add(f"expected a table {_EXAMPLE}, not {kind(value)}", key)
        return _PLACEHOLDER
    strange = [found for found in value if found not in FIELD_KINDS]
    for found in strange:
        reader.unknown(found, FIELD_KINDS, key)
    given = [name for name in FIELD_KINDS if name in value]
    if strange and not given:
        return _PLACEHOLDER
    if len(given) != 1:
        reader.add(f"a field has one of the keys {', '.join(FIELD_KINDS)}, not {' and '.join(given) or 'none'}", key)
        return _PLACEHOLDER
    name = given[0]
    inside = f"{key}.{name}"
    if name == "kac":
        return _label(value[name], inside, reader)
    if name == "weight":
        weight = _rational(value[name], inside, reader)
        return _PLACEHOLDER if weight is None else Field(name, weight)
    momentum = reader.attempt(lambda: as_affine(value[name], symbols=("eps1", "eps2")), inside)
    return _PLACEHOLDER if momentum is None else Field(name, momentum)


def _label(value: object, key: str, reader: _Mistakes) -> Field:
    pair = value if isinstance(value, Sequence) and not isinstance(value, (str, bytes, bytearray)) else ()
    if len(pair) != 2 or not all(isinstance(n, int) and not isinstance(n, bool) for n in pair):
        shown = kind(value) if not pair else f"a list of {len(pair)}" if len(pair) != 2 else "other entries"
        reader.add(f"a Kac label is a list of two integers [r, s], not {shown}", key)
        return _PLACEHOLDER
    if not all(1 <= n <= HIGHEST_LABEL for n in pair):
        reader.add(f"the integers of a Kac label are between 1 and {HIGHEST_LABEL}", key)
        return _PLACEHOLDER
    return Field("kac", (pair[0], pair[1]))
