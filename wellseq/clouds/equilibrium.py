"""Clouds in a bore with given wall potentials → thermal equilibrium with space charge.

How deep is each well still, how long and dense is the cloud, does it fit at all?  The mean-field
equations and their solution are in newton.py, the grid in grid.py and layout.py.  The empty bore's
potential comes from the same discrete operator as the clouds' own, so that the two errors cancel.

Units: SI, energies in eV per particle.  Shapes: fields (nz, nr).
Accuracy: depths 0.3 % of the vacuum depth, density 2 %, length, κ and rotation 1 % on the
grid that layout.py chooses; these are the intervals.  Measured in tests/clouds/test_equilibrium.py
(worked examples, cold spheroids, a long column) and test_equilibrium_wells.py (random clouds).
Source (from memory): S. A. Prasad, T. M. O'Neil, Phys. Fluids 22, 278 (1979); D. H. E. Dubin,
T. M. O'Neil, Rev. Mod. Phys. 71, 87 (1999).
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from wellseq.clouds import scales
from wellseq.clouds.at_rest import (
    DECREMENT,
    DEPTH_THERMAL_MIN,
    FULL_WELL,
    MODEL,
    VACUUM_DEPTH,
    AtRest,
    measured,
    nothing,
)
from wellseq.clouds.axis import AxisWell, axis_well
from wellseq.clouds.bessel import bessel_levels
from wellseq.clouds.figures import Outside
from wellseq.clouds.grid import CELLS_MAX, UNIFORM_RADII, Grid, TooLarge
from wellseq.clouds.inputs import unusable
from wellseq.clouds.layout import AxisPotential, Cloud, empty_wells, grid_of, radius_of, tube_of
from wellseq.clouds.newton import Rest, rest
from wellseq.clouds.shares import Charges
from wellseq.clouds.wall import Wall
from wellseq.fields.hermite import FloatArray

DECREMENT_MAX = 1e-6
KEPT_RADII = 3.3
"""A cloud is solved out to this many of its radii: a plain one has e⁻²² of itself beyond."""
NARROWEST = 0.4
"""Barriers nearer than this many bore radii are no well that a grid resolves."""
HOPELESS = 1.5
"""A column that fills its well and has this many times the well's depth is not worth solving."""


@dataclass(frozen=True, slots=True)
class Equilibrium:
    """All clouds at rest together, and the fields (nz, nr) in V to go on from.

    Grid and fields are None when no solution was tried.
    """

    clouds: tuple[AtRest, ...]
    outside: tuple[Outside, ...]
    grid: Grid | None = None
    vacuum_V: FloatArray | None = None
    solved: Rest | None = None

    @property
    def total_on_axis_V(self) -> FloatArray:
        """Total potential (nz,) in V on the axis.  Raises ValueError without a solution."""
        if self.grid is None or self.vacuum_V is None or self.solved is None:
            raise ValueError("there is no solution")
        return self.grid.on_axis(self.vacuum_V + self.solved.own_V)


def equilibrium(
    *,
    wall: Wall,
    clouds: Sequence[Cloud],
    magnetic_field_T: float,
    tube_m: tuple[float, float] | None = None,
    start: Equilibrium | None = None,
    grid: Grid | None = None,
    axis_V: AxisPotential | None = None,
) -> Equilibrium:
    """Thermal equilibrium of these clouds, at B in T, in a bore that ends at `tube_m` (zero slope).

    `start` is an earlier solution for as many clouds of nearly the same place and radius, as on the
    next step of a ramp: its grid is used again when it still fits.  `grid` overrules the choice.
    `axis_V` is the empty bore's potential (V) at places on the axis (m), to which all depths are
    tied, such as a field's own curve; by default that of the wall, exact.
    Raises ValueError for a cloud without charge, or not exactly one of radius, κ and profile.
    """
    refused = _refused(wall, clouds, magnetic_field_T)
    if refused:
        return Equilibrium(tuple(nothing(math.nan, refused) for _ in clouds), refused)
    ends = tube_m or tube_of(wall, clouds)
    wells = empty_wells(axis_V or wall.on_axis().exact, wall.radius_m, clouds, ends)
    hopeless = _hopeless(wall, clouds, wells)
    if hopeless:
        return Equilibrium(tuple(nothing(w.depth_eV, hopeless) for w in wells), hopeless)
    try:
        wanted = grid or grid_of(wall, clouds, wells, ends)
    except TooLarge as large:
        reason = (Outside(MODEL, "cells of the grid", float(large.cells), float(CELLS_MAX)),)
        return Equilibrium(tuple(nothing(w.depth_eV, reason) for w in wells), reason)
    first = None
    if start is not None and grid is None and _goes_on(start, wanted, len(clouds)):
        wanted, first = start.grid or wanted, start.solved
    vacuum_V = wanted.vacuum_V(wall)
    empty_V = wanted.on_axis(vacuum_V)
    empty = [axis_well(wanted.z_m, empty_V, cloud.charge_e, cloud.between_m) for cloud in clouds]
    charges = [
        _charges(wanted, cloud, well, radius_of(cloud, well, wall))
        for cloud, well in zip(clouds, empty, strict=True)
    ]
    scale = max(_scale_eV(cloud, well) for cloud, well in zip(clouds, empty, strict=True))
    solved = rest(
        grid=wanted, vacuum_V=vacuum_V, clouds=charges, energy_scale_eV=scale, start=first
    )
    found = Equilibrium((), (), wanted, vacuum_V, solved)
    return _judged(clouds, magnetic_field_T, found, charges, wells)


