"""Unit potentials of the electrodes → the force on the axis as a table, and the wells in it.

phi(z, t) = sum_k V_k(t) g_k(z).  Tabulated is g_k'(z) at equal steps; between nodes the *slope* is
linear, so the potential is a chain of parabolas, integrated from the left end.  Potential and slope
fit each other exactly: a flight in this table conserves the energy that is read from it.  Nodes
are moved by a twelfth of the second difference, so that the integral is right to the fourth order.
Beyond the table there is no force: it must reach out to where the tube has quenched the field.

Shapes: slopes (electrodes, nodes).  Units: m, V, 1/m (slope per volt); U = sign * phi in V, which
is the energy in eV per elementary charge.
Accuracy: tests/clouds/test_forces.py.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from math import ceil

import numpy as np
from numpy.typing import ArrayLike, NDArray

from wellseq.fields.field import Field
from wellseq.fields.hermite import FloatArray, bernstein, controls

STEP_M = 2e-4
"""Tables are at least this fine."""
RIPPLE_V = 1e-3
"""Dimples and bumps of less than this are no wells and no barriers."""
QUENCHED = 1e-6
"""Share of an electrode's steepest slope that may be left at the ends of a table."""


@dataclass(frozen=True, slots=True)
class ForceTable:
    """Slopes on the axis per volt: `slope` (electrodes, nodes), 1/m, nodes `step_m` apart.

    `left` (electrodes,) is each unit potential at `start_m`, where the first node stands.
    """

    names: tuple[str, ...]
    start_m: float
    step_m: float
    slope: FloatArray
    left: FloatArray

    @property
    def end_m(self) -> float:
        """The last node, m."""
        return float(self.start_m + self.step_m * (self.slope.shape[1] - 1))

    def potential(self, volts: ArrayLike, sign: int) -> AxisPotential:
        """U = sign * phi of the electrodes at `volts` (electrodes,) V, for charges of that sign."""
        at = np.asarray(volts, dtype=float)
        return AxisPotential.of(
            self.start_m, self.step_m, sign * (at @ self.slope), sign * float(at @ self.left)
        )

    def plus(self, name: str, slope_V_per_m: FloatArray, left_V: float) -> ForceTable:
        """The same table with one more column, to be held at 1 V, such as a cloud's own potential.

        `slope_V_per_m` (nodes,) in V/m is its slope, `left_V` in V its value at the first node.
        """
        return ForceTable(
            (*self.names, name),
            self.start_m,
            self.step_m,
            np.vstack((self.slope, slope_V_per_m)),
            np.append(self.left, left_V),
        )


def table_of(field: Field, step_m: float = STEP_M) -> ForceTable:
    """The table of a trap's field: quintic between the field's nodes, steps of at most `step_m`, m.

    It reaches 8 radii beyond the stack, where 4e-9 of the last electrode's volts are left.
    """
    times = ceil(field.step_m / step_m * (1.0 - 1e-9))
    control = controls(field.phi[1:4], field.step_m)
    weight = bernstein(np.arange(times) / times, control.shape[0] - 1)
    inner = np.einsum("cez,ct->ezt", control, weight).reshape(len(field.electrodes), -1)
    slope = _levelled(np.concatenate((inner, field.phi[1][:, -1:]), axis=1))
    start_m = float(field.z_m[0])
    return ForceTable(field.electrodes, start_m, field.step_m / times, slope, field.phi[0][:, 0])


def _levelled(slope: FloatArray) -> FloatArray:
    """Slopes less a twelfth of their second difference.

    A chain of chords over a curve s has too great an integral, by h^2/12 of the change of s'
    (Euler-Maclaurin); so changed it has the right one to h^4.
    """
    result = slope.copy()
    result[:, 1:-1] -= np.diff(slope, 2, axis=1) / 12.0
    return result


def tabulated(
    names: Sequence[str],
    unit_V: Callable[[FloatArray], FloatArray],
    between_m: tuple[float, float],
    step_m: float = STEP_M,
) -> ForceTable:
    """A table of given unit potentials: `unit_V` turns z (n,) m into (electrodes, n), in V per V.

    Slopes are differenced over a hundredth of a step.  Raises ValueError when the field is not
    quenched at the ends of `between_m` (m): particles would feel a force that is not there.
    """
    count = ceil((between_m[1] - between_m[0]) / step_m) + 1
    step = (between_m[1] - between_m[0]) / (count - 1)
    z_m = np.asarray(between_m[0] + step * np.arange(count), dtype=float)
    half = step / 200.0
    slope = (unit_V(np.asarray(z_m + half)) - unit_V(np.asarray(z_m - half))) / (2 * half)
    steepest = np.abs(slope).max(axis=1)
    if (np.abs(slope[:, [0, -1]]).max(axis=1) > QUENCHED * steepest).any():
        raise ValueError("the potentials still have a slope at the ends of the table")
    return ForceTable(tuple(names), between_m[0], step, _levelled(slope), unit_V(z_m[:1])[:, 0])


@dataclass(frozen=True, slots=True)
class Basin:
    """A well: its bottom and the barriers on either side, places in m and U in V."""

    bottom_m: float
    bottom_V: float
    left_m: float
    left_V: float
    right_m: float
    right_V: float

    @property
    def barrier_V(self) -> float:
        """The lower of the two barriers, V."""
        return min(self.left_V, self.right_V)

    @property
    def depth_V(self) -> float:
        """From the bottom to the lower barrier, V."""
        return self.barrier_V - self.bottom_V


