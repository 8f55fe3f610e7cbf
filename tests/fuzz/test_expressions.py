"""Expressions from generated text: one that is read says what it is and reads back; any other gets one sentence."""

from __future__ import annotations

import pytest
from fuzzing import outcome, searches
from hypothesis import strategies as st

from ratomega.case.expression import SYMBOLS, parse_affine
from ratomega.errors import InputError

pytestmark = pytest.mark.fuzz

WORDS = ["eps1", "eps2", "t", "u", "a", "i", "I", "j", "sqrt", "sqrt(2)", "sqrt(-3)", "sqrt(8)", "sqrt(1/2)", "inf"]
NUMBERS = ["0", "1", "12", "3/7", "0.5", ".5", "7.", "1e-2", "1e400", "1e-400", "9" * 210, "1_000", "0x10", "٣", "²"]
SIGNS = [*"+-*/()., ", "**", "^", "--", "\n", "\t", "−", "×", "÷", "ε", "\0", "\u202e", "'", '"', "\\", "__import__"]
token = st.sampled_from([*WORDS, *NUMBERS, *SIGNS])
tokens = st.lists(token, max_size=14).map("".join)
text = st.text(max_size=60) | st.text(alphabet="0123456789.eE+-*/()tps12 ^_x", max_size=60)
# What grows: many operands, deep parentheses, long texts, up to the bounds and beyond.
times = st.integers(0, 60) | st.sampled_from([400, 1999, 2100])
repeated = st.builds(lambda word, n, rest: word * n + rest, token, times, tokens)
nested = st.builds(lambda n, m, inside: "(" * n + inside + ")" * m, st.integers(0, 60), st.integers(0, 60), tokens)
known = st.sampled_from([SYMBOLS, ("t",), ("t", "u"), (*SYMBOLS, "u", "a")])


@searches(200)
def test_any_text_is_read_or_refused(search):
    def work(example):
        given, symbols = example
        read = outcome(parse_affine, given, symbols=symbols, where="here", at="here")
        if isinstance(read, InputError):
            assert len(read.problems) == 1
        else:
            assert parse_affine(str(read), symbols=symbols) == read

    search(work, st.tuples(text | tokens | repeated | nested, known))
