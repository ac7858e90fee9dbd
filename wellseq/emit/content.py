"""The content id: one SHA-256 over what the hardware is told, whatever file form carries it.

For every block, in order: one line of JSON (what the columns are), then the rows as 64-bit little
endian integers, row by row: tick, a code per converter, a level per switch, a state per line.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterator
from weakref import ref

import numpy as np

from wellseq.emit.blocks import decimal, exact
from wellseq.timeline.shipped import Shipped, ShippedBlock
from wellseq.timeline.timeline import Block, Drive

CHUNK_ROWS = 16384


def content_id(shipped: Shipped) -> str:
    """The id as 64 hexadecimal digits; every file of a folder asks for it, so the last is kept."""
    if _last and _last[0][0]() is shipped:
        return _last[0][1]
    digest = hashlib.sha256()
    for block in shipped.blocks:
        digest.update(_head(shipped, block))
        for run in _runs(block):
            digest.update(run)
    found = digest.hexdigest()
    _last[:] = [(ref(shipped), found)]
    return found


_last: list[tuple[ref[Shipped], str]] = []


def _runs(block: ShippedBlock) -> Iterator[memoryview]:
    """The rows as 64-bit little endian integers, some of them at a time."""
    tables = (block.ticks[:, np.newaxis], block.codes, block.levels, block.states)
    width = sum(table.shape[1] for table in tables)
    for start in range(0, len(block.ticks), CHUNK_ROWS):
        parts = [table[start : start + CHUNK_ROWS] for table in tables]
        run = np.empty((len(parts[0]), width), dtype="<i8")
        np.concatenate(parts, axis=1, out=run)
        yield run.data.cast("B")


def drive_cells(drive: Drive) -> list[str]:
    """A drive as the cells of its row: ring, times (s), frequencies (Hz), amplitude (V), phases."""
    return [
        drive.ring,
        decimal(drive.start_s),
        decimal(drive.stop_s),
        repr(float(drive.from_Hz)),
        repr(float(drive.to_Hz)),
        repr(float(drive.amplitude_V)),
        str(drive.order),
        *(repr(float(phase)) for phase in drive.phases_deg),
    ]


def drive_table(block: Block) -> list[list[str]]:
    """The drives of a block as lines of cells, each as long as its ring has sectors."""
    return [drive_cells(drive) for drive in block.drives]


def _head(shipped: Shipped, block: ShippedBlock) -> bytes:
    head = {
        "trigger": block.block.trigger,
        "tick_s": exact(block.tick_s),
        "rows": len(block.ticks),
        "converters": list(shipped.converters),
        "switches": list(shipped.switches),
        "lines": list(shipped.lines),
        "drives": drive_table(block.block),
    }
    text = json.dumps(head, sort_keys=True, ensure_ascii=False, separators=(",", ":"))
    return f"{text}\n".encode()
