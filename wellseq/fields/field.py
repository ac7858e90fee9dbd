"""A trap and voltages → potentials, wells, frequencies and the least depth of a ramp.

`Field` holds the unit potentials on the axis and their derivatives to the fourth order on equally
spaced nodes, from the disk if this geometry has been solved before.  Everything is linear in the
voltages: a set of voltages is a vector in the order of the electrodes, and an electrode that is not
named is at 0 V, as is the tube beyond the stack.

Shapes: phi (5, ne, nz).  Units: m, V, V/m^n per V, Hz.
Accuracy: nodes 1e-12 V/V, between them `error_V_per_V` (below 1e-10); tests/fields/test_field.py.
Source: uniform.py (the solver), certificate.py, minima.py.
"""

from __future__ import annotations

from collections import OrderedDict
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import isfinite, pi, sqrt
from typing import Any, Protocol

import numpy as np
from numpy.typing import ArrayLike

from wellseq.base.names import nearest, normal
from wellseq.fields import cache, uniform
from wellseq.fields.certificate import Region, certify
from wellseq.fields.hermite import Curve, FloatArray, controls
from wellseq.fields.minima import Well, wells

ORDERS = 5
_CURVES_MAX = 16


class TrapLike(Protocol):
    """What a field needs of a trap: its electrodes in order along the axis."""

    @property
    def electrodes(self) -> Sequence[uniform.Electrode]:
        """Electrodes in order along the axis."""


class SpeciesLike(Protocol):
    """What a frequency needs of a species: mass in kg, charge in C (with its sign)."""

    @property
    def mass_kg(self) -> float:
        """Mass, kg."""

    @property
    def charge_C(self) -> float:
        """Charge with its sign, C."""


@dataclass(frozen=True, slots=True)
class DepthBound:
    """The least depth of a side is in [lower_bound_V, upper_bound_V]; met at `fraction` (0-1)."""

    lower_bound_V: float
    upper_bound_V: float
    fraction: float


@dataclass(frozen=True, slots=True)
class LeastDepth:
    """The least depth of a ramp on each side, and the lesser of the two."""

    left: DepthBound
    right: DepthBound

    @property
    def least(self) -> DepthBound:
        """The side with the smaller lower bound."""
        return min(self.left, self.right, key=lambda side: side.lower_bound_V)


