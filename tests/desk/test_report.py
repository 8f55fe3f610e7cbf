"""Reports: whole, closed in themselves, hostile names as text, bounded for big cases, the same bytes each time."""

from __future__ import annotations

import base64
import hashlib
import html
import json
import re
import subprocess
import sys

import pytest
from hostile import HOSTILE, hostile_case
from page_reading import check_page

import ratomega
from ratomega.case.reading import case_from_text
from ratomega.cli.main import main
from ratomega.desk import mathml
from ratomega.desk.case_toml import case_toml
from ratomega.exact.quadratic import number_text
from ratomega.exact.rational import as_rational


@pytest.fixture(scope="module")
def plain_report():
    return ratomega.report("b1-four-flavours")


def test_the_page_holds_what_was_found(plain_report):
    page = check_page(plain_report.html)
    for c in ratomega.limit("b1-four-flavours"):
        assert number_text(c.value) in page.text
    found = ratomega.detect("b1-four-flavours")
    assert len(page.named("figure")) == sum(r.singular + len(r.clusters) for r in found.charges) + 3
    checks = ratomega.validate("b1-four-flavours")
    assert checks.summary in page.text
    for check in checks.checks:
        assert check.evidence in page.text
        assert check.source in page.text
    assert found.header.hash in page.text
    assert f"ratomega{ratomega.__version__}" in page.text
    assert "ratomega report b1-four-flavours -o report.html" in page.text
    assert {"case", "coefficients", "configurations", "clusters", "orders", "atlas", "checks", "repeat"} <= {
        attributes.get("id") for _, attributes in page.elements
    }


def test_the_page_has_what_readers_and_keyboards_need(plain_report):
    page = check_page(plain_report.html)
    assert page.named("html") == [{"lang": "en"}]
    assert {a.get("name"): a.get("content") for a in page.named("meta")}["viewport"].startswith("width=device-width")
    assert len(page.named("main")) == len(page.named("h1")) == 1
    assert all(a.get("scope") for a in page.named("th"))
    # What scrolls by itself can be reached and has a name.
    sheets = [a for a in page.named("div") if a.get("class") == "sheet"]
    assert sheets
    assert all(a["tabindex"] == "0" and a["aria-label"] and a["role"] == "region" for a in sheets)
    assert page.named("textarea")[0]["aria-label"]
    assert [a for a in page.named("a") if a["href"] == "#content"]


def test_the_policy_allows_the_one_style_sheet_and_nothing_else(plain_report):
    policy = next(a["content"] for a in check_page(plain_report.html).named("meta") if "http-equiv" in a)
    sheets = re.findall(r"<style>(.*?)</style>", plain_report.html, re.DOTALL)
    assert len(sheets) == 1
    digest = base64.b64encode(hashlib.sha256(sheets[0].encode()).digest()).decode()
    assert f"style-src 'sha256-{digest}'" in policy
    assert policy.startswith("default-src 'none'; ")
    assert "script" not in policy
    assert "unsafe" not in policy


def test_the_same_case_gives_the_same_bytes(plain_report, tmp_path):
    file = tmp_path / "again.html"
    script = "import sys, ratomega; ratomega.report('b1-four-flavours').save(sys.argv[1])"
    subprocess.run([sys.executable, "-c", script, str(file)], check=True)
    assert file.read_bytes() == plain_report.html.encode()


def test_hostile_names_and_titles_are_text():
    made = ratomega.report(hostile_case(), command="ratomega report '<x>' </pre><script>")
    page = check_page(made.html)
    assert HOSTILE in page.text
    assert "<b onclick=x>" in page.text
    assert "a -> \"b\" & '" in page.text
    assert "ratomega report '<x>' </pre><script>" in page.text
    assert page.named("img") == []
    # The case as a file gives the case back, whatever its names are.
    case = ratomega.load_case(hostile_case())
    assert case_from_text(case_toml(case)) == case
    assert case_toml(case) in page.text


@pytest.mark.parametrize("name", ratomega.bundled_names())
def test_every_bundled_case_is_written_as_a_file_that_gives_it_back(name):
    case = ratomega.load_case(name)
    assert case_from_text(case_toml(case)) == case


@pytest.mark.parametrize(
    "name", ["surviving-pole", "path-dependent", "free-momentum", "vacuum-degenerate", "linear-quiver", "necklace"]
)
def test_every_kind_of_case_has_a_page(name):
    """A pole, paths that differ, symbols, a limit inside the limit, several nodes."""
    made = ratomega.report(name)
    page = check_page(made.html)
    for c in ratomega.limit(name):
        shown = c.value if c.value is not None else c.leading if c.leading is not None else c.values[0].value
        assert str(shown) in page.text
        assert all(number_text(v.value) in page.text for v in c.values)
    # No section is missing without a word.
    said = {"vacuum-degenerate": ["singular configurations, clusters, pole orders", "approach"],
            "free-momentum": ["approach"]}
    assert [note.split(":")[0] for note in made.notes] == said.get(name, [])
    assert all(note in page.text for note in made.notes)


