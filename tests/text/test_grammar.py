"""The grammar: no conflicts, and one lexer."""

from __future__ import annotations

import logging

import lark
import pytest

from acsolve.source import Source
from acsolve.text.scan import script, tokens
from acsolve.text.syntax import OPEN_TEXT, STARTS, STRAY, Failure, grammar_text, parser, syntax_of
from tests.text.test_cases import BAD, CIRCUITS, OK, ids


def test_the_grammar_has_no_conflicts(caplog):
    """LALR(1) tables are built without a single conflict, which lark would settle silently."""
    lark.logger.setLevel(logging.DEBUG)
    try:
        with caplog.at_level(logging.DEBUG, logger=lark.logger.name):
            lark.Lark(grammar_text(), parser="lalr", lexer="basic", start=list(STARTS), debug=True)
    finally:
        lark.logger.setLevel(logging.CRITICAL)
    assert not [item for item in caplog.messages if "conflict" in item.lower()]


def test_a_conflict_would_be_noticed(caplog):
    """The test above can fail: an ambiguous grammar is logged as a conflict."""
    lark.logger.setLevel(logging.DEBUG)
    try:
        with caplog.at_level(logging.DEBUG, logger=lark.logger.name):
            lark.Lark('start: start "+" start | "a"', parser="lalr", lexer="basic", debug=True)
    finally:
        lark.logger.setLevel(logging.CRITICAL)
    assert [item for item in caplog.messages if "conflict" in item.lower()]


@pytest.mark.parametrize("path", OK + BAD + CIRCUITS, ids=ids)
def test_the_scanner_is_the_lexer_of_the_grammar(path):
    """The scanner finds the tokens that lark's basic lexer finds."""
    sheet = script(Source(path.name, path.read_text(encoding="utf-8")))
    ours = list(tokens(sheet.text, 0, len(sheet.text)))
    if any(kind in (STRAY, OPEN_TEXT) for kind, _, _ in ours):
        pytest.skip("lark stops at a character that the scanner reports")
    theirs = [(token.type, token.start_pos, token.end_pos) for token in parser().lex(sheet.text)]
    assert [item for item in ours if item[0] != "NEWLINE"] == theirs


@pytest.mark.parametrize(
    ("text", "kinds"),
    [
        ("R1--2", "NAME LINK NUMBER"),
        ("1..20", "NUMBER RANGE NUMBER"),
        ("5+-2", "NUMBER PLUS_MINUS NUMBER"),
        ("5 +/- 2", "NUMBER PLUS_MINUS NUMBER"),
        ("10 uF +80 % -20 %", "NUMBER NAME SIGNED_PERCENT SIGNED_PERCENT"),
        ("2.2e-07 F", "NUMBER NAME"),
        ("1e-8F", "GLUED"),
        ("5nV/rtHz", "GLUED"),
        ("5 nV/√Hz", "NUMBER RATIO"),
        ("100V/V*2", "GLUED STAR NUMBER"),
        ("4.7kΩ", "GLUED"),
        ("4.7 kΩ", "NUMBER SIGN_UNIT"),
        ("N1[7].2", "NAME OPEN_INDEX NUMBER CLOSE_INDEX POINTED"),
        ("a||b∥c", "NAME PARALLEL NAME PARALLEL NAME"),
        ("endless", "NAME"),
        ("gnd # gnd", "GND"),
    ],
)
def test_the_longest_sign_wins(text, kinds):
    """Signs of two characters are one token everywhere, and a value is one token with its unit."""
    assert [kind for kind, _, _ in tokens(text, 0, len(text))] == kinds.split()


def test_the_syntax_of_a_shape_is_remembered():
    """Asking twice for the syntax of one sequence of tokens gives the same object."""
    shape = ("NAME", "LINK", "NAME", "LINK", "GND")
    assert not isinstance(syntax_of("statement", shape), Failure)
    assert syntax_of("statement", shape) is syntax_of("statement", shape)
