"""Where statements end, how blocks nest, and the limits of both."""

from __future__ import annotations

import pytest

from wellseq.text.parse import parse
from wellseq.text.split import NESTING_MAX, OPERATORS_MAX, STATEMENT_LENGTH_MAX


def verbs(items):
    return [item["verb"] for item in items]


@pytest.mark.parametrize(
    "source",
    [
        "hold for 1 s\nhold for 2 s",
        "hold for 1 s; hold for 2 s",
        "hold for 1 s;\n\n;;  \n# remark\nhold for 2 s;",
        "\r\n\r\nhold for 1 s\r\n\thold for 2 s\r\n",
        "hold for 1 s # remark\nhold for 2 s # remark",
        "\ufeffhold for 1 s\nhold for 2 s",
    ],
)
def test_a_new_line_or_a_semicolon_ends_a_statement(read_clean, source):
    assert read_clean(source) == [
        {"verb": "hold", "clauses": [["for", "1 s"]]},
        {"verb": "hold", "clauses": [["for", "2 s"]]},
    ]


@pytest.mark.parametrize(
    ("broken", "whole"),
    [
        ("throw G1,\n G2 to -hv", "throw G1, G2 to -hv"),
        ("throw G1,\n\n# both\nG2 to -hv", "throw G1, G2 to -hv"),
        ("do lift(\n60 V\n)", "do lift(60 V)"),
        ("let a = b +\n c -\n d *\n e /\n f", "let a = b + c - d * e / f"),
        ("let a = -\nb", "let a = -b"),
        ("pattern p {\n\nC1 = 1 V\n\n}", "pattern p { C1 = 1 V }"),
        ('"label"\n\nhold for 1 s', '"label" hold for 1 s'),
        (
            'ramp x\n\n# slowly\nover 5 s\nallow a-b\nbecause "r"',
            'ramp x over 5 s allow a-b because "r"',
        ),
        ("ramp {\n C1 = 1 V\n}\nover 5 s", "ramp { C1 = 1 V } over 5 s"),
    ],
)
def test_a_statement_goes_on_over_a_line_end(read_clean, broken, whole):
    assert read_clean(broken + "\nlast x") == read_clean(whole + "\nlast x")
    assert len(read_clean(broken + "\nlast x")) == 2


def test_a_semicolon_ends_even_before_a_reserved_word(read_clean):
    (catch,) = read_clean("catch b { between G1 and G2; at -hv\nwithin 1 s }")
    assert catch["operands"][1] == [
        {"clauses": [["between", "G1"], ["and", "G2"]]},
        {"clauses": [["at", "-hv"], ["within", "1 s"]]},
    ]


def test_lanes_may_stand_on_one_line(read_clean):
    (step,) = read_clean("alongside { lane { hold for 1 s } lane { hold for 2 s } }")
    assert verbs(step["operands"][0]) == ["lane", "lane"]


def test_an_empty_block_and_an_empty_file_are_shapes(read_clean):
    assert read_clean("pattern p { }") == [{"verb": "pattern", "operands": ["p", []]}]
    assert read_clean("") == read_clean("# nothing\n\n") == []


def test_a_mistake_in_a_block_leaves_the_rest_of_it(outline):
    tree = parse("sequence s {\n hold for\n hold for 2 s\n}\nlet a = 1 V", "run.well")
    assert [mistake.place.line for mistake in tree.mistakes] == [2]
    assert [outline(item) for item in tree.statements] == [
        {
            "verb": "sequence",
            "operands": ["s", [{"verb": "hold", "clauses": [["for", "2 s"]]}]],
        },
        {"verb": "let", "operands": ["a"], "value": "1 V"},
    ]


def test_a_mistake_before_a_block_does_not_hide_those_in_it():
    tree = parse("sequence $s {\n hold for\n}\nlet a = 1 V", "run.well")
    assert [mistake.place.line for mistake in tree.mistakes] == [1, 2]
    assert [item.place.line for item in tree.statements] == [4]


def test_a_reserved_word_with_nothing_above_it(only_mistake):
    mistake = only_mistake("over 5 s; hold for 1 s")
    assert (mistake.name, mistake.place.line, mistake.place.column) == ("syntax", 1, 1)
    assert "none stands above" in mistake.message


@pytest.mark.parametrize(
    ("source", "line", "column", "message"),
    [
        ("hold for (1 s", 1, 10, "'(' has no ')'"),
        ("do lift(60 V\nhold for 1 s", 1, 8, "'(' has no ')'"),
        ("sequence s(a { hold for 1 s }", 1, 11, "'(' has no ')'"),
        ("hold for 1 s)", 1, 13, "no '(' is open"),
        ("hold for 1 s)))", 1, 13, "no '(' is open"),
        ("sequence s\n{\n hold for 1 s\n}", 2, 1, "line of its statement"),
        ("let a = 1 V;\n{ hold for 1 s }", 2, 1, "belongs to no statement"),
    ],
)
def test_marks_that_lack_their_partner(only_mistake, source, line, column, message):
    mistake = only_mistake(source)
    assert (mistake.name, mistake.place.line, mistake.place.column) == ("syntax", line, column)
    assert message in mistake.message


def test_a_brace_on_the_next_line_still_belongs_to_its_statement(outline):
    tree = parse("sequence s\n{\n hold for 1 s\n}", "run.well")
    (statement,) = tree.statements
    assert outline(statement)["operands"][1] == [{"verb": "hold", "clauses": [["for", "1 s"]]}]


def test_nesting_up_to_the_limit_is_read_and_can_be_walked():
    for opening, closing in (("a { ", "} "), ("(", ")")):
        depth = NESTING_MAX - (opening == "(")
        source = opening * depth + "1" + closing * depth
        source = f"pattern a {{ x = {source} }}" if opening == "(" else source.replace("1", "b c")
        tree = parse(source, "run.well")
        assert tree.mistakes == ()
        assert repr(tree)
        assert hash(tree) == hash(parse(source, "run.well"))


@pytest.mark.parametrize(("opening", "column"), [("{", 65), ("(", 65), ("a {", 195)])
def test_nesting_beyond_the_limit_is_one_mistake(only_mistake, opening, column):
    mistake = only_mistake(opening * 100_000)
    assert (mistake.name, mistake.place.column) == ("too-large", column)
    assert str(NESTING_MAX) in mistake.message


def test_a_chain_of_operations_has_a_limit(only_mistake):
    at_limit = "let a = 1" + " + 1" * OPERATORS_MAX
    assert parse(at_limit, "run.well").mistakes == ()
    beyond = only_mistake(at_limit + " + 1")
    assert beyond.name == "too-large"
    assert beyond.place.column == len(at_limit) + 2


def test_the_limit_counts_each_value_on_its_own(read_clean):
    value = "1" + " + 1" * OPERATORS_MAX
    assert len(read_clean(f"each x of {value}, {value} {{ }}")) == 1


def test_a_statement_has_a_limit(only_mistake):
    at_limit = "a b" + ",b" * (STATEMENT_LENGTH_MAX // 2 - 1)
    assert parse(at_limit, "run.well").mistakes == ()
    assert only_mistake(at_limit + " w").name == "too-large"
