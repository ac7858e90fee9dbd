"""How far apart adjacent electrodes ever stand, on exact rationals, every row and every edge.

Between two rows a held output stands still and a drawn one moves on a straight line: rows decide.
At a row where held outputs or switches change, either may be first: every old value meets every new
one.  A switch counts as at both of its levels until its edge has settled; a running drive adds its
amplitude.  Rounding to codes may add half a code to either side.
"""

from __future__ import annotations

from bisect import bisect_left
from collections.abc import Iterator
from fractions import Fraction
from math import lcm

from wellseq.reread.plan import Converter, Neighbours, Plan, Switch
from wellseq.reread.reading import Unsound
from wellseq.reread.rules import ROUNDING
from wellseq.reread.table import UNSOUND, Table

Value = tuple[str, int]
"""What an electrode may be at: (converter, code), or (switch, level) of a fixed level."""


def too_far_apart(
    plan: Plan, tables: list[Table], drives: list[list[list[str]]]
) -> Iterator[Unsound]:
    """The first row of each block at which two neighbours stand too far apart."""
    before: Table | None = None
    for table, driven in zip(tables, drives, strict=True):
        course = _Course(plan, table, before, driven)
        for pair in plan.neighbours:
            row = course.first_too_far(pair)
            if row is not None:
                one, other = pair.electrodes
                message = f"{one} and {other} stand more than {float(pair.limit_V):g} V apart"
                yield Unsound(UNSOUND, table.block.table, message, row + 2)
        before = table


