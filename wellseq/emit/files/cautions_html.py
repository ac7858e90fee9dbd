"""`cautions.html`: the cautions as one page that needs nothing else, on the screen and in print."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.emit.cautions import cautions
from wellseq.emit.html import rendered
from wellseq.emit.keys import Key


def write(key: Key) -> Iterator[tuple[str, list[bytes]]]:
    """(name, content) of the cautions."""
    page = cautions(key.case)
    if page is not None:
        yield "cautions.html", [rendered(page).encode()]
