"""`kick`: there and back, so fast that only the light species leaves."""

from __future__ import annotations

from fractions import Fraction

import pytest

from wellseq.model.effects import Acted, Kicked


def test_the_electrode_goes_there_and_back(drawn):
    assert drawn("kick cool_ones through E3 to 0 V for 300 ns keeping bunch") == [
        ("pulse", ("E3",), 0.0, Fraction(3, 10**7)),
        ("note", Acted("cool_ones")),
        ("note", Acted("bunch")),
        ("note", Kicked("cool_ones", "bunch", ("E3",))),
    ]


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        (
            "kick bunch through E3 to 0 V for 300 ns keeping bunch",
            ("syntax", "kick", "'bunch' cannot be both kicked out and kept"),
        ),
        (
            "kick bunch through E3 to 0 V for 300 ns",
            ("syntax", "kick", "`kick` needs `keeping` and a cloud"),
        ),
        (
            "kick bunch through E3 to 0 V over 300 ns keeping plus",
            ("syntax", "kick", "`kick` needs `for` and a time"),
        ),
    ],
)
def test_what_it_refuses(bench, line, expected):
    assert expected in bench.refused(line)
