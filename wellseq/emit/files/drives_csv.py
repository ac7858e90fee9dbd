"""The drives of each block that has any → one CSV (RFC 4180): when, how fast, how hard.

Times are decimal seconds from the block's first row, frequencies Hz, amplitudes V zero to peak;
phases are degrees at the start, sector 1 first, counted counter-clockwise seen from +z.  Between
start and stop the frequency is a straight line.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.emit.blocks import drives_name
from wellseq.emit.content import drive_cells
from wellseq.emit.escape import csv_text
from wellseq.emit.keys import Key
from wellseq.timeline.timeline import Block, Drive

HEAD = ("ring", "start_s", "stop_s", "from_Hz", "to_Hz", "amplitude_V", "order")


def write(key: Key) -> Iterator[tuple[str, list[bytes]]]:
    """(name, content) of the drive table of every block that drives a ring."""
    shipped = key.case.shipped
    for one in shipped.blocks if shipped is not None else ():
        if one.block.drives:
            yield drives_name(one.block), [_table(one.block).encode("utf-8")]


def head(width: int) -> list[str]:
    """The names of so many columns: the drive's (s, Hz, V), then a phase per sector in degrees."""
    phases = [f"phase_{sector + 1}_deg" for sector in range(width - len(HEAD))]
    return [*HEAD, *phases]


def _table(block: Block) -> str:
    sectors = max(len(drive.phases_deg) for drive in block.drives)
    rows = [",".join(head(len(HEAD) + sectors))]
    rows += [",".join(_row(drive, sectors)) for drive in block.drives]
    return "".join(f"{row}\r\n" for row in rows)


def _row(drive: Drive, sectors: int) -> list[str]:
    ring, *numbers = drive_cells(drive)
    return [csv_text(ring), *numbers, *[""] * (sectors - len(drive.phases_deg))]
