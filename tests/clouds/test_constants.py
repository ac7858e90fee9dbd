"""The constants of nature against the library's table."""

from __future__ import annotations

import math

import pytest
from scipy import constants as library

from wellseq.clouds import constants

# The library may carry a later set of recommended values: masses and permittivity then differ by
# up to 1.5e-9 of themselves.
PAIRS = {
    "BOLTZMANN_J_PER_K": library.k,
    "COULOMB_VM": library.e / (4 * math.pi * library.epsilon_0),
    "ELECTRON_MASS_KG": library.m_e,
    "ELEMENTARY_CHARGE_C": library.e,
    "LIGHT_SPEED_M_PER_S": library.c,
    "PERMITTIVITY_F_PER_M": library.epsilon_0,
    "PROTON_MASS_KG": library.m_p,
    "THERMAL_EV_PER_K": library.k / library.e,
}


def far_from_the_library(**changed: float) -> set[str]:
    """Names of constants that differ from the library's by more than 2e-9 of themselves."""
    mine = {name: getattr(constants, name) for name in PAIRS} | changed
    return {name for name, value in PAIRS.items() if abs(mine[name] / value - 1) > 2e-9}


def test_every_number_of_the_file_is_compared() -> None:
    floats = {name for name in vars(constants) if isinstance(getattr(constants, name), float)}
    assert floats == set(PAIRS) == set(constants.__all__)


def test_constants_are_the_library_s() -> None:
    assert far_from_the_library() == set()


def test_a_slip_in_the_eighth_digit_is_seen() -> None:
    assert far_from_the_library(BOLTZMANN_J_PER_K=1.3806491e-23) == {"BOLTZMANN_J_PER_K"}


def test_space_charge_scale_as_printed() -> None:
    # Space-charge scale e/(4 pi eps0) = 1.43996e-9 V m (derived).
    assert pytest.approx(1.43996e-9, rel=1e-5) == constants.COULOMB_VM
