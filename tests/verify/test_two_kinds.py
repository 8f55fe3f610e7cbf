"""Two faults of different kinds in one table, and noise at its edges: each is found with both of its names.

Tables are made by the plain reference (``faulty_tables``), which imports nothing from the package.
"""

from __future__ import annotations

import random

import faulty_tables
import pytest
from faulty_tables import at_offset, draw_theory, exact_limits, fmpq, in_floats, product, table

import ratomega

FLAVOURS = {
    "charge": 2,
    "background": {"eps1": "1", "eps2": "1"},
    "node": [{"coulomb": ["2/7", "3/11"], "antifundamental": ["1/5"], "fundamental": ["5/4"], "adjoint": []}],
}
ADJOINT = {**FLAVOURS, "node": [{"coulomb": ["2/7", "-2/7"], "antifundamental": [], "fundamental": [],
                                 "adjoint": ["-3/5"]}]}
SMALL = fmpq(1, 1000)


def with_node(mapping, **values):
    return {**mapping, "node": [{**mapping["node"][0], **values}]}


def turned(values):
    return [value * (-1) ** k for k, value in enumerate(values)]


def first(mapping, rows, as_="z"):
    return ratomega.compare(mapping, rows, as_=as_).diagnosis[0]


@pytest.mark.long
def test_an_offset_and_a_reflected_mass_that_moves_or_was_typed():
    """eps1 + eps2 - 1/5 at eps2 = 1 + delta: with the eps of the offset, or with 2 typed in its place."""
    typed = with_node(FLAVOURS, antifundamental=["9/5"])
    moving = with_node(FLAVOURS, antifundamental=[str(2 + SMALL - fmpq(1, 5))])
    for other, edit in ((typed, '"9/5"'), (moving, '"-1/5 + eps1 + eps2"')):
        found = first(FLAVOURS, table(at_offset(other, SMALL)))
        assert (found.kind, found.length, found.fitted) == ("offset", 2, 0)
        assert dict(found.parameters)["offset"] == "0.001"
        assert found.changes[1].startswith("antifundamental mass 1: m -> eps1 + eps2 - m")
        assert found.edits == (f"antifundamental = [{edit}]",)


def test_at_an_offset_a_typed_reflected_adjoint_is_another_theory():
    """At eps = 2 the masses -3/5 and 13/5 are the same; at eps = 2 + delta they are not."""
    found = first(ADJOINT, table(at_offset(with_node(ADJOINT, adjoint=["13/5"]), fmpq(1, 10000))))
    assert (found.kind, dict(found.parameters)["offset"]) == ("offset", "0.0001")
    assert found.changes[1] == "adjoint mass 1: m -> eps1 + eps2 - m"


@pytest.mark.parametrize("ratio", ["1", "-3/4"])
def test_an_offset_and_a_factor(ratio):
    """Divided by exp(q/(eps1 eps2)) of the limit point, and multiplied by (1 - q)^(3/7)."""
    eps1, eps2 = faulty_tables.BACKGROUNDS[ratio]
    mapping = {**FLAVOURS, "background": {"eps1": str(eps1), "eps2": str(eps2)}}
    values = at_offset(mapping, SMALL)
    area = fmpq(eps1 * eps2)
    divided = first(mapping, table(product(values, faulty_tables.exponential(-1 / area))))
    assert (divided.kind, divided.fitted, dict(divided.parameters)["offset"]) == ("offset", 0, "0.001")
    assert "exp(s*q) with s = -1/(eps1*eps2)" in divided.changes[1]
    multiplied = first(mapping, table(product(values, faulty_tables.power(-1, fmpq(3, 7)))))
    assert (multiplied.kind, dict(multiplied.parameters)) == ("offset", {"offset": "0.001", "s": "3/7"})


def test_a_number_that_was_fitted_to_a_sign_is_the_sign():
    """q -> -q at an offset is listed once, and not as q -> s*q with s = -1 again."""
    mapping = {**FLAVOURS, "node": [{"coulomb": ["2/7", "-2/7"], "antifundamental": ["1/2", "1/5", "1/3"]}]}
    found = ratomega.compare(mapping, table(turned(at_offset(mapping, fmpq(1, 10**5))), 12), as_="z").diagnosis
    assert [one.changes[1] for one in found] == ["q -> -q"]


