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
    """From the end of the step on, the cloud is held between two gates.

    Half of the near gate's edge is over `closing_s` (s) after the trigger; `at_V` is what it goes
    to.
    """

    cloud: str
    near: str
    far: str
    at_V: float = 0.0
    closing_s: float = 0.0


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
    """During the step the own vacuum depth of the cloud's well falls to `to_V`, volts.

    Straight in time, or by equal ratios when `exponentially`.
    """

    cloud: str
    through: tuple[str, ...]
    to_V: float
    exponentially: bool = False


@dataclass(frozen=True, slots=True)
class Cooled:
    """During the step the cloud loses heat: by radiation, or to `coolant` where one is named.

    `until_K` is the temperature claimed for its end, K; None where nothing is claimed.
    """

    cloud: str
    coolant: str = ""
    until_K: float | None = None


@dataclass(frozen=True, slots=True)
class Rotated:
    """During the step a drive turns a cloud and whatever shares its well.

    Frequencies in Hz, amplitude in V zero to peak, `order` 1 dipole or 2 quadrupole; `backwards`:
    against the sense in which the cloud rotates.
    """

    cloud: str
    ring: str
    from_Hz: float
    to_Hz: float
    amplitude_V: float
    order: int = 1
    backwards: bool = False


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

    Bounds are in base units (V, m, s, K, 1/m3), None where open.  `other` is the second cloud of a
    separation, `label` the step label of a time.
    """

    quantity: Quantity
    cloud: str
    lowest: float | None
    highest: float | None
    other: str = ""
    label: str = ""
    throughout: bool = False


Effect = (
    Placed
    | Caught
    | Released
    | Kicked
    | Evaporated
    | Cooled
    | Rotated
    | Nested
    | Acted
    | Assumed
    | Claimed
)
