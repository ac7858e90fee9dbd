"""`begin`: where clouds sit and outputs stand before the first row."""

from __future__ import annotations

import pytest

from wellseq.model.effects import Placed


def test_outputs_stand_and_the_cloud_sits(drawn):
    begin, note = drawn("begin with bunch in { E1 = 5 V; others = 1 V } at E3")
    assert begin == ("begin", {"E1": 5.0}, 1.0)
    assert note == ("note", Placed("bunch", "E3"))


def test_several_clouds_begin_in_one_and_the_same_pattern(bench):
    items = bench.items("begin with bunch in cradle at E3\nbegin with plus in cradle at E5")
    assert [item.verb for item in items] == ["begin", "begin"]
    refused = bench.refused(
        "begin with bunch in cradle at E3; begin with plus in { E1 = 1 V } at E5"
    )
    assert [(name, at) for name, at, _ in refused] == [
        ("syntax", "begin with plus in { E1 = 1 V } at E5")
    ]


def test_the_same_volts_are_the_same_pattern(bench):
    other = "{ E1 = 1 V + 2 V; others = 0 V }"
    bench.items(
        f"begin with bunch in {{ E1 = 3 V; others = 0 V }} at E3; begin with plus in {other} at E5"
    )


@pytest.mark.parametrize("before", ["hold for 1 s", "repeat 2 { hold for 1 s }", "hold for 0 s"])
def test_it_stands_before_everything_else(bench, before):
    refused = bench.refused(f"{before}; begin with bunch in cradle at E3")
    assert (
        "syntax",
        "begin with bunch in cradle at E3",
        "`begin` stands before everything else",
    ) in refused


def test_it_cannot_stand_in_a_lane(bench):
    refused = bench.refused("alongside { lane { begin with bunch in cradle at E3 } }")
    assert refused == [("syntax", "begin", "`begin` cannot stand in a lane")]


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        ("begin with bunch at E3", ("syntax", "begin", "`begin` needs `in` and a pattern")),
        (
            "begin with bunch in cradle at G9",
            ("unknown-name", "G9", "'G9' is not known as an electrode"),
        ),
        (
            "begin with cradle in cradle at E3",
            (
                "unknown-name",
                "cradle",
                "a cloud is needed here, and 'cradle' is a pattern (line 7)",
            ),
        ),
    ],
)
def test_what_it_refuses(bench, line, expected):
    assert bench.refused(line) == [expected]
