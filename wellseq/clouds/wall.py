"""Electrodes and their voltages → the potential along the wall of the bore, and its cell averages.

The wall potential is piecewise linear: constant on each electrode, a straight change across each
gap of 1.1027 times the gap's width (the rule of fields/uniform.py), constant beyond the last
corner.  A cell of the grid gets the exact average over its length, so that a coarse grid loses no
charge on the wall.

Units: m, V.  Shapes: corners (k,), levels (k,).
Accuracy: averages exact to rounding, tests/clouds/test_wall.py.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from wellseq.fields import tube as tube_wall
from wellseq.fields.hermite import Curve, FloatArray
from wellseq.fields.uniform import Electrode, stack_of

_FAR_RADII, _NODES_PER_RADIUS = 20.0, 22


@dataclass(frozen=True, slots=True)
class Wall:
    """The wall of a uniform bore of radius `radius_m`: `level_V` (k,) at `corner_m` (k,)."""

    radius_m: float
    corner_m: FloatArray
    level_V: FloatArray

    def averages_V(self, face_m: FloatArray) -> FloatArray:
        """Average potential in V of each cell (n,) between its faces (n + 1,) in m."""
        return np.asarray(np.diff(self._integral(face_m)) / np.diff(face_m))

    def on_axis(self) -> Curve:
        """The exact potential on the axis of the empty bore; the levels at the ends go on far."""
        far = _FAR_RADII * self.radius_m
        level = np.concatenate(([0.0], self.level_V[::2], self.level_V[-1:], [0.0]))
        centre = (self.corner_m[::2] + self.corner_m[1::2]) / 2
        width = self.corner_m[1::2] - self.corner_m[::2]
        centre = np.concatenate((centre[:1] - far, centre, centre[-1:] + far))
        width = np.concatenate(([0.0], width, [0.0]))
        rise = np.diff(level)[None, :]
        tube = tube_wall.Wall(self.radius_m, centre, width, rise, np.zeros_like(rise))
        step = self.radius_m / _NODES_PER_RADIUS
        count = int(np.ceil((centre[-1] - centre[0]) / step)) + 1
        axis = tube_wall.Axis(float(centre[0]), step, count)
        box = tube_wall.Box(self.radius_m, axis, (float(centre[0]), float(centre[-1])))
        amplitude = box.amplitudes(tube)
        nodes = np.stack([box.potential(amplitude, 0.0, order)[0] for order in range(5)])
        return Curve(nodes, axis.start_m, step, tube_wall.SLOWEST_MODE / self.radius_m)

    def _integral(self, place_m: FloatArray) -> FloatArray:
        """Integral of the wall potential from the first corner to each place, V m."""
        corner, level = self.corner_m, self.level_V
        length = np.diff(corner)
        filled = np.concatenate(([0.0], np.cumsum(length * (level[1:] + level[:-1]) / 2)))
        slope = np.divide(np.diff(level), length, out=np.zeros_like(length), where=length > 0)
        # Beyond the ends the level stands still.
        slope = np.concatenate((slope, [0.0]))
        index = np.searchsorted(corner, place_m, side="right") - 1
        before = index < 0
        index = np.maximum(index, 0)
        past = place_m - corner[index]
        within = filled[index] + past * (level[index] + slope[index] * past / 2)
        return np.asarray(np.where(before, level[0] * past, within))


def wall_of(electrodes: Sequence[Electrode], voltages: Mapping[str, float]) -> Wall:
    """The wall of a trap's electrodes, V by name; electrodes not named and the tube are at 0 V.

    Raises ValueError for a stack that is not a uniform bore or an electrode that is not there.
    """
    stack = stack_of(electrodes)
    names = [item.name for item in electrodes]
    unknown = sorted(set(voltages) - set(names))
    if unknown:
        raise ValueError(f"there is no electrode '{unknown[0]}'")
    levels = [0.0, *(float(voltages.get(name, 0.0)) for name in names), 0.0]
    return _wall(stack.radius_m, stack.centre_m, stack.width_m, np.array(levels))


def wall_of_steps(
    edges_m: Sequence[float], levels_V: Sequence[float], radius_m: float, width_m: float
) -> Wall:
    """A wall at levels (k + 1,) V between edges (k,) m, straight over `width_m` at each edge.

    Raises ValueError when levels and edges do not match.
    """
    if len(levels_V) != len(edges_m) + 1 or not edges_m:
        raise ValueError("a wall needs one level more than edges")
    centre = np.array(edges_m, dtype=float)
    levels = np.array(levels_V, dtype=float)
    return _wall(radius_m, centre, np.full(centre.size, width_m), levels)


def _wall(radius_m: float, centre_m: FloatArray, width_m: FloatArray, level_V: FloatArray) -> Wall:
    corner = np.stack((centre_m - width_m / 2, centre_m + width_m / 2), axis=1).ravel()
    level = np.stack((level_V[:-1], level_V[1:]), axis=1).ravel()
    if (np.diff(corner) < 0).any():
        raise ValueError("edges of the wall must not overlap")
    return Wall(radius_m, corner, level)