class _Course:
    """All electrodes during one block; `before` is the block that was played before it.

    Voltages are whole numbers of one common unit, 1/`scale` V, so that nothing rounds.
    """

    def __init__(
        self, plan: Plan, table: Table, before: Table | None, driven: list[list[str]]
    ) -> None:
        self.table, self.before = table, before
        self.outputs: dict[str, Converter | Switch] = {
            output.name: output for output in plan.outputs
        }
        self.scale = _common_scale(plan)
        self.lines = {
            one.name: tuple(number * (self.scale // one.whole[2]) for number in one.whole[:2])
            for one in plan.converters
        }
        self.changes = table.changes
        tick_s = table.block.tick_s
        self.drives = [
            (cells[0], Fraction(cells[1]) / tick_s, Fraction(cells[2]) / tick_s, Fraction(cells[5]))
            for cells in driven
        ]

    def first_too_far(self, pair: Neighbours) -> int | None:
        """The first row at which, or after which, two neighbours may stand too far apart."""
        if pair.outputs[0] == pair.outputs[1] or self._never(pair):
            return None
        rows = {0, *self._rows(pair.outputs[0]), *self._rows(pair.outputs[1])}
        rows |= set(self._driven_rows(pair.electrodes))
        last = len(self.table.ticks) - 1
        for row in sorted({min(row, last) for row in rows}):
            added_V = sum((self._drive_V(name, row) for name in pair.electrodes), Fraction(0))
            bound = self._bound(pair, added_V)
            others = [self._volts(value) for value in self._at(pair.outputs[1], row)]
            for value in self._at(pair.outputs[0], row):
                volts = self._volts(value)
                if any(abs(volts - other) > bound for other in others):
                    return row
        return None

    def _never(self, pair: Neighbours) -> bool:
        """Whether even the extremes of the whole block, drives included, are near enough."""
        driven = sum(
            (drive[3] for drive in self.drives if drive[0] in pair.electrodes), Fraction(0)
        )
        (low, high), (other_low, other_high) = (self._extremes(name) for name in pair.outputs)
        return max(high - other_low, other_high - low) <= self._bound(pair, driven)

    def _bound(self, pair: Neighbours, added_V: Fraction) -> int:
        """The largest difference that is allowed, in units, half a code of each side included."""
        halves = sum((self._half_code_V(name) for name in pair.outputs), Fraction(0))
        return int((pair.limit_V * (1 + ROUNDING) + halves - added_V) * self.scale)

    def _half_code_V(self, name: str) -> Fraction:
        output = self.outputs[name]
        if isinstance(output, Converter):
            return output.code_V / 2
        behind = [self._half_code_V(level) for level in output.levels if isinstance(level, str)]
        return max(behind, default=Fraction(0))

    def _extremes(self, name: str) -> tuple[int, int]:
        """The lowest and highest volts of an output in this block, in units."""
        output = self.outputs[name]
        if isinstance(output, Converter):
            codes = {min(self.table.columns[name]), max(self.table.columns[name])}
            codes.add(self._code_before(name, 0))
            found = [self._volts((name, code)) for code in codes]
            return min(found), max(found)
        ends = [
            self._extremes(level) if isinstance(level, str) else (self._volts((name, at)),) * 2
            for at, level in enumerate(output.levels)
        ]
        return min(end[0] for end in ends), max(end[1] for end in ends)

    def _volts(self, value: Value) -> int:
        """Electrode volts in units."""
        name, number = value
        output = self.outputs[name]
        if isinstance(output, Converter):
            start, slope = self.lines[name]
            return start + slope * number
        level = output.levels[number]
        assert isinstance(level, Fraction)
        return int(level * self.scale)

    # at which rows to look

    def _rows(self, name: str) -> Iterator[int]:
        """The rows at which what an electrode may be at is not what it was at the row before."""
        for row in self.changes[name]:
            yield row
            # What was old at a change is no longer so at the row after it.
            yield row + 1
        output = self.outputs[name]
        if isinstance(output, Switch):
            for row in self.changes[name]:
                yield from range(row, self._settled(output, row) + 1)
            for level in output.levels:
                if isinstance(level, str):
                    yield from self._rows(level)

    def _settled(self, switch: Switch, row: int) -> int:
        """The first row after the edge thrown at a row is over."""
        over = self.table.ticks[row] + switch.settle_s / self.table.block.tick_s
        while row < len(self.table.ticks) and self.table.ticks[row] <= over:
            row += 1
        return row

    def _driven_rows(self, electrodes: tuple[str, str]) -> Iterator[int]:
        for ring, start, stop, _ in self.drives:
            if ring in electrodes:
                first = max(0, bisect_left(self.table.ticks, start) - 1)
                yield from range(first, bisect_left(self.table.ticks, stop) + 1)

    # what stands at a row

    def _at(self, name: str, row: int) -> frozenset[Value]:
        """Everything that an electrode may be at from just before a row to the next one."""
        output = self.outputs[name]
        if isinstance(output, Converter):
            codes = {self.table.columns[name][row]}
            if output.holds:
                codes.add(self._code_before(name, row))
            return frozenset((name, code) for code in codes)
        values: set[Value] = set()
        for level in self._levels(output, row):
            behind = output.levels[level]
            if isinstance(behind, str):
                values |= self._at(behind, row)
            else:
                values.add((name, level))
        return frozenset(values)

    def _levels(self, switch: Switch, row: int) -> set[int]:
        """The levels of a switch from its last settled one to the present one."""
        column, ticks = self.table.columns[switch.name], self.table.ticks
        found = {column[row], self._code_before(switch.name, row)}
        settle = switch.settle_s / self.table.block.tick_s
        for thrown in reversed(self.changes[switch.name]):
            if ticks[thrown] + settle < ticks[row]:
                break
            if thrown <= row:
                found.add(column[thrown - 1])
        return found

    def _code_before(self, name: str, row: int) -> int:
        if row:
            return self.table.columns[name][row - 1]
        table = self.before if self.before is not None else self.table
        return table.columns[name][-1 if self.before is not None else 0]

    def _drive_V(self, electrode: str, row: int) -> Fraction:
        """The largest amplitude that a drive adds around a row, V."""
        ticks = self.table.ticks
        low, high = ticks[max(row - 1, 0)], ticks[min(row + 1, len(ticks) - 1)]
        running = [
            amplitude
            for ring, start, stop, amplitude in self.drives
            if ring == electrode and start <= high and stop >= low
        ]
        return max(running, default=Fraction(0))


def _common_scale(plan: Plan) -> int:
    """The least whole number of units to the volt in which every voltage is a whole number."""
    bottoms = [converter.whole[2] for converter in plan.converters]
    bottoms += [
        level.denominator
        for switch in plan.switches
        for level in switch.levels
        if isinstance(level, Fraction)
    ]
    return lcm(*bottoms)
