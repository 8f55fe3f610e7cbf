"""Files and TOML texts, hostile ones included: every way in ends with tables or with an ``InputError``."""

from __future__ import annotations

import os

import pytest

from ratomega.case.bundled import bundled_text
from ratomega.case.reading import load_case
from ratomega.case.tables import LARGEST_FILE, file_label, text_of_file, toml_tables
from ratomega.errors import InputError

SIZE = LARGEST_FILE - 100


def refusal(work, *arguments):
    with pytest.raises(InputError) as caught:
        work(*arguments)
    (problem,) = caught.value.problems
    assert problem.message.isprintable()
    assert len(problem.text()) < 400
    return problem


@pytest.mark.parametrize(
    ("text", "where", "said"),
    [
        ("eps1 = 3/2", "line 1", 'exact numbers are quoted: write "3/2"'),
        ("[background]\neps1 = '1'\neps2 = -3/4", "line 3", 'exact numbers are quoted: write "-3/4"'),
        ('coulomb = [\n  "1/2",\n  3/2]', "line 3", 'exact numbers are quoted: write "3/2"'),
        ('coulomb = ["1/2", 3/2]', "line 1", "exact numbers are quoted"),
        ("eps2 = 1 + t", "line 1", 'exact numbers are quoted: write "1 + t"'),
        ("x = -t/7", "line 1", 'exact numbers are quoted: write "-t/7"'),
        ("x = [1, eps1/2]", "line 1", 'exact numbers are quoted: write "eps1/2"'),
        ("charge = 1\ncharge = = 2", "line 2", "not TOML"),
        ('title = "3/2" x', "line 1", "not TOML"),
        ("x = 1 # 3/2\ny 2", "line 2", "not TOML"),
        ("x = '''\n3/2\n''' 3", "line 3", "not TOML"),
        ("x = '3/2", None, "not TOML"),
        ("a = 1\na = 2\n", None, "not TOML"),
        ("\x00", "line 1", "not TOML"),
        ("this is no TOML", "line 1", "not TOML"),
    ],
)
def test_what_is_not_toml(text, where, said):
    problem = refusal(toml_tables, text, "demo.toml")
    assert said in problem.message
    if where is None:
        assert problem.where.startswith("demo.toml")
    else:
        assert problem.where == f"demo.toml: {where}"


def test_a_plain_syntax_error_is_not_blamed_on_a_fraction():
    assert "quoted" not in refusal(toml_tables, 'title = "3/2" x', "demo.toml").message
    assert "quoted" not in refusal(toml_tables, "x = 1 # 3/2\ny 2", "demo.toml").message


