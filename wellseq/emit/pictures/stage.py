"""Trap → its stack as drawn to scale, and the potential that each electrode makes on the axis.

Unit potentials (electrodes, places) are per volt, at places about a twelfth of the smallest bore
radius apart.  A stack that the field cannot solve is drawn without a potential, with the reason.
Lengths in m, volts V.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from wellseq.fields.field import Field
from wellseq.model.trap import Trap

Floats = npt.NDArray[np.float64]
PER_RADIUS = 12
PLACES_MOST = 600


@dataclass(frozen=True, slots=True)
class Stage:
    """`z_m` (places,), `unit` (electrodes, places) in V per V; `why` says why there is none."""

    trap: Trap
    low_m: float
    high_m: float
    z_m: Floats
    unit: Floats
    why: str = ""

    @property
    def solved(self) -> bool:
        """Whether there is a potential to draw."""
        return not self.why

    def share(self, z_m: float) -> float:
        """A place (m) as a share of the drawing's width, 0 to 1 inside it."""
        return (z_m - self.low_m) / (self.high_m - self.low_m)

    def potential(self, volts: Sequence[float]) -> Floats:
        """V at the places, for volts of the electrodes in order."""
        return np.asarray(np.asarray(volts, dtype=float) @ self.unit)


def stage(trap: Trap) -> Stage:
    """The stage of a trap; never raises for a stack that cannot be solved."""
    first, last = trap.electrodes[0], trap.electrodes[-1]
    radius_m = min(one.radius_m for one in trap.electrodes)
    low_m, high_m = first.from_m - first.radius_m, last.to_m + last.radius_m
    count = math.ceil((high_m - low_m) / radius_m * PER_RADIUS)
    z_m = np.linspace(low_m, high_m, max(2, min(count, PLACES_MOST)) + 1)
    try:
        field = Field(trap)
    except (ValueError, ArithmeticError) as wrong:
        return Stage(
            trap, low_m, high_m, z_m, np.zeros((len(trap.electrodes), len(z_m))), str(wrong)
        )
    unit = np.stack([field.at(row, z_m) for row in np.eye(len(trap.electrodes))])
    return Stage(trap, low_m, high_m, z_m, unit)
