"""The atlas as a whole JSON document and back: it may stand for ranks alone, without a case. Ratios are rational."""

from __future__ import annotations

from typing import Any

from ratomega.detector.atlas import Atlas, SingularRatio
from ratomega.detector.coulomb_poles import CoulombPole, PoleMap
from ratomega.documents.pieces import Document, Misfit, each, if_given, listed, rational, whole, word
from ratomega.exact.rational import exact_text

__all__ = ["atlas_document", "read_atlas"]


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
    """Read back what ``atlas_document`` wrote. Raises ``Misfit``, or what Python raises."""
    charge = document["charge"]
    poles = document["poles"]
    return Atlas(
        word(document["version"]),
        if_given(word, document["hash"]),
        each(whole, document["ranks"]),
        each(whole, charge) if isinstance(charge, list) else whole(charge),
        whole(document["configurations"]),
        each(_read_ratio, document["ratios"]),
        if_given(_read_poles, poles),
    )


def _read_ratio(d: Document) -> SingularRatio:
    alpha, beta = each(whole, d["steps"])
    rows = tuple(
        (whole(row["charge"]), whole(row["worst_order"]), whole(row["singular"])) for row in listed(d["by_charge"])
    )
    first, worst, singular = (whole(d[key]) for key in ("first_charge", "worst_order", "singular"))
    entry = SingularRatio((alpha, beta), first, worst, singular, rows)
    if exact_text(entry.ratio) != d["ratio"]:
        raise Misfit(f"the ratio {d['ratio']} does not belong to the steps {alpha}:{beta}")
    return entry


def _read_poles(d: Any) -> PoleMap:
    poles = tuple(
        CoulombPole(
            rational(pole["difference"]),
            whole(pole["first_charge"]),
            whole(pole["multiplicity"]),
            each(_pair, pole["pairs"]),
        )
        for pole in listed(d["poles"])
    )
    met = None if d["met"] is None else each(word, d["met"])
    return PoleMap(rational(d["eps1"]), rational(d["eps2"]), whole(d["charge"]), poles, met)


def _pair(value: object) -> tuple[int, int]:
    m, n = each(whole, value)
    return m, n
