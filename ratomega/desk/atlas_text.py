"""The atlas as plain text tables for a terminal."""

from __future__ import annotations

from ratomega.desk.text import charge_word, table
from ratomega.detector.atlas import Atlas
from ratomega.detector.coulomb_poles import CoulombPole, PoleMap
from ratomega.exact.rational import exact_text

__all__ = ["atlas_text"]

# A terminal page shows this many ratios and poles; JSON has them all.
MOST_SHOWN = 40
MOST_PAIRS = 4


def atlas_text(atlas: Atlas) -> str:
    """The ratios at which some weight is singular, then the poles in the Coulomb parameters at one ratio."""
    groups = " x ".join(f"U({rank})" for rank in atlas.ranks)
    charge = str(atlas.charge) if isinstance(atlas.charge, int) else charge_word(atlas.charge)
    lines = [
        f"atlas    {groups}, charges up to {charge}: {atlas.configurations} configurations",
        "taken    Coulomb parameters and masses generic, so that only factors of one colour with itself vanish",
        *([f"hash     {atlas.hash}"] if atlas.hash is not None else []),
        "",
    ]
    if atlas.ratios:
        head = ["eps2/eps1", "eps1:eps2", "first charge", "worst order", "singular weights"]
        rows = [
            [
                exact_text(entry.ratio),
                f"{entry.steps[0]}:{entry.steps[1]}",
                *(str(n) for n in (entry.first_charge, entry.worst_order, entry.singular)),
            ]
            for entry in atlas.ratios[:MOST_SHOWN]
        ]
        lines += table(head, rows)
        lines += _rest(len(atlas.ratios), "ratios")
        lines.append("at every other ratio, negative ones included, no weight is singular up to this charge")
    else:
        lines.append("no weight is singular at any ratio up to this charge")
    if atlas.poles is not None:
        lines += ["", *_pole_lines(atlas.poles)]
    return "\n".join(lines) + "\n"


def _rest(count: int, what: str) -> list[str]:
    return [f"and {count - MOST_SHOWN} more {what} (--json lists all)"] if count > MOST_SHOWN else []


def _pole_lines(found: PoleMap) -> list[str]:
    lines = [
        f"poles at a_i - a_j = ±(m*eps1 + n*eps2), eps1 = {exact_text(found.eps1)}, eps2 = {exact_text(found.eps2)}, "
        f"m*n <= {found.charge}"
    ]
    head = ["a_i - a_j", "first charge", "multiplicity", "(m, n)"]
    lines += table(head, [_pole_row(pole) for pole in found.poles[:MOST_SHOWN]], left=[3])
    lines += _rest(len(found.poles), "poles")
    if found.met is not None:
        lines += [f"this case sits on a pole: {sentence}" for sentence in found.met]
        if not found.met:
            lines.append("this case sits on none of them")
    return lines


def _pole_row(pole: CoulombPole) -> list[str]:
    pairs = " ".join(f"({m},{n})" for m, n in pole.pairs[:MOST_PAIRS])
    more = f" and {len(pole.pairs) - MOST_PAIRS} more" if len(pole.pairs) > MOST_PAIRS else ""
    place = "0" if pole.difference == 0 else f"±{exact_text(pole.difference)}"
    return [place, str(pole.first_charge), str(pole.multiplicity), pairs + more]
