"""Density, temperature, field, size → the scales of a nonneutral plasma.

    Debye length      √(ε0 kT/(n q²))                 plasma frequency   √(n q²/(ε0 m))
    Brillouin limit   ε0 B²/(2m)                       rotation           the slow root of
                                                       2 w (Ω_c − w) = w_p²
    pressure          κ = m w (Ω_c − w)/(2e), V/m²: how hard the rotation presses inward
    space charge      W = e N/(4π ε0 L); a column has W (1 + 2 ln(Rw/rp)) on its axis
    coupling          Γ = q²/(4π ε0 a kT), a = (3/(4π n))^(1/3)

Angular frequencies are rad/s, all other quantities SI.  Charges in elementary charges, their sign
does not matter here.
Accuracy: closed forms, tests/clouds/test_scales.py against printed coefficients.
Source: D. H. E. Dubin, T. M. O'Neil, Rev. Mod. Phys. 71, 87 (1999); R. C. Davidson, Physics of
Nonneutral Plasmas (Addison-Wesley 1990) (both from memory).
"""

from __future__ import annotations

from math import log, nan, pi, sqrt

from wellseq.clouds.constants import (
    BOLTZMANN_J_PER_K,
    COULOMB_VM,
    ELEMENTARY_CHARGE_C,
    PERMITTIVITY_F_PER_M,
    THERMAL_EV_PER_K,
)


def debye_length_m(*, density_per_m3: float, temperature_K: float, charge_e: float = 1) -> float:
    """λ_D in m at a density in 1/m³ and a temperature in K, for charges of `charge_e` e."""
    energy = PERMITTIVITY_F_PER_M * BOLTZMANN_J_PER_K * temperature_K
    return sqrt(energy / density_per_m3) / abs(charge_e * ELEMENTARY_CHARGE_C)


def plasma_frequency_rad_per_s(
    *, density_per_m3: float, mass_kg: float, charge_e: float = 1
) -> float:
    """w_p in rad/s at a density in 1/m³, mass in kg, charge in e."""
    charge_C = abs(charge_e * ELEMENTARY_CHARGE_C)
    return charge_C * sqrt(density_per_m3 / (PERMITTIVITY_F_PER_M * mass_kg))


def cyclotron_frequency_rad_per_s(
    *, magnetic_field_T: float, mass_kg: float, charge_e: float = 1
) -> float:
    """Ω_c in rad/s at B in T, mass in kg, charge in e."""
    return abs(charge_e * ELEMENTARY_CHARGE_C) * magnetic_field_T / mass_kg


def brillouin_density_per_m3(*, magnetic_field_T: float, mass_kg: float) -> float:
    """The density in 1/m³ that no rotation can confine beyond, at B in T and mass in kg.

    Source: L. Brillouin, Phys. Rev. 67, 260 (1945) (from memory).
    """
    return PERMITTIVITY_F_PER_M * magnetic_field_T**2 / (2 * mass_kg)


def rotation_of_density_rad_per_s(
    *, density_per_m3: float, magnetic_field_T: float, mass_kg: float, charge_e: float = 1
) -> float:
    """Slow rotation in rad/s of a cold uniform plasma (1/m³, T, kg, e); NaN above the limit."""
    return rotation_of_pressure_rad_per_s(
        pressure_V_per_m2=density_per_m3 * charge_e**2 * pi * COULOMB_VM,
        magnetic_field_T=magnetic_field_T,
        mass_kg=mass_kg,
        charge_e=charge_e,
    )


def rotation_of_pressure_rad_per_s(
    *, pressure_V_per_m2: float, magnetic_field_T: float, mass_kg: float, charge_e: float = 1
) -> float:
    """The slow rotation in rad/s that presses inward with κ in V/m², at B in T, mass in kg.

    NaN when no rotation does: κ above m Ω_c²/(8e).
    """
    cyclotron = cyclotron_frequency_rad_per_s(
        magnetic_field_T=magnetic_field_T, mass_kg=mass_kg, charge_e=charge_e
    )
    square = 2 * ELEMENTARY_CHARGE_C * pressure_V_per_m2 / mass_kg
    under = cyclotron**2 - 4 * square
    if not under >= 0.0:
        return nan
    # The other form of the root loses digits when w is far below the cyclotron frequency.
    return 2 * square / (cyclotron + sqrt(under))


