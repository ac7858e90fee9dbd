"""What is known about wells: stretches of time with a proof, and what could not be proved.

All depths are own vacuum depths on the axis in volts per unit charge, everything that can make the
electrode's voltage differ from the wish already taken off (`Losses`).
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from fractions import Fraction


@dataclass(frozen=True, slots=True)
class Losses:
    """What is taken off a depth, in V, by cause; each is already weighted by the field."""

    calibration_V: float = 0.0
    noise_V: float = 0.0
    half_code_V: float = 0.0
    stray_V: float = 0.0
    lag_V: float = 0.0
    shape_V: float = 0.0
    patch_V: float = 0.0
    ripple_V: float = 0.0
    basis_V: float = 0.0

    @property
    def total_V(self) -> float:
        """Sum of all causes, V."""
        return (
            self.calibration_V
            + self.noise_V
            + self.half_code_V
            + self.stray_V
            + self.lag_V
            + self.shape_V
            + self.patch_V
            + self.ripple_V
            + self.basis_V
        )


@dataclass(frozen=True, slots=True)
class SideDepth:
    """The least own depth on one side during a stretch.

    `certified_V` is a lower bound with `losses` taken off; `best_V` the least depth that was
    evaluated before anything was taken off, so the true wished depth lies between
    certified_V + losses.total_V and best_V.  `at_s` is when (block time), `barrier_m` and `well_m`
    where.  `region_m` is the proved own side.
    """

    certified_V: float
    best_V: float
    losses: Losses
    at_s: float
    barrier_m: float
    well_m: float
    region_m: tuple[float, float]


@dataclass(frozen=True, slots=True)
class Held:
    """A stretch of block time in which one region is proved to hold the cloud's minimum.

    `floor_V` is the depth demanded then on each side (left, right); `trap_V` the certified depth
    out to the ends of the stack.  `energetic` marks a bunch that has no temperature yet: its depths
    count from ground and the floor is its highest kept energy per charge.
    """

    cloud: str
    charge_sign: int
    block: int
    start_s: Fraction
    end_s: Fraction
    number: int
    well_m: tuple[float, float]
    from_m: float
    to_m: float
    left: SideDepth
    right: SideDepth
    trap_V: float
    floor_V: tuple[float, float]
    energetic: bool = False

    @property
    def certified_V(self) -> float:
        """The lesser of the two sides' certified depths, V."""
        return min(self.left.certified_V, self.right.certified_V)


class Trouble(StrEnum):
    """Why a cloud could not be followed any further; the values name the finding."""

    NOT_PLACED = "cloud-not-placed"
    LOST = "well-lost"
    SPLITS = "well-splits"
    MERGE = "clouds-merge"
    NO_WAY_OUT = "no-way-out"


@dataclass(frozen=True, slots=True)
class Unproved:
    """The end of a proof: what went wrong, when (block time, s) and where (m)."""

    trouble: Trouble
    cloud: str
    block: int
    number: int
    start_s: float
    end_s: float
    at_m: float
    message: str
    hint: str = ""
    sure: bool = True
    """True when the bad thing was shown to happen, False when only the proof failed (unsure)."""


@dataclass(frozen=True, slots=True)
class Separation:
    """The least distance between the proved wells of two clouds during a stretch, m.

    `other_species`: the two are of different species.
    """

    clouds: tuple[str, str]
    block: int
    start_s: float
    end_s: float
    number: int
    least_m: float
    other_species: bool


@dataclass(frozen=True, slots=True)
class WayOut:
    """How much an outgoing particle must still climb beyond the barrier, V (0: falls all along)."""

    cloud: str
    block: int
    number: int
    at_s: float
    climb_V: float
    uncertainty_V: float


@dataclass(frozen=True, slots=True)
class Wells:
    """Everything known about all clouds, in order of time."""

    held: tuple[Held, ...]
    unproved: tuple[Unproved, ...]
    separations: tuple[Separation, ...]
    ways_out: tuple[WayOut, ...]
    basis_error_V_per_V: float
