"""An output is asked to change faster than it can.

Two things are measured, both in V/s at the electrode.  The wish: the greatest slope of each piece.
What is played: on a card that holds between rows each change of code must be over before the
output's next change; on a card that draws lines, the slope from row to row.  Both are found from
the rows alone, less one code, which is what rounding two voltages to codes can add.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from wellseq.base.finding import Mistake, Reading, at_most
from wellseq.checks.case import Case, reached
from wellseq.checks.keeping import Floats, figures, numbered, telling
from wellseq.checks.pieces import durations_s
from wellseq.checks.written import mistakes_named
from wellseq.model.trap import Converter
from wellseq.timeline.shipped import Shipped, ShippedBlock
from wellseq.timeline.timeline import Shape

Rows = npt.NDArray[np.intp]

SAYS = "An output is asked to change faster than its slew."
NEEDS = ("trap", "timeline", "shipped")
WAIVABLE = False

HINT = "give the motion more time"


def read(case: Case) -> Iterator[Reading | Mistake]:
    """The slope of every piece as written, and of every change as played, V/s."""
    yield from mistakes_named(case, "slew-too-fast")
    yield from _of_wishes(case)
    yield from _of_rows(case)


def _of_wishes(case: Case) -> Iterator[Reading]:
    outputs = reached(case.trap).outputs
    slews = {o.name: _slew_V_per_s(o) for o in outputs if isinstance(o, Converter)}
    for block in reached(case.timeline).blocks:
        pieces = block.pieces
        swings = np.array([abs(piece.to_V - piece.from_V) for piece in pieces])
        steepest = [math.pi / 2 if p.shape is Shape.SMOOTH else 1.0 for p in pieces]
        slopes = figures(swings / np.array(durations_s(pieces)) * np.array(steepest))
        bounds = [slews[piece.output] for piece in pieces]
        groups = numbered(piece.output for piece in pieces)
        steps = [piece.number for piece in pieces]
        for index in telling(at_most(0.0, "V/s"), slopes, slopes, groups, steps, bounds):
            piece = pieces[index]
            yield Reading(
                value=float(slopes[index]),
                limit=at_most(bounds[index], "V/s"),
                message=f"{piece.output} is asked for {{value}}, it can follow {{limit}}",
                origin=case.origin(piece.number),
                subject=piece.output,
                block=block.name,
                window_s=(float(piece.start_s), float(piece.end_s)),
                hint=HINT,
            )


def _slew_V_per_s(converter: Converter) -> float:
    return float(figures(converter.slew_V_per_s))


@dataclass(frozen=True, slots=True)
class _Played:
    """The steepest change of one output within one of its pieces; times in s of the block."""

    block: ShippedBlock
    number: int
    time_s: float
    slope_V_per_s: float


def _of_rows(case: Case) -> Iterator[Reading]:
    for column, name in enumerate(reached(case.shipped).converters):
        converter = reached(case.trap).output(name)
        assert isinstance(converter, Converter)
        played = list(_played(reached(case.shipped), column, converter))
        slopes = figures([one.slope_V_per_s for one in played])
        limit = at_most(_slew_V_per_s(converter), "V/s")
        groups = numbered(one.block.block.name for one in played)
        for index in telling(limit, slopes, slopes, groups, [one.number for one in played]):
            one = played[index]
            yield Reading(
                value=float(slopes[index]),
                limit=limit,
                message=f"the rows of {name} ask for {{value}}, it can follow {{limit}}",
                origin=case.origin(one.number),
                subject=f"{name}, rows",
                block=one.block.block.name,
                window_s=(one.time_s, one.time_s),
                hint=HINT,
            )


def _played(shipped: Shipped, column: int, converter: Converter) -> Iterator[_Played]:
    """The steepest change per piece of one converter, block by block."""
    before: int | None = None
    for index, block in enumerate(shipped.blocks):
        codes = block.codes[:, column]
        jumps = np.abs(np.diff(codes, prepend=codes[0] if before is None else before))
        rows = np.flatnonzero(jumps)
        if converter.between_rows == "hold":
            after = shipped.blocks[index + 1] if index + 1 < len(shipped.blocks) else None
            seconds = _until_next(block, rows, after, column, converter)
        else:
            seconds = _since_last(block, rows, converter)
        slopes = np.maximum(jumps[rows] - 1, 0) * shipped.code_V[converter.name] / seconds
        yield from _per_piece(block, converter, rows, slopes)
        before = int(codes[-1])


def _until_next(
    block: ShippedBlock,
    rows: Rows,
    after: ShippedBlock | None,
    column: int,
    converter: Converter,
) -> Floats:
    """Seconds from each change of a held output to its next one, in the next block if need be."""
    ticks = block.ticks[rows]
    seconds = np.append(np.diff(ticks), 0) * float(block.tick_s)
    if not len(rows):
        return seconds[:0]
    if after is None:
        seconds[-1] = math.inf
        return seconds
    codes = after.codes[:, column]
    changes = np.flatnonzero(np.diff(codes, prepend=block.codes[-1, column]))
    first = after.ticks[changes[0] if len(changes) else -1] * float(after.tick_s)
    left = (block.ticks[-1] - ticks[-1]) * float(block.tick_s)
    seconds[-1] = left + _soonest_s(after, converter) + first
    return seconds


def _since_last(block: ShippedBlock, rows: Rows, converter: Converter) -> Floats:
    """Seconds that an output whose card draws lines has had since the row before."""
    spans = np.diff(block.ticks, prepend=0) * float(block.tick_s)
    spans[0] = _soonest_s(block, converter)
    seconds: Floats = spans[rows]
    return seconds


def _soonest_s(block: ShippedBlock, converter: Converter) -> float:
    """The least time from the end of the block before to this block's first row, s.

    A trigger may come at once; a card takes one clock at least between two rows.
    """
    soonest = max(block.block.first_row_s - block.block.jitter_s, converter.clock_s)
    return float(soonest)


def _per_piece(
    block: ShippedBlock, converter: Converter, rows: Rows, slopes: Floats
) -> Iterator[_Played]:
    """The steepest of the changes that belong to each piece of an output."""
    pieces = [piece for piece in block.block.pieces if piece.output == converter.name]
    times = block.ticks[rows] * float(block.tick_s)
    if not pieces or not len(rows):
        spans = block.block.spans
        number = spans[0].number if spans else -1
        yield from (_Played(block, number, *pair) for pair in zip(times, slopes, strict=True))
        return
    starts = np.array([float(piece.start_s) for piece in pieces]) - float(converter.clock_s) / 2
    owner = np.maximum(np.searchsorted(starts, times, side="right") - 1, 0)
    order = np.lexsort((-slopes, owner))
    firsts = order[np.append(True, np.diff(owner[order]) != 0)]
    for index in firsts:
        number = pieces[owner[index]].number
        yield _Played(block, number, float(times[index]), float(slopes[index]))
