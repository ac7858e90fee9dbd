"""The score below the scene: time runs down the page, as the text does; across it lies the trap.

Under every electrode runs the strip of its voltage, to the right where it is positive and to the
left where it is negative, and over them each cloud's track.  Beside them each cloud's depth: the
certified depth on both sides, what was evaluated at least, and the limit.  Volts V, places m,
depths V; down the page goes the score's own axis.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from wellseq.checks.numbers import amount
from wellseq.emit.pictures.bore import percent
from wellseq.emit.pictures.courses import Course, Floats, corners_placed
from wellseq.emit.pictures.markup import Markup, cut, tag
from wellseq.emit.pictures.palette import cloud_look
from wellseq.emit.pictures.rows import part_lines
from wellseq.emit.pictures.scale import Scale, depth_scale, volts_scale
from wellseq.emit.pictures.score import WHOLE, Score
from wellseq.emit.pictures.stage import Stage
from wellseq.emit.pictures.tracks import Stay, Track
from wellseq.emit.pictures.view import View

WIDE = 10_000
TICK_APART = 0.42
FILL = 0.92
"""How much of an electrode's half width its largest voltage fills."""


def strips(view: View, stage: Stage, axis: Score) -> Markup:
    """The voltage of every electrode under its own place, and the tracks of all clouds."""
    most = max((abs(end) for one in view.courses for end in one.ends_V), default=1.0) or 1.0
    both = volts_scale((most, -most))
    words = ", ".join(f"{cut(track.name)}: {len(track.stays)} stretches" for track in view.tracks)
    return tag(
        "svg",
        tag("title", "Voltages under their electrodes and tracks of clouds, time downwards"),
        tag("desc", f"Clouds: {words or 'none'}. The tables below hold the figures."),
        [_lane(stage, one.from_m, one.to_m) for one in stage.trap.electrodes],
        part_lines(axis),
        _down(
            [path for course in view.courses for path in _strip(course, stage, axis, both)],
            [_lengths(view, number, stage, axis) for number in range(len(view.tracks))],
            [_track(number, track, stage, axis) for number, track in enumerate(view.tracks)],
        ),
        [
            mark
            for number, track in enumerate(view.tracks)
            for mark in _ends(number, track, stage, axis)
        ],
        class_="time strips",
        role="img",
    )


def _down(*paths: list[Markup]) -> Markup:
    """Paths in units of WIDE across and the score's own down, stretched to the panel."""
    return tag(
        "svg",
        *paths,
        viewBox=f"0 0 {WIDE} {WHOLE}",
        preserveAspectRatio="none",
        class_="plot",
        aria_hidden="true",
    )


def _lane(stage: Stage, from_m: float, to_m: float) -> Markup:
    left, right = stage.share(from_m), stage.share(to_m)
    return tag(
        "rect", x=percent(left), width=percent(right - left), y="0%", height="100%", class_="lane"
    )


def _strip(course: Course, stage: Stage, axis: Score, both: Scale) -> Iterator[Markup]:
    """The filled course of an output under each of its electrodes, its two signs apart."""
    if course.ends_V == (0.0, 0.0):
        return
    for name in course.electrodes:
        one = stage.trap.electrode(name)
        middle, half = stage.share(one.middle_m) * WIDE, stage.share(one.to_m) * WIDE
        reach = (half - middle) * FILL
        for sign, look in ((1, "plus"), (-1, "minus")):
            pieces = []
            for stretch in course.stretches:
                place, volts = _signed(*corners_placed(stretch, axis), sign)
                if not volts.any():
                    continue
                share = 2 * np.asarray(both.share(volts)) - 1
                pieces.append(_filled(middle + reach * share, place, middle))
            if pieces:
                yield tag("path", d="".join(pieces), class_=f"fill {look}")


def _signed(place: Floats, volts: Floats, sign: int) -> tuple[Floats, Floats]:
    """The part of a course with one sign, its zeros put in where it crosses."""
    cross = np.flatnonzero(volts[:-1] * volts[1:] < 0)
    share = volts[cross] / (volts[cross] - volts[cross + 1])
    zero = place[cross] + (place[cross + 1] - place[cross]) * share
    places, values = np.insert(place, cross + 1, zero), np.insert(volts, cross + 1, 0.0)
    part = np.maximum(values * sign, 0.0) * sign
    # Corners within a stretch at zero say nothing.
    needed = (part != 0) | np.append(part[1:] != 0, False) | np.append(False, part[:-1] != 0)
    return places[needed], part[needed]


def _filled(x: Floats, y: Floats, middle: float) -> str:
    across, down = np.round(x).astype(int).tolist(), np.round(y).astype(int).tolist()
    corners = [f"{one},{other}" for one, other in zip(across, down, strict=True)]
    return f"M{middle:.0f},{down[0]}L{'L'.join(corners)}L{middle:.0f},{down[-1]}Z"


def _track(number: int, track: Track, stage: Stage, axis: Score) -> Markup:
    colour, dash = cloud_look(number)
    pieces = []
    for run in track.runs():
        corners = []
        for stay in run:
            low, high = _rows(stay, axis)
            corners += [(_middle(stay, stay.from_m), low), (_middle(stay, stay.to_m), high)]
        pieces.append("M" + "L".join(f"{stage.share(z) * WIDE:.0f},{y:.0f}" for z, y in corners))
    if not pieces:
        return Markup("")
    return tag("path", d="".join(pieces), class_=f"track {colour}", stroke_dasharray=dash or None)


