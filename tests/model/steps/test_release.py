"""`release`: the well is opened on purpose."""

from __future__ import annotations

from fractions import Fraction

import pytest

from wellseq.model.effects import Acted, Released


def test_the_electrodes_go_straight_there_and_the_cloud_goes(drawn):
    assert drawn("release bunch through E8, E9 to 0 V over 10 ms") == [
        ("ramp", {"E8": 0.0, "E9": 0.0}, Fraction(1, 100)),
        ("note", Acted("bunch")),
        ("note", Released("bunch", ("E8", "E9"))),
    ]


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        (
            "release bunch through E9 over 1 s",
            ("syntax", "release", "`release` needs `to` and a voltage"),
        ),
        (
            "release bunch through plus to 0 V over 1 s",
            ("unknown-name", "plus", "an electrode is needed here, and 'plus' is a cloud (line 6)"),
        ),
        (
            "release bunch through E9 to 0 V over 1 s smoothly",
            ("syntax", "smoothly", "`release` does not take 'smoothly'"),
        ),
    ],
)
def test_what_it_refuses(bench, line, expected):
    assert bench.refused(line) == [expected]
