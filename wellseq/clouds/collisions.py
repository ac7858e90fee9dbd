"""Temperature, density and field → how fast collisions share the energy of a cloud out.

Two rates.  Within one species (parallel against perpendicular), with T = (2 T_perp + T_par)/3:

    dT_perp/dt = nu (T_par - T_perp),   nu = n sqrt(2kT/m) b^2 I(kbar)
    b = 2 q^2/(4 pi eps0 kT),   kbar = b/(sqrt2 r_c),   r_c = sqrt(kT/m)/Omega_c

I = (sqrt(2 pi)/15) ln(1/(0.333 kbar)) up to kbar = 0.3; beyond, log-log through TABLE, joined to
the formula at 0.3 (0.385, inside the table's 0.370 +- 0.023) so that the rate has no jump; above
100 with exp(-(5/6)(3 pi kbar)^0.4), an extrapolation.  Between two species, light l and heavy h:

    dT_h/dt = -nu_lh (T_h - T_l)
    nu_lh = (8 sqrt(2 pi)/3) n_l (q_l q_h/4 pi eps0)^2 lnL/(m_l m_h) (kT_h/m_h + kT_l/m_l)^(-3/2)

Units: K, T, kg, 1/m3 in; 1/s and m out; charges in elementary charges.  Scalars throughout.
Accuracy: I to the factor `collision_factor` says (4 to 17 % below kbar = 100); coefficients are
compared with printed ones in tests/clouds/test_collisions.py.
Source (from memory): Collisional equipartition rate for a magnetized pure electron plasma, Phys.
Fluids B 4, 1156 (1992); Measurement of the anisotropic temperature relaxation rate in a pure
electron plasma, Phys. Rev. Lett. 59, 2975 (1987); Plasma Formulary (2007), thermal equilibration.
The table: pair collisions integrated in a magnetic field by Monte Carlo (derived).
"""

from __future__ import annotations

import math
from bisect import bisect_left
from collections.abc import Callable

from wellseq.clouds.constants import (
    BOLTZMANN_J_PER_K,
    COULOMB_VM,
    ELEMENTARY_CHARGE_C,
    PERMITTIVITY_F_PER_M,
    THERMAL_EV_PER_K,
)

WEAK_MAX = 0.3
"""Up to this magnetisation the logarithmic formula holds."""
TABLE_MAX = 100.0
"""Beyond this magnetisation the rate is an extrapolation."""
MAGNETISATION_MAX = 300.0
"""Beyond this magnetisation there is no rate."""
TABLE = (
    (0.1, 0.66, 0.10),
    (0.3, 0.370, 0.023),
    (1.0, 0.190, 0.009),
    (3.0, 0.0786, 0.004),
    (10.0, 0.0103, 0.0004),
    (30.0, 6.18e-4, 0.5e-4),
    (100.0, 3.0e-6, 0.5e-6),
)
"""Rows of kbar, I, and the half-width of I; dimensionless."""
EXTRAPOLATION_FACTOR = 2.0
"""The rate above kbar = 100 may be that many times higher or lower: a margin, not a measurement."""
_WEAK = math.sqrt(2.0 * math.pi) / 15.0


def _weak_integral(kbar: float) -> float:
    return -_WEAK * math.log(0.333 * kbar)


_LOG_KBAR = tuple(math.log(row[0]) for row in TABLE[1:])
_LOG_I = (math.log(_weak_integral(WEAK_MAX)), *(math.log(row[1]) for row in TABLE[2:]))
_LOG_FACTOR = tuple(math.log1p(row[2] / row[1]) for row in TABLE)


def closest_approach_m(temperature_K: float, charge_e: float = 1.0) -> float:
    """b = 2 q^2/(4 pi eps0 kT) in m, at T in K, for charges of `charge_e` e."""
    return 2.0 * charge_e * charge_e * COULOMB_VM / (THERMAL_EV_PER_K * temperature_K)


def magnetisation(
    *, temperature_K: float, magnetic_field_T: float, mass_kg: float, charge_e: float = 1.0
) -> float:
    """kbar = b/(sqrt2 r_c), dimensionless, at T in K, B in T, for mass in kg and charge in e."""
    cyclotron_rad_per_s = abs(charge_e) * ELEMENTARY_CHARGE_C * magnetic_field_T / mass_kg
    radius_m = math.sqrt(BOLTZMANN_J_PER_K * temperature_K / mass_kg) / cyclotron_rad_per_s
    return closest_approach_m(temperature_K, charge_e) / (math.sqrt(2.0) * radius_m)


