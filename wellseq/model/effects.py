"""What steps do to clouds, as small frozen records that higher floors act on.

A step file never reaches up: it hands these to the pen, which dates them.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

Quantity = Literal["depth", "separation", "time", "temperature", "number", "radius", "density"]


@dataclass(frozen=True, slots=True)
class Placed:
    """From the end of the step on, the cloud sits in the well at this electrode (begin, load)."""

    cloud: str
    electrode: str


@dataclass(frozen=True, slots=True)
class Caught:
    """From the end of the step on, the cloud is held between two gates."""

    cloud: str
    near: str
    far: str


@dataclass(frozen=True, slots=True)
class Released:
    """The cloud, and all that share its well, is let go from the start of the step on."""

    cloud: str
    through: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Kicked:
    """During the step the well is opened on purpose; the light cloud is gone after it."""

    light: str
    keeping: str
    through: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Evaporated:
    """During the step the own vacuum depth of the cloud's well falls to `to_V`, volts."""

    cloud: str
    through: tuple[str, ...]
    to_V: float


@dataclass(frozen=True, slots=True)
class Nested:
    """A cloud is brought around or beside one of the opposite sign; their wells must not meet."""

    cloud: str
    host: str


@dataclass(frozen=True, slots=True)
class Acted:
    """The step names this cloud (cool, rotate): it must be in the trap when the step begins."""

    cloud: str


@dataclass(frozen=True, slots=True)
class Assumed:
    """A measured value stands for the cloud from here on: base units, half-width included."""

    quantity: Quantity
    cloud: str
    value: float
    half_width: float
    unit: str
    reason: str


@dataclass(frozen=True, slots=True)
class Claimed:
    """The author's own claim, to be judged at this place.

    Bounds are in base units (V, m, s), None where open.  `other` is the second cloud of a
    separation, `label` the step label of a time.
    """

    quantity: Quantity
    cloud: str
    lowest: float | None
    highest: float | None
    other: str = ""
    label: str = ""
    throughout: bool = False


Effect = Placed | Caught | Released | Kicked | Evaporated | Nested | Acted | Assumed | Claimed
