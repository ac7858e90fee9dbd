"""The potential sampled along the axis → one well of it: bottom, barriers, width at a level.

Everything is energy in eV of a particle of `charge_e` elementary charges (signed): U = charge · φ.
Extrema are polished by the parabola through three samples; the width at a level is found by
straight interpolation of the root of the height, exact for a parabola.  Samples should be closer
than a fiftieth of the bore's radius where 1e-4 of the depth matters.

Shapes: samples (n,).  Units: m, V, eV.  Accuracy: tests/clouds/test_axis.py.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from wellseq.fields.hermite import FloatArray


@dataclass(frozen=True, slots=True)
class AxisWell:
    """A well between its two barriers: samples (n,), places in m and energies in eV."""

    z_m: FloatArray
    energy_eV: FloatArray
    bottom_m: float
    bottom_eV: float
    left_m: float
    left_eV: float
    right_m: float
    right_eV: float

    @property
    def depth_eV(self) -> float:
        """From the bottom to the lower barrier, in eV."""
        return min(self.left_eV, self.right_eV) - self.bottom_eV

    def ends_m(self) -> Callable[[float], tuple[float, float]]:
        """A function: height above the bottom (eV) → where the walls of the well are that high (m).

        The places of both walls; NaN for a wall that ends below that height.
        """
        inner = int(np.searchsorted(self.z_m, self.bottom_m))
        rise = np.sqrt(np.maximum(self.energy_eV - self.bottom_eV, 0.0))
        sides = (
            _Side.of(self, self.z_m[:inner][::-1], rise[:inner][::-1], self.left_m, self.left_eV),
            _Side.of(self, self.z_m[inner:], rise[inner:], self.right_m, self.right_eV),
        )

        def ends(above_eV: float) -> tuple[float, float]:
            goal = math.sqrt(above_eV)
            return sides[0].place_m(goal), sides[1].place_m(goal)

        return ends


@dataclass(frozen=True, slots=True)
class _Side:
    """One wall of a well: places (k,) going outward, and the greatest root of the height so far."""

    z_m: FloatArray
    rise: FloatArray

    @classmethod
    def of(
        cls, well: AxisWell, z_m: FloatArray, rise: FloatArray, top_m: float, top_eV: float
    ) -> _Side:
        top = math.sqrt(max(top_eV - well.bottom_eV, 0.0))
        kept = (z_m > top_m) if top_m < well.bottom_m else (z_m < top_m)
        places = np.concatenate(([well.bottom_m], z_m[kept], [top_m]))
        return cls(places, np.maximum.accumulate(np.concatenate(([0.0], rise[kept], [top]))))

    def place_m(self, goal: float) -> float:
        """Where √(U − bottom) first reaches the goal: straight in z, exact for a parabola."""
        index = int(np.searchsorted(self.rise, goal))
        if index == self.rise.size:
            return math.nan
        if index == 0:
            return float(self.z_m[0])
        low, high = self.rise[index - 1], self.rise[index]
        share = (goal - low) / (high - low)
        return float(self.z_m[index - 1] + share * (self.z_m[index] - self.z_m[index - 1]))


def axis_well(
    z_m: FloatArray, potential_V: FloatArray, charge_e: int, between_m: tuple[float, float]
) -> AxisWell:
    """The well of U = charge · φ with its minimum in the open span `between_m` (m).

    Its barriers are the local maxima reached by climbing from the ends of the span, which are the
    barriers of the empty well or close to them.  Without a barrier the depth is nothing.  Raises
    ValueError for a span with fewer than three samples, or samples that are not finite.
    """
    energy = charge_e * np.asarray(potential_V, dtype=float)
    if not np.isfinite(energy).all():
        raise ValueError("a potential along the axis is not a number")
    first = int(np.searchsorted(z_m, between_m[0]))
    last = int(np.searchsorted(z_m, between_m[1], side="right")) - 1
    if last - first < 2:
        raise ValueError("a well needs three samples along the axis")
    bottom = first + int(np.argmin(energy[first : last + 1]))
    # A slope that climbs past the bottom is no barrier on that side: the depth is then nothing.
    left = min(climb(energy, first), bottom)
    right = max(climb(energy, last), bottom)
    bottom_m, bottom_eV = polished(z_m, energy, bottom)
    left_m, left_eV = polished(z_m, energy, left)
    right_m, right_eV = polished(z_m, energy, right)
    kept = slice(left, right + 1)
    return AxisWell(
        z_m[kept], energy[kept], bottom_m, bottom_eV, left_m, left_eV, right_m, right_eV
    )


def climb(energy: FloatArray, index: int) -> int:
    """The sample at the top of the slope that `index` stands on; an end of the samples is a top."""
    top = energy.size - 1
    step = 1 if index < top and energy[index + 1] > energy[index] else -1
    while 0 <= index + step <= top and energy[index + step] > energy[index]:
        index += step
    return index


def polished(z_m: FloatArray, values: FloatArray, index: int) -> tuple[float, float]:
    """Place (m) and value of the extremum near a sample, by the parabola through its neighbours.

    A sample at an end, or one that is no extremum, is taken as it is.
    """
    place, value = float(z_m[index]), float(values[index])
    if not 0 < index < z_m.size - 1:
        return place, value
    before, after = z_m[index - 1] - place, z_m[index + 1] - place
    fall, rise = (values[index - 1] - value) / before, (values[index + 1] - value) / after
    curvature = (rise - fall) / (after - before)
    slope = fall - curvature * before
    if curvature == 0.0 or (values[index - 1] - value) * (values[index + 1] - value) < 0.0:
        return place, value
    shift = float(np.clip(-slope / (2 * curvature), before, after))
    return place + shift, value + float(slope * shift + curvature * shift**2)
