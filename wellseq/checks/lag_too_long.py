"""An output lags behind what it is asked for, compared with the time it has to move."""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction

from wellseq.base.finding import Mistake, Reading, at_most
from wellseq.checks.case import Case, reached
from wellseq.checks.keeping import numbered, telling
from wellseq.checks.pieces import durations_s
from wellseq.checks.written import mistakes_named
from wellseq.model.trap import Converter
from wellseq.timeline.timeline import Shape

SAYS = "An output's filter and delay take too long a share of the time in which it moves."
NEEDS = ("trap", "timeline")
WAIVABLE = True

SHARE = Fraction(1, 10)
"""House default: the most that time constant and delay may take of a motion's time."""


def read(case: Case) -> Iterator[Reading | Mistake]:
    """For each motion of an output: time constant plus delay, s, against a tenth of its time."""
    yield from mistakes_named(case, "lag-too-long")
    lags = {
        output.name: float(output.time_constant_s + output.delay_s)
        for output in reached(case.trap).outputs
        if isinstance(output, Converter)
    }
    for block in reached(case.timeline).blocks:
        # An edge is as fast as its output can be; its lag is counted in its window.
        pieces = [piece for piece in block.pieces if piece.shape is not Shape.EDGE]
        values = [lags[piece.output] for piece in pieces]
        bounds = durations_s(pieces, SHARE)
        groups = numbered(piece.output for piece in pieces)
        steps = [piece.number for piece in pieces]
        for index in telling(at_most(0.0, "s"), values, values, groups, steps, bounds):
            piece = pieces[index]
            yield Reading(
                value=values[index],
                limit=at_most(bounds[index], "s"),
                message=(
                    f"{piece.output} lags {{value}} behind (time constant and delay) while it "
                    f"moves; at most {{limit}}, a tenth of that motion's time"
                ),
                origin=case.origin(piece.number),
                subject=piece.output,
                block=block.name,
                window_s=(float(piece.start_s), float(piece.end_s)),
                hint="move it more slowly, or use an output with a faster filter",
            )
