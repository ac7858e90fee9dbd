"""The gutter of the score: the parts by their labels, the steps as they are written, the findings.

A row's text is shown where its row is high enough; at first the score is TALL px high.  Places
down the page are shares of its height.  Times are s of the block.
"""

from __future__ import annotations

from collections.abc import Iterator

from wellseq.base.finding import Verdict
from wellseq.checks.numbers import amount
from wellseq.emit.pictures.bore import percent
from wellseq.emit.pictures.markup import Markup, cut, tag
from wellseq.emit.pictures.score import WHOLE, Cell, Part, Score
from wellseq.emit.pictures.view import Note, Step, View

TALL = 960
"""Height of the whole score at first, px."""
ROW_LONG = 25
ROW_LEAST, LABEL_LEAST = 10, 13
"""Heights below which a step's text and a part's label are left out, px."""
SIGNS = {Verdict.FAIL: "✕", Verdict.UNSURE: "?", Verdict.ALLOWED: "✓", Verdict.PASS: "·"}
MARKS_MOST = 300


def gutter(view: View, axis: Score) -> Markup:
    """Labels, steps, block times and marks of findings, from the first step down to the last."""
    steps = {step.number: step for step in view.steps}
    return _gutter(axis, [_row(cell, steps) for cell in axis.cells], list(_marks(view, axis)))


def labels(axis: Score) -> Markup:
    """The gutter once more with labels alone, for panels that stand apart from the first."""
    return _gutter(axis)


def _gutter(axis: Score, *more: list[Markup]) -> Markup:
    return tag(
        "svg",
        part_lines(axis),
        [_part(part) for part in axis.parts],
        *more,
        class_="time gutter",
        aria_hidden="true",
    )


def part_lines(axis: Score) -> list[Markup]:
    """A line across where a part begins, and a band where a trigger is waited for."""
    found = []
    for part in axis.parts:
        y = percent(part.top / WHOLE)
        found.append(tag("line", x1="0%", x2="100%", y1=y, y2=y, class_="part"))
    for cell in axis.cells:
        if cell.wait:
            high = percent((cell.bottom - cell.top) / WHOLE)
            y = percent(cell.top / WHOLE)
            found.append(tag("rect", x="0%", width="100%", y=y, height=high, class_="wait"))
    return found


def part_name(part: Part) -> str:
    """The label of a part, or a word for what comes before the first label."""
    return part.label or "at the start"


def clock(view: View, block: int, time_s: float) -> str:
    """An instant (s) as people say it: after the start of the run, or after a trigger."""
    name = cut(view.case.block_name(block), 24)
    return f"{name} + {amount(time_s, 's')}"


def _part(part: Part) -> Markup:
    high = part.bottom - part.top
    small = high / WHOLE * TALL < LABEL_LEAST
    y = percent(part.top / WHOLE)
    look = "label" + (" tiny" if small else "")
    return tag(
        "g",
        tag("text", cut(part_name(part), 26), x=4, y=y, dy=11, class_="label"),
        tag("text", amount(part.start_s, "s"), x="100%", dx=-4, y=y, dy=11, class_="when"),
        class_=look,
        data_y=round(part.top),
        data_h=round(high),
    )


def _row(cell: Cell, steps: dict[int, Step]) -> Markup:
    high = cell.bottom - cell.top
    if cell.wait:
        text = "wait for the trigger"
    elif cell.numbers and cell.numbers[-1] in steps:
        text = steps[cell.numbers[-1]].text
    else:
        return Markup("")
    small = high / WHOLE * TALL < ROW_LEAST
    return tag(
        "text",
        cut(text, ROW_LONG),
        x="42%",
        y=percent((cell.top + cell.bottom) / 2 / WHOLE),
        dy=4,
        class_="row" + (" tiny" if small else ""),
        data_y=round(cell.top),
        data_h=round(high),
    )


def _marks(view: View, axis: Score) -> Iterator[Markup]:
    """A sign beside the axis for every finding that is no pass, as far as there is room."""
    noted = [note for note in view.notes if note.finding.verdict is not Verdict.PASS and note.at]
    for note in noted[:MARKS_MOST]:
        yield tag(
            "text",
            SIGNS[note.finding.verdict],
            tag("title", cut(f"{note.finding.name}: {note.finding.message}", 200)),
            x="38%",
            y=percent(note_place(note, axis) / WHOLE),
            dy=4,
            class_=f"mark {note.finding.verdict.value}",
        )


def note_place(note: Note, axis: Score) -> float:
    """Where a finding stands on the axis: the middle of its window (s)."""
    assert note.at is not None
    block, start_s, end_s = note.at
    return float(axis.after(block, start_s) + axis.before(block, end_s)) / 2
