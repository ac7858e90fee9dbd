"""Masses and charges against the constants that SciPy carries, which are of a later adjustment.

CODATA 2018, Rev. Mod. Phys. 93, 025010 (2021), has relative standard uncertainties of 3.0e-10 for
the masses in kg and 6e-11 or less for those in u; the adjustment of 2022 moved the former by
1.4e-9.
"""

from __future__ import annotations

import math

import pytest
from scipy import constants

from wellseq.model.species import (
    ATOMIC_MASS_KG,
    ELEMENTARY_CHARGE_C,
    SPECIES,
    ion,
    species,
)

MASS_TOLERANCE = 2e-9


@pytest.mark.parametrize(
    ("name", "mass_kg", "charge_sign"),
    [
        ("electron", constants.m_e, -1),
        ("positron", constants.m_e, 1),
        ("proton", constants.m_p, 1),
        ("antiproton", constants.m_p, -1),
    ],
)
def test_particles(name: str, mass_kg: float, charge_sign: int) -> None:
    particle = species(name)
    assert particle.name == name
    assert particle.mass_kg == pytest.approx(mass_kg, rel=MASS_TOLERANCE, abs=0)
    assert particle.charge_C == charge_sign * constants.e
    assert particle.charge_sign == charge_sign
    assert particle.mass_u * constants.u == pytest.approx(mass_kg, rel=MASS_TOLERANCE, abs=0)


def test_masses_in_kg_and_in_u_agree_to_their_uncertainty() -> None:
    for name in SPECIES:
        particle = species(name)
        assert particle.mass_u * ATOMIC_MASS_KG == pytest.approx(particle.mass_kg, rel=4e-10, abs=0)


def test_this_yardstick_sees_a_proton_taken_for_a_hydrogen_atom() -> None:
    atom_kg = species("proton").mass_kg + species("electron").mass_kg
    assert atom_kg != pytest.approx(constants.m_p, rel=MASS_TOLERANCE, abs=0)
    shifted_kg = species("proton").mass_kg * (1 + 5e-9)
    assert shifted_kg != pytest.approx(constants.m_p, rel=MASS_TOLERANCE, abs=0)


def test_proton_to_electron_mass_ratio() -> None:
    # CODATA 2018, Rev. Mod. Phys. 93, 025010 (2021): 1836.15267343(11); value from memory.
    ratio = species("antiproton").mass_kg / species("electron").mass_kg
    assert ratio == pytest.approx(1836.15267343, rel=1e-9)


def test_an_unknown_species_is_refused_with_the_nearest() -> None:
    with pytest.raises(ValueError, match="did you mean 'antiproton'"):
        species("antiprotn")
    with pytest.raises(ValueError, match="antiproton, electron, positron, proton"):
        species("xyz")


def test_an_ion_has_the_mass_and_charge_that_were_given() -> None:
    beryllium = ion(9.0116, 1)
    assert beryllium.mass_kg == pytest.approx(9.0116 * constants.u, rel=MASS_TOLERANCE, abs=0)
    assert (beryllium.charge_C, beryllium.charge_sign) == (ELEMENTARY_CHARGE_C, 1)
    assert beryllium.name == "ion of 9.0116 u and +1 e"
    assert ion(2, -2).charge_C == -2 * ELEMENTARY_CHARGE_C


@pytest.mark.parametrize("mass_u", [0.0, -1.0, math.nan, math.inf, 2e6])
def test_no_ion_of_impossible_mass(mass_u: float) -> None:
    with pytest.raises(ValueError, match="an ion's mass is above 0 u"):
        ion(mass_u, 1)


@pytest.mark.parametrize("charge_e", [0, 201, -201, 0.5, math.nan, math.inf])
def test_no_ion_of_impossible_charge(charge_e: float) -> None:
    with pytest.raises(ValueError, match="an ion's charge is whole"):
        ion(4.0, charge_e)  # type: ignore[arg-type]
