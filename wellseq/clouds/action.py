"""A potential along the axis → turning points, period and action of particles bouncing in it.

    J(E) = (1/pi) Int sqrt(2m(E-U)) dz,   period = 2 Int sqrt(m/2)/sqrt(E-U) dz = 2 pi dJ/dE

between the turning points.  With z = c + h x, x_k = cos((2k-1) pi/2n) and g = (E-U)/(1-x^2) both
integrands are smooth, and the Gauss-Chebyshev rule gives

    period = 2 h sqrt(m/2) (pi/n) sum g^(-1/2),   J = (h/pi) sqrt(2m) (pi/n) sum g^(1/2) (1-x^2)

U is a cubic spline with continuous second derivative, and the turning points are roots of that same
spline: taken from the grid, or with E-U floored at a small number, transit times come out far too
long.  Energies are in eV, since a root finder's tolerance swallows 1e-19 J.

Shapes: profile z_m, energy_eV (points,), at least 8 points, z rising; energies (energies,).
Units: m, eV, kg in; s, J s, rad/s, m out.  Energies count from the bottom of the well.
Accuracy: 1e-6 with 401 points (measured on the pendulum, the Morse well and the quartic well in
tests/clouds/test_action.py).
Source: Gauss-Chebyshev rule, Handbook of Mathematical Functions, 25.4.38 (from memory).
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from wellseq.clouds.constants import ELEMENTARY_CHARGE_C

Array = NDArray[np.float64]
NODES = 64
"""n of the quadrature."""
POINTS_MIN = 8
_ANGLES = (2.0 * np.arange(1, NODES + 1) - 1.0) * math.pi / (2.0 * NODES)
_X = np.cos(_ANGLES)
_SIN2 = np.sin(_ANGLES) ** 2
_ROUNDS_MAX = 100


@dataclass(frozen=True, slots=True, eq=False)
class Profile:
    """A well on the axis, with its spline cut into monotone pieces.

    bottom_m, bottom_eV: its lowest minimum.  left_eV, right_eV: the highest point on either side,
    from the bottom.  inner_eV: the highest barrier between two minima, from the bottom; 0 with one
    minimum: below it a particle is in one of several wells.  frequency_rad_per_s: of small swings.
    left, right: breakpoints outward from the bottom, and the running maximum of U there (m, eV).
    """

    spline: Any
    mass_kg: float
    bottom_m: float
    bottom_eV: float
    left_eV: float
    right_eV: float
    inner_eV: float
    frequency_rad_per_s: float
    left: tuple[Array, Array]
    right: tuple[Array, Array]

    @property
    def depth_eV(self) -> float:
        """The lower of the two sides, in eV from the bottom."""
        return min(self.left_eV, self.right_eV)

    def above_bottom_eV(self, z_m: ArrayLike) -> Array:
        """U - U_bottom in eV at places in m, from the spline."""
        return np.asarray(self.spline(z_m), dtype=np.float64) - self.bottom_eV


@dataclass(frozen=True, slots=True, eq=False)
class Bounces:
    """Per energy: J in J s, period in s, turning points in m; NaN where not held; (energies,)."""

    action_Js: Array
    period_s: Array
    left_m: Array
    right_m: Array


def profile(z_m: ArrayLike, energy_eV: ArrayLike, mass_kg: float) -> Profile:
    """The well that these points describe: z in m rising, U in eV (sign of the charge included).

    The first and last point are where the side barriers are (or as high as it is known).  Raises
    ValueError for fewer than 8 points, z that does not rise, numbers that are not finite, a mass
    that is not positive, or a profile without a minimum inside.
    """
    z = np.asarray(z_m, dtype=np.float64)
    energy = np.asarray(energy_eV, dtype=np.float64)
    if z.ndim != 1 or z.shape != energy.shape or len(z) < POINTS_MIN:
        raise ValueError(f"a profile has at least {POINTS_MIN} points, as many z as energies")
    if not (np.isfinite(z).all() and np.isfinite(energy).all() and (np.diff(z) > 0.0).all()):
        raise ValueError("a profile has finite energies at places that rise")
    if not (math.isfinite(mass_kg) and mass_kg > 0.0):
        raise ValueError("a mass is above 0 kg")
    from scipy.interpolate import CubicSpline

    spline = CubicSpline(z, energy)
    flat = spline.derivative().roots(extrapolate=False)
    marks = np.unique(np.concatenate([z, flat[np.isfinite(flat)]]))
    values = spline(marks)
    lowest = int(values.argmin())
    if lowest in (0, len(marks) - 1):
        raise ValueError("the profile has no minimum inside")
    curvature = float(spline(marks[lowest], 2)) * ELEMENTARY_CHARGE_C / mass_kg
    heights = values - values[lowest]
    left = (marks[lowest::-1], np.maximum.accumulate(heights[lowest::-1]))
    right = (marks[lowest:], np.maximum.accumulate(heights[lowest:]))
    return Profile(
        spline,
        mass_kg,
        float(marks[lowest]),
        float(values[lowest]),
        float(left[1][-1]),
        float(right[1][-1]),
        _inner(heights, lowest),
        math.sqrt(max(curvature, 0.0)),
        left,
        right,
    )


def _inner(heights: Array, lowest: int) -> float:
    """The highest barrier that has a minimum beyond it, on either side of the lowest one."""
    found, dust = 0.0, 1e-9 * float(heights.max())
    for side in (heights[lowest::-1], heights[lowest:]):
        running = np.maximum.accumulate(side)
        ahead = np.maximum.accumulate(side[::-1])[::-1]
        # A point lower than something nearer the bottom, from which U rises again, lies in a dip
        # behind that barrier; a tail that only falls is none.
        behind = running[(side < running - dust) & (side < ahead - dust)]
        if len(behind):
            found = max(found, float(behind.max()))
    return found


def bounces(well: Profile, energies_eV: ArrayLike) -> Bounces:
    """Action, period and turning points for energies in eV above the bottom; (energies,).

    NaN for energies at or below zero, and for those at or above the lower side: not held.
    """
    energies = np.atleast_1d(np.asarray(energies_eV, dtype=np.float64))
    held = (energies > 0.0) & (energies < well.depth_eV)
    inside = np.where(held, energies, 0.5 * well.depth_eV)
    left = _turning_points(well, inside, *well.left)
    right = _turning_points(well, inside, *well.right)
    half = 0.5 * (right - left)
    places = 0.5 * (right + left)[:, None] + half[:, None] * _X
    kinetic = inside[:, None] - well.above_bottom_eV(places)
    g = np.maximum(kinetic / _SIN2, 0.0) * ELEMENTARY_CHARGE_C
    with np.errstate(divide="ignore"):
        period = 2.0 * half * math.sqrt(0.5 * well.mass_kg) * (1.0 / np.sqrt(g)).sum(axis=1)
    action = half / math.pi * math.sqrt(2.0 * well.mass_kg) * (np.sqrt(g) * _SIN2).sum(axis=1)
    scale = math.pi / NODES
    columns = (action * scale, period * scale, left, right)
    return Bounces(*(np.where(held, column, math.nan) for column in columns))


def _turning_points(well: Profile, energies: Array, marks: Array, running: Array) -> Array:
    """Where the spline first reaches each energy outward; Newton, kept in a monotone piece."""
    outer = np.searchsorted(running, energies, side="left")
    near, far = marks[outer - 1].copy(), marks[outer].copy()
    at = 0.5 * (near + far)
    closeness = 4e-16 * np.abs(well.spline.x[[0, -1]]).max()
    for _ in range(_ROUNDS_MAX):
        excess = well.above_bottom_eV(at) - energies
        above = excess > 0.0
        far = np.where(above, at, far)
        near = np.where(above, near, at)
        slope = well.spline(at, 1)
        with np.errstate(divide="ignore", invalid="ignore"):
            step = at - excess / slope
        # A step that no longer moves is at the root, though it may end on the bracket's edge.
        settled = np.abs(step - at) <= closeness
        within = (step - near) * (step - far) < 0.0
        at = np.where(settled, at, np.where(within, step, 0.5 * (near + far)))
        if (settled | (np.abs(far - near) <= closeness)).all():
            break
    return at


def energies_at(well: Profile, actions_Js: ArrayLike) -> Array:
    """Energies in eV above the bottom of particles with these actions in J s; (actions,).

    NaN for actions that are not positive and for those the well does not hold.  J rises with E and
    dJ/dE = period/(2 pi), so Newton's method kept in a bracket finds each.
    """
    actions = np.atleast_1d(np.asarray(actions_Js, dtype=np.float64))
    top = well.depth_eV * (1.0 - 1e-9)
    greatest = bounces(well, top).action_Js[0]
    held = (actions > 0.0) & (actions < greatest)
    wanted = np.where(held, actions, 0.5 * greatest)
    low, high = np.zeros_like(wanted), np.full_like(wanted, top)
    energies = top * wanted / greatest
    for _ in range(_ROUNDS_MAX):
        found = bounces(well, energies)
        excess = found.action_Js - wanted
        low, high = np.where(excess > 0.0, low, energies), np.where(excess > 0.0, energies, high)
        step = energies - excess * 2.0 * math.pi / (found.period_s * ELEMENTARY_CHARGE_C)
        settled = np.abs(step - energies) <= 1e-13 * energies
        within = (step > low) & (step < high)
        energies = np.where(settled, energies, np.where(within, step, 0.5 * (low + high)))
        if settled.all():
            break
    return np.where(held, energies, math.nan)
