"""One cloud on a grid → the share of its particles in each cell, and what Newton's method needs.

With U = q (φ_vac + φ) + κ r² the share of a cell is p = V exp(−U/θ)/Z.  Either one sum Z runs over
the whole cloud, or, where the number at each radius was measured, one Z_i over each radius.

Shapes: cells (last − first, rings); fields (nz, nr).  Units: V, eV, m, V/m² for κ.
Accuracy: tests/clouds/test_newton.py.  Source: newton.py.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from wellseq.clouds.grid import Grid
from wellseq.fields.hermite import FloatArray


@dataclass(frozen=True, slots=True)
class Charges:
    """One cloud for the solver: `charge_e` (signed number of e), `number`, `thermal_eV`.

    It lives in the cells `first` … `last` − 1 along z and in the innermost `rings`: outside its
    well exp(g) would fill the next one, or the space before a lower wall.  Exactly one of
    `mean_r2_m2` (⟨r²⟩), `pressure_V_per_m2` (κ) and `profile` (rings,), the number of particles at
    each radius, is given.
    """

    charge_e: int
    number: float
    thermal_eV: float
    first: int
    last: int
    rings: int
    mean_r2_m2: float | None = None
    pressure_V_per_m2: float | None = None
    profile: FloatArray | None = None

    @property
    def span(self) -> tuple[slice, slice]:
        """Its cells in a field (nz, nr)."""
        return slice(self.first, self.last), slice(0, self.rings)


class Shares:
    """A cloud at given φ and κ: `logs` ln p and `values` p, both (last − first, rings)."""

    def __init__(self, cloud: Charges, grid: Grid, vacuum_V: FloatArray) -> None:
        self.cloud = cloud
        self.r2_m2 = grid.r2_m2[: cloud.rings]
        self._log_volume = np.log(grid.volume_m3[cloud.span])
        self._vacuum_V = vacuum_V[cloud.span]
        self._axis = None if cloud.profile is None else 0
        self.counts = np.array([cloud.number]) if cloud.profile is None else cloud.profile
        self.logs = self.values = np.empty(0)

    @property
    def free(self) -> bool:
        """Whether κ is an unknown."""
        return self.cloud.mean_r2_m2 is not None

    @property
    def held(self) -> FloatArray:
        """Particles in each cell."""
        return np.asarray(self.values * self.counts)

    @property
    def mean_r2_m2(self) -> float:
        """⟨r²⟩ in m² of the shares as they are."""
        return float((self.values * self.r2_m2).sum())

    def update(self, own_V: FloatArray, pressure_V_per_m2: float) -> None:
        """Take the potential (nz, nr) in V and κ in V/m² and share the particles anew."""
        cloud = self.cloud
        energy = cloud.charge_e * (self._vacuum_V + own_V[cloud.span])
        if cloud.profile is None:
            energy = energy + pressure_V_per_m2 * self.r2_m2
        exponent = self._log_volume - energy / cloud.thermal_eV
        top = exponent.max(axis=self._axis, keepdims=True)
        total = np.exp(exponent - top).sum(axis=self._axis, keepdims=True)
        self.logs = exponent - top - np.log(total)
        self.values = np.exp(self.logs)

    def columns(self) -> FloatArray:
        """Vectors (cells, k) of the Hessian's outer products: p, or each radius's own p."""
        if self.cloud.profile is None:
            return self.values[:, :, None]
        kept = np.flatnonzero(self.counts > 0)
        table = np.zeros((*self.values.shape, kept.size))
        table[:, kept, np.arange(kept.size)] = self.values[:, kept]
        return table

    def weights(self) -> FloatArray:
        """Weights (k,) of the outer products: q² N/θ."""
        counts = self.counts[self.counts > 0]
        return np.asarray(self.cloud.charge_e**2 * counts / self.cloud.thermal_eV)

    def move(self, own_V: FloatArray, pressure_V_per_m2: float) -> FloatArray:
        """Change of the exponent (cells), less its mean, for changes of φ (V) and κ (V/m²)."""
        energy = self.cloud.charge_e * own_V[self.cloud.span]
        if self.free:
            energy = energy + pressure_V_per_m2 * self.r2_m2
        change = -energy / self.cloud.thermal_eV
        mean = (self.values * change).sum(axis=self._axis, keepdims=True)
        return np.asarray(change - mean)

    def convex_part_eV(self, move: FloatArray) -> float:
        """Σ N θ ln⟨exp(move)⟩: how much more N θ ln Z changes than its slope says.

        Small moves go through expm1 and log1p, so that nothing is lost beside a large ln Z.
        """
        if np.abs(move).max() <= 0.5:
            small = np.expm1(move) - move
            logs = np.log1p((self.values * small).sum(axis=self._axis))
        else:
            total = self.logs + move
            top = total.max(axis=self._axis)
            logs = top + np.log(np.exp(total - top).sum(axis=self._axis))
        return float(self.cloud.thermal_eV * (self.counts * logs).sum())
