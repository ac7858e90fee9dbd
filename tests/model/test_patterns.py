"""Patterns: electrodes, spans, others; what cannot be one."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from wellseq.model.patterns import electrodes, settle
from wellseq.model.reporter import Reporter
from wellseq.model.scope import FileScope, Names
from wellseq.model.values import UNKNOWN
from wellseq.text.parse import parse


def read(trap, text: str):
    """A settled pattern and the mistakes in it."""
    reporter = Reporter()
    tree = parse(f"pattern x {{ {text} }}", "x")
    assert tree.mistakes == ()
    found = settle(tree.statements[0].block(), Names(FileScope("x", trap, reporter)))
    return found, [(m.name, m.message) for m in reporter.listed(["x"])]


def test_a_span_is_everything_between_along_the_axis(sandpit):
    found, told = read(sandpit, "E8..R4 = 3 V; others = -1 V")
    assert told == []
    assert found.volts == dict.fromkeys(("E8", "E9", "R6", "R4"), 3.0)
    assert found.others_V == -1.0


def test_others_keep_unless_they_are_given(sandpit):
    assert read(sandpit, "E1 = 1 V; others keep")[0].others_V is None
    assert read(sandpit, "E1 = 1 V")[0].others_V is None
    assert read(sandpit, "others = 0 V")[0].others_V == 0.0


@pytest.mark.parametrize(
    ("text", "told"),
    [
        ("E3..E1 = 1 V", ("unknown-name", "'E1' stands before 'E3' along the axis")),
        ("E1..E30 = 1 V", ("unknown-name", "'E30' is not known as an electrode")),
        ("E1..E3, E2 = 1 V", ("name-reused", "'E2' is given twice in this pattern")),
        ("others = 1 V; others keep", ("name-reused", "`others` is given twice in this pattern")),
        ("E1 = 1 V ± 1 V", ("unit-mismatch", "a voltage here has no ±")),
        ("E1 = 0", ("unit-mismatch", "an electrode needs a voltage (V), and this is 0")),
        ("hold for 1 s", ("syntax", "a pattern holds assignments only")),
        ("", ("syntax", "this pattern is empty")),
    ],
)
def test_what_is_wrong_with_a_pattern(sandpit, text, told):
    found, mistakes = read(sandpit, text)
    assert found is UNKNOWN
    assert mistakes == [told]


def test_every_mistake_of_a_pattern_is_told(sandpit):
    _, told = read(sandpit, "E1 = 3 s; Q1, Q2 = 1 V; E2 = 1 V; E2 = 2 V")
    assert [name for name, _ in told] == [
        "unit-mismatch",
        "unknown-name",
        "unknown-name",
        "name-reused",
    ]


@given(first=st.integers(1, 9), last=st.integers(1, 9))
def test_a_span_has_all_and_only_what_lies_between_its_ends(sandpit, first, last):
    reporter = Reporter()
    span = parse(f"pattern x {{ E{first}..E{last} = 1 V }}", "x").statements[0].block()
    found = electrodes(span.items[0].targets[0], Names(FileScope("x", sandpit, reporter)))
    if first <= last:
        assert found == tuple(f"E{n}" for n in range(first, last + 1))
    else:
        assert found is None
        assert len(reporter) == 1
