"""Wells along the axis: parabolas are exact, slopes without a barrier have no depth."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from wellseq.clouds.axis import axis_well, climb, polished

Z_M = np.linspace(-0.05, 0.05, 401)


def cosine(depth_V: float = 3.0, shift_m: float = 0.0, period_m: float = 0.06) -> np.ndarray:
    return -depth_V / 2 * np.cos(2 * np.pi * (Z_M - shift_m) / period_m)


@given(st.floats(-0.008, 0.008), st.floats(0.1, 100.0))
def test_a_cosine_well(shift_m: float, depth_V: float) -> None:
    well = axis_well(Z_M, cosine(depth_V, shift_m), 1, (shift_m - 0.03, shift_m + 0.03))
    assert well.depth_eV == pytest.approx(depth_V, rel=1e-5)
    assert well.bottom_m == pytest.approx(shift_m, abs=1e-6)
    assert [well.left_m, well.right_m] == pytest.approx([shift_m - 0.03, shift_m + 0.03], abs=1e-6)


@given(st.floats(0.01, 0.99))
def test_ends_of_a_cosine(share: float) -> None:
    well = axis_well(Z_M, cosine(), 1, (-0.03, 0.03))
    left, right = well.ends_m()(share * 3.0)
    exact = 0.06 / (2 * np.pi) * math.acos(1 - 2 * share)
    assert [left, right] == pytest.approx([-exact, exact], abs=2e-5)
    assert well.ends_m()(min(0.999, 1.02 * share) * 3.0) != pytest.approx((left, right), abs=1e-6)


def test_charge_turns_and_scales_the_well() -> None:
    upside = axis_well(Z_M, -cosine(), -2, (-0.03, 0.03))
    assert upside.depth_eV == pytest.approx(6.0, rel=1e-5)


def test_ends_near_the_bottom_and_beyond_the_top() -> None:
    well = axis_well(Z_M, cosine(), 1, (-0.03, 0.03))
    narrow = well.ends_m()(1e-9)
    assert narrow[0] < 0 < narrow[1] < 1e-5
    assert all(math.isnan(place) for place in well.ends_m()(3.1))
    # Exactly the top, between two samples.
    assert well.ends_m()(well.depth_eV) == pytest.approx((-0.03, 0.03), abs=3e-4)


def test_a_slope_has_no_depth() -> None:
    assert axis_well(Z_M, Z_M, 1, (-0.02, 0.02)).depth_eV == 0.0
    assert axis_well(Z_M, -Z_M, 1, (-0.02, 0.02)).depth_eV == 0.0


def test_the_barrier_is_reached_from_both_sides() -> None:
    for span in ((-0.027, 0.026), (-0.034, 0.033)):
        well = axis_well(Z_M, cosine(), 1, span)
        assert well.depth_eV == pytest.approx(3.0, rel=1e-5)


def test_climbing_stops_at_tops_and_ends() -> None:
    values = np.array([0.0, 1.0, 2.0, 1.0, 3.0])
    assert [climb(values, index) for index in range(5)] == [2, 2, 2, 4, 4]
    assert polished(np.arange(5.0), values, 4) == (4.0, 3.0)


def test_nonsense_is_refused() -> None:
    with pytest.raises(ValueError, match="three samples"):
        axis_well(Z_M, cosine(), 1, (0.0, 1e-4))
    with pytest.raises(ValueError, match="not a number"):
        axis_well(Z_M, np.full(Z_M.size, np.nan), 1, (-0.03, 0.03))
