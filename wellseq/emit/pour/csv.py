"""Samples as CSV (RFC 4180), the columns of a block's table: ticks, codes and volts, words."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.emit.expand import Poured
from wellseq.emit.lines import header, lines


def write(poured: Poured) -> Iterator[bytes]:
    """The lines, the names of the columns first."""
    yield header(poured.rows.columns)
    for run in poured.samples():
        yield from lines(run)
