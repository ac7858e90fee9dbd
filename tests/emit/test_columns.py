"""Columns in characters, in cells and in UTF-16 code units, over any line of Unicode."""

from __future__ import annotations

import json

import pytest
from hypothesis import given
from hypothesis import strategies as st

from wellseq.base.finding import Finding, Verdict
from wellseq.base.place import Place
from wellseq.emit.examined import Examined
from wellseq.emit.excerpt import cells, character_column, display_column, utf16_column
from wellseq.emit.formats import report
from wellseq.text.parse import parse

# Anything that may stand on a line, with what goes wrong most often well represented.
LINES = st.text(
    st.one_of(
        st.sampled_from("µ\t𝔸é\u0301界🧲 ab\u2028\x0c"),
        st.characters(exclude_characters="\r\n", exclude_categories=["Cs"]),
    ),
    max_size=40,
)


def utf16_length(text: str) -> int:
    """An independent count: the length of the encoded text."""
    return len(text.encode("utf-16-le")) // 2


def shown_at(text: str) -> int:
    """An independent count of cells: one character after the other."""
    at = 0
    for character in text:
        at += cells(character, at)
    return at


@given(LINES, st.integers(0, 40))
def test_utf16_columns_are_lengths_of_the_encoded_text(line: str, at: int) -> None:
    at = min(at, len(line))
    column = utf16_column(line, at + 1)
    assert column == utf16_length(line[:at]) + 1
    assert character_column(line, column) == at + 1


@given(LINES, st.integers(1, 120))
def test_the_way_back_never_lands_inside_a_character(line: str, utf16: int) -> None:
    column = character_column(line, utf16)
    start = utf16_column(line, column)
    assert start <= utf16
    # What is less than a character before the position is the half of a pair.
    assert utf16 - start <= 1


@given(LINES, LINES)
def test_a_finding_stands_at_its_word_in_every_report(before: str, after: str) -> None:
    line = f"{before}cradl{after}"
    column = len(before) + 1
    place = Place("a.well", 2, column, 2, column + 5)
    finding = Finding("unknown-name", Verdict.FAIL, "what", place)
    thing = Examined("a.well", (finding,), ("syntax",), sources={"a.well": f"x\r\n{line}\r\n"})
    found = json.loads(report("json", [thing]))["findings"][0]["place"]
    assert (found["column"], found["end_column"]) == (column, column + 5)
    head = report("lines", [thing]).split(": error")[0]
    assert head == f"a.well:2:{shown_at(before) + 1}"
    run = json.loads(report("sarif", [thing]))["runs"][0]
    assert run["columnKind"] == "utf16CodeUnits"
    region = run["results"][0]["locations"][0]["physicalLocation"]["region"]
    encoded = line.encode("utf-16-le")
    written = encoded[2 * (region["startColumn"] - 1) : 2 * (region["endColumn"] - 1)]
    assert written.decode("utf-16-le") == "cradl"


def test_columns_that_are_not_converted_would_be_seen() -> None:
    # Companion: the three counts differ on a line such as these.
    line = "\tµ𝔸 界 cradl"
    at = line.index("cradl") + 1
    assert len({at, display_column(line, at), utf16_column(line, at)}) == 3


@pytest.mark.parametrize("mark", ["", "\ufeff"])
def test_a_byte_order_mark_moves_no_column(mark: str) -> None:
    (mistake,) = parse(f"{mark}cool ] pool\n", "a.well").mistakes
    assert (mistake.place.line, mistake.place.column) == (1, 6)


def test_lines_end_at_no_other_character() -> None:
    # U+2028 and the form feed end lines for some programs; for git and for us they do not.
    tree = parse('"\u2028" hold for 2 s\n\x0c 3 V\n', "a.well")
    assert {mistake.place.line for mistake in tree.mistakes} == {2}
    assert display_column("a\x0cb", 3) == 8
