"""The content id again, from what was read: SHA-256 over headers and rows of all blocks.

Per block one line of JSON that names the columns, then the rows as 64-bit little endian integers.
"""

from __future__ import annotations

import hashlib
import json
import struct
from itertools import chain

from wellseq.reread.plan import Plan
from wellseq.reread.table import CHUNK_ROWS, Table


def content_id(plan: Plan, tables: list[Table], drives: list[list[list[str]]]) -> str:
    """The id of what was read as 64 hexadecimal digits."""
    digest = hashlib.sha256()
    for table, driven in zip(tables, drives, strict=True):
        head = {
            "converters": [converter.name for converter in plan.converters],
            "drives": driven,
            "lines": [line.name for line in plan.lines],
            "rows": len(table.ticks),
            "switches": [switch.name for switch in plan.switches],
            "tick_s": str(table.block.tick_s),
            "trigger": table.block.trigger,
        }
        text = json.dumps(head, sort_keys=True, ensure_ascii=False, separators=(",", ":"))
        digest.update(f"{text}\n".encode())
        columns = [table.ticks, *table.columns.values()]
        for start in range(0, len(table.ticks), CHUNK_ROWS):
            pieces = [column[start : start + CHUNK_ROWS] for column in columns]
            numbers = list(chain.from_iterable(zip(*pieces, strict=True)))
            digest.update(struct.pack(f"<{len(numbers)}q", *numbers))
    return digest.hexdigest()
