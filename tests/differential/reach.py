"""What statements may touch: the outputs and lines of the trap `lagoon`, and parts of them."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

GROUPS: dict[str, tuple[str, ...]] = {
    "far": ("G1",),
    "a1": ("C1",),
    "a2": ("C2",),
    "twin": ("C3", "C4"),
    "fine": ("R5",),
    "drawn": ("C6",),
    "pair": ("C7", "C8"),
    "near": ("C9", "G2"),
}
"""What must move together → the electrodes that may be named for it."""
STEEP = ("twin", "drawn", "near")
"""Groups on cards that draw lines: their straight ramps may be fast."""
SPANS = {
    "C1..C9": ("a1", "a2", "twin", "fine", "drawn", "pair", "near"),
    "C1..C4": ("a1", "a2", "twin"),
    "C6..C8": ("drawn", "pair"),
    "C2, C1": ("a1", "a2"),
}
"""Targets that take several groups at once."""
STATES = {"shutter": ("shut", "open"), "lamp": ("off", "on", "dim")}
MS = Fraction(1, 1000)


@dataclass
class Reach:
    """What the statements of one body may touch, and the names that it sees besides."""

    groups: tuple[str, ...] = tuple(GROUPS)
    lines: tuple[str, ...] = tuple(STATES)
    clouds: tuple[str, ...] = ()
    volts: tuple[str, ...] = ()
    times: tuple[str, ...] = ()
    rings: tuple[str, ...] = ()
    in_lane: bool = False
    in_procedure: bool = False
    depth: int = 0

    def narrowed(self, **changes: object) -> Reach:
        """The same with some changes, one level deeper."""
        return Reach(**{**self.__dict__, "depth": self.depth + 1, **changes})


@dataclass
class Called:
    """A procedure: what its parameters take, and what it touches."""

    name: str
    takes: tuple[str, ...]
    reach: Reach
    steps: int
