"""By how much an electrode may differ from the wish on a segment, by cause, in V.

Calibration and noise as the trap file states them, half a code, the stray of the shipped rows, and
lag.  Behind a single-pole low-pass of time constant tau a wish of slope s is followed at a distance
|d(t)| <= |d0| e^(-t/tau) + tau s (1 - e^(-t/tau)), the exact response to a straight ramp; the
distance is carried from segment to segment and from block to block.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction

import numpy as np
import numpy.typing as npt

from wellseq.model.trap import Converter, Switch, Trap
from wellseq.timeline.shipped import ShippedBlock
from wellseq.timeline.timeline import Piece, Shape

Vector = npt.NDArray[np.float64]
NOISE_RMS_TAKEN = 6.0
"""How many rms of noise are taken off a depth; common practice, no source."""
SETTLED_V = 1e-12
"""What is left of a lag below this is less than the field's own error and is forgotten."""


class Carry:
    """How far each converter's electrodes still are behind, V; carried between blocks."""

    def __init__(self) -> None:
        self.behind_V: dict[str, float] = {}


@dataclass(frozen=True, slots=True)
class Quiet:
    """Errors of an output that do not depend on motion, at the electrode (V)."""

    half_code_V: float
    noise_V: float
    gain: float
    gain_spread: float
    offset_V: float
    offset_spread_V: float

    def calibration_V(self, volts: float) -> float:
        """Spread of the calibration at an electrode voltage of at most |volts|."""
        nominal = (abs(volts) + abs(self.offset_V)) / abs(self.gain)
        return nominal * self.gain_spread + self.offset_spread_V

    def total_V(self, volts: float) -> float:
        """All of them at once."""
        return self.half_code_V + self.noise_V + self.calibration_V(volts)


def quiet(output: Converter | Switch) -> Quiet:
    """What an output's electrodes may be off by at rest; for a switch, at a fixed level."""
    if isinstance(output, Switch):
        return Quiet(0.0, NOISE_RMS_TAKEN * output.noise_V, 1.0, 0.0, 0.0, output.spread_V)
    return Quiet(
        abs(output.gain) * output.code_V / 2,
        NOISE_RMS_TAKEN * output.noise_V,
        output.gain,
        output.gain_spread,
        output.offset_V,
        output.offset_spread_V,
    )


