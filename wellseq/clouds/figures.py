"""What a model says: a figure with its interval, or no figure and the reason why.

Outside a model's validity there is no figure: the value is NaN and `Outside` names the model, the
quantity that left its range, and the limit.  Never the last valid value, a clipped one, or a wide
interval instead.
"""

from __future__ import annotations

import math
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Figure:
    """A forecast quantity in SI units (energies in eV): best value and the interval around it."""

    value: float
    low: float
    high: float

    @property
    def known(self) -> bool:
        """Whether there is a figure at all."""
        return math.isfinite(self.value) and math.isfinite(self.low) and math.isfinite(self.high)


def exactly(value: float) -> Figure:
    """A figure without spread."""
    return Figure(value, value, value)


def around(value: float, half_width: float) -> Figure:
    """A figure with a symmetric interval; same unit."""
    return Figure(value, value - half_width, value + half_width)


NOT_KNOWN = Figure(math.nan, math.nan, math.nan)
"""No figure."""


@dataclass(frozen=True, slots=True)
class Outside:
    """A model left its validity: `quantity` was `value`, and may be on one side of `limit` only."""

    model: str
    quantity: str
    value: float
    limit: float
    unit: str = ""
    side: str = "at most"
