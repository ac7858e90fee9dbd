"""Each block → one HDF5 file: a data set per column, with scale, units and range as attributes.

`tick` int64; `codes/NAME` (V), `levels/NAME`, `states/NAME` unsigned, all (rows,); `drives` as
text where a ring is driven.  Times are in s.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from concurrent.futures import ThreadPoolExecutor
from importlib.util import find_spec
from tempfile import TemporaryFile
from typing import IO, Any

import numpy as np

from wellseq.emit.blocks import also_name, exact
from wellseq.emit.columns import Column, Kind, Rows, rows_of
from wellseq.emit.content import content_id, drive_table
from wellseq.emit.files.drives_csv import head
from wellseq.emit.hdf5_columns import CHUNK_ROWS, OLDEST, Facts, Grower, facts_of, fill, tick_facts
from wellseq.emit.keys import Key
from wellseq.timeline.timeline import Block

PIECE_BYTES = 2**20
WORKERS = 2


def missing() -> str:
    """What has to be installed first; empty when nothing has."""
    return "" if find_spec("h5py") else "h5py is not installed: pip install 'wellseq[hdf5]'"


def write(key: Key) -> Iterator[tuple[str, Iterator[bytes]]]:
    """(name, content) of the HDF5 file of every block; volts in V, times in s."""
    trap, shipped = key.case.trap, key.case.shipped
    if trap is None or shipped is None:
        return
    identity = content_id(shipped)
    for block in shipped.blocks:
        rows = rows_of(trap, shipped, block)
        yield also_name(block.block, "hdf5"), _file(rows, block.block, identity)


def _file(rows: Rows, block: Block, identity: str) -> Iterator[bytes]:
    """The file in pieces; it grows on a nameless scratch file, since HDF5 writes back and forth."""
    facts = {
        "block": block.name,
        "trigger": block.trigger,
        "content_id": identity,
        "wellseq_layout": 1,
    }
    with TemporaryFile() as scratch:
        fill_file(scratch, rows, facts, drive_table(block))
        scratch.seek(0)
        while piece := scratch.read(PIECE_BYTES):
            yield piece


def fill_file(target: IO[bytes], rows: Rows, facts: Facts, drives: list[list[str]]) -> None:
    """Write rows with `facts` as the file's attributes; ticks are of `rows.tick_s` s.

    Raises OSError when the target cannot be written.
    """
    import h5py

    with h5py.File(target, "w", libver=OLDEST) as file, ThreadPoolExecutor(WORKERS) as pool:
        for name, fact in facts.items():
            file.attrs[name] = fact
        growers = [_ticks(file, rows)]
        growers += columns_in(file, rows.columns, len(rows.ticks))
        for ticks, numbers in rows.runs(CHUNK_ROWS):
            fill(pool, zip(growers, [ticks, *numbers], strict=True))
        if drives:
            _drives(file, drives)


def _ticks(file: Any, rows: Rows) -> Grower:
    facts = tick_facts(float(rows.tick_s), exact(rows.tick_s))
    return Grower(file, "tick", "<i8", len(rows.ticks), facts)


def columns_in(file: Any, columns: Sequence[Column], rows: int) -> list[Grower]:
    """Data sets of so many numbers for all columns, in order, in the groups of their kinds."""
    groups = {kind: file.create_group(kind.value) for kind in Kind}
    return [
        Grower(groups[column.kind], column.name, column.dtype, rows, facts_of(column, place))
        for place, column in enumerate(columns)
    ]


def _drives(file: Any, drives: list[list[str]]) -> None:
    """The drive table as texts of one length, filled up with empty ones."""
    width = max(map(len, drives))
    texts = [
        [cell.encode("utf-8") for cell in line + [""] * (width - len(line))] for line in drives
    ]
    data = file.create_dataset("drives", data=np.array(texts, dtype="S"))
    data.attrs["columns"] = " ".join(head(width))
