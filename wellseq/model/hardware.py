"""The hardware that a sequence names: electrodes, outputs (converters, switches), lines, triggers.

Each model is frozen, in base units (V, s, m, F), and can be built from numbers or, through its
aliases, from the texts of a trap file.  Times that decide where edges fall are exact fractions.
"""

from __future__ import annotations

from fractions import Fraction
from functools import cached_property
from typing import Annotated, Any, Literal

from pydantic import BaseModel, ConfigDict, Field, model_validator

from wellseq.model.bounds import bounds
from wellseq.model.written import (
    VOLTS,
    choice,
    exact,
    flag,
    level,
    listing,
    mention,
    name,
    real,
    sound,
    spread,
    state,
    whole,
)

PICOSECOND = Fraction(1, 10**12)
GAIN = bounds(least="1e-6", most="1e6")
SECTORS = (1, 4, 6, 8)
"""One piece, or a ring whose dipole drive turns one way only (at least four, an even number)."""
ROLES = ("detector", "door", "shutter", "vacuum")
"""What a digital line can be to the interlock rules that come with the house."""

Name = Annotated[str, name()]
Mention = Annotated[str, mention()]
Flag = Annotated[bool, flag()]
Metres = Annotated[float, real("m", bounds("m", least="-1000", most="1000"))]
Volts = Annotated[float, real("V", VOLTS)]
VoltsUp = Annotated[float, real("V", bounds("V", least="0", most="1e6"))]
Farads = Annotated[float, real("pF", bounds("nF", least="0", most="1e9"))]
Seconds = Annotated[Fraction, exact("s", bounds("s", least="0", most="1e6"))]
Wait = Annotated[Fraction, exact("s", bounds("s", above="0", most="1e6"))]
Edge = Annotated[Fraction, exact("s", bounds("s", above="0", most="1000"))]
Clock = Annotated[
    Fraction,
    exact("s", bounds("s", above="0", most="1000")),
    sound(
        # Every time of a table is a whole number of ticks of all its clocks; this bounds the tick.
        lambda clock_s: (clock_s / PICOSECOND).denominator == 1,
        "this clock is finer than the times that a table can hold",
        "a whole number of picoseconds, as in '12.5 ns'",
    ),
]


class Part(BaseModel):
    """What all pieces of a trap share: immutable, closed to unknown keys."""

    model_config = ConfigDict(frozen=True, extra="forbid", populate_by_name=True)


class Stretch(Part):
    """A piece of the axis from `from_m` to `to_m`."""

    from_m: Metres = Field(alias="from")
    to_m: Metres = Field(alias="to")

    @property
    def length_m(self) -> float:
        """From one end to the other along the axis, m."""
        return self.to_m - self.from_m

    @property
    def middle_m(self) -> float:
        """Half way between its ends, m."""
        return (self.from_m + self.to_m) / 2


class Electrode(Stretch):
    """A ring of the stack, inner radius `radius_m`.

    `output` drives the whole ring; the drive of a ring with several `sectors` adds to it.
    """

    name: Name
    radius_m: Annotated[float, real("m", bounds("mm", above="0", most="10000"))] = Field(
        alias="radius"
    )
    sectors: Annotated[
        int,
        whole(bounds()),
        sound(lambda count: count in SECTORS, "a ring has 1, 4, 6 or 8 sectors"),
    ] = 1
    output: Mention


