"""Plasma scales against printed coefficients; CODATA values recalled, each recomputed."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import partial

import pytest
from hypothesis import given
from hypothesis import strategies as st

from wellseq.clouds import scales
from wellseq.clouds.constants import ELECTRON_MASS_KG, PROTON_MASS_KG, THERMAL_EV_PER_K

EV_K = 1 / THERMAL_EV_PER_K
electron = {"mass_kg": ELECTRON_MASS_KG}


@dataclass(frozen=True)
class Row:
    """One published value: what is computed, what is printed, how far they may differ."""

    name: str
    computed: float
    printed: float
    tolerance: float

    @property
    def met(self) -> bool:
        return abs(self.computed - self.printed) <= self.tolerance


def rotation_share(share: float) -> float:
    """Rotation over the cyclotron frequency at a share of the Brillouin density, 1 T."""
    limit = scales.brillouin_density_per_m3(magnetic_field_T=1.0, **electron)
    rotation = scales.rotation_of_density_rad_per_s(
        density_per_m3=share * limit, magnetic_field_T=1.0, **electron
    )
    return rotation / scales.cyclotron_frequency_rad_per_s(magnetic_field_T=1.0, **electron)


def rows(slip: float = 1.0) -> list[Row]:
    """All rows; `slip` multiplies what is computed, to show that each row can fail."""
    near_limit = rotation_share(1 - 1e-12)
    exb = scales.rotation_of_density_rad_per_s(
        density_per_m3=1e14, magnetic_field_T=1.0, **electron
    )
    parts = [
        # Rev. Mod. Phys. 71, 87 (1999); value from memory, in 1/cm3.
        (
            "C01 Brillouin density",
            scales.brillouin_density_per_m3(magnetic_field_T=1.0, **electron) / 1e6,
            4.86e12,
            1e10,
        ),
        # Rev. Mod. Phys. 71, 87 (1999); value from memory.
        ("C03 rotation at the Brillouin density", near_limit, 0.5, 2e-6),
        # Plasma Formulary (2007 ed.), fundamental plasma parameters; value from memory, in cm.
        (
            "C04 Debye length",
            100 * scales.debye_length_m(density_per_m3=1e6, temperature_K=EV_K),
            743.0,
            1.0,
        ),
        # Plasma Formulary (2007 ed.); printed value, rad/s.
        (
            "C06 plasma frequency",
            scales.plasma_frequency_rad_per_s(density_per_m3=1e6, **electron),
            5.64e4,
            1e2,
        ),
        # Rev. Mod. Phys. 71, 87 (1999), formula; derived, kHz.
        ("C08 rotation of a dilute column", exb / (2e3 * math.pi), 144.0, 0.5),
        # Rev. Mod. Phys. 87, 247 (2015) prints 1.4e-7; value from memory, V for N/L = 1/cm.
        (
            "C09 space charge per line density",
            scales.space_charge_scale_V(number=1.0, length_m=0.01),
            1.44e-7,
            1e-9,
        ),
        # Physics of Nonneutral Plasmas (1990/2001); derived, V.
        (
            "C10 column, worked",
            scales.column_potential_V(
                number=1e14 * math.pi * 1e-6, length_m=1.0, radius_m=1e-3, wall_radius_m=1e-2
            ),
            2.535657,
            1e-6,
        ),
    ]
    return [
        Row(name, slip * computed, printed, far)
        for name, computed, printed, far in (*parts, *more_rows())
    ]


def more_rows() -> list[tuple[str, float, float, float]]:
    """Rows of coupling, orbits and rotation: name, computed, printed, how far off it may be."""
    turn = 2 * math.pi * 1e5
    return [
        # Rev. Mod. Phys. 54, 1017 (1982); value from memory.
        (
            "C11 coupling",
            scales.coupling(density_per_m3=1e18, temperature_K=1e6),
            2.69e-5,
            1e-7,
        ),
        # Plasma Formulary (2007 ed.); value from memory, cm at 1 eV and 1 gauss.
        (
            "C24 gyroradius",
            100 * scales.gyroradius_m(temperature_K=EV_K, magnetic_field_T=1e-4, **electron),
            2.38,
            0.01,
        ),
        # Diocotron instability in a cylindrical geometry, Phys. Fluids 8, 1288 (1965); derived.
        (
            "C25 slow drift over rotation",
            scales.diocotron_Hz(rotation_rad_per_s=turn, radius_m=1e-3, wall_radius_m=1e-2) / 1e5,
            0.01,
            1e-9,
        ),
        # Centrifugal separation, Phys. Fluids 24, 1447 (1981); derived.
        (
            "C26 separation exponent",
            scales.separation_exponent(
                heavy_kg=PROTON_MASS_KG,
                light_kg=ELECTRON_MASS_KG,
                rotation_rad_per_s=turn,
                radius_m=1e-3,
                temperature_K=100.0,
            ),
            0.239,
            0.001,
        ),
        # Torque-balanced steady states, Phys. Rev. Lett. 94, 035001 (2005); derived, 1/cm3.
        (
            "F01 density locked to the drive",
            scales.density_of_rotation_per_m3(
                rotation_rad_per_s=2e6 * math.pi, magnetic_field_T=5.0, **electron
            )
            / 1e6,
            3.47e9,
            1e7,
        ),
    ]


@pytest.mark.parametrize("row", rows(), ids=lambda row: row.name)
def test_published_values(row: Row) -> None:
    assert row.met


@pytest.mark.parametrize("row", rows(slip=1.02), ids=lambda row: row.name)
def test_two_percent_would_be_seen(row: Row) -> None:
    assert not row.met


density = st.floats(1e8, 1e20)


@given(st.floats(1e-9, 1.0), st.floats(0.01, 20.0), st.sampled_from([1, -1, 2, 5]))
def test_density_and_rotation_are_inverse(share: float, field_T: float, charge_e: int) -> None:
    at = {"magnetic_field_T": field_T, "mass_kg": PROTON_MASS_KG, "charge_e": charge_e}
    limit = scales.brillouin_density_per_m3(magnetic_field_T=field_T, mass_kg=PROTON_MASS_KG)
    wanted = 0.999999 * share * limit
    rotation = scales.rotation_of_density_rad_per_s(density_per_m3=wanted, **at)
    cyclotron = scales.cyclotron_frequency_rad_per_s(**at)
    assert 0 < rotation <= cyclotron / 2
    back = scales.density_of_rotation_per_m3(rotation_rad_per_s=rotation, **at)
    assert back == pytest.approx(wanted, rel=1e-9)


def test_no_rotation_above_the_limit() -> None:
    limit = scales.brillouin_density_per_m3(magnetic_field_T=1.0, **electron)
    rotation = partial(
        scales.rotation_of_density_rad_per_s, magnetic_field_T=1.0, mass_kg=ELECTRON_MASS_KG
    )
    assert math.isnan(rotation(density_per_m3=1.001 * limit))
    assert rotation(density_per_m3=0.999 * limit) > 0


def test_thermal_bounce_of_the_worked_examples() -> None:
    # v_th/2L: 0.65 MHz for 60 K and 23.1 mm, 0.32 MHz for 120 K and 66.0 mm (derived).
    short = scales.thermal_bounce_Hz(temperature_K=60.0, length_m=23.1e-3, **electron)
    long = scales.thermal_bounce_Hz(temperature_K=120.0, length_m=66.0e-3, **electron)
    assert short == pytest.approx(0.65e6, rel=0.01)
    assert long == pytest.approx(0.32e6, rel=0.02)
    assert long != pytest.approx(short, rel=0.02)


@given(density, st.floats(0.1, 1e6))
def test_debye_length_times_plasma_frequency_is_the_thermal_speed(n: float, kelvin: float) -> None:
    product = scales.debye_length_m(
        density_per_m3=n, temperature_K=kelvin
    ) * scales.plasma_frequency_rad_per_s(density_per_m3=n, **electron)
    speed = 2 * scales.thermal_bounce_Hz(temperature_K=kelvin, length_m=1.0, **electron)
    assert product == pytest.approx(speed, rel=1e-12)
