"""A page for people, before it has a form: sections of paragraphs, lists, tables and one chart.

Words are of two kinds.  A plain text may come from a trap or a sequence file, and every form writes
it so that it cannot act.  A `Trusted` text is our own and may hold `**strong**`, `*stressed*` and
`` `code` ``.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass

from wellseq.base.data import data_folder


class Trusted(str):
    """Words of the house, with their marks."""


Words = tuple[str, ...]
"""Texts that follow each other without a blank."""


@dataclass(frozen=True, slots=True)
class Paragraph:
    """A few sentences."""

    words: Words


@dataclass(frozen=True, slots=True)
class Bullets:
    """A list."""

    items: tuple[Words, ...]


@dataclass(frozen=True, slots=True)
class Table:
    """Rows of cells under a head; the head is our own."""

    head: tuple[str, ...]
    rows: tuple[tuple[Words, ...], ...]


@dataclass(frozen=True, slots=True)
class Bar:
    """A stretch of one row of a chart: from and to (s) of a stretch of the chart by its number."""

    stretch: int
    start_s: float
    end_s: float


@dataclass(frozen=True, slots=True)
class ChartRow:
    """One row of a chart: what it shows, of which kind, and when it is so.

    `kind` is high (above extra-low voltage), live (above touch), drive or line.
    """

    label: str
    kind: str
    bars: tuple[Bar, ...]


@dataclass(frozen=True, slots=True)
class Chart:
    """What is live when: stretches of time side by side, each to its own scale.

    `stretches` are (name, length in s, whether it is a wait).
    """

    stretches: tuple[tuple[str, float, bool], ...]
    rows: tuple[ChartRow, ...]


Part = Paragraph | Bullets | Table | Chart


@dataclass(frozen=True, slots=True)
class Section:
    """Parts under a heading of our own; `key` is a short name for links."""

    key: str
    heading: str
    parts: tuple[Part, ...]


@dataclass(frozen=True, slots=True)
class Page:
    """A whole page: its title, what stands under it, and its sections in order."""

    title: Words
    lead: tuple[Part, ...]
    sections: tuple[Section, ...]


def paragraph(*words: str) -> Paragraph:
    """A paragraph of these words."""
    return Paragraph(words)


def table(head: Iterable[str], rows: Iterable[Iterable[str | Words]]) -> Table:
    """A table; a cell is one text or several."""
    cells = tuple(
        tuple(cell if isinstance(cell, tuple) else (cell,) for cell in row) for row in rows
    )
    return Table(tuple(head), cells)


def section(key: str, heading: str, *parts: Part | None) -> Section | None:
    """A section of the parts that there are; None when there is none."""
    there = tuple(part for part in parts if part is not None)
    return Section(key, heading, there) if there else None


def standing(name: str) -> Iterator[Part]:
    """A standing text of `safety/texts/`, as paragraphs and lists."""
    text = (data_folder("safety") / "texts" / f"{name}.md").read_text("utf-8").strip()
    for block in text.split("\n\n"):
        if block.startswith("- "):
            items = block.removeprefix("- ").split("\n- ")
            yield Bullets(tuple((Trusted(_flat(item)),) for item in items))
        else:
            yield Paragraph((Trusted(_flat(block)),))


def _flat(text: str) -> str:
    return " ".join(text.split())
