"""Tables, sections and the cells that the page's tables share: figures, places, instants.

Every figure stands as a `data` element whose value is the exact number of the JSON report; what is
not known says so.  A link to an instant leads to the step's row, and moves the slider where scripts
run.  Values in SI units, energies in eV; times s of the block.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence

from wellseq.base.place import Place
from wellseq.checks.numbers import amount
from wellseq.emit.pictures.facts import anchor
from wellseq.emit.pictures.markup import Markup, cut, joined, number, tag
from wellseq.emit.pictures.rows import clock
from wellseq.emit.pictures.view import View

ROWS_MOST = 1500
ABSENT = "not known"
Cell = str | Iterable[str]


def table(caption: str, head: Sequence[str], rows: Iterable[Sequence[Cell]], **of: str) -> Markup:
    """A table in a region that scrolls by keyboard too; one sentence where there is no row."""
    body = [
        tag(
            "tr",
            [
                tag("th" if not at else "td", cell, scope="row" if not at else None)
                for at, cell in enumerate(row)
            ],
        )
        for row in rows
    ]
    if not body:
        return tag("p", f"{caption}: none.", class_="none")
    more = len(body) - ROWS_MOST
    left_out = tag("p", f"{more} more rows are in the JSON report.") if more > 0 else ""
    heads = tag("tr", [tag("th", one, scope="col") for one in head])
    whole = tag(
        "table", tag("caption", caption), tag("thead", heads), tag("tbody", body[:ROWS_MOST])
    )
    return joined(
        tag("div", whole, class_="wide", tabindex=0, role="region", aria_label=caption, **of),
        left_out,
    )


def section(place: str, heading: str, *inside: Markup) -> Markup:
    """A part of the page under a heading, with the id that links lead to."""
    return tag(
        "section",
        tag("h2", heading, id=f"{place}-heading"),
        *inside,
        id=place,
        aria_labelledby=f"{place}-heading",
        class_="listing",
    )


def folded(words: str, inside: Markup) -> Markup:
    """Something long under a line of words that opens it."""
    return tag("details", tag("summary", words), inside)


def figure(value: float | None, unit: str) -> Markup:
    """A value in its unit as people read it, its exact value beside it; or that it is not known."""
    if value is None or not math.isfinite(value):
        return tag("span", ABSENT, class_="absent")
    return number(value, amount(value, unit))


def where(view: View, place: Place) -> Markup:
    """A place in a source, as a link to its line where the page has that source."""
    files = [*view.thing.sources]
    said = f"{cut(view.name_of(place.file).rsplit('/', 1)[-1], 30)}:{place.line}"
    if place.file not in files:
        return tag("bdi", said)
    return tag("a", tag("bdi", said), href=f"#{anchor(files.index(place.file), place.line)}")


def when(view: View, at: tuple[int, float, float] | None) -> Cell:
    """An instant (block, start, end in s) as a link that moves the slider there."""
    if at is None or not view.drawn or not all(map(math.isfinite, at[1:])):
        return ""
    return instant(view, at[0], at[1], clock(view, at[0], at[1]))


def instant(view: View, block: int, time_s: float, words: str) -> Markup:
    """A link to an instant (s) of a block; without scripts it leads to the step that begins it."""
    step = view.step_at(block, time_s)
    target = "#steps" if step is None or step >= ROWS_MOST else f"#step-{step}"
    return tag("a", words, href=target, data_block=block, data_s=repr(float(time_s)))
