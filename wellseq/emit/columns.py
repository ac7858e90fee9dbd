"""The columns of a table, in order, as every form of it needs them: name, range, scale, words.

A converter's column holds codes, 0 … 2^bits − 1, and electrode volts = (start + slope · code) /
bottom in whole numbers, so exactly; a switch's holds the number of its level, a line's that of its
state.  Volts are rounded once, to the nearest float.
"""

from __future__ import annotations

from array import array
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from enum import StrEnum
from fractions import Fraction
from math import lcm

import numpy as np
import numpy.typing as npt

from wellseq.model.trap import Converter, Line, Switch, Trap
from wellseq.timeline.shipped import Shipped, ShippedBlock

Whole = npt.NDArray[np.integer]


class Kind(StrEnum):
    """What the numbers of a column are; the values are the words that forms use for it."""

    CODE = "codes"
    LEVEL = "levels"
    STATE = "states"


@dataclass(frozen=True, slots=True)
class Column:
    """One output or line: its numbers go from 0 to `most`.

    `scale` is (start, slope, bottom) of a converter, whose volts are (start + slope · code) /
    bottom; `draws` says that its card draws straight lines between rows.  `words` are the levels
    of a switch or the states of a line, in the order of their numbers.
    """

    name: str
    kind: Kind
    most: int
    scale: tuple[int, int, int] = (0, 0, 1)
    words: tuple[str, ...] = ()
    draws: bool = False

    @property
    def scale_factor_V(self) -> float:
        """Electrode volts from one code to the next, V: the nearest float."""
        return self.scale[1] / self.scale[2]

    @property
    def add_offset_V(self) -> float:
        """Electrode volts of code 0, V: the nearest float."""
        return self.scale[0] / self.scale[2]

    @property
    def dtype(self) -> str:
        """The smallest unsigned little-endian type that holds every number of this column."""
        return narrowest(self.most)

    def volts(self, codes: list[int]) -> list[float]:
        """Electrode volts (V) of codes, each the float nearest to the exact value."""
        start, slope, bottom = self.scale
        # Python rounds the quotient of two whole numbers correctly.
        return [(start + slope * code) / bottom for code in codes]


@dataclass(frozen=True, slots=True)
class Rows:
    """The rows of one block: ticks (rows,), numbers (rows,) per column, one tick in exact s.

    `tables` are the same numbers as (rows, columns) of each kind in turn, where they stand so in
    memory: going through them row by row is much faster than column by column.
    """

    columns: tuple[Column, ...]
    ticks: Whole
    numbers: tuple[Whole, ...]
    tick_s: Fraction
    tables: tuple[Whole, ...] = ()

    def runs(self, length: int) -> Iterator[tuple[Whole, list[Whole]]]:
        """(ticks, numbers of every column) of so many rows at a time, each array in one piece."""
        most = max((column.most for column in self.columns), default=0)
        for start in range(0, len(self.ticks), length):
            part = slice(start, start + length)
            if self.tables:
                # Narrow numbers are turned several times faster than wide ones.
                narrow = [table[part].astype(narrowest(most)) for table in self.tables]
                turned = [np.ascontiguousarray(table.T) for table in narrow]
                yield self.ticks[part], [column for table in turned for column in table]
            else:
                yield self.ticks[part], [column[part] for column in self.numbers]

    def of(self, kind: Kind) -> list[int]:
        """The indices of the columns of a kind."""
        return [at for at, column in enumerate(self.columns) if column.kind is kind]


def rows_of(trap: Trap, shipped: Shipped, block: ShippedBlock) -> Rows:
    """A shipped block with its columns.

    Raises ValueError for a number that its column cannot hold, so that none is ever cut short.
    """
    columns = tuple(_column(trap, name) for name in (*shipped.converters, *shipped.switches))
    columns += tuple(_line(trap.line(name)) for name in shipped.lines)
    tables = (block.codes, block.levels, block.states)
    numbers = tuple(table[:, at] for table in tables for at in range(table.shape[1]))
    ends = [np.stack([table.min(axis=0), table.max(axis=0)]).T.tolist() for table in tables]
    for column, (low, high) in zip(columns, [pair for kind in ends for pair in kind], strict=True):
        if not 0 <= low <= high <= column.most:
            raise ValueError(f"a number of {column.name} is outside 0 to {column.most}")
    return Rows(columns, block.ticks, numbers, block.tick_s, tables)


def rows_as_read(
    columns: Sequence[Column], ticks: array[int], numbers: Sequence[array[int]], tick_s: Fraction
) -> Rows:
    """Rows from a reader's arrays of 64-bit whole numbers, not copied; a tick is `tick_s` s."""
    found = tuple(np.frombuffer(column, np.int64) for column in numbers)
    return Rows(tuple(columns), np.frombuffer(ticks, np.int64), found, tick_s)


def scale_of(converter: Converter) -> tuple[int, int, int]:
    """(start, slope, bottom): exact volts of a code, from the floats of the trap file.

    volts = gain · (low + code · (high − low) / (2^bits − 1)) + offset.
    """
    low, high = Fraction(converter.low_V), Fraction(converter.high_V)
    gain = Fraction(converter.gain)
    per_code = gain * (high - low) / (2**converter.bits - 1)
    at_zero = gain * low + Fraction(converter.offset_V)
    bottom = lcm(per_code.denominator, at_zero.denominator)
    return int(at_zero * bottom), int(per_code * bottom), bottom


def narrowest(most: int) -> str:
    """The smallest unsigned little-endian type that holds 0 … most, as numpy spells it."""
    return "u1" if most < 2**8 else "<u2" if most < 2**16 else "<u4"


def _column(trap: Trap, name: str) -> Column:
    output = trap.output(name)
    if isinstance(output, Switch):
        words = tuple(
            level if isinstance(level, str) else f"{level!r}_V" for level in output.levels
        )
        return Column(name, Kind.LEVEL, len(words) - 1, words=words)
    draws = output.between_rows == "line"
    return Column(name, Kind.CODE, 2**output.bits - 1, scale_of(output), draws=draws)


def _line(line: Line) -> Column:
    return Column(line.name, Kind.STATE, len(line.states) - 1, words=line.states)