class Deviations:
    """The deviations of one block, asked segment after segment in order of time."""

    def __init__(self, trap: Trap, shipped: ShippedBlock, carry: Carry) -> None:
        self.trap, self.carry = trap, carry
        self.converters = {
            output.name: output for output in trap.outputs if isinstance(output, Converter)
        }
        self.quiet = {output.name: quiet(output) for output in trap.outputs}
        each = [self.quiet[name] for name in self.converters]
        self._half_code = np.array([one.half_code_V for one in each] + [0.0])
        self._noise = np.array([one.noise_V for one in each] + [0.0])
        self._per_volt = np.array([one.gain_spread / abs(one.gain) for one in each] + [0.0])
        self._at_zero = np.array([one.calibration_V(0.0) for one in each] + [0.0])
        self._strays = {(s.output, s.start_s): s.volts for s in shipped.strays}
        self._reach = _Reach(trap, shipped)
        self._stray_before: dict[str, float] = {}
        # Outputs that still have something to answer for; all others stand where they should.
        early = {one.output for one in shipped.strays if one.early_s > 0}
        self._unsettled = early | set(carry.behind_V)

    def on(
        self,
        start_s: Fraction,
        end_s: Fraction,
        running: Mapping[str, Piece],
        volts: Mapping[str, float],
        behind: Mapping[str, tuple[int, ...]],
        at_levels: Mapping[int, str],
    ) -> tuple[Vector, Vector, Vector, Vector, Vector]:
        """stray, lag, half code, calibration and noise, each (electrodes,), between two instants.

        `running` are the moving pieces and `volts` the present wish, per converter; `behind` says
        which electrode columns a converter moves, `at_levels` which switch a column may be at a
        fixed level of.
        """
        largest = np.array([abs(volts[name]) for name in self.converters] + [0.0])
        owner = np.full(len(self.trap.electrodes), len(self.converters))
        for index, name in enumerate(self.converters):
            owner[list(behind[name])] = index
            if name in running:
                largest[index] = max(largest[index], abs(running[name].to_V))
        half, noise = self._half_code[owner], self._noise[owner]
        calibration = (self._at_zero + self._per_volt * largest)[owner]
        stray, lag = np.zeros((2, len(owner)))
        for name in sorted(self._unsettled | set(running)):
            columns = list(behind[name])
            stray_V, lag_V = self._moved(name, running.get(name), start_s, end_s)
            stray[columns], lag[columns] = stray_V, lag_V
        for column, switch in at_levels.items():
            error = self.quiet[switch]
            calibration[column] = max(calibration[column], error.offset_spread_V)
            noise[column] = max(noise[column], error.noise_V)
        return stray, lag, half, calibration, noise

    def close(self) -> None:
        """The block is over: what its rows strayed by goes on through the filters."""
        for name, stray_V in self._stray_before.items():
            if stray_V > 0:
                behind_V = self.carry.behind_V.get(name, 0.0)
                self.carry.behind_V[name] = behind_V + stray_V

    def _moved(
        self, name: str, piece: Piece | None, start_s: Fraction, end_s: Fraction
    ) -> tuple[float, float]:
        """Stray and lag (V) of an output that moves or has moved; forget it once it has settled."""
        stray_V = self._stray(name, piece, start_s, end_s)
        lag_V = self._follow(self.converters[name], piece, stray_V, float(end_s - start_s))
        self._unsettled.add(name)
        left_V = self.carry.behind_V.get(name, 0.0)
        if piece is None and max(stray_V, left_V) < SETTLED_V and self._reach.over(name, end_s):
            self._unsettled.discard(name)
            self.carry.behind_V.pop(name, None)
            self._stray_before.pop(name, None)
        return stray_V, lag_V

    def _stray(self, name: str, piece: Piece | None, start_s: Fraction, end_s: Fraction) -> float:
        nearby = self._reach.stray_V(name, start_s, end_s, piece)
        own = self._strays.get((name, piece.start_s), 0.0) if piece is not None else 0.0
        return max(nearby, own)

    def _follow(
        self, converter: Converter, piece: Piece | None, stray_V: float, duration_s: float
    ) -> float:
        """Bound of the lag on the segment; what is left of it at its end is carried on."""
        tau = float(converter.time_constant_s)
        slope = piece.slope_max_V_per_s if piece is not None else 0.0
        late = slope * float(converter.delay_s)
        if not tau:
            return late
        before = self.carry.behind_V.get(converter.name, 0.0)
        before += max(0.0, self._stray_before.get(converter.name, 0.0) - stray_V)
        self._stray_before[converter.name] = stray_V
        faded = math.exp(-duration_s / tau)
        if piece is not None and piece.shape is Shape.EDGE:
            # within its window an edge may have any shape, so only what is left after it counts
            swing_V = abs(piece.to_V - piece.from_V)
            slewing_s = swing_V / converter.slew_V_per_s
            quiet_s = max(0.0, float(piece.end_s - piece.start_s) - slewing_s)
            left = min(swing_V, tau * converter.slew_V_per_s) * math.exp(-quiet_s / tau)
            self.carry.behind_V[converter.name] = before * faded + left
            return before + late
        self.carry.behind_V[converter.name] = before * faded + tau * slope * (1 - faded)
        return max(before, tau * slope) + late


class _Reach:
    """Where a piece's rounded rows and delayed edges reach beyond its written span."""

    def __init__(self, trap: Trap, shipped: ShippedBlock) -> None:
        self._windows: dict[str, list[tuple[Fraction, Fraction, float, Piece]]] = {}
        self._first: dict[str, int] = {}
        rows = {(stray.output, stray.start_s): stray for stray in shipped.strays}
        for piece in shipped.block.pieces:
            output = trap.output(piece.output)
            assert isinstance(output, Converter)
            stray = rows.get((piece.output, piece.start_s))
            early_s = stray.early_s if stray is not None else Fraction(0)
            late_s = output.delay_s + (stray.late_s if stray is not None else Fraction(0))
            volts = min(
                piece.slope_max_V_per_s * float(max(early_s, late_s)),
                abs(piece.to_V - piece.from_V),
            )
            window = (piece.start_s - early_s, piece.end_s + late_s, volts, piece)
            self._windows.setdefault(piece.output, []).append(window)

    def over(self, output: str, time_s: Fraction) -> bool:
        """Whether no piece of an output is still to come within its reach at a time (s)."""
        windows = self._windows.get(output, [])
        index = self._first.get(output, 0)
        while index < len(windows) and windows[index][1] <= time_s:
            index += 1
        return index == len(windows) or windows[index][0] == windows[index][3].start_s

    def stray_V(
        self, output: str, start_s: Fraction, end_s: Fraction, running: Piece | None
    ) -> float:
        """The stray that pieces nearby, the running one apart, may cause between two instants."""
        windows = self._windows.get(output)
        if not windows:
            return 0.0
        index = self._first.get(output, 0)
        while index < len(windows) and windows[index][1] <= start_s:
            index += 1
        self._first[output] = index
        worst = 0.0
        while index < len(windows) and windows[index][0] < end_s:
            _, high, volts, piece = windows[index]
            if high > start_s and piece is not running:
                worst = max(worst, volts)
            index += 1
        return worst
