"""What is foretold of a sequence: rows of figures per step and cloud, and what checks will judge.

Units are those of `UNITS`; times in s of the block.  A figure that is not known is NaN, and why is
in `outside` where it arose, in `cites` where it was only needed.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

from wellseq.clouds.figures import Figure, Outside

UNITS = {
    "number": "",
    "temperature": "K",
    "radius": "m",
    "density": "/m3",
    "length": "m",
    "space_charge": "V",
    "depth_left": "V",
    "bounce": "Hz",
    "rotation": "Hz",
    "drift": "Hz",
    "share": "",
    "best_closing": "s",
    "earliest_closing": "s",
    "latest_closing": "s",
    "apparent_temperature": "K",
    "energy_gained": "eV",
}
"""Quantity of a row → its unit; potentials are in V per elementary charge."""


@dataclass(frozen=True, slots=True)
class Row:
    """One cloud at the end of one step.

    `figures` has the quantities of `UNITS`; `models` names what made the row, in order of use;
    `spread` says how the intervals were made: "declared", "corners" or "samples".  `outside` are
    the reasons that arose here, `cites` says in words where a missing figure went missing.
    """

    cloud: str
    block: int
    number: int
    start_s: float
    end_s: float
    figures: Mapping[str, Figure]
    models: tuple[str, ...] = ()
    spread: Literal["declared", "corners", "samples"] = "corners"
    outside: tuple[Outside, ...] = ()
    cites: str = ""

    @property
    def inside(self) -> bool:
        """Whether every model was within its validity."""
        return not self.outside and not self.cites


@dataclass(frozen=True, slots=True)
class Measured:
    """Something that the check named `check` judges: it lies from `low` to `high`, in `unit`.

    NaN is not known.  `limit` is the trap file's or the author's bound where the check itself has
    none.  `words` is the message, `hint` what would help.
    """

    check: str
    cloud: str
    block: int
    number: int
    start_s: float
    end_s: float
    low: float
    high: float
    unit: str
    words: str
    limit: float = float("nan")
    hint: str = ""


@dataclass(frozen=True, slots=True)
class Gap:
    """A figure that went missing here: why, and whether a measured value replaced it at once.

    `told` names the check that reports the cause, where one does.
    """

    quantity: str
    cloud: str
    block: int
    number: int
    start_s: float
    end_s: float
    outside: tuple[Outside, ...]
    told: str = ""
    replaced: bool = False


@dataclass(frozen=True, slots=True)
class Asked:
    """A figure of a cloud at a claim of the author, and why it is missing, in words."""

    cloud: str
    quantity: str
    number: int
    figure: Figure
    cites: str = ""


@dataclass(frozen=True, slots=True)
class Forecast:
    """Everything foretold, in the order of play; `asked` are the figures that claims speak of."""

    rows: tuple[Row, ...] = ()
    measured: tuple[Measured, ...] = ()
    gaps: tuple[Gap, ...] = ()
    asked: tuple[Asked, ...] = ()

    def at_place(self, cloud: str, quantity: str, number: int) -> Asked | None:
        """What a claim, step `number`, speaks of; None when there is no such cloud then."""
        for one in self.asked:
            if (one.cloud, one.quantity, one.number) == (cloud, quantity, number):
                return one
        return None


def in_words(reason: Outside) -> str:
    """A reason in words: the model, the quantity that left its range, and the limit."""
    unit = f" {reason.unit}" if reason.unit else ""
    value = f"{reason.value:.4g}{unit}" if reason.value == reason.value else "not known"
    return (
        f"{reason.model}: {reason.quantity} is {value}, and must be {reason.side} "
        f"{reason.limit:.4g}{unit}"
    )
