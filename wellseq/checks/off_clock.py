"""An edge is moved too far when it is rounded to its output's clock.

Each instant is rounded once, to the nearest whole clock.  How far that may be depends on what it is
for: a hundredth of the step that begins or ends there; a tenth of the edge itself where an instant
after a trigger was asked for, and for a switch never less than that, since its edge is no sharper.
A step that takes no time is measured against the shorter of the steps it stands between.
"""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction

from wellseq.base.finding import Mistake, Reading, at_most
from wellseq.checks.case import Case, reached
from wellseq.checks.keeping import numbered, telling
from wellseq.checks.written import mistakes_named
from wellseq.model.effects import Caught
from wellseq.model.trap import Switch, Trap
from wellseq.timeline.shipped import Rounding
from wellseq.timeline.timeline import Block

SAYS = "An instant does not fall on its output's clock, and rounding moves it too far."
NEEDS = ("trap", "timeline", "shipped")
WAIVABLE = True

SHARE_OF_STEP = Fraction(1, 100)
"""House default: the most that rounding may take of the step's time."""
SHARE_OF_EDGE = Fraction(1, 10)
"""House default: the most that rounding may take of the time of an edge."""


def read(case: Case) -> Iterator[Reading | Mistake]:
    """How far every edge is moved by its clock, s, against what its step can bear, s."""
    yield from mistakes_named(case, "off-clock")
    for shipped in reached(case.shipped).blocks:
        roundings = shipped.roundings
        bearable = _Bearable(reached(case.trap), shipped.block)
        errors = [_size_s(rounding) for rounding in roundings]
        bounds = [bearable.error_s(rounding) for rounding in roundings]
        groups = numbered(rounding.output for rounding in roundings)
        steps = [rounding.number for rounding in roundings]
        for index in telling(at_most(0.0, "s"), errors, errors, groups, steps, bounds):
            rounding = roundings[index]
            yield Reading(
                value=errors[index],
                limit=at_most(bounds[index], "s"),
                message=(
                    f"the clock of {rounding.output} moves this instant by {{value}}, "
                    "at most {limit} here"
                ),
                origin=case.origin(rounding.number),
                subject=rounding.output,
                block=shipped.block.name,
                window_s=(float(rounding.asked_s), float(rounding.emitted_s)),
                hint="write times that are whole clocks of the output, or longer ones",
            )


def _size_s(rounding: Rounding) -> float:
    same = rounding.asked_s == rounding.emitted_s
    return 0.0 if same else abs(float(rounding.error_s))


class _Bearable:
    """How far the edges of each step of a block may be moved."""

    def __init__(self, trap: Trap, block: Block) -> None:
        self.trap = trap
        self.edge_s = {
            output.name: float(output.edge_s * SHARE_OF_EDGE)
            for output in trap.outputs
            if isinstance(output, Switch)
        }
        self.caught = {e.number for e in block.events if isinstance(e.effect, Caught)}
        self.rises_s = {
            (piece.number, piece.output): float((piece.end_s - piece.start_s) * SHARE_OF_EDGE)
            for piece in block.pieces
            if piece.number in self.caught
        }
        self.steps_s: dict[int, float] = {}
        shortest: dict[tuple[str, Fraction], float] = {}
        empty: list[tuple[int, Fraction]] = []
        for span in block.spans:
            if span.end_s == span.start_s:
                empty.append((span.number, span.start_s))
                continue
            share = float((span.end_s - span.start_s) * SHARE_OF_STEP)
            self.steps_s[span.number] = share
            for key in (("begins", span.start_s), ("ends", span.end_s)):
                shortest[key] = min(share, shortest.get(key, share))
        for number, time in empty:
            beside = [shortest.get(("ends", time)), shortest.get(("begins", time))]
            self.steps_s[number] = min((one for one in beside if one is not None), default=0.0)

    def error_s(self, rounding: Rounding) -> float:
        """The largest error of rounding that its step can bear, s."""
        edge = self.edge_s.get(rounding.output)
        if rounding.number in self.caught:
            rise = self.rises_s.get((rounding.number, rounding.output))
            return edge if edge is not None else rise if rise is not None else 0.0
        step = self.steps_s.get(rounding.number, 0.0)
        return max(step, edge) if edge is not None else step
