"""The timeline: what every output does, as pieces in exact block time.

Nothing is sampled.  An output holds its last voltage between its pieces.  Times are exact seconds
from the block's zero; volts are wished electrode volts of the converter behind the electrode.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import StrEnum
from fractions import Fraction

from wellseq.base.finding import Mistake, Origin
from wellseq.model.effects import Effect
from wellseq.model.sequence import CloudDeclared
from wellseq.model.trap import Trap


class Shape(StrEnum):
    """How a piece goes from its first voltage to its last.

    `STRAIGHT` in time, `SMOOTH` by a half-cosine, `EDGE` as fast as the output can: one new code,
    after which the electrode gets there in any monotone shape before the piece ends.
    """

    STRAIGHT = "straight"
    SMOOTH = "smooth"
    EDGE = "edge"


def progress(shape: Shape, share: float) -> float:
    """Progress 0…1 of a piece when `share` 0…1 of its time is over (half-cosine when smooth).

    For an edge this is the straight shape, one of the shapes it may have.
    """
    return 0.5 * (1.0 - math.cos(math.pi * share)) if shape is Shape.SMOOTH else share


@dataclass(frozen=True, slots=True)
class Piece:
    """A converter output moves from `from_V` to `to_V` between two instants (s)."""

    output: str
    start_s: Fraction
    end_s: Fraction
    from_V: float
    to_V: float
    shape: Shape
    number: int

    @property
    def slope_max_V_per_s(self) -> float:
        """Greatest slope of the wish, V/s, without sign."""
        slope = abs(self.to_V - self.from_V) / float(self.end_s - self.start_s)
        return slope * math.pi / 2 if self.shape is Shape.SMOOTH else slope

    def at(self, time_s: Fraction) -> float:
        """Wished volts at an instant within the piece."""
        share = float((time_s - self.start_s) / (self.end_s - self.start_s))
        return self.from_V + (self.to_V - self.from_V) * progress(self.shape, share)


@dataclass(frozen=True, slots=True)
class Edge:
    """A switch goes from one of its levels to another.

    The edge is commanded at `command_s`; at the electrode all of it lies between `start_s` and
    `end_s`, in any monotone shape.  Levels are indices into the switch's `levels`.
    """

    output: str
    command_s: Fraction
    start_s: Fraction
    end_s: Fraction
    from_level: int
    to_level: int
    number: int


@dataclass(frozen=True, slots=True)
class LineChange:
    """A digital line is put into a state (`expected` False) or declared to be in it (True)."""

    line: str
    time_s: Fraction
    state: str
    expected: bool
    number: int


@dataclass(frozen=True, slots=True)
class Drive:
    """A rotating drive on a sectored ring, straight in frequency from start to stop.

    `phases_deg` is the phase of each sector at the start, in degrees, sector 1 first, counted
    counter-clockwise seen from +z; amplitude is zero-to-peak volts.
    """

    ring: str
    start_s: Fraction
    stop_s: Fraction
    from_Hz: float
    to_Hz: float
    amplitude_V: float
    order: int
    phases_deg: tuple[float, ...]
    number: int


@dataclass(frozen=True, slots=True)
class Event:
    """A dated effect: the step that has it lasts from `start_s` to `end_s` of the block."""

    start_s: Fraction
    end_s: Fraction
    effect: Effect
    number: int


@dataclass(frozen=True, slots=True)
class StepSpan:
    """When a played step begins and ends, in block time (s)."""

    number: int
    start_s: Fraction
    end_s: Fraction


@dataclass(frozen=True, slots=True)
class Block:
    """A stretch with its own time zero: the start of the run, or a trigger.

    `first_row_s` is the trigger's latency: the block's time zero is its first row, which comes that
    long after the trigger.  `volts` (converters), `levels` (switches) and `states` (lines) are what
    stands before the first row.  Pieces, edges, changes and drives are sorted by time.
    """

    name: str
    index: int
    trigger: str
    within_s: Fraction
    first_row_s: Fraction
    jitter_s: Fraction
    volts: Mapping[str, float]
    levels: Mapping[str, int]
    states: Mapping[str, str]
    pieces: tuple[Piece, ...]
    edges: tuple[Edge, ...]
    changes: tuple[LineChange, ...]
    drives: tuple[Drive, ...]
    events: tuple[Event, ...]
    spans: tuple[StepSpan, ...]
    duration_s: Fraction


@dataclass(frozen=True, slots=True)
class Timeline:
    """All blocks of a sequence; `origins[number]` is the step behind a number.

    `clouds` are the declared clouds that events speak of.
    """

    trap: Trap
    blocks: tuple[Block, ...]
    origins: tuple[Origin, ...]
    mistakes: tuple[Mistake, ...]
    clouds: Mapping[str, CloudDeclared] = field(default_factory=dict)

    @property
    def duration_s(self) -> Fraction:
        """Time played, in s, without the waits for triggers."""
        return sum((block.duration_s for block in self.blocks), Fraction(0))
