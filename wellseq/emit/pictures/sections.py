"""The parts of the page that show a sequence over time: instant, score, signals, album, text.

Each is drawn as it stands at first, and read so without scripts; the page's script moves it.  Times
are s of the block.
"""

from __future__ import annotations

from wellseq.base.names import printable
from wellseq.emit.excerpt import lines_of
from wellseq.emit.pictures import bore, cells, panels, rows, signals, tables
from wellseq.emit.pictures.cells import folded, section
from wellseq.emit.pictures.facts import anchor
from wellseq.emit.pictures.markup import Markup, cut, joined, name, tag
from wellseq.emit.pictures.palette import cloud_look
from wellseq.emit.pictures.scene import scene
from wellseq.emit.pictures.score import Part, Score
from wellseq.emit.pictures.stage import Stage
from wellseq.emit.pictures.view import View

SCENES_MOST = 24


def instant(shown: View, axis: Score, stage: Stage) -> Markup:
    """The moving picture: text beside it, potential, stack to scale, slider, what the clouds do."""
    first = _first_instant(axis)
    words = rows.clock(shown, *first)
    drawing = (
        scene(shown, stage, *first, words)
        if stage.solved
        else tag("p", f"The potential cannot be drawn: {stage.why}.", class_="absent")
    )
    picture = tag(
        "div",
        tag(
            "p",
            tag("span", "Potential on the axis at "),
            tag("output", words, id="now"),
            class_="at",
        ),
        tag(
            "div",
            tag("div", drawing, id="scene-holder", class_="holder"),
            bore.whole(stage, shown.volts(*first)),
            class_="stage",
        ),
        tag("div", _controls(shown), class_="controls", id="controls", hidden="hidden"),
        class_="picture",
    )
    text = tag("section", tag("h2", "Text", class_="small"), sources(shown), id="sources")
    return tag(
        "section",
        tag("h2", "Instant", class_="away"),
        text,
        picture,
        tag(
            "aside",
            tag("h2", "Clouds now", class_="small"),
            _readout(shown),
            id="readout",
            tabindex=0,
            aria_label="Clouds now",
        ),
        id="instant",
        class_="instant",
    )


def _first_instant(axis: Score) -> tuple[int, float]:
    cell = next((one for one in axis.cells if one.end_s > one.start_s), axis.cells[0])
    return cell.block, cell.start_s


def _controls(shown: View) -> Markup:
    """The slider and its buttons; hidden until a script runs."""
    looks = [
        ("all", "whole stack"),
        *((str(at), cut(track.name, 18)) for at, track in enumerate(shown.tracks)),
    ]
    return joined(
        tag("label", "Instant, by steps", for_="slider", class_="away"),
        tag("input", type="range", id="slider", min=0, max=100_000, step=1, value=0),
        tag(
            "div",
            _button("back", "◂ step", "Previous step"),
            _button("on", "step ▸", "Next step"),
            _button("play", "▸ play", "Play through the steps"),
            tag(
                "label",
                "Look at ",
                tag(
                    "select",
                    [tag("option", words, value=value) for value, words in looks],
                    id="look",
                ),
            ),
            _button("theme", "dark / light", "Change between dark and light"),
            class_="buttons",
        ),
        tag("p", "Arrow keys: one step; Page keys: one part; Home and End.", class_="keys"),
    )


def _button(place: str, words: str, said: str) -> Markup:
    return tag("button", words, type="button", id=place, title=said)


def _readout(shown: View) -> Markup:
    """What each cloud does at the first instant; the script keeps it up to date."""
    if not shown.tracks:
        return tag("p", "No cloud is declared.", class_="none")
    parts = []
    for at, track in enumerate(shown.tracks):
        colour, dash = cloud_look(at)
        sample = tag(
            "svg",
            tag("line", x1=0, x2=34, y1=6, y2=6, class_="track", stroke_dasharray=dash or None),
            class_="sample",
            aria_hidden="true",
        )
        parts.append(
            tag(
                "dt",
                sample,
                " ",
                name(track.name, 24),
                f" ({cut(track.species, 24)})",
                class_=colour,
            )
        )
        parts.append(tag("dd", "Move the slider to follow it.", data_cloud=at))
    return tag("dl", parts, class_="now")


def the_score(shown: View, axis: Score, stage: Stage) -> Markup:
    """Gutter, strips under their electrodes, and a depth panel for each cloud."""
    key = (
        "Time runs down, a row for each step, higher the longer it lasts. Under each electrode: "
        "its voltage, positive to the right, negative to the left. Over them each cloud's proved "
        "place: ● it begins, ○ it ends. Depths: full line left, dotted right, both certified; "
        "band: up to what was evaluated; dashed: the limit; short bars: forecast, space charge off."
    )
    strips = (bore.names(stage), panels.strips(shown, stage, axis), cursor())
    return tag(
        "section",
        tag("h2", "Score"),
        tag("p", key, class_="keys"),
        tag("div", _zoom(), class_="zoom", hidden="hidden"),
        tag(
            "div",
            tag(
                "div",
                tag("p", "part · step · time", class_="cap"),
                rows.gutter(shown, axis),
                cursor(words=True),
                class_="gutter-box",
            ),
            tag("div", strips, class_="strips-box"),
            tag("div", tag("p", class_="cap"), rows.labels(axis), class_="gutter-box again"),
            tag("div", _depths(shown, axis), class_="depths-box"),
            class_="score",
        ),
        _thinned(shown),
        id="score",
        class_="band",
    )