def temperature_at_magnetisation_K(
    kbar: float, *, magnetic_field_T: float, mass_kg: float, charge_e: float = 1.0
) -> float:
    """The temperature in K at which kbar has this value, at B in T, mass in kg, charge in e."""
    at_one_kelvin = _magnetisation_at_one_kelvin(magnetic_field_T, mass_kg, charge_e)
    return math.pow(at_one_kelvin / kbar, 2.0 / 3.0)


def _magnetisation_at_one_kelvin(field_T: float, mass_kg: float, charge_e: float) -> float:
    return magnetisation(
        temperature_K=1.0, magnetic_field_T=field_T, mass_kg=mass_kg, charge_e=charge_e
    )


def suppression_exponent(kbar: float) -> float:
    """(5/6)(3 pi kbar)^(2/5): strongly magnetised rates fall with exp(-this); dimensionless."""
    return (5.0 / 6.0) * math.pow(3.0 * math.pi * kbar, 0.4)


def collision_integral(kbar: float) -> float:
    """I(kbar), dimensionless and falling; defined for every kbar > 0, valid up to 300."""
    if kbar <= WEAK_MAX:
        return _weak_integral(kbar)
    if kbar >= TABLE_MAX:
        fall = suppression_exponent(TABLE_MAX) - suppression_exponent(kbar)
        return TABLE[-1][1] * math.exp(fall)
    return math.exp(_between(math.log(kbar), _LOG_KBAR, _LOG_I))


def collision_factor(kbar: float) -> float:
    """How many times higher or lower than `collision_integral` I may be; dimensionless, above 1."""
    if kbar > TABLE_MAX:
        return EXTRAPOLATION_FACTOR
    logs = (math.log(TABLE[0][0]), *_LOG_KBAR)
    at = min(max(math.log(kbar), logs[0]), logs[-1])
    return math.exp(_between(at, logs, _LOG_FACTOR))


def _between(at: float, places: tuple[float, ...], values: tuple[float, ...]) -> float:
    """Straight line through a table at a place inside of it."""
    right = min(max(bisect_left(places, at), 1), len(places) - 1)
    share = (at - places[right - 1]) / (places[right] - places[right - 1])
    return values[right - 1] + share * (values[right] - values[right - 1])


def anisotropy_rate_of(
    *, density_per_m3: float, magnetic_field_T: float, mass_kg: float, charge_e: float = 1.0
) -> Callable[[float], float]:
    """nu as a function: temperature in K → 1/s, at n in 1/m3, B in T, mass in kg, charge in e.

    Everything that does not depend on the temperature is worked out once.
    """
    magnetised = _magnetisation_at_one_kelvin(magnetic_field_T, mass_kg, charge_e)
    speed_m_per_s = math.sqrt(2.0 * BOLTZMANN_J_PER_K / mass_kg)
    head = density_per_m3 * speed_m_per_s * closest_approach_m(1.0, charge_e) ** 2

    def rate_per_s(temperature_K: float) -> float:
        fall = math.pow(temperature_K, -1.5)
        return head * fall * collision_integral(magnetised * fall)

    return rate_per_s


def anisotropy_rate_per_s(
    *,
    density_per_m3: float,
    temperature_K: float,
    magnetic_field_T: float,
    mass_kg: float,
    charge_e: float = 1.0,
) -> float:
    """nu in 1/s, at n in 1/m3, T in K, B in T, mass in kg, charge in e.

    dT_perp/dt = nu (T_par - T_perp) and dT_par/dt = 2 nu (T_perp - T_par).
    """
    rate = anisotropy_rate_of(
        density_per_m3=density_per_m3,
        magnetic_field_T=magnetic_field_T,
        mass_kg=mass_kg,
        charge_e=charge_e,
    )
    return rate(temperature_K)


