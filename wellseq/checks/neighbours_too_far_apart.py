"""Two electrodes side by side stand further apart in voltage than their gap bears.

On a segment of the motion the wished voltages are base + Σ p_k moves_k with every p_k from 0 to 1,
so that the difference of two electrodes, being affine in each p_k, is greatest in size where each
p_k is 0 or 1.  With one progress both ends are surely reached; with several, the ends of the
segment are, and the worst corner may be.  What the electrodes may differ from their wish is the
uncertainty.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from wellseq.base.finding import Mistake, Reading, at_most
from wellseq.checks.case import Case, reached
from wellseq.checks.keeping import Floats, figures, telling
from wellseq.checks.numbers import amount
from wellseq.checks.written import mistakes_named
from wellseq.model.trap import Trap
from wellseq.timeline.deviations import Carry
from wellseq.timeline.motion import Segment, segments
from wellseq.timeline.timeline import Block

SAYS = "Adjacent electrodes stand further apart in voltage than the trap file allows."
NEEDS = ("trap", "timeline", "shipped")
WAIVABLE = False


@dataclass(frozen=True, slots=True)
class _Span:
    """Differences of all adjacent pairs on one segment: (electrodes − 1,) in V."""

    number: int
    window_s: tuple[float, float]
    surely_V: Floats
    perhaps_V: Floats


def read(case: Case) -> Iterator[Reading | Mistake]:
    """The greatest difference, V, of each two adjacent electrodes on each stretch of motion."""
    yield from mistakes_named(case, "neighbours-too-far-apart")
    trap = reached(case.trap)
    if len(trap.electrodes) < 2:
        return
    carry = Carry()
    for shipped in reached(case.shipped).blocks:
        drives = _Drives(trap, shipped.block)
        spans = [_span(one, drives) for one in segments(trap, shipped, carry)]
        if spans:
            yield from _of_block(case, shipped.block.name, spans)


def _span(segment: Segment, drives: _Drives) -> _Span:
    base = np.diff(segment.base)
    moves = np.diff(segment.moves, axis=1)
    drive = drives.pairs_V(segment)
    low = base + np.minimum(moves, 0).sum(axis=0)
    high = base + np.maximum(moves, 0).sum(axis=0)
    perhaps = figures(np.maximum(np.abs(low), np.abs(high)) + drive)
    if len(moves) > 1:
        surely = figures(np.maximum(np.abs(base), np.abs(base + moves.sum(axis=0))) + drive)
    else:
        surely = perhaps
    errors = segment.deviation_V()
    error = errors[:-1] + errors[1:]
    window = (float(segment.start_s), float(segment.end_s))
    return _Span(segment.number, window, np.maximum(surely - error, 0), perhaps + error)


class _Drives:
    """The rotating drives of a block: what they add to the differences at their rings."""

    def __init__(self, trap: Trap, block: Block) -> None:
        self.columns = {electrode.name: i for i, electrode in enumerate(trap.electrodes)}
        self.drives = block.drives
        self.first = 0

    def pairs_V(self, segment: Segment) -> Floats:
        """(electrodes − 1,) V: zero-to-peak of the drives that run during a segment."""
        added = np.zeros(len(self.columns))
        while self.first < len(self.drives) and (self.drives[self.first].stop_s <= segment.start_s):
            self.first += 1
        for drive in self.drives[self.first :]:
            if drive.start_s >= segment.end_s:
                break
            if drive.stop_s > segment.start_s:
                added[self.columns[drive.ring]] = drive.amplitude_V
        pairs: Floats = added[:-1] + added[1:]
        return pairs


def _of_block(case: Case, block: str, spans: list[_Span]) -> Iterator[Reading]:
    trap = reached(case.trap)
    pairs = list(pairwise(electrode.name for electrode in trap.electrodes))
    bounds = figures([trap.margins.difference_V(*pair) for pair in pairs])
    low = np.stack([span.surely_V for span in spans])
    high = np.stack([span.perhaps_V for span in spans])
    groups = np.broadcast_to(np.arange(len(pairs)), low.shape)
    steps = np.broadcast_to(np.array([[span.number] for span in spans]), low.shape)
    limits = np.broadcast_to(bounds, low.shape)
    flat = [array.ravel() for array in (low, high, groups, steps, limits)]
    for index in telling(at_most(0.0, "V"), *flat):
        row, pair = divmod(index, len(pairs))
        span, (one, other) = spans[row], pairs[pair]
        least, most = float(span.surely_V[pair]), float(span.perhaps_V[pair])
        yield Reading(
            value=(least + most) / 2,
            uncertainty=(most - least) / 2,
            between=(least, most),
            limit=at_most(float(bounds[pair]), "V"),
            message=(
                f"{one} and {other} side by side stand up to {amount(most, 'V')} apart, "
                "at most {limit}"
            ),
            origin=case.origin(span.number),
            subject=f"{one}, {other}",
            block=block,
            window_s=span.window_s,
            hint="move them together, or let the electrode between them share the difference",
        )
