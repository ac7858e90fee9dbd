"""The pen: all that a step may ask of the timeline while it is drawn.

`model/` owns this protocol, `timeline/` supplies it.  Times are exact seconds, potentials volts at
the electrode.  Electrodes that share an output must be asked the same voltage.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from fractions import Fraction
from typing import Protocol

from wellseq.model.effects import Effect
from wellseq.model.trap import Trap


class Pen(Protocol):
    """Draws on the outputs from the present instant on and moves that instant along."""

    @property
    def trap(self) -> Trap:
        """The trap that is drawn for."""

    def begin(self, targets: Mapping[str, float], others_V: float | None) -> None:
        """Declare that the electrodes stand at these volts before time zero of the first block."""

    def hold(self, duration_s: Fraction) -> None:
        """Let time pass."""

    def ramp(
        self,
        targets: Mapping[str, float],
        duration_s: Fraction,
        *,
        others_V: float | None = None,
        smoothly: bool = False,
    ) -> None:
        """Move electrodes on converter outputs from where they are to `targets`, one progress."""

    def throw(self, electrodes: Sequence[str], level: float | str) -> None:
        """Throw the switches of these electrodes to a level (volts, or a converter output)."""

    def pulse(self, electrodes: Sequence[str], volts: float, duration_s: Fraction) -> None:
        """Take electrodes to `volts` for `duration_s` and back, as fast as their outputs can."""

    def close_gate(self, near: str, far: str, level: float, closing_s: Fraction) -> None:
        """Throw `near` so that half of its edge is over `closing_s` after the block's trigger."""

    def lower_depth(
        self,
        cloud: str,
        electrodes: Sequence[str],
        to_V: float,
        duration_s: Fraction,
        *,
        exponentially: bool,
    ) -> None:
        """Move electrodes so that the cloud's own vacuum depth over their side falls to `to_V`."""

    def drive(
        self,
        ring: str,
        from_Hz: float,
        to_Hz: float,
        amplitude_V: float,
        duration_s: Fraction,
        *,
        order: int,
        sense: int,
    ) -> None:
        """Drive a ring's sectors, Hz and V: order 1 or 2, sense +1 counter-clockwise from +z."""

    def set_line(self, line: str, state: str) -> None:
        """Put a digital output line into a state now."""

    def expect_line(self, line: str, state: str) -> None:
        """Declare that a line is in a state now."""

    def await_trigger(self, trigger: str, within_s: Fraction | None) -> None:
        """End the block; the next one begins at the trigger."""

    def note(self, effect: Effect) -> None:
        """Date an effect: it belongs to the step being drawn."""

    def refuse(self, name: str, message: str, hint: str = "") -> None:
        """Record a mistake of the step being drawn under the name of the bad thing."""

    def sense_of(self, cloud: str) -> int:
        """+1 or -1: the sense, seen from +z, in which this cloud's charge rotates in the field."""
