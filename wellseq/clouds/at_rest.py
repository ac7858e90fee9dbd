"""A solved grid → what a cloud at rest is like: depths, length, density, rotation, and validity.

The model is thermal equilibrium with space charge (equilibrium.py).  It holds for a static,
axisymmetric, weakly coupled cloud in a uniform field, kept by its barriers.  A cloud that spills
over them has no figures; a cloud whose Debye length exceeds its radius is a plain one and right.

Units: SI, energies in eV per particle.  Shapes: fields (nz, nr).
Accuracy: depths 0.3 % of the vacuum depth, density 2 %, length, κ and rotation 1 % on the
grid that layout.py chooses; these are the intervals.  Measured in tests/clouds/test_equilibrium.py.
Source of the limits (from memory): D. H. E. Dubin, T. M. O'Neil, Rev. Mod. Phys. 71, 87 (1999).
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

from wellseq.clouds import scales
from wellseq.clouds.axis import AxisWell, axis_well
from wellseq.clouds.constants import COULOMB_VM
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside, around
from wellseq.clouds.grid import Grid
from wellseq.clouds.layout import Cloud
from wellseq.clouds.shares import Charges
from wellseq.fields.hermite import FloatArray

MODEL = "thermal equilibrium"
DEPTH_SHARE, DENSITY_SHARE, LENGTH_SHARE, PRESSURE_SHARE = 0.003, 0.02, 0.01, 0.01
EDGE_SHARE_MAX = 1e-6
BRILLOUIN_SHARE_MAX = 0.1
COUPLING_MAX = 1.0
HOLLOW = 1e-3
DEPTH_THERMAL_MIN = 4.0
VACUUM_DEPTH = "vacuum depth"
FULL_WELL = "space charge of a full well"
EDGE_SHARE = "share at the edge of the well"
DEPTH_LEFT = "depth left"
BRILLOUIN_SHARE = "share of the Brillouin density"
DECREMENT = "Newton decrement"
FINDINGS = {
    **dict.fromkeys((VACUUM_DEPTH, FULL_WELL, EDGE_SHARE, DEPTH_LEFT), "well-overfull"),
    BRILLOUIN_SHARE: "too-dense",
    DECREMENT: "field-not-settled",
}
"""Quantity that left its range → the finding it is; all others are out of the forecast's range."""


