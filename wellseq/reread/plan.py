"""The manifest of a published folder → a plan: which outputs there are and what each may do.

All numbers are exact rationals in V, s and V/s.  Nothing here trusts the program that wrote it.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from math import lcm

from wellseq.reread.reading import Part

SCHEMA = "wellseq/folder"
DRAFT_SCHEMA = "wellseq/draft"
SCHEMA_VERSION = 2
FORMS = ("hdf5", "npz")
"""Further forms that a table may have."""


@dataclass(frozen=True, slots=True)
class Converter:
    """A converter output; electrode volts = gain * (low + code * lsb) + offset.

    lsb = (high - low) / (2^bits - 1), in V.  `whole` says the same in whole numbers:
    volts = (start + slope * code) / bottom.
    """

    name: str
    low_V: Fraction
    high_V: Fraction
    bits: int
    gain: Fraction
    offset_V: Fraction
    clock_s: Fraction
    slew_V_per_s: Fraction
    holds: bool
    gain_spread: Fraction = Fraction(0)
    offset_spread_V: Fraction = Fraction(0)
    noise_V: Fraction = Fraction(0)

    @property
    def code_max(self) -> int:
        """The largest code."""
        return int(2**self.bits - 1)

    @property
    def code_V(self) -> Fraction:
        """Electrode volts from one code to the next, without sign."""
        return abs(self.gain) * (self.high_V - self.low_V) / self.code_max

    @property
    def whole(self) -> tuple[int, int, int]:
        """(start, slope, bottom), exact."""
        at_zero = self.gain * self.low_V + self.offset_V
        per_code = self.gain * (self.high_V - self.low_V) / self.code_max
        bottom = lcm(at_zero.denominator, per_code.denominator)
        return int(at_zero * bottom), int(per_code * bottom), bottom


@dataclass(frozen=True, slots=True)
class Switch:
    """A switch output: fixed volts or a converter's name per level; an edge takes `settle_s`."""

    name: str
    levels: tuple[Fraction | str, ...]
    clock_s: Fraction
    settle_s: Fraction
    spread_V: Fraction = Fraction(0)
    noise_V: Fraction = Fraction(0)


@dataclass(frozen=True, slots=True)
class Line:
    """A digital line and its states."""

    name: str
    states: tuple[str, ...]
    clock_s: Fraction


@dataclass(frozen=True, slots=True)
class Electrode:
    """An electrode: where it stands along the axis, its inner radius (m), what drives it."""

    name: str
    from_m: Fraction
    to_m: Fraction
    radius_m: Fraction
    output: str


@dataclass(frozen=True, slots=True)
class Neighbours:
    """Two adjacent electrodes' outputs and how far apart their volts may be."""

    electrodes: tuple[str, str]
    outputs: tuple[str, str]
    limit_V: Fraction


@dataclass(frozen=True, slots=True)
class BlockPlan:
    """What the manifest says of one block."""

    index: int
    name: str
    trigger: str
    tick_s: Fraction
    rows: int
    duration_s: Fraction
    table: str
    drives: str | None
    also: Mapping[str, str]
    strays_V: Mapping[str, Fraction]


@dataclass(frozen=True, slots=True)
class Plan:
    """What the tables must agree with."""

    converters: tuple[Converter, ...]
    switches: tuple[Switch, ...]
    lines: tuple[Line, ...]
    rings: Mapping[str, int]
    electrodes: tuple[Electrode, ...]
    ends: str
    patch_V: Fraction
    neighbours: tuple[Neighbours, ...]
    rows_max: int
    blocks: tuple[BlockPlan, ...]
    end: Mapping[str, int]
    content_id: str
    shallow_steps: frozenset[int]

    @property
    def outputs(self) -> tuple[Converter | Switch, ...]:
        """Converters, then switches, as their columns stand."""
        return (*self.converters, *self.switches)

    @property
    def columns(self) -> tuple[Converter | Switch | Line, ...]:
        """Everything that has a column, in order."""
        return (*self.converters, *self.switches, *self.lines)


def plan(manifest: Part) -> Plan:
    """Read a manifest; raises Unsound where it contradicts itself or leaves something out."""
    trap = manifest.part("trap")
    converters = tuple(_converter(part) for part in trap.parts("converters"))
    names = [converter.name for converter in converters]
    switches = tuple(_switch(part, names) for part in trap.parts("switches"))
    lines = tuple(_line(part) for part in trap.parts("lines"))
    names += [switch.name for switch in switches] + [line.name for line in lines]
    if len(set(names)) != len(names):
        raise trap.wrong("converters", "without a name that is used twice")
    limits = manifest.part("limits")
    blocks = tuple(_block(part, at) for at, part in enumerate(manifest.parts("blocks")))
    if not blocks:
        raise manifest.wrong("blocks", "a list of at least one block")
    _strays(manifest, blocks, limits.number("staircase_V"))
    return Plan(
        converters=converters,
        switches=switches,
        lines=lines,
        rings={
            part.text("name"): part.whole("sectors", 1, 64) for part in trap.parts("electrodes")
        },
        electrodes=tuple(map(_electrode, trap.parts("electrodes"))),
        ends=trap.text("ends"),
        patch_V=trap.number("patch_V"),
        neighbours=tuple(_neighbours(trap, names)),
        rows_max=limits.whole("table_rows", 1),
        blocks=blocks,
        end=_end(manifest.part("end"), switches, converters, lines),
        content_id=manifest.text("content_id"),
        shallow_steps=_shallow(manifest),
    )


