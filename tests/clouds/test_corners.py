"""Corners of intervals against a dense scan."""

from __future__ import annotations

import math
from dataclasses import dataclass

from hypothesis import given
from hypothesis import strategies as st

from wellseq.clouds.corners import all_reasons, corners, spanned
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside, around


def ratio(a: float, b: float, power: float) -> float:
    return math.exp(power * a) / b


@given(st.floats(-1, 1), st.floats(0.5, 2), st.floats(0, 0.4), st.floats(0, 1))
def test_a_scan_stays_between_the_corners(a: float, b: float, half: float, share: float) -> None:
    low, best, high = corners(
        ratio, rising={"a": around(a, half)}, falling={"b": around(b, half)}, fixed={"power": 2.0}
    )
    assert low <= best <= high
    inside = ratio(a - half + 2 * half * share, b - half + 2 * half * (1 - share), 2.0)
    assert low * (1 - 1e-12) <= inside <= high * (1 + 1e-12)


def test_a_wrong_claim_is_seen() -> None:
    claimed = {"a": around(0.0, 0.4), "b": around(1.0, 0.4)}
    low, _, high = corners(ratio, rising=claimed, falling={}, fixed={"power": 2.0})
    assert not low <= ratio(0.4, 0.6, 2.0) <= high


def test_one_unknown_leaves_no_figure() -> None:
    assert spanned(1.0, (2.0, 0.5)) == Figure(1.0, 0.5, 2.0)
    assert spanned(1.0, (math.inf,)) == Figure(1.0, 1.0, math.inf)
    assert not spanned(1.0, (math.inf,)).known
    assert spanned(1.0, (math.nan,)) is NOT_KNOWN


def test_each_reason_once_in_order() -> None:
    @dataclass
    class Answer:
        outside: tuple[Outside, ...]

    one, same = Outside("m", "eps", 0.4, 0.3), Outside("m", "eps", 0.5, 0.3)
    other = Outside("m", "eta", 3.0, 4.0)
    assert all_reasons([Answer((one,)), Answer((other, same)), Answer(())]) == (one, other)
