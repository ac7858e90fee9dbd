"""A plasma between two side wells of the opposite sign → barriers, climbs and gaps of both signs.

Everything is in the total potential: the plasma is solved with its own space charge, and with that
of clouds of the other sign in the side wells where there are any.

- depth: from the plasma up to the lower side maximum; it keeps the plasma in (η = depth/θ > 20) and
  is at the same time what a particle of the other sign, at rest at a side maximum, must climb to
  meet the plasma.  A cloud in a side well lowers it on its side only.
- outer barrier: from a side maximum to the extremum beyond; it keeps the other sign in.  On the way
  out from the plasma it counts less by the climb.
- energy on arrival: −q (V_plasma − V_launch) + the energy at the launch.
- gap: from the plasma's end to the side maximum; below 3 Debye lengths the species are too close.

On the axis all barriers are lowest: it is the weak point.  While the species mix there is no
equilibrium and no figure.

Units: SI, energies in eV.  Accuracy: that of equilibrium.py; tests/clouds/test_nested.py.
Source (from memory): G. Gabrielse et al., Phys. Lett. A 129, 38 (1988).
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from wellseq.clouds.at_rest import DEPTH_SHARE, FINDINGS, AtRest, corrected
from wellseq.clouds.axis import AxisWell, axis_well, climb
from wellseq.clouds.equilibrium import Equilibrium, equilibrium
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside, around
from wellseq.clouds.layout import AxisPotential, Cloud
from wellseq.clouds.wall import Wall

__all__ = ["ETA_MIN", "FINDINGS", "GAP_DEBYE_MIN", "Nest", "Side", "arrival_eV", "nested"]

ETA_MIN = 20.0
"""Depth over kT below which a nest leaks."""
GAP_DEBYE_MIN = 3.0
"""Gap in Debye lengths below which the species are too close."""


@dataclass(frozen=True, slots=True)
class Side:
    """One side of the nest.  NaN outside validity.

    `maximum_m`, `maximum_V` the side maximum of q φ, `depth_eV` of the plasma against it and
    `climb_eV` of the other sign, which carries one charge, down from it; `outer_m` and `outer_eV`
    the barrier beyond for the other sign, counted from the maximum; `gap_m` from the end of the
    column of the same length and number, `clear_gap_m` from where the density on the axis is half.
    """

    maximum_m: float
    maximum_V: float
    depth_eV: Figure
    climb_eV: Figure
    outer_m: float
    outer_eV: Figure
    gap_m: float
    clear_gap_m: float


@dataclass(frozen=True, slots=True)
class Nest:
    """A nested well, filled.  `eta` is the plasma's lower depth over its kT; NaN outside validity.

    `plasma` and `visitors` are the clouds at rest, `solved` the equilibrium to go on from.
    """

    left: Side
    right: Side
    vacuum_depth_eV: float
    depth_eV: Figure
    eta: float
    plasma_V: float
    gap_debye: float
    plasma: AtRest
    visitors: tuple[AtRest, ...]
    solved: Equilibrium
    outside: tuple[Outside, ...] = ()


def nested(
    *,
    wall: Wall,
    plasma: Cloud,
    visitors: Sequence[Cloud] = (),
    magnetic_field_T: float,
    tube_m: tuple[float, float] | None = None,
    start: Equilibrium | None = None,
    axis_V: AxisPotential | None = None,
) -> Nest:
    """Barriers, climbs and gaps of a plasma and of clouds of the other sign beside it, at B in T.

    `plasma.between_m` are the side maxima of the empty bore; each visitor's barriers are the
    outermost one and the bottom of the plasma's well.  Ends of the tube in m; `axis_V` as for
    equilibrium().
    Raises ValueError for a visitor of the plasma's own sign.
    """
    if any(cloud.charge_e * plasma.charge_e > 0 for cloud in visitors):
        raise ValueError("a nest holds clouds of opposite signs")
    clouds = (plasma, *visitors)
    solved = equilibrium(
        wall=wall,
        clouds=clouds,
        magnetic_field_T=magnetic_field_T,
        tube_m=tube_m,
        start=start,
        axis_V=axis_V,
    )
    first, others = solved.clouds[0], solved.clouds[1:]
    if solved.outside:
        nothing = Side(
            math.nan, math.nan, NOT_KNOWN, NOT_KNOWN, math.nan, NOT_KNOWN, math.nan, math.nan
        )
        return Nest(
            nothing,
            nothing,
            first.vacuum_depth_eV,
            NOT_KNOWN,
            *(math.nan,) * 3,
            first,
            others,
            solved,
            solved.outside,
        )
    exact_V = axis_V or wall.on_axis().exact
    left, right = (_side(exact_V, plasma, first, solved, outward) for outward in (-1, 1))
    gap = min(left.clear_gap_m, right.clear_gap_m)
    return Nest(
        left=left,
        right=right,
        vacuum_depth_eV=first.vacuum_depth_eV,
        depth_eV=first.depth_eV,
        eta=first.depth_eV.value / plasma.thermal_eV,
        plasma_V=first.potential_V,
        gap_debye=gap / first.debye_length_m,
        plasma=first,
        visitors=others,
        solved=solved,
    )


def arrival_eV(*, charge_e: int, plasma_V: float, launch_V: float, start_eV: float = 0.0) -> float:
    """Energy in eV inside the plasma, at `plasma_V`, of a particle launched at `launch_V` (V).

    `start_eV` is its kinetic energy there.  Negative: it does not arrive.
    """
    return start_eV - charge_e * (plasma_V - launch_V)


def _side(
    axis_V: AxisPotential, plasma: Cloud, at: AtRest, solved: Equilibrium, outward: int
) -> Side:
    """The side to the left (−1) or right (+1) of the plasma."""
    depth = at.depth_left_eV if outward < 0 else at.depth_right_eV
    maximum_m = at.left_m if outward < 0 else at.right_m
    end_m = at.left_end_m if outward < 0 else at.right_end_m
    column_end_m = at.centre_m + outward * at.length_m.value / 2
    outer = _outer(axis_V, plasma, solved, maximum_m, outward)
    outer_m = outer.left_m if outward < 0 else outer.right_m
    top_eV = outer.left_eV if outward < 0 else outer.right_eV
    height = top_eV - outer.bottom_eV
    charges = abs(plasma.charge_e)
    return Side(
        maximum_m=maximum_m,
        maximum_V=at.potential_V + depth.value / plasma.charge_e,
        depth_eV=depth,
        climb_eV=Figure(depth.value / charges, depth.low / charges, depth.high / charges),
        outer_m=outer_m,
        outer_eV=around(height, DEPTH_SHARE * height),
        gap_m=outward * (maximum_m - column_end_m),
        clear_gap_m=outward * (maximum_m - end_m),
    )


def _outer(
    axis_V: AxisPotential, plasma: Cloud, solved: Equilibrium, maximum_m: float, outward: int
) -> AxisWell:
    """The well of the other sign, one charge, whose bottom is the side maximum."""
    grid, vacuum_V = solved.grid, solved.vacuum_V
    if grid is None or vacuum_V is None:
        raise ValueError("there is no solution")
    sign = -1 if plasma.charge_e > 0 else 1
    total_V = solved.total_on_axis_V
    # From one cell outside the maximum uphill, away from the plasma.
    at = int(np.argmin(np.abs(grid.z_m - maximum_m)))
    top = climb(sign * total_V, min(max(at + outward, 0), grid.z_m.size - 1))
    inner = 2 * maximum_m - float(grid.z_m[at + 2 * outward])
    span = tuple(sorted((float(grid.z_m[top]), inner)))
    well = axis_well(grid.z_m, total_V, sign, (span[0], span[1]))
    empty = axis_well(grid.z_m, grid.on_axis(vacuum_V), sign, (span[0], span[1]))
    exact = axis_well(grid.z_m, axis_V(grid.z_m), sign, (span[0], span[1]))
    return corrected(well, exact, empty)
