"""The rows of each block → one CSV (RFC 4180): whole ticks, converter codes, electrode volts.

Columns: `tick`; per converter `NAME.code` (0 … 2^bits − 1) and `NAME.V`, the volts at the electrode
that this code gives by the declared calibration, rounded once and written as the shortest decimal
that reads back the same; per switch `NAME.level` (0 or 1, the order of the trap file); per line
`NAME`, its state.  One tick lasts as long as the manifest says.
"""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction
from math import lcm

import numpy as np

from wellseq.checks.judging import Cleared
from wellseq.emit.blocks import table_name
from wellseq.emit.content import CHUNK_ROWS
from wellseq.emit.escape import csv_text
from wellseq.model.trap import Converter, Trap
from wellseq.timeline.shipped import Integers, Shipped, ShippedBlock


def write(cleared: Cleared) -> Iterator[tuple[str, Iterator[bytes]]]:
    """(name, content) of the table of every block."""
    trap, shipped = cleared.case.trap, cleared.case.shipped
    if trap is None or shipped is None:
        return
    for block in shipped.blocks:
        yield table_name(block.block), _table(trap, shipped, block)


def electrode_volts(converter: Converter, codes: list[int]) -> list[float]:
    """Electrode volts of codes, each the float nearest to the exact rational value.

    volts = gain * (low + code * (high - low) / (2^bits - 1)) + offset, exact in the floats of the
    trap file: one division of whole numbers, which Python rounds correctly.
    """
    low, high = Fraction(converter.low_V), Fraction(converter.high_V)
    per_code = Fraction(converter.gain) * (high - low) / (2**converter.bits - 1)
    at_zero = Fraction(converter.gain) * low + Fraction(converter.offset_V)
    bottom = lcm(per_code.denominator, at_zero.denominator)
    slope = int(per_code * bottom)
    start = int(at_zero * bottom)
    return [(start + slope * code) / bottom for code in codes]


def _table(trap: Trap, shipped: Shipped, block: ShippedBlock) -> Iterator[bytes]:
    yield (",".join(_head(shipped)) + "\r\n").encode("utf-8")
    converters = [trap.output(name) for name in shipped.converters]
    states = [[csv_text(state) for state in trap.line(name).states] for name in shipped.lines]
    for start in range(0, len(block.ticks), CHUNK_ROWS):
        rows = slice(start, start + CHUNK_ROWS)
        columns = [[str(tick) for tick in block.ticks[rows].tolist()]]
        for column, converter in enumerate(converters):
            columns.append(_converter_cells(converter, block.codes[rows, column]))
        for column in range(len(shipped.switches)):
            columns.append([str(level) for level in block.levels[rows, column].tolist()])
        for column, words in enumerate(states):
            columns.append([words[state] for state in block.states[rows, column].tolist()])
        lines = map(",".join, zip(*columns, strict=True))
        yield ("\r\n".join(lines) + "\r\n").encode("utf-8")


def _head(shipped: Shipped) -> list[str]:
    head = ["tick"]
    for name in shipped.converters:
        head += [csv_text(f"{name}.code"), csv_text(f"{name}.V")]
    head += [csv_text(f"{name}.level") for name in shipped.switches]
    return head + [csv_text(name) for name in shipped.lines]


def _converter_cells(converter: object, codes: Integers) -> list[str]:
    """Both cells of a converter, `code,volts`, once per distinct code and then looked up."""
    if not isinstance(converter, Converter):
        raise TypeError("only converters have codes")
    distinct, which = np.unique(codes, return_inverse=True)
    if len(distinct) and (distinct[0] < 0 or distinct[-1] > 2**converter.bits - 1):
        raise ValueError(f"a code of {converter.name} is outside 0 to 2^{converter.bits} - 1")
    numbers = distinct.tolist()
    volts = electrode_volts(converter, numbers)
    cells = [f"{code},{value!r}" for code, value in zip(numbers, volts, strict=True)]
    return [cells[index] for index in which.tolist()]
