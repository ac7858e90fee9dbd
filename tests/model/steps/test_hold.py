"""`hold`: time passes and nothing else happens."""

from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from wellseq.model.steps.hold import Hold


def test_it_lets_exactly_that_time_pass(drawn):
    assert drawn("hold for 20 us") == [("hold", Fraction(1, 50_000))]


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        ("hold", ("syntax", "hold", "`hold` needs `for` and a time")),
        (
            "hold for 0 s",
            ("unit-mismatch", "0 s", "`for` needs a value above zero, and this is 0 s"),
        ),
        (
            "hold for -1 s",
            ("unit-mismatch", "-1 s", "`for` needs a value above zero, and this is -1 s"),
        ),
        ("hold for 3 V", ("unit-mismatch", "3 V", "`for` needs a time (s), and this is 3 V")),
        ("hold for 5", ("unit-mismatch", "5", "`for` needs a time (s), and this is 5")),
        ("hold for 1 s for 2 s", ("syntax", "for", "`for` is said twice")),
        ("hold wall for 1 s", ("syntax", "wall", "`hold` does not take 'wall'")),
    ],
)
def test_what_it_refuses(bench, line, expected):
    assert bench.refused(line) == [expected]


def test_a_clause_of_another_step_is_answered_with_what_it_takes(bench):
    refused = bench.refused("hold for 1 s to 5 V")
    assert refused == [("syntax", "to", "`hold` does not take `to`; it takes: for")]


@given(st.fractions(min_value=Fraction(1, 10**9), max_value=10**6))
def test_the_time_stays_an_exact_fraction(duration):
    assert Hold.model_validate({"for_": duration}).for_ == duration
