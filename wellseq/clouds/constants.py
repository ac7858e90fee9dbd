"""Constants of nature that the models of clouds share, in SI.

Values: CODATA recommended values of the fundamental physical constants: 2018, Rev. Mod. Phys. 93,
025010 (2021).  They are written out here because importing them from a library is slow;
tests/clouds/test_constants.py compares them with that library.
"""

from __future__ import annotations

import math

from wellseq.model.species import ELECTRON_MASS_KG, ELEMENTARY_CHARGE_C, PROTON_MASS_KG

__all__ = [
    "BOLTZMANN_J_PER_K",
    "COULOMB_VM",
    "ELECTRON_MASS_KG",
    "ELEMENTARY_CHARGE_C",
    "LIGHT_SPEED_M_PER_S",
    "PERMITTIVITY_F_PER_M",
    "PROTON_MASS_KG",
    "THERMAL_EV_PER_K",
]

BOLTZMANN_J_PER_K = 1.380649e-23
"""Exact."""
LIGHT_SPEED_M_PER_S = 299792458.0
"""Exact."""
PERMITTIVITY_F_PER_M = 8.8541878128e-12
"""Vacuum electric permittivity."""
THERMAL_EV_PER_K = BOLTZMANN_J_PER_K / ELEMENTARY_CHARGE_C
"""k/e: the thermal energy kT in eV is this times T in K."""
COULOMB_VM = ELEMENTARY_CHARGE_C / (4.0 * math.pi * PERMITTIVITY_F_PER_M)
"""e/(4 pi eps0), 1.43996e-9 V m: the potential of one charge at one metre."""
