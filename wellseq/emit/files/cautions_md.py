"""`cautions.md`: the cautions as Markdown."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.emit.cautions import cautions
from wellseq.emit.keys import Key
from wellseq.emit.markdown import rendered


def write(key: Key) -> Iterator[tuple[str, list[bytes]]]:
    """(name, content) of the cautions."""
    page = cautions(key.case)
    if page is not None:
        yield "cautions.md", [rendered(page).encode()]
