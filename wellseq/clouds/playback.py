"""Shipped rows → what the electrodes really do: breakpoints of volts for flights.

Codes become volts by the calibration.  A card that holds jumps from code to code as fast as its
slew allows, one that draws lines goes straight from row to row; then comes the output's delay and
its low-pass, a single pole.  A switch goes from level to level on its declared edge, beginning its
delay after the command; a level that passes a converter through follows that converter.

Everything is taken to have settled before the block begins.  Noise and the spreads of calibration
are not played.

Units: s of the block's own time, V.
Accuracy: chords within 10 mV, or 1e-4 of a switch's swing, of an exponential,
tests/clouds/test_playback.py.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from wellseq.clouds.waveforms import (
    CHORD_V,
    EdgeShape,
    Track,
    Waveforms,
    declared_edge,
    through_pole,
    together,
    value_after,
)
from wellseq.fields.hermite import FloatArray
from wellseq.model.trap import Converter, Switch, Trap
from wellseq.timeline.shipped import ShippedBlock

CHORD_SHARE = 1e-4
"""Chords of a switch's exponential need not be closer than this share of its swing."""
SETTLED_TIME_CONSTANTS = 40.0
"""What was commanded so long before is forgotten."""


def waveforms(
    trap: Trap,
    shipped_block: ShippedBlock,
    start_s: float,
    end_s: float,
    edge_shape: EdgeShape = "straight",
    chord_V: float = CHORD_V,
) -> Waveforms:
    """Volts of all electrodes, in order along the axis, from `start_s` to `end_s` of the block (s).

    `edge_shape` is that of the switches; chords of exponentials stay within `chord_V` (V).
    Raises ValueError when the end is not after the start.
    """
    if not end_s > start_s:
        raise ValueError("the end must come after the start")
    player = _Player(trap, shipped_block, start_s, end_s, edge_shape, chord_V)
    behind = player.converters()
    tracks: dict[str, Track] = {}
    for electrode in trap.electrodes:
        if electrode.output not in tracks:
            output = trap.output(electrode.output)
            tracks[electrode.output] = (
                player.switched(output, behind)
                if isinstance(output, Switch)
                else behind[output.name]
            )
    return together([tracks[electrode.output] for electrode in trap.electrodes])


class _Player:
    """One block being played between two times."""

    def __init__(
        self,
        trap: Trap,
        shipped: ShippedBlock,
        start_s: float,
        end_s: float,
        edge_shape: EdgeShape,
        chord_V: float,
    ) -> None:
        self.trap, self.shipped = trap, shipped
        self.start_s, self.end_s = start_s, end_s
        self.edge_shape: EdgeShape = edge_shape
        self.chord_V = chord_V
        self.rows_s = shipped.ticks * float(shipped.tick_s)

    def converters(self) -> dict[str, Track]:
        """The track of every converter at the electrode."""
        found = {}
        for column, name in enumerate(self.shipped.block.volts):
            output = self.trap.output(name)
            assert isinstance(output, Converter)
            found[name] = self._converter(output, self.shipped.codes[:, column])
        return found

    def _converter(self, output: Converter, codes: NDArray[np.int64]) -> Track:
        tau_s, delay_s = float(output.time_constant_s), float(output.delay_s)
        slewing_s = (output.reach_V[1] - output.reach_V[0]) / output.slew_V_per_s
        before_s = self.start_s - delay_s - SETTLED_TIME_CONSTANTS * tau_s - slewing_s
        first = max(int(np.searchsorted(self.rows_s, before_s, side="right")) - 1, 0)
        last = int(np.searchsorted(self.rows_s, self.end_s - delay_s, side="left")) + 1
        rows_s = np.asarray(self.rows_s[first:last] + delay_s, dtype=float)
        scale = output.gain * output.code_V
        volts = np.asarray(
            output.electrode_V(output.low_V) + scale * codes[first:last], dtype=float
        )
        if output.between_rows == "hold":
            track = slewed(rows_s, volts, output.slew_V_per_s)
        else:
            track = _corners(rows_s, volts)
        return cut(through_pole(track, tau_s, self.chord_V), self.start_s, self.end_s)

    def switched(self, output: Switch, behind: dict[str, Track]) -> Track:
        """The track of a switch: from its first level (0) to its second (1) along its edges."""
        share = self._share(output)
        ends = [self._level(level, behind) for level in output.levels]
        mixed = together([share, *ends])
        times, volts = _finer(mixed)
        return times, volts[:, 1] * (1.0 - volts[:, 0]) + volts[:, 2] * volts[:, 0]

    def _level(self, level: float | str, behind: dict[str, Track]) -> Track:
        if isinstance(level, str):
            return behind[level]
        return np.array([self.start_s, self.end_s]), np.array([level, level])

    def _share(self, output: Switch) -> Track:
        """How far the switch is from its first level to its second, 0 to 1."""
        column = list(self.shipped.block.levels).index(output.name)
        levels = self.shipped.levels[:, column]
        fixed = [level for level in output.levels if not isinstance(level, str)]
        swing = max([abs(level) for level in fixed] + [1.0]) * 2.0
        now = float(self.shipped.block.levels[output.name])
        times, share = np.array([min(self.rows_s[0], self.start_s) - 1.0]), np.array([now])
        for row in np.flatnonzero(np.diff(levels, prepend=int(now))):
            begin_s = float(self.rows_s[row]) + float(output.delay_s)
            edge_s = float(output.edge_s)
            now = float(value_after(times, share, np.array([begin_s]))[0])
            chord = max(self.chord_V / swing, CHORD_SHARE)
            edge = declared_edge(begin_s, edge_s, now, float(levels[row]), self.edge_shape, chord)
            # A switch thrown back before its edge was over goes back from where it is.
            kept = times < edge[0][0]
            now = float(value_after(times, share, edge[0][:1])[0])
            edge[1][0] = now
            times = np.concatenate((times[kept], edge[0]))
            share = np.concatenate((share[kept], edge[1]))
        return cut((times, share), self.start_s, self.end_s)


