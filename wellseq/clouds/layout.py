"""A wall and the clouds in it → the grid on which they are solved, and their wells on the axis.

The empty bore's exact potential on the axis has the wells; the log column (cheap.py) says how far
each cloud will reach; the fine part of the grid covers all of them and a margin.

Units: m, V, eV.  Accuracy of the choice: the interval carried by equilibrium.py, measured in
tests/clouds/test_equilibrium.py.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from wellseq.clouds.axis import AxisWell, axis_well
from wellseq.clouds.cheap import log_column
from wellseq.clouds.constants import COULOMB_VM, THERMAL_EV_PER_K
from wellseq.clouds.grid import RINGS, SLICES, SLICES_PER_RADIUS, Grid, grid_for
from wellseq.clouds.wall import Wall
from wellseq.fields.hermite import FloatArray

AxisPotential = Callable[[FloatArray], FloatArray]
REACH_RADII = 6.0
"""The tube goes on for this many bore radii beyond the outermost barrier."""
_SLICES_MAX, _RINGS_MAX, _SAMPLES_MAX = 280, 60, 40_000
_RADIUS_STEPS = 3


@dataclass(frozen=True, slots=True)
class RadialProfile:
    """Column density (particles per area, any scale) at rising radii in m; 0 beyond the last."""

    radius_m: FloatArray
    density: FloatArray

    def counts(self, grid: Grid, number: float) -> FloatArray:
        """How many of `number` particles are in each ring (nr,)."""
        column = np.interp(grid.r_m, self.radius_m, self.density, right=0.0) * grid.area_m2
        return np.asarray(number * column / column.sum())

    @property
    def mean_radius_m(self) -> float:
        """√(2⟨r²⟩) in m, between the radii by straight lines."""
        r = np.linspace(0.0, float(self.radius_m[-1]), 2001)
        weight = np.interp(r, self.radius_m, self.density) * r
        return float(np.sqrt(2 * (weight * r**2).sum() / weight.sum()))


@dataclass(frozen=True, slots=True)
class Cloud:
    """What is known of a cloud: signed charge (e), mass, number, temperature and its place.

    `between_m` are the two barriers of its well on the axis.  Exactly one of these is given:
    `radius_m`, √(2⟨r²⟩), which a ramp conserves; `pressure_V_per_m2`, κ; or `profile`, measured:
    then each radius is on its own in equilibrium along z.
    """

    charge_e: int
    mass_kg: float
    number: float
    temperature_K: float
    between_m: tuple[float, float]
    radius_m: float | None = None
    pressure_V_per_m2: float | None = None
    profile: RadialProfile | None = None

    @property
    def thermal_eV(self) -> float:
        """kT in eV."""
        return THERMAL_EV_PER_K * self.temperature_K


def tube_of(wall: Wall, clouds: Sequence[Cloud]) -> tuple[float, float]:
    """Where the grid ends (m): 6 bore radii beyond the outermost barrier."""
    reach = REACH_RADII * wall.radius_m
    return (
        min(cloud.between_m[0] for cloud in clouds) - reach,
        max(cloud.between_m[1] for cloud in clouds) + reach,
    )


def empty_wells(
    axis_V: AxisPotential,
    wall_radius_m: float,
    clouds: Sequence[Cloud],
    tube_m: tuple[float, float],
) -> list[AxisWell]:
    """Each cloud's well in the empty bore, exact on the axis, looked for inside `tube_m` (m).

    `axis_V` is the potential (V) at places on the axis (m).
    Raises ValueError for barriers closer than two samples, a hundredth of the bore's radius each.
    """
    count = int(np.clip(100 * (tube_m[1] - tube_m[0]) / wall_radius_m, 200, _SAMPLES_MAX))
    z_m = np.linspace(*tube_m, count)
    potential_V = axis_V(z_m)
    return [axis_well(z_m, potential_V, cloud.charge_e, cloud.between_m) for cloud in clouds]


def radius_of(cloud: Cloud, well: AxisWell, wall: Wall) -> float:
    """The cloud's radius √(2⟨r²⟩) in m, estimated where only its rotation is given."""
    if cloud.radius_m is not None:
        return cloud.radius_m
    if cloud.profile is not None:
        return cloud.profile.mean_radius_m
    pressure = cloud.pressure_V_per_m2 or 0.0
    length = well.right_m - well.left_m
    radius = wall.radius_m / 2
    for _ in range(_RADIUS_STEPS):
        scale = cloud.charge_e**2 * COULOMB_VM * cloud.number / length
        radius = min(np.sqrt((scale + 2 * cloud.thermal_eV) / pressure), 0.9 * wall.radius_m)
        found = _column(cloud, well, wall, radius)
        length = found if np.isfinite(found) else length
    return float(radius)


def grid_of(
    wall: Wall,
    clouds: Sequence[Cloud],
    wells: Sequence[AxisWell],
    tube_m: tuple[float, float],
    fineness: float = 1.0,
) -> Grid:
    """The grid for these clouds in their empty wells, to the ends of the tube (m).

    `fineness` divides every step.
    """
    radii = [radius_of(cloud, well, wall) for cloud, well in zip(clouds, wells, strict=True)]
    spans = [
        _span_m(cloud, well, wall, radius)
        for cloud, well, radius in zip(clouds, wells, radii, strict=True)
    ]
    low, high = min(span[0] for span in spans), max(span[1] for span in spans)
    shortest = min(span[1] - span[0] for span in spans)
    # A short cloud beside a long one still gets slices of its own.
    slices = int(np.clip(SLICES / 2 * (high - low) / shortest, SLICES, _SLICES_MAX))
    detail = (
        max(min(low, *(well.left_m - wall.radius_m for well in wells)), tube_m[0]),
        min(max(high, *(well.right_m + wall.radius_m for well in wells)), tube_m[1]),
    )
    return grid_for(
        wall_radius_m=wall.radius_m,
        cloud_radius_m=max(radii),
        fine_m=(low, high),
        detail_m=detail,
        tube_m=tube_m,
        rings=int(np.clip(RINGS * max(radii) / min(radii), RINGS, _RINGS_MAX)),
        slices=max(slices, math.ceil(SLICES_PER_RADIUS * (high - low) / wall.radius_m)),
        fineness=fineness,
    )


def _column(cloud: Cloud, well: AxisWell, wall: Wall, radius_m: float) -> float:
    return log_column(
        well=well,
        charge_e=cloud.charge_e,
        number=cloud.number,
        temperature_K=cloud.temperature_K,
        radius_m=radius_m,
        wall_radius_m=wall.radius_m,
    ).length_m


def _span_m(cloud: Cloud, well: AxisWell, wall: Wall, radius_m: float) -> tuple[float, float]:
    """Where the cloud will be, with a margin, and inside its barriers."""
    column = log_column(
        well=well,
        charge_e=cloud.charge_e,
        number=cloud.number,
        temperature_K=cloud.temperature_K,
        radius_m=radius_m,
        wall_radius_m=wall.radius_m,
    )
    level = column.space_charge_eV / 2 * 1.1 + 12 * cloud.thermal_eV
    if not level < well.depth_eV:
        return well.left_m, well.right_m
    left, right = well.ends_m()(level)
    margin = 1.5 * radius_m + 0.05 * (right - left)
    return max(left - margin, well.left_m), min(right + margin, well.right_m)
