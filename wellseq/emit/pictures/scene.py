"""One instant → the potential along the axis, with each cloud where it sits and how deep on both
sides.

The drawing is as wide as its page: places go by share of its width, volts by `Scale`.  Clouds of
positive charge sit at the bottoms of the potential, negative ones at its tops; each is a circle
with the sign of its charge.  Volts V, places m, times s of the block.
"""

from __future__ import annotations

import math

import numpy as np

from wellseq.checks.numbers import amount
from wellseq.emit.pictures.bore import percent
from wellseq.emit.pictures.markup import Markup, cut, tag
from wellseq.emit.pictures.palette import cloud_look
from wellseq.emit.pictures.scale import Scale
from wellseq.emit.pictures.stage import Floats, Stage
from wellseq.emit.pictures.tracks import Side, Stay, Track, energy_eV
from wellseq.emit.pictures.view import View

WIDE = 10_000
HIGH = 1000
TOP = 0.95
"""A tick above this share has no room for its volts."""


def scene(view: View, stage: Stage, block: int, time_s: float, name: str) -> Markup:
    """The potential at an instant (s), as an SVG that the script can redraw."""
    curve = stage.potential(view.volts(block, time_s))
    sitting = [(number, track, track.at(block, time_s)) for number, track in enumerate(view.tracks)]
    here = [(number, track, stay) for number, track, stay in sitting if stay is not None]
    drawn = [
        _cloud(view.scale, stage, curve, *one, view.length_m(one[1].name, block, time_s))
        for one in here
    ]
    words = ", ".join(f"{cut(track.name)} at {amount(stay.to_m, 'm')}" for _, track, stay in here)
    return tag(
        "svg",
        tag("title", f"Potential along the axis, {name}"),
        tag("desc", f"Clouds: {words or 'none'}."),
        grid(view.scale),
        plot(curve_path(stage, curve, view.scale), "phi"),
        [under for under, _ in drawn],
        [over for _, over in drawn],
        class_="scene",
        role="img",
    )


def plot(path: str, look: str) -> Markup:
    """A path in the units of a drawing, WIDE by HIGH, stretched to the drawing's own size."""
    return tag(
        "svg",
        tag("path", d=path, class_=look),
        viewBox=f"0 0 {WIDE} {HIGH}",
        preserveAspectRatio="none",
        class_="plot",
        aria_hidden="true",
    )


def grid(scale: Scale) -> list[Markup]:
    """A line with its volts for every tick."""
    found = []
    for value in scale.ticks():
        if scale.one(value) > TOP:
            continue
        at = percent(1 - scale.one(value))
        found.append(tag("line", x1="0%", x2="100%", y1=at, y2=at, class_="grid"))
        found.append(tag("text", amount(value, "V"), x=4, y=at, dy=-2, class_="tick"))
    return found


def curve_path(stage: Stage, curve: Floats, scale: Scale) -> str:
    """The potential (places,) in V as a path."""
    x = np.round(np.array([stage.share(float(z)) for z in stage.z_m]) * WIDE).astype(int)
    y = np.round((1 - scale.share(curve)) * HIGH, 1)
    return "M" + "L".join(
        f"{one},{other:g}" for one, other in zip(x.tolist(), y.tolist(), strict=True)
    )


def settle(stage: Stage, curve: Floats, sign: int, stay: Stay, near_m: float) -> float:
    """The place (m) of the minimum that belongs to a stay, near where it is proved to be."""
    low, high = stay.left.region_m[0], stay.right.region_m[1]
    inside = (stage.z_m >= min(low, near_m)) & (stage.z_m <= max(high, near_m))
    at = int(np.argmin(np.abs(stage.z_m - near_m)))
    level = sign * curve
    while at + 1 < len(level) and inside[at + 1] and level[at + 1] < level[at]:
        at += 1
    while at > 0 and inside[at - 1] and level[at - 1] < level[at]:
        at -= 1
    return float(stage.z_m[at])