# Each of these costs a careless reader or a careless search for hints time quadratic in the length, or the stack, or
# a plain ValueError from Python's limit on digits.
HOSTILE = {
    "nested lists": "a = " + "[" * SIZE,
    "nested tables": "a = " + "{a=" * (SIZE // 3),
    "digits": "a = " + "1" * SIZE,
    "digits and strokes": "a = x " + "1" * (SIZE // 2) + "/" * (SIZE // 2),
    "fractions": "a = x " + "1/" * (SIZE // 2),
    "brackets and a symbol": "a = x " + "[" * SIZE + "t",
    "equals signs": "a=" * (SIZE // 2) + "t",
    "symbols": "a = x" + " t" * (SIZE // 2),
    "a string never closed": 'a = """' + '\\"' * (SIZE // 2),
    "quotes": '"' * SIZE,
    "apostrophes": "'" * SIZE,
    "escaped triple quotes": '\\"""' * (SIZE // 4),
    "backslashes": "\\" * SIZE,
    "one key": "a" * SIZE,
    "too long": "#" * (LARGEST_FILE + 1),
}


@pytest.mark.parametrize("text", HOSTILE.values(), ids=HOSTILE.keys())
def test_hostile_text_is_refused(text):
    refusal(toml_tables, text, "demo.toml")


FORMS = ["{}a = 1", "[{}a]", "[[{} a ]]", "b = 1 # c\n{}a = 1", "x = {{{}a = 1}}", "x = [{{ {}a = 1}}]"]


@pytest.mark.parametrize("part", ["a", '"a"', "'a'", '"\\""', "' '"])
@pytest.mark.parametrize("form", FORMS)
def test_keys_of_many_parts_are_refused_unread(part, form):
    # Few parts here: a reader without the bound would take them, and time quadratic in many.
    assert "at most 16 parts" in refusal(toml_tables, form.format(f"{part} . " * 40), "demo.toml").message


def test_dots_outside_keys_do_no_harm():
    numbers = ", ".join(['"0.5"'] * 50)
    dots, bare = "a." * 50, "2.5, " * 50
    text = f'title = "{dots}"  # {dots}\nx = [{numbers}]\ny = [1.5, {bare}]\nz.y.x = """\n{dots}"""\n'
    read = toml_tables(text, "demo.toml")
    assert (len(read["x"]), len(read["y"]), read["z"]["y"]["x"]) == (50, 51, dots)


GOOD = bundled_text("b1-four-flavours").encode()


def written(folder, data, name="demo.toml"):
    path = folder / name
    path.write_bytes(data)
    return path


def test_a_file_is_read_by_name_or_path(tmp_path):
    path = written(tmp_path, GOOD)
    expected = load_case("b1-four-flavours")
    assert load_case(path) == load_case(str(path)) == load_case(os.fsencode(path).decode()) == expected
    assert load_case(written(tmp_path, b"\xef\xbb\xbf" + GOOD.replace(b"\n", b"\r\n"), "windows.toml")) == expected
    # No suffix is needed where the file exists, and a file goes before a bundled case of the same name.
    assert load_case(written(tmp_path, GOOD, "plain")) == expected


def test_a_file_goes_before_a_bundled_case(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "u1-pure").mkdir()
    assert load_case("u1-pure").theory.ranks == (1,)
    written(tmp_path, GOOD, "u2-pure")
    assert load_case("u2-pure") == load_case("b1-four-flavours")


@pytest.mark.parametrize(
    ("name", "said"),
    [
        ("missing.toml", "there is no such file"),
        ("folder", "this is a directory"),
        ("folder.toml", "this is a directory"),
        ("pipe", "not a regular file"),
        ("pipe.toml", "not a regular file"),
        ("circle.toml", "cannot be read"),
        ("demo.toml/inner.toml", "cannot be read"),
        ("nul\0.toml", "not the name of a file"),
        ("surrogate\ud800.toml", "not the name of a file"),
        ("x" * 5000 + ".toml", "cannot be read"),
        ("latin.toml", "not UTF-8"),
        ("utf16.toml", "not UTF-8"),
        ("large.toml", "larger than 256 kB"),
    ],
)
def test_files_that_are_refused(tmp_path, name, said):
    (tmp_path / "folder").mkdir()
    (tmp_path / "folder.toml").mkdir()
    os.mkfifo(tmp_path / "pipe")
    os.mkfifo(tmp_path / "pipe.toml")
    (tmp_path / "circle.toml").symlink_to("circle.toml")
    written(tmp_path, GOOD)
    written(tmp_path, 'title = "\xe9"\n'.encode("latin-1"), "latin.toml")
    written(tmp_path, GOOD.decode().encode("utf-16"), "utf16.toml")
    written(tmp_path, b"#" * (LARGEST_FILE + 1), "large.toml")
    problem = refusal(load_case, f"{tmp_path}/{name}")
    assert said in problem.message
    # Messages travel: they name the file, not the folders of the machine.
    assert str(tmp_path) not in problem.text()


def test_a_file_that_may_not_be_read(tmp_path, monkeypatch):
    # Under an account that may read everything the mode of a file refuses nothing, hence by hand.
    def refuse(*_arguments, **_options):
        raise PermissionError(13, "Permission denied")

    path = written(tmp_path, GOOD)
    monkeypatch.setattr("builtins.open", refuse)
    assert "Permission denied" in refusal(text_of_file, str(path)).message


def test_the_line_of_a_bad_byte(tmp_path):
    assert refusal(load_case, written(tmp_path, b"# one\n# two\n\xff\n")).where == "demo.toml: line 3"


def test_size_is_bounded_where_it_is_said(tmp_path):
    assert len(text_of_file(str(written(tmp_path, b"#" * LARGEST_FILE)))) == LARGEST_FILE


@pytest.mark.parametrize("name", ["b1-four-flavour", "no such case", "", "../b1-four-flavours", "a\nb", "\0"])
def test_an_unknown_name(name):
    problem = refusal(load_case, name)
    assert "neither a file nor a bundled case" in problem.message
    assert '"ratomega cases" lists' in problem.message


def test_an_unknown_name_is_told_the_nearest():
    assert 'nearest known one is "b1-four-flavours"' in refusal(load_case, "b1-four-flavour").message


@pytest.mark.parametrize("source", [None, 3, 0.5, ["b1-four-flavours"], b"b1-four-flavours"])
def test_what_is_no_source(source):
    assert "not" in refusal(load_case, source).message


def test_labels():
    assert file_label("a/b/c.toml") == "c.toml"
    assert file_label("a\n.toml") == r"a\n.toml"
    assert len(file_label("x" * 1000)) < 100
