"""`ramp`: electrodes go to a pattern with one progress."""

from __future__ import annotations

from fractions import Fraction

import pytest

S = Fraction(1, 50)


def test_a_pattern_in_place_moves_what_it_names(drawn):
    assert drawn("ramp { E2, E4 = wall; E5 = -1 V } over 20 ms") == [
        ("ramp", {"E2": 90.0, "E4": 90.0, "E5": -1.0}, S, {"others_V": None, "smoothly": False})
    ]


def test_a_named_pattern_says_what_the_others_do(drawn):
    ((name, volts, duration, more),) = drawn("ramp cradle over 20 ms smoothly")
    assert (name, duration) == ("ramp", S)
    assert volts == {"E1": -90.0, "E9": -90.0, **{f"E{n}": 10.0 for n in range(2, 9)}}
    assert more == {"others_V": 0.0, "smoothly": True}


def test_others_keep_is_the_same_as_not_naming_them(bench):
    kept = bench.step("ramp { E1 = 1 V; others keep } over 1 s")
    assert kept == bench.step("ramp { E1 = 1 V } over 1 s")
    assert kept != bench.step("ramp { E1 = 1 V; others = 0 V } over 1 s")


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        ("ramp cradle", ("syntax", "ramp", "`ramp` needs `over` and a time")),
        ("ramp over 1 s", ("syntax", "ramp", "`ramp` needs a pattern")),
        ("ramp cradel over 1 s", ("unknown-name", "cradel", "'cradel' is not known as a pattern")),
        (
            "ramp cradle over 1 s smothly",
            ("syntax", "smothly", "`ramp` does not take 'smothly'"),
        ),
        (
            "ramp cradle over 1 s smoothly smoothly",
            ("syntax", "smoothly", "`smoothly` is said twice"),
        ),
        (
            "ramp { E1 = 3 s } over 1 s",
            ("unit-mismatch", "3 s", "an electrode needs a voltage (V), and this is 3 s"),
        ),
        (
            "ramp wall over 1 s",
            ("unknown-name", "wall", "a pattern is needed here, and 'wall' is a let (line 3)"),
        ),
    ],
)
def test_what_it_refuses(bench, line, expected):
    assert bench.refused(line) == [expected]


def test_everything_wrong_in_it_is_told_at_once(bench):
    refused = bench.refused("ramp { E1 = 3 s; Q5 = 1 V } over 4 V to 3 V")
    assert [(name, at) for name, at, _ in refused] == [
        ("unit-mismatch", "3 s"),
        ("unknown-name", "Q5"),
        ("unit-mismatch", "4 V"),
        ("syntax", "to"),
    ]
