"""Clouds in a bore with given wall potentials → thermal equilibrium with space charge.

How deep is each well still, how long and dense is the cloud, does it fit at all?  The mean-field
equations and their solution are in newton.py, the grid in grid.py and layout.py.  The empty bore's
potential comes from the same discrete operator as the clouds' own, so that the two errors cancel.

Units: SI, energies in eV per particle.  Shapes: fields (nz, nr).
Accuracy: depths 0.3 % of the vacuum depth, density 1 %, length 0.5 %, κ and rotation 1 % on the
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
from wellseq.clouds.axis import AxisWell, axis_well
from wellseq.clouds.cheap import bessel_energies_eV
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside, around
from wellseq.clouds.grid import Grid
from wellseq.clouds.inputs import unusable
from wellseq.clouds.layout import Cloud, empty_wells, grid_of, radius_of, tube_of
from wellseq.clouds.newton import Charges, Rest, rest
from wellseq.clouds.wall import Wall
from wellseq.fields.hermite import FloatArray

MODEL = "thermal equilibrium"
DEPTH_SHARE, DENSITY_SHARE, LENGTH_SHARE, PRESSURE_SHARE = 0.003, 0.01, 0.005, 0.01
EDGE_SHARE_MAX = 1e-6
DECREMENT_MAX = 1e-6
BRILLOUIN_SHARE_MAX = 0.1
COUPLING_MAX = 1.0
DEPTH_THERMAL_MIN = 4.0
HOPELESS = 1.5
"""A column that fills its well and has this many times the well's depth is not worth solving."""


@dataclass(frozen=True, slots=True)
class AtRest:
    """One cloud in equilibrium.  Everything but the vacuum depth is NaN outside validity.

    Depths (eV) reach from the bottom of the total potential on the axis to its barriers at
    `left_m`, `right_m`; `space_charge_eV` is the own potential's part of the bottom, `potential_V`
    the total potential there.  `length_m` = √12 z_rms, `radius_m` = √(2⟨r²⟩); the cloud's density
    on the axis falls to half at `left_end_m`, `right_end_m`.  `edge_share` of the particles stands
    in the cells at the barriers.
    """

    vacuum_depth_eV: float
    depth_eV: Figure
    depth_left_eV: Figure
    depth_right_eV: Figure
    left_m: float
    right_m: float
    space_charge_eV: float
    potential_V: float
    centre_m: float
    length_m: Figure
    left_end_m: float
    right_end_m: float
    radius_m: float
    density_per_m3: Figure
    pressure_V_per_m2: Figure
    rotation_rad_per_s: Figure
    debye_length_m: float
    coupling: float
    brillouin_share: float
    edge_share: float
    outside: tuple[Outside, ...] = ()


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
) -> Equilibrium:
    """Thermal equilibrium of these clouds, at B in T, in a bore that ends at `tube_m` (zero slope).

    `start` is an earlier solution for as many clouds of nearly the same place and radius, as on the
    next step of a ramp: its grid is used again when it still fits.  `grid` overrules the choice.
    """
    refused = _refused(wall, clouds, magnetic_field_T)
    if refused:
        return Equilibrium(tuple(_nothing(math.nan, refused) for _ in clouds), refused)
    ends = tube_m or tube_of(wall, clouds)
    wells = empty_wells(wall, clouds, ends)
    hopeless = _hopeless(wall, clouds, wells)
    if hopeless:
        return Equilibrium(tuple(_nothing(w.depth_eV, hopeless) for w in wells), hopeless)
    wanted = grid or grid_of(wall, clouds, wells, ends)
    first = None
    if start is not None and start.grid is not None and start.solved is not None:
        if len(start.solved.shares) == len(clouds) and _still_fits(start.grid, wanted):
            wanted, first = start.grid, start.solved
    vacuum_V = wanted.vacuum_V(wall)
    axis_V = wanted.on_axis(vacuum_V)
    empty = [axis_well(wanted.z_m, axis_V, cloud.charge_e, cloud.between_m) for cloud in clouds]
    charges = [_charges(wanted, cloud, well) for cloud, well in zip(clouds, empty, strict=True)]
    scale = max(_scale_eV(cloud, well) for cloud, well in zip(clouds, empty, strict=True))
    solved = rest(wanted, vacuum_V, charges, first, scale)
    return _judged(clouds, magnetic_field_T, Equilibrium((), (), wanted, vacuum_V, solved), charges)


