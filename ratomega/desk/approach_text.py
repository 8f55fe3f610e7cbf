"""The approach of balls to an exact limit as text."""

from __future__ import annotations

from ratomega.desk.text import charge_word, heading, table
from ratomega.exact.quadratic import number_text
from ratomega.verify.approach import Approach, ApproachCharge

__all__ = ["approach_text"]

HEAD = ("offset", "value", "radius", "distance", "beyond t^2", "digits lost", "digits needed", "seconds")


def approach_text(result: Approach) -> str:
    """A table a charge, one row an offset, and what it amounts to."""
    lines = heading(result.header, result.partial)
    lines.append(f"balls at t = offset * sqrt(2) on this path, working precision {result.digits} digits")
    for one in result.charges:
        if any(one.charge):
            lines += ["", *_charge(one)]
    lines += ["", _summary(result)]
    return "\n".join(lines) + "\n"


def _charge(one: ApproachCharge) -> list[str]:
    limit = "no limit" if one.exact is None else f"exact {number_text(one.exact)} in {one.exact_seconds:.2g} s"
    counts = f"{one.singular} singular weights, worst order {one.worst_order}"
    lines = [f"charge {charge_word(one.charge)}: {limit}; {counts}"]
    rows = []
    for p in one.points:
        mark = "" if p.consistent else "  NOT where the exact expansion says"
        cells = [_offset(p.offset), p.value, p.radius, p.distance, p.remainder, f"{p.lost:.1f}", str(p.needed)]
        rows.append([*cells, f"{p.seconds:.2g}{mark}"])
    lines += table(HEAD, rows)
    if one.extrapolated is not None:
        order = "not seen through the radii" if one.order is None else f"{one.order:g}"
        lines.append(f"order of convergence {order}; extrapolated {one.extrapolated}, off by {one.left_over}")
    return lines


def _offset(offset: object) -> str:
    text = str(offset)
    digits = text.removeprefix("1/")
    return f"1e-{len(digits) - 1}" if text.startswith("1/1") and not digits[1:].strip("0") else text


def _summary(result: Approach) -> str:
    if result.exit_status:
        return "a limit does not exist, or a ball is not where the exact expansion says"
    if result.nothing_lost:
        return "no weight is singular at this ratio up to this charge: there is nothing to lose, whatever the offset"
    worst = max((p.needed for one in result.charges for p in one.points), default=0)
    blind = [
        f"charge {charge_word(one.charge)} at {_offset(p.offset)}"
        for one in result.charges
        for p in one.points
        if p.value == "?"
    ]
    said = f"every ball is where the exact expansion says; up to {worst} digits of working precision are needed"
    return f"{said}; nothing is left at {', '.join(blind)}" if blind else said
