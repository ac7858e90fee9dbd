"""`nest`: a ramp that brings a cloud around or beside another."""

from __future__ import annotations

from fractions import Fraction

import pytest

from wellseq.model.effects import Acted, Nested

PATTERN = "{ E1 = 3 V; others keep }"


@pytest.mark.parametrize("where", ["around", "beside"])
def test_it_ramps_and_says_which_two_meet(drawn, where):
    assert drawn(f"nest bunch {where} plus using {PATTERN} over 200 ms smoothly") == [
        ("ramp", {"E1": 3.0}, Fraction(1, 5), {"others_V": None, "smoothly": True}),
        ("note", Acted("bunch")),
        ("note", Acted("plus")),
        ("note", Nested("bunch", "plus")),
    ]


NEEDS_ONE = ("syntax", "nest", "`nest` needs one of `around` and `beside`, and a cloud")


@pytest.mark.parametrize(
    ("line", "expected"),
    [
        (f"nest bunch using {PATTERN} over 1 s", NEEDS_ONE),
        (f"nest bunch around plus beside cool_ones using {PATTERN} over 1 s", NEEDS_ONE),
        (
            f"nest bunch around bunch using {PATTERN} over 1 s",
            ("syntax", "nest", "'bunch' cannot be nested with itself"),
        ),
        (
            "nest bunch around plus over 1 s",
            ("syntax", "nest", "`nest` needs `using` and a pattern"),
        ),
    ],
)
def test_what_it_refuses(bench, line, expected):
    assert bench.refused(line) == [expected]


def test_an_unknown_host_is_not_also_a_missing_one(bench):
    refused = bench.refused(f"nest bunch around pluss using {PATTERN} over 1 s")
    assert [name for name, _, _ in refused] == ["unknown-name"]
