"""Thinning: few points, every one of the curve's own, no extreme lost."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from wellseq.emit.pictures.thinning import keep

steps = st.lists(st.floats(0, 1), min_size=1, max_size=300)
volts = st.floats(-1e4, 1e4) | st.just(float("nan"))


@settings(max_examples=150, deadline=None)
@given(steps, st.data(), st.integers(1, 12))
def test_extremes_of_every_stretch_stay(gaps, data, buckets) -> None:
    place = np.cumsum(np.array(gaps))
    value = np.array(data.draw(st.lists(volts, min_size=len(gaps), max_size=len(gaps))))
    low, high = float(place[0]), float(place[-1])
    kept = keep(place, value, low, high, buckets)
    assert np.all(np.diff(kept) > 0)
    assert kept[0] == 0
    assert kept[-1] == len(place) - 1
    if len(place) <= 4 * buckets:
        assert len(kept) == len(place)
        return
    width = (high - low) / buckets or 1.0
    bucket = np.clip(np.floor((place - low) / width), 0, buckets - 1)
    for number in np.unique(bucket):
        whole, left = value[bucket == number], value[kept][bucket[kept] == number]
        if np.isfinite(whole).any():
            assert np.nanmin(whole) == np.nanmin(left)
            assert np.nanmax(whole) == np.nanmax(left)
        assert np.isnan(whole).any() == np.isnan(left).any()
    odd = int(np.count_nonzero(np.diff(np.isnan(value))))
    assert len(kept) <= 4 * buckets + 2 * odd


def test_taking_every_tenth_point_would_lose_an_extreme() -> None:
    place = np.arange(1000.0)
    value = np.zeros(1000)
    value[503] = 7.0
    assert value[::10].max() == 0.0
    assert value[keep(place, value, 0.0, 999.0, 20)].max() == 7.0


def test_a_hundred_thousand_points_become_few() -> None:
    place = np.linspace(0, 1e5, 100_000)
    value = np.random.default_rng(5).normal(size=100_000)
    kept = keep(place, value, 0.0, 1e5, 400)
    assert len(kept) <= 1600
    assert value[kept].min() == value.min()
    assert value[kept].max() == value.max()


def test_lengths_that_differ_and_no_bucket_are_refused() -> None:
    with pytest.raises(ValueError, match="one value"):
        keep(np.zeros(3), np.zeros(2), 0, 1, 4)
    with pytest.raises(ValueError, match="bucket"):
        keep(np.zeros(3), np.zeros(3), 0, 1, 0)