def _cloud(
    scale: Scale,
    stage: Stage,
    curve: Floats,
    number: int,
    track: Track,
    stay: Stay,
    length_m: float,
) -> tuple[Markup, Markup]:
    """What lies under all clouds (levels, depths), and what lies over them (the disc)."""
    colour, _ = cloud_look(number)
    if stay.from_ground:
        return Markup(""), _bunch(scale, stage, number, track, stay)
    z_m = settle(stage, curve, track.sign, stay, stay.to_m)
    bottom = float(np.interp(z_m, stage.z_m, curve))
    arrows = [
        _level(scale, stage, bottom, stay),
        _extent(scale, stage, bottom, z_m, length_m),
        _arrow(scale, stage, curve, bottom, stay.left, "left"),
        _arrow(scale, stage, curve, bottom, stay.right, "right"),
    ]
    place = percent(stage.share(z_m)), percent(1 - scale.one(bottom))
    look = f"cloud {colour}"
    return tag("g", arrows, class_=look), tag("g", disc(track, *place), class_=look)


def _extent(scale: Scale, stage: Stage, bottom: float, z_m: float, length_m: float) -> Markup:
    """How long the cloud is forecast to be (m), on its own level; nothing where it is not known."""
    if not math.isfinite(length_m):
        return Markup("")
    low, high = (percent(stage.share(z_m + side * length_m / 2)) for side in (-1, 1))
    y = percent(1 - scale.one(bottom))
    return tag("line", x1=low, x2=high, y1=y, y2=y, class_="extent")


def disc(track: Track, x: str, y: str) -> list[Markup]:
    """A cloud's circle with the sign of its charge, and its name beside it."""
    return [
        tag("circle", cx=x, cy=y, r=8),
        tag("text", "+" if track.sign > 0 else "−", x=x, y=y, dy=4.5, class_="charge"),
        tag("text", cut(track.name, 18), x=x, y=y, dx=12, dy=4, class_="who"),
    ]


def _level(scale: Scale, stage: Stage, bottom: float, stay: Stay) -> Markup:
    """The cloud's own level (V) from barrier to barrier, from which the depths go."""
    sides = (stay.left.barrier_m, stay.right.barrier_m)
    low, high = (percent(min(1.0, max(0.0, stage.share(place)))) for place in sides)
    y = percent(1 - scale.one(bottom))
    return tag("line", x1=low, x2=high, y1=y, y2=y, class_="level")


def _arrow(
    scale: Scale, stage: Stage, curve: Floats, bottom: float, side: Side, word: str
) -> Markup:
    """From the cloud's level to the barrier's, at the barrier, with the certified depth (V)."""
    share = min(1.0, max(0.0, stage.share(side.barrier_m)))
    level = float(np.interp(side.barrier_m, stage.z_m, curve))
    ends = percent(1 - scale.one(bottom)), percent(1 - scale.one(level))
    x, outside = percent(share), share > (0.07 if word == "left" else 0.93)
    return tag(
        "g",
        tag("line", x1=x, x2=x, y1=ends[0], y2=ends[1], class_="depth"),
        tag("circle", cx=x, cy=ends[1], r=3, class_="tip"),
        tag(
            "text",
            f"≥ {amount(side.certified_V, 'V')}",
            x=x,
            y=percent(1 - (scale.one(bottom) + scale.one(level)) / 2),
            dx=-5 if outside else 5,
            class_=f"deep {'left' if outside else 'right'}",
        ),
    )


def _bunch(scale: Scale, stage: Stage, number: int, track: Track, stay: Stay) -> Markup:
    """A bunch known by its energy alone: a line at that energy, from gate to gate."""
    colour, dash = cloud_look(number)
    energies = [energy_eV(one) for one in track.stated if one.quantity == "energy"]
    level = track.sign * energies[0] / abs(track.charges) if energies else 0.0
    y = percent(1 - scale.one(level))
    low, high = (percent(stage.share(place)) for place in (stay.from_m, stay.to_m))
    middle = percent(stage.share((stay.from_m + stay.to_m) / 2))
    return tag(
        "g",
        tag("line", x1=low, x2=high, y1=y, y2=y, class_="energy", stroke_dasharray=dash or None),
        disc(track, middle, y),
        class_=f"cloud {colour}",
    )
