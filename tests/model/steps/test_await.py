"""`await`: a new block begins at a trigger, whose wait is bounded somewhere."""

from __future__ import annotations

from fractions import Fraction

import pytest


def test_the_wait_is_handed_on_as_it_was_written(drawn):
    assert drawn("await arrival") == [("await_trigger", "arrival", None)]
    assert drawn("await arrival within 2 min") == [("await_trigger", "arrival", Fraction(120))]
    assert drawn("await knock within 3 s") == [("await_trigger", "knock", Fraction(3))]


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        (
            "await knock",
            (
                "syntax",
                "knock",
                "`await` needs `within` and a time: the trap file gives no longest wait "
                "for 'knock'",
            ),
        ),
        ("await", ("syntax", "await", "`await` needs a trigger")),
        (
            "alongside { lane { await arrival } }",
            ("syntax", "await", "`await` cannot stand in a lane"),
        ),
        ("await knok within 1 s", ("unknown-name", "knok", "'knok' is not known as a trigger")),
    ],
)
def test_what_it_refuses(bench, line, expected):
    assert bench.refused(line) == [expected]