def _refused(wall: Wall, clouds: Sequence[Cloud], field_T: float) -> tuple[Outside, ...]:
    """What makes the inputs no clouds at all."""
    found = list(unusable(MODEL, magnetic_field_T=field_T))
    if not clouds:
        found.append(Outside(MODEL, "number of clouds", 0.0, 1.0, "", "at least"))
    for cloud in clouds:
        found += _refused_cloud(wall, cloud)
    return tuple(found)


def _refused_cloud(wall: Wall, cloud: Cloud) -> list[Outside]:
    found = list(unusable(MODEL, temperature_K=cloud.temperature_K, mass_kg=cloud.mass_kg))
    if not (cloud.number >= 1.0 and math.isfinite(cloud.number)):
        found.append(Outside(MODEL, "number of particles", cloud.number, 1.0, "", "at least"))
    width = cloud.between_m[1] - cloud.between_m[0]
    if not (width >= NARROWEST * wall.radius_m and math.isfinite(width)):
        least = NARROWEST * wall.radius_m
        found.append(Outside(MODEL, "distance of the barriers", width, least, "m", "at least"))
    given = (cloud.radius_m, cloud.pressure_V_per_m2, cloud.profile)
    if sum(item is not None for item in given) != 1 or cloud.charge_e == 0:
        raise ValueError("a cloud has a charge and one of radius, pressure and profile")
    if cloud.pressure_V_per_m2 is not None:
        return [*found, *unusable(MODEL, pressure_V_per_m2=cloud.pressure_V_per_m2)]
    radius = cloud.radius_m if cloud.profile is None else cloud.profile.mean_radius_m
    found += unusable(MODEL, radius_m=radius or 0.0)
    # A uniform bore full of charge has that radius: wider is no cloud.
    widest = wall.radius_m / math.sqrt(2)
    if radius is not None and radius > widest:
        found.append(Outside(MODEL, "radius", radius, widest, "m"))
    return found


def _hopeless(
    wall: Wall, clouds: Sequence[Cloud], wells: Sequence[AxisWell]
) -> tuple[Outside, ...]:
    """Wells that do not exist, or that a lone cloud overfills without any doubt."""
    found = [
        Outside(
            MODEL,
            VACUUM_DEPTH,
            well.depth_eV,
            DEPTH_THERMAL_MIN * cloud.thermal_eV,
            "eV",
            "at least",
        )
        for cloud, well in zip(clouds, wells, strict=True)
        if not well.depth_eV > DEPTH_THERMAL_MIN * cloud.thermal_eV
    ]
    if len(clouds) == 1 and not found:
        cloud, well = clouds[0], wells[0]
        length = well.right_m - well.left_m
        scale = scales.space_charge_scale_V(number=cloud.number, length_m=length)
        radius = radius_of(cloud, well, wall) / wall.radius_m
        middle = cloud.charge_e**2 * scale * bessel_levels(length / wall.radius_m, radius)[0]
        if not middle < HOPELESS * well.depth_eV:
            limit = HOPELESS * well.depth_eV
            found.append(Outside(MODEL, FULL_WELL, middle, limit, "eV"))
    return tuple(found)