class Field:
    """The field of a trap's electrodes.

    `electrodes` names in order, `radius_m` of the bore, `z_m` (nz,) nodes 8 radii beyond the stack,
    `phi` (5, ne, nz) derivatives 0 … 4 on the axis per V, `error_V_per_V` between nodes,
    `gap_error_V_per_V` (ne,) what the rules for gaps leave out, an estimate.  `memory` is for
    floors above: what they found out in this field, by everything that it depends on.
    """

    def __init__(self, trap: TrapLike) -> None:
        """Solve the trap's stack or find it on the disk.

        Raises ValueError for a stack that is not a uniform bore or is too long for its bore.
        """
        parts = tuple(trap.electrodes)
        stack = uniform.stack_of(parts)
        axis = uniform.axis_of(stack)
        self.electrodes = tuple(part.name for part in parts)
        self.radius_m = stack.radius_m
        self.z_m = axis.z_m
        self.step_m = axis.step_m
        self.error_V_per_V = uniform.interpolation_error(stack, axis)
        self.gap_error_V_per_V = uniform.gap_error(stack).sum(axis=1)
        self._stack, self._axis = stack, axis
        self._spans = [(float(part.from_m), float(part.to_m)) for part in parts]
        self._index = {normal(name): i for i, name in enumerate(self.electrodes)}
        self._curves: OrderedDict[bytes, Curve] = OrderedDict()
        self._sizes: dict[int, FloatArray] = {}
        self._drifts: dict[tuple[bytes, int], FloatArray] = {}
        self.memory: dict[str, dict[bytes, Any]] = {}
        shape = (ORDERS, len(parts), axis.count)
        self.phi = cache.remembered(self._key(), shape, self._solve)
        self.phi.flags.writeable = False

    def _key(self) -> str:
        numbers = [*self._stack.centre_m, *self._stack.width_m, self.radius_m]
        grid = [self._axis.start_m, self._axis.step_m, float(self._axis.count)]
        words = [uniform.METHOD, np.__version__]
        return cache.key_of([*words, *(float(number) for number in [*numbers, *grid])])

    def _solve(self) -> FloatArray:
        table = uniform.unit_potentials(self._stack, self._axis, orders=range(ORDERS))
        return np.asarray(table[0])

    def vector(self, voltages: Mapping[str, float]) -> FloatArray:
        """Voltages by name (V) → (ne,) in the order of the electrodes; not named is 0 V.

        Raises ValueError for an unknown electrode (with the nearest name) or a value not finite.
        """
        result = np.zeros(len(self.electrodes))
        for name, volts in voltages.items():
            value = float(volts)
            if not isfinite(value):
                raise ValueError(f"electrode '{name}' cannot be at {volts} V")
            result[self.index(name)] = value
        return result

    def index(self, electrode: str) -> int:
        """The place of an electrode in every vector.  Raises ValueError for an unknown name."""
        found = self._index.get(normal(electrode))
        if found is None:
            hint = nearest(electrode, self.electrodes, "electrodes")
            raise ValueError(f"there is no electrode '{electrode}'; {hint}")
        return found

    def span_m(self, electrode: str) -> tuple[float, float]:
        """Where an electrode begins and ends, in m.  Raises ValueError for an unknown name."""
        return self._spans[self.index(electrode)]

    def curve(self, vector: FloatArray) -> Curve:
        """Potential on the axis of electrodes at `vector` (ne,) V; the last few are remembered."""
        key = vector.tobytes()
        found = self._curves.get(key)
        if found is None:
            found = Curve(np.matmul(vector, self.phi), *self._spacing())
            self._curves[key] = found
            if len(self._curves) > _CURVES_MAX:
                self._curves.popitem(last=False)
        return found

    def _spacing(self) -> tuple[float, float, float]:
        return self._axis.start_m, self.step_m, uniform.SLOWEST_MODE / self.radius_m

    def at(self, vector: FloatArray, z_m: ArrayLike, order: int = 0) -> FloatArray:
        """Derivative 0, 1 or 2 of φ (V/m^order, shape of z) at z in m for voltages (ne,) V."""
        return self.curve(vector).at(z_m, order)

    def control_size(self, order: int) -> FloatArray:
        """Bound (ne, nz − 1) of |φ_e's derivative 0, 1 or 2| on every interval, V/m^order per V."""
        if order not in self._sizes:
            table = controls(self.phi[order : order + 3], self.step_m)
            self._sizes[order] = np.abs(table).max(axis=0)
        return self._sizes[order]

    def drift(self, deviation: FloatArray, order: int) -> FloatArray:
        """Bound (nz − 1,), V/m^order, of what deviations ± (ne,) V do to a derivative 0, 1 or 2."""
        if not deviation.any():
            return np.zeros(self.z_m.size - 1)
        key = (deviation.tobytes(), order)
        if key not in self._drifts:
            if len(self._drifts) >= _CURVES_MAX:
                self._drifts.clear()
            self._drifts[key] = deviation @ self.control_size(order)
        return self._drifts[key]

    def error(self, order: int) -> float:
        """Greatest error between nodes of the derivative of order 0, 1 or 2, V/m^order per V."""
        return uniform.interpolation_error(self._stack, self._axis, order)

    def nodes_within(self, region_m: tuple[float, float]) -> Region:
        """The inclusive node indices inside a span (m).

        Raises ValueError for a span that holds no node or leaves the axis.
        """
        low, high = region_m
        if not (low <= high and low >= self.z_m[0] and high <= self.z_m[-1]):
            raise ValueError(
                f"({low:g}, {high:g}) m is not a span of the axis from {self.z_m[0]:g} "
                f"to {self.z_m[-1]:g} m"
            )
        first = int(np.searchsorted(self.z_m, low, side="left"))
        last = int(np.searchsorted(self.z_m, high, side="right")) - 1
        if first > last:
            raise ValueError(
                f"({low:g}, {high:g}) m is narrower than the nodes, {self.step_m:g} m apart"
            )
        return first, last

    def potential(
        self, voltages: Mapping[str, float], z_m: ArrayLike, r_m: float = 0.0
    ) -> FloatArray:
        """Potential in V (shape of z) at z and radius r in m; electrodes not named are at 0 V.

        Raises ValueError for an unknown electrode, a radius beyond 0.9 of the bore's, or no place.
        """
        vector = self.vector(voltages)
        if np.isnan(z_m).any():
            raise ValueError("a place along the axis is not a number")
        if r_m == 0.0:
            return self.curve(vector).exact(z_m)
        nodes, axis = uniform.potential_nodes(self._stack, vector, r_m)
        decay_per_m = uniform.SLOWEST_MODE / self.radius_m
        return Curve(nodes, axis.start_m, axis.step_m, decay_per_m).exact(z_m)

    def wells(
        self,
        voltages: Mapping[str, float],
        charge_sign: float,
        between_m: tuple[float, float] | None = None,
    ) -> list[Well]:
        """All wells on the axis for charges of this sign, left to right, inside `between_m` (m).

        Raises ValueError for an unknown electrode or a sign other than +1 or −1.
        """
        sign = _sign(charge_sign)
        return wells(self.curve(sign * self.vector(voltages)), sign, between_m)

    def axial_frequency_Hz(self, well: Well, species: SpeciesLike) -> float:
        """Small-amplitude bounce frequency √(|q| U″/m)/2π of one particle in a well, in Hz.

        Source: L. S. Brown, G. Gabrielse, Rev. Mod. Phys. 58, 233 (1986).
        """
        return sqrt(abs(species.charge_C) * well.curvature_V_m2 / species.mass_kg) / (2 * pi)

    def least_depth(
        self,
        start: Mapping[str, float],
        end: Mapping[str, float],
        charge_sign: float,
        well_m: tuple[float, float],
        left_m: tuple[float, float],
        right_m: tuple[float, float],
    ) -> LeastDepth:
        """The least depth on a straight ramp from `start` to `end` (V), regions given in m.

        Regions are taken from node to node inside the spans given, which can only cost depth.
        Raises ValueError for unknown electrodes or spans that leave the axis.
        """
        base, stop = self.vector(start), self.vector(end)
        well, left, right = (self.nodes_within(span) for span in (well_m, left_m, right_m))
        move = (stop - base)[None, :]
        found = certify(self, _sign(charge_sign), base, move, well, left, right, 1e-6)
        bounds = [
            DepthBound(side.lower_V, side.upper_V, side.progress[0])
            for side in (found.left, found.right)
            if side is not None
        ]
        return LeastDepth(*bounds)


def _sign(charge_sign: float) -> float:
    if charge_sign not in (1, -1):
        raise ValueError(f"the sign of a charge is +1 or -1, not {charge_sign}")
    return float(charge_sign)
