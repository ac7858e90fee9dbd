"""Columns of numbers → HDF5: one data set each, compressed in chunks, scaled as the CF rules say.

volts = code · scale_factor + add_offset (NetCDF Climate and Forecast Conventions 1.11, sec. 8.1);
levels and states carry `flag_values` and `flag_meanings` (sec. 3.5).  Chunks are shuffled and
deflated here, many alike only once, and handed over as they will stand in the file.
"""

from __future__ import annotations

import zlib
from collections.abc import Iterator, Mapping
from concurrent.futures import Executor
from typing import Any

import numpy as np

from wellseq.emit.columns import Column, Kind, Whole

CHUNK_ROWS = 65536
DEFLATE = 1
OLDEST = ("earliest", "v108")
"""Bounds of the file's version: what every reader since 1998 understands."""
Facts = Mapping[str, object]


class Grower:
    """One data set of `rows` numbers that is filled chunk after chunk, in order."""

    def __init__(self, group: Any, name: str, dtype: str, rows: int, facts: Facts) -> None:
        """Lay the data set into an open file or group; `facts` become its attributes."""
        chunk = min(CHUNK_ROWS, max(rows, 1))
        self.data = group.create_dataset(
            name, (rows,), dtype, chunks=(chunk,), compression=DEFLATE, shuffle=True
        )
        self.chunk, self.dtype, self.filled = chunk, np.dtype(dtype), 0
        self._known: dict[tuple[int, int], bytes] = {}
        for key, value in facts.items():
            self.data.attrs[key] = value

    def cut(self, numbers: Whole) -> Iterator[Whole]:
        """The numbers in pieces of a chunk's length."""
        for start in range(0, len(numbers), self.chunk):
            yield numbers[start : start + self.chunk]

    def packed(self, piece: Whole) -> bytes:
        """A piece as it stands in the file: shuffled, filled up with zeros, deflated."""
        key = (int(piece[0]), len(piece))
        still = bool((piece == piece[0]).all())
        if still and key in self._known:
            return self._known[key]
        plane = np.zeros((self.dtype.itemsize, self.chunk), np.uint8)
        plane[:, : len(piece)] = piece.astype(self.dtype).view(np.uint8).reshape(len(piece), -1).T
        done = zlib.compress(plane.tobytes(), DEFLATE)
        if still:
            self._known[key] = done
        return done

    def put(self, packed: bytes) -> None:
        """Write the next chunk."""
        self.data.id.write_direct_chunk((self.filled,), packed)
        self.filled += self.chunk


def fill(pool: Executor, work: Iterator[tuple[Grower, Whole]]) -> None:
    """Deflate pieces side by side and write them in order; every piece but a last one is whole."""
    pieces = [(grower, piece) for grower, numbers in work for piece in grower.cut(numbers)]
    packed = pool.map(lambda one: one[0].packed(one[1]), pieces)
    for (grower, _), done in zip(pieces, packed, strict=True):
        grower.put(done)


def facts_of(column: Column, place: int) -> Facts:
    """The attributes of a column's data set: scale in V, range, words, and its place in order."""
    common: dict[str, object] = {"column": place}
    unsigned = np.dtype(column.dtype).type
    if column.kind is Kind.CODE:
        return common | {
            "units": "V",
            "scale_factor": column.scale_factor_V,
            "add_offset": column.add_offset_V,
            "valid_range": np.array([0, column.most], unsigned),
            "between_rows": "line" if column.draws else "hold",
        }
    return common | {
        "flag_values": np.arange(column.most + 1, dtype=unsigned),
        "flag_meanings": " ".join(column.words),
    }


def tick_facts(tick_s: float, exact_s: str) -> Facts:
    """The attributes of the ticks: seconds = tick · scale_factor, in s."""
    return {"units": "s", "scale_factor": tick_s, "add_offset": 0.0, "exact_s": exact_s}
