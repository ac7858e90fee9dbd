"""Collision rates against printed coefficients and the values of the stated model."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from wellseq.clouds import collisions
from wellseq.clouds.constants import ELECTRON_MASS_KG, PROTON_MASS_KG, THERMAL_EV_PER_K

ONE_EV_K = 1.0 / THERMAL_EV_PER_K
PER_CM3 = 1e6
ELECTRONS = {"mass_kg": ELECTRON_MASS_KG}


def formulary_coefficient(scale: float = 1.0) -> float:
    """nu for 1 eV, 1 cm^-3, lnL = 1, in 1/s."""
    return scale * collisions.unmagnetised_rate_per_s(
        density_per_m3=PER_CM3, temperature_K=ONE_EV_K, coulomb_logarithm=1.0, **ELECTRONS
    )


def test_isotropisation_coefficient() -> None:
    # Plasma Formulary (2007 ed.), 8.2e-7 n lam T^-3/2; Phys. Fluids 13, 2778 (1970); from memory.
    assert formulary_coefficient() == pytest.approx(8.2e-7, abs=3e-9)
    assert formulary_coefficient() / 8.220306e-7 == pytest.approx(1.0, abs=1e-6)
    assert formulary_coefficient(1.01) != pytest.approx(8.2e-7, abs=3e-9)


def test_both_printed_normalisations_agree() -> None:
    # Phys. Fluids B 4, 1156 (1992): n b2^2 v2 sqrt(2 pi)/15 (derived identity).
    thermal_J = 1.602176634e-19
    b = 1.602176634e-19**2 / (4 * math.pi * 8.8541878128e-12 * thermal_J)
    speed = math.sqrt(thermal_J / ELECTRON_MASS_KG)
    other = 8 * math.sqrt(math.pi) / 15 * PER_CM3 * b * b * speed
    assert formulary_coefficient() / other == pytest.approx(1.0, abs=1e-12)


def test_suppression_exponent() -> None:
    # Phys. Fluids B 4, 1156 (1992): exp(-(5/6)(3 pi k)^(2/5)) (derived: the saddle below).
    assert collisions.suppression_exponent(1.0) == pytest.approx(2.044218, abs=1e-6)
    u = np.linspace(0.5, 6.0, 200_001)
    for kbar in (0.5, 1.0, 30.0):
        saddle = float((u * u / 2 + math.pi * kbar / u**3).min())
        assert collisions.suppression_exponent(kbar) == pytest.approx(saddle, rel=1e-8)
    assert collisions.suppression_exponent(1.001) != pytest.approx(2.044218, abs=1e-6)


def test_suppression_exponent_in_the_older_scale() -> None:
    # 2.35 (b/r_c)^(2/5): Phys. Fluids 28, 3241 (1985); Phys. Rev. Lett. 59, 2975 (1987); memory.
    # b/r_c there is e^2/kT over sqrt(kT/m)/Omega_c: kbar = sqrt2 times it.
    assert collisions.suppression_exponent(math.sqrt(2.0)) == pytest.approx(2.35, abs=0.01)


def equilibration_coefficient(heavy: float = 2e-27) -> float:
    """nu (ma Tb + mb Ta)^1.5/(sqrt(ma mb) n lam) in grams, cm and eV, with mb = 2e-27 kg there."""
    light = 1e-27
    state = {"light_density_per_m3": PER_CM3, "light_K": ONE_EV_K, "heavy_K": 2 * ONE_EV_K}
    masses = {"light_mass_kg": light, "heavy_mass_kg": heavy}
    rate = collisions.species_rate_per_s(**state, **masses)
    logarithm = collisions.coulomb_logarithm(**state, **masses)
    in_grams = 1e3 * (light * 2 + 2e-27 * 1)
    return rate / logarithm / (1e3 * math.sqrt(light * 2e-27)) * in_grams**1.5


def test_equilibration_coefficient_of_two_species() -> None:
    # Plasma Formulary (2007 ed.): 1.8e-19 sqrt(ma mb) n lam/(ma Tb + mb Ta)^1.5, cgs and eV; print.
    assert equilibration_coefficient() == pytest.approx(1.8e-19, abs=5e-21)
    assert equilibration_coefficient() / 1.754347e-19 == pytest.approx(1.0, abs=1e-5)
    assert equilibration_coefficient(heavy=2.2e-27) != pytest.approx(1.8e-19, abs=5e-21)


@pytest.mark.parametrize(
    ("temperature_K", "kbar", "rate_per_s"),
    [
        (1000, 0.0675, 1.23e4),
        (100, 2.135, 6.35e4),
        (30, 12.99, 1.97e4),
        (10, 67.5, 329),
        (4, 267, 0.46),
    ],
)
def test_worked_rates(temperature_K: float, kbar: float, rate_per_s: float) -> None:
    # Electrons, n = 1e14 1/m3, 2 T (derived).
    at = {"temperature_K": temperature_K, "magnetic_field_T": 2.0, **ELECTRONS}
    assert collisions.magnetisation(**at) == pytest.approx(kbar, rel=1e-3)
    rate = collisions.anisotropy_rate_per_s(density_per_m3=1e14, **at)
    assert rate == pytest.approx(rate_per_s, rel=0.02)
    halved = collisions.anisotropy_rate_per_s(density_per_m3=0.9e14, **at)
    assert halved != pytest.approx(rate_per_s, rel=0.02)


@pytest.mark.parametrize("row", collisions.TABLE)
def test_the_integral_is_the_table_within_its_errors(row: tuple[float, float, float]) -> None:
    kbar, value, half = row
    assert abs(collisions.collision_integral(kbar) - value) <= half
    factor = collisions.collision_factor(kbar)
    assert 1.0 + half / value == pytest.approx(factor, rel=1e-9)


def test_formula_values() -> None:
    assert collisions.collision_integral(0.1) == pytest.approx(0.569, abs=5e-4)
    assert collisions.collision_integral(0.3) == pytest.approx(0.385, abs=5e-4)


@given(st.floats(1e-6, 300.0), st.floats(1.0, 1.5))
def test_the_integral_falls_without_a_jump(kbar: float, step: float) -> None:
    here, there = (collisions.collision_integral(value) for value in (kbar, kbar * step))
    assert there <= here
    near = collisions.collision_integral(kbar * (1 + 1e-9))
    assert near == pytest.approx(here, rel=1e-6)


def test_a_jump_would_be_seen() -> None:
    # The bare table at 0.3 against the formula: 4 % apart.
    assert collisions.TABLE[1][1] != pytest.approx(collisions.collision_integral(0.3), rel=1e-6)


def test_beyond_the_table_the_rate_falls_with_the_exponent() -> None:
    ratio = collisions.collision_integral(300.0) / collisions.collision_integral(100.0)
    exponents = [collisions.suppression_exponent(kbar) for kbar in (100.0, 300.0)]
    assert ratio == pytest.approx(math.exp(exponents[0] - exponents[1]), rel=1e-12)
    assert collisions.collision_factor(300.0) == collisions.EXTRAPOLATION_FACTOR


@pytest.mark.parametrize(
    ("density", "field_T", "equal_K"),
    [(1e13, 2, 5.7), (1e13, 4, 12.2), (1e14, 2, 4.3), (1e14, 4, 8.8)],
)
def test_where_collisions_fall_behind(density: float, field_T: float, equal_K: float) -> None:
    # Equal to the 1/tau_T = (2/3) gamma_c that radiation removes (derived).
    removed = field_T**2 / 3.869
    here = {"density_per_m3": density, "magnetic_field_T": field_T, **ELECTRONS}
    found = collisions.stalling_K(rate_per_s=removed, **here)
    assert found == pytest.approx(equal_K, rel=0.01)
    assert collisions.stalling_K(rate_per_s=2 * removed, **here) != pytest.approx(equal_K, rel=0.01)
    rate = collisions.anisotropy_rate_per_s(temperature_K=found, **here)
    assert rate == pytest.approx(removed, rel=1e-9)


def test_stalling_nowhere_and_everywhere() -> None:
    here = {"density_per_m3": 1e14, "magnetic_field_T": 2.0, **ELECTRONS}
    assert collisions.stalling_K(rate_per_s=1e-12, **here) == 0.0
    assert collisions.stalling_K(rate_per_s=1e9, **here) == math.inf


@given(st.floats(1.0, 1e5), st.floats(0.01, 10.0))
def test_temperature_and_magnetisation_are_inverse(temperature_K: float, field_T: float) -> None:
    there = {"magnetic_field_T": field_T, "mass_kg": PROTON_MASS_KG}
    kbar = collisions.magnetisation(temperature_K=temperature_K, **there)
    back = collisions.temperature_at_magnetisation_K(kbar, **there)
    assert back == pytest.approx(temperature_K, rel=1e-12)


@given(st.floats(0.1, 1e5), st.floats(0.1, 1e5), st.floats(1e10, 1e16))
def test_the_logarithm_stays_positive(light_K: float, heavy_K: float, density: float) -> None:
    logarithm = collisions.coulomb_logarithm(
        light_density_per_m3=density,
        light_K=light_K,
        heavy_K=heavy_K,
        light_mass_kg=ELECTRON_MASS_KG,
        heavy_mass_kg=PROTON_MASS_KG,
    )
    assert logarithm > 0.0
