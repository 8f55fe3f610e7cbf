"""A case in words: the numbers in the sentences are those of the detector and of the plain counts."""

from __future__ import annotations

import pytest
from click.testing import CliRunner

import ratomega
from ratomega.case.bundled import bundled_names
from ratomega.cli.main import cli
from ratomega.errors import InputError


def said(case, title):
    return next(p.text for p in ratomega.explain(case).paragraphs if p.title == title)


def pure(eps2, coulomb, charge=3, **matter):
    node = {"coulomb": coulomb, **matter}
    return {"charge": charge, "background": {"eps1": "1", "eps2": eps2}, "node": [node]}


@pytest.mark.parametrize(("eps2", "first"), [("1", 2), ("2", 3), ("1/2", 3), ("2/3", 5), ("3/2", 5)])
def test_the_first_singular_charge(eps2, first):
    """alpha + beta (Buryak, Feigin 1206.5640)."""
    text = said(pure(eps2, ["1/7", "-1/7"]), "The limit point")
    assert f"singular from charge {first} on, to the order floor(k/{first})" in text


def test_the_counts_are_those_of_the_sum_over_pairs():
    """U(2) at ratio 1 to charge 3: 4 + 8 singular weights of 1 + 2 + 5 + 10, as one counts by hand from the hooks."""
    text = said(pure("1", ["1/7", "-1/7"]), "What is singular")
    assert text.startswith("12 of 18 weights diverge, the first at charge 2; the worst order is t^-1")
    cancelling = said(pure("1", ["1/7", "-1/7"]), "What cancels it")
    assert "dimension 1, Euler number 2, Poincaré polynomial 1 + q" in cancelling
    assert "All of them are compact" in cancelling


def test_a_negative_ratio_and_a_resonance():
    assert "The ratio is negative" in said(pure("-2/3", ["1/7", "-1/7"]), "The limit point")
    assert said(pure("-2/3", ["1/7", "-1/7"]), "What is singular").startswith("Nothing: none of the 18 weights")
    meaning = said(pure("2", ["3/2 + t/7", "-3/2"]), "What the limit means")
    assert "a1 - a2 = eps1 + eps2 at the limit point, so from charge 1" in meaning
    assert "same on every path" in said(pure("2", ["1/7", "-1/7"]), "What the limit means")


def test_what_moves_and_what_is_accidental():
    case = pure("1", ["1/3", "eps1/5 + t"], antifundamental=["-1/3"])
    text = said(case, "What moves and what stays")
    assert "stay fixed along the path: node[1].coulomb[1] = 1/3, node[1].antifundamental[1] = -1/3." in text
    assert "move with it: node[1].coulomb[2] = eps1/5 + t." in text
    accidental = said(case, "What looks accidental")
    assert "colour 1 never carries a box" in accidental
    assert "tilted by multiples of t" in said(pure("1", ["0", "0"]), "What looks accidental")


@pytest.mark.parametrize("name", [name for name in bundled_names() if not name.startswith("vacuum-")])
def test_every_bundled_case_is_explained(name):
    result = ratomega.explain(name)
    assert result.exit_status == 0
    assert len(result.paragraphs) >= 4
    assert all(paragraph.text and paragraph.text.endswith(".") for paragraph in result.paragraphs)
    assert ratomega.load_result(ratomega.to_json(result)) == result
    singular = sum(report.singular for report in ratomega.detect(name).charges)
    text = next(p.text for p in result.paragraphs if p.title == "What is singular")
    assert text.startswith(f"{singular} of " if singular else "Nothing")


def test_a_limit_inside_the_limit_is_refused():
    with pytest.raises(InputError, match="u stands for"):
        ratomega.explain("vacuum-degenerate")


def test_the_command():
    done = CliRunner().invoke(cli, ["explain", "b1-four-flavours", "--charge", "2"], standalone_mode=False)
    assert done.return_value == 0
    assert "What cancels it\n  Configurations with the same contents" in done.output
    assert max(len(line) for line in done.output.splitlines()) <= 120
