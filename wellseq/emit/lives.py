"""Drives and lines over time: what else can hurt, or be hurt, and when; plain values.

A line counts while it is not in the state that its trap file calls safe.  Times are s of a block.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from wellseq.emit.hazards import Windows
from wellseq.model.trap import Line, Trap
from wellseq.timeline.shipped import Shipped
from wellseq.timeline.timeline import Timeline


@dataclass(frozen=True, slots=True)
class LineLife:
    """One digital line: when it is not safe, what it is left in, what was expected of it and when.

    `windows` is empty for a line that has no safe state; `left` is empty for an input, `expected`
    (block index, s, state) for an output.
    """

    line: Line
    windows: Windows
    left: str
    expected: tuple[tuple[int, float, str], ...]


def lines_over_time(trap: Trap, timeline: Timeline, shipped: Shipped) -> tuple[LineLife, ...]:
    """Every digital line, in the order of the trap file."""
    found = []
    for column, line in enumerate(trap.lines):
        if line.kind == "input":
            expected = tuple(
                (block.index, float(change.time_s), change.state)
                for block in timeline.blocks
                for change in block.changes
                if change.line == line.name and change.expected
            )
            found.append(LineLife(line, [], "", expected))
            continue
        left = line.states[int(shipped.blocks[-1].states[-1, column])]
        windows = list(_unsafe(shipped, column, line)) if line.safe else []
        found.append(LineLife(line, windows, left, ()))
    return tuple(found)


def _unsafe(shipped: Shipped, column: int, line: Line) -> Iterator[tuple[int, float, float]]:
    safe = line.states.index(line.safe)
    for block in shipped.blocks:
        seconds = block.ticks * float(block.tick_s)
        away = np.concatenate(([False], block.states[:, column] != safe, [False]))
        edges = np.flatnonzero(np.diff(away))
        for first, last in zip(edges[::2].tolist(), edges[1::2].tolist(), strict=True):
            stop = seconds[min(last, len(seconds) - 1)]
            yield block.block.index, float(seconds[first]), float(stop)


def drive_windows(timeline: Timeline) -> dict[str, Windows]:
    """Ring → when it is driven."""
    found: dict[str, Windows] = {}
    for block in timeline.blocks:
        for drive in block.drives:
            window = block.index, float(drive.start_s), float(drive.stop_s)
            found.setdefault(drive.ring, []).append(window)
    return found
