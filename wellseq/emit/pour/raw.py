"""Samples as bare little-endian whole numbers, sample by sample: codes, levels, states in order."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.emit.expand import Poured


def write(poured: Poured) -> Iterator[bytes]:
    """The numbers, all of the type that `poured.dtype` names."""
    yield from poured.tables()
