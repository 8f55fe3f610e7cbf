"""Case files drafted from a few answers: they read, are generic, and give the known blocks."""

from __future__ import annotations

import pytest
from click.testing import CliRunner

import ratomega
from ratomega.case.drafting import draft, draft_minimal
from ratomega.case.reading import case_from_text
from ratomega.case.setting import own_setting, resonances
from ratomega.cli.main import cli
from ratomega.errors import InputError


@pytest.mark.parametrize("rank", [1, 2, 3, 5])
@pytest.mark.parametrize("flavours", [0, 1, 4])
@pytest.mark.parametrize("ratio", ["1", "-3/4", "2"])
def test_drafts_are_generic_cases(rank, flavours, ratio):
    case = case_from_text(draft(rank=rank, flavours=flavours, adjoint=not flavours, ratio=ratio, charge=3))
    (node,) = case.theory.nodes
    assert (node.rank, len(node.antifundamental), len(node.adjoint)) == (rank, flavours, int(not flavours))
    assert str(case.background.ratio) == ratio
    setting = own_setting(case)
    assert not setting.tilted
    assert not list(resonances(setting, (50,)))
    explained = ratomega.explain(case.with_charge(2))
    assert all(paragraph.title != "What looks accidental" for paragraph in explained.paragraphs)


def test_a_drafted_minimal_model_gives_its_block(tmp_path):
    """The Ising block of four spins, identity channel: 1, 0, 1/64, 1/64, 117/8192 (Belavin, Polyakov, Zamolodchikov
    1984)."""
    path = tmp_path / "ising.toml"
    path.write_text(draft_minimal(model=(3, 4), external=[(1, 2)] * 4, internal=(1, 1)), encoding="utf-8")
    block = ratomega.block(str(path))
    assert [str(c.block) for c in block.coefficients] == ["1", "0", "1/64", "1/64", "117/8192"]


@pytest.mark.parametrize(
    ("options", "said"),
    [
        ({"rank": 0}, "a rank is between 1 and"),
        ({"rank": 2, "flavours": -1}, "the number of flavours"),
        ({"rank": 2, "ratio": "0"}, "is not zero"),
        ({"rank": 2, "ratio": "x"}, "x"),
        ({"rank": 2, "charge": -1}, "zero or more"),
        ({"rank": 2, "title": "two\nlines"}, "case"),
    ],
)
def test_bad_answers(options, said):
    with pytest.raises(InputError, match=said):
        draft(**options)


@pytest.mark.parametrize(
    ("model", "external", "internal", "said"),
    [
        ((4, 6), [(1, 1)] * 4, (1, 1), "coprime"),
        ((3, 4), [(1, 1)] * 3, (1, 1), "four external fields"),
        ((3, 4), [(3, 1), *[(1, 1)] * 3], (1, 1), "the label 3,1 is not one of"),
        ((3, 4), [(1, 1)] * 4, (1, 4), "the label 1,4 is not one of"),
    ],
)
def test_bad_minimal_models(model, external, internal, said):
    with pytest.raises(InputError, match=said):
        draft_minimal(model=model, external=external, internal=internal)


def test_the_command_writes_a_file_once(tmp_path):
    path = tmp_path / "mine.toml"
    words = ["new", "--rank", "2", "--flavours", "1", "-o", str(path)]
    done = CliRunner().invoke(cli, words, standalone_mode=False)
    assert done.return_value == 0
    assert ratomega.load_case(str(path)).theory.ranks == (2,)
    with pytest.raises(InputError, match="exists already"):
        CliRunner().invoke(cli, words, standalone_mode=False, catch_exceptions=False)


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (["--minimal", "3;4", "--internal", "1,1"], "not two integers"),
        (["--minimal", "3,4"], "the label of the internal field is missing"),
        (["--minimal", "3,4", "--rank", "2", "--internal", "1,1"], "alone"),
        (["--internal", "1,1"], "belong to --minimal"),
        ([], "give --rank"),
    ],
)
def test_options_that_do_not_go_together(words, said):
    with pytest.raises(InputError, match=said):
        CliRunner().invoke(cli, ["new", *words], standalone_mode=False, catch_exceptions=False)


@pytest.mark.parametrize(("internal", "noted"), [("1,1", False), ("3,1", False), ("2,5", False), ("2,1", True)])
def test_a_channel_that_the_fusion_rules_forbid_is_noted(internal, noted, tmp_path):
    """In M(5,6) the product (2,1) x (2,1) holds (1,1) and (3,1), which is (2,5) (Belavin, Polyakov, Zamolodchikov)."""
    words = ["new", "--minimal", "5,6", *["--external", "2,1"] * 4, "--internal", internal]
    done = CliRunner().invoke(cli, [*words, "-o", str(tmp_path / "case.toml")], standalone_mode=False)
    assert done.return_value == 0
    assert ("do not fuse" in done.stderr) == noted
