"""Timeline → the axis of all pictures over time: one row per played step, in order of play.

A step's height grows with the logarithm of how long it lasts, and a step that takes no time has a
row too; so half an hour and a microsecond are read side by side, and every step has a place of its
own.  Within a row time goes on evenly.  Places along the axis run from 0 to WHOLE.  Times are s of
the block.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from itertools import pairwise

import numpy as np
import numpy.typing as npt

from wellseq.timeline.timeline import Block, StepSpan, Timeline

WHOLE = 100_000
CELLS_MOST = 2500
"""With more rows than this, rows that follow one another share one."""
INSTANT, WAIT, SHORTEST, PER_DECADE, TALLEST = 0.7, 1.2, 1.0, 0.3, 4.0
"""Heights of a step without a duration, of a wait, of the shortest; what each decade adds."""
_SHORT_S = 1e-6
Floats = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Cell:
    """One row: `numbers` are the steps that go on in it, the one that began last at the end.

    A row with `wait` stands before its block, whose trigger is waited for.
    """

    block: int
    start_s: float
    end_s: float
    top: float
    bottom: float
    numbers: tuple[int, ...]
    wait: bool = False


@dataclass(frozen=True, slots=True)
class Part:
    """What follows a labelled step up to the next label; the first part may have no label."""

    label: str
    block: int
    start_s: float
    end_block: int
    end_s: float
    top: float
    bottom: float
    first: int


class Score:
    """The axis of one timeline; made by `score`."""

    def __init__(self, cells: Sequence[Cell], parts: Sequence[Part]) -> None:
        self.cells = tuple(cells)
        self.parts = tuple(parts)
        self._knots = {block: _knots(found) for block, found in _by_block(cells).items()}
        self._waits = {cell.block: cell.top for cell in cells if cell.wait}
        self._rows: dict[int, tuple[float, float]] = {}
        for cell in cells:
            for number in cell.numbers:
                top, _ = self._rows.get(number, (cell.top, cell.bottom))
                self._rows[number] = top, cell.bottom

    def row(self, number: int) -> tuple[float, float] | None:
        """Where a step begins and ends on the axis; None for a step that was not played."""
        return self._rows.get(number)

    def wait_top(self, block: int) -> float | None:
        """Where the wait before a block begins; None where nothing is waited for."""
        return self._waits.get(block)

    def after(self, block: int, time_s: npt.ArrayLike) -> Floats:
        """Places of instants (s, any shape), below the steps that take no time at them."""
        return self._place(block, time_s, after=True)

    def before(self, block: int, time_s: npt.ArrayLike) -> Floats:
        """Places of instants (s, any shape), above the steps that take no time at them."""
        return self._place(block, time_s, after=False)

    def _place(self, block: int, time_s: npt.ArrayLike, *, after: bool) -> Floats:
        times, low, high = self._knots[block]
        wanted = np.clip(np.asarray(time_s, dtype=float), times[0], times[-1])
        at = np.clip(np.searchsorted(times, wanted, side="right") - 1, 0, len(times) - 1)
        later = np.minimum(at + 1, len(times) - 1)
        span = np.where(times[later] > times[at], times[later] - times[at], 1.0)
        share = (wanted - times[at]) / span
        found = high[at] + share * (low[later] - high[at])
        return np.asarray(np.where(share > 0, found, high[at] if after else low[at]))


def score(timeline: Timeline) -> Score:
    """The axis of a timeline, blocks one below the other, with a wait before each trigger."""
    rough = [cell for block in timeline.blocks for cell in _cells(block)]
    if len(rough) > CELLS_MOST:
        rough = list(_shared(rough, math.ceil(len(rough) / CELLS_MOST)))
    heights = [cell.bottom for cell in rough]
    scale = WHOLE / (sum(heights) or 1.0)
    cells, top = [], 0.0
    for cell, height in zip(rough, heights, strict=True):
        bottom = top + height * scale
        cells.append(
            Cell(cell.block, cell.start_s, cell.end_s, top, bottom, cell.numbers, cell.wait)
        )
        top = bottom
    return Score(cells, tuple(_parts(timeline, cells)))


def _cells(block: Block) -> Iterator[Cell]:
    """Rows of a block from top 0; `bottom` is the height of each."""
    if block.trigger:
        yield Cell(block.index, 0.0, 0.0, 0.0, WAIT, (), wait=True)
    instants: dict[Fraction, list[int]] = {}
    for span in block.spans:
        if span.start_s == span.end_s:
            instants.setdefault(span.start_s, []).append(span.number)
    lasting = sorted(
        (span for span in block.spans if span.end_s > span.start_s), key=lambda one: one.start_s
    )
    ends = {edge for span in lasting for edge in (span.start_s, span.end_s)}
    times = sorted({Fraction(0), block.duration_s, *ends, *instants})
    waiting, active = 0, list[StepSpan]()
    for start, end in pairwise([*times, times[-1]]):
        active = [span for span in active if span.end_s > start]
        while waiting < len(lasting) and lasting[waiting].start_s <= start:
            active.append(lasting[waiting])
            waiting += 1
        numbers = tuple(span.number for span in active)
        for number in instants.get(start, ()):
            beside = tuple(one.number for one in active if one.start_s < start)
            yield Cell(block.index, float(start), float(start), 0.0, INSTANT, (*beside, number))
        if end > start:
            seconds = float(end - start)
            yield Cell(block.index, float(start), float(end), 0.0, _height(seconds), numbers)
    if not block.spans and block.duration_s == 0:
        yield Cell(block.index, 0.0, 0.0, 0.0, INSTANT, ())


def _height(seconds: float) -> float:
    decades = math.log10(max(seconds, _SHORT_S) / _SHORT_S)
    return min(SHORTEST + PER_DECADE * decades, TALLEST)


def _shared(cells: Sequence[Cell], together: int) -> Iterator[Cell]:
    """Rows joined to as many as `together`, never over a wait or the end of a block."""
    for found in _by_block(cells).values():
        rows = [cell for cell in found if not cell.wait]
        yield from (cell for cell in found if cell.wait)
        for at in range(0, len(rows), together):
            some = rows[at : at + together]
            numbers = tuple(dict.fromkeys(number for cell in some for number in cell.numbers))
            height = sum(cell.bottom for cell in some)
            yield Cell(some[0].block, some[0].start_s, some[-1].end_s, 0.0, height, numbers)


def _by_block(cells: Sequence[Cell]) -> Mapping[int, list[Cell]]:
    found: dict[int, list[Cell]] = {}
    for cell in cells:
        found.setdefault(cell.block, []).append(cell)
    return found


def _knots(cells: Sequence[Cell]) -> tuple[Floats, Floats, Floats]:
    """Times at which rows meet, rising; the places above and below what happens at each."""
    found: dict[float, tuple[float, float]] = {}
    for cell in cells:
        if cell.wait:
            continue
        above, _ = found.get(cell.start_s, (cell.top, cell.top))
        if cell.end_s > cell.start_s:
            found[cell.start_s] = above, cell.top
            found[cell.end_s] = cell.bottom, cell.bottom
        else:
            found[cell.start_s] = above, cell.bottom
    places = np.array(list(found.values()))
    return np.array(list(found)), places[:, 0], places[:, 1]


def _parts(timeline: Timeline, cells: Sequence[Cell]) -> Iterator[Part]:
    begun: list[tuple[str, Cell, int]] = []
    seen: set[int] = set()
    for cell in cells:
        for number in cell.numbers:
            if number in seen:
                continue
            seen.add(number)
            label = timeline.origins[number].label
            # Lanes of one `alongside` bear its label each; that is one part.
            if not begun or (label and label != begun[-1][0]):
                begun.append((label, cell, number))
    ends = [first for _, first, _ in begun[1:]]
    for (label, first, number), after in zip(begun, [*ends, None], strict=True):
        last = cells[-1] if after is None else _row_before(cells, after)
        yield Part(
            label,
            first.block,
            first.start_s,
            last.block,
            last.end_s,
            first.top,
            last.bottom,
            number,
        )


def _row_before(cells: Sequence[Cell], after: Cell) -> Cell:
    rows = [cell for cell in cells if cell.bottom <= after.top and not cell.wait]
    return rows[-1] if rows else after