@pytest.mark.long
@pytest.mark.parametrize("name", ratomega.bundled_names())
def test_every_bundled_case_has_a_page(name):
    check_page(ratomega.report(name).html)


@pytest.mark.long
@pytest.mark.parametrize(("name", "charge"), [("u2-pure", 500), ("u1-pure", 200), ("three-nodes", 40), ("u3-pure", 60)])
def test_a_big_case_is_cut_and_says_so(name, charge):
    made = ratomega.report(ratomega.load_case(name).with_charge(charge))
    page = check_page(made.html)
    assert len(made.notes) == 5
    assert all(note in page.text for note in made.notes)
    assert len(made.html) < 4_000_000


def test_a_case_of_many_colours_is_cut_by_the_work():
    """24 colours: already charge 3 is too much, and charge 500 beyond counting."""
    colours = [f"{n}/101" for n in range(1, 25)]
    case = {"charge": 500, "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": colours}]}
    made = ratomega.report(case)
    assert len(made.notes) >= 3
    page = check_page(made.html)
    assert all(note in page.text for note in made.notes)


def test_the_approach_has_its_section_where_there_is_one_path_of_numbers(plain_report):
    def sections(html):
        return {attributes.get("id") for _, attributes in check_page(html).elements}

    assert "approach" in sections(plain_report.html)
    assert "charge 4, order 2" in check_page(plain_report.html).text
    assert "approach" not in sections(ratomega.report("free-momentum").html)


def run(*words):
    with pytest.raises(SystemExit) as ended:
        main(words)
    return ended.value.code


def test_the_command_writes_the_page_and_names_itself(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    assert run("report", "surviving-pole", "--charge", "1", "--eps2", "1/2", "-o", "a b.html") == 0
    assert capsys.readouterr() == ("wrote a b.html\n", "")
    page = check_page((tmp_path / "a b.html").read_text(encoding="utf-8"))
    assert "ratomega report surviving-pole --charge 1 --eps2 1/2 -o 'a b.html'" in page.text
    assert run("report", "vacuum-degenerate", "--charge", "1", "-o", "v.html", "--json") == 0
    document = json.loads(capsys.readouterr().out)
    assert document["file"] == "v.html"
    assert len(document["left_out"]) == 2


def test_what_cannot_be_written_or_read_is_said(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    assert run("report", "u1-pure", "--charge", "1", "-o", "none/x.html") == 2
    assert capsys.readouterr().err == "ratomega: none/x.html: the report cannot be written: No such file or directory\n"
    with pytest.raises(ratomega.InputError):
        ratomega.report("no-such-case")
    with pytest.raises(ratomega.InputError, match="is not a depth"):
        ratomega.report("u1-pure", depth="deep")


def test_a_value_that_a_decimal_holds_is_not_called_near():
    """Z = exp(-q/4): -1/4 is -0.25, 1/32 is 0.03125, and -1/384 has no end."""
    case = {"charge": 3, "background": {"eps1": 2, "eps2": -2}, "node": [{"coulomb": ["0"]}]}
    text = check_page(ratomega.report(case).html).text
    assert "= -0.25" in text
    assert "= 0.03125" in text
    assert "≈ -0.0026041" in text


def test_empty_diagrams_are_not_a_minus_sign():
    text = check_page(ratomega.report("surviving-pole").html).text
    assert "∅ (1): order 1" in text
    assert "- (1): order 1" not in text
    assert "pole t⁻¹" in text


def test_words_fit_what_is_there():
    """Bars are spoken of where there are some; an order is not told of a weight that is zero all along the path."""
    page = ratomega.report("adjoint-on-the-path").html
    assert "No single weight diverges at any of these charges. Dashes:" in page
    assert "Bars:" not in page
    page = ratomega.report("hypergeometric").html
    assert ": zero all along the path" in page
    assert "zero all along the path, " not in page
    assert re.search(r"order -?\d+</span>, zero", page) is None
    page = ratomega.report("u2-ratio-two").html
    assert "1 more cluster of this charge is not drawn" in page
    assert "2 more configurations of this charge are not drawn" in page
    page = ratomega.report("surviving-pole").html
    assert ">leading coefficient</th>" in page


def test_the_first_terms_are_a_formula_each():
    """-1/2 and 3 q with signs of their own: the first is a sign of the number, the others join two terms."""
    said = str(mathml.series([((0,), as_rational("-1/2")), ((1,), as_rational(3)), ((2,), as_rational(-1))]))
    terms = re.findall(r"<math.*?</math>", said)
    assert [html.unescape(re.sub(r"<[^>]*>", "", term)) for term in terms] == ["Z=", "−12", "+3q", "−q2", "+⋯"]
    assert ["infix" in term for term in terms] == [True, False, True, True, True]
    assert said.count("<wbr>") == len(terms)
