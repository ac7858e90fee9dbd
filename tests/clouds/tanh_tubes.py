"""Round electrodes whose potential on the axis is the handbook's tanh form, for worked examples.

phi = V (S(z - z1) - S(z - z2)), S(x) = (1 + tanh(1.318 x/Rw))/2, Rw = 18.0 mm; an invented trap.
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise

import numpy as np

from wellseq.clouds.constants import (
    ELECTRON_MASS_KG,
    ELEMENTARY_CHARGE_C,
    PROTON_MASS_KG,
)
from wellseq.clouds.forces import ForceTable, tabulated
from wellseq.clouds.waveforms import Waveforms
from wellseq.fields.hermite import FloatArray

RADIUS_M = 0.018
MASS_KG = PROTON_MASS_KG
LIGHT_KG = ELECTRON_MASS_KG
EV = ELEMENTARY_CHARGE_C


def step(z_m: FloatArray) -> FloatArray:
    """S, from 0 to 1."""
    return (1.0 + np.tanh(1.318 * z_m / RADIUS_M)) / 2.0


def tubes(
    spans_m: Sequence[tuple[float, float]], between_m: tuple[float, float], step_m: float = 2e-4
) -> ForceTable:
    """A table of tubes that stand from one place to another."""

    def unit(z_m: FloatArray) -> FloatArray:
        return np.stack([step(z_m - low) - step(z_m - high) for low, high in spans_m])

    names = [f"E{number}" for number in range(len(spans_m))]
    return tabulated(names, unit, between_m, step_m)


def lined_up(edges_m: Sequence[float], between_m: tuple[float, float]) -> ForceTable:
    """Tubes from edge to edge."""
    return tubes(list(pairwise(edges_m)), between_m)


def ramp(start_s: float, end_s: float, from_V: Sequence[float], to_V: Sequence[float]) -> Waveforms:
    """All electrodes go straight from one set of volts to another."""
    return Waveforms(np.array([start_s, end_s]), np.array([from_V, to_V], dtype=float))


def pulse(
    edge_s: float, open_s: float, shut_V: Sequence[float], open_V: Sequence[float]
) -> Waveforms:
    """Straight edges there and back, `open_s` between them."""
    times = np.cumsum([0.0, edge_s, open_s, edge_s])
    return Waveforms(times, np.array([shut_V, open_V, open_V, shut_V], dtype=float))