def _refused(wall: Wall, clouds: Sequence[Cloud], field_T: float) -> tuple[Outside, ...]:
    """What makes the inputs no clouds at all."""
    found = list(unusable(MODEL, magnetic_field_T=field_T))
    if not clouds:
        found.append(Outside(MODEL, "number of clouds", 0.0, 1.0, "", "at least"))
    for cloud in clouds:
        found += unusable(MODEL, temperature_K=cloud.temperature_K, mass_kg=cloud.mass_kg)
        if not cloud.number >= 1.0 or not math.isfinite(cloud.number):
            found.append(Outside(MODEL, "number of particles", cloud.number, 1.0, "", "at least"))
        given = (cloud.radius_m, cloud.pressure_V_per_m2, cloud.profile)
        if sum(item is not None for item in given) != 1 or cloud.charge_e == 0:
            raise ValueError("a cloud has a charge and one of radius, pressure and profile")
        radius = cloud.radius_m
        if cloud.profile is not None:
            radius = cloud.profile.mean_radius_m
        if radius is not None:
            found += unusable(MODEL, radius_m=radius)
            # A cloud that touches the wall is no cloud: half the bore is already beyond use.
            if radius > wall.radius_m / math.sqrt(2):
                limit = wall.radius_m / math.sqrt(2)
                found.append(Outside(MODEL, "cloud radius", radius, limit, "m"))
        elif cloud.pressure_V_per_m2 is not None:
            found += unusable(MODEL, pressure_V_per_m2=cloud.pressure_V_per_m2)
    return tuple(found)


def _hopeless(
    wall: Wall, clouds: Sequence[Cloud], wells: Sequence[AxisWell]
) -> tuple[Outside, ...]:
    """Wells that do not exist, or that a lone cloud overfills without any doubt."""
    found = [
        Outside(MODEL, "vacuum depth", well.depth_eV, DEPTH_THERMAL_MIN * cloud.thermal_eV, "eV", "at least")
        for cloud, well in zip(clouds, wells, strict=True)
        if not well.depth_eV > DEPTH_THERMAL_MIN * cloud.thermal_eV
    ]
    if len(clouds) == 1 and not found:
        cloud, well = clouds[0], wells[0]
        middle, _ = bessel_energies_eV(
            charge_e=cloud.charge_e,
            number=cloud.number,
            length_m=well.right_m - well.left_m,
            radius_m=radius_of(cloud, well, wall),
            wall_radius_m=wall.radius_m,
        )
        if not middle < HOPELESS * well.depth_eV:
            limit = HOPELESS * well.depth_eV
            found.append(Outside(MODEL, "space charge of a full well", middle, limit, "eV"))
    return tuple(found)


def _still_fits(grid: Grid, wanted: Grid) -> bool:
    """Whether a grid will do in place of the one wanted now."""
    low, high = _fine(wanted)
    old_low, old_high = _fine(grid)
    slack = 0.02 * (high - low)
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


def _charges(grid: Grid, cloud: Cloud, well: AxisWell) -> Charges:
    first = int(np.argmin(np.abs(grid.z_m - well.left_m)))
    last = int(np.argmin(np.abs(grid.z_m - well.right_m)))
    return Charges(
        cloud.charge_e,
        cloud.number,
        cloud.thermal_eV,
        first,
        last + 1,
        mean_r2_m2=None if cloud.radius_m is None else cloud.radius_m**2 / 2,
        pressure_V_m2=cloud.pressure_V_per_m2,
        profile=None if cloud.profile is None else cloud.profile.counts(grid, cloud.number),
    )


def _scale_eV(cloud: Cloud, well: AxisWell) -> float:
    half = (well.right_m - well.left_m) / 2
    return cloud.charge_e**2 * scales.space_charge_scale_V(number=cloud.number, length_m=half)


def _judged(
    clouds: Sequence[Cloud], field_T: float, found: Equilibrium, charges: Sequence[Charges]
) -> Equilibrium:
    """Measure every cloud; one that is outside leaves no figure for any."""
    solved = found.solved
    assert solved is not None
    measured = [
        _measured(cloud, field_T, found, charges[number], number)
        for number, cloud in enumerate(clouds)
    ]
    reasons = [reason for item in measured for reason in item.outside]
    if not solved.decrement <= DECREMENT_MAX:
        reasons = [Outside(MODEL, "Newton decrement", solved.decrement, DECREMENT_MAX)]
    if reasons:
        outside = tuple(reasons)
        return replace(
            found,
            clouds=tuple(_nothing(item.vacuum_depth_eV, outside) for item in measured),
            outside=outside,
        )
    return replace(found, clouds=tuple(measured))


