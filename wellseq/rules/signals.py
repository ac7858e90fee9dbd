"""Atoms of conditions → when each is surely true and when it may be, stretch by stretch.

Lines are as shipped; an input is known from an `expect` on and not before.  A step lasts from the
first of its emitted edges to the last; one that takes no time is an instant.  Voltages and clouds
are known within bounds, so that between surely and not there is a time of not knowing.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property

import numpy as np

from wellseq.model import rulebook as book
from wellseq.rules.axis import Axis
from wellseq.rules.course import Course, Sets, compare, constant, less
from wellseq.rules.crowds import Crowds
from wellseq.rules.cuts import NOTHING, Cuts, after, before, joined
from wellseq.rules.outputs import Outputs
from wellseq.rules.slews import Slews
from wellseq.timeline.shipped import Shipped
from wellseq.wells.wells import Wells


@dataclass(frozen=True, slots=True)
class Truth:
    """Per stretch, in its own time: where an atom is surely true, may be true, is not known."""

    surely: tuple[Cuts, ...]
    perhaps: tuple[Cuts, ...]
    unknown: tuple[Cuts, ...] = ()


@dataclass(frozen=True, slots=True)
class Span:
    """One step or drive: stretch, start and end in its units; `instant` when it takes no time.

    `number` is the step's.
    """

    stretch: int
    start: int
    end: int
    number: int
    instant: bool = False


class Signals:
    """What is true when, found out once per atom."""

    def __init__(self, axis: Axis, shipped: Shipped, wells: Wells) -> None:
        self.axis, self.shipped, self.wells = axis, shipped, wells
        self.timeline = axis.timeline
        self.outputs, self.slews = Outputs(axis, shipped), Slews(axis, shipped)
        self._truths: dict[book.Atom, Truth] = {}
        self._courses: dict[book.Quantity, tuple[Course, ...]] = {}
        self._spans: dict[book.Atom, tuple[Span, ...]] = {}

    @cached_property
    def crowds(self) -> Crowds:
        """The clouds, looked at when a rule speaks of them."""
        return Crowds(self.axis, self.wells)

    def truth(self, atom: book.Atom) -> Truth:
        """When an atom is true."""
        if atom not in self._truths:
            self._truths[atom] = self._found(atom)
        return self._truths[atom]

    def spans(self, atom: book.Playing | book.Driven) -> tuple[Span, ...]:
        """The single steps or drives behind an atom, in order of time."""
        if atom not in self._spans:
            found = self._steps(atom) if isinstance(atom, book.Playing) else self._drives(atom)
            self._spans[atom] = tuple(sorted(found, key=lambda one: (one.stretch, one.start)))
        return self._spans[atom]

    def course(self, quantity: book.Voltage | book.Slew | book.Difference) -> tuple[Course, ...]:
        """The bounds of a quantity of electrodes, one course per stretch."""
        if quantity not in self._courses:
            output = self.timeline.trap.electrode(quantity.electrode).output
            match quantity:
                case book.Voltage():
                    found = self.outputs.of(output)
                case book.Slew():
                    found = self.slews.of(output)
                case book.Difference(_, other):
                    away = self.timeline.trap.electrode(other).output
                    found = self._difference(output, away)
            self._courses[quantity] = found
        return self._courses[quantity]

    def _difference(self, output: str, other: str) -> tuple[Course, ...]:
        if output == other:
            return tuple(constant((0.0, 0.0), one.longest) for one in self.axis.stretches)
        pairs = zip(self.outputs.of(output), self.outputs.of(other), strict=True)
        return tuple(less(one, away) for one, away in pairs)

    def _found(self, atom: book.Atom) -> Truth:
        match atom:
            case book.Comparison(quantity):
                if isinstance(quantity, book.OfClouds):
                    return self._of_clouds(atom, quantity)
                sets = [
                    compare(one, atom.relation, atom.low, atom.high)
                    for one in self.course(quantity)
                ]
                return Truth(tuple(one[0] for one in sets), tuple(one[1] for one in sets))
            case book.LineIn(line, state):
                if self.timeline.trap.line(line).kind == "input":
                    return self._expected(line, state)
                return _certain(self._shipped_line(line, state))
            case book.Playing() | book.Driven():
                return _certain(self._of_spans(self.spans(atom)))
            case book.Awaiting(trigger):
                return _certain(self._stretches(waits=True, block=trigger))
            case book.InBlock(name):
                return _certain(self._stretches(waits=False, block=name))

    # lines

    def _shipped_line(self, line: str, state: str) -> Iterator[Cuts]:
        wanted = self.timeline.trap.line(line).states.index(state)
        column = self.shipped.lines.index(line)
        for stretch in self.axis.stretches:
            rows = self.shipped.blocks[stretch.index - (1 if stretch.waits else 0)]
            states = rows.states[:, column]
            if stretch.waits:
                there = int(states[-1]) == wanted
                yield (before(0), after(stretch.longest)) if there else NOTHING
                continue
            tick = self.axis.units(rows.tick_s)
            edges = np.flatnonzero(np.diff(np.concatenate(([False], states == wanted, [False]))))
            yield joined(
                (
                    before(int(rows.ticks[first]) * tick),
                    before(int(rows.ticks[last]) * tick)
                    if last < len(states)
                    else after(stretch.longest),
                )
                for first, last in zip(edges[::2].tolist(), edges[1::2].tolist(), strict=True)
            )

    def _expected(self, line: str, state: str) -> Truth:
        """An input, from each `expect` on until the next one that says otherwise."""
        surely: list[Cuts] = []
        perhaps: list[Cuts] = []
        unknown: list[Cuts] = []
        present: str | None = None
        for stretch in self.axis.stretches:
            changes = (
                []
                if stretch.waits
                else [
                    (self.axis.units(change.time_s), change.state)
                    for change in self.timeline.blocks[stretch.index].changes
                    if change.line == line and change.expected
                ]
            )
            held: list[tuple[int, str | None]] = [(0, present), *changes]
            ends = [*(before(time) for time, _ in held[1:]), after(stretch.longest)]
            pairs = [
                (before(time), end, said) for (time, said), end in zip(held, ends, strict=True)
            ]
            surely.append(joined((a, b) for a, b, said in pairs if said == state))
            unknown.append(joined((a, b) for a, b, said in pairs if said is None))
            perhaps.append(joined((a, b) for a, b, said in pairs if said in (state, None)))
            present = held[-1][1]
        return Truth(tuple(surely), tuple(perhaps), tuple(unknown))

    # happenings

    def _steps(self, atom: book.Playing) -> Iterator[Span]:
        origins = self.timeline.origins
        for number, stretch in enumerate(self.axis.stretches):
            if stretch.waits:
                continue
            emitted: dict[tuple[int, Fraction], list[Fraction]] = {}
            for one in self.shipped.blocks[stretch.index].roundings:
                emitted.setdefault((one.number, one.asked_s), []).append(one.emitted_s)
            for span in self.timeline.blocks[stretch.index].spans:
                origin = origins[span.number]
                if (atom.verb and origin.step != atom.verb) or (
                    atom.label and origin.label != atom.label
                ):
                    continue
                start_s = min(emitted.get((span.number, span.start_s), [span.start_s]))
                end_s = max(emitted.get((span.number, span.end_s), [span.end_s]))
                start, end = self.axis.units(start_s), self.axis.units(end_s)
                yield Span(number, start, end, span.number, start >= end)

    def _drives(self, atom: book.Driven) -> Iterator[Span]:
        for number, stretch in enumerate(self.axis.stretches):
            if not stretch.waits:
                for drive in self.timeline.blocks[stretch.index].drives:
                    if atom.ring in ("", drive.ring):
                        start, stop = map(self.axis.units, (drive.start_s, drive.stop_s))
                        yield Span(number, start, stop, drive.number)

    def _of_spans(self, spans: tuple[Span, ...]) -> Iterator[Cuts]:
        for number in range(len(self.axis.stretches)):
            yield joined(
                (before(one.start), after(one.start) if one.instant else before(one.end))
                for one in spans
                if one.stretch == number
            )

    def _stretches(self, waits: bool, block: str) -> Iterator[Cuts]:
        for stretch in self.axis.stretches:
            trigger = self.timeline.blocks[stretch.index].trigger
            there = stretch.waits is waits and (not block or block == (trigger or "run"))
            yield (before(0), after(stretch.longest)) if there else NOTHING

    # clouds

    def _of_clouds(self, atom: book.Comparison, quantity: book.OfClouds) -> Truth:
        found: list[tuple[list[Cuts], list[Cuts], list[Cuts]]] = [
            ([], [], []) for _ in self.axis.stretches
        ]
        for one in self.crowds.of(quantity):
            sure, maybe = _compared(atom, one.low, one.high)
            end = after(one.end) if self.axis.stretches[one.stretch].waits else before(one.end)
            if self._is_end(one.stretch, one.end):
                end = after(one.end)
            span = before(one.start), end
            surely, perhaps, unknown = found[one.stretch]
            if sure and one.there:
                surely.append(span)
            if maybe:
                perhaps.append(span)
            if not one.known:
                unknown.append(span)
        sets = [tuple(joined(_pairs(cuts)) for cuts in stretch) for stretch in found]
        columns = tuple(zip(*sets, strict=True))
        return Truth(columns[0], columns[1], columns[2])

    def _is_end(self, stretch: int, time: int) -> bool:
        return stretch == self.axis.ends_at and time == self.axis.stretches[stretch].longest


def _pairs(spans: list[Cuts]) -> Iterator[tuple[int, int]]:
    yield from ((span[0], span[1]) for span in spans)


def _compared(atom: book.Comparison, low: float, high: float) -> tuple[bool, bool]:
    """Whether all of an interval is in a relation to the bounds, and whether some of it may be."""
    sets: Sets = compare(constant((low, high), 1), atom.relation, atom.low, atom.high)
    return bool(sets[0]), bool(sets[1])


def _certain(sets: Iterator[Cuts]) -> Truth:
    known = tuple(sets)
    return Truth(known, known)
