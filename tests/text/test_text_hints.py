"""A statement that has no shape: where it is pointed at, what is said, what would be right."""

from __future__ import annotations

import pytest

from wellseq.text.parse import parse

MISTAKES = [
    # text, column, end column, in the message, in the hint
    ("let x =", 7, 8, "ends after '='", "a value or a name"),
    ("hold for", 6, 9, "ends after 'for'", "a value or a name"),
    ("let x = 5 V ±", 13, 14, "ends after '±'", "a value"),
    ("let x = 5 V +", 13, 14, "ends after '+'", "a value"),
    ("throw G1,", 9, 10, "ends after ','", "a name"),
    ('"label"', 1, 8, "ends after '\"label\"'", "label of the step"),
    ("pattern p { C4.. = 3 V }", 18, 19, "'=' cannot stand after '..'", "a name"),
    ("hold for 1 s because", 14, 21, "ends after 'because'", "a text between"),
    ("hold for 1 s allow a-b", 20, 23, "ends after 'a-b'", "'because' with a reason"),
    ("hold for 1 s allow a-b because x", 32, 33, "'x' cannot stand after 'because'", "a text"),
    ('hold for 1 s allow because "x"', 20, 27, "'because' cannot stand after 'allow'", "finding"),
    ('hold for 1 s; allow a-b because "x"', 15, 20, "belongs to a step", "without ';'"),
    ("let wall 90 V", 10, 14, "'=' is missing", "let NAME = VALUE"),
    ("C3, C9 90 V", 8, 12, "'=' is missing before '90 V'", "after '='"),
    ("C3, C9 -wall", 8, 9, "'=' is missing before '-'", "after '='"),
    ("C4..C8 4.5 kV", 8, 14, "'=' is missing before '4.5 kV'", "after '='"),
    ("let a = --5 V", 10, 11, "second sign", "at most one sign"),
    ("let a = 5 V - - -3 V", 17, 18, "second sign", "at most one sign"),
    ("let a == 5 V", 8, 9, "'=='", "one '='"),
    ("let a = 5 V // x", 14, 15, "'//'", "'#'"),
    ("let a = 1,5", 9, 12, "comma", "'1.5'"),
    ("let a = 1,05", 9, 13, "comma", "'1.05'"),
    ("let over = 5 V", 5, 9, "'over' is a word of the language", "no name may be"),
    ("let a = 5 V let b = 6 V", 13, 16, "'let' does not belong", "';'"),
    ("C3 = 5 V C4 = 6 V", 10, 12, "'C4' does not belong", "';'"),
    ("C3 = (5) V", 10, 11, "the unit 'V' has no number", "directly after its number"),
    ("hold for 3 * * 2", 14, 15, "'*' cannot stand after '*'", "a value or a name"),
    ("throw G1,, G2", 10, 11, "',' cannot stand after ','", "a name"),
    ("throw G1, to x", 11, 13, "'to' cannot stand after ','", "a name"),
    ("= 5 V", 1, 2, "'=' cannot begin a statement", "a name"),
    ("4 hold", 1, 2, "a number cannot begin", "verb"),
    ("* hold", 1, 2, "'*' cannot begin a statement", "a name"),
    ('"a" "b" hold', 5, 8, "'\"b\"' cannot stand after '\"a\"'", "a name"),
    ('"a" over 5 s', 5, 9, "'over' cannot stand after '\"a\"'", "a name"),
    ("do lift(a b)", 11, 12, "'b' cannot stand after 'a'", "')'"),
    ("do lift(,)", 9, 10, "',' cannot stand after '('", "a value or a name"),
    ("let a = (5 V ± 1 V)", 14, 15, "'±' cannot stand after '5 V'", "')'"),
    ("C3 = { hold }", 6, 7, "a block cannot stand after '='", "a value"),
    ("ramp p over over 5 s", 8, 12, "'over' is a word of the language", "no name"),
]

GO_ON = ("+", ",", '"label"')
"""Ends after which the next line belongs to the same statement."""


@pytest.mark.parametrize(("text", "column", "end", "message", "hint"), MISTAKES)
def test_a_statement_without_shape(only_mistake, text, column, end, message, hint):
    mistake = only_mistake(f"sequence s {{\n {text}\n}}\nhold for 1 s")
    place = mistake.place
    assert mistake.name == "syntax"
    assert (place.line, place.column, place.end_line, place.end_column) == (
        2,
        column + 1,
        2,
        end + 1,
    )
    assert message in mistake.message
    assert hint in mistake.hint


@pytest.mark.parametrize("text", [row[0] for row in MISTAKES if not row[0].endswith(GO_ON)])
def test_the_statements_around_it_are_kept(text):
    tree = parse(f"sequence s {{\nhold for 2 s\n{text}\nhold for 3 s\n}}\nhold for 1 s", "f")
    sequence, after = tree.statements
    assert after.place.line == 6
    lines = [item.place.line for item in sequence.block().items]
    assert (lines[0], lines[-1]) == (2, 4)


@pytest.mark.parametrize(
    ("char", "hint"),
    [
        ("[", "'{ }'"),
        ("'", "a text"),
        ("“", "a text"),
        ("–", "minus"),
        ("×", "'*'"),
        ("^", "density"),
        ("<", "below"),
        (">", "above"),
        (":", "label"),
        ("&", "and"),
        ("→", "'to'"),
        ("$", "not part of the language"),
        ("🙂", "not part of the language"),
    ],
)
def test_a_character_without_meaning(only_mistake, char, hint):
    mistake = only_mistake(f"hold {char} for 1 s")
    assert (mistake.name, mistake.place.column, mistake.place.end_column) == ("syntax", 6, 7)
    assert "has no meaning" in mistake.message
    assert hint in mistake.hint


def test_what_is_expected_is_named_and_nothing_else(only_mistake):
    hint = only_mistake("throw G1,, G2").hint
    assert hint == ("here may stand: a value or a name, a text between two '\"', a block '{ … }'")


def test_messages_are_harmless_and_short(only_mistake):
    mistake = only_mistake(f'hold for 1 s because "{"b" * 300}" = 5')
    assert len(mistake.message) < 120
    assert "\x1b" not in only_mistake('trap "\x1b[31m').message
