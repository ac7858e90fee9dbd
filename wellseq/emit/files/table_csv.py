"""The rows of each block → one CSV (RFC 4180): whole ticks, converter codes, electrode volts.

Columns: `tick`; per converter `NAME.code` (0 … 2^bits − 1) and `NAME.V`, the volts at the electrode
that this code gives by the declared calibration, rounded once and written as the shortest decimal
that reads back the same; per switch `NAME.level` (0 or 1, the order of the trap file); per line
`NAME`, its state.  One tick lasts as long as the manifest says.
"""

from __future__ import annotations

from collections.abc import Iterator
from itertools import chain

from wellseq.emit.blocks import table_name
from wellseq.emit.columns import rows_of
from wellseq.emit.keys import Key
from wellseq.emit.lines import header, lines


def write(key: Key) -> Iterator[tuple[str, Iterator[bytes]]]:
    """(name, content) of the table of every block; each begins with the names of its columns."""
    trap, shipped = key.case.trap, key.case.shipped
    if trap is None or shipped is None:
        return
    for block in shipped.blocks:
        rows = rows_of(trap, shipped, block)
        yield table_name(block.block), chain([header(rows.columns)], lines(rows))
