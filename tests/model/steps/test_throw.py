"""`throw`: switches change to one of their levels."""

from __future__ import annotations

import pytest


def test_to_fixed_volts_or_to_the_converter_behind(drawn):
    assert drawn("throw G2 to -4.5 kV") == [("throw", ("G2",), -4500.0)]
    assert drawn("throw G1, G2 to behind") == [("throw", ("G1", "G2"), "behind")]


def test_the_level_may_be_a_let(bench):
    (item,) = bench.items("throw G1 to -hv", "let hv = 4.5 kV")
    assert item.step.to.value == -4500.0


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        (
            "throw G1 to 5 V",
            ("voltage-out-of-range", "5 V", "the switch of 'G1' has no level 5 V"),
        ),
        (
            "throw E1 to -4.5 kV",
            (
                "voltage-out-of-range",
                "E1",
                "'E1' hangs on the converter 'out_E1', and only a switch is thrown",
            ),
        ),
        (
            "throw G1 to E1",
            (
                "unknown-name",
                "E1",
                "an output is needed here, and 'E1' is an electrode of the trap",
            ),
        ),
        ("throw G1 to behnd", ("unknown-name", "behnd", "'behnd' is not known as an output")),
        (
            "throw G1 to 4 s",
            ("unit-mismatch", "4 s", "`to` needs a voltage (V), and this is 4 s"),
        ),
        ("throw G1", ("syntax", "throw", "`throw` needs `to` and a voltage or a converter output")),
        (
            "throw G1 to 5 V ± 1 V",
            ("unit-mismatch", "5 V ± 1 V", "`to` takes a value without ±"),
        ),
    ],
)
def test_what_it_refuses(bench, line, expected):
    assert bench.refused(line) == [expected]


def test_the_levels_that_there_are_are_named(bench):
    built = bench.build(bench.whole("throw G1 to 5 V"))
    (mistake,) = [m for m in built.mistakes if m.name == "voltage-out-of-range"]
    assert mistake.hint == "levels of hv1: behind, -4500 V"
