"""Samples as one NPY array (samples, columns) of unsigned little-endian whole numbers."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.emit.expand import Poured
from wellseq.emit.npy import head


def write(poured: Poured) -> Iterator[bytes]:
    """The array, its head first."""
    yield head(poured.dtype, (poured.count, len(poured.rows.columns)))
    yield from poured.tables()
