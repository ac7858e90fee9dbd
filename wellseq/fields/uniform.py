"""A stack of electrodes in one bore → the potential of each at 1 V, on and off the axis.

Laplace's equation in a tube of radius a whose wall carries 1 on electrode e, 0 on all others and on
the grounded tube that goes on beyond the stack.  tube.py solves it exactly; gaps.py says how a real
gap enters: a straight rise of 1.1027 times its width, and a strip for the field that leaks into it.

Shapes: unit potentials (radii, orders, electrodes, nz).  Units: m, V per V, V/m^n per V.
Accuracy: 1e-12 V/V for the wall so described, tests/fields/test_uniform.py; gaps against finite
elements of real slots, tests/fields/test_elements.py: 1e-6 V/V at g = 0.05 a.
Source: tube.py, gaps.py.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from math import ceil
from typing import Protocol

import numpy as np

from wellseq.fields.gaps import GAP_FACTOR, gap_left, leak, wall_slope
from wellseq.fields.hermite import QUINTIC_ERROR, FloatArray
from wellseq.fields.tube import RADIUS_MAX, SLOWEST_MODE, Axis, Box, Wall

__all__ = ["RADIUS_MAX", "SLOWEST_MODE", "Axis"]

METHOD = "uniform bore, Fourier box, leaking gaps, 2"
REACH_RADII = 8.0
STEPS_PER_RADIUS = 22
NODES_MAX = 40_000
STEP_SUPREMA = (189.9, 1461.4, 9657.0)
"""sup over z of the 6th, 7th and 8th derivative of the unit step on the axis, in a^−n (tested)."""
_ROUNDING = 1e-13


class Electrode(Protocol):
    """What this floor needs of an electrode: name, span along the axis and inner radius, in m."""

    @property
    def name(self) -> str:
        """Its name in the trap file."""

    @property
    def from_m(self) -> float:
        """Where it begins along the axis, m."""

    @property
    def to_m(self) -> float:
        """Where it ends along the axis, m."""

    @property
    def radius_m(self) -> float:
        """Inner radius, m."""


@dataclass(frozen=True, slots=True)
class Stack:
    """The wall of a uniform bore: where the wall potential changes, and over what width.

    `centre_m`, `width_m` (ne + 1,): edge j lies between electrode j − 1 and j; edge 0 and the last
    one are where the grounded tube goes on (width 0).  Lengths in m.
    """

    centre_m: FloatArray
    width_m: FloatArray
    radius_m: float

    def wall(self) -> Wall:
        """What the wall carries, leaks included."""
        count = self.centre_m.size - 1
        rise = np.zeros((count, count + 1))
        rise[np.arange(count), np.arange(count)] = 1.0
        rise[np.arange(count), np.arange(1, count + 1)] = -1.0
        slope = wall_slope(self.centre_m, self.centre_m, self.width_m, self.radius_m)
        strip = leak(rise, slope, self.width_m)
        return Wall(self.radius_m, self.centre_m, self.width_m, rise, strip)


def stack_of(electrodes: Sequence[Electrode]) -> Stack:
    """The edges of electrodes given in order along the axis.

    Raises ValueError for no electrode, unequal radii, or spans that are empty, overlap or are not
    finite.
    """
    if not electrodes:
        raise ValueError("a stack needs at least one electrode")
    radius = float(electrodes[0].radius_m)
    start = np.array([e.from_m for e in electrodes], dtype=float)
    stop = np.array([e.to_m for e in electrodes], dtype=float)
    if not (np.isfinite(start).all() and np.isfinite(stop).all() and 0 < radius < np.inf):
        raise ValueError("lengths of electrodes must be finite and the radius positive")
    if any(float(e.radius_m) != radius for e in electrodes):
        raise ValueError("electrodes of unequal radius: only a uniform bore can be solved here")
    gap = start[1:] - stop[:-1]
    if (stop <= start).any() or (gap < 0).any():
        raise ValueError("electrodes must be longer than nothing and must not overlap")
    centre = np.concatenate((start[:1], (start[1:] + stop[:-1]) / 2, stop[-1:]))
    return Stack(centre, np.concatenate(([0.0], GAP_FACTOR * gap, [0.0])), radius)


def axis_of(stack: Stack) -> Axis:
    """The nodes of the field: the stack and 8 radii beyond it, in steps of at most a/22.

    Raises ValueError when the stack is so long for its bore that there would be over 40,000 nodes.
    """
    reach = REACH_RADII * stack.radius_m
    start, stop = float(stack.centre_m[0] - reach), float(stack.centre_m[-1] + reach)
    steps = (stop - start) * STEPS_PER_RADIUS / stack.radius_m
    if steps > NODES_MAX:
        raise ValueError(
            f"a stack of {stop - start - 2 * reach:g} m in a bore of radius {stack.radius_m:g} m "
            "is too long for its bore"
        )
    count = ceil(steps)
    return Axis(start, (stop - start) / count, count + 1)


def interpolation_error(stack: Stack, axis: Axis, order: int = 0) -> float:
    """Greatest error of the quintic between nodes, V/m^order per V on one electrode (order 0-2).

    Two edges at most, each h⁶/46080 · sup|S⁽⁶⁺ᵒʳᵈᵉʳ⁾|, S the unit step; a gap only smooths S.
    """
    step = axis.step_m / stack.radius_m
    bound = 2.0 * STEP_SUPREMA[order] * QUINTIC_ERROR * step**6 + _ROUNDING * 30.0**order
    return float(bound / stack.radius_m**order)


def gap_error(stack: Stack) -> FloatArray:
    """Estimate (ne, ne + 1), V per V, of what the rules for gaps leave out of every electrode.

    At each edge: the greatest error on the axis there.  Source: gaps.py.
    """
    wall = stack.wall()
    return gap_left(wall, wall.centre_m, wall.rise)


def unit_potentials(
    stack: Stack, axis: Axis, radii_m: Iterable[float] = (0.0,), orders: Iterable[int] = (0,)
) -> FloatArray:
    """Derivatives along z of every electrode's potential at 1 V, in V/m^order per V.

    Returns (radii, orders, electrodes, axis.count).  Raises ValueError beyond 0.9 of the bore
    radius.
    """
    radii, powers = tuple(radii_m), tuple(orders)
    box = _box(stack, axis, max(map(abs, radii), default=0.0))
    amplitude = box.amplitudes(stack.wall())
    result = np.empty((len(radii), len(powers), amplitude.shape[0], axis.count))
    for i, radius_m in enumerate(radii):
        for j, order in enumerate(powers):
            result[i, j] = box.potential(amplitude, radius_m, order)
    return result


def potential_nodes(stack: Stack, vector: FloatArray, radius_m: float) -> tuple[FloatArray, Axis]:
    """Potential of electrodes at `vector` (ne,) volts on a cylinder of radius r, orders 0 … 4.

    Returns (5, nz) in V/m^order and the nodes, spaced by the distance to the wall / 16 at most.
    Raises ValueError beyond 0.9 of the bore radius.
    """
    base = axis_of(stack)
    times = ceil(base.step_m * 16 / max(stack.radius_m - abs(radius_m), 0.1 * stack.radius_m))
    axis = Axis(base.start_m, base.step_m / times, (base.count - 1) * times + 1)
    box = _box(stack, axis, abs(radius_m))
    amplitude = vector @ box.amplitudes(stack.wall())
    return np.stack([box.potential(amplitude, radius_m, order) for order in range(5)]), axis


def _box(stack: Stack, axis: Axis, r_m: float) -> Box:
    span_m = float(stack.centre_m[0]), float(stack.centre_m[-1])
    return Box(stack.radius_m, axis, span_m, r_m)
