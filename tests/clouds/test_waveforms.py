"""Voltages against time: breakpoints, jumps, edges of stated shape, what a single pole makes."""

from __future__ import annotations

from math import exp, log

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from wellseq.clouds.waveforms import (
    Track,
    Waveforms,
    chord_times,
    declared_edge,
    still,
    straight_edge,
    through_pole,
    together,
)


def at(track: Track, time_s: float) -> float:
    return float(np.interp(time_s, *track))


def test_straight_between_breakpoints_and_still_outside() -> None:
    waves = Waveforms(np.array([1.0, 3.0]), np.array([[0.0, 5.0], [4.0, -5.0]]))
    assert waves.at(0.0).tolist() == [0.0, 5.0]
    assert waves.at(1.5).tolist() == [1.0, 2.5]
    assert waves.at(9.0).tolist() == [4.0, -5.0]
    assert waves.moving_s() == (1.0, 3.0)
    assert still([1.0, 2.0]).moving_s() == (0.0, 0.0)
    assert waves.held_with(1.0).at(1.5).tolist() == [1.0, 2.5, 1.0]


def test_a_jump_is_seen_from_both_sides() -> None:
    jump = (np.array([0.0, 1.0, 1.0, 2.0]), np.array([3.0, 3.0, 7.0, 7.0]))
    slope = (np.array([0.0, 2.0]), np.array([0.0, 2.0]))
    waves = together([jump, slope])
    assert waves.at(1.0 - 1e-12)[0] == pytest.approx(3.0)
    assert waves.at(1.0).tolist() == [7.0, 1.0]
    assert waves.times_s.tolist() == [0.0, 1.0, 1.0, 2.0]
    assert waves.volts[:, 1].tolist() == [0.0, 1.0, 1.0, 2.0]


def test_a_straight_edge_is_ten_to_ninety_in_the_declared_time() -> None:
    track = declared_edge(2e-6, 80e-9, 0.0, 100.0)
    assert track[0].tolist() == pytest.approx([2e-6, 2.1e-6])
    ten, ninety = (float(np.interp(level, track[1], track[0])) for level in (10.0, 90.0))
    assert ninety - ten == pytest.approx(80e-9)
    assert straight_edge(0.0, 1e-9, 1.0, 2.0)[1].tolist() == [1.0, 2.0]


def test_a_pole_s_edge_is_ten_to_ninety_in_the_declared_time_and_half_over_with_it() -> None:
    # 10 % to 90 % of a single pole is ln 9 time constants (derived).
    track = declared_edge(2e-6, 80e-9, 0.0, 100.0, "pole", 1e-4)
    ten, half, ninety = (
        float(np.interp(level, track[1], track[0])) for level in (10.0, 50.0, 90.0)
    )
    assert ninety - ten == pytest.approx(80e-9, rel=1e-4)
    assert half == pytest.approx(2.05e-6, rel=1e-4)
    assert track[1][-1] == 100.0
    slow = declared_edge(2e-6, 81e-9, 0.0, 100.0, "pole", 1e-4)
    assert float(np.interp(90.0, slow[1], slow[0])) != pytest.approx(ninety, rel=1e-4)


@settings(max_examples=60, deadline=None)
@given(swing=st.floats(1e-3, 5e3), over=st.floats(0.01, 60.0), chord=st.floats(1e-4, 1.0))
def test_chords_stay_as_close_as_they_say(swing: float, over: float, chord: float) -> None:
    times = chord_times(1.0, swing, over, chord)
    assert times[0] == 0.0
    assert times[-1] == over
    assert (np.diff(times) > 0.0).all()
    fine = (times[:-1, None] + np.diff(times)[:, None] * np.linspace(0, 1, 33)).ravel()
    wrong = np.abs(np.interp(fine, times, swing * np.exp(-times)) - swing * np.exp(-fine))
    assert wrong.max() <= chord * 1.1


def test_half_as_many_chords_would_not_do() -> None:
    times = chord_times(1.0, 100.0, 30.0, 0.01)[::2]
    fine = np.linspace(0.0, times[-1], 200_001)
    wrong = np.interp(fine, times, 100.0 * np.exp(-times)) - 100.0 * np.exp(-fine)
    assert np.abs(wrong).max() > 0.0105


def test_behind_a_pole_a_ramp_lags_by_slope_times_tau() -> None:
    # V(t) = s (t - tau (1 - e^(-t/tau))), exact response of a single pole to a ramp (derived).
    ramp = (np.array([0.0, 20.0]), np.array([0.0, 40.0]))
    out = through_pole(ramp, 3.0, 1e-3)
    for time in (0.5, 2.0, 7.0, 19.0):
        exact = 2.0 * (time - 3.0 * (1.0 - exp(-time / 3.0)))
        assert at(out, time) == pytest.approx(exact, abs=1.5e-3)
        assert at(out, time) != pytest.approx(exact + 0.004, abs=1.5e-3)
    left = 2.0 * 3.0 * (1.0 - exp(-20.0 / 3.0))
    assert at(out, 20.0 + 3.0 * log(2.0)) == pytest.approx(40.0 - left / 2.0, abs=1.5e-3)
    assert out[1][-1] == 40.0


def test_behind_a_pole_a_jump_fades() -> None:
    jump = (np.array([0.0, 1.0, 1.0, 30.0]), np.array([5.0, 5.0, -5.0, -5.0]))
    out = through_pole(jump, 2.0)
    assert at(out, 0.9) == 5.0
    assert at(out, 1.0 + 2.0 * log(4.0)) == pytest.approx(-2.5, abs=0.02)
    assert through_pole(jump, 0.0) is jump


@settings(max_examples=40, deadline=None)
@given(
    levels=st.lists(st.floats(-100, 100), min_size=3, max_size=8),
    tau=st.floats(0.01, 5.0),
)
def test_a_pole_never_overshoots_and_forgets(levels: list[float], tau: float) -> None:
    track = (np.arange(len(levels), dtype=float), np.array(levels))
    out = through_pole(track, tau)
    assert (np.diff(out[0]) >= 0.0).all()
    assert out[1].min() >= min(levels) - 1e-9
    assert out[1].max() <= max(levels) + 1e-9
    assert out[1][-1] == levels[-1]
