"""View → the plain values that the page's script works with: axis, courses, tracks, potentials.

Times are s of the block, volts V, places m; potentials are whole multiples of UNIT_V per volt, for
drawing only.  Nothing here is text that the script would put into the page as markup.
"""

from __future__ import annotations

import math

import numpy as np

from wellseq.base.place import Place
from wellseq.emit.pictures.courses import Course
from wellseq.emit.pictures.forecast import WORDS, unit_of
from wellseq.emit.pictures.markup import cut
from wellseq.emit.pictures.stage import Stage
from wellseq.emit.pictures.tracks import Side, Stated, Track, energy_eV
from wellseq.emit.pictures.view import View

UNIT_V = 1e-5
NUMBERS_MOST = 4


def anchor(file: int, line: int) -> str:
    """The id of a line of the file of that number."""
    return f"line-{file}-{line}"


def facts(view: View) -> dict[str, object]:
    """Everything that the script needs, ready for JSON; empty where nothing can be drawn."""
    if view.axis is None or view.stage is None or view.trap is None:
        return {}
    places = dict[object, int]()
    texts: list[list[object]] = []
    statement: dict[int, int] = {}
    for step in view.steps:
        key = step.origin.place, step.origin.chain
        if key not in places:
            places[key] = len(texts)
            texts.append([step.text, _lines(view, step.origin.place, step.origin.chain)])
        statement[step.number] = places[key]
    return {
        "blocks": [
            [cut(block.name, 40), float(block.duration_s)]
            for block in (view.case.timeline.blocks if view.case.timeline is not None else ())
        ],
        "cells": [
            [
                cell.block,
                cell.start_s,
                cell.end_s,
                round(cell.top, 1),
                1 if cell.wait else 0,
                [[one + 1, statement[one]] for one in cell.numbers[-NUMBERS_MOST:]],
            ]
            for cell in view.axis.cells
        ],
        "parts": [[cut(part.label, 60), round(part.top, 1)] for part in view.axis.parts],
        "statements": texts,
        "courses": [_course(one) for one in view.courses],
        "electrodes": _electrodes(view),
        "scale": [view.scale.low_V, view.scale.high_V, view.scale.soft_V],
        "stage": _stage(view.stage),
        "clouds": [_cloud(track) for track in view.tracks],
        "told": _told(view),
        "quantities": [[words, unit_of(one)] for one, words in WORDS.items()],
    }


def _lines(view: View, place: Place, chain: tuple[Place, ...]) -> list[list[int]]:
    """[file, first line, last line] of a statement, then of the calls that led to it."""
    files = [*view.thing.sources]
    return [
        [files.index(one.file), one.line, max(one.line, one.end_line)]
        for one in (place, *chain)
        if one.file in files
    ]


def _course(course: Course) -> list[object]:
    """Per block: times, volts, and the indices of corners that a half-cosine leads to."""
    return [
        [one.time_s.tolist(), one.volts_V.tolist(), np.flatnonzero(one.smooth).tolist()]
        for one in course.stretches
    ]


def _electrodes(view: View) -> list[list[object]]:
    assert view.trap is not None
    assert view.stage is not None
    behind = {name: at for at, one in enumerate(view.courses) for name in one.electrodes}
    return [
        [
            cut(one.name, 24),
            behind[one.name],
            view.stage.share(one.from_m),
            view.stage.share(one.to_m),
        ]
        for one in view.trap.electrodes
    ]


def _stage(stage: Stage) -> dict[str, object]:
    units = np.round(stage.unit / UNIT_V).astype(int).tolist() if stage.solved else []
    return {
        "low": stage.low_m,
        "high": stage.high_m,
        "count": len(stage.z_m),
        "per": UNIT_V,
        "units": units,
    }


def _cloud(track: Track) -> dict[str, object]:
    return {
        "name": cut(track.name, 30),
        "species": cut(track.species, 30),
        "charges": track.charges,
        "stays": [
            [
                stay.block,
                stay.start_s,
                stay.end_s,
                stay.from_m,
                stay.to_m,
                1 if stay.from_ground else 0,
                _side(stay.left),
                _side(stay.right),
            ]
            for stay in track.shown
        ],
        "stated": [_stated(one) for one in track.stated],
    }


def _told(view: View) -> list[list[object]]:
    """[cloud, block, start and end in s, then per quantity (value, low, high) or None]."""
    clouds = {track.name: number for number, track in enumerate(view.tracks)}
    found: list[list[object]] = []
    for one in view.told:
        figures = [one.figure(quantity) for quantity in WORDS]
        numbers = [None if fig is None else [fig.value, fig.low, fig.high] for fig in figures]
        found.append([clouds.get(one.cloud, -1), one.block, one.start_s, one.end_s, numbers])
    return found


def _side(side: Side) -> list[float | None]:
    numbers = (side.certified_V, side.evaluated_V, side.limit_V, side.barrier_m, *side.region_m)
    return [known(one) for one in numbers]


def _stated(one: Stated) -> list[object]:
    energy = energy_eV(one)
    return [
        one.block,
        one.time_s,
        one.quantity,
        one.value,
        one.half_width,
        one.unit,
        one.how,
        known(energy),
    ]


def known(value: float) -> float | None:
    """A number that JSON has room for; None for one that is not known."""
    return value if math.isfinite(value) else None
