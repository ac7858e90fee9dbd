"""Names cannot act: not in Markdown, not in a spreadsheet, not as a file name."""

from __future__ import annotations

import csv
import io

import pytest
from hypothesis import given
from hypothesis import strategies as st

from wellseq.emit.escape import csv_text, file_name, markdown


@pytest.mark.parametrize("name", ["=1+1", "+1", "-1", "@x", "\tx"])
def test_no_cell_is_taken_for_a_formula(name: str) -> None:
    (row,) = csv.reader(io.StringIO(csv_text(name), newline=""))
    assert not row[0].startswith(("=", "+", "-", "@", "\t"))


@given(st.text(st.characters(exclude_categories=["Cc", "Cf", "Cs"])))
def test_a_cell_reads_back_by_rfc_4180(text: str) -> None:
    rows = list(csv.reader(io.StringIO(f"{csv_text(text)},x", newline="")))
    assert rows == [[text if not text.startswith(("=", "+", "-", "@")) else f"'{text}", "x"]]


@pytest.mark.parametrize("sign", ["|", "<", "*", "`", "[", "]", "_", "\\", "#", "&", "~"])
def test_signs_that_act_in_markdown_are_escaped(sign: str) -> None:
    assert markdown(f"a{sign}b") == f"a\\{sign}b"


def test_markdown_stays_on_one_line_and_plain_names_stay_as_they_are() -> None:
    assert markdown("two\n\n# lines") == "two \\# lines"
    assert markdown("well-too-shallow") == "well-too-shallow"
    assert markdown("- item") == "\\- item"


@given(st.text())
def test_file_names_are_plain(name: str) -> None:
    made = file_name(name)
    assert made
    assert len(made) <= 40
    assert all(sign.isascii() and (sign.isalnum() or sign in "_-") for sign in made)
