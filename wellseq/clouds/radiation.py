"""Mass, charge and field → how fast gyration radiates, and the closed form of isotropic cooling.

    gamma_c = q^4 B^2/(3 pi eps0 m^3 c^3)          decay of the gyration energy alone, 1/s
    dT/dt = -(T - T_bore)/tau_T + H,  tau_T = 1.5/gamma_c,  T_floor = T_bore + tau_T H
    t = tau_T ln((T0 - T_floor)/(Tf - T_floor))    while collisions keep the temperature isotropic

Units: T for fields, K and K/s, s, kg, elementary charges.  Scalars throughout.
Accuracy: exact for the stated equation (1e-9 in tests/clouds/test_radiation.py).
Source (from memory): Cooling of a pure electron plasma by cyclotron radiation, Phys. Fluids 23,
725 (1980); Geonium theory: physics of a single electron or ion in a Penning trap, Rev. Mod. Phys.
58, 233 (1986).  Heating by expansion: the electrostatic energy of a uniform column (derived).
"""

from __future__ import annotations

import math

from wellseq.clouds.constants import (
    COULOMB_VM,
    ELEMENTARY_CHARGE_C,
    LIGHT_SPEED_M_PER_S,
    PERMITTIVITY_F_PER_M,
    THERMAL_EV_PER_K,
)


def radiation_rate_per_s(
    *, magnetic_field_T: float, mass_kg: float, charge_e: float = 1.0
) -> float:
    """gamma_c in 1/s at B in T, mass in kg, charge in e: 1/2.579 s times (B/T)^2 for electrons."""
    charge_C = abs(charge_e) * ELEMENTARY_CHARGE_C
    momentum = mass_kg * LIGHT_SPEED_M_PER_S
    head = charge_C * charge_C * magnetic_field_T / momentum
    return head * head / (3.0 * math.pi * PERMITTIVITY_F_PER_M * momentum)


def time_constant_s(*, magnetic_field_T: float, mass_kg: float, charge_e: float = 1.0) -> float:
    """tau_T in s at B in T, mass in kg, charge in e: three degrees share what two lose."""
    return 1.5 / radiation_rate_per_s(
        magnetic_field_T=magnetic_field_T, mass_kg=mass_kg, charge_e=charge_e
    )


def floor_K(*, bore_K: float, heating_K_per_s: float, time_constant_s: float) -> float:
    """T_bore + tau_T H in K, for H in K/s and tau_T in s: nothing radiates itself colder."""
    return bore_K + time_constant_s * heating_K_per_s


def isotropic_K(*, start_K: float, floor_K: float, time_constant_s: float, after_s: float) -> float:
    """The temperature in K after a time in s, from `start_K` towards `floor_K`, with tau_T in s."""
    return floor_K + (start_K - floor_K) * math.exp(-after_s / time_constant_s)


def isotropic_time_s(
    *, start_K: float, goal_K: float, floor_K: float, time_constant_s: float
) -> float:
    """How long in s from `start_K` down to `goal_K`, all in K, tau_T in s.

    0 when it is that cold already, infinity when the goal is not above the floor.
    """
    if start_K <= goal_K:
        return 0.0
    if goal_K <= floor_K:
        return math.inf
    return time_constant_s * math.log((start_K - floor_K) / (goal_K - floor_K))


def noise_heating_K_per_s(*, base_K: float, bore_K: float, time_constant_s: float) -> float:
    """H in K/s of a machine whose clouds are measured to stop at `base_K` (K), with tau_T in s."""
    return max(base_K - bore_K, 0.0) / time_constant_s


def expansion_heating_K_per_s(
    *, number: float, length_m: float, expansion_time_s: float, charge_e: float = 1.0
) -> float:
    """(2/3) q W/(k tau_exp) in K/s: what a column gains that grows with tau_exp = r/(dr/dt) in s.

    W = q N/(4 pi eps0 L), for N particles of charge `charge_e` e over L in m.
    """
    scale_eV = charge_e * charge_e * COULOMB_VM * number / length_m
    return 2.0 / 3.0 * scale_eV / (THERMAL_EV_PER_K * expansion_time_s)
