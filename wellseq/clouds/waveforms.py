"""Voltages of electrodes against time, as breakpoints with straight pieces between them.

An edge may be straight, or that of a single pole; a pole's exponential is cut into chords that stay
within a stated number of volts of it: a chord over a time h is off by at most h^2/8 max|V''|, so
those of an exponential with time constant tau are evenly spaced in e^{-t/(2 tau)}.
A real edge is declared from 10 % to 90 %: 0.8 of a straight edge, tau ln 9 of a single pole's.

Shapes: times (breakpoints,), volts (breakpoints, electrodes); a jump is two breakpoints at one
time.  Units: s, V.  Accuracy: tests/clouds/test_waveforms.py.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import ceil, expm1, log, sqrt
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from wellseq.fields.hermite import FloatArray

WHOLE_EDGE = 1.25
"""All of a straight edge over its 10 % to 90 % part."""
POLE_EDGE = log(9.0)
"""10 % to 90 % of a single pole's edge, in time constants."""
CHORD_V = 1e-2
"""Chords stay this close to an exponential."""
POLE_ENDS = 16.0
"""A single pole's edge is taken to be over after this many time constants at most."""
EdgeShape = Literal["straight", "pole"]
Track = tuple[FloatArray, FloatArray]
"""Times (n,) in s, never falling, and volts (n,) at them."""


@dataclass(frozen=True, slots=True)
class Waveforms:
    """What all electrodes do: `times_s` (n,), never falling, and `volts` (n, electrodes).

    Before the first and after the last breakpoint nothing moves.
    """

    times_s: FloatArray
    volts: FloatArray

    def at(self, time_s: float) -> FloatArray:
        """Volts (electrodes,) at a time in s; at a jump the volts after it."""
        index = int(np.searchsorted(self.times_s, time_s, side="right"))
        if index in (0, self.times_s.size):
            return np.asarray(self.volts[max(0, index - 1)])
        before, after = self.times_s[index - 1], self.times_s[index]
        share = (time_s - before) / (after - before)
        return np.asarray(self.volts[index - 1] * (1.0 - share) + self.volts[index] * share)

    def moving_s(self) -> tuple[float, float]:
        """From when to when anything moves, s; twice the first time when nothing does."""
        changed = np.flatnonzero(np.any(np.diff(self.volts, axis=0) != 0.0, axis=1))
        if not changed.size:
            return float(self.times_s[0]), float(self.times_s[0])
        return float(self.times_s[changed[0]]), float(self.times_s[changed[-1] + 1])

    def held_with(self, volts: float = 1.0) -> Waveforms:
        """The same with one more column that stands at `volts` V."""
        column = np.full((self.times_s.size, 1), volts)
        return Waveforms(self.times_s, np.hstack((self.volts, column)))


def still(volts: Sequence[float]) -> Waveforms:
    """Electrodes that stand at `volts` (electrodes,) V."""
    return Waveforms(np.zeros(1), np.array([volts], dtype=float))


def together(tracks: Sequence[Track]) -> Waveforms:
    """One set of breakpoints for all electrodes, from a track (s, V) for each, in order."""
    shared = np.unique(np.concatenate([times for times, _ in tracks]))
    jumps = [times[1:][np.diff(times) == 0.0] for times, _ in tracks]
    times_s = np.sort(np.concatenate((shared, np.unique(np.concatenate(jumps)))))
    after = np.concatenate(([False], np.diff(times_s) == 0.0))
    columns = [
        np.where(after, value_after(t, v, times_s), _before(t, v, times_s, after))
        for t, v in tracks
    ]
    return Waveforms(times_s, np.stack(columns, axis=1))


def value_after(times_s: FloatArray, volts: FloatArray, at_s: FloatArray) -> FloatArray:
    """Volts of a track at times (n,) in s; at a jump those after it."""
    index = np.searchsorted(times_s, at_s, side="right")
    return _between(times_s, volts, at_s, index)


def _before(
    times_s: FloatArray, volts: FloatArray, at_s: FloatArray, after: NDArray[np.bool_]
) -> FloatArray:
    """Volts at times; where two breakpoints share a time, those before the jump."""
    first = np.concatenate((after[1:], [False]))
    index = np.searchsorted(times_s, at_s, side="right")
    index = np.where(first, np.searchsorted(times_s, at_s, side="left"), index)
    return _between(times_s, volts, at_s, index)