def _goes_on(start: Equilibrium, wanted: Grid, count: int) -> bool:
    """Whether an earlier solution of as many clouds is one to start from."""
    if start.grid is None or start.solved is None or start.solved.decrement > DECREMENT_MAX:
        return False
    return len(start.solved.shares) == count and _still_fits(start.grid, wanted)


def _still_fits(grid: Grid, wanted: Grid) -> bool:
    """Whether a grid will do in place of the one wanted now."""
    low, high = _fine(wanted)
    old_low, old_high = _fine(grid)
    # The span wanted has a margin of more than this on either side.
    slack = wanted.r_face_m[wanted.uniform_rings] / UNIFORM_RADII
    inside = old_low - slack <= low and high <= old_high + slack
    thick = grid.r_face_m[grid.uniform_rings] / wanted.r_face_m[wanted.uniform_rings]
    same_tube = (
        abs(grid.z_face_m[0] - wanted.z_face_m[0]) + abs(grid.z_face_m[-1] - wanted.z_face_m[-1])
        < grid.r_face_m[-1]
    )
    return inside and old_high - old_low <= 1.7 * (high - low) and 0.85 < thick < 1.2 and same_tube


def _fine(grid: Grid) -> tuple[float, float]:
    """The span of the shortest slices."""
    size = np.diff(grid.z_face_m)
    short = np.flatnonzero(size <= size.min() * (1 + 1e-6))
    return float(grid.z_face_m[short[0]]), float(grid.z_face_m[short[-1] + 1])


def _charges(grid: Grid, cloud: Cloud, well: AxisWell, radius_m: float) -> Charges:
    first = int(np.argmin(np.abs(grid.z_m - well.left_m)))
    last = int(np.argmin(np.abs(grid.z_m - well.right_m)))
    reach_m = KEPT_RADII * radius_m
    if cloud.profile is not None:
        reach_m = max(reach_m, float(cloud.profile.radius_m[-1]))
    rings = max(3, int(np.searchsorted(grid.r_m, reach_m)))
    counts = None
    if cloud.profile is not None:
        counts = cloud.profile.counts(grid, cloud.number)[:rings]
    return Charges(
        charge_e=cloud.charge_e,
        number=cloud.number,
        thermal_eV=cloud.thermal_eV,
        first=first,
        last=last + 1,
        rings=rings,
        mean_r2_m2=None if cloud.radius_m is None else cloud.radius_m**2 / 2,
        pressure_V_per_m2=cloud.pressure_V_per_m2,
        profile=counts,
    )


def _scale_eV(cloud: Cloud, well: AxisWell) -> float:
    half = (well.right_m - well.left_m) / 2
    return cloud.charge_e**2 * scales.space_charge_scale_V(number=cloud.number, length_m=half)


def _judged(
    clouds: Sequence[Cloud],
    field_T: float,
    found: Equilibrium,
    charges: Sequence[Charges],
    wells: Sequence[AxisWell],
) -> Equilibrium:
    """Measure every cloud; one that is outside leaves no figure for any."""
    grid, solved, vacuum_V = found.grid, found.solved, found.vacuum_V
    assert grid is not None
    assert solved is not None
    assert vacuum_V is not None
    if not solved.decrement <= DECREMENT_MAX:
        lost = (Outside(MODEL, DECREMENT, solved.decrement, DECREMENT_MAX),)
        return replace(found, clouds=tuple(nothing(w.depth_eV, lost) for w in wells), outside=lost)
    empty_V, total_V = grid.on_axis(vacuum_V), found.total_on_axis_V
    measures = [
        measured(
            cloud=cloud,
            magnetic_field_T=field_T,
            grid=grid,
            exact=wells[number],
            empty_V=empty_V,
            total_V=total_V,
            charges=charges[number],
            shares=solved.shares[number],
            pressure_V_per_m2=solved.pressure_V_per_m2[number],
        )
        for number, cloud in enumerate(clouds)
    ]
    outside = tuple(reason for item in measures for reason in item.outside)
    if outside:
        return replace(
            found,
            clouds=tuple(nothing(item.vacuum_depth_eV, outside) for item in measures),
            outside=outside,
        )
    return replace(found, clouds=tuple(measures))
