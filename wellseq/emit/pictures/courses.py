"""Timeline → the course of every electrode's voltage: corner points per block, exact as drawn.

A course is what the author wishes: converters by their pieces, switches by their edges, drawn
straight within the window in which the real edge lies.  Times are s of the block, volts V at the
electrode; `smooth` marks corners that a half-cosine leads to.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from wellseq.emit.pictures.score import WHOLE, Score
from wellseq.emit.pictures.thinning import keep
from wellseq.model.trap import Converter, Switch, Trap
from wellseq.timeline.timeline import Block, Edge, Shape, Timeline

Floats = npt.NDArray[np.float64]
Flags = npt.NDArray[np.bool_]
BUCKETS = 400
"""A course longer than four corners for each of these is thinned."""
BENDS = 12
"""A half-cosine is drawn with so many straight lines; it strays by less than 1 % of its way."""


@dataclass(frozen=True, slots=True)
class Stretch:
    """One output in one block: corners at `time_s` (n,) of `volts_V` (n,), `smooth` (n,)."""

    block: int
    time_s: Floats
    volts_V: Floats
    smooth: Flags

    def at(self, time_s: float) -> float:
        """Volts at an instant (s); after a jump, what it leads to."""
        here = int(np.searchsorted(self.time_s, time_s, side="right")) - 1
        if here < 0:
            return float(self.volts_V[0])
        if here + 1 >= len(self.time_s):
            return float(self.volts_V[-1])
        share = (time_s - self.time_s[here]) / (self.time_s[here + 1] - self.time_s[here])
        if self.smooth[here + 1]:
            share = 0.5 * (1 - math.cos(math.pi * share))
        low, high = self.volts_V[here], self.volts_V[here + 1]
        return float(low + (high - low) * share)


@dataclass(frozen=True, slots=True)
class Course:
    """One output through all blocks; `corners` counts them before any were thinned out."""

    output: str
    electrodes: tuple[str, ...]
    stretches: tuple[Stretch, ...]
    corners: int

    @property
    def ends_V(self) -> tuple[float, float]:
        """Least and greatest volts anywhere, V."""
        low = min(float(one.volts_V.min()) for one in self.stretches)
        return low, max(float(one.volts_V.max()) for one in self.stretches)

    @property
    def moves(self) -> bool:
        """Whether the output ever changes."""
        low, high = self.ends_V
        return high > low

    @property
    def kept(self) -> int:
        """Corners that are left."""
        return sum(len(one.time_s) for one in self.stretches)

    def at(self, block: int, time_s: float) -> float:
        """Volts at an instant of a block, s."""
        return self.stretches[block].at(time_s)


def courses(timeline: Timeline, axis: Score) -> tuple[Course, ...]:
    """The course of every output, in the trap file's order, thinned where it is very long."""
    trap = timeline.trap
    names = [output.name for output in trap.outputs]
    drawn: dict[str, list[Stretch]] = {name: [] for name in names}
    for block in timeline.blocks:
        found = dict(_converters(trap, block))
        for output in trap.outputs:
            if isinstance(output, Switch):
                edges = [edge for edge in block.edges if edge.output == output.name]
                found[output.name] = _switched(output, block, edges, found)
        for name in names:
            drawn[name].append(found[name])
    return tuple(
        Course(
            name,
            trap.electrodes_of(name),
            tuple(_thinned(one, axis) for one in drawn[name]),
            sum(len(one.time_s) for one in drawn[name]),
        )
        for name in names
    )


def corners_placed(stretch: Stretch, axis: Score) -> tuple[Floats, Floats]:
    """(place on the axis, volts V) of a stretch's corners, half-cosines cut into lines."""
    time_s, volts = _straight(stretch)
    # A value stands through all steps that take no time, and changes after them.
    above, below = (axis.before(stretch.block, time_s), axis.after(stretch.block, time_s))
    place = np.maximum.accumulate(np.stack((above, below), axis=1).ravel())
    both = np.repeat(volts, 2)
    wait = axis.wait_top(stretch.block)
    if wait is not None:
        place, both = np.append(wait, place), np.append(volts[0], both)
    fresh = np.append(True, (np.diff(place) > 0) | (np.diff(both) != 0))
    return place[fresh], both[fresh]