def _measured(
    cloud: Cloud, field_T: float, found: Equilibrium, charges: Charges, number: int
) -> AtRest:
    grid, solved = found.grid, found.solved
    assert grid is not None and solved is not None and found.vacuum_V is not None
    span_m = (float(grid.z_m[charges.first]), float(grid.z_m[charges.last - 1]))
    axis_V = grid.on_axis(found.vacuum_V)
    empty = axis_well(grid.z_m, axis_V, cloud.charge_e, span_m)
    well = axis_well(grid.z_m, found.total_on_axis_V, cloud.charge_e, span_m)
    share = solved.shares[number]
    z_m = grid.z_m[charges.first : charges.last]
    along = share.sum(axis=1)
    centre = float(along @ z_m)
    length = math.sqrt(12 * float(along @ (z_m - centre) ** 2))
    radius = math.sqrt(2 * float((share * grid.mean_r2_m2).sum()))
    density, ends = _axis_density(grid, charges, share)
    pressure = solved.pressure_V_m2[number]
    if math.isnan(pressure):
        # With a measured profile every radius has its own rotation: the one on the axis.
        pressure = math.pi * scales.COULOMB_VM * cloud.charge_e**2 * density
    rotation = scales.rotation_of_pressure_rad_per_s(
        pressure_V_per_m2=pressure / abs(cloud.charge_e),
        magnetic_field_T=field_T,
        mass_kg=cloud.mass_kg,
        charge_e=cloud.charge_e,
    )
    limit = scales.brillouin_density_per_m3(magnetic_field_T=field_T, mass_kg=cloud.mass_kg)
    spread = DEPTH_SHARE * empty.depth_eV
    at = AtRest(
        vacuum_depth_eV=empty.depth_eV,
        depth_eV=around(well.depth_eV, spread),
        depth_left_eV=around(well.left_eV - well.bottom_eV, spread),
        depth_right_eV=around(well.right_eV - well.bottom_eV, spread),
        left_m=well.left_m,
        right_m=well.right_m,
        space_charge_eV=well.bottom_eV - empty.bottom_eV,
        potential_V=well.bottom_eV / cloud.charge_e,
        centre_m=centre,
        length_m=around(length, LENGTH_SHARE * length),
        left_end_m=ends[0],
        right_end_m=ends[1],
        radius_m=radius,
        density_per_m3=around(density, DENSITY_SHARE * density),
        pressure_V_per_m2=around(pressure, PRESSURE_SHARE * pressure),
        rotation_rad_per_s=around(rotation, PRESSURE_SHARE * rotation),
        debye_length_m=scales.debye_length_m(
            density_per_m3=density, temperature_K=cloud.temperature_K, charge_e=cloud.charge_e
        ),
        coupling=scales.coupling(
            density_per_m3=density, temperature_K=cloud.temperature_K, charge_e=cloud.charge_e
        ),
        brillouin_share=density / limit,
        edge_share=float(along[0] + along[-1]),
    )
    return replace(at, outside=_reasons(at, cloud.thermal_eV))


def _axis_density(
    grid: Grid, charges: Charges, share: FloatArray
) -> tuple[float, tuple[float, float]]:
    """Greatest density on the axis (1/m³) and the places (m) where it has fallen to half."""
    cells = slice(charges.first, charges.last)
    density = charges.number * share / grid.volume_m3[cells]
    z_m = grid.z_m[cells]
    # ln n is even and smooth in r where n is; straight extrapolation where a ring is empty.
    safe = np.log(np.maximum(density[:, :2], 1e-300))
    axis = np.exp((9 * safe[:, 0] - safe[:, 1]) / 8)
    top = int(np.argmax(axis))
    half = axis[top] / 2
    left = np.flatnonzero(axis[: top + 1] < half)
    right = np.flatnonzero(axis[top:] < half)
    low, high = float(z_m[0]), float(z_m[-1])
    if left.size:
        low = _halfway(z_m, axis, int(left[-1]), 1, half)
    if right.size:
        high = _halfway(z_m, axis, top + int(right[0]), -1, half)
    return float(axis[top]), (low, high)


def _halfway(z_m: FloatArray, axis: FloatArray, below: int, inward: int, half: float) -> float:
    above = below + inward
    share = (half - axis[below]) / (axis[above] - axis[below])
    return float(z_m[below] + share * (z_m[above] - z_m[below]))


def _reasons(at: AtRest, thermal_eV: float) -> tuple[Outside, ...]:
    found = []
    if not at.edge_share <= EDGE_SHARE_MAX:
        found.append(Outside(MODEL, "share at the barriers", at.edge_share, EDGE_SHARE_MAX))
    least = DEPTH_THERMAL_MIN * thermal_eV
    if not at.depth_eV.value >= least:
        found.append(Outside(MODEL, "depth left", at.depth_eV.value, least, "eV", "at least"))
    if not at.brillouin_share <= BRILLOUIN_SHARE_MAX:
        share = at.brillouin_share
        found.append(Outside(MODEL, "share of Brillouin density", share, BRILLOUIN_SHARE_MAX))
    if not at.coupling <= COUPLING_MAX:
        found.append(Outside(MODEL, "coupling", at.coupling, COUPLING_MAX))
    if not at.rotation_rad_per_s.known or not at.pressure_V_per_m2.value > 0.0:
        found.append(Outside(MODEL, "pressure", at.pressure_V_per_m2.value, 0.0, "V/m2", "above"))
    return tuple(found)


def _nothing(vacuum_depth_eV: float, reasons: tuple[Outside, ...]) -> AtRest:
    nan = math.nan
    return AtRest(
        vacuum_depth_eV,
        *(NOT_KNOWN,) * 3,
        *(nan,) * 5,
        NOT_KNOWN,
        *(nan,) * 3,
        *(NOT_KNOWN,) * 3,
        *(nan,) * 4,
        reasons,
    )
