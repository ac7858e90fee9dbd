"""Exact copies of the sequence, of what it uses and of the trap file, below `sources/`."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.checks.judging import Cleared
from wellseq.emit.sources import copies


def write(cleared: Cleared) -> Iterator[tuple[str, list[bytes]]]:
    """(path, content) of every source, byte for byte as it was read."""
    for copy in copies(cleared.case):
        yield copy.path, [copy.content]
