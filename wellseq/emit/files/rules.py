"""Exact copies of the rules files that come with wellseq, below `rules/`.

The laboratory's own stand below `sources/`, beside the trap file that names them.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.emit.interlocks import house_files
from wellseq.emit.keys import Key


def write(key: Key) -> Iterator[tuple[str, list[bytes]]]:
    """(path, content) of every file, byte for byte."""
    for path, content in house_files(key.case):
        yield path, [content]
