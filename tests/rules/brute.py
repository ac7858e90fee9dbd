"""The meaning of rules once more, by looking at every instant that could matter.

Shares nothing with `wellseq.rules`: a run is a row of samples, four to a step of the grid, so that
there is one at every instant at which anything can change and one between each two.  A set of
instants is a whole number with a bit per sample.  Every wait is tried, in half steps.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from functools import cached_property
from itertools import pairwise, product

from brute_stretches import closing, opening, stretches

from wellseq.model import rulebook as book
from wellseq.timeline.shipped import Shipped
from wellseq.timeline.timeline import Block, Timeline

PER_STEP = 4
PAD = 24 * PER_STEP
Masks = tuple[int, int]
"""Samples at which something is surely so, and at which it may be so."""


@dataclass(frozen=True)
class Sampled:
    """A run: which block (or wait) each sample is in, and which sample of it."""

    timeline: Timeline
    shipped: Shipped
    step_s: Fraction
    places: tuple[tuple[int, bool, int], ...]

    @cached_property
    def inside(self) -> int:
        """All samples of the run itself."""
        return ((1 << len(self.places)) - 1) << PAD

    @cached_property
    def everywhere(self) -> int:
        """All samples, those beyond the run too."""
        return (1 << (len(self.places) + 2 * PAD)) - 1

    @cached_property
    def odd(self) -> int:
        """The samples that lie between two instants at which something can change."""
        return sum(1 << bit for bit in range(1, len(self.places) + 2 * PAD, 2))


def runs(timeline: Timeline, shipped: Shipped, step_s: Fraction) -> Iterator[Sampled]:
    """Every run: all waits in half steps from their shortest to their longest."""
    choices = []
    for block in timeline.blocks[1:]:
        low = (block.first_row_s - block.jitter_s) / step_s
        high = (block.within_s + block.first_row_s + block.jitter_s) / step_s
        choices.append([low + Fraction(half, 2) for half in range(int((high - low) * 2) + 1)])
    for waits in product(*choices):
        places: list[tuple[int, bool, int]] = []
        for block, wait in zip(timeline.blocks, [*waits, None], strict=True):
            steps = int(block.duration_s / step_s) * PER_STEP
            last = 1 if wait is None else 0
            places += [(block.index, False, n) for n in range(steps + last)]
            if wait is not None:
                count = int(wait * PER_STEP)
                places += [(block.index + 1, True, n) for n in range(count)]
        yield Sampled(timeline, shipped, step_s, tuple(places))


# atoms, instant by instant


class Atoms:
    """The samples at which atoms are true; each is looked at once.

    Beyond the run nothing of the table is played, and nothing else is known.

    `looked` is shared by the runs of one timeline: what an atom is at a time of a block does not
    depend on how long was waited.
    """

    def __init__(self, run: Sampled, looked: dict[tuple[object, ...], bool | None]) -> None:
        self.run, self.looked = run, looked
        self._seen: dict[book.Atom, Masks] = {}

    def of(self, atom: book.Atom) -> Masks:
        """Surely and perhaps true."""
        if atom not in self._seen:
            surely = perhaps = 0
            for bit, place in enumerate(self.run.places, start=PAD):
                key = atom, place
                if key not in self.looked:
                    self.looked[key] = self._at(atom, *place)
                true = self.looked[key]
                surely |= (true is True) << bit
                perhaps |= (true is not False) << bit
            if isinstance(atom, book.LineIn | book.Comparison):
                perhaps |= self.run.everywhere & ~self.run.inside
            self._seen[atom] = surely, perhaps
        return self._seen[atom]

    def _at(self, atom: book.Atom, index: int, waits: bool, sample: int) -> bool | None:
        time_s = sample * self.run.step_s / PER_STEP
        block = self.run.timeline.blocks[index]
        if isinstance(atom, book.Awaiting):
            return waits and atom.trigger in ("", block.trigger)
        if isinstance(atom, book.InBlock):
            return not waits and atom.block == (block.trigger or "run")
        if isinstance(atom, book.Playing):
            return not waits and any(
                self.run.timeline.origins[span.number].step == atom.verb
                and (span.start_s <= time_s < span.end_s or span.start_s == span.end_s == time_s)
                for span in block.spans
            )
        if isinstance(atom, book.Driven):
            return not waits and any(
                one.start_s <= time_s < one.stop_s and atom.ring in ("", one.ring)
                for one in block.drives
            )
        if isinstance(atom, book.LineIn):
            return self._line(atom, index, waits, time_s)
        return self._compared(atom, index, waits, time_s)

    def _line(self, atom: book.LineIn, index: int, waits: bool, time_s: Fraction) -> bool | None:
        line = self.run.timeline.trap.line(atom.line)
        if line.kind == "input":
            said: str | None = None
            for block in self.run.timeline.blocks[: index + (0 if waits else 1)]:
                for change in block.changes:
                    if change.line == atom.line and (
                        block.index < index or change.time_s <= time_s
                    ):
                        said = change.state
            return None if said is None else said == atom.state
        rows = self.run.shipped.blocks[index - 1 if waits else index]
        column = self.run.shipped.lines.index(atom.line)
        state = 0
        for tick, row in zip(rows.ticks, rows.states, strict=True):
            if waits or int(tick) * rows.tick_s <= time_s:
                state = int(row[column])
        return line.states[state] == atom.state

    def _compared(
        self, atom: book.Comparison, index: int, waits: bool, time_s: Fraction
    ) -> bool | None:
        low, high = self._interval(atom.quantity, index, waits, time_s)
        first = None if atom.low is None else float(atom.low)
        last = None if atom.high is None else float(atom.high)
        return decided(atom.relation, low, high, first, last)

    def _interval(
        self, quantity: book.Quantity, index: int, waits: bool, time_s: Fraction
    ) -> tuple[float, float]:
        if isinstance(quantity, book.Slew):
            return (0.0, 0.0) if waits else self._slope(index, time_s)
        if isinstance(quantity, book.Difference):
            one = self._volts(quantity.electrode, index, waits, time_s)
            other = self._volts(quantity.other, index, waits, time_s)
            return one[0] - other[1], one[1] - other[0]
        assert isinstance(quantity, book.Voltage)
        return self._volts(quantity.electrode, index, waits, time_s)

    def _slope(self, index: int, time_s: Fraction) -> tuple[float, float]:
        for piece in self.run.timeline.blocks[index].pieces:
            if piece.start_s <= time_s < piece.end_s:
                slope = (piece.to_V - piece.from_V) / float(piece.end_s - piece.start_s)
                return slope, slope
        return 0.0, 0.0

    def _volts(
        self, electrode: str, index: int, waits: bool, time_s: Fraction
    ) -> tuple[float, float]:
        """A: a converter that slews for a while after each row; G: a switch with edges."""
        block = self.run.timeline.blocks[index - 1 if waits else index]
        if waits:
            time_s = block.duration_s
        if electrode == "G":
            return self._switched(block, time_s)
        converter = self.run.timeline.trap.output("a")
        rows = self.run.shipped.blocks[block.index]
        told = low = high = -128.0 + int(rows.codes[0, 0])
        until_s = Fraction(0)
        for tick, code in zip(rows.ticks, rows.codes[:, 0], strict=True):
            at_s, volts = int(tick) * rows.tick_s, -128.0 + int(code)
            if at_s > time_s or volts == told:
                continue
            if at_s >= until_s:
                low = high = told
            low, high = min(low, volts), max(high, volts)
            far = max(volts - low, high - volts)
            told, until_s = volts, at_s + Fraction(far) / Fraction(converter.slew_V_per_s)
        if time_s >= until_s:
            low = high = told
        return low - converter.offset_spread_V, high + converter.offset_spread_V

    def _switched(self, block: Block, time_s: Fraction) -> tuple[float, float]:
        switch = self.run.timeline.trap.output("g")
        level = block.levels["g"]
        for edge in block.edges:
            if edge.end_s <= time_s:
                level = edge.to_level
            elif edge.start_s <= time_s:
                two = [switch.levels[edge.from_level], switch.levels[edge.to_level]]
                return min(two) - switch.spread_V, max(two) + switch.spread_V
        return switch.levels[level] - switch.spread_V, switch.levels[level] + switch.spread_V


def decided(
    relation: str, low: float, high: float, first: float | None, last: float | None
) -> bool | None:
    """Whether all values from low to high are in a relation; None where only some are."""
    tests = {
        "above": lambda value: value > first,
        "below": lambda value: value < last,
        "beyond": lambda value: abs(value) > first,
        "between": lambda value: first <= value <= last,
    }
    # The ends, zero and the bounds within decide: between two of them nothing turns.
    inner = [0.0, *(sign * one for one in (first, last) if one is not None for sign in (1, -1))]
    values = sorted({low, high, *(value for value in inner if low <= value <= high)})
    values += [(one + other) / 2 for one, other in pairwise(values)]
    found = {tests[relation](value) for value in values}
    return found.pop() if len(found) == 1 else None


# conditions


def read(condition: book.Condition, atoms: Atoms, side: str = "at") -> Masks:
    """The samples at which a condition is true: at them, just before them, or just after."""
    run = atoms.run
    if isinstance(condition, book.Not):
        surely, perhaps = read(condition.part, atoms, side)
        return run.everywhere & ~perhaps, run.everywhere & ~surely
    if isinstance(condition, book.AllOf | book.AnyOf):
        surely, perhaps = read(condition.parts[0], atoms, side)
        for part in condition.parts[1:]:
            one, other = read(part, atoms, side)
            if isinstance(condition, book.AllOf):
                surely, perhaps = surely & one, perhaps & other
            else:
                surely, perhaps = surely | one, perhaps | other
        return surely, perhaps
    if isinstance(condition, book.Held | book.Recent):
        count = int(condition.window_s / run.step_s) * PER_STEP
        inner = read(condition.part, atoms)
        every = isinstance(condition, book.Held)
        return (
            _window(inner[0], run, count, every, side),
            _window(inner[1], run, count, every, side),
        )
    surely, perhaps = atoms.of(condition)
    return _beside(surely, run, side), _beside(perhaps, run, side)


def _window(mask: int, run: Sampled, count: int, every: bool, side: str) -> int:
    """Whether all, or any, of the samples of a window are true, for every sample."""
    odd = run.odd
    if side == "at":
        return _over(mask, range(count + 1), every, run, -1)
    way = -1 if side == "before" else 1
    # An instant leaves itself out; a sample between two instants stands for those on both sides.
    return (_over(mask, range(1, count + 1), every, run, way) & ~odd) | (
        _over(mask, range(count + 1), every, run, way) & odd
    )


def _over(mask: int, offsets: range, every: bool, run: Sampled, way: int) -> int:
    """All or any of the samples so far before (way -1) or after; PAD keeps the ends far away."""
    found = run.everywhere if every else 0
    for offset in offsets:
        moved = (mask << offset if way < 0 else mask >> offset) & run.everywhere
        found = found & moved if every else found | moved
    return found


def _beside(mask: int, run: Sampled, side: str) -> int:
    if side == "at":
        return mask
    odd = run.odd
    near = (mask << 1 if side == "before" else mask >> 1) & run.everywhere
    return (near & ~odd) | (mask & odd)


# sentences


def judged(sentence: book.Sentence, atoms: Atoms) -> tuple[bool, bool]:
    """Whether a sentence is surely broken on a run, and whether it may be."""
    run = atoms.run
    if isinstance(sentence, book.Always):
        surely, perhaps = read(sentence.breaking, atoms)
        return bool(surely & run.inside), bool(perhaps & run.inside)
    if isinstance(sentence, book.AtEnd):
        surely, perhaps = read(sentence.wanted, atoms)
        end = 1 << (PAD + len(run.places) - 1)
        return not perhaps & end, not surely & end
    if isinstance(sentence, book.Around):
        moments = begun(sentence.event, atoms, sentence.side == "after")
        surely, perhaps = read(sentence.wanted, atoms, sentence.side)
        spans = [(_span(low, high), sure) for low, high, sure in moments]
        return (
            any(sure and not span & perhaps for span, sure in spans),
            any(span & ~surely for span, _ in spans),
        )
    return _counted(sentence, atoms)


def _span(low: int, high: int) -> int:
    return ((1 << (high - low + 1)) - 1) << (low + PAD)


def _counted(sentence: book.Counted, atoms: Atoms) -> tuple[bool, bool]:
    moments = begun(sentence.event, atoms, False, standing=True)
    window = len(atoms.run.places)
    if sentence.window_s is not None:
        window = int(sentence.window_s / atoms.run.step_s) * PER_STEP
    surely = perhaps = False
    for start in range(-window, len(atoms.run.places) + 1):
        stop = start + window
        sure = sum(1 for low, high, is_sure in moments if is_sure and start <= low and high <= stop)
        maybe = sum(1 for low, high, _ in moments if low <= stop and high >= start)
        surely = surely or sure > sentence.most
        perhaps = perhaps or maybe > sentence.most
    return surely, perhaps


def begun(
    event: book.Condition, atoms: Atoms, ends: bool, standing: bool = False
) -> list[tuple[int, int, bool]]:
    """Moments at which an event begins, or ends: the samples between which, and whether surely."""
    parts = event.parts if isinstance(event, book.AnyOf) else (event,)
    if all(isinstance(part, book.Playing | book.Driven) for part in parts):
        return _played(parts, atoms.run, ends)
    run = atoms.run
    surely, perhaps = (mask >> PAD for mask in read(event, atoms))
    count = len(run.places)
    found: list[tuple[int, int, bool]] = []
    for first, last in stretches(perhaps, count):
        inner = [
            (max(one, first), min(other, last))
            for one, other in stretches(surely, count)
            if one <= last and other >= first
        ]
        gaps = [(closing(one[1]), opening(other[0]), False) for one, other in pairwise(inner)]
        stood, stays = first == 0, last == count - 1
        if not inner:
            found.append((opening(first), closing(last), False))
        elif ends:
            if not (stays and inner[-1][1] == last):
                found.append((closing(inner[-1][1]), closing(last), not stays))
        elif stood and inner[0][0] == 0:
            found += [(0, 0, True)] if standing else []
        else:
            found.append((opening(first), opening(inner[0][0]), not stood or standing))
        found += gaps
    return found


def _played(
    parts: tuple[book.Condition, ...], run: Sampled, ends: bool
) -> list[tuple[int, int, bool]]:
    starts = {place: at for at, place in reversed(list(enumerate(run.places)))}
    found: dict[tuple[int, int], int] = {}
    for part in parts:
        for block in run.timeline.blocks:
            things: list[tuple[int, Fraction, Fraction]] = []
            if isinstance(part, book.Playing):
                things = [
                    (span.number, span.start_s, span.end_s)
                    for span in block.spans
                    if run.timeline.origins[span.number].step == part.verb
                ]
            elif isinstance(part, book.Driven):
                things = [
                    (one.number, one.start_s, one.stop_s)
                    for one in block.drives
                    if part.ring in ("", one.ring)
                ]
            for number, start_s, end_s in things:
                zero = starts[(block.index, False, 0)]
                first = zero + int(start_s / run.step_s * PER_STEP)
                last = zero + int(end_s / run.step_s * PER_STEP)
                found[first, number] = last if ends else first
    return [(at, at, True) for at in found.values() if at < len(run.places)]