def test_lost_precision_is_one_answer_whatever_the_numbers_are_read_as():
    mapping = {**FLAVOURS, "node": [{"coulomb": ["2/7", "-2/7"], "antifundamental": ["1/2", "1/5", "1/3"]}]}
    rows = faulty_tables.float_table(in_floats(mapping, fmpq(1, 10**7)))[1:]
    assert [(one.kind, one.quantity) for one in ratomega.compare(mapping, rows).diagnosis] == [("precision-loss", "z")]


def test_an_offset_and_log_z():
    found = first(FLAVOURS, table(faulty_tables.logarithm(at_offset(FLAVOURS, SMALL))), as_=None)
    assert (found.kind, found.quantity, dict(found.parameters)["offset"]) == ("offset", "log", "0.001")


def test_an_offset_and_terms_left_out():
    """The configurations that are singular at the limit point are left out of the sum at the offset."""
    theory = faulty_tables.on_path(FLAVOURS)
    near = faulty_tables.numbers(FLAVOURS, shift=SMALL)
    values = []
    for k in range(5):
        total = fmpq(0)
        for configuration in faulty_tables.plain.configurations([2], [k]):
            terms = faulty_tables.plain.laurent_weight(theory, configuration, 0)
            if not terms or min(terms) >= 0:
                total += faulty_tables.plain.weight(near, configuration)
        values.append(total)
    found = first(FLAVOURS, table(values))
    assert (found.kind, dict(found.parameters)["offset"]) == ("offset", "0.001")
    assert found.changes[1] == "the singular configurations were left out"


@pytest.mark.long
def test_terms_left_out_of_another_convention():
    found = first(FLAVOURS, table(faulty_tables.without_singular(with_node(FLAVOURS, antifundamental=["9/5"]))))
    assert (found.kind, found.length) == ("dropped-singular", 2)
    assert found.changes[0] == "the singular configurations were left out"
    assert found.changes[1].startswith("antifundamental mass 1: m -> eps1 + eps2 - m")


@pytest.mark.long
def test_lost_precision_and_another_sign_or_mass():
    values = turned(in_floats(FLAVOURS, fmpq(1, 10**6)))
    found = first(FLAVOURS, faulty_tables.float_table(values))
    assert (found.kind, found.changes[1]) == ("precision-loss", "q -> -q")
    assert dict(found.parameters)["offset"] == "1e-06"
    values = in_floats(with_node(FLAVOURS, antifundamental=["9/5"]), fmpq(1, 10**6))
    found = first(FLAVOURS, faulty_tables.float_table(values))
    assert found.kind == "precision-loss"
    assert found.changes[1].startswith("antifundamental mass 1: m -> eps1 + eps2 - m")


def test_a_factor_with_a_meaning_may_change_one_coefficient():
    """log Z divided by exp(q/(eps1 eps2)) differs at charge 1 alone; a number without a meaning is a wrong entry."""
    values = faulty_tables.logarithm(exact_limits(FLAVOURS))
    values[1] -= 1
    found = first(FLAVOURS, table(values), as_=None)
    assert (found.kind, found.quantity) == ("convention", "log")
    assert "exp(s*q) with s = -1/(eps1*eps2)" in found.changes[0]
    values[1] -= fmpq(5, 17)
    assert first(FLAVOURS, table(values), as_="log").kind == "single-entry"


def test_rows_that_show_an_offset_together_show_it():
    """Three colours close together: rounding takes most of what each of the two clean rows shows at delta = 1e-8."""
    mapping = {
        "charge": 2,
        "background": {"eps1": "1", "eps2": "2"},
        "node": [{"coulomb": ["-1/7", "-1/5", "-2/13"], "antifundamental": [], "fundamental": [], "adjoint": ["-4/7"]}],
    }
    found = first(mapping, faulty_tables.float_table(in_floats(mapping, fmpq(1, 10**8))))
    assert found.kind == "precision-loss"


@pytest.mark.long
def test_random_numbers_stay_unexplained_beside_so_many_pairs():
    for seed in range(2):
        draw = random.Random(f"pairs and junk/{seed}")
        mapping = draw_theory(draw, 2, "1")
        exact = exact_limits(mapping)
        values = [exact[0], *(x * (1 + fmpq(draw.randint(-90, 90), 10000)) for x in exact[1:])]
        result = ratomega.compare(mapping, table(values, 6), as_="z")
        assert [one.kind for one in result.diagnosis] == ["unexplained"], result.diagnosis
