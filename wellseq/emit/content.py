"""The content id: one SHA-256 over what the hardware is told, whatever file form carries it.

For every block, in order: one line of JSON (what the columns are), then the rows as 64-bit little
endian integers, row by row: tick, a code per converter, a level per switch, a state per line.
"""

from __future__ import annotations

import hashlib
import json

import numpy as np

from wellseq.emit.blocks import decimal, exact
from wellseq.timeline.shipped import Shipped, ShippedBlock
from wellseq.timeline.timeline import Drive

CHUNK_ROWS = 65536


def content_id(shipped: Shipped) -> str:
    """The id as 64 hexadecimal digits."""
    digest = hashlib.sha256()
    for block in shipped.blocks:
        digest.update(_head(shipped, block))
        for start in range(0, len(block.ticks), CHUNK_ROWS):
            rows = slice(start, start + CHUNK_ROWS)
            matrix = np.concatenate(
                (
                    block.ticks[rows, np.newaxis],
                    block.codes[rows],
                    block.levels[rows],
                    block.states[rows],
                ),
                axis=1,
            )
            digest.update(np.ascontiguousarray(matrix, dtype="<i8").tobytes())
    return digest.hexdigest()


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


def _head(shipped: Shipped, block: ShippedBlock) -> bytes:
    head = {
        "trigger": block.block.trigger,
        "tick_s": exact(block.tick_s),
        "rows": len(block.ticks),
        "converters": list(shipped.converters),
        "switches": list(shipped.switches),
        "lines": list(shipped.lines),
        "drives": [drive_cells(drive) for drive in block.block.drives],
    }
    text = json.dumps(head, sort_keys=True, ensure_ascii=False, separators=(",", ":"))
    return f"{text}\n".encode()
