"""The atlas as a JSON document and back; ``documents`` is the door. Ratios travel as "num/den" or "num"."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from ratomega.detector.atlas import Atlas, SingularRatio
from ratomega.detector.coulomb_poles import CoulombPole, PoleMap
from ratomega.exact.rational import Rational, exact_text, from_exact_text

__all__ = ["atlas_document", "read_atlas"]

Document = dict[str, Any]


def atlas_document(atlas: Atlas) -> Document:
    """The atlas as plain dictionaries, lists, strings and integers."""
    return {
        "result": "atlas",
        "version": atlas.version,
        "hash": atlas.hash,
        "ranks": list(atlas.ranks),
        "charge": atlas.charge if isinstance(atlas.charge, int) else list(atlas.charge),
        "configurations": atlas.configurations,
        "ratios": [_ratio(entry) for entry in atlas.ratios],
        "poles": None if atlas.poles is None else _poles(atlas.poles),
    }


def _ratio(entry: SingularRatio) -> Document:
    rows = [{"charge": k, "worst_order": order, "singular": count} for k, order, count in entry.by_charge]
    return {
        "ratio": exact_text(entry.ratio),
        "steps": list(entry.steps),
        "first_charge": entry.first_charge,
        "worst_order": entry.worst_order,
        "singular": entry.singular,
        "by_charge": rows,
    }


def _poles(found: PoleMap) -> Document:
    return {
        "ratio": exact_text(found.ratio),
        "eps1": exact_text(found.eps1),
        "eps2": exact_text(found.eps2),
        "charge": found.charge,
        "poles": [
            {
                "difference": exact_text(pole.difference),
                "first_charge": pole.first_charge,
                "multiplicity": pole.multiplicity,
                "pairs": [list(pair) for pair in pole.pairs],
            }
            for pole in found.poles
        ],
        "met": None if found.met is None else list(found.met),
    }


def read_atlas(document: Document) -> Atlas:
    """Read back what ``atlas_document`` wrote. Raises ``KeyError``, ``TypeError`` or ``ValueError``."""
    charge = document["charge"]
    poles = document["poles"]
    return Atlas(
        _word(document["version"]),
        None if document["hash"] is None else _word(document["hash"]),
        _whole_numbers(document["ranks"]),
        _whole_numbers(charge) if isinstance(charge, list) else _whole(charge),
        _whole(document["configurations"]),
        tuple(_read_ratio(entry) for entry in _listed(document["ratios"])),
        None if poles is None else _read_poles(poles),
    )


def _read_ratio(d: Document) -> SingularRatio:
    alpha, beta = _whole_numbers(d["steps"])
    rows = tuple(
        (_whole(row["charge"]), _whole(row["worst_order"]), _whole(row["singular"])) for row in _listed(d["by_charge"])
    )
    first, worst, singular = (_whole(d[key]) for key in ("first_charge", "worst_order", "singular"))
    entry = SingularRatio((alpha, beta), first, worst, singular, rows)
    if exact_text(entry.ratio) != d["ratio"]:
        raise ValueError(f"the ratio {d['ratio']} does not belong to the steps {alpha}:{beta}")
    return entry


def _read_poles(d: Document) -> PoleMap:
    poles = tuple(
        CoulombPole(
            _exact(pole["difference"]),
            _whole(pole["first_charge"]),
            _whole(pole["multiplicity"]),
            tuple(_pair(pair) for pair in _listed(pole["pairs"])),
        )
        for pole in _listed(d["poles"])
    )
    met = None if d["met"] is None else tuple(_word(sentence) for sentence in _listed(d["met"]))
    return PoleMap(_exact(d["eps1"]), _exact(d["eps2"]), _whole(d["charge"]), poles, met)


def _pair(value: object) -> tuple[int, int]:
    m, n = _whole_numbers(value)
    return m, n


def _word(value: object) -> str:
    if not isinstance(value, str):
        raise TypeError(f"expected a text, not {value!r}")
    return value


def _whole(value: object) -> int:
    if not isinstance(value, int) or isinstance(value, bool):
        raise TypeError(f"expected an integer, not {value!r}")
    return value


def _listed(value: object) -> Sequence[Any]:
    if not isinstance(value, list):
        raise TypeError(f"expected a list, not {value!r}")
    return value


def _whole_numbers(value: object) -> tuple[int, ...]:
    return tuple(_whole(one) for one in _listed(value))


def _exact(value: object) -> Rational:
    return from_exact_text(_word(value))
