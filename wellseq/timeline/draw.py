"""Sequence → Timeline: play the items in order on a drawing; lanes begin together."""

from __future__ import annotations

from collections.abc import Callable, Iterable

from wellseq.fields.field import Field
from wellseq.model.sequence import Lanes, Played, Sequence
from wellseq.timeline.drawing import Drawing
from wellseq.timeline.timeline import Timeline


def draw(sequence: Sequence, field_of: Callable[[], Field]) -> Timeline:
    """Draw a whole sequence.

    `field_of` gives the field of the trap; it is asked only by steps that solve for voltages.
    What cannot be drawn is in the timeline's `mistakes`, at its step.
    """
    drawing = Drawing(sequence.trap, sequence.clouds, field_of)
    _play(drawing, sequence.items)
    return drawing.finish()


def _play(drawing: Drawing, items: Iterable[Played | Lanes]) -> None:
    for item in items:
        if isinstance(item, Played):
            drawing.play(item)
        else:
            _play_lanes(drawing, item)


def _play_lanes(drawing: Drawing, lanes: Lanes) -> None:
    start = drawing.now
    ends = [start]
    alongside = drawing.owners.enter()
    for lane in lanes.lanes:
        drawing.now = start
        _play(drawing, lane)
        ends.append(drawing.now)
        alongside.next_lane()
    drawing.owners.leave()
    drawing.now = max(ends)