def _straight(stretch: Stretch) -> tuple[Floats, Floats]:
    if not stretch.smooth.any():
        return stretch.time_s, stretch.volts_V
    times, volts = [stretch.time_s[:1]], [stretch.volts_V[:1]]
    share = np.arange(1, BENDS) / BENDS
    bent = 0.5 * (1 - np.cos(np.pi * share))
    for at in range(1, len(stretch.time_s)):
        start, end = stretch.time_s[at - 1], stretch.time_s[at]
        low, high = stretch.volts_V[at - 1], stretch.volts_V[at]
        if stretch.smooth[at]:
            times.append(start + (end - start) * share)
            volts.append(low + (high - low) * bent)
        times.append(stretch.time_s[at : at + 1])
        volts.append(stretch.volts_V[at : at + 1])
    return np.concatenate(times), np.concatenate(volts)


def _thinned(stretch: Stretch, axis: Score) -> Stretch:
    if len(stretch.time_s) <= 4 * BUCKETS:
        return stretch
    place = axis.after(stretch.block, stretch.time_s)
    kept = keep(place, stretch.volts_V, 0.0, float(WHOLE), BUCKETS)
    smooth = np.zeros(len(kept), dtype=bool)
    return Stretch(stretch.block, stretch.time_s[kept], stretch.volts_V[kept], smooth)


def _converters(trap: Trap, block: Block) -> Iterator[tuple[str, Stretch]]:
    times: dict[str, list[float]] = {}
    volts: dict[str, list[float]] = {}
    smooth: dict[str, list[bool]] = {}
    for output in trap.outputs:
        if isinstance(output, Converter):
            times[output.name], smooth[output.name] = [0.0], [False]
            volts[output.name] = [float(block.volts[output.name])]
    for piece in block.pieces:
        times[piece.output] += (float(piece.start_s), float(piece.end_s))
        volts[piece.output] += (piece.from_V, piece.to_V)
        smooth[piece.output] += (False, piece.shape is Shape.SMOOTH)
    for name in times:
        times[name].append(float(block.duration_s))
        volts[name].append(volts[name][-1])
        smooth[name].append(False)
        yield name, _stretch(block.index, times[name], volts[name], smooth[name])


def _stretch(block: int, times: list[float], volts: list[float], smooth: list[bool]) -> Stretch:
    """A stretch without corners that are there twice."""
    time_s, volts_V = np.array(times), np.array(volts)
    fresh = np.append(True, (np.diff(time_s) > 0) | (np.diff(volts_V) != 0))
    return Stretch(block, time_s[fresh], volts_V[fresh], np.array(smooth)[fresh])


def _switched(
    switch: Switch, block: Block, edges: list[Edge], converters: dict[str, Stretch]
) -> Stretch:
    """The course behind a switch: what each level gives while it stands, edges drawn straight."""
    times: list[float] = []
    volts: list[float] = []
    smooth: list[bool] = []
    level, since = block.levels[switch.name], 0.0
    for edge in [*edges, None]:
        until = float(block.duration_s) if edge is None else float(edge.start_s)
        part = _level(switch.levels[level], block.index, since, max(since, until), converters)
        times += part.time_s.tolist()
        volts += part.volts_V.tolist()
        smooth += [False, *part.smooth.tolist()[1:]]
        if edge is not None:
            level, since = edge.to_level, float(edge.end_s)
    return _stretch(block.index, times, volts, smooth)


def _level(
    level: float | str, block: int, start: float, end: float, converters: dict[str, Stretch]
) -> Stretch:
    if not isinstance(level, str):
        both = np.array([level, level])
        return Stretch(block, np.array([start, end]), both, np.array([False, False]))
    behind = converters[level]
    if behind.smooth.any():
        # Part of a half-cosine is none; its chords are the same curve for the eye.
        time_s, volts_V = _straight(behind)
        behind = Stretch(block, time_s, volts_V, np.zeros(len(time_s), dtype=bool))
    inside = (behind.time_s > start) & (behind.time_s < end)
    return Stretch(
        block,
        np.concatenate(([start], behind.time_s[inside], [end])),
        np.concatenate(([behind.at(start)], behind.volts_V[inside], [behind.at(end)])),
        np.concatenate(([False], behind.smooth[inside], [False])),
    )
