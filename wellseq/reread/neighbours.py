"""How far apart adjacent electrodes ever stand, on exact rationals, every row and every edge.

Between two rows a held output stands still and a drawn one moves on a straight line, so rows decide.
At a row where held outputs or switches change, either may be first: every old value meets every new
one.  A switch counts as at both of its levels until its edge has settled.
"""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction

from wellseq.reread.plan import Converter, Neighbours, Plan, Switch
from wellseq.reread.reading import Unsound
from wellseq.reread.rules import ROUNDING, changes
from wellseq.reread.table import UNSOUND, Table

Values = frozenset[tuple[str, int] | Fraction]
"""What an electrode may be at: (converter, code) or fixed volts."""


def too_far_apart(plan: Plan, tables: list[Table]) -> Iterator[Unsound]:
    """The first row of each block at which two neighbours stand too far apart."""
    before: Table | None = None
    for table in tables:
        for pair in plan.neighbours:
            row = _first(plan, table, before, pair)
            if row is not None:
                one, other = pair.electrodes
                limit = float(pair.limit_V)
                message = f"{one} and {other} stand more than {limit:g} V apart"
                yield Unsound(UNSOUND, table.block.table, message, row + 2)
        before = table


def _first(plan: Plan, table: Table, before: Table | None, pair: Neighbours) -> int | None:
    if pair.outputs[0] == pair.outputs[1]:
        return None
    sides = [_Side(plan, table, before, output) for output in pair.outputs]
    rows = sorted({0, *sides[0].rows(), *sides[1].rows()})
    judged: dict[tuple[Values, Values], bool] = {}
    for row in rows:
        values = (sides[0].at(row), sides[1].at(row))
        if values not in judged:
            judged[values] = _too_far(plan, table, values, pair.limit_V)
        if judged[values]:
            return row
    return None


def _too_far(plan: Plan, table: Table, values: tuple[Values, Values], limit_V: Fraction) -> bool:
    for one in values[0]:
        for other in values[1]:
            one_V, one_slack = _volts(plan, table, one)
            other_V, other_slack = _volts(plan, table, other)
            if abs(one_V - other_V) > limit_V * (1 + ROUNDING) + one_slack + other_slack:
                return True
    return False


def _volts(
    plan: Plan, table: Table, value: tuple[str, int] | Fraction
) -> tuple[Fraction, Fraction]:
    """Electrode volts and what rounding and staircase may have added to them."""
    if isinstance(value, Fraction):
        return value, Fraction(0)
    converter = plan.converter(value[0])
    slack = converter.code_V / 2 + 2 * table.block.strays_V.get(converter.name, Fraction(0))
    return converter.volts(value[1]), slack


class _Side:
    """One electrode's output during one block."""

    def __init__(self, plan: Plan, table: Table, before: Table | None, output: str) -> None:
        self.plan, self.table, self.before = plan, table, before
        self.output: Converter | Switch = next(
            one for one in (*plan.converters, *plan.switches) if one.name == output
        )
        self.thrown = changes(table.columns[output]) if isinstance(self.output, Switch) else []

    def rows(self) -> Iterator[int]:
        """The rows at which what the electrode may be at is not that of the row before."""
        names = [self.output.name]
        if isinstance(self.output, Switch):
            names += [level for level in self.output.levels if isinstance(level, str)]
            for row in self.thrown:
                settled = self.table.ticks[row] + self.output.settle_s / self.table.block.tick_s
                while row < len(self.table.ticks) and self.table.ticks[row] <= settled:
                    yield row
                    row += 1
                yield min(row, len(self.table.ticks) - 1)
        for name in names:
            for row in changes(self.table.columns[name]):
                yield row
                # What was old at a change is no longer so at the row after it.
                yield min(row + 1, len(self.table.ticks) - 1)

    def at(self, row: int) -> Values:
        """Everything that the electrode may be at from just before a row to the next one."""
        if isinstance(self.output, Converter):
            return self._of_converter(self.output, row)
        values: set[tuple[str, int] | Fraction] = set()
        for level in self._levels(row):
            behind = self.output.levels[level]
            if isinstance(behind, str):
                values |= self._of_converter(self.plan.converter(behind), row)
            else:
                values.add(behind)
        return frozenset(values)

    def _of_converter(self, converter: Converter, row: int) -> Values:
        codes = {self.table.columns[converter.name][row]}
        if converter.holds:
            codes.add(self._before(converter.name, row))
        return frozenset((converter.name, code) for code in codes)

    def _levels(self, row: int) -> set[int]:
        """The levels of a switch from its last settled state to the present one."""
        column, ticks = self.table.columns[self.output.name], self.table.ticks
        found = {column[row], self._before(self.output.name, row)}
        settle = self.output.settle_s / self.table.block.tick_s
        for thrown in reversed(self.thrown):
            if ticks[thrown] + settle < ticks[row]:
                break
            if thrown <= row:
                found.add(column[thrown - 1] if thrown else column[thrown])
        return found

    def _before(self, name: str, row: int) -> int:
        if row:
            return self.table.columns[name][row - 1]
        if self.before is not None:
            return self.before.columns[name][-1]
        return self.table.columns[name][0]
