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

from wellseq.reread.plan import Converter, Neighbours, Plan, Switch
from wellseq.reread.reading import Unsound
from wellseq.reread.rules import ROUNDING, changes
from wellseq.reread.table import UNSOUND, Table

Value = tuple[str, int] | Fraction
"""What an electrode may be at: (converter, code), or fixed volts."""


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
    """All electrodes during one block; `before` is the block that was played before it."""

    def __init__(
        self, plan: Plan, table: Table, before: Table | None, driven: list[list[str]]
    ) -> None:
        self.table, self.before = table, before
        self.outputs: dict[str, Converter | Switch] = {
            output.name: output for output in (*plan.converters, *plan.switches)
        }
        self.changes = {name: changes(table.columns[name]) for name in self.outputs}
        tick_s = table.block.tick_s
        self.drives = [
            (cells[0], Fraction(cells[1]) / tick_s, Fraction(cells[2]) / tick_s, Fraction(cells[5]))
            for cells in driven
        ]

    def first_too_far(self, pair: Neighbours) -> int | None:
        """The first row at which, or after which, two neighbours may stand too far apart."""
        if pair.outputs[0] == pair.outputs[1]:
            return None
        rows = {0, *self._rows(pair.outputs[0]), *self._rows(pair.outputs[1])}
        rows |= set(self._driven_rows(pair.electrodes))
        judged: dict[tuple[frozenset[Value], frozenset[Value], Fraction], bool] = {}
        last = len(self.table.ticks) - 1
        for row in sorted(min(row, last) for row in rows):
            one, other = (self._at(output, row) for output in pair.outputs)
            added_V = sum((self._drive_V(name, row) for name in pair.electrodes), Fraction(0))
            key = (one, other, added_V)
            if key not in judged:
                judged[key] = self._too_far(one, other, pair.limit_V - added_V)
            if judged[key]:
                return row
        return None

    def _too_far(self, ones: frozenset[Value], others: frozenset[Value], limit_V: Fraction) -> bool:
        bound = limit_V + abs(limit_V) * ROUNDING
        for one in ones:
            one_V, one_half = self._volts(one)
            for other in others:
                other_V, other_half = self._volts(other)
                if abs(one_V - other_V) > bound + one_half + other_half:
                    return True
        return False

    def _volts(self, value: Value) -> tuple[Fraction, Fraction]:
        """Electrode volts, and the half code that rounding may have added to them."""
        if isinstance(value, Fraction):
            return value, Fraction(0)
        converter = self.outputs[value[0]]
        assert isinstance(converter, Converter)
        return converter.volts(value[1]), converter.code_V / 2

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
                values.add(behind)
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
