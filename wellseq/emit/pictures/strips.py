"""View → strips for a terminal: voltages, places and depths of clouds, findings, against the steps.

Time runs from left to right, a step's width growing with the logarithm of how long it lasts.  Each
strip is two lines high, in braille dots (eight levels, two columns to a character; Unicode 16.0,
U+2800) or in ASCII (six levels).  A column shows everything from the least to the greatest value
within it.  Volts V, places m, depths V.
"""

from __future__ import annotations

from collections.abc import Iterator
from itertools import pairwise

import numpy as np

from wellseq.base.finding import Verdict
from wellseq.checks.numbers import amount
from wellseq.emit.excerpt import cells
from wellseq.emit.pictures.courses import Course, Floats, corners_placed
from wellseq.emit.pictures.markup import cut
from wellseq.emit.pictures.rows import clock, note_place, part_name
from wellseq.emit.pictures.scale import DEPTH_SOFT_V, Scale, volts_scale
from wellseq.emit.pictures.score import WHOLE, Score
from wellseq.emit.pictures.tracks import Stay, Track
from wellseq.emit.pictures.view import View

LEFT, RIGHT = 12, 26
LINES = 2
EVEN = 1e9
"""So soft that places (m) go evenly."""
DOTS = ((0x40, 0x80), (0x04, 0x20), (0x02, 0x10), (0x01, 0x08))
"""The bits of a braille cell's dots, lowest row first, left and right."""
SIGNS = "_-'"
MARKS = {Verdict.FAIL: "X", Verdict.UNSURE: "?", Verdict.ALLOWED: "a"}
KEYS = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ"


def strips(view: View, width: int, *, braille: bool) -> str:
    """The whole sequence in `width` columns; ends with a new line; empty without a time axis."""
    axis = view.axis
    if axis is None:
        return ""
    room = max(20, width - LEFT - RIGHT)
    lines = [*_heading(view), "", _ruler(axis, room)]
    moving = sorted((one for one in view.courses if one.moves), key=lambda one: _order(view, one))
    for course in moving:
        lines += _strip(_label(course), _course(course, axis), room, _volts_words(course), braille)
    for track in view.tracks:
        lines += _cloud(view, track, axis, room, braille)
    lines += _findings(view, axis, room)
    lines += _still(view)
    lines += ["", *_legend(view, axis)]
    return "\n".join(line.rstrip() for line in lines) + "\n"


def _heading(view: View) -> Iterator[str]:
    sequence, trap = view.case.sequence, view.trap
    if sequence is not None and trap is not None:
        played = amount(view.thing.duration_s or 0.0, "s")
        yield f"{cut(sequence.name)} on {cut(trap.name)}, {len(view.steps)} steps, {played} played"


def _ruler(axis: Score, room: int) -> str:
    """A letter where each part begins; parts closer than a column share the first one's."""
    line = [" "] * room
    for number, part in enumerate(axis.parts):
        at = min(room - 1, int(part.top / WHOLE * room))
        if line[at] == " ":
            line[at] = KEYS[number % len(KEYS)]
    return " " * LEFT + "".join(line)


def _legend(view: View, axis: Score) -> Iterator[str]:
    for number, part in enumerate(axis.parts[: len(KEYS)]):
        begins = clock(view, part.block, part.start_s)
        yield f"{KEYS[number]}  {_padded(cut(part_name(part), 30), 30)}  {begins}"
    more = len(axis.parts) - len(KEYS)
    if more > 0:
        yield f"{more} more parts are in the report"


def _order(view: View, course: Course) -> int:
    """Outputs go as their electrodes stand, those without one last."""
    places = [view.trap.index(one) for one in course.electrodes] if view.trap is not None else []
    return min(places, default=10**6)


def _label(course: Course) -> str:
    return ", ".join(course.electrodes) or course.output


def _volts_words(course: Course) -> str:
    low, high = course.ends_V
    return f"{amount(low, 'V')} to {amount(high, 'V')}"


def _course(course: Course, axis: Score) -> tuple[list[tuple[Floats, Floats]], Scale]:
    runs = [corners_placed(stretch, axis) for stretch in course.stretches]
    return runs, volts_scale(course.ends_V)


def _ends(stay: Stay) -> tuple[float, float]:
    middle = (stay.from_m + stay.to_m) / 2
    return (middle, middle) if stay.from_ground else (stay.from_m, stay.to_m)


