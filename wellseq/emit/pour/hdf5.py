"""Samples as an HDF5 file: a data set per column as in a block's file, and the rate beside them.

Attributes of the file: `sample_s` and `sample_exact_s` from sample to sample (s), `samples`.
"""

from __future__ import annotations

from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from tempfile import TemporaryFile
from typing import IO

from wellseq.emit.also.hdf5 import PIECE_BYTES, WORKERS, columns_in, missing
from wellseq.emit.blocks import exact
from wellseq.emit.expand import Poured
from wellseq.emit.hdf5_columns import OLDEST, fill

__all__ = ["missing", "write"]


def write(poured: Poured) -> Iterator[bytes]:
    """The file in pieces; it grows on a nameless scratch file."""
    with TemporaryFile() as scratch:
        _fill(scratch, poured)
        scratch.seek(0)
        while piece := scratch.read(PIECE_BYTES):
            yield piece


def _fill(target: IO[bytes], poured: Poured) -> None:
    import h5py

    facts = {
        "block": poured.block,
        "trigger": poured.trigger,
        "content_id": poured.content_id,
        "sample_s": float(poured.every_s),
        "sample_exact_s": exact(poured.every_s),
        "samples": poured.count,
        "wellseq_layout": 1,
    }
    with h5py.File(target, "w", libver=OLDEST) as file, ThreadPoolExecutor(WORKERS) as pool:
        for name, fact in facts.items():
            file.attrs[name] = fact
        growers = columns_in(file, poured.rows.columns, poured.count)
        for run in poured.samples():
            fill(pool, zip(growers, run.numbers, strict=True))