def pressure_V_per_m2(
    *, rotation_rad_per_s: float, magnetic_field_T: float, mass_kg: float, charge_e: float = 1
) -> float:
    """κ in V/m² of a rotation in rad/s at B in T, mass in kg, charge in e."""
    cyclotron = cyclotron_frequency_rad_per_s(
        magnetic_field_T=magnetic_field_T, mass_kg=mass_kg, charge_e=charge_e
    )
    lean = rotation_rad_per_s * (cyclotron - rotation_rad_per_s)
    return mass_kg * lean / (2 * ELEMENTARY_CHARGE_C)


def density_of_rotation_per_m3(
    *, rotation_rad_per_s: float, magnetic_field_T: float, mass_kg: float, charge_e: float = 1
) -> float:
    """Density, 1/m³, of a cold plasma, mass m (kg), turning at w (rad/s): 2 ε0 m w (Ω_c − w)/q²."""
    pressure = pressure_V_per_m2(
        rotation_rad_per_s=rotation_rad_per_s,
        magnetic_field_T=magnetic_field_T,
        mass_kg=mass_kg,
        charge_e=charge_e,
    )
    return pressure / (pi * COULOMB_VM * charge_e**2)


def space_charge_scale_V(*, number: float, length_m: float) -> float:
    """W = e N/(4π ε0 L) in V for N single charges over L in m: 1.43996e-9 N/L."""
    return COULOMB_VM * number / length_m


def column_potential_V(
    *, number: float, length_m: float, radius_m: float, wall_radius_m: float
) -> float:
    """Own potential in V on the axis of a long uniform column: W (1 + 2 ln(Rw/rp)); sizes in m."""
    scale = space_charge_scale_V(number=number, length_m=length_m)
    return scale * (1 + 2 * log(wall_radius_m / radius_m))


def coupling(*, density_per_m3: float, temperature_K: float, charge_e: float = 1) -> float:
    """Γ, dimensionless, at a density in 1/m³ and a temperature in K; a fluid of lone flights < 1.

    Source: S. Ichimaru, Rev. Mod. Phys. 54, 1017 (1982) (from memory).
    """
    spacing_m = float((3 / (4 * pi * density_per_m3)) ** (1 / 3))
    return charge_e**2 * COULOMB_VM / (spacing_m * THERMAL_EV_PER_K * temperature_K)


def gyroradius_m(
    *, temperature_K: float, magnetic_field_T: float, mass_kg: float, charge_e: float = 1
) -> float:
    """√(m kT)/(q B) in m at a temperature in K and B in T, mass in kg, charge in e."""
    momentum = sqrt(mass_kg * BOLTZMANN_J_PER_K * temperature_K)
    return momentum / abs(charge_e * ELEMENTARY_CHARGE_C * magnetic_field_T)


def thermal_bounce_Hz(*, temperature_K: float, length_m: float, mass_kg: float) -> float:
    """√(kT/m)/(2L) in Hz: how often a thermal particle crosses a flat-bottomed cloud and back.

    Temperature in K, length in m, mass in kg.
    """
    return sqrt(BOLTZMANN_J_PER_K * temperature_K / mass_kg) / (2 * length_m)


def diocotron_Hz(*, rotation_rad_per_s: float, radius_m: float, wall_radius_m: float) -> float:
    """Frequency in Hz of a column's slow drift about the bore's axis: f_rotation (rp/Rw)².

    Rotation in rad/s, radii in m; small displacement, long column.
    Source: R. H. Levy, Phys. Fluids 8, 1288 (1965) (from memory).
    """
    return rotation_rad_per_s / (2 * pi) * (radius_m / wall_radius_m) ** 2


def separation_exponent(
    *,
    heavy_kg: float,
    light_kg: float,
    rotation_rad_per_s: float,
    radius_m: float,
    temperature_K: float,
) -> float:
    """(m1 − m2) w² r²/(2kT), dimensionless: heavy and light are spun apart when it is ≫ 1.

    Masses in kg, rotation in rad/s, radius in m, temperature in K.
    Source: T. M. O'Neil, Phys. Fluids 24, 1447 (1981) (from memory).
    """
    energy = (heavy_kg - light_kg) * (rotation_rad_per_s * radius_m) ** 2 / 2
    return energy / (BOLTZMANN_J_PER_K * temperature_K)