def _cloud(view: View, track: Track, axis: Score, room: int, braille: bool) -> Iterator[str]:
    """Two strips: the place along the axis, and the lesser certified depth with its limit."""
    if not track.shown or view.stage is None:
        yield f"{_padded(cut(track.name, LEFT - 1), LEFT)}is in no proved well"
        return
    places, depths = [], []
    for run in track.runs():
        at = [
            float(end)
            for stay in run
            for end in (axis.after(stay.block, stay.start_s), axis.before(stay.block, stay.end_s))
        ]
        z_m = [end for stay in run for end in _ends(stay)]
        deep = [value for stay in run for value in (stay.lesser.certified_V,) * 2]
        places.append((np.array(at), np.array(z_m)))
        depths.append((np.array(at), np.array(deep)))
    low, high = (float(pick([pick(z) for _, z in places])) for pick in (np.min, np.max))
    even = Scale(view.stage.low_m, view.stage.high_m, EVEN)
    words = f"at {amount(low, 'm')} to {amount(high, 'm')}"
    yield from _strip(cut(track.name, LEFT - 1), (places, even), room, words, braille)
    least = min(track.shown, key=lambda stay: stay.lesser.certified_V - stay.lesser.limit_V)
    reach = [float(pick([pick(deep) for _, deep in depths])) for pick in (np.min, np.max)]
    limit = amount(least.lesser.limit_V, "V")
    words = f">= {amount(least.lesser.certified_V, 'V')} of {limit}"
    scale = volts_scale(reach, DEPTH_SOFT_V)
    yield from _strip("  its depth", (depths, scale), room, words, braille)


def _strip(
    label: str,
    drawn: tuple[list[tuple[Floats, Floats]], Scale],
    room: int,
    words: str,
    braille: bool,
) -> Iterator[str]:
    """A strip of LINES lines: label before it, its range in words after it."""
    runs, scale = drawn
    columns, levels = (room * 2, 4 * LINES) if braille else (room, 3 * LINES)
    low, high = _reached(runs, scale, columns)
    draw = _braille if braille else _ascii
    body = draw(_levels(low, levels), _levels(high, levels), room)
    for number, line in enumerate(body):
        before = _padded(cut(label, LEFT - 1), LEFT) if not number else " " * LEFT
        after = f" {cut(words, RIGHT - 1)}" if number == LINES - 1 else ""
        yield before + line + after


def _reached(
    runs: list[tuple[Floats, Floats]], scale: Scale, columns: int
) -> tuple[Floats, Floats]:
    """Least and greatest share within each column, NaN where nothing is drawn."""
    low, high = np.full(columns, np.inf), np.full(columns, -np.inf)
    edges = np.arange(columns + 1) * (WHOLE / columns)
    for place, value in runs:
        share = np.asarray(scale.share(value))
        inside = (edges >= place[0]) & (edges <= place[-1])
        cut_at = edges[inside]
        between = np.interp(cut_at, place, share)
        points = np.concatenate((place, cut_at, cut_at))
        values = np.concatenate((share, between, between))
        # A value on an edge belongs to both columns.
        column = np.concatenate(
            (
                np.floor(place / WHOLE * columns),
                np.round(cut_at / WHOLE * columns),
                np.round(cut_at / WHOLE * columns) - 1,
            )
        ).astype(int)
        fits = (column >= 0) & (column < columns) & np.isfinite(values[: len(points)])
        np.minimum.at(low, column[fits], values[fits])
        np.maximum.at(high, column[fits], values[fits])
    seen = np.isfinite(low)
    return np.where(seen, low, np.nan), np.where(seen, high, np.nan)


def _levels(share: Floats, levels: int) -> list[int]:
    """The level of each share from 0, lowest; -1 where there is none."""
    known = np.isfinite(share)
    found = np.clip(np.floor(np.where(known, share, 0.0) * levels), 0, levels - 1)
    return [int(level) if there else -1 for level, there in zip(found, known, strict=True)]


def _braille(low: list[int], high: list[int], room: int) -> list[str]:
    lines = []
    for line in reversed(range(LINES)):
        text = []
        for at in range(room):
            bits = 0
            for side in range(2):
                bottom, top = low[2 * at + side], high[2 * at + side]
                for row in range(4):
                    if 0 <= bottom <= 4 * line + row <= top:
                        bits |= DOTS[row][side]
            text.append(chr(0x2800 + bits) if bits else " ")
        lines.append("".join(text))
    return lines


def _ascii(low: list[int], high: list[int], room: int) -> list[str]:
    lines = []
    for line in reversed(range(LINES)):
        text = []
        for at in range(room):
            inside = [row for row in range(3) if 0 <= low[at] <= 3 * line + row <= high[at]]
            text.append(" " if not inside else SIGNS[inside[0]] if len(inside) == 1 else "|")
        lines.append("".join(text))
    return lines


def _findings(view: View, axis: Score, room: int) -> Iterator[str]:
    line = [" "] * room
    for note in reversed(view.notes):
        if note.at is not None and note.finding.verdict in MARKS:
            at = min(room - 1, int(note_place(note, axis) / WHOLE * room))
            line[at] = MARKS[note.finding.verdict]
    if any(sign != " " for sign in line):
        yield f"{'findings':{LEFT}}{''.join(line)} X fail ? unsure"


def _still(view: View) -> Iterator[str]:
    """Outputs that never move, by the volts at which they stand."""
    levels: dict[float, list[str]] = {}
    for course in view.courses:
        if not course.moves and course.electrodes:
            levels.setdefault(course.ends_V[0], []).append(_label(course))
    for level, names in sorted(levels.items()):
        yield f"always at {amount(level, 'V')}: {cut(', '.join(names), 60)}"


def _padded(text: str, width: int) -> str:
    """A text filled up to so many cells of a terminal, wide letters counted as two."""
    used = 0
    for character, _ in pairwise([*text, ""]):
        used += cells(character, used)
    return text + " " * max(0, width - used)