def stalling_K(
    *,
    rate_per_s: float,
    density_per_m3: float,
    magnetic_field_T: float,
    mass_kg: float,
    charge_e: float = 1.0,
) -> float:
    """The temperature in K below which nu is less than a rate in 1/s, on the cold side of its peak.

    n in 1/m3, B in T, mass in kg, charge in e.  nu peaks where kbar I(kbar) does, at kbar = 3.
    Infinity when nu is below the rate even there; 0 K when it is above it as far as it is valid.
    """
    magnetised = _magnetisation_at_one_kelvin(magnetic_field_T, mass_kg, charge_e)
    rate = anisotropy_rate_of(
        density_per_m3=density_per_m3,
        magnetic_field_T=magnetic_field_T,
        mass_kg=mass_kg,
        charge_e=charge_e,
    )
    warm_K, cold_K = (math.pow(magnetised / kbar, 2.0 / 3.0) for kbar in (3.0, MAGNETISATION_MAX))
    if rate(warm_K) < rate_per_s:
        return math.inf
    if rate(cold_K) > rate_per_s:
        return 0.0
    for _ in range(60):
        middle_K = math.sqrt(warm_K * cold_K)
        if rate(middle_K) > rate_per_s:
            warm_K = middle_K
        else:
            cold_K = middle_K
    return warm_K


def unmagnetised_rate_per_s(
    *,
    density_per_m3: float,
    temperature_K: float,
    mass_kg: float,
    coulomb_logarithm: float,
    charge_e: float = 1.0,
) -> float:
    """nu without a field, in 1/s: (8 sqrt(pi)/15) n (q^2/4 pi eps0 kT)^2 sqrt(kT/m) lnL.

    n in 1/m3, T in K, mass in kg, charge in e.  With b and sqrt(2kT/m) it is
    n b^2 sqrt(2kT/m) (sqrt(2 pi)/15) lnL: the head of I.
    """
    speed_m_per_s = math.sqrt(2.0 * BOLTZMANN_J_PER_K * temperature_K / mass_kg)
    area_m2 = closest_approach_m(temperature_K, charge_e) ** 2
    return density_per_m3 * speed_m_per_s * area_m2 * _WEAK * coulomb_logarithm


def coulomb_logarithm(
    *,
    light_density_per_m3: float,
    light_K: float,
    heavy_K: float,
    light_mass_kg: float,
    heavy_mass_kg: float,
    charges_e2: float = 1.0,
) -> float:
    """lnL = 0.5 ln(1 + (lambda_D/b90)^2), dimensionless, positive also in the cold limit.

    lambda_D is of the light species (n in 1/m3, T in K); b90 = |q_l q_h|/(4 pi eps0 mu v^2) with
    v^2 = 3kT_l/m_l + 3kT_h/m_h, masses in kg.  `charges_e2` is |q_l q_h| in e^2; the light
    species that screens is singly charged.
    """
    thermal_eV = THERMAL_EV_PER_K * light_K
    screening_m2 = PERMITTIVITY_F_PER_M * thermal_eV / (ELEMENTARY_CHARGE_C * light_density_per_m3)
    reduced_kg = light_mass_kg * heavy_mass_kg / (light_mass_kg + heavy_mass_kg)
    speed2 = 3.0 * BOLTZMANN_J_PER_K * (light_K / light_mass_kg + heavy_K / heavy_mass_kg)
    right_angle_m = charges_e2 * COULOMB_VM * ELEMENTARY_CHARGE_C / (reduced_kg * speed2)
    return 0.5 * math.log1p(screening_m2 / right_angle_m**2)


def species_rate_per_s(
    *,
    light_density_per_m3: float,
    light_K: float,
    heavy_K: float,
    light_mass_kg: float,
    heavy_mass_kg: float,
    charges_e2: float = 1.0,
) -> float:
    """nu_lh in 1/s: dT_h/dt = -nu_lh (T_h - T_l); n in 1/m3, T in K, masses in kg, charges in e^2.

    It does not know of the magnetic field: above a light kbar of 1 it is good to a factor of 3.
    """
    logarithm = coulomb_logarithm(
        light_density_per_m3=light_density_per_m3,
        light_K=light_K,
        heavy_K=heavy_K,
        light_mass_kg=light_mass_kg,
        heavy_mass_kg=heavy_mass_kg,
        charges_e2=charges_e2,
    )
    spread2 = BOLTZMANN_J_PER_K * (heavy_K / heavy_mass_kg + light_K / light_mass_kg)
    head = 8.0 * math.sqrt(2.0 * math.pi) / 3.0 / (light_mass_kg * heavy_mass_kg)
    force2 = (charges_e2 * COULOMB_VM * ELEMENTARY_CHARGE_C) ** 2
    return head * light_density_per_m3 * force2 * logarithm * math.pow(spread2, -1.5)