@dataclass(frozen=True, slots=True)
class AxisPotential:
    """U (V) and U' (V/m) at equally spaced nodes; between them U' is straight.

    `crest_V` (nodes - 1,) is the greatest U of every interval.
    """

    start_m: float
    step_m: float
    slope_V_per_m: FloatArray
    node_V: FloatArray
    crest_V: FloatArray

    @classmethod
    def of(
        cls, start_m: float, step_m: float, slope_V_per_m: FloatArray, left_V: float
    ) -> AxisPotential:
        """From slopes (nodes,) V/m, first node (m), step (m) and the potential there (V)."""
        rise = (slope_V_per_m[1:] + slope_V_per_m[:-1]) * (step_m / 2)
        node = left_V + np.concatenate(([0.0], np.cumsum(rise)))
        before, after = slope_V_per_m[:-1], slope_V_per_m[1:]
        top = (before > 0) & (after < 0)
        crest = np.maximum(node[:-1], node[1:])
        share = before[top] / (before[top] - after[top])
        crest[top] = node[:-1][top] + before[top] * share * (step_m / 2)
        return cls(start_m, step_m, slope_V_per_m, node, crest)

    @property
    def z_m(self) -> FloatArray:
        """The nodes (nodes,), m."""
        return np.asarray(self.start_m + self.step_m * np.arange(self.node_V.size))

    def at(self, z_m: ArrayLike) -> FloatArray:
        """U in V at z in m (shape kept); beyond the table as at its ends."""
        place = (np.asarray(z_m, dtype=float) - self.start_m) / self.step_m
        inside = np.clip(place, 0.0, self.node_V.size - 1.0)
        cell = np.minimum(inside.astype(np.intp), self.node_V.size - 2)
        share = inside - cell
        low = self.slope_V_per_m[cell]
        bend = (self.slope_V_per_m[cell + 1] - low) * (share / 2)
        return np.asarray(self.node_V[cell] + self.step_m * share * (low + bend))

    def holds(self, z_m: FloatArray, energy_eV: FloatArray) -> NDArray[np.bool_]:
        """Whether particles (n,) at z (m) with total energy (eV, per charge) are shut in: bool.

        They are when U rises above their energy somewhere on either side, in whole intervals.
        """
        from_left = np.maximum.accumulate(self.crest_V)
        from_right = np.maximum.accumulate(self.crest_V[::-1])[::-1]
        cell = np.floor((z_m - self.start_m) / self.step_m).astype(np.intp)
        inner = (cell >= 1) & (cell < self.crest_V.size - 1)
        cell = np.clip(cell, 1, self.crest_V.size - 2)
        wall = np.minimum(from_left[cell - 1], from_right[cell + 1])
        return np.asarray(inner & (wall > energy_eV))

    def basin(self, at_m: float, ripple_V: float = RIPPLE_V) -> Basin | None:
        """The well into which a particle at rest at `at_m` (m) slides; None when it slides out.

        Bumps of less than `ripple_V` (V) do not count.
        """
        here = round((at_m - self.start_m) / self.step_m)
        if not 0 <= here < self.node_V.size:
            return None
        bottom = self._downhill(here, ripple_V)
        left, right = (self._ridge(bottom, way, ripple_V) for way in (-1, 1))
        if left is None or right is None:
            return None
        return Basin(*self._turn(bottom, 1), *self._turn(left, -1), *self._turn(right, -1))

    def _downhill(self, here: int, ripple_V: float) -> int:
        """The node of the lowest U that can be reached without climbing more than the ripple."""
        found = here
        for way in (1, -1, 1, -1):
            line = self.node_V[found:] if way > 0 else self.node_V[found::-1]
            climb = line - np.minimum.accumulate(line)
            stop = int(np.argmax(climb > ripple_V)) or line.size
            found += way * int(np.argmin(line[:stop]))
        return found

    def _ridge(self, bottom: int, way: int, ripple_V: float) -> int | None:
        """The node of the first barrier on a side; None when there is none before the end."""
        line = self.node_V[bottom:] if way > 0 else self.node_V[bottom::-1]
        fall = np.maximum.accumulate(line) - line
        stop = int(np.argmax(fall > ripple_V)) or line.size
        top = int(np.argmax(line[:stop]))
        return bottom + way * top if line[top] - line[0] > ripple_V else None

    def _turn(self, node: int, bend: int) -> tuple[float, float]:
        """Place (m) and U (V) of the extremum next to a node: minimum (+1) or maximum (-1)."""
        for cell in (node - 1, node):
            if not 0 <= cell < self.crest_V.size:
                continue
            before, after = bend * self.slope_V_per_m[cell], bend * self.slope_V_per_m[cell + 1]
            if before < 0.0 <= after:
                share = before / (before - after)
                rise = self.slope_V_per_m[cell] * share * self.step_m / 2.0
                place = self.start_m + self.step_m * (cell + share)
                return float(place), float(self.node_V[cell] + rise)
        return self.start_m + self.step_m * node, float(self.node_V[node])
