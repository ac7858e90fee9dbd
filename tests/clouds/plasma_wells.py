"""Invented wells of the worked examples: bore radius 18.0 mm, wall steps 1 mm wide, 2 T."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np

from wellseq.clouds.axis import AxisWell, axis_well
from wellseq.clouds.constants import ELECTRON_MASS_KG, PROTON_MASS_KG
from wellseq.clouds.equilibrium import Equilibrium, equilibrium
from wellseq.clouds.layout import Cloud
from wellseq.clouds.wall import Wall, wall_of_steps

RADIUS_M = 18.0e-3
FIELD_T = 2.0


@dataclass(frozen=True)
class Example:
    """One cloud between two end electrodes at `end_V`, a central one at 0 V up to ±`edge_m`."""

    charge_e: int
    mass_kg: float
    number: float
    temperature_K: float
    radius_m: float
    end_V: float
    edge_m: float
    tube_m: float

    @property
    def wall(self) -> Wall:
        return wall_of_steps(
            [-self.edge_m, self.edge_m], [self.end_V, 0.0, self.end_V], RADIUS_M, 1e-3
        )

    def cloud(self, **changes) -> Cloud:
        settled = {
            "charge_e": self.charge_e,
            "mass_kg": self.mass_kg,
            "number": self.number,
            "temperature_K": self.temperature_K,
            "between_m": (-self.tube_m, self.tube_m),
            "radius_m": self.radius_m,
        }
        return Cloud(**(settled | changes))

    def well(self) -> AxisWell:
        z_m = np.linspace(-self.tube_m, self.tube_m, 2001)
        return axis_well(z_m, self.wall.on_axis().exact(z_m), self.charge_e, (z_m[0], z_m[-1]))

    def solved(self, **changes) -> Equilibrium:
        more = {key: changes.pop(key) for key in ("start", "grid") if key in changes}
        return equilibrium(
            wall=self.wall,
            clouds=[self.cloud(**changes)],
            magnetic_field_T=FIELD_T,
            tube_m=(-self.tube_m, self.tube_m),
            **more,
        )


E1 = Example(-1, ELECTRON_MASS_KG, 8e7, 120.0, 1.0e-3, -70.0, 50e-3, 0.18)
E2 = Example(-1, PROTON_MASS_KG, 6e4, 900.0, 0.5e-3, -5.0, 8e-3, 0.10)
E3 = Example(1, ELECTRON_MASS_KG, 3e6, 60.0, 0.9e-3, 8.0, 25e-3, 0.13)
E4 = Example(-1, ELECTRON_MASS_KG, 4e7, 250.0, 0.6e-3, -70.0, 12e-3, 0.10)


@cache
def solved(example: Example) -> Equilibrium:
    """The example's equilibrium, solved once per run."""
    return example.solved()