def slewed(rows_s: FloatArray, volts: FloatArray, slew_V_per_s: float) -> Track:
    """A card that holds: at each row (n,) s it makes for new volts (n,) at its slew, V/s."""
    times, values = [float(rows_s[0])], [float(volts[0])]
    changed = np.flatnonzero(np.diff(volts)) + 1
    ends = np.append(rows_s[changed[1:]], np.inf) if changed.size else np.empty(0)
    for row, end_s in zip(changed, ends, strict=True):
        at_s, now, wish = float(rows_s[row]), values[-1], float(volts[row])
        if at_s > times[-1]:
            times.append(at_s)
            values.append(now)
        there_s = at_s + abs(wish - now) / slew_V_per_s
        if there_s > end_s:
            wish = now + (wish - now) * (float(end_s) - at_s) / (there_s - at_s)
            there_s = float(end_s)
        times.append(there_s)
        values.append(wish)
    return np.array(times), np.array(values)


def _corners(rows_s: FloatArray, volts: FloatArray) -> Track:
    """A card that draws lines: its rows, without those on a level stretch."""
    inner = (np.diff(volts[:-1]) != 0.0) | (np.diff(volts[1:]) != 0.0)
    kept = np.concatenate(([True], inner, [True]))[: rows_s.size]
    return rows_s[kept], volts[kept]


def cut(track: Track, start_s: float, end_s: float) -> Track:
    """The part of a track (s, V) from start to end, with a breakpoint at both."""
    times, volts = track
    inner = (times > start_s) & (times < end_s)
    ends = value_after(times, volts, np.array([start_s, end_s]))
    return (
        np.concatenate(([start_s], times[inner], [end_s])),
        np.concatenate((ends[:1], volts[inner], ends[1:])),
    )


def _finer(mixed: Waveforms) -> Track:
    """Breakpoints, with seven more wherever both the switch and a level move; and all columns."""
    times, volts = mixed.times_s, mixed.volts
    moved = np.diff(volts, axis=0) != 0.0
    both = moved[:, 0] & (moved[:, 1] | moved[:, 2]) & (np.diff(times) > 0.0)
    share = np.arange(1, 8) / 8.0
    more = (times[:-1][both][:, None] + np.diff(times)[both][:, None] * share).ravel()
    order = np.argsort(np.concatenate((times, more)), kind="stable")
    extra = np.array([mixed.at(float(one)) for one in more]).reshape(-1, 3)
    return np.concatenate((times, more))[order], np.vstack((volts, extra))[order]