def _depths(shown: View, axis: Score) -> list[Markup]:
    if not shown.tracks:
        return [tag("p", "No cloud is declared.", class_="none")]
    return [
        tag(
            "figure",
            tag("figcaption", "Depth, ", name(track.name, 18), class_=cloud_look(at)[0]),
            panels.depth_panel(shown, at, axis),
            cursor(),
            class_="depth",
        )
        for at, track in enumerate(shown.tracks)
    ]


def cursor(words: bool = False) -> Markup:
    """The line across a panel at the present instant, with the step's words where they fit."""
    return tag("div", tag("span") if words else "", class_="cursor", aria_hidden="true")


def _thinned(shown: View) -> Markup:
    """How much was left out of the drawing, if anything was."""
    corners = sum(one.corners for one in shown.courses)
    kept = sum(one.kept for one in shown.courses)
    if kept == corners:
        return Markup("")
    return tag(
        "p",
        f"Drawn from {kept} of {corners} corners; every least and greatest voltage is kept.",
        class_="keys",
    )


def _zoom() -> Markup:
    return joined(
        tag(
            "label",
            "Height ",
            tag(
                "input",
                type="range",
                id="zoom",
                min=0,
                max=5,
                step=0.25,
                value=0,
                aria_label="Height of the score",
            ),
        ),
        tag(
            "label",
            tag("input", type="radio", name="by", value="steps", checked="checked"),
            " by steps",
        ),
        tag("label", tag("input", type="radio", name="by", value="seconds"), " by seconds"),
    )


def the_signals(shown: View, axis: Score) -> Markup:
    """Switches, lines, drives and dangerous outputs beside the labels of the parts."""
    found = signals.columns(shown, axis)
    if not found:
        return section("signals", "Signals", tag("p", "No line, switch or drive.", class_="none"))
    inside = (signals.heads(found), signals.panel(found, axis), cursor())
    return tag(
        "section",
        tag("h2", "Switches, lines, drives"),
        tag(
            "div",
            tag("div", tag("div", class_="cap-high"), rows.labels(axis), class_="gutter-box"),
            tag(
                "div",
                tag("div", inside, class_="signals-wide"),
                class_="signals-box",
                tabindex=0,
                role="region",
                aria_label="Signals over time",
            ),
            class_="score two",
        ),
        folded("Every change in words", tables.changes(found)),
        id="signals",
        class_="band",
    )


def album(shown: View, axis: Score, stage: Stage) -> Markup:
    """The stack at the end of every part: for print, for reading without scripts, for jumping."""
    if not stage.solved:
        return Markup("")
    parts = axis.parts
    if len(parts) > SCENES_MOST:
        parts = tuple(parts[at * len(parts) // SCENES_MOST] for at in range(SCENES_MOST))
    figures = [_scene_of(shown, stage, part) for part in parts]
    return tag(
        "section",
        tag("h2", "The end of every part"),
        tag("div", figures, class_="album"),
        id="album",
        class_="band",
    )


def _scene_of(shown: View, stage: Stage, part: Part) -> Markup:
    words = rows.clock(shown, part.end_block, part.end_s)
    return tag(
        "figure",
        scene(shown, stage, part.end_block, part.end_s, words),
        bore.section(stage),
        tag(
            "figcaption",
            name(rows.part_name(part), 40),
            ", ",
            cells.instant(shown, part.end_block, part.end_s, words),
        ),
    )


def sources(shown: View) -> Markup:
    """The sequence's own text and what it uses; the trap file where something is wrong in it."""
    wrong = {note.finding.place.file for note in shown.notes if note.finding.blocks}
    files = [
        (number, file, source)
        for number, (file, source) in enumerate(shown.thing.sources.items())
        if not file.endswith(".toml") or file in wrong or not shown.drawn
    ]
    parts = []
    for number, file, source in files:
        lines = [
            tag(
                "li",
                tag("bdi", printable(line.replace("\t", "        "))) if line else " ",
                id=anchor(number, at),
            )
            for at, line in enumerate(lines_of(source.removeprefix("\ufeff")), 1)
        ]
        parts.append(tag("h3", tag("bdi", cut(shown.name_of(file), 60))))
        parts.append(tag("ol", lines))
    return tag(
        "div", parts, class_="text", tabindex=0, role="region", aria_label="Text of the sequence"
    )
