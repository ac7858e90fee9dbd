"""`set`: a digital line is put into one of its states."""

from __future__ import annotations

import pytest


def test_the_line_is_set(drawn):
    assert drawn("set valve open") == [("set_line", "valve", "open")]


@pytest.mark.parametrize("state", ["on", "off"])
def test_a_state_may_be_a_word_of_the_language(drawn, state):
    assert drawn(f"set bias {state}") == [("set_line", "bias", state)]


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        ("set valve ajar", ("unknown-name", "ajar", "the line 'valve' has no state 'ajar'")),
        ("set valve", ("syntax", "set", "`set` needs a state")),
        (
            "set E1 open",
            (
                "unknown-name",
                "E1",
                "a digital line is needed here, and 'E1' is an electrode of the trap",
            ),
        ),
        ("set gauge on", ("line-misused", "gauge", "'gauge' is an input and cannot be set")),
        ("set valve 5 V", ("unknown-name", "5 V", "the name of a state is needed here")),
    ],
)
def test_what_it_refuses(bench, line, expected):
    assert bench.refused(line) == [expected]