class Converter(Part):
    """An output that follows the table: codes 0 … 2**bits − 1 spread evenly over its range.

    Nominal volts are what the code asks for; electrode volts = gain · nominal + offset.  The range
    is in nominal volts, slew and noise (rms) are at the electrode.  `hold` keeps a value from row
    to row, `line` draws a straight line.  `capacitance_F` is None when it is not stated.
    """

    kind: Annotated[Literal["converter"], choice("converter")] = "converter"
    name: Name
    range_V: Annotated[
        tuple[Volts, Volts],
        listing(2, 2, '["-140 V", "140 V"]'),
        sound(lambda ends: ends[0] < ends[1], "the low end comes first, the high end above it"),
    ] = Field(alias="range")
    slew_V_per_s: Annotated[float, real("V/s", bounds("V/us", above="0", most="1e9"))] = Field(
        alias="slew"
    )
    bits: Annotated[int, whole(bounds(least="1", most="32"))]
    clock_s: Clock = Field(alias="clock")
    between_rows: Annotated[Literal["hold", "line"], choice("hold", "line")] = "hold"
    time_constant_s: Annotated[Fraction, exact("s", bounds("s", least="0", most="1000"))] = Field(
        Fraction(0), alias="time_constant"
    )
    gain_with_spread: Annotated[tuple[float, float], spread("", GAIN)] = Field(
        (1.0, 0.0), alias="gain"
    )
    offset_with_spread_V: Annotated[tuple[float, float], spread("V", VOLTS)] = Field(
        (0.0, 0.0), alias="offset"
    )
    delay_s: Seconds = Field(Fraction(0), alias="delay")
    noise_V: VoltsUp = Field(0.0, alias="noise")
    capacitance_F: Farads | None = Field(None, alias="capacitance")
    hazardous: Flag = False

    @property
    def low_V(self) -> float:
        """Lowest nominal volts."""
        return self.range_V[0]

    @property
    def high_V(self) -> float:
        """Highest nominal volts."""
        return self.range_V[1]

    @property
    def gain(self) -> float:
        """Electrode volts per nominal volt; positive."""
        return self.gain_with_spread[0]

    @property
    def gain_spread(self) -> float:
        """Half-width of the gain's interval."""
        return self.gain_with_spread[1]

    @property
    def offset_V(self) -> float:
        """Electrode volts at nominal zero."""
        return self.offset_with_spread_V[0]

    @property
    def offset_spread_V(self) -> float:
        """Half-width of the offset's interval, V."""
        return self.offset_with_spread_V[1]

    @cached_property
    def code_V(self) -> float:
        """Nominal volts from one code to the next."""
        return (self.high_V - self.low_V) / float((1 << self.bits) - 1)

    def electrode_V(self, nominal_V: float) -> float:
        """Volts at the electrode for nominal volts, by the calibration."""
        return self.gain * nominal_V + self.offset_V

    def nominal_V(self, electrode_V: float) -> float:
        """Nominal volts that give these volts at the electrode, by the calibration."""
        return (electrode_V - self.offset_V) / self.gain

    @property
    def reach_V(self) -> tuple[float, float]:
        """Lowest and highest volts at the electrode, by the calibration."""
        return self.electrode_V(self.low_V), self.electrode_V(self.high_V)


class Switch(Part):
    """An output with two levels, thrown by a digital edge.

    A level is fixed volts at the electrode, known to ± `spread_V`, or the name of a converter
    output, which then passes through.  `edge_s` is the 10 % to 90 % time of the real edge.
    """

    kind: Annotated[Literal["switch"], choice("switch")] = "switch"
    name: Name
    levels: Annotated[
        tuple[Annotated[float | str, level()], Annotated[float | str, level()]],
        listing(2, 2, '["lv20", "-4.5 kV"]'),
        sound(lambda two: two[0] != two[1], "the two levels are the same"),
    ]
    spread_V: VoltsUp = Field(0.0, alias="spread")
    edge_s: Edge = Field(alias="edge")
    clock_s: Clock = Field(alias="clock")
    delay_s: Seconds = Field(Fraction(0), alias="delay")
    noise_V: VoltsUp = Field(0.0, alias="noise")
    capacitance_F: Farads | None = Field(None, alias="capacitance")
    hazardous: Flag = False

    @property
    def passes(self) -> tuple[str, ...]:
        """The converter outputs that can pass through, in the order of the levels."""
        return tuple(item for item in self.levels if isinstance(item, str))


class Line(Part):
    """A digital line: an output that the table sets, or an input that `expect` may name.

    `role` says what it is to the interlock rules, `safe` in which of its states that thing is safe;
    both are None where the trap file does not say.
    """

    name: Name
    states: Annotated[
        tuple[Annotated[str, state()], ...],
        listing(2, 16, '["closed", "open"]'),
        sound(lambda words: len(set(words)) == len(words), "a state is given twice"),
    ]
    initial: Mention
    kind: Annotated[Literal["output", "input"], choice("output", "input")] = "output"
    role: Annotated[str, choice(*ROLES)] | None = None
    safe: Mention | None = None
    clock_s: Clock = Field(alias="clock")

    @model_validator(mode="before")
    @classmethod
    def _input_begins_at_first_state(cls, data: Any) -> Any:
        """What an input has at the start is not ours to say; its first state stands for it."""
        if not isinstance(data, dict) or data.get("kind") != "input" or "initial" in data:
            return data
        states = data.get("states")
        first = states[0] if isinstance(states, (list, tuple)) and states else ""
        return {**data, "initial": first}


class Trigger(Part):
    """An event that a block can begin at.

    `within_s` is the longest wait for it, None when each step says its own.  The first row comes
    `latency_s` after it, give or take `jitter_s`.
    """

    name: Name
    within_s: Wait | None = Field(None, alias="within")
    latency_s: Seconds = Field(Fraction(0), alias="latency")
    jitter_s: Seconds = Field(Fraction(0), alias="jitter")


class Rest(Part):
    """Where an output stands before the first statement, named by itself or by its electrode.

    `level`: volts at the electrode; for a switch one of its levels, as in `Switch.levels`.
    """

    name: Mention
    level: Annotated[float | str, level()]
