"""What a file consists of, and what may stand where."""

from __future__ import annotations

import pytest

from wellseq.model.headers import EXAMPLES, read_header
from wellseq.model.reporter import Reporter
from wellseq.text.parse import parse

GOOD = """wellseq 1
trap "a.trap.toml"
use "b.well"
let wall = 90 V
cloud plus is positron
pattern cradle { E1 = 1 V }
procedure lift(height) { hold for 1 s }
procedure drop { hold for 1 s }
sequence night { hold for 1 s }
"""


def read(text: str):
    reporter = Reporter()
    header = read_header(parse(text, "x"), reporter)
    return header, [(m.place.line, m.name, m.message) for m in reporter.listed(["x"])]


def test_everything_finds_its_place():
    header, told = read(GOOD)
    assert told == []
    assert header.trap is not None
    assert header.trap.text == "a.trap.toml"
    assert [use.text for use in header.uses] == ["b.well"]
    verbs = [item.verb.text for item in header.definitions]
    assert verbs == ["let", "cloud", "pattern", "procedure", "procedure"]
    assert header.sequence is not None


@pytest.mark.parametrize(
    ("first", "message"),
    [
        ('trap "a.trap.toml"', "a file begins with its language version"),
        ("wellseq 2", "this version of the language is not known here; version 1 is"),
        ("wellseq 1 V", "this version of the language is not known here; version 1 is"),
        ('wellseq "1"', "`wellseq` is written: wellseq 1"),
        ("wellseq", "`wellseq` is written: wellseq 1"),
    ],
)
def test_the_version_comes_first_and_is_known(first, message):
    _, told = read(first + "\n")
    assert told == [(1, "syntax", message)]


def test_an_empty_file_is_told_how_to_begin():
    assert read("# nothing\n")[1] == [(1, "syntax", "this file says nothing")]


@pytest.mark.parametrize(
    ("line", "message"),
    [
        ("wellseq 1", "the language version stands once, before everything else"),
        ('trap "b.trap.toml"', "this file names its trap already (line 2)"),
        ("sequence other { hold for 1 s }", "this file has a sequence already (line 9)"),
        ("hold for 1 s", "`hold` stands inside a sequence or a procedure"),
        ("repeat 4 { hold for 1 s }", "`repeat` stands inside a sequence or a procedure"),
        ("seqence other { }", "`seqence` is nothing that a file can hold here"),
        ("E1 = 4 V", "this is nothing that a file can hold here"),
    ],
)
def test_what_stands_in_the_wrong_place(line, message):
    assert read(f"{GOOD}{line}\n")[1] == [(10, "syntax", message)]


@pytest.mark.parametrize(
    ("line", "verb"),
    [
        ("let wall", "let"),
        ("pattern { E1 = 1 V }", "pattern"),
        ("pattern cradle", "pattern"),
        ("procedure lift(height)", "procedure"),
        ("cloud plus", "cloud"),
        ("use b", "use"),
        ("sequence { hold for 1 s }", "sequence"),
        ("cloud plus is positron 4 V", "cloud"),
    ],
)
def test_a_wrong_shape_is_answered_with_a_right_one(line, verb):
    ((_, name, message),) = read(f"wellseq 1\n{line}\n")[1]
    assert (name, message) == ("syntax", f"`{verb}` is written: {EXAMPLES[verb]}")


def test_labels_and_allowances_belong_to_steps():
    _, told = read('wellseq 1\n"x" pattern cradle { E1 = 1 V } allow syntax because "y"\n')
    assert [message for _, _, message in told] == [
        "`pattern` takes no label",
        "`allow` stands after one step, not after `pattern`",
    ]


def test_a_word_of_the_language_where_a_name_belongs_is_named():
    ((_, _, message),) = read("wellseq 1\npattern beside E1 { E1 = 1 V }\n")[1]
    assert message.startswith("'beside' is a word of the language and is no part of this")
