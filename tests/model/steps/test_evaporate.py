"""`evaporate`: the depth over one side is lowered."""

from __future__ import annotations

from fractions import Fraction

import pytest

from wellseq.model.effects import Acted, Evaporated


def test_it_lowers_the_depth_and_says_so(drawn):
    assert drawn("evaporate bunch through E9 to 60 mV over 40 s") == [
        ("lower_depth", "bunch", ("E9",), 0.06, Fraction(40), {"exponentially": False}),
        ("note", Acted("bunch")),
        ("note", Evaporated("bunch", ("E9",), 0.06)),
    ]


def test_several_electrodes_move_together_and_the_path_may_be_exponential(drawn):
    lower = drawn("evaporate bunch through E8..E9 to 1 V over 1 s exponentially")[0]
    assert lower == (
        "lower_depth",
        "bunch",
        ("E8", "E9"),
        1.0,
        Fraction(1),
        {"exponentially": True},
    )


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        (
            "evaporate bunch through E9 to 0 V over 1 s",
            ("unit-mismatch", "0 V", "`to` needs a value above zero, and this is 0 V"),
        ),
        (
            "evaporate bunch through E9 to 60 meV over 1 s",
            ("unit-mismatch", "60 meV", "`to` needs a voltage (V), and this is 0.06 eV"),
        ),
        (
            "evaporate bunch to 1 V over 1 s",
            ("syntax", "evaporate", "`evaporate` needs `through` and one or more electrodes"),
        ),
        (
            "evaporate bunch through E9, E9 to 1 V over 1 s",
            ("name-reused", "E9", "'E9' is given twice here"),
        ),
    ],
)
def test_what_it_refuses(bench, line, expected):
    assert bench.refused(line) == [expected]
