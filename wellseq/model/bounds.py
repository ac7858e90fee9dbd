"""Bounds of a written value: exact limits in base units, and the same limits in words.

The limits of this file's users are sanity limits: they refuse a slip of the pen (a radius of 15 m),
not a bad design.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

from wellseq.base.quantity import read_quantity


@dataclass(frozen=True, slots=True)
class Bounds:
    """What a value may be, in base units; `unit` is the one the limits are spoken in."""

    unit: str = ""
    least: Fraction | None = None
    above: Fraction | None = None
    most: Fraction | None = None
    nonzero: bool = False

    def admit(self, value: Fraction) -> bool:
        """Whether a value lies within."""
        return not (
            (self.least is not None and value < self.least)
            or (self.above is not None and value <= self.above)
            or (self.most is not None and value > self.most)
            or (self.nonzero and value == 0)
        )

    def __str__(self) -> str:
        """The bounds in words, for a hint."""
        parts = []
        if self.least is not None:
            parts.append(f"at least {self._say(self.least)}")
        if self.above is not None:
            parts.append(f"above {self._say(self.above)}")
        if self.most is not None:
            parts.append(f"at most {self._say(self.most)}")
        if self.nonzero:
            parts.append("not zero")
        return ", ".join(parts)

    def _say(self, value: Fraction) -> str:
        factor = read_quantity(f"1 {self.unit}", self.unit)
        return f"{float(value / factor):g} {self.unit}".rstrip()


def bounds(
    unit: str = "",
    *,
    least: str | None = None,
    above: str | None = None,
    most: str | None = None,
    nonzero: bool = False,
) -> Bounds:
    """Bounds whose limits are numbers of `unit` written as decimal texts."""

    def limit(text: str | None) -> Fraction | None:
        return None if text is None else read_quantity(f"{text} {unit}", unit)

    return Bounds(unit, limit(least), limit(above), limit(most), nonzero)
