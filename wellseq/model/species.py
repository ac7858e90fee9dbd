"""Particle species: mass and charge.

Masses: CODATA recommended values of the fundamental physical constants: 2018, Rev. Mod. Phys. 93,
025010 (2021); the elementary charge is exact.  An antiparticle has the mass of its particle.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from wellseq.base.names import nearest

ELEMENTARY_CHARGE_C = 1.602176634e-19
ATOMIC_MASS_KG = 1.66053906660e-27
ELECTRON_MASS_KG = 9.1093837015e-31
ELECTRON_MASS_U = 5.48579909065e-4
PROTON_MASS_KG = 1.67262192369e-27
PROTON_MASS_U = 1.007276466621
ION_MASS_U_MAX = 1e6
ION_CHARGE_E_MAX = 200


@dataclass(frozen=True, slots=True)
class Species:
    """One kind of particle: mass in kg and in u, charge in C with its sign (+1 or -1)."""

    name: str
    mass_kg: float
    mass_u: float
    charge_C: float

    @property
    def charge_sign(self) -> int:
        """+1 or -1."""
        return 1 if self.charge_C > 0 else -1


_ALL = (
    Species("electron", ELECTRON_MASS_KG, ELECTRON_MASS_U, -ELEMENTARY_CHARGE_C),
    Species("positron", ELECTRON_MASS_KG, ELECTRON_MASS_U, ELEMENTARY_CHARGE_C),
    Species("proton", PROTON_MASS_KG, PROTON_MASS_U, ELEMENTARY_CHARGE_C),
    Species("antiproton", PROTON_MASS_KG, PROTON_MASS_U, -ELEMENTARY_CHARGE_C),
)
SPECIES = tuple(item.name for item in _ALL)
"""The species that have a name of their own; others are made by `ion`."""
_BY_NAME = {item.name: item for item in _ALL}


def species(name: str) -> Species:
    """The species of that name.  Raises ValueError with the nearest known name."""
    found = _BY_NAME.get(name)
    if found is None:
        raise ValueError(f"no species '{name}': {nearest(name, SPECIES, 'species')}")
    return found


def ion(mass_u: float, charge_e: int) -> Species:
    """An ion of `mass_u` atomic mass units (its own mass, electrons taken off) and whole charge.

    Raises ValueError for a mass that is not positive and at most ION_MASS_U_MAX, or a charge that
    is zero, not whole or beyond ION_CHARGE_E_MAX.
    """
    if not (math.isfinite(mass_u) and 0 < mass_u <= ION_MASS_U_MAX):
        raise ValueError(f"an ion's mass is above 0 u and at most {ION_MASS_U_MAX:g} u")
    if not 0 < abs(charge_e) <= ION_CHARGE_E_MAX or charge_e != int(charge_e):
        raise ValueError(f"an ion's charge is whole, not 0 e, at most {ION_CHARGE_E_MAX} e")
    name = f"ion of {mass_u:g} u and {int(charge_e):+d} e"
    return Species(name, mass_u * ATOMIC_MASS_KG, mass_u, charge_e * ELEMENTARY_CHARGE_C)
