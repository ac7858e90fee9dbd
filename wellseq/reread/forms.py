"""What every further form of a table must say: the same numbers, names, scale and id as the CSV.

The expected values are worked out here from the manifest, on exact rationals; a form is compared
with them and never believed.
"""

from __future__ import annotations

import sys
from array import array
from collections.abc import Iterator
from dataclasses import dataclass

from wellseq.reread.plan import BlockPlan, Converter, Line, Plan, Switch
from wellseq.reread.reading import Unsound
from wellseq.reread.table import Table

UNSOUND = "form-unsound"
KINDS = ("codes", "levels", "states")
TYPES = {1: "B", 2: "H", 4: "I", 8: "q"}
"""Bytes of a number → its code in `array`; 8 is signed, the others are not."""
Column = Converter | Switch | Line


@dataclass(frozen=True, slots=True)
class Expected:
    """One block as it must be in every form; `drives` are lines of cells."""

    plan: Plan
    block: BlockPlan
    table: Table
    drives: list[list[str]]

    def columns(self, kind: str) -> tuple[Column, ...]:
        """The columns of one of KINDS, in order."""
        by_kind: dict[str, tuple[Column, ...]] = {
            "codes": self.plan.converters,
            "levels": self.plan.switches,
            "states": self.plan.lines,
        }
        return by_kind[kind]

    @property
    def width(self) -> int:
        """The number of cells of the longest drive."""
        return max(map(len, self.drives), default=0)

    def padded_drives(self) -> list[list[str]]:
        """The drives with empty cells up to the longest."""
        return [line + [""] * (self.width - len(line)) for line in self.drives]


def most(column: Column) -> int:
    """The largest number that a column may hold."""
    if isinstance(column, Converter):
        return column.code_max
    return len(words(column)) - 1


def words(column: Switch | Line) -> list[str]:
    """What the numbers of a switch's or a line's column stand for; fixed levels in V."""
    if isinstance(column, Line):
        return list(column.states)
    return [one if isinstance(one, str) else f"{float(one)!r}_V" for one in column.levels]


def size(most_of_all: int) -> int:
    """The bytes of the smallest unsigned type that holds 0 … most."""
    return 1 if most_of_all < 1 << 8 else 2 if most_of_all < 1 << 16 else 4


def scale(converter: Converter) -> tuple[float, float]:
    """(volts per code, volts of code 0), V, the floats nearest to the exact values."""
    start, slope, bottom = converter.whole
    return slope / bottom, start / bottom


def whole_numbers(content: bytes | memoryview, bytes_each: int) -> array[int]:
    """Little-endian numbers as an array of the machine's own."""
    found = array(TYPES[bytes_each])
    if found.itemsize != bytes_each:
        raise ValueError("this machine has no whole numbers of that size")
    found.frombytes(content)
    if sys.byteorder == "big":
        found.byteswap()
    return found


def differing(
    file: str, expected: Expected, found: Iterator[tuple[str, array[int]]]
) -> Iterator[Unsound]:
    """The columns (`tick` is one) that do not hold the numbers of the CSV."""
    for name, numbers in found:
        right = expected.table.ticks if name == "tick" else expected.table.columns[name]
        same = numbers if numbers.typecode == "q" else array("q", numbers)
        if same != right:
            yield Unsound(UNSOUND, file, f"the numbers of {name} are not those of the table")