def _between(
    times_s: FloatArray, volts: FloatArray, at_s: FloatArray, index: NDArray[np.intp]
) -> FloatArray:
    low = np.clip(index - 1, 0, times_s.size - 1)
    high = np.clip(index, 0, times_s.size - 1)
    length = times_s[high] - times_s[low]
    share = np.divide(at_s - times_s[low], length, out=np.zeros(at_s.size), where=length > 0)
    return np.asarray(volts[low] + np.clip(share, 0.0, 1.0) * (volts[high] - volts[low]))


def straight_edge(start_s: float, length_s: float, from_V: float, to_V: float) -> Track:
    """An edge from `start_s` that takes `length_s` from end to end; s and V."""
    return np.array([start_s, start_s + length_s]), np.array([from_V, to_V])


def declared_edge(
    start_s: float,
    edge_s: float,
    from_V: float,
    to_V: float,
    shape: EdgeShape = "straight",
    chord_V: float = CHORD_V,
) -> Track:
    """An edge of 10 % to 90 % time `edge_s`; all of a straight one lies in 1.25 `edge_s`, s and V.

    A single pole's edge has its half at the same instant, start_s + 0.625 edge_s, so that the two
    shapes differ in shape only; it begins 0.31 edge_s later and is cut into chords of `chord_V` V.
    """
    if shape == "straight":
        return straight_edge(start_s, WHOLE_EDGE * edge_s, from_V, to_V)
    tau_s = edge_s / POLE_EDGE
    begin_s = start_s + WHOLE_EDGE / 2 * edge_s - tau_s * log(2.0)
    swing = abs(to_V - from_V)
    over_s = tau_s * min(POLE_ENDS, log(max(swing / chord_V, 1.0)) + 1.0)
    after_s = chord_times(tau_s, swing, over_s, chord_V)
    left = np.exp(-after_s / tau_s)
    volts = to_V + (from_V - to_V) * left
    volts[-1] = to_V
    return begin_s + after_s, volts


def chord_times(
    tau_s: float, swing_V: float, over_s: float, chord_V: float = CHORD_V
) -> FloatArray:
    """Times (n,) from 0 to `over_s` at which chords of an exponential of `swing_V` meet it, s, V.

    Each chord is within `chord_V` V of swing * e^{-t/tau}.
    """
    if over_s <= 0.0:
        return np.zeros(1)
    gone = -expm1(-over_s / (2.0 * tau_s))
    count = max(1, ceil(2.0 * gone * sqrt(abs(swing_V) / (4.0 * chord_V))))
    times = -2.0 * tau_s * np.log1p(-gone * np.arange(count) / count)
    return np.append(times, over_s)


def through_pole(track: Track, tau_s: float, chord_V: float = CHORD_V) -> Track:
    """What a single pole of time constant tau (s) makes of a track (s, V) it has settled before.

    Exact at the breakpoints: behind a straight piece of slope c the output is V - c tau plus the
    distance before, times e^{-t/tau}.  What is left fades after the end.
    """
    if tau_s <= 0.0:
        return track
    times_s, volts = track
    out_t, out_v = [times_s[:1]], [volts[:1]]
    now = float(volts[0])
    for k in range(1, times_s.size):
        length = float(times_s[k] - times_s[k - 1])
        if length == 0.0:
            continue
        slope = float(volts[k] - volts[k - 1]) / length
        part_t, part_v = _relax(now, float(volts[k - 1]), slope, length, tau_s, chord_V)
        out_t.append(times_s[k - 1] + part_t[1:])
        out_v.append(part_v[1:])
        out_t[-1][-1] = times_s[k]
        now = float(part_v[-1])
    distance = abs(now - float(volts[-1]))
    if distance > chord_V / 10:
        over = tau_s * log(distance / (chord_V / 10))
        part_t, part_v = _relax(now, float(volts[-1]), 0.0, over, tau_s, chord_V)
        out_t.append(times_s[-1] + part_t[1:])
        out_v.append(part_v[1:])
    out_t.append(out_t[-1][-1:])
    out_v.append(volts[-1:])
    return np.concatenate(out_t), np.concatenate(out_v)


def _relax(
    now_V: float, wish_V: float, slope: float, length_s: float, tau_s: float, chord_V: float
) -> Track:
    """Output behind a pole while the input goes straight from `wish_V` with `slope` (V/s)."""
    distance = now_V - (wish_V - slope * tau_s)
    after = chord_times(tau_s, distance, length_s, chord_V)
    return after, wish_V + slope * (after - tau_s) + distance * np.exp(-after / tau_s)
