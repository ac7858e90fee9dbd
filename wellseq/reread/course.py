"""What every electrode stands at, at an instant of a table: volts, and how far they may be off.

Held codes stand until the next row, drawn ones go straight to it; a switch whose edge is not over
may be at either of its levels.  Volts in V, instants in ticks of the block.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterator
from fractions import Fraction
from itertools import product

from wellseq.reread.plan import Converter, Plan, Switch
from wellseq.reread.table import Table

NOISE_RMS_TAKEN = 6
CHOICES_MAX = 16
Stand = tuple[tuple[float, ...], tuple[float, ...]]
"""Per electrode, in order: volts, and by how much calibration, noise and patch can move them, V."""


class Course:
    """All electrodes during one block."""

    def __init__(self, plan: Plan, table: Table) -> None:
        self.plan, self.table = plan, table
        self.outputs: dict[str, Converter | Switch] = {one.name: one for one in plan.outputs}
        self.patch_V = float(plan.patch_V)
        self._lines = {one.name: one.whole for one in plan.converters}
        self._settle = {one.name: one.settle_s / table.block.tick_s for one in plan.switches}

    def row(self, tick: Fraction | int) -> int:
        """The last row at or before an instant."""
        return max(0, bisect_right(self.table.ticks, tick) - 1)

    def stands(self, tick: Fraction) -> Iterator[Stand]:
        """Every combination of levels that the switches may be at; volts and deviations in V."""
        row = self.row(tick)
        levels = {one.name: sorted(self._levels(one, row, tick)) for one in self.plan.switches}
        open_ones = [name for name, found in levels.items() if len(found) > 1]
        for number, choice in enumerate(product(*(levels[name] for name in open_ones))):
            if number == CHOICES_MAX:
                return
            at = {name: found[0] for name, found in levels.items()}
            at |= dict(zip(open_ones, choice, strict=True))
            yield self._stand(row, tick, at)

    def _stand(self, row: int, tick: Fraction, levels: dict[str, int]) -> Stand:
        by_output: dict[str, tuple[float, float]] = {}
        for output in self.outputs.values():
            behind: Converter | Switch | Fraction = output
            if isinstance(output, Switch):
                level = output.levels[levels[output.name]]
                behind = self.outputs[level] if isinstance(level, str) else level
            by_output[output.name] = self._of(output, behind, row, tick)
        pairs = [by_output[electrode.output] for electrode in self.plan.electrodes]
        return tuple(volts for volts, _ in pairs), tuple(off for _, off in pairs)

    def _of(
        self,
        output: Converter | Switch,
        behind: Converter | Switch | Fraction,
        row: int,
        tick: Fraction,
    ) -> tuple[float, float]:
        if isinstance(behind, Converter):
            volts = self._volts(behind, row, tick)
            nominal = (abs(volts) + abs(float(behind.offset_V))) / abs(float(behind.gain))
            off = nominal * float(behind.gain_spread) + float(behind.offset_spread_V)
            return volts, off + NOISE_RMS_TAKEN * float(behind.noise_V) + self.patch_V
        assert isinstance(output, Switch)
        assert isinstance(behind, Fraction)
        off = float(output.spread_V) + NOISE_RMS_TAKEN * float(output.noise_V)
        return float(behind), off + self.patch_V

    def _volts(self, one: Converter, row: int, tick: Fraction) -> float:
        start, slope, bottom = self._lines[one.name]
        ticks, column = self.table.ticks, self.table.columns[one.name]
        code: Fraction | int = column[row]
        if not one.holds and row + 1 < len(ticks) and tick > ticks[row]:
            share = (tick - ticks[row]) / Fraction(ticks[row + 1] - ticks[row])
            code = column[row] + (column[row + 1] - column[row]) * share
        return float(Fraction(start + slope * code) / bottom)

    def _levels(self, switch: Switch, row: int, tick: Fraction) -> set[int]:
        """The levels that a switch may be at: of its edges only those that are not over count."""
        column, ticks = self.table.columns[switch.name], self.table.ticks
        found = {column[row]}
        for thrown in reversed(self.table.changes[switch.name]):
            if thrown > row:
                continue
            if ticks[thrown] + self._settle[switch.name] < tick:
                break
            found.add(column[thrown - 1])
        return found
