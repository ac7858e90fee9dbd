"""The potential sampled along the axis → one well of it: bottom, barriers, and its width at a level.

Everything is energy in eV of a particle of `charge_e` elementary charges (signed): U = charge · φ.
Extrema are polished by the parabola through three samples, crossings by straight interpolation, so
samples should be closer than a hundredth of the bore's radius where 1e-4 of the depth matters.

Shapes: samples (n,).  Units: m, V, eV.  Accuracy: tests/clouds/test_axis.py.
"""

from __future__ import annotations

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

    def ends_m(self, above_eV: float) -> tuple[float, float]:
        """Where the walls of the well are `above_eV` above its bottom, in m; NaN where they end."""
        level = self.bottom_eV + above_eV
        start = int(np.argmin(self.energy_eV))
        left = _crossing(self.z_m[start::-1], self.energy_eV[start::-1], level)
        right = _crossing(self.z_m[start:], self.energy_eV[start:], level)
        return left, right


def axis_well(
    z_m: FloatArray, potential_V: FloatArray, charge_e: int, between_m: tuple[float, float]
) -> AxisWell:
    """The well of U = charge · φ with its minimum in the open span `between_m` (m).

    Its barriers are the local maxima reached by climbing from the ends of the span, which are the
    barriers of the empty well or close to them.  Raises ValueError for a span with fewer than three
    samples, or samples that are not finite.
    """
    energy = charge_e * np.asarray(potential_V, dtype=float)
    if not np.isfinite(energy).all():
        raise ValueError("a potential along the axis is not a number")
    first = int(np.searchsorted(z_m, between_m[0]))
    last = int(np.searchsorted(z_m, between_m[1], side="right")) - 1
    if last - first < 2:
        raise ValueError("a well needs three samples along the axis")
    bottom = first + int(np.argmin(energy[first : last + 1]))
    left = climb(energy, first)
    right = climb(energy, last)
    bottom_m, bottom_eV = polished(z_m, energy, bottom)
    left_m, left_eV = polished(z_m, energy, left)
    right_m, right_eV = polished(z_m, energy, right)
    kept = slice(min(left, bottom), max(right, bottom) + 1)
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


def _crossing(z_m: FloatArray, energy_eV: FloatArray, level_eV: float) -> float:
    above = np.flatnonzero(energy_eV >= level_eV)
    if above.size == 0:
        return float("nan")
    index = int(above[0])
    if index == 0:
        return float(z_m[0])
    low, high = energy_eV[index - 1], energy_eV[index]
    share = (level_eV - low) / (high - low)
    return float(z_m[index - 1] + share * (z_m[index] - z_m[index - 1]))
