"""Columns of characters become columns of a terminal."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from wellseq.base.place import Place
from wellseq.emit.excerpt import display_column, marker, shown_line, source_line


@pytest.mark.parametrize(
    ("line", "column", "display"),
    [
        ("ab", 2, 2),
        ("\tab", 2, 9),
        ("a\tb", 3, 9),
        ("µs x", 4, 4),
        ("阱 x", 2, 3),
        ("e\u0301x", 3, 2),
        ("\x1bx", 2, 7),
        ("ab", 5, 5),
    ],
)
def test_display_column(line: str, column: int, display: int) -> None:
    assert display_column(line, column) == display


@given(st.text(st.characters(exclude_characters="\r\n"), min_size=1), st.data())
def test_marker_lies_under_the_place(line: str, data: st.DataObject) -> None:
    column = data.draw(st.integers(1, len(line)))
    under = marker(line, Place("a", 1, column, 1, column + 1))
    assert len(under) - len(under.lstrip()) == display_column(line, column) - 1
    assert under.strip() == "~" * len(under.strip())


@given(st.text())
def test_a_shown_line_cannot_steer_a_terminal(line: str) -> None:
    assert all(sign.isprintable() or sign == " " for sign in shown_line(line) if ord(sign) < 160)


def test_lines_end_at_lf_crlf_and_cr_only() -> None:
    sources = {"a": "one\r\ntwo\rthree\u2028still three\nfour"}
    assert source_line(sources, Place("a", 3)) == "three\u2028still three"
    assert source_line(sources, Place("a", 4)) == "four"
    assert source_line(sources, Place("a", 5)) is None
    assert source_line(sources, Place("b", 1)) is None
