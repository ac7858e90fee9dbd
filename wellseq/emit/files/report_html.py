"""`report.html`: the sequence as pictures, for whoever wants to see it before it is played."""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.emit.keys import Draft, Key
from wellseq.emit.pictures.markup import Markup
from wellseq.emit.pictures.page import report
from wellseq.emit.pictures.view import view

CLEARED = Markup(
    "The tables beside this page were cleared and read back: read "
    '<a href="cautions.html">the cautions</a> first.'
)
DRAFT = "DRAFT: the tables beside this page are for looking at and must not be played."


def write(key: Key) -> Iterator[tuple[str, list[bytes]]]:
    """(name, content) of the page of a case that is published or drafted."""
    yield "report.html", [report(view(key.case), DRAFT if isinstance(key, Draft) else CLEARED)]
