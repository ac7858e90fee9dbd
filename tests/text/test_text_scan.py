"""Tokens: numbers with their units, names of any script, strings, places, and what is wrong."""

from __future__ import annotations

import re
import time
from fractions import Fraction

import pytest

from wellseq.base.quantity import UNITS
from wellseq.text.mistakes import Mistakes
from wellseq.text.parse import parse
from wellseq.text.scan import NAME_LENGTH_MAX, STRING_LENGTH_MAX, scan


def kinds(source):
    """Type and value of each token of a text without mistakes."""
    mistakes = Mistakes("run.well")
    tokens = [(token.type, token.value) for token in scan(source, mistakes)]
    assert mistakes.listed() == ()
    return tokens


def number(source):
    """The one literal that a text is."""
    ((kind, value),) = kinds(source)
    assert kind == "NUMBER"
    return value.value, value.unit


@pytest.mark.parametrize("unit", UNITS)
@pytest.mark.parametrize("blank", ["", " ", "\t", "\u00a0", "\u2009"])
def test_every_unit_stands_after_its_number(unit, blank):
    assert number(f"12{blank}{unit}") == (12, unit)


@pytest.mark.parametrize(
    ("source", "value", "unit"),
    [
        ("12", 12, ""),
        ("1.5 V", Fraction(3, 2), "V"),
        ("5. V", 5, "V"),
        ("6e7", 60_000_000, ""),
        ("1E3 V", 1000, "V"),
        ("2.5e-3 V", Fraction(1, 400), "V"),
        ("2.5e−3 V", Fraction(1, 400), "V"),
        ("1e14 /m3", 10**14, "/m3"),
        ("12 V/us", 12, "V/us"),
        ("12 V/µs", 12, "V/us"),
        ("20 µs", 20, "us"),
        ("20 μs", 20, "us"),
        ("4 \u212a", 4, "K"),
        ("0.4 K/s", Fraction(2, 5), "K/s"),
        ("10 %", 10, "%"),
        ("5eV", 5, "eV"),
        ("2 e", 2, "e"),
    ],
)
def test_a_literal_is_exact_and_has_its_unit(source, value, unit):
    assert number(source) == (value, unit)


def test_a_word_is_a_unit_only_after_a_number():
    assert kinds("V 5 V")[0] == ("NAME", "V")
    assert [kind for kind, _ in kinds("V 5 V")] == ["NAME", "NUMBER"]


def test_a_divisor_belongs_to_the_unit_only_without_blanks():
    assert [kind for kind, _ in kinds("3 V / us")] == ["NUMBER", "SLASH", "NAME"]
    assert [kind for kind, _ in kinds("3 V/gain")] == ["NUMBER", "SLASH", "NAME"]
    assert [kind for kind, _ in kinds("6 V/us/2")] == ["NUMBER", "SLASH", "NUMBER"]


@pytest.mark.parametrize("word", ["smoothly", "throughout", "exponentially", "to", "off", "x"])
def test_another_word_after_a_number_is_no_unit(word):
    tokens = kinds(f"5 {word}")
    assert tokens[0][1].unit == ""
    assert tokens[1][1] == word


def test_the_marks_and_their_twins():
    types = [
        "_SPREAD",
        "_SPREAD",
        "MINUS",
        "MINUS",
        "_DOTS",
        "PLUS",
        "STAR",
        "SLASH",
        "_EQUALS",
        "_COMMA",
        "SEMICOLON",
    ]
    marks = ["±", "+-", "-", "−", "..", "+", "*", "/", "=", ",", ";"]
    for mark, expected in zip(marks, types, strict=True):
        assert [kind for kind, _ in kinds(f"a {mark} b")] == ["NAME", expected, "NAME"]


def test_reserved_words_are_clauses_and_only_whole():
    assert [kind for kind, _ in kinds("over overt allow because")] == [
        "CLAUSE",
        "NAME",
        "_ALLOW",
        "BECAUSE",
    ]


