"""The grammar: no conflicts, keywords that end where a name would end, and the lines it takes."""

from __future__ import annotations

import logging

import pytest
from lark import Lark, UnexpectedInput
from lark import logger as lark_logger

from flowgraph.text.load import load_text
from flowgraph.text.parser import grammar_text, line_parser
from flowgraph.text.words import FIRST_WORDS, LATER_FIRST_WORDS, RESERVED


def test_the_grammar_has_no_conflicts(caplog: pytest.LogCaptureFixture) -> None:
    """LALR construction reports neither shift/reduce nor reduce/reduce conflicts."""
    before = lark_logger.level
    lark_logger.setLevel(logging.DEBUG)
    try:
        with caplog.at_level(logging.DEBUG):
            Lark(grammar_text(), parser="lalr", debug=True)
    finally:
        lark_logger.setLevel(before)
    assert [record.getMessage() for record in caplog.records if "onflict" in record.getMessage()] == []


LINES = {
    "diagram": "diagram level",
    "include": 'include "f.sfg"',
    "title": 'title "level"',
    "version": 'version "1"',
    "note": 'note "level"',
    "row": "row a, b",
    "unused": "unused a",
    "rate": "rate half",
    "const": "const M = 3",
    "coef": "coef a = 3",
    "input": "input x",
    "output": "output y",
    "adder": "adder y = x + z",
    "gain": "gain y = 2*x",
    "wire": "wire y = x",
    "delay": "delay y = x",
    "use": "use y = section(x)",
    "cascade": "cascade y = section(x) with c = each c",
    "repeat": "repeat k = 0 .. 3",
    "intent": "intent y / x = 1",
    "require": "require stable",
}


@pytest.mark.parametrize("word", FIRST_WORDS)
def test_a_first_word_ends_where_a_name_would_end(word: str) -> None:
    """`input x` is a line, `inputx` and `input_ x` are none."""
    line = LINES[word]
    line_parser().parse(line, 0, len(line))
    glued_lines = [line.replace(word, f"{word}_", 1), line.replace(word, f"{word}1", 1)]
    if '"' not in line:
        glued_lines.append(line.replace(f"{word} ", word, 1))
    for glued in glued_lines:
        with pytest.raises(UnexpectedInput):
            line_parser().parse(glued, 0, len(glued))


@pytest.mark.parametrize(
    ("line", "word"),
    [
        ("delay y = x by 3", "by"),
        ("delay y = x starts 3", "starts"),
        ("repeat ch in left, right", "in"),
        ("intent y / x = 1 late 3 samples", "late"),
        ("intent y / x = 1 late 3 samples", "samples"),
        ("require gain y / x at 3 Hz <= 0 dB", "at"),
        ("require gain y / x at 3 Hz <= 0 dB", "Hz"),
        ("require gain y / x at 3 Hz <= 0 dB", "dB"),
        ("require gain y / x at 3 Hz within 0 .. 1 dB", "within"),
        ("require bounded y / x", "bounded"),
        ("require stable", "stable"),
        ("require cells <= 3", "cells"),
        ("require multiplies <= 3", "multiplies"),
        ("use y = section(x) with c = 3", "with"),
        ("cascade y = section(x) with c = each c", "each"),
        ('coef h = read "h.csv"', "read"),
    ],
)
def test_an_inner_keyword_ends_where_a_name_would_end(line: str, word: str) -> None:
    """A letter more makes a name of it, and the line is none."""
    line_parser().parse(line, 0, len(line))
    glued = line.replace(word, f"{word}_", 1)
    with pytest.raises(UnexpectedInput):
        line_parser().parse(glued, 0, len(glued))


@pytest.mark.parametrize("name", ["in", "by", "at", "within", "s", "ms", "Hz", "starts", "late", "cells", "dB", "with"])
def test_other_keywords_and_units_are_free_as_names(name: str) -> None:
    """A coefficient may be called s, a signal `in`."""
    text = (
        f"diagram level {{\n coef {name} = 0.5\n input x\n output y\n delay x1 = x\n adder y = {name}*x + x1\n"
        f" intent y / x = {name} + z^-1\n}}\n"
    )
    assert load_text(text).findings == ()


@pytest.mark.parametrize("name", sorted(RESERVED))
def test_reserved_words_are_no_names(name: str) -> None:
    """First words, functions, n, z and their like name nothing."""
    text = (
        f"diagram level {{\n input x\n output y\n gain {name} = 2*x\n adder y = x + {name}\n intent y[n] = 3*x[n]\n}}\n"
    )
    assert f"{name} is a word of the language and no name" in [found.message for found in load_text(text).findings]


@pytest.mark.parametrize("word", LATER_FIRST_WORDS)
def test_what_comes_later_is_said_to_be_unknown(word: str) -> None:
    """One wording for all of it."""
    findings = load_text(f"diagram level {{\n input x\n output y = x\n intent y / x = 1\n {word} x\n}}\n").findings
    assert [found.message for found in findings] == [f"`{word}` is not known here yet"]
