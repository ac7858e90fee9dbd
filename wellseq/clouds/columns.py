"""A well on the axis and intervals of a cloud → depth left, length, density, frequencies, cheaply.

The log column of cheap.py (φ = W (1 + 2 ln(Rw/rp)), filled to φ/2 + θ), solved on one table of
levels for all corners of the intervals at once.  All clouds of a well count together: their charges
are summed, radius and temperature are those of the most numerous.  φ rises with number and falls
with radius and temperature; the length rises with number and temperature and falls with radius.

Units: m, V (per elementary charge), K, kg, T, Hz.  Shapes: corners (5,), levels (n,).
Accuracy: cheap.log_column to 0.2 % of the depth (tests/clouds/test_columns.py); the interval is
that of cheap.py, with the Bessel column at the end of least space charge; length and mean density
within 8 %, or a quarter and a factor 3 where the Debye length exceeds 0.3 of the radius (a plain
cloud is no column).
Source: cheap.py.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from wellseq.clouds import scales
from wellseq.clouds.bessel import bessel_levels
from wellseq.clouds.cheap import LEVEL_FILLED, LOG_MODEL, SPACE_CHARGE_SHARE, VACUUM_SHARE
from wellseq.clouds.constants import (
    BOLTZMANN_J_PER_K,
    COULOMB_VM,
    ELEMENTARY_CHARGE_C,
    THERMAL_EV_PER_K,
)
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside
from wellseq.fields.field import Field
from wellseq.fields.hermite import FloatArray
from wellseq.fields.minima import landscape

LEVELS = 400
SAMPLES = 160
COLUMN_SHARE = 0.08
PLAIN_DEBYE_SHARE = 0.3
PLAIN_LENGTH_SHARE = 0.25
PLAIN_DENSITY_FACTOR = 3.0
VACUUM_DEPTH = "thermal energy"


@dataclass(frozen=True, slots=True)
class Filling:
    """Charges in one well: their number (elementary charges), radius (m), temperature (K)."""

    number: Figure
    radius_m: Figure
    temperature_K: Figure


@dataclass(frozen=True, slots=True)
class Trough:
    """One well of U = sign · φ on the axis: places in m, energies in V.

    `left_m`, `right_m` (n,) are where its walls are `level_V` (n,) above the bottom.
    """

    bottom_m: float
    left_barrier_m: float
    right_barrier_m: float
    left_V: float
    right_V: float
    curvature_V_m2: float
    level_V: FloatArray
    left_m: FloatArray
    right_m: FloatArray

    @property
    def depth_V(self) -> float:
        """From the bottom to the lower barrier, V."""
        return min(self.left_V, self.right_V)


def trough(field: Field, sign: int, vector: FloatArray, near_m: float) -> Trough | None:
    """The well that a charge of this sign near a place (m) is in; None when there is none."""
    curve = field.curve(sign * vector)
    land = landscape(curve)
    index = land.basin(near_m)
    if index is None:
        return None
    bottom_m, bottom_V = float(land.minimum_m[index]), float(land.minimum_V[index])
    ends_m = [float(land.barrier_m[index + side]) for side in (0, 1)]
    depths_V = [float(land.barrier_V[index + side]) - bottom_V for side in (0, 1)]
    depth_V = min(depths_V)
    if not depth_V > 0.0:
        return None
    level = depth_V * (np.arange(1, LEVELS + 1) / LEVELS) ** 2
    walls = []
    for end_m in ends_m:
        z_m = bottom_m + (end_m - bottom_m) * (np.arange(SAMPLES + 1) / SAMPLES)
        rise = np.maximum.accumulate(curve.at(z_m) - bottom_V)
        walls.append(np.interp(level, rise, z_m))
    bend = float(curve.at(bottom_m, 2))
    left, right = walls
    return Trough(bottom_m, *_pair(ends_m), *_pair(depths_V), bend, level, left, right)


def _pair(values: list[float]) -> tuple[float, float]:
    return values[0], values[1]


@dataclass(frozen=True, slots=True)
class Column:
    """What the log column says of a well's charges, in V and m; NaN when `outside` says why.

    `margin_V` is how far the depth left may be from the vacuum depth less the space charge.
    """

    space_charge_V: Figure
    length_m: Figure
    margin_V: float
    outside: tuple[Outside, ...] = ()


_NOTHING = (NOT_KNOWN, NOT_KNOWN, math.nan)


def column(well: Trough, filling: Filling, wall_m: float) -> Column:
    """Space charge (V) and length (m) of charges in a bore of radius `wall_m` (m)."""
    reasons = _unfit(filling, wall_m)
    if reasons:
        return Column(*_NOTHING, reasons)
    number, radius, kelvin = filling.number, filling.radius_m, filling.temperature_K
    corners = np.array(
        [
            (number.value, radius.value, kelvin.value),
            (number.high, radius.low, kelvin.low),
            (number.low, radius.high, kelvin.high),
            (number.low, radius.high, kelvin.low),
            (number.high, radius.low, kelvin.high),
        ]
    )
    theta = THERMAL_EV_PER_K * corners[:, 2]
    if not theta.max() < well.depth_V:
        hot = Outside(LOG_MODEL, VACUUM_DEPTH, float(theta.max()), well.depth_V, "V", "below")
        return Column(*_NOTHING, (hot,))
    length, short = _filled(well, corners, theta, wall_m)
    if short > 0.0:
        full = Outside(LOG_MODEL, LEVEL_FILLED, well.depth_V + short, well.depth_V, "V")
        return Column(*_NOTHING, (full,))
    phi = COULOMB_VM * corners[:, 0] / length * (1.0 + 2.0 * np.log(wall_m / corners[:, 1]))
    # A column shorter than the bore is wide has less: its ends are near, and the wall is not.
    short_phi, _ = bessel_levels(float(length[2]) / wall_m, float(corners[2, 1]) / wall_m)
    least = min(float(phi[2]), COULOMB_VM * float(corners[2, 0] / length[2]) * short_phi)
    return Column(
        Figure(float(phi[0]), least, float(phi[1])),
        Figure(float(length[0]), float(length[3]), float(length[4])),
        max(VACUUM_SHARE * well.depth_V, SPACE_CHARGE_SHARE * float(phi[1])),
    )


def _filled(
    well: Trough, corners: FloatArray, theta: FloatArray, wall_m: float
) -> tuple[FloatArray, float]:
    """Lengths (corners,) in m, and how much the fullest corner lacks at the barrier, V."""
    long = well.right_m - well.left_m
    log = 1.0 + 2.0 * np.log(wall_m / corners[:, 1])
    scale = COULOMB_VM * corners[:, 0] * log / 2.0
    lacking = scale[:, None] / long + theta[:, None] - well.level_V
    short = float(lacking[:, -1].max())
    lengths = np.empty(len(corners))
    for row, line in enumerate(lacking):
        first = int(np.argmax(line <= 0.0)) if line[-1] <= 0.0 else len(line) - 1
        if first == 0 or line[first] > 0.0:
            lengths[row] = long[first]
            continue
        part = line[first - 1] / (line[first - 1] - line[first])
        lengths[row] = long[first - 1] + part * (long[first] - long[first - 1])
    return lengths, short


def _unfit(filling: Filling, wall_m: float) -> tuple[Outside, ...]:
    found = []
    for quantity, figure, least, unit in (
        ("number of particles", filling.number, 1.0, ""),
        ("temperature", filling.temperature_K, 1e-3, "K"),
        ("cloud radius", filling.radius_m, 1e-9, "m"),
    ):
        if not (figure.known and figure.low >= least):
            found.append(Outside(LOG_MODEL, quantity, figure.low, least, unit, "at least"))
    if filling.radius_m.known and not filling.radius_m.high < wall_m / math.sqrt(2.0):
        limit = wall_m / math.sqrt(2.0)
        found.append(Outside(LOG_MODEL, "cloud radius", filling.radius_m.high, limit, "m", "below"))
    return tuple(found)


@dataclass(frozen=True, slots=True)
class Shape:
    """One cloud's length (m), density (1/m3) and frequencies (Hz) in its well."""

    length_m: Figure
    density_per_m3: Figure
    bounce_Hz: Figure
    rotation_Hz: Figure
    drift_Hz: Figure
    brillouin_share: Figure