def test_a_finding_name_is_one_token_after_allow_only():
    assert kinds("allow ramp-not-adiabatic")[1] == ("FINDING", "ramp-not-adiabatic")
    assert [kind for kind, _ in kinds("a - b - c")] == ["NAME", "MINUS", "NAME", "MINUS", "NAME"]


@pytest.mark.parametrize(
    "name", ["Käfig", "ловушка", "陷阱", "_x", "e\u0301lan", "a\u0327b9", "नमस्ते"]
)
def test_names_may_use_letters_of_any_script(name):
    assert kinds(f"x {name}") == [("NAME", "x"), ("NAME", name)]


@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
def test_lines_end_at_three_kinds_of_ends_and_columns_count_characters(end):
    source = f"a{end}\u00b5b 𝒱 c # \x0c \u2028 \u0085 d{end}\tx"
    places = [
        (token.line, token.column, token.end_column)
        for token in scan(source, Mistakes("run.well"))
        if token.type == "NAME"
    ]
    assert places == [(1, 1, 2), (2, 1, 3), (2, 4, 5), (2, 6, 7), (3, 2, 3)]


def test_a_comment_hides_everything_to_its_line_end():
    assert kinds('a # "{ \u202e ٣ \x07') == [("NAME", "a")]
    assert kinds('"# no comment"') == [("STRING", "# no comment")]


MISTAKES = [
    # text, column, end column, name, in the message, in the hint
    ("hold for 20 sec", 13, 16, "unit-mismatch", "'sec' is not a unit", "'20 s'"),
    ("hold for 20 µsec", 13, 17, "unit-mismatch", "'µsec' is not a unit", "'20 us'"),
    ("hold for 1 Volt", 12, 16, "unit-mismatch", "'Volt' is not a unit", "'1 V'"),
    ("ramp x over 5 V/usec", 15, 21, "unit-mismatch", "'V/usec' is not a unit", "'5 V/us'"),
    ("ramp x over 5 volts/us", 15, 23, "unit-mismatch", "'volts/us'", "'5 V/us'"),
    ("ramp x over 5volts", 14, 19, "unit-mismatch", "'volts'", "'5 V'"),
    ("let a = 1,5 V", 9, 14, "syntax", "comma", "'1.5 V'"),
    ("let a = 1,000 V", 9, 16, "syntax", "comma", "'1000 V' for a thousand"),
    ("let a = wall-height", 9, 20, "syntax", "hyphen", "'wall - height'"),
    ("let a = 90 V-wall", 9, 18, "syntax", "hyphen", "'90 V - wall'"),
    ("ramp hold-far-gate over 5 s", 6, 19, "syntax", "hyphen", "'hold - far - gate'"),
    ("hold for ٣ s", 10, 11, "syntax", "digits 0 to 9", "'3'"),
    ("hold for １２ s", 10, 12, "syntax", "digits 0 to 9", "'12'"),
    ("hold for ½ s", 10, 11, "syntax", "digits 0 to 9", "0 to 9"),
    ("ramp C٣ over 1 s", 7, 8, "syntax", "digits 0 to 9", "'3'"),
    ('trap "a.toml', 6, 13, "syntax", "no closing", "one line"),
    ('hold for 1 s "', 14, 15, "syntax", "no closing", "one line"),
    ('trap "a\x1b[1m"', 8, 9, "syntax", "U+001B", "delete"),
    ('trap "a\u202eb"', 8, 9, "syntax", "right-to-left override", "delete"),
    ("hold\x0cfor 1 s", 5, 6, "syntax", "U+000C", "delete"),
    ("hold\u0085for 1 s", 5, 6, "syntax", "U+0085", "delete"),
    ("hold\u2028for 1 s", 5, 6, "syntax", "line separator", "delete"),
    ("hold \u202efor 1 s", 6, 7, "syntax", "right-to-left override", "delete"),
    ("hold \ufefffor 1 s", 6, 7, "syntax", "U+FEFF", "delete"),
    ("hold for\x00 1 s", 9, 10, "syntax", "U+0000", "delete"),
    ("let a = 1_000 V", 9, 14, "syntax", "neither a number nor a name", "'1000'"),
    ("let a = 12abc", 9, 14, "syntax", "neither a number nor a name", "digit"),
    ("hold for 5to", 10, 13, "syntax", "neither a number nor a name", "blank"),
    ("let a = .5 V", 9, 10, "syntax", "'.'", "0.5"),
    ("let a = 1.2.3", 12, 13, "syntax", "'.'", "0.5"),
    ("let a = 1e41 V", 9, 15, "too-large", "out of range", "-40 to 40"),
    ("let a = 1e-41 V", 9, 16, "too-large", "out of range", "-40 to 40"),
    (f"let a = {'9' * 61}", 9, 70, "too-large", "60 digits", ""),
    (f"let a = {'9' * 5000}", 9, 5009, "too-large", "too long", ""),
    (f"ramp {'a' * 201}", 6, 207, "too-large", "200 characters", ""),
]


