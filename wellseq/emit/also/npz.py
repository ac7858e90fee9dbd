"""Each block → one NPZ: plain arrays only, nothing pickled, not compressed, bytes that repeat.

A ZIP of NPY arrays, stored.  `tick` (rows,) int64; `codes` (rows, converters), `levels` (rows,
switches), `states` (rows, lines) unsigned; names and words as text; `scale_factor` (V per code) and
`add_offset` (V) per converter; times in s.
"""

from __future__ import annotations

import errno
import zipfile
from collections.abc import Iterable, Iterator
from math import prod
from typing import IO, cast

import numpy as np
import numpy.typing as npt

from wellseq.emit.blocks import also_name, exact
from wellseq.emit.columns import Kind, Rows, narrowest, rows_of
from wellseq.emit.content import content_id, drive_table
from wellseq.emit.keys import Key
from wellseq.emit.npy import head
from wellseq.timeline.timeline import Block

CHUNK_ROWS = 65536
STAMP = (1980, 1, 1, 0, 0, 0)
"""The earliest date a ZIP can hold: no clock has a say in the bytes."""
BYTES_MAX = 2**31 - 2**20
"""The longest array that needs no extension of the ZIP form."""
Part = tuple[str, str, tuple[int, ...], Iterable[bytes | memoryview]]


def missing() -> str:
    """What has to be installed first: nothing."""
    return ""


def write(key: Key) -> Iterator[tuple[str, Iterator[bytes]]]:
    """(name, content) of the NPZ of every block; volts in V, times in s."""
    trap, shipped = key.case.trap, key.case.shipped
    if trap is None or shipped is None:
        return
    identity = content_id(shipped)
    for block in shipped.blocks:
        rows = rows_of(trap, shipped, block)
        yield also_name(block.block, "npz"), _archive(_parts(rows, block.block, identity))


def _parts(rows: Rows, block: Block, identity: str) -> Iterator[Part]:
    """(name, dtype, shape, elements) of every array."""
    yield "tick", "<i8", (len(rows.ticks),), _runs(rows.ticks, "<i8")
    for kind, table in zip(Kind, rows.tables, strict=True):
        chosen = rows.of(kind)
        dtype = narrowest(max((rows.columns[at].most for at in chosen), default=0))
        yield kind.value, dtype, table.shape, _runs(table, dtype)
    for name, kind in (("converters", Kind.CODE), ("switches", Kind.LEVEL), ("lines", Kind.STATE)):
        yield _text(name, [rows.columns[at].name for at in rows.of(kind)])
    codes = [rows.columns[at] for at in rows.of(Kind.CODE)]
    yield _floats("scale_factor", [column.scale_factor_V for column in codes])
    yield _floats("add_offset", [column.add_offset_V for column in codes])
    for name, kind in (("level_words", Kind.LEVEL), ("state_words", Kind.STATE)):
        yield _text(name, _ragged([rows.columns[at].words for at in rows.of(kind)]))
    yield _text("drives", _ragged(drive_table(block)))
    yield "tick_s", "<f8", (), [np.float64(float(rows.tick_s)).tobytes()]
    for name, said in (
        ("tick_exact_s", exact(rows.tick_s)),
        ("block", block.name),
        ("trigger", block.trigger),
        ("content_id", identity),
    ):
        yield _text(name, said)


def _ragged(table: Iterable[Iterable[str]]) -> list[list[str]]:
    """Lines of unequal length, filled up with empty texts."""
    found = [list(line) for line in table]
    width = max(map(len, found), default=0)
    return [line + [""] * (width - len(line)) for line in found]


def _text(name: str, texts: str | list[str] | list[list[str]]) -> Part:
    array = np.array(texts, dtype=np.str_) if texts else np.zeros(np.shape(texts), dtype="<U1")
    dtype = array.dtype.newbyteorder("<")
    return name, dtype.str, array.shape, [array.astype(dtype).tobytes()]


def _floats(name: str, numbers: list[float]) -> Part:
    return name, "<f8", (len(numbers),), [np.array(numbers, dtype="<f8").tobytes()]


def _runs(table: npt.NDArray[np.integer], dtype: str) -> Iterator[memoryview]:
    """The elements row by row, a run of rows at a time."""
    for start in range(0, len(table) if table.size else 0, CHUNK_ROWS):
        run = np.ascontiguousarray(table[start : start + CHUNK_ROWS], dtype=dtype)
        yield run.data.cast("B")


class _Sink:
    """A stream without a way back that hands over what was written to it."""

    def __init__(self) -> None:
        self.pieces: list[bytes] = []

    def write(self, piece: bytes | memoryview) -> int:
        self.pieces.append(bytes(piece))
        return len(piece)

    def flush(self) -> None:
        """Nothing is held back."""

    def taken(self) -> Iterator[bytes]:
        pieces, self.pieces = self.pieces, []
        return iter(pieces)


def _archive(parts: Iterable[Part]) -> Iterator[bytes]:
    sink = _Sink()
    with zipfile.ZipFile(cast(IO[bytes], sink), "w", zipfile.ZIP_STORED) as archive:
        for name, dtype, shape, elements in parts:
            if prod(shape) * int(dtype[-1]) > BYTES_MAX and dtype[-2] != "U":
                raise OSError(errno.EFBIG, "this table is too long for an NPZ")
            entry = zipfile.ZipInfo(f"{name}.npy", STAMP)
            entry.create_system, entry.external_attr = 3, 0o644 << 16
            with archive.open(entry, "w") as stream:
                stream.write(head(dtype, shape))
                for piece in elements:
                    stream.write(piece)
                    yield from sink.taken()
    yield from sink.taken()
