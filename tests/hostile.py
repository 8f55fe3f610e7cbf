"""A case whose title and names try to be markup."""

from __future__ import annotations

HOSTILE = "<script>alert(1)</script>\"'><img src=x onerror=alert(2)> & </style></textarea> " + 80 * "w"


def hostile_case(charge=2):
    return {
        "title": HOSTILE,
        "charge": charge,
        "background": {"eps1": 1, "eps2": 1},
        "node": [
            {"name": "<b onclick=x>", "coulomb": ["1/3", "-1/3"]},
            {"name": "a -> \"b\" & '", "coulomb": ["1/5"]},
        ],
        "edge": [{"from": "<b onclick=x>", "to": "a -> \"b\" & '", "mass": "2/7"}],
    }
