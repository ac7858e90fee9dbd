"""Timeline, Shipped, Wells → Forecast: a ledger of every cloud, step by step.

Steps are taken in the order in which they end.  What a step says of a cloud is acted on by the
handler of that effect: the file of `handlers/` named like the effect.  Every other cloud ages and
follows its well (passing.py).  At the end of each step that takes time every cloud gets a row, and
the least depth since the row before is judged with the space charge taken off.

A figure that goes missing is noted once, where it arises; what needs it afterwards only cites it.
A measured value (`assume`) puts it back; one that follows at once, before any time has passed,
settles the matter.

Intervals: every input at its ends, where a model is monotone; the rows say "corners".  Nothing is
drawn by chance.  Units: those of forecast.UNITS; s of the block.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace
from fractions import Fraction
from typing import Literal

from wellseq.clouds import handlers, passing
from wellseq.clouds.beings import KEPT, Being, Homes
from wellseq.clouds.figures import NOT_KNOWN, Figure, Outside
from wellseq.clouds.forecast import Asked, Forecast, Gap, Measured, Row
from wellseq.clouds.intervals import plus
from wellseq.clouds.memory import Memory
from wellseq.clouds.rest import Bench, Settled, kT_left
from wellseq.clouds.voltages import Voltages
from wellseq.fields.field import Field
from wellseq.model.effects import Effect
from wellseq.timeline.shipped import Shipped, ShippedBlock
from wellseq.timeline.timeline import Event, StepSpan, Timeline
from wellseq.wells.wells import Held, Wells

LOWERED_FACTOR = 4.0
"""Depth over temperature after an evaporation, until the well is raised again."""
RAISED = 1.2
"""A well is raised again when it is this many times as deep as it was lowered to."""
TOLD_ELSEWHERE = {"well-overfull", "too-dense"}


def forecast(timeline: Timeline, shipped: Shipped, wells: Wells, field: Field) -> Forecast:
    """What becomes of every cloud; a cloud that could not be followed ends there."""
    trap = timeline.trap
    parts = [(item.name, item.from_m, item.to_m, item.radius_m) for item in trap.electrodes]
    memory = Memory(repr((parts, trap.field.along, trap.bore)))
    ledger = Ledger(timeline, shipped, wells, Bench(trap, field, memory))
    for block in shipped.blocks:
        ledger.play(block)
    memory.keep()
    return Forecast(
        tuple(ledger.rows), tuple(ledger.measured), tuple(ledger.gaps), tuple(ledger.asked)
    )


class Ledger:
    """All clouds while time goes on, and everything foretold so far."""

    def __init__(self, timeline: Timeline, shipped: Shipped, wells: Wells, bench: Bench) -> None:
        self.timeline, self.shipped, self.bench = timeline, shipped, bench
        self.trap, self.field, self.memory = timeline.trap, bench.field, bench.memory
        self.homes = Homes(wells.held)
        self.beings: dict[str, Being] = {}
        self.rows: list[Row] = []
        self.measured: list[Measured] = []
        self.gaps: list[Gap] = []
        self.asked: list[Asked] = []
        self.played: ShippedBlock = shipped.blocks[0]
        self.volts = Voltages(self.trap, self.played.block)
        self.span = StepSpan(-1, Fraction(0), Fraction(0))
        self.before: dict[str, Figure] = {}
        self.settled: dict[str, Settled] = {}

    # in order of time

    def play(self, shipped: ShippedBlock) -> None:
        """Go through one block, step by step."""
        block = shipped.block
        self.played, self.volts = shipped, Voltages(self.trap, block)
        for being in self.beings.values():
            being.block, being.at_s = block.index, Fraction(0)
            if block.trigger and block.within_s:
                wait = Figure(*(float(block.within_s) * share for share in (0.5, 0.0, 1.0)))
                self.span = StepSpan(-1, Fraction(0), Fraction(0))
                passing.age(self, being, wait)
        by_step: dict[int, list[Event]] = {}
        for event in block.events:
            by_step.setdefault(event.number, []).append(event)
        for span in sorted(block.spans, key=lambda span: (span.end_s, span.number)):
            self.span = span
            self._step([event.effect for event in by_step.get(span.number, [])])

    def _step(self, effects: Sequence[Effect]) -> None:
        acted: set[str] = set()
        self.before = {name: one.figures["temperature"] for name, one in self.beings.items()}
        for effect in effects:
            handler = handlers.handler_of(effect)
            if handler is not None:
                acted |= handler(self, effect)
        for being in list(self.beings.values()):
            if being.name in acted or being.at_s >= self.span.end_s:
                continue
            passing.follow(self, being, self.span.end_s)
        if self.span.end_s > self.span.start_s:
            for being in list(self.beings.values()):
                self._row(being)

    # what handlers use

    @property
    def block(self) -> int:
        """The index of the block being played."""
        return self.played.block.index

    @property
    def duration(self) -> Figure:
        """How long the present step lasts, s."""
        length = float(self.span.end_s - self.span.start_s)
        return Figure(length, length, length)

    def catch_up(self, being: Being, until_s: Fraction) -> None:
        """Let a cloud pass the time up to an instant (s) that no handler has taken."""
        if being.at_s < until_s:
            passing.follow(self, being, until_s)

    def company(self, being: Being, time_s: Fraction) -> list[Being]:
        """All clouds of its well that have a number, a radius and a temperature; itself first."""
        here = self.homes.at(being.name, self.block, time_s)
        found = [being]
        if here is not None:
            found += [
                one
                for one in self.beings.values()
                if one is not being
                and one.complete
                and self.homes.together(here, self.homes.at(one.name, self.block, time_s))
            ]
        return found

    def neighbours(self, being: Being) -> list[Being]:
        """Every cloud that shares its well now, whatever is known of it; itself first."""
        here = self.homes.at(being.name, self.block, self.span.end_s)
        others = [one for one in self.beings.values() if one is not being]
        if here is None:
            return [being]
        at = self.span.end_s
        shared = (
            one
            for one in others
            if self.homes.together(here, self.homes.at(one.name, self.block, at))
        )
        return [being, *shared]

    def settle(self, being: Being, time_s: Fraction) -> Settled | None:
        """The cloud at rest at an instant (s); None when it is nowhere or not known enough."""
        held = self.homes.at(being.name, self.block, time_s)
        place = self.homes.place_m(being.name, self.block, time_s)
        if held is None or place is None or not being.complete:
            return None
        return self._settled(being, held, place, time_s)

    def _settled(self, being: Being, held: Held, place_m: float, time_s: Fraction) -> Settled:
        company, vector = self.company(being, time_s), self.volts.at(time_s)
        found = self.bench.settle(being, company, vector, place_m, held)
        now = (vector.tobytes(), being.figures["number"], being.figures["radius"])
        if being.locked is None or being.locked[1:] != now or found.outside:
            return found
        return self.bench.locked(being, found, being.locked[0], place_m)

    def measure(
        self,
        check: str,
        being: Being,
        low: float,
        high: float,
        unit: str,
        words: str,
        limit: float = math.nan,
        hint: str = "",
    ) -> None:
        """Something for a check to judge, of the present step."""
        window = float(self.span.start_s), float(self.span.end_s)
        place = self.block, self.span.number
        self.measured.append(
            Measured(check, being.name, *place, *window, low, high, unit, words, limit, hint)
        )

    def lose(
        self, being: Being, quantities: Sequence[str], reasons: Sequence[Outside], told: str = ""
    ) -> None:
        """Figures of a cloud go missing here, for these reasons; one that is missing stays so.

        One that was never declared counts as going missing where a step asks for it.
        """
        for quantity in quantities:
            if quantity in being.gap:
                continue
            being.figures[quantity] = NOT_KNOWN
            being.gap[quantity] = len(self.gaps)
            being.lost[quantity] = f"the {quantity} of {being.name} is not known{self._since()}"
            window = float(self.span.start_s), float(self.span.end_s)
            place = self.block, self.span.number
            self.gaps.append(Gap(quantity, being.name, *place, *window, tuple(reasons), told))

    def _since(self) -> str:
        if not 0 <= self.span.number < len(self.timeline.origins):
            return ""
        origin = self.timeline.origins[self.span.number]
        label = f' ("{origin.label}")' if origin.label else ""
        return f" since line {origin.place.line}{label}"

    def assume(self, being: Being, quantity: str, figure: Figure) -> None:
        """A measured value takes the place of a figure; a gap of this very instant is settled."""
        index = being.gap.get(quantity)
        if index is not None:
            gap = self.gaps[index]
            if (gap.block, gap.end_s) == (self.block, float(being.at_s)):
                self.gaps[index] = replace(gap, replaced=True)
        being.know(quantity, figure)

    def write(
        self,
        being: Being,
        figures: dict[str, Figure],
        model: str,
        outside: Sequence[Outside] = (),
        spread: Literal["declared", "corners", "samples"] = "corners",
    ) -> None:
        """A row of its own for a cloud that comes, goes or is opened in this step."""
        known = {quantity: being.figures[quantity] for quantity in KEPT}
        window = float(self.span.start_s), float(self.span.end_s)
        self.rows.append(
            Row(
                being.name,
                self.block,
                self.span.number,
                *window,
                {**known, **figures},
                (model,),
                spread,
                tuple(outside),
                being.cites(),
            )
        )

    # rows

    def _row(self, being: Being) -> None:
        end_s = self.span.end_s
        if self.homes.at(being.name, self.block, end_s) is None:
            hot = self.homes.hot(being.name, self.block, self.span.number)
            if not hot and being.came != (self.block, end_s):
                self.beings.pop(being.name)
            return
        found = self.settle(being, end_s)
        if found is None:
            self.settled.pop(being.name, None)
            self.write(being, {}, "none", spread="declared")
            return
        self.write(being, found.figures, found.model, found.outside)
        self._judge(being, found)
        self._judge_least(being, found)
        self.settled[being.name] = found

    def _judge_least(self, being: Being, at_end: Settled) -> None:
        """The least depth of the step, with the space charge of the cloud at the nearer end."""
        span = self.span
        least = self.homes.least(being.name, self.block, span.start_s, span.end_s)
        if least is None or at_end.outside or not at_end.figures["depth_left"].known:
            return
        margin = self.trap.margins.depth_over_temperature
        if being.lowered_V is not None:
            margin = min(margin, LOWERED_FACTOR)
            if at_end.certified_V > RAISED * being.lowered_V:
                being.lowered_V = None
        at_s = min(least.left, least.right, key=lambda side: side.certified_V).at_s
        early = at_s - float(span.start_s) < float(span.end_s) - at_s
        near, warm = at_end, being.figures["temperature"]
        if early and self.before.get(being.name, NOT_KNOWN).known:
            # A cloud is coldest and longest where its well is shallowest: that of the nearer end.
            before = self.settled.get(being.name, at_end)
            near, warm = at_end if before.outside else before, self.before[being.name]
        shallower_V = max(near.certified_V - least.certified_V, 0.0)
        left = plus(near.figures["depth_left"], Figure(*(-shallower_V,) * 3))
        left = kT_left(left, being, warm)
        self.measure(
            "well-too-shallow",
            being,
            left.low,
            left.high,
            "kT",
            f"by the forecast, space charge taken off, the well of {being.name} is {{value}} deep",
            margin,
            "a deeper well, a colder cloud or fewer particles",
        )

    def _judge(self, being: Being, found: Settled) -> None:
        from wellseq.clouds.at_rest import BRILLOUIN_SHARE, DECREMENT, FINDINGS

        name = being.name
        left = found.kT_left
        others = [reason for reason in found.outside if reason.quantity not in FINDINGS]
        if left.known:
            self.measure(
                "well-overfull",
                being,
                left.low,
                left.high,
                "kT",
                f"the charges in the well of {name} leave {{value}} of its depth",
                hint="fewer particles, a wider cloud or a deeper well",
            )
        dense = [reason for reason in found.outside if reason.quantity == BRILLOUIN_SHARE]
        share = found.brillouin_share
        if dense:
            share = Figure(*(dense[0].value,) * 3)
        if share.known:
            self.measure(
                "too-dense",
                being,
                share.low,
                share.high,
                "",
                f"{name} is at {{value}} of the greatest density that the field can hold",
                hint="a wider cloud, fewer particles or a stronger field",
            )
        unsettled = [reason for reason in found.outside if reason.quantity == DECREMENT]
        for reason in unsettled:
            self.measure(
                "field-not-settled",
                being,
                reason.value,
                reason.value,
                "",
                f"the equilibrium of {name} has not settled: its decrement is {{value}}",
            )
        if others:
            self._unsettled(being, others)

    def _unsettled(self, being: Being, reasons: Sequence[Outside]) -> None:
        """Depth and density could not be worked out: said once, until they are known again."""
        window = float(self.span.start_s), float(self.span.end_s)
        before = [gap for gap in self.gaps if (gap.cloud, gap.quantity) == (being.name, "depth")]
        if before and before[-1].outside == tuple(reasons):
            return
        place = self.block, self.span.number
        self.gaps.append(Gap("depth", being.name, *place, *window, tuple(reasons)))