def shape(
    *,
    well: Trough,
    length_m: Figure,
    number: Figure,
    radius_m: Figure,
    temperature_K: Figure,
    mass_kg: float,
    charge_e: float,
    magnetic_field_T: float,
    wall_m: float,
) -> Shape:
    """What follows from number, radius (m), temperature (K) and the column's length (m).

    Mass in kg, charge in e, field in T.  The density is the mean one of the column.
    """
    mean = number.value / (math.pi * radius_m.value**2 * length_m.value)
    debye = scales.debye_length_m(
        density_per_m3=mean, temperature_K=temperature_K.value, charge_e=charge_e
    )
    plain = debye > PLAIN_DEBYE_SHARE * radius_m.value
    share = PLAIN_LENGTH_SHARE if plain else COLUMN_SHARE
    length = Figure(length_m.value, length_m.low * (1 - share), length_m.high * (1 + share))
    more = PLAIN_DENSITY_FACTOR if plain else 1.0
    density = Figure(
        mean,
        number.low / (math.pi * radius_m.high**2 * length.high),
        more * number.high / (math.pi * radius_m.low**2 * length.low),
    )
    rotation, drift, brillouin = frequencies(
        density=density,
        radius_m=radius_m,
        mass_kg=mass_kg,
        charge_e=charge_e,
        magnetic_field_T=magnetic_field_T,
        wall_m=wall_m,
    )
    bounce = _bounce_Hz(well, length, temperature_K, mass_kg, charge_e)
    return Shape(length, density, bounce, rotation, drift, brillouin)