def _lengths(view: View, number: int, stage: Stage, axis: Score) -> Markup:
    """The forecast length of a cloud around its track, step by step, where it is known."""
    track, pieces = view.tracks[number], []
    colour, _ = cloud_look(number)
    for told in view.told:
        figure, stay = told.figure("length"), track.at(told.block, told.end_s)
        if told.cloud != track.name or figure is None or stay is None or stay.from_ground:
            continue
        low, high = (stage.share(stay.to_m + side * figure.value / 2) * WIDE for side in (-1, 1))
        top = float(axis.after(told.block, told.start_s))
        bottom = float(axis.before(told.block, told.end_s))
        pieces.append(f"M{low:.0f},{top:.0f}L{high:.0f},{top:.0f}")
        pieces.append(f"L{high:.0f},{bottom:.0f}L{low:.0f},{bottom:.0f}Z")
    return tag("path", d="".join(pieces), class_=f"spread {colour}") if pieces else Markup("")


def _middle(stay: Stay, place_m: float) -> float:
    """Where a track is drawn: a bunch between gates in their middle."""
    return (stay.from_m + stay.to_m) / 2 if stay.from_ground else place_m


def _rows(stay: Stay, axis: Score) -> tuple[float, float]:
    top, bottom = axis.after(stay.block, stay.start_s), axis.before(stay.block, stay.end_s)
    return float(top), float(bottom)


def _ends(number: int, track: Track, stage: Stage, axis: Score) -> Iterator[Markup]:
    """Where each unbroken stretch of a track begins (full disc) and ends (open disc)."""
    colour, _ = cloud_look(number)
    sign = "+" if track.sign > 0 else "−"
    for run in track.runs():
        for stay, place_m, end in ((run[0], run[0].from_m, 0), (run[-1], run[-1].to_m, 1)):
            x = percent(stage.share(_middle(stay, place_m)))
            y = percent(_rows(stay, axis)[end] / WHOLE)
            look = "open" if end else "full"
            yield tag("circle", cx=x, cy=y, r=6, class_=f"end {look} {colour}")
            yield tag("text", sign, x=x, y=y, dy=4, class_=f"charge {look} {colour}")
            if not end and run[0] is track.shown[0]:
                yield tag(
                    "text", cut(track.name, 16), x=x, y=y, dx=10, dy=4, class_=f"who {colour}"
                )


def depth_panel(view: View, number: int, axis: Score) -> Markup:
    """One cloud's depth over time: certified left and right, evaluated at least, and the limit.

    Bars across are the forecast of what space charge leaves of it, from low to high.
    """
    track = view.tracks[number]
    colour, _ = cloud_look(number)
    scale = depth_scale(
        value
        for stay in track.shown
        for side in (stay.left, stay.right)
        for value in (side.certified_V, side.limit_V)
    )
    left, right, band, limit = _depth_paths(track, axis, scale)
    least = min((stay.lesser.certified_V for stay in track.shown), default=float("nan"))
    return tag(
        "svg",
        tag("title", f"Depth of the well of {cut(track.name)}, time downwards"),
        tag("desc", f"Least certified depth {amount(least, 'V')}; see the table of depths."),
        part_lines(axis),
        _ticks(scale),
        _down(
            [
                tag("path", d=band, class_=f"band {colour}"),
                tag("path", d=left, class_=f"certified left {colour}"),
                tag("path", d=right, class_=f"certified right {colour}"),
                tag("path", d=limit, class_="limit"),
                tag("path", d=_left(view, track, axis, scale), class_="told"),
            ]
        ),
        class_="time depths",
        role="img",
    )


def _left(view: View, track: Track, axis: Score, scale: Scale) -> str:
    """A bar for each forecast of the depth that is left, from its low end to its high one."""
    pieces = []
    for told in view.told:
        figure = told.figure("depth_left") if told.cloud == track.name else None
        if figure is not None:
            y = float(axis.before(told.block, told.end_s))
            low, high = (
                min(max(scale.one(end), 0.0), 1.0) * WIDE for end in (figure.low, figure.high)
            )
            pieces.append(f"M{low:.0f},{y:.0f}L{max(high, low + WIDE / 60):.0f},{y:.0f}")
    return "".join(pieces)


def _ticks(scale: Scale) -> list[Markup]:
    found = []
    for value in scale.ticks(TICK_APART):
        x = percent(scale.one(value))
        found.append(tag("line", x1=x, x2=x, y1="0%", y2="100%", class_="grid"))
        found.append(tag("text", amount(value, "V"), x=x, y=-3, class_="tick"))
    return found


def _depth_paths(track: Track, axis: Score, scale: Scale) -> tuple[str, str, str, str]:
    """Paths of the certified depths left and right, the band to what was evaluated, the limit."""
    left, right, band, limit = list[str](), list[str](), list[str](), list[str]()

    def x(depth_V: float) -> str:
        return f"{min(max(scale.one(depth_V), 0.0), 1.0) * WIDE:.0f}"

    for run in track.runs():
        for path, values in (
            (left, [stay.left.certified_V for stay in run]),
            (right, [stay.right.certified_V for stay in run]),
            (limit, [stay.lesser.limit_V for stay in run]),
        ):
            corners = []
            for stay, value in zip(run, values, strict=True):
                top, bottom = _rows(stay, axis)
                corners += [f"{x(value)},{top:.0f}", f"{x(value)},{bottom:.0f}"]
            path.append("M" + "L".join(corners))
        for stay in run:
            top, bottom = _rows(stay, axis)
            low, high = x(stay.lesser.certified_V), x(stay.lesser.evaluated_V)
            band.append(
                f"M{low},{top:.0f}L{high},{top:.0f}L{high},{bottom:.0f}L{low},{bottom:.0f}Z"
            )
    return "".join(left), "".join(right), "".join(band), "".join(limit)
