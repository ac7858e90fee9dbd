"""The grammar: found, free of conflicts, in step with the builder and the scanner, loaded late."""

from __future__ import annotations

import re
import subprocess
import sys

import pytest
from lark import Lark
from lark.exceptions import GrammarError
from lark.lexer import Lexer

from wellseq.base.data import data_folder
from wellseq.text.build import Builder
from wellseq.text.grammar import StatementParser, statement_parser
from wellseq.text.tokens import MARKS

GRAMMAR = data_folder("grammar") / "statement.lark"


class Scanned(Lexer):
    """Takes tokens as they are."""

    def __init__(self, lexer_conf):
        pass

    def lex(self, data):
        return iter(data)


def load(text):
    return Lark(text, parser="lalr", lexer=Scanned, strict=True)


def test_the_grammar_file_is_found():
    assert GRAMMAR.is_file()
    assert isinstance(statement_parser(), StatementParser)


def test_the_grammar_has_no_conflict():
    assert load(GRAMMAR.read_text(encoding="utf-8")).rules


def test_this_yardstick_sees_a_conflict():
    text = GRAMMAR.read_text(encoding="utf-8")
    ambiguous = text.replace("?beside: sum{plain}", "?beside: sum{factor}")
    assert ambiguous != text
    with pytest.raises(GrammarError):
        load(ambiguous)


def test_every_rule_has_its_builder_and_every_builder_its_rule():
    rules = load(GRAMMAR.read_text(encoding="utf-8")).rules
    named = {rule.alias or rule.options.template_source or str(rule.origin.name) for rule in rules}
    inlined = {str(rule.origin.name) for rule in rules if rule.options.expand1}
    sources = {rule.options.template_source for rule in rules if rule.options.expand1}
    built = {name for name in named - inlined - sources if not name.startswith("_")}
    methods = {name for name in vars(Builder) if not name.startswith("_")}
    assert built == methods


def test_the_grammar_declares_the_tokens_of_the_scanner():
    declared = set(re.findall(r"\b_?[A-Z]{2,}\b", GRAMMAR.read_text(encoding="utf-8")))
    ends = {"SEMICOLON", "LBRACE", "RBRACE"}
    assert set(MARKS.values()) - ends <= declared
    assert not ends & declared


def test_lark_is_loaded_with_the_first_text_and_not_before():
    code = (
        "import sys, wellseq.text.read, wellseq.text.parse as p\n"
        "print('lark' in sys.modules)\n"
        "p.parse('hold', 'f')\n"
        "print('lark' in sys.modules)"
    )
    ran = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert ran.stdout.split() == ["False", "True"]
