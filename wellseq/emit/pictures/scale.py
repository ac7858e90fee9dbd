"""Volts → a share of a drawing's height: even near zero, logarithmic far from it, so that a well of
a volt and a gate of kilovolts stand in one drawing.

share = (f(V) − f(low)) / (f(high) − f(low)) with f(V) = asinh(V / soft); volts and `soft` in V.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]
SOFT_V = 5.0
DEPTH_SOFT_V = 0.2
TICK_APART = 0.075


@dataclass(frozen=True, slots=True)
class Scale:
    """From `low_V` (share 0) to `high_V` (share 1), even within about ± `soft_V`."""

    low_V: float
    high_V: float
    soft_V: float = SOFT_V

    def share(self, volts: npt.ArrayLike) -> Floats:
        """0 at the low end, 1 at the high one; volts in V, any shape."""
        low, high = (math.asinh(end / self.soft_V) for end in (self.low_V, self.high_V))
        found = np.arcsinh(np.asarray(volts, dtype=float) / self.soft_V)
        return np.asarray((found - low) / (high - low))

    def one(self, volts: float) -> float:
        """The share of one voltage in V."""
        return float(self.share(volts))

    def ticks(self, apart: float = TICK_APART) -> tuple[float, ...]:
        """Round voltages (V) at least `apart` in share, zero and whole decades before others."""
        chosen: list[float] = []
        for value in _candidates(max(abs(self.low_V), abs(self.high_V)), self.soft_V):
            near = any(abs(self.one(value) - self.one(other)) < apart for other in chosen)
            if self.low_V <= value <= self.high_V and not near:
                chosen.append(value)
        return tuple(sorted(chosen))


def volts_scale(volts: Iterable[float], soft_V: float = SOFT_V) -> Scale:
    """A scale on which all of these voltages (V) and zero have room; finite ones count."""
    known = [one for one in volts if math.isfinite(one)]
    low, high = min([0.0, *known]), max([0.0, *known])
    if low == high:
        low, high = -1.0, 1.0
    ends = math.asinh(low / soft_V), math.asinh(high / soft_V)
    room = 0.06 * (ends[1] - ends[0])
    return Scale(soft_V * math.sinh(ends[0] - room), soft_V * math.sinh(ends[1] + room), soft_V)


def depth_scale(depths: Iterable[float]) -> Scale:
    """A scale for depths (V), from zero or from the most negative one up."""
    known = [one for one in depths if math.isfinite(one)]
    low, high = min([0.0, *known]), max([1.0, *known])
    return Scale(low, high * 1.15, DEPTH_SOFT_V)


def _candidates(most: float, soft_V: float) -> list[float]:
    decades = [10.0**power for power in range(-6, 9) if soft_V / 20 < 10.0**power <= most]
    found = [0.0]
    for step in (1.0, 2.0, 5.0):
        for one in decades:
            found += (step * one, -step * one)
    return found
