"""`load`: a hold, at whose end the cloud is there."""

from __future__ import annotations

from fractions import Fraction

import pytest

from wellseq.model.effects import Placed


def test_it_holds_and_places(drawn):
    assert drawn("load plus at E6 for 20 s") == [
        ("hold", Fraction(20)),
        ("note", Placed("plus", "E6")),
    ]


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        ("load plus at E6", ("syntax", "load", "`load` needs `for` and a time")),
        ("load at E6 for 1 s", ("syntax", "load", "`load` needs a cloud")),
        (
            "load plus at valve for 1 s",
            (
                "unknown-name",
                "valve",
                "an electrode is needed here, and 'valve' is a digital line of the trap",
            ),
        ),
        (
            "load plus at E5, E6 for 1 s",
            ("syntax", "E6", "`at` takes one value or name, 2 are given"),
        ),
    ],
)
def test_what_it_refuses(bench, line, expected):
    assert bench.refused(line) == [expected]