def _converter(part: Part) -> Converter:
    converter = Converter(
        name=part.text("name"),
        low_V=part.number("low_V"),
        high_V=part.number("high_V"),
        bits=part.whole("bits", 1, 32),
        gain=part.number("gain"),
        offset_V=part.number("offset_V"),
        clock_s=part.exact("clock_s", positive=True),
        slew_V_per_s=part.number("slew_V_per_s"),
        holds=part.word("between_rows", "hold", "line") == "hold",
        gain_spread=part.number("gain_spread"),
        offset_spread_V=part.number("offset_spread_V"),
        noise_V=part.number("noise_V"),
    )
    if converter.low_V >= converter.high_V:
        raise part.wrong("high_V", "above low_V")
    if converter.gain == 0 or converter.slew_V_per_s <= 0:
        raise part.wrong("gain", "usable together with the slew")
    return converter


def _switch(part: Part, converters: list[str]) -> Switch:
    levels: list[Fraction | str] = []
    for level in part.items("levels"):
        if isinstance(level, str):
            if level not in converters:
                raise part.wrong("levels", "made of volts and names of converters")
            levels.append(level)
        else:
            levels.append(Part({"level": level}, part.file, part.name, part.path).number("level"))
    return Switch(
        name=part.text("name"),
        levels=tuple(levels),
        clock_s=part.exact("clock_s", positive=True),
        settle_s=part.exact("settle_s"),
        spread_V=part.number("spread_V"),
        noise_V=part.number("noise_V"),
    )


def _electrode(part: Part) -> Electrode:
    return Electrode(
        part.text("name"),
        part.number("from_m"),
        part.number("to_m"),
        part.number("radius_m"),
        part.text("output"),
    )


def _line(part: Part) -> Line:
    return Line(part.text("name"), part.texts("states"), part.exact("clock_s", positive=True))


def _neighbours(trap: Part, names: list[str]) -> list[Neighbours]:
    """Every two electrodes that stand side by side, with the limit that the manifest gives them."""
    electrodes = [(part.text("name"), part.text("output")) for part in trap.parts("electrodes")]
    limits = list(trap.parts("neighbours"))
    if len(limits) != max(0, len(electrodes) - 1):
        raise trap.wrong("neighbours", "one entry for every two adjacent electrodes")
    found = []
    for limit, one, other in zip(limits, electrodes, electrodes[1:], strict=False):
        if limit.texts("electrodes") != (one[0], other[0]):
            raise limit.wrong("electrodes", "the next two electrodes along the axis")
        if one[1] not in names or other[1] not in names:
            raise trap.wrong("electrodes", "on outputs that the manifest lists")
        found.append(Neighbours((one[0], other[0]), (one[1], other[1]), limit.number("limit_V")))
    return found


def _block(part: Part, at: int) -> BlockPlan:
    if part.whole("index") != at + 1:
        raise part.wrong("index", "the number of the block in order")
    strays = part.part("strays_V")
    drives = part.values.get("drives")
    if drives is not None and not isinstance(drives, str):
        raise part.wrong("drives", "a file name or null")
    also = part.part("also")
    if not set(also.values) <= set(FORMS):
        raise part.wrong("also", f"made of {' and '.join(FORMS)}")
    return BlockPlan(
        index=at,
        name=part.text("name"),
        trigger=part.text("trigger"),
        tick_s=part.exact("tick_s", positive=True),
        rows=part.whole("rows", 1),
        duration_s=part.exact("duration_s"),
        table=part.text("table"),
        drives=drives,
        also={form: also.text(form) for form in also.values},
        strays_V={name: strays.number(name) for name in strays.values},
    )


def _end(
    part: Part,
    switches: tuple[Switch, ...],
    converters: tuple[Converter, ...],
    lines: tuple[Line, ...],
) -> dict[str, int]:
    codes, levels, states = part.part("codes"), part.part("levels"), part.part("states")
    end = {one.name: codes.whole(one.name, 0, one.code_max) for one in converters}
    end |= {one.name: levels.whole(one.name, 0, len(one.levels) - 1) for one in switches}
    return end | {one.name: one.states.index(states.word(one.name, *one.states)) for one in lines}


def _shallow(manifest: Part) -> frozenset[int]:
    """The numbers of the steps for which `well-too-shallow` was allowed."""
    numbers: set[int] = set()
    for part in manifest.parts("allowances"):
        if part.text("name") == "well-too-shallow":
            numbers.update(int(number) for number in part.numbers("steps"))
    return frozenset(numbers)


def _strays(manifest: Part, blocks: tuple[BlockPlan, ...], staircase_V: Fraction) -> None:
    """A staircase strays no further than the trap file allows, unless that was allowed."""
    if any(part.text("name") == "steps-too-coarse" for part in manifest.parts("allowances")):
        return
    for block in blocks:
        for name, stray_V in block.strays_V.items():
            if not 0 <= stray_V <= staircase_V:
                raise manifest.wrong(f"strays_V of {name}", "within the staircase of the trap file")
