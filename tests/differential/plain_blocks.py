"""What a plain interpreter finds out: blocks of moves, throws, line settings and drives.

Times are Fractions of seconds from the block's first row; volts are Fractions, and floats only on
a half-cosine.  Asking is slow and simple: each answer looks at everything from the start.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from fractions import Fraction


@dataclass
class Move:
    """A converter goes from one voltage to another between two instants."""

    start: Fraction
    end: Fraction
    before: Fraction
    after: Fraction
    smooth: bool

    def at(self, time: Fraction) -> float | Fraction:
        """Volts at an instant between start and end."""
        share = (time - self.start) / (self.end - self.start)
        if self.smooth:
            share = (1 - math.cos(math.pi * float(share))) / 2
            return float(self.before) + float(self.after - self.before) * share
        return self.before + (self.after - self.before) * share


@dataclass
class Throw:
    """A switch goes from one level to another between start and end, commanded before."""

    command: Fraction
    start: Fraction
    end: Fraction
    before: int
    after: int


@dataclass
class Turn:
    """A rotating drive."""

    ring: str
    start: Fraction
    stop: Fraction
    from_Hz: Fraction
    to_Hz: Fraction
    amplitude_V: Fraction
    order: int
    sense: int


@dataclass
class Block:
    """A stretch with its own time zero and what stood before it."""

    trigger: str
    within: Fraction
    latency: Fraction
    volts: dict[str, Fraction]
    levels: dict[str, int]
    states: dict[str, str]
    moves: dict[str, list[Move]] = field(default_factory=dict)
    throws: dict[str, list[Throw]] = field(default_factory=dict)
    settings: list[tuple[Fraction, str, str, bool]] = field(default_factory=list)
    turns: list[Turn] = field(default_factory=list)
    steps: list[tuple[Fraction, Fraction]] = field(default_factory=list)
    duration: Fraction = Fraction(0)

    def converter_V(self, output: str, time: Fraction) -> float | Fraction:
        """What a converter shall have at an instant."""
        volts = self.volts[output]
        for move in self.moves.get(output, ()):
            if time < move.start:
                break
            if time < move.end:
                return move.at(time)
            volts = move.after
        return volts

    def levels_at(self, switch: str, time: Fraction) -> set[int]:
        """The level that a switch has, or the two between which it is."""
        level = self.levels[switch]
        for throw in self.throws.get(switch, ()):
            if time < throw.start:
                break
            if time < throw.end:
                return {throw.before, throw.after}
            level = throw.after
        return {level}

    def state_at(self, line: str, time: Fraction) -> str:
        """The state of a line from an instant on."""
        state = self.states[line]
        for when, name, word, _ in sorted(self.settings, key=lambda item: item[0]):
            if name == line and when <= time:
                state = word
        return state
