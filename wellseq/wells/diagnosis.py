"""Why a proof ended: the wish is sampled from there to the end of its segment.

Sampling proves nothing good, but it can show something bad: a minimum that is gone, one that has
become two, one that has run into another cloud's.  Where it shows nothing the verdict stays unsure.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from wellseq.fields.field import Field
from wellseq.fields.minima import Landscape, landscape
from wellseq.wells.holding import Lost
from wellseq.wells.wells import Trouble

SAMPLES = 129
SLID_RADII = 0.5
"""A minimum that is this many bore radii further at the next sample has not moved but slid."""


@dataclass(frozen=True, slots=True)
class Diagnosis:
    """What happens to the well; `sure` when sampling shows it."""

    trouble: Trouble
    sure: bool
    words: str


@dataclass(frozen=True, slots=True)
class Neighbour:
    """Another cloud of the same sign, and where its minimum is (m)."""

    cloud: str
    z_m: float


def diagnose(field: Field, sign: int, lost: Lost, neighbours: Iterable[Neighbour]) -> Diagnosis:
    """Follow the minimum by sampling from where the proof ended (voltages in V, places in m)."""
    start, end = lost.part.base, lost.part.segment.end()
    z_m, walls = lost.from_m, None
    others = list(neighbours)
    for share in np.linspace(0.0, 1.0, SAMPLES):
        vector = start + share * (end - start)
        found = landscape(field.curve(sign * vector), lost.ripple_V)
        index = found.basin(z_m)
        if index is None:
            return Diagnosis(Trouble.LOST, True, "opens, and the cloud slides out of the stack")
        reached = float(found.minimum_m[index])
        if walls is not None:
            inside = np.count_nonzero((found.minimum_m > walls[0]) & (found.minimum_m < walls[1]))
            if inside > 1:
                return Diagnosis(Trouble.SPLITS, True, f"divides into {inside}")
        if abs(reached - z_m) > SLID_RADII * field.radius_m:
            return _slid(field, reached, others)
        z_m, walls = reached, _walls(found, index)
    return Diagnosis(Trouble.LOST, False, "could not be proved to hold")


def _walls(found: Landscape, index: int) -> tuple[float, float]:
    return float(found.barrier_m[index]), float(found.barrier_m[index + 1])


def _slid(field: Field, reached_m: float, others: list[Neighbour]) -> Diagnosis:
    for other in others:
        if abs(other.z_m - reached_m) <= SLID_RADII * field.radius_m:
            return Diagnosis(
                Trouble.MERGE, True, f"opens, and the cloud slides into the well of '{other.cloud}'"
            )
    return Diagnosis(
        Trouble.LOST,
        True,
        f"opens, and the cloud slides to z = {reached_m * 1e3:.1f} mm{under(field, reached_m)}",
    )


def under(field: Field, z_m: float) -> str:
    """Which electrode is around a place (m), in words; empty in a gap or beyond the stack."""
    for name in field.electrodes:
        low, high = field.span_m(name)
        if low <= z_m <= high:
            return f", under {name}"
    return ""
