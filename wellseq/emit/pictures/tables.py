"""The tables of the page: findings, margins, dangers, rules, forecast, steps, depths, changes."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import Any

from wellseq.base.finding import Finding, Verdict
from wellseq.checks.numbers import amount
from wellseq.clouds.figures import Figure
from wellseq.emit.hazards import TOUCH_V
from wellseq.emit.interlocks import ruled
from wellseq.emit.pictures.cells import ROWS_MOST, Cell, figure, instant, table, when, where
from wellseq.emit.pictures.forecast import WORDS, unit_of
from wellseq.emit.pictures.markup import Markup, cut, joined, name, tag
from wellseq.emit.pictures.rows import SIGNS, clock
from wellseq.emit.pictures.signals import Column
from wellseq.emit.pictures.tracks import Side, Track
from wellseq.emit.pictures.view import Note, View

OUTCOMES = {"kept": 1, "not applicable": 2}
"""What stands in no way comes last."""
BREACHES_MOST = 8
SAID = {
    Verdict.FAIL: "fails",
    Verdict.UNSURE: "unsure",
    Verdict.ALLOWED: "allowed",
    Verdict.PASS: "passes",
}


def findings(view: View) -> Markup:
    """What stands in the way, is unsure or was allowed: each with its place and its instant."""
    noted = [note for note in view.notes if note.finding.verdict is not Verdict.PASS]
    if not noted:
        return tag("p", "Nothing stands in the way of this sequence.", class_="none")
    head = ("verdict", "what", "value", "limit", "margin", "where", "when")
    return table("Findings", head, (_finding(view, note) for note in noted))


def margins(view: View) -> Markup:
    """Every reading that passes, the nearest to its limit first."""
    noted = [note for note in view.notes if note.finding.verdict is Verdict.PASS]
    head = ("verdict", "what", "value", "limit", "margin", "where", "when")
    return table("Readings that pass", head, (_finding(view, note) for note in noted))


def _finding(view: View, note: Note) -> list[Cell]:
    one = note.finding
    verdict = tag(
        "span", f"{SIGNS[one.verdict]} {SAID[one.verdict]}", class_=f"verdict {one.verdict.value}"
    )
    said = joined(
        tag("strong", one.name, id=f"finding-{note.number}"),
        " ",
        name(one.subject) if one.subject else "",
        tag("br"),
        tag("bdi", one.message),
        tag("br") if one.hint or one.reason else "",
        tag("bdi", one.hint) if one.hint else "",
        tag("bdi", f"because: {one.reason}") if one.reason else "",
    )
    return [
        verdict,
        said,
        _of(one.value, one),
        _of(one.limit, one),
        _of(one.margin, one),
        where(view, one.place),
        when(view, note.at),
    ]


def _of(value: float | None, finding: Finding) -> Cell:
    return "" if value is None else figure(value, finding.unit)


def dangers(view: View) -> Markup:
    """Outputs that can injure: how high, when above the touch limit, what the end leaves."""
    rows = [
        (
            joined(name(one.output), " on ", name(", ".join(one.electrodes))),
            "yes" if one.flagged else "no",
            figure(one.largest_V, "V"),
            [
                joined(
                    instant(view, block, start, clock(view, block, start)),
                    f" for {amount(end - start, 's')}",
                    tag("br"),
                )
                for block, start, end in one.windows[:24]
            ]
            or "never commanded",
            "not stated" if one.stored_J is None else figure(one.stored_J, "J"),
            figure(one.ends_V[-1], "V"),
        )
        for one in view.hazards
    ]
    head = (
        "output",
        "flagged hazardous",
        "most commanded",
        f"above {TOUCH_V:g} V",
        "stored energy",
        "left at",
    )
    return table("Outputs that can injure", head, rows)


def rules(view: View) -> Markup:
    """Every interlock rule and what came of it, those that stand in the way first."""
    ranked = sorted(ruled(view.case), key=lambda one: OUTCOMES.get(str(one["outcome"]), 0))
    head = ("rule", "outcome", "as written", "why", "when")
    return table("Interlock rules", head, (_rule(view, one) for one in ranked))


def _rule(view: View, one: Mapping[str, Any]) -> list[Cell]:
    instants = [
        joined(when(view, (breach["block"] - 1, breach["start_s"], breach["end_s"])), tag("br"))
        for breach in one["breaches"][:BREACHES_MOST]
    ]
    outcome = one["outcome"]
    sign = {"kept": "✓", "not applicable": "·", "broken": "✕"}.get(outcome, "?")
    look = {"kept": "pass", "not applicable": "none", "broken": "fail"}.get(outcome, "unsure")
    return [
        name(one["name"]),
        tag("span", f"{sign} {outcome}", class_=f"verdict {look}"),
        tag("code", tag("bdi", one["text"])),
        tag("bdi", one["why"]),
        instants,
    ]


def stated(view: View) -> Markup:
    """What the author declares or assumes of each cloud, each figure with its interval."""
    rows = [
        (
            name(track.name),
            one.quantity,
            figure(one.value, one.unit),
            _interval(one.value - one.half_width, one.value + one.half_width, one.unit),
            one.how,
            instant(view, one.block, one.time_s, clock(view, one.block, one.time_s)),
        )
        for track in view.tracks
        for one in track.stated
    ]
    head = ("cloud", "quantity", "figure", "interval", "by", "from")
    return table("Declared and assumed", head, rows)


def forecast(view: View) -> Markup:
    """Every cloud at the end of every step: each figure with its interval, absent ones said so."""
    rows = [
        (
            name(told.cloud),
            instant(view, told.block, told.end_s, clock(view, told.block, told.end_s)),
            *(_foretold(told.figure(quantity), unit_of(quantity)) for quantity in WORDS),
            joined(
                name(", ".join(told.models), 80),
                [
                    joined(tag("br"), f"{quantity.replace('_', ' ')}: ", _known(one, quantity))
                    for quantity, one in told.further()
                ],
                joined(tag("br"), tag("bdi", told.why, class_="absent")) if told.why else "",
            ),
        )
        for told in view.told
    ]
    head = ("cloud", "at the end of the step at", *WORDS.values(), "by, and what was lacking")
    return table("Forecast", head, rows)


def _known(one: Figure, quantity: str) -> Markup:
    return _foretold(one if one.known else None, unit_of(quantity))


def _foretold(one: Figure | None, unit: str) -> Markup:
    if one is None:
        return figure(None, unit)
    if one.low == one.high:
        return figure(one.value, unit)
    return joined(
        figure(one.value, unit), tag("br"), tag("small", _interval(one.low, one.high, unit))
    )


def _interval(low: float, high: float, unit: str) -> Markup:
    return joined(figure(low, unit), " to ", figure(high, unit))


def steps(view: View) -> Markup:
    """Every step: when, how long, as written, what it moves, the least depths while it goes on."""
    least: dict[int, dict[str, float]] = {}
    for track in view.tracks:
        for stay in track.stays:
            depths = least.setdefault(stay.number, {})
            depth = stay.lesser.certified_V
            depths[track.name] = min(depth, depths.get(track.name, depth))
    moves = _moves(view)
    rows = [
        (
            tag("span", str(one.number + 1), id=f"step-{one.number}"),
            instant(view, one.block, one.start_s, clock(view, one.block, one.start_s)),
            figure(one.end_s - one.start_s, "s"),
            joined(name(one.origin.label), tag("br")) if one.origin.label else "",
            joined(tag("code", tag("bdi", one.text)), " ", where(view, one.origin.place)),
            [joined(line, tag("br")) for line in moves.get(one.number, ())],
            [
                joined(name(cloud), " ", figure(depth, "V"), tag("br"))
                for cloud, depth in least.get(one.number, {}).items()
            ],
        )
        for one in view.steps
    ]
    head = ("step", "begins", "lasts", "part", "as written", "moves", "least certified depth")
    return table("All steps in order of play", head, rows)


def _moves(view: View) -> dict[int, list[str]]:
    """Step → `C3, C9: −90 V to −80 V`, electrodes that move alike in one line."""
    timeline, trap = view.case.timeline, view.trap
    if timeline is None or trap is None:
        return {}
    alike: dict[tuple[int, float, float], list[str]] = {}
    for block in timeline.blocks:
        for piece in block.pieces[: 40 * ROWS_MOST]:
            users = trap.electrodes_of(piece.output) or (piece.output,)
            alike.setdefault((piece.number, piece.from_V, piece.to_V), []).extend(users)
    found: dict[int, list[str]] = {}
    for (step, low, high), together in alike.items():
        said = f"{cut(', '.join(together), 60)}: {amount(low, 'V')} to {amount(high, 'V')}"
        found.setdefault(step, []).append(said)
    return found


def depths(view: View, track: Track) -> Markup:
    """Every proved stretch of a cloud: certified and evaluated depths of both sides, the limit."""
    rows = [
        (
            instant(view, stay.block, stay.start_s, clock(view, stay.block, stay.start_s)),
            figure(stay.end_s - stay.start_s, "s"),
            joined(figure(stay.from_m, "m"), " to ", figure(stay.to_m, "m")),
            *_side(stay.left),
            *_side(stay.right),
            figure(stay.lesser.limit_V, "V"),
        )
        for stay in track.stays
    ]
    head = (
        "from",
        "lasts",
        "place",
        "left, certified",
        "left, evaluated",
        "right, certified",
        "right, evaluated",
        "limit",
    )
    more = track.all_stays - len(track.stays)
    thin = f" ({more} of {track.all_stays} left out, no extreme)" if more else ""
    return table(f"Depths of {cut(track.name)}{thin}", head, rows)


def _side(side: Side) -> tuple[Markup, Markup]:
    return figure(side.certified_V, "V"), figure(side.evaluated_V, "V")


def changes(all_columns: Iterable[Column]) -> Markup:
    """Every bar of the panel of signals in words."""
    rows = [
        (name(one.name), one.what, bar.word, bar.when) for one in all_columns for bar in one.bars
    ]
    return table("Switches, lines, drives", ("name", "what", "does", "when"), rows)


def not_run(view: View) -> Iterator[Markup]:
    """Why checks did not run, each cause with their names."""
    for cause, left in view.thing.by_cause().items():
        yield tag("p", f"Not examined: {', '.join(left)}: {cause}", class_="verdict unsure")