@pytest.mark.parametrize(("text", "column", "end", "name", "message", "hint"), MISTAKES)
def test_a_wrong_token_is_pointed_at(only_mistake, text, column, end, name, message, hint):
    mistake = only_mistake(f"let zz = 1 V\n  {text}\nhold for 1 s")
    place = mistake.place
    assert (place.line, place.column, place.end_line, place.end_column) == (
        2,
        column + 2,
        2,
        end + 2,
    )
    assert mistake.name == name
    assert message in mistake.message
    assert hint in mistake.hint


@pytest.mark.parametrize(("text", "column", "end", "name", "message", "hint"), MISTAKES)
def test_the_statements_around_a_wrong_token_are_kept(text, column, end, name, message, hint):
    tree = parse(f"let zz = 1 V\n{text}\nhold for 1 s", "run.well")
    lines = [item.place.line for item in tree.statements]
    assert lines[0] == 1
    assert lines[-1] == 3
    assert (2 in lines) == (name == "unit-mismatch")


def test_a_unit_that_can_be_guessed_keeps_its_statement_as_it_was_meant():
    (statement,) = parse("let wall = 90 Volts", "run.well").statements
    assert (statement.value.value, statement.value.unit) == (90, "V")


def test_the_limits_themselves_pass():
    assert number("9" * 60) == (int("9" * 60), "")
    assert number("1e40") == (10**40, "")
    assert kinds("a" * NAME_LENGTH_MAX) == [("NAME", "a" * NAME_LENGTH_MAX)]
    assert kinds(f'"{"a" * STRING_LENGTH_MAX}"') == [("STRING", "a" * STRING_LENGTH_MAX)]


def test_a_text_beyond_its_limit_is_too_large(only_mistake):
    assert only_mistake(f'trap "{"a" * (STRING_LENGTH_MAX + 1)}"').name == "too-large"


CHARACTERS = list('a1"#.,;+-*/=(é٣\t \u00a0\u2028\x0c_%e\u0301\u200d$')


@pytest.mark.parametrize("char", CHARACTERS)
def test_a_long_run_of_one_character_takes_time_in_proportion(char):
    started = time.process_time()
    for before in ("", "1 ", '"'):
        for _ in scan_or_stop(before + char * (100_000 if not before else 20_000)):
            pass
    assert time.process_time() - started < 2.0


@pytest.mark.parametrize("part", ["a-", "1 a", "1.", "1,", "é-", '""', "a é«", "1e-", "a\u0301"])
def test_a_long_run_of_a_pair_takes_time_in_proportion(part):
    started = time.process_time()
    for _ in scan_or_stop(part * 15_000):
        pass
    assert time.process_time() - started < 2.0


def test_this_yardstick_sees_a_pattern_that_looks_back():
    slow = re.compile(r"(?:a|aa)+$")
    started = time.process_time()
    slow.match("a" * 31 + "b")
    assert time.process_time() - started > 0.02


def scan_or_stop(source):
    """The tokens up to where so much is wrong that reading stops."""
    from wellseq.text.mistakes import ReadingStops

    try:
        yield from scan(source, Mistakes("run.well"))
    except ReadingStops:
        return
