"""Which outputs can injure, when, and how much energy they store: plain values for the cautions.

Limits: 60 V d.c. may be touched in dry conditions (IEC 61140; IEC 60204-1, 6.4); 120 V d.c. is the
ceiling of extra-low voltage (IEC 61140).  Volts are those at the electrode, times s of the block.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from wellseq.model.trap import Converter, Switch, Trap
from wellseq.timeline.shipped import Shipped, ShippedBlock

TOUCH_V = 60.0
EXTRA_LOW_V = 120.0

Floats = npt.NDArray[np.float64]
Windows = list[tuple[int, float, float]]


@dataclass(frozen=True, slots=True)
class Hazard:
    """An output that can injure.

    `largest_V` is the largest voltage commanded, without sign, `able_V` the largest that the trap
    file says it can give; `windows` are (block index, start, end in s) with more than TOUCH_V
    commanded; `stored_J` is ½CV² at the largest, None without a capacitance; `ends_V` what
    each block leaves standing (blocks,).
    """

    output: str
    electrodes: tuple[str, ...]
    flagged: bool
    largest_V: float
    able_V: float
    windows: Windows
    stored_J: float | None
    ends_V: tuple[float, ...]


def hazards(trap: Trap, shipped: Shipped) -> list[Hazard]:
    """Every output that is flagged hazardous, or able to give more than TOUCH_V."""
    found = []
    for output in trap.outputs:
        able = able_V(trap, output)
        if not output.hazardous and able <= TOUCH_V:
            continue
        courses = [_course(trap, shipped, block, output) for block in shipped.blocks]
        largest = max(float(np.max(volts)) for volts in courses)
        capacitance = output.capacitance_F
        found.append(
            Hazard(
                output=output.name,
                electrodes=trap.electrodes_of(output.name),
                flagged=output.hazardous,
                largest_V=largest,
                able_V=able,
                windows=_windows(shipped, courses, _holds(trap, output)),
                stored_J=None if capacitance is None else capacitance * largest**2 / 2,
                ends_V=tuple(float(volts[-1]) for volts in courses),
            )
        )
    return found


def able_V(trap: Trap, output: Converter | Switch) -> float:
    """The largest voltage, without sign, that an output can give by the trap file, V."""
    if isinstance(output, Converter):
        return max(abs(end) for end in output.reach_V)
    return max(_level_able_V(trap, level) for level in output.levels)


def _level_able_V(trap: Trap, level: float | str) -> float:
    return able_V(trap, trap.output(level)) if isinstance(level, str) else abs(level)


def _holds(trap: Trap, output: Converter | Switch) -> bool:
    if isinstance(output, Converter):
        return output.between_rows == "hold"
    return all(_holds(trap, trap.output(name)) for name in output.passes)


def _course(
    trap: Trap, shipped: Shipped, block: ShippedBlock, output: Converter | Switch
) -> Floats:
    """Volts without sign at the electrodes of an output, (rows,)."""
    if isinstance(output, Converter):
        codes = block.codes[:, shipped.converters.index(output.name)]
        nominal = output.low_V + codes * output.code_V
        volts: Floats = np.abs(output.gain * nominal + output.offset_V)
        return volts
    levels = block.levels[:, shipped.switches.index(output.name)]
    by_level = [
        _course(trap, shipped, block, trap.output(level))
        if isinstance(level, str)
        else np.full(len(levels), abs(level))
        for level in output.levels
    ]
    chosen: Floats = np.choose(levels, by_level)
    return chosen


def _windows(shipped: Shipped, courses: list[Floats], holds: bool) -> Windows:
    """(block index, start, end) of every stretch above TOUCH_V, row to row."""
    found: Windows = []
    for block, volts in zip(shipped.blocks, courses, strict=True):
        seconds = block.ticks * float(block.tick_s)
        live = volts > TOUCH_V
        if not holds:
            # A drawn line is above the limit for part of the way before and after such a row.
            live[:-1] |= live[1:]
        for start, end in _runs(live):
            stop = seconds[min(end, len(seconds) - 1)]
            found.append((block.block.index, float(seconds[start]), float(stop)))
    return found


def _runs(live: npt.NDArray[np.bool_]) -> Iterator[tuple[int, int]]:
    """(first, one past the last) of every run of True."""
    edges = np.flatnonzero(np.diff(np.concatenate(([False], live, [False]))))
    yield from zip(edges[::2].tolist(), edges[1::2].tolist(), strict=True)
