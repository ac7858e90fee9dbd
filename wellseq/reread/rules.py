"""What a table may not do, judged row by row on exact rationals: clocks, slew, neighbours, end.

Rounding to codes may add one code to a change of voltage.  Nothing else is forgiven.
"""

from __future__ import annotations

from array import array
from collections.abc import Iterator
from fractions import Fraction

from wellseq.reread.plan import Converter, Plan
from wellseq.reread.reading import Unsound
from wellseq.reread.table import UNSOUND, Table

ROUNDING = Fraction(1, 10**9)
"""Share of a limit within which two correct ways of rounding may differ."""


def wrongs(plan: Plan, tables: list[Table]) -> Iterator[Unsound]:
    """Everything that the tables do and must not, the first of each kind per output."""
    for table in tables:
        yield from _clocks(plan, table)
        yield from _slew(plan, table)
        if len(table.ticks) > plan.rows_max:
            yield _at(table, 0, f"{len(table.ticks)} rows, the card holds {plan.rows_max}")
    last = tables[-1]
    for name, value in plan.end.items():
        if last.columns[name][-1] != value:
            yield _at(
                last,
                len(last.ticks) - 1,
                f"{name} ends at {last.columns[name][-1]}, the manifest says {value}",
            )


def _at(table: Table, row: int, message: str) -> Unsound:
    return Unsound(UNSOUND, table.block.table, message, row + 2)


def _clocks(plan: Plan, table: Table) -> Iterator[Unsound]:
    tick_s = table.block.tick_s
    for output in plan.columns:
        every = output.clock_s / tick_s
        if every.denominator != 1:
            yield _at(table, 0, f"the clock of {output.name} is no whole number of ticks")
            continue
        column, whole = table.columns[output.name], int(every)
        if isinstance(output, Converter) and not output.holds:
            row = _off_line(table, column, whole)
        else:
            changed = table.changes[output.name]
            row = next((row for row in changed if table.ticks[row] % whole), None)
        if row is not None:
            yield _at(table, row, f"{output.name} changes off its clock")


def _off_line(table: Table, column: array[int], every: int) -> int | None:
    """The first row off the clock where a line card would have to bend by more than a code."""
    ticks = table.ticks
    anchor = 0
    for row in range(1, len(ticks)):
        # The last row ends the block wherever the output's clock stands; no line goes on from it.
        if ticks[row] % every and row + 1 < len(ticks):
            continue
        for between in range(anchor + 1, row):
            if _bends(ticks, column, anchor, row, between):
                return between
        anchor = row
    return None


def _bends(ticks: array[int], column: array[int], start: int, end: int, at: int) -> bool:
    span = ticks[end] - ticks[start]
    along = (column[end] - column[start]) * (ticks[at] - ticks[start])
    return abs((column[at] - column[start]) * span - along) > span


def _slew(plan: Plan, table: Table) -> Iterator[Unsound]:
    """Held: a change is over before the output's next one; drawn: the slope from row to row."""
    for converter in plan.converters:
        column = table.columns[converter.name]
        rows = table.changes[converter.name]
        limit = converter.slew_V_per_s * (1 + ROUNDING)
        codes_per_tick = limit * table.block.tick_s / converter.code_V
        top, bottom = codes_per_tick.numerator, codes_per_tick.denominator
        ends = rows[1:] if converter.holds else rows
        starts = rows if converter.holds else [row - 1 for row in rows]
        for row, start, end in zip(rows, starts, ends, strict=False):
            codes = abs(column[row] - column[row - 1]) - 1
            if codes * bottom > top * (table.ticks[end] - table.ticks[start]):
                yield _at(table, row, f"{converter.name} changes faster than its slew")
                break
