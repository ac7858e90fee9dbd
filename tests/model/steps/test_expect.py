"""`expect`: a line, also one that can only be read, must be in a state."""

from __future__ import annotations

import pytest


@pytest.mark.parametrize(("line", "state"), [("valve", "closed"), ("gauge", "on")])
def test_the_state_is_declared(drawn, line, state):
    assert drawn(f"expect {line} {state}") == [("expect_line", line, state)]


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        ("expect gauge full", ("unknown-name", "full", "the line 'gauge' has no state 'full'")),
        ("expect gage on", ("unknown-name", "gage", "'gage' is not known as a digital line")),
        (
            "expect valve open for 2 s",
            ("syntax", "for", "`expect` does not take `for`; it takes: nothing after its subject"),
        ),
    ],
)
def test_what_it_refuses(bench, line, expected):
    assert bench.refused(line) == [expected]
