"""A strong rotating drive → the density and radius it holds, the heat of compression, the floor.

A cloud locked to the drive rotates at w = 2π f/m_θ and has

    n = 2 ε0 m w (Ω_c − w)/q²,   rp = √(N/(π n L)),

L from the log column (cheap.py) iterated with rp.  Compressing from r1 at fixed w frees

    Q = (W/2)(x − 1 − ln x) eV per particle, x = (r1/rp)²,  W = q N/(4π ε0 L):

the drive's work (W/2)(x − 1) less the gain (W/2) ln x of field energy.  While it holds, the drive
pays for the expansion that it undoes, W/τ_exp per particle: the floor is T_bore + τ_T (2/3) W/(kτ).

Whether the drive holds at all, its torque against the drag, no model here predicts: the amplitude
is compared with a measured bound, and without one the lock is not known.

Units: SI, energies in eV per particle.
Accuracy: formulas 0.1 %; the density is 3 % from the full equilibrium of the same N and rp, which
is its interval; tests/clouds/test_rotating_wall.py.
Source (from memory): J. R. Danielson, C. M. Surko, Phys. Rev. Lett. 94, 035001 (2005); T. M.
O'Neil, Phys. Fluids 23, 2216 (1980).  Q: derived.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from wellseq.clouds import scales
from wellseq.clouds.axis import AxisWell
from wellseq.clouds.cheap import LEVEL_FILLED, Column, log_column
from wellseq.clouds.constants import THERMAL_EV_PER_K
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside
from wellseq.clouds.inputs import negative, unusable
from wellseq.clouds.radiation import expansion_heating_K_per_s, time_constant_s

MODEL = "rotating wall, strong drive"
DENSITY_SHARE = 0.03
DEBYE_SHARE_MAX = 0.3
BRILLOUIN_SHARE_MAX = 0.1
BRILLOUIN_SHARE = "share of the Brillouin density"
SLIP_MAX = 0.05
"""Of the drive frequency: a lock is known to a few percent, the density here to three."""
FINDINGS = {BRILLOUIN_SHARE: "too-dense", LEVEL_FILLED: "well-overfull"}
"""Quantity that left its range → the finding it is; all others are out of the forecast's range."""
_ROUNDS_MAX = 100
_SETTLED = 1e-12

Lock = Literal["held", "too weak", "not known"]


@dataclass(frozen=True, slots=True)
class Driven:
    """A cloud locked to its drive.  Outside validity every figure is NaN.

    `space_charge_eV` is φ_sc(0), `heat_eV` Q per particle.  `floor_K` is NaN without a measured
    expansion time; `floor_rise_K_s` over any such time (s) is how far the floor lies above the
    bore.  `shortest_s` is the least time that keeps the heat of compression below the warmest
    temperature allowed, `slip` |w − w_r|/w, both NaN where not asked for.
    """

    density_per_m3: Figure
    radius_m: Figure
    length_m: float
    rotation_rad_per_s: float
    brillouin_share: float
    scale_eV: float
    space_charge_eV: float
    depth_eV: float
    heat_eV: float
    floor_rise_K_s: float
    floor_K: float
    shortest_s: float
    slip: float
    lock: Lock
    outside: tuple[Outside, ...] = ()


@dataclass(frozen=True, slots=True)
class Compression:
    """What is known of how a cloud is driven; None where it is not.

    `start_radius_m` the radius before, `expansion_time_s` r/(dr/dt) without a drive, measured;
    `warmest_K` the temperature it may reach; `rotation_rad_per_s` its rotation as it is, from the
    equilibrium; `amplitude_V` of the drive and `least_amplitude_V`, the measured least that holds.
    """

    start_radius_m: float | None = None
    expansion_time_s: float | None = None
    warmest_K: float | None = None
    rotation_rad_per_s: float | None = None
    amplitude_V: float | None = None
    least_amplitude_V: float | None = None

    @property
    def lock(self) -> Lock:
        """Whether the drive is strong enough, from the measured bound alone."""
        drive, least = self.amplitude_V, self.least_amplitude_V
        if drive is None or least is None or not (math.isfinite(drive) and math.isfinite(least)):
            return "not known"
        return "held" if drive >= least else "too weak"


def rotating_wall(
    *,
    frequency_Hz: float,
    magnetic_field_T: float,
    mass_kg: float,
    charge_e: int,
    number: float,
    temperature_K: float,
    well: AxisWell,
    wall_radius_m: float,
    bore_K: float,
    order: int = 1,
    known: Compression = Compression(),
) -> Driven:
    """What a drive at f in Hz of azimuthal order m_θ holds in an empty `well` (eV) at B in T.

    Mass in kg, radius in m, temperatures of the cloud and of the bore in K.
    """
    refused = _refused(
        unusable(
            MODEL,
            frequency_Hz=frequency_Hz,
            magnetic_field_T=magnetic_field_T,
            mass_kg=mass_kg,
            temperature_K=temperature_K,
            azimuthal_order=order,
            wall_radius_m=wall_radius_m,
        ),
        negative(MODEL, bore_K=bore_K),
        _given(known),
    )
    if refused:
        return _nothing(known.lock, refused)
    charge = _Charge(magnetic_field_T, mass_kg, charge_e)
    drive = 2 * math.pi * frequency_Hz / order
    density, share = charge.locked_to(drive)
    if not share <= BRILLOUIN_SHARE_MAX:
        reason = Outside(MODEL, BRILLOUIN_SHARE, share, BRILLOUIN_SHARE_MAX)
        return _nothing(known.lock, (reason,))
    column, radius = _column_at(density, well, charge_e, number, temperature_K, wall_radius_m)
    reasons = _refused(column.outside, _thin(density, temperature_K, charge_e, radius))
    if reasons:
        return _nothing(known.lock, reasons)
    return _driven(charge, drive, density, share, number, bore_K, column, radius, known)