@dataclass(frozen=True, slots=True)
class AtRest:
    """One cloud in equilibrium.  Everything but the vacuum depth is NaN outside validity.

    Depths (eV) reach from the bottom of the total potential on the axis to its barriers at
    `left_m`, `right_m`; `space_charge_eV` is the own potential's part of the bottom, `potential_V`
    the total potential there.  `length_m` = √12 z_rms, `radius_m` = √(2⟨r²⟩); the cloud's density
    on the axis falls to half at `left_end_m`, `right_end_m`.  `edge_share` of the particles stands
    in the cells at the barriers and in the outermost ring.
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


def measured(
    *,
    cloud: Cloud,
    magnetic_field_T: float,
    grid: Grid,
    exact: AxisWell,
    empty_V: FloatArray,
    total_V: FloatArray,
    charges: Charges,
    shares: FloatArray,
    pressure_V_per_m2: float,
) -> AtRest:
    """One cloud of a solution at B in T: potentials (nz,) in V on the axis, empty and total.

    `exact` is its well in the empty bore without the grid's error, which is taken off every depth.
    `shares` (cells) of its particles, κ in V/m² (NaN with a measured profile).
    """
    span_m = (float(grid.z_m[charges.first]), float(grid.z_m[charges.last - 1]))
    empty = axis_well(grid.z_m, empty_V, cloud.charge_e, span_m)
    well = axis_well(grid.z_m, total_V, cloud.charge_e, span_m)
    centre, length, radius = _size_m(grid, charges, shares)
    density, ends = _axis_density(grid, charges, shares)
    pressure = pressure_V_per_m2
    if math.isnan(pressure):
        # With a measured profile every radius has its own rotation: the one on the axis.
        pressure = math.pi * COULOMB_VM * cloud.charge_e**2 * density
    rotation, limit = _rotation_and_limit(cloud, magnetic_field_T, pressure)
    true = corrected(well, exact, empty)
    left_eV, right_eV = true.left_eV - true.bottom_eV, true.right_eV - true.bottom_eV
    spread = DEPTH_SHARE * exact.depth_eV
    at = AtRest(
        vacuum_depth_eV=exact.depth_eV,
        depth_eV=around(true.depth_eV, spread),
        depth_left_eV=around(left_eV, spread),
        depth_right_eV=around(right_eV, spread),
        left_m=well.left_m,
        right_m=well.right_m,
        space_charge_eV=well.bottom_eV - empty.bottom_eV,
        potential_V=true.bottom_eV / cloud.charge_e,
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
        edge_share=float(shares[0].sum() + shares[-1].sum() + shares[:, -1].sum()),
    )
    return replace(at, outside=_reasons(at, cloud.thermal_eV))


def _size_m(grid: Grid, charges: Charges, shares: FloatArray) -> tuple[float, float, float]:
    """Mean z, √12 z_rms and √(2⟨r²⟩)."""
    z_m = grid.z_m[charges.first : charges.last]
    along = shares.sum(axis=1)
    centre = float(along @ z_m)
    length = math.sqrt(12 * float(along @ (z_m - centre) ** 2))
    return centre, length, math.sqrt(2 * float((shares * grid.r2_m2[: charges.rings]).sum()))


def _rotation_and_limit(cloud: Cloud, field_T: float, pressure: float) -> tuple[float, float]:
    """The slow rotation at κ in rad/s, and the Brillouin density in 1/m³."""
    rotation = scales.rotation_of_pressure_rad_per_s(
        pressure_V_per_m2=pressure,
        magnetic_field_T=field_T,
        mass_kg=cloud.mass_kg,
        charge_e=cloud.charge_e,
    )
    limit = scales.brillouin_density_per_m3(magnetic_field_T=field_T, mass_kg=cloud.mass_kg)
    return rotation, limit


def corrected(well: AxisWell, exact: AxisWell, empty: AxisWell) -> AxisWell:
    """A filled well with the grid's error of the empty one taken off its bottom and tops."""
    return replace(
        well,
        bottom_eV=well.bottom_eV + exact.bottom_eV - empty.bottom_eV,
        left_eV=well.left_eV + exact.left_eV - empty.left_eV,
        right_eV=well.right_eV + exact.right_eV - empty.right_eV,
    )


def _axis_density(
    grid: Grid, charges: Charges, share: FloatArray
) -> tuple[float, tuple[float, float]]:
    """Greatest density on the axis (1/m³) and the places (m) where it has fallen to half."""
    density = charges.number * share / grid.volume_m3[charges.span]
    z_m = grid.z_m[charges.first : charges.last]
    # ln n goes as a + b r² near the axis; at a sharp end of the cloud it does not, hence the clip.
    safe = np.log(np.maximum(density[:, :2], 1e-300))
    axis = density[:, 0] * np.exp(np.clip((safe[:, 0] - safe[:, 1]) / 8, -0.02, 0.02))
    if not axis.max() > HOLLOW * density.max():
        # A measured profile may be hollow: its densest ring stands for it.
        axis = density[:, int(np.argmax(density.max(axis=0)))]
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
        found.append(Outside(MODEL, EDGE_SHARE, at.edge_share, EDGE_SHARE_MAX))
    least = DEPTH_THERMAL_MIN * thermal_eV
    if not at.depth_eV.value >= least:
        found.append(Outside(MODEL, DEPTH_LEFT, at.depth_eV.value, least, "eV", "at least"))
    if not at.brillouin_share <= BRILLOUIN_SHARE_MAX:
        share = at.brillouin_share
        found.append(Outside(MODEL, BRILLOUIN_SHARE, share, BRILLOUIN_SHARE_MAX))
    if not at.coupling <= COUPLING_MAX:
        found.append(Outside(MODEL, "coupling", at.coupling, COUPLING_MAX))
    if not at.rotation_rad_per_s.known or not at.pressure_V_per_m2.value > 0.0:
        found.append(Outside(MODEL, "pressure", at.pressure_V_per_m2.value, 0.0, "V/m2", "above"))
    return tuple(found)


def nothing(vacuum_depth_eV: float, reasons: tuple[Outside, ...]) -> AtRest:
    """A cloud of which only the vacuum depth (eV) is known, and why."""
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
