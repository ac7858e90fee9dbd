"""A beam's width and the field → which share of it fits through a bore, and how particles gyrate.

A beam with a Gaussian profile of rms s (each of x and y) in a field B_0 is s sqrt(B_0/B) wide in B,
for it follows the field lines.  A particle whose guiding centre is at r reaches out to r + rho, rho
= sqrt(2 m E)/(|q| B) the gyration radius; it gets through when that stays inside the bore.

Units: m, T, eV, kg, e.  Accuracy: closed forms, tests/clouds/test_acceptance.py.
Source: derived (adiabatic motion along a field line, flux conserved).
"""

from __future__ import annotations

from math import expm1, sqrt

from wellseq.clouds.constants import ELEMENTARY_CHARGE_C


def gyration_radius_m(
    *, perpendicular_eV: float, field_T: float, mass_kg: float, charge_e: float = 1.0
) -> float:
    """sqrt(2 m E)/(|q| B) in m of a particle of E (eV) across the field (T), mass in kg, e."""
    momentum = sqrt(2.0 * mass_kg * perpendicular_eV * ELEMENTARY_CHARGE_C)
    return momentum / (abs(charge_e) * ELEMENTARY_CHARGE_C * abs(field_T))


def share_through_bore(
    *,
    beam_rms_m: float,
    beam_field_T: float,
    bore_field_T: float,
    bore_radius_m: float,
    gyration_radius_m: float,
) -> float:
    """Share (0 to 1) of a beam of rms `beam_rms_m` in `beam_field_T` that fits a bore; m and T.

    `gyration_radius_m` is that inside the bore.
    """
    room = bore_radius_m - gyration_radius_m
    if room <= 0.0:
        return 0.0
    width = beam_rms_m * sqrt(abs(beam_field_T / bore_field_T))
    return -expm1(-(room**2) / (2.0 * width**2))
