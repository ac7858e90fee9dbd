"""Small traps for the tests of the fields, and the residue series that shares no code with them."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np
from scipy.special import j0, j1, jn_zeros

from wellseq.fields.field import Field


@dataclass(frozen=True)
class Ring:
    """An electrode: what the fields need of one."""

    name: str
    from_m: float
    to_m: float
    radius_m: float


@dataclass(frozen=True)
class Stand:
    """A trap: what the fields need of one."""

    electrodes: tuple[Ring, ...]


def stand(edges, radius_m=1.0):
    """A trap from spans (from, to) in m."""
    return Stand(tuple(Ring(f"E{i}", *span, radius_m) for i, span in enumerate(edges)))


def pitched(count, pitch_m=0.0134, gap_m=0.001, radius_m=0.015):
    """`count` equal electrodes, E0, E1, …"""
    return stand([(i * pitch_m, (i + 1) * pitch_m - gap_m) for i in range(count)], radius_m)


@cache
def bench(count, pitch_m=0.0134):
    """The field of an evenly pitched stack, solved once per run."""
    return Field(pitched(count, pitch_m))


def volts(count, **named):
    """A vector (count,) from E3=12.0 and the like."""
    result = np.zeros(count)
    for name, value in named.items():
        result[int(name[1:])] = value
    return result


ZEROS = jn_zeros(0, 60)


def unit_step(z, r=0.0):
    """The unit step in a tube of radius 1 by its residues (|z| ≥ 0.6 for 1e-15 with 60 terms).

    Source: J. D. Jackson, Classical Electrodynamics, 3rd ed., sec. 3.7-3.8 (method).
    """
    distance = np.abs(np.asarray(z, dtype=float))
    terms = j0(ZEROS * r) / (ZEROS * j1(ZEROS)) * np.exp(-np.multiply.outer(distance, ZEROS))
    beyond = 1.0 - terms.sum(axis=-1)
    return np.where(np.asarray(z) > 0, beyond, 1.0 - beyond)