def frequencies(
    *,
    density: Figure,
    radius_m: Figure,
    mass_kg: float,
    charge_e: float,
    magnetic_field_T: float,
    wall_m: float,
) -> tuple[Figure, Figure, Figure]:
    """Rotation and slow drift (Hz) at a density (1/m3), and its share of the Brillouin density.

    Radii in m, mass in kg, charge in e, field in T.
    """
    field_T = abs(magnetic_field_T)
    rotation = _each(density, lambda n: _rotation_Hz(n, field_T, mass_kg, charge_e))
    drift = Figure(
        *(
            turn * (radius / wall_m) ** 2
            for turn, radius in zip(_ends(rotation), _ends(radius_m), strict=True)
        )
    )
    limit = scales.brillouin_density_per_m3(magnetic_field_T=field_T, mass_kg=mass_kg)
    return rotation, drift, _each(density, lambda n: n / limit)


def _ends(figure: Figure) -> tuple[float, float, float]:
    return figure.value, figure.low, figure.high


def _each(figure: Figure, rising: Callable[[float], float]) -> Figure:
    return Figure(*(float(rising(value)) for value in _ends(figure)))


def _rotation_Hz(density: float, field_T: float, mass_kg: float, charge_e: float) -> float:
    angular = scales.rotation_of_density_rad_per_s(
        density_per_m3=density, magnetic_field_T=field_T, mass_kg=mass_kg, charge_e=charge_e
    )
    return angular / (2.0 * math.pi)


def _bounce_Hz(
    well: Trough, length_m: Figure, temperature_K: Figure, mass_kg: float, charge_e: float
) -> Figure:
    """The lesser of the vacuum frequency and the thermal bounce, Hz; L falls as T does."""
    empty = vacuum_rad_per_s(well, mass_kg, charge_e) / (2.0 * math.pi)
    pairs = (
        (temperature_K.value, length_m.value),
        (temperature_K.low, length_m.high),
        (temperature_K.high, length_m.low),
    )
    speeds = [math.sqrt(BOLTZMANN_J_PER_K * kelvin / mass_kg) for kelvin, _ in pairs]
    return Figure(*(min(empty, v / (2.0 * pair[1])) for v, pair in zip(speeds, pairs, strict=True)))


def vacuum_rad_per_s(well: Trough, mass_kg: float, charge_e: float) -> float:
    """Small swings in the empty well, rad/s; mass in kg, charge in e."""
    bend = max(well.curvature_V_m2, 1e-9)
    return math.sqrt(abs(charge_e) * ELEMENTARY_CHARGE_C * bend / mass_kg)
