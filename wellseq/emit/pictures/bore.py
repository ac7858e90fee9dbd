"""The stack in section, to scale: both walls of every electrode, its name, its volts, the axis.

One unit of the drawing is 0.1 mm along the axis and across it, so a ring looks as long and as wide
as it is.  Names and volts are set beside the drawing in a row of their own, in two heights.
"""

from __future__ import annotations

from wellseq.checks.numbers import amount
from wellseq.emit.pictures.markup import Markup, cut, joined, tag
from wellseq.emit.pictures.stage import Stage
from wellseq.model.trap import Electrode

PER_METRE = 1e4
WALL_SHARE = 0.16
"""How thick a wall is drawn, as a share of its radius; the trap file does not say."""
NAME_MOST = 8


def section(stage: Stage) -> Markup:
    """The walls of all electrodes, to scale in both directions, as an SVG as wide as it may be."""
    width = (stage.high_m - stage.low_m) * PER_METRE
    radius = max(one.radius_m for one in stage.trap.electrodes) * PER_METRE
    half = radius * (1 + 2 * WALL_SHARE)
    parts = [part for one in stage.trap.electrodes for part in _walls(stage, one, half)]
    axis = tag("line", x1=0, x2=round(width), y1=round(half), y2=round(half), class_="axis")
    return tag(
        "svg",
        tag("title", f"The stack of {cut(stage.trap.name)} in section, to scale"),
        tag("desc", describe(stage)),
        axis,
        parts,
        viewBox=f"0 0 {width:.0f} {2 * half:.0f}",
        class_="bore",
        role="img",
    )


def describe(stage: Stage) -> str:
    """The stack in one sentence: how many electrodes, from where to where, how wide."""
    first, last = stage.trap.electrodes[0], stage.trap.electrodes[-1]
    radii = sorted({one.radius_m for one in stage.trap.electrodes})
    wide = " to ".join(amount(radius, "m") for radius in dict.fromkeys((radii[0], radii[-1])))
    return (
        f"{len(stage.trap.electrodes)} electrodes from {amount(first.from_m, 'm')} to "
        f"{amount(last.to_m, 'm')} along the axis, inner radius {wide}"
    )


def names(stage: Stage) -> Markup:
    """The electrodes' names over the section, by turns in two heights."""
    texts = []
    for number, one in enumerate(stage.trap.electrodes):
        middle = stage.share(one.middle_m)
        label = tag("title", f"{cut(one.name)}, on output {cut(one.output)}")
        texts.append(
            tag(
                "text",
                cut(one.name, NAME_MOST),
                label,
                x=percent(middle),
                y=11 if number % 2 == 0 else 23,
                class_="most" if number % 4 else None,
            )
        )
    return tag("svg", texts, class_="names", aria_hidden="true")


def volts(stage: Stage, standing: list[float]) -> Markup:
    """What every electrode stands at (V), under the section; the script keeps it up to date."""
    texts = [
        tag(
            "text",
            short_volts(now),
            x=percent(stage.share(one.middle_m)),
            y=11 if number % 2 == 0 else 23,
            class_=sign_class(now),
            data_e=number,
        )
        for number, (one, now) in enumerate(zip(stage.trap.electrodes, standing, strict=True))
    ]
    return tag("svg", texts, class_="names volts", aria_hidden="true")


def short_volts(value: float) -> str:
    """Volts in three figures without a unit, as there is room for under an electrode."""
    text = f"{value:.3g}" if abs(value) < 1000 else f"{value:.0f}"
    return text.replace("-", "−") if float(text) else "0"


def sign_class(value: float) -> str:
    """The class that colours a number of this sign."""
    return "plus" if value > 0 else "minus" if value < 0 else "zero"


def percent(share: float) -> str:
    """A share as a length that SVG takes along its width or height."""
    return f"{share * 100:.3f}".rstrip("0").rstrip(".") + "%"


def _walls(stage: Stage, one: Electrode, half: float) -> list[Markup]:
    """Upper and lower wall of an electrode; a ring in sectors shows its cuts."""
    left = (one.from_m - stage.low_m) * PER_METRE
    width, radius = one.length_m * PER_METRE, one.radius_m * PER_METRE
    thick = radius * WALL_SHARE
    label = tag("title", f"{cut(one.name)}: {amount(one.length_m, 'm')} long")
    found = []
    for top in (half - radius - thick, half + radius):
        found.append(
            tag(
                "rect",
                label,
                x=round(left),
                y=round(top),
                width=max(1, round(width)),
                height=round(thick),
                class_="wall",
            )
        )
        for cut_at in range(1, one.sectors // 2):
            at = round(left + width * cut_at / (one.sectors // 2))
            found.append(
                tag("line", x1=at, x2=at, y1=round(top), y2=round(top + thick), class_="slit")
            )
    return found


def whole(stage: Stage, standing: list[float] | None = None) -> Markup:
    """Names, section and, where they are given, volts (V), one below the other."""
    under = volts(stage, standing) if standing is not None else Markup("")
    return joined(names(stage), section(stage), under)