def _driven(
    charge: _Charge,
    drive: float,
    density: float,
    share: float,
    number: float,
    bore_K: float,
    column: Column,
    radius: float,
    known: Compression,
) -> Driven:
    scale = charge.charge_e**2 * scales.space_charge_scale_V(
        number=number, length_m=column.length_m
    )
    heat = math.nan
    if known.start_radius_m is not None:
        heat = compression_heat_eV(scale, known.start_radius_m, radius)
    # Heating times the expansion time, K: over that time it is a rate.
    heating = expansion_heating_K_per_s(
        number=number, length_m=column.length_m, expansion_time_s=1.0, charge_e=charge.charge_e
    )
    rise = charge.relaxing_s * heating
    thermal_eV = THERMAL_EV_PER_K * (known.warmest_K or math.nan)
    expansion_s = known.expansion_time_s or math.nan
    rotation = known.rotation_rad_per_s or math.nan
    return Driven(
        density_per_m3=_within(density, DENSITY_SHARE),
        # N and L given, the radius goes as 1/√n.
        radius_m=_within(radius, DENSITY_SHARE / 2),
        length_m=column.length_m,
        rotation_rad_per_s=drive,
        brillouin_share=share,
        scale_eV=scale,
        space_charge_eV=column.space_charge_eV,
        depth_eV=column.depth_eV,
        heat_eV=heat,
        floor_rise_K_s=rise,
        floor_K=bore_K + rise / expansion_s,
        shortest_s=heat * charge.relaxing_s / (1.5 * thermal_eV),
        slip=abs(drive - rotation) / drive,
        lock=known.lock,
    )


@dataclass(frozen=True, slots=True)
class _Charge:
    """One kind of particle in the field."""

    field_T: float
    mass_kg: float
    charge_e: int

    def locked_to(self, drive: float) -> tuple[float, float]:
        """Density (1/m³) and its share of the Brillouin density at w in rad/s.

        Beyond half the cyclotron frequency no slow rotation is that fast: infinite.
        """
        cyclotron = scales.cyclotron_frequency_rad_per_s(
            magnetic_field_T=self.field_T, mass_kg=self.mass_kg, charge_e=self.charge_e
        )
        if not drive < cyclotron / 2:
            return math.inf, math.inf
        density = scales.density_of_rotation_per_m3(
            rotation_rad_per_s=drive,
            magnetic_field_T=self.field_T,
            mass_kg=self.mass_kg,
            charge_e=self.charge_e,
        )
        limit = scales.brillouin_density_per_m3(magnetic_field_T=self.field_T, mass_kg=self.mass_kg)
        return density, density / limit

    @property
    def relaxing_s(self) -> float:
        """τ_T in s."""
        return time_constant_s(
            magnetic_field_T=self.field_T, mass_kg=self.mass_kg, charge_e=self.charge_e
        )


def compression_heat_eV(scale_eV: float, start_radius_m: float, end_radius_m: float) -> float:
    """Q in eV per particle, from one radius (m) to another while the drive stands at the end's w.

    `scale_eV` is W in eV.
    """
    excess = (start_radius_m / end_radius_m) ** 2
    return scale_eV / 2 * (excess - 1 - math.log(excess))


def _column_at(
    density: float,
    well: AxisWell,
    charge_e: int,
    number: float,
    temperature_K: float,
    wall_radius_m: float,
) -> tuple[Column, float]:
    """The log column of this density (1/m³), and its radius (m), by iteration."""
    radius = 0.1 * wall_radius_m
    column = log_column(
        well=well,
        charge_e=charge_e,
        number=number,
        temperature_K=temperature_K,
        radius_m=radius,
        wall_radius_m=wall_radius_m,
    )
    for _ in range(_ROUNDS_MAX):
        if column.outside:
            break
        last, radius = radius, math.sqrt(number / (math.pi * density * column.length_m))
        column = log_column(
            well=well,
            charge_e=charge_e,
            number=number,
            temperature_K=temperature_K,
            radius_m=radius,
            wall_radius_m=wall_radius_m,
        )
        if abs(radius - last) <= _SETTLED * radius:
            break
    return column, radius


def _given(known: Compression) -> tuple[Outside, ...]:
    """What is given and cannot be: it must be above zero."""
    quantities = {
        "start_radius_m": known.start_radius_m,
        "expansion_time_s": known.expansion_time_s,
        "warmest_K": known.warmest_K,
        "rotation_rad_per_s": known.rotation_rad_per_s,
    }
    given = {name: value for name, value in quantities.items() if value is not None}
    return unusable(MODEL, **given)


def _thin(
    density: float, temperature_K: float, charge_e: int, radius_m: float
) -> tuple[Outside, ...]:
    """Why a cloud this thin is no plasma, if so."""
    debye = scales.debye_length_m(
        density_per_m3=density, temperature_K=temperature_K, charge_e=charge_e
    )
    if debye <= DEBYE_SHARE_MAX * radius_m:
        return ()
    return (Outside(MODEL, "Debye length over radius", debye / radius_m, DEBYE_SHARE_MAX),)


def _refused(*reasons: tuple[Outside, ...]) -> tuple[Outside, ...]:
    return tuple(reason for group in reasons for reason in group)


def _within(value: float, share: float) -> Figure:
    return Figure(value, value * (1 - share), value * (1 + share))


def _nothing(lock: Lock, reasons: tuple[Outside, ...]) -> Driven:
    return Driven(NOT_KNOWN, NOT_KNOWN, *(math.nan,) * 11, lock, reasons)
