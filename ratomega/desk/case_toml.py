"""A case written as the file that gives it back."""

from __future__ import annotations

import json
from collections.abc import Mapping, Sequence

from ratomega.case.case import Case
from ratomega.case.reading import case_to_mapping

__all__ = ["case_toml"]


def case_toml(case: Case) -> str:
    """TOML text that ``load_case`` reads to an equal case: canonical, without comments or empty keys.

    >>> from ratomega.case.reading import case_from_text, load_case
    >>> case = load_case({"charge": 1, "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": ["1/3"]}]})
    >>> print(case_toml(case))
    charge = 1
    <BLANKLINE>
    [background]
    eps1 = "1"
    eps2 = "1 + t"
    <BLANKLINE>
    [[node]]
    name = "gauge"
    coulomb = ["1/3"]
    >>> case_from_text(case_toml(case)) == case
    True
    """
    tables = case_to_mapping(case)
    lines = _lines({key: value for key, value in tables.items() if not _is_table(value)})
    for key, value in tables.items():
        if isinstance(value, Mapping):
            lines += ["", f"[{key}]", *_lines(value)]
        elif _is_table(value):
            for one in value:
                lines += ["", f"[[{key}]]", *_lines(one)]
    return "\n".join(lines)


def _is_table(value: object) -> bool:
    if isinstance(value, Mapping):
        return True
    return isinstance(value, Sequence) and any(isinstance(one, Mapping) for one in value)


def _lines(table: Mapping[str, object]) -> list[str]:
    # A JSON string of printable characters is a basic string of TOML; so are lists of them and integers.
    return [f"{key} = {json.dumps(value, ensure_ascii=False)}" for key, value in table.items() if value not in ("", [])]
