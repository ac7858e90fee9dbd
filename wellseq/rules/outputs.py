"""Shipped rows → what each output and electrode may stand at, V, over every stretch of time.

A converter that is told a new code gets there in some monotone way: at its slew, then behind its
low-pass by less and less, |V − told| <= |d| e^(−t/tau) for a step d (single pole), until SETTLED_V
are left.  Between rows of a card that draws lines it stays behind the chord by at most tau times
its slope.  Calibration and noise, as the trap file declares them, are added on both sides.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from wellseq.model.trap import Converter, Switch
from wellseq.rules.axis import Axis
from wellseq.rules.course import Course, Interval, constant
from wellseq.rules.switching import Switching
from wellseq.timeline.deviations import Quiet, quiet
from wellseq.timeline.shipped import Integers, Shipped

DUST = 1e-12
"""Relative rounding of a time; one that is whole in units must not become one unit more."""
SETTLED_V = 1e-6
"""A low-pass output counts as settled, to this, when no more is left of its steps."""


class Outputs:
    """The courses of all outputs, made when they are first asked for; one per stretch."""

    def __init__(self, axis: Axis, shipped: Shipped) -> None:
        self.axis, self.shipped = axis, shipped
        self.trap = axis.timeline.trap
        self._made: dict[str, tuple[Course, ...]] = {}

    def of(self, output: str) -> tuple[Course, ...]:
        """Volts at the electrodes of an output, one course per stretch."""
        if output not in self._made:
            part = self.trap.output(output)
            if isinstance(part, Switch):
                levels = _Levels(self, part)
                switching = Switching(self.axis, self.shipped, part, levels.of, levels.between)
                self._made[output] = tuple(switching.courses())
            else:
                self._made[output] = tuple(_Following(self, part).courses())
        return self._made[output]


@dataclass(frozen=True, slots=True)
class _Levels:
    """What the electrodes of a switch stand at by its level, and while an edge is under way."""

    outputs: Outputs
    switch: Switch

    def of(self, number: int, level: int) -> Course:
        """Volts over a stretch while the switch has a level."""
        behind = self.switch.levels[level]
        if isinstance(behind, str):
            return self.outputs.of(behind)[number]
        spread_V = quiet(self.switch).total_V(0.0)
        length = self.outputs.axis.stretches[number].longest
        return constant((behind - spread_V, behind + spread_V), length)

    def between(self, hulls: tuple[Interval, Interval]) -> Interval:
        """An edge may have any monotone shape."""
        return min(low for low, _ in hulls), max(high for _, high in hulls)


@dataclass(slots=True)
class _Traces:
    """The pieces of one stretch while they are made: where they begin, and bounds in V.

    Four numbers a piece: low and high at its beginning, low and high at its end.
    """

    starts: list[int]
    bounds: list[tuple[float, float, float, float]]

    def add(self, start: int, low: float, high: float, low_end: float, high_end: float) -> None:
        """One more piece; one that begins where the last one did takes its place."""
        if self.starts and self.starts[-1] == start:
            self.starts.pop()
            self.bounds.pop()
        self.starts.append(start)
        self.bounds.append((low, high, low_end, high_end))

    def course(self, length: int, error: Quiet) -> Course:
        """The course, with calibration and noise added on both sides."""
        low, high, low_end, high_end = np.array(self.bounds).T
        lows, highs = np.stack((low, low_end)), np.stack((high, high_end))
        share = error.gain_spread / abs(error.gain)
        always_V = share * abs(error.offset_V) + error.offset_spread_V + error.noise_V
        return Course(
            tuple(self.starts),
            length,
            lows - np.abs(lows) * share - always_V,
            highs + np.abs(highs) * share + always_V,
        )


class _Following:
    """One converter: where it has been told to be, V, and where it may be yet.

    The electrode stands between `told_V` less `under_V` and `told_V` plus `over_V`.
    """

    def __init__(self, outputs: Outputs, converter: Converter) -> None:
        self.axis, self.shipped, self.converter = outputs.axis, outputs.shipped, converter
        self.column = self.shipped.converters.index(converter.name)
        self.error = quiet(converter)
        self.tau_s = float(converter.time_constant_s)
        self.slew_V_per_s = converter.slew_V_per_s
        self.delay = self.axis.units(converter.delay_s)
        self.draws = converter.between_rows == "line"
        self.told_V = self._volts(self.shipped.blocks[0].codes[:1, self.column])[0]
        self.under_V = self.over_V = 0.0
        self.traces = _Traces([], [])

    def courses(self) -> Iterator[Course]:
        """One course per stretch, in order."""
        for stretch in self.axis.stretches:
            self.traces = _Traces([], [])
            if stretch.waits:
                state = self.told_V, self.under_V, self.over_V
                self._rest(0, stretch.longest, self.delay)
                # The trigger may come at once, so that nothing may have settled meanwhile.
                self.told_V, self.under_V, self.over_V = state
            else:
                self._play(stretch.index, stretch.longest)
            if not self.traces.starts:
                self._stand(0)
            yield self.traces.course(stretch.longest, self.error)

    def _volts(self, codes: Integers) -> list[float]:
        """What the electrode stands at for each code, V."""
        nominal = self.converter.low_V + codes * self.converter.code_V
        volts: list[float] = (self.converter.gain * nominal + self.converter.offset_V).tolist()
        return volts

    def _play(self, index: int, length: int) -> None:
        rows = self.shipped.blocks[index]
        codes = rows.codes[:, self.column]
        tick = self.axis.units(rows.tick_s)
        changes = np.concatenate(([0], np.flatnonzero(np.diff(codes)) + 1))
        ticks = rows.ticks[changes].tolist()
        leaves = rows.ticks[np.maximum(changes - 1, 0)].tolist()
        now = 0
        for at, left, volts in zip(ticks, leaves, self._volts(codes[changes]), strict=True):
            # What is told after the block's end, by the delay, is left for the next stretch.
            end = min(at * tick + self.delay, length)
            if self.draws and left < at:
                start = max(now, min(left * tick + self.delay, length))
                self._rest(now, start)
                self._draw(start, end, volts)
            else:
                self._rest(now, end)
                self._step(volts)
            now = max(now, end)
        self._rest(now, length)

    def _stand(self, start: int) -> None:
        low, high = self.told_V - self.under_V, self.told_V + self.over_V
        self.traces.add(start, low, high, low, high)

    def _step(self, volts: float) -> None:
        """Something new is told; from where it stands the electrode goes there and no further."""
        up_V = volts - self.told_V
        self.under_V, self.over_V = max(self.under_V + up_V, 0.0), max(self.over_V - up_V, 0.0)
        self.told_V = volts

    def _rest(self, start: int, end: int, late: int = 0) -> None:
        """Nothing new is told between two instants; what is left of earlier steps settles."""
        if start >= end:
            return
        self._stand(start)
        left_V = max(self.under_V, self.over_V)
        if not left_V:
            return
        # A card that draws lines is asked for none that its slew could not follow.
        tau_s, slewing_s = self.tau_s, 0.0 if self.draws else left_V / self.slew_V_per_s
        settling_s = slewing_s
        if tau_s and left_V > SETTLED_V:
            settling_s += tau_s * math.log(left_V / SETTLED_V)
        settled = start + late + math.ceil(settling_s * self.axis.per_s * (1 - DUST))
        if settled <= end:
            rest_V = SETTLED_V if tau_s else 0.0
            low, high = self.told_V - rest_V, self.told_V + rest_V
            self.traces.add(settled, low, high, low, high)
        faded_s = (end - start - late) / self.axis.per_s - slewing_s
        if faded_s >= -DUST * slewing_s:
            faded = math.exp(-max(faded_s, 0.0) / tau_s) if tau_s else 0.0
            if left_V * faded < SETTLED_V / 1000:
                faded = 0.0
            self.under_V *= faded
            self.over_V *= faded

    def _draw(self, start: int, end: int, volts: float) -> None:
        """A straight line from where it stands to new volts, followed by the low-pass.

        It lags behind the line by a bounded way, and goes beyond it no further than it was at the
        line's beginning.
        """
        if start >= end:
            self._step(volts)
            return
        from_V, self.told_V = self.told_V, volts
        duration_s, way_V = (end - start) / self.axis.per_s, abs(volts - from_V)
        sign = 1.0 if volts > from_V else -1.0
        lags_V, leads_V = (self.under_V, self.over_V)[:: int(sign)]
        built_V = self.tau_s * way_V / duration_s
        behind_V = max(lags_V, built_V)
        turns = {0.0, min(behind_V - lags_V, way_V), min(leads_V, way_V), way_V}
        line: list[tuple[int, float, float]] = []
        for gone_V in sorted(turns):
            at = start + math.floor((end - start) * (gone_V / way_V))
            lags, leads = max(-lags_V, gone_V - behind_V), max(leads_V, gone_V)
            ends = sorted((from_V + sign * lags, from_V + sign * leads))
            line.append((at, ends[0], ends[1]))
        for (at, low, high), (_, low_end, high_end) in pairwise(line):
            self.traces.add(at, low, high, low_end, high_end)
        faded = math.exp(-duration_s / self.tau_s) if self.tau_s else 0.0
        left = lags_V * faded + built_V * (1 - faded), leads_V * faded
        self.under_V, self.over_V = left[:: int(sign)]
