"""Switches, lines, drives and dangerous outputs over time: one column each, time down the page.

A column is empty while its line is in its first state, a bar with the state's word while it is in
another; a drive is a bar with its frequencies, an output above the touch limit a hatched bar.
Times are s of the block, volts V, frequencies Hz.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from wellseq.checks.numbers import amount
from wellseq.emit.hazards import TOUCH_V
from wellseq.emit.pictures.bore import percent
from wellseq.emit.pictures.markup import Markup, cut, tag
from wellseq.emit.pictures.rows import TALL, clock, part_lines
from wellseq.emit.pictures.score import WHOLE, Score
from wellseq.emit.pictures.view import View
from wellseq.model.trap import Switch, Trap
from wellseq.timeline.timeline import Block

BARS_MOST = 1500
WORD_LEAST = 34


@dataclass(frozen=True, slots=True)
class Bar:
    """Something lasts in a column from one place on the axis to another; `when` is in words."""

    top: float
    bottom: float
    word: str
    when: str


@dataclass(frozen=True, slots=True)
class Column:
    """One line, switch, ring or output: what it is, and when it does something."""

    name: str
    what: str
    bars: tuple[Bar, ...]


def columns(view: View, axis: Score) -> tuple[Column, ...]:
    """All columns: switches, lines, driven rings, outputs above the touch limit."""
    timeline, trap = view.case.timeline, view.trap
    if timeline is None or trap is None:
        return ()
    found = [*_switches(view, axis, trap), *_lines(view, axis, trap)]
    found += list(_drives(view, axis))
    for one in view.hazards:
        bars = tuple(
            _bar(view, axis, (block, start, end), f"above {TOUCH_V:g} V")
            for block, start, end in one.windows
        )
        if bars:
            found.append(Column(one.output, "danger", bars))
    return tuple(found)


def panel(all_columns: tuple[Column, ...], axis: Score) -> Markup:
    """All columns side by side."""
    share = 1 / max(1, len(all_columns))
    words = "; ".join(f"{cut(one.name)}: {len(one.bars)} times" for one in all_columns)
    return tag(
        "svg",
        tag("title", "Switches, lines, drives and outputs above the touch limit, time downwards"),
        tag("desc", f"{words}. The table of changes holds every instant."),
        part_lines(axis),
        [_column(at * share, share, one) for at, one in enumerate(all_columns)],
        class_="time signals",
        role="img",
    )


def heads(all_columns: tuple[Column, ...]) -> Markup:
    """The names of all columns, slanting over them."""
    share = 100 / max(1, len(all_columns))
    texts = [
        tag(
            "svg",
            tag(
                "text",
                cut(one.name, 16),
                tag("title", f"{cut(one.name)}, {one.what}"),
                x=2,
                y=86,
                transform="rotate(-52 2 86)",
                class_=one.what,
            ),
            x=percent((at + 0.35) * share / 100),
            class_="head",
        )
        for at, one in enumerate(all_columns)
    ]
    return tag("svg", texts, class_="heads", aria_hidden="true")


def _column(left: float, share: float, column: Column) -> Markup:
    middle = percent(left + share / 2)
    thread = tag("line", x1=middle, x2=middle, y1="0%", y2="100%", class_="thread")
    bars = []
    for bar in column.bars[:BARS_MOST]:
        high = bar.bottom - bar.top
        small = high / WHOLE * TALL < WORD_LEAST
        y = percent((bar.top + bar.bottom) / 2 / WHOLE)
        bars.append(
            tag(
                "rect",
                tag("title", f"{cut(column.name)}: {bar.word}, {bar.when}"),
                x=percent(left + share * 0.14),
                width=percent(share * 0.72),
                y=percent(bar.top / WHOLE),
                height=percent(high / WHOLE),
                class_=f"bar {column.what}",
            )
        )
        bars.append(
            tag(
                "svg",
                tag("text", cut(bar.word, 22), transform="rotate(90)", dy=4, class_="word"),
                x=middle,
                y=y,
                class_="turned" + (" tiny" if small else ""),
                data_y=round(bar.top),
                data_h=round(high),
                data_least=max(WORD_LEAST, 6 * len(cut(bar.word, 22))),
            )
        )
    return tag("g", thread, bars)


def _bar(view: View, axis: Score, at: tuple[int, float, float], word: str) -> Bar:
    block, start_s, end_s = at
    top, bottom = float(axis.after(block, start_s)), float(axis.before(block, end_s))
    when = f"{clock(view, block, start_s)} to {amount(end_s, 's')}"
    return Bar(top, max(bottom, top + WHOLE / TALL * 2), word, when)


def _switches(view: View, axis: Score, trap: Trap) -> Iterator[Column]:
    for switch in trap.outputs:
        if not isinstance(switch, Switch):
            continue
        words = [level if isinstance(level, str) else amount(level, "V") for level in switch.levels]
        bars: list[Bar] = []
        for block in _blocks(view):
            changes = [
                (float(edge.start_s), edge.to_level)
                for edge in block.edges
                if edge.output == switch.name
            ]
            bars += _held(view, axis, block, block.levels[switch.name], changes, words)
        users = ", ".join(trap.electrodes_of(switch.name)) or switch.name
        yield Column(users, "switch", tuple(bars))


def _lines(view: View, axis: Score, trap: Trap) -> Iterator[Column]:
    for line in trap.lines:
        words = [*line.states]
        bars: list[Bar] = []
        for block in _blocks(view):
            changes = [
                (float(change.time_s), words.index(change.state))
                for change in block.changes
                if change.line == line.name and not change.expected
            ]
            if line.kind == "input":
                bars += [
                    _bar(view, axis, (block.index, at, at), f"expected {state}")
                    for at, state in _expected(block, line.name)
                ]
                continue
            first = words.index(block.states[line.name])
            bars += _held(view, axis, block, first, changes, words, words.index(line.initial))
        yield Column(line.name, "line", tuple(bars))


def _expected(block: Block, line: str) -> Iterator[tuple[float, str]]:
    for change in block.changes:
        if change.line == line and change.expected:
            yield float(change.time_s), change.state


def _held(
    view: View,
    axis: Score,
    block: Block,
    first: int,
    changes: list[tuple[float, int]],
    words: list[str],
    resting: int = 0,
) -> Iterator[Bar]:
    """A bar for every stretch of a block in which the state is not the one it rests in."""
    state, since = first, 0.0
    for at, to in [*changes, (float(block.duration_s), first)]:
        if state != resting and (at > since or block.duration_s == 0):
            yield _bar(view, axis, (block.index, since, at), words[state])
        state, since = to, at


def _drives(view: View, axis: Score) -> Iterator[Column]:
    rings: dict[str, list[Bar]] = {}
    for block in _blocks(view):
        for drive in block.drives:
            word = f"{amount(drive.from_Hz, 'Hz')} to {amount(drive.to_Hz, 'Hz')}"
            at = block.index, float(drive.start_s), float(drive.stop_s)
            said = f"{word}, {amount(drive.amplitude_V, 'V')}"
            rings.setdefault(drive.ring, []).append(_bar(view, axis, at, said))
    for ring, bars in rings.items():
        yield Column(ring, "drive", tuple(bars))


def _blocks(view: View) -> tuple[Block, ...]:
    return view.case.timeline.blocks if view.case.timeline is not None else ()
