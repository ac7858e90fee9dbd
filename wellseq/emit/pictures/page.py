"""A case → `report.html`: one file that shows the whole sequence in any browser, without a network.

The page holds its own style and script and nothing else may run in it: its policy names both by
their SHA-256 and forbids every request (Content Security Policy Level 3, W3C).  Without scripts it
is read as it stands; with them a slider moves through time.
"""

from __future__ import annotations

import base64
import hashlib
from collections.abc import Iterator
from functools import cache
from pathlib import Path

from wellseq.base.finding import Verdict
from wellseq.checks.numbers import amount
from wellseq.emit.pictures import tables
from wellseq.emit.pictures.cells import folded, section
from wellseq.emit.pictures.facts import facts
from wellseq.emit.pictures.markup import Markup, cut, island, joined, name, tag
from wellseq.emit.pictures.palette import sheet
from wellseq.emit.pictures.sections import album, instant, sources, the_score, the_signals
from wellseq.emit.pictures.view import View
from wellseq.version import __version__

GENERATOR = "wellseq"
STYLES = ("drawing.css", "page.css")
SCRIPTS = ("numbers.js", "instant.js", "draw.js", "page.js")


def report(shown: View, standing: str = "") -> bytes:
    """The page of a case; `standing` says in a sentence what the tables beside it are good for."""
    style, script = own(*STYLES), own(*SCRIPTS)
    title = f"{cut(_title(shown), 80)}: report"
    head = tag(
        "head",
        tag("meta", charset="utf-8"),
        tag("meta", http_equiv="Content-Security-Policy", content=_policy(style, script)),
        tag("meta", name="viewport", content="width=device-width,initial-scale=1"),
        tag("meta", name="generator", content=f"{GENERATOR} {__version__}"),
        tag("meta", name="referrer", content="no-referrer"),
        tag("title", title),
        Markup(f"<style>{style}</style>"),
    )
    body = tag(
        "body",
        tag("a", "To the findings", href="#findings", class_="skip"),
        _header(shown, standing),
        tag("main", list(_sections(shown)), id="top"),
        tag("footer", _footer(shown)),
        Markup(f'<script type="application/json" id="facts">{island(facts(shown))}</script>'),
        Markup(f"<script>{script}</script>"),
    )
    whole = f'<!DOCTYPE html>\n<html lang="en">{head}{body}</html>\n'
    return whole.encode("utf-8", "backslashreplace")


@cache
def own(*names: str) -> str:
    """The page's own style or script, made of files beside this one."""
    folder = Path(__file__).parent
    text = "\n".join((folder / one).read_text("utf-8") for one in names)
    return (sheet() + text) if names == STYLES else f"(function(){{\n'use strict';\n{text}}})();\n"


def _policy(style: str, script: str) -> str:
    hashes = [
        base64.b64encode(hashlib.sha256(text.encode()).digest()).decode()
        for text in (style, script)
    ]
    return (
        f"default-src 'none'; style-src 'sha256-{hashes[0]}'; script-src 'sha256-{hashes[1]}'; "
        "base-uri 'none'; form-action 'none'"
    )


def _title(shown: View) -> str:
    sequence = shown.case.sequence
    return sequence.name if sequence is not None else shown.case.shown.rsplit("/", 1)[-1]


def _header(shown: View, standing: str) -> Markup:
    thing = shown.thing
    counts = {verdict: sum(one.verdict is verdict for one in thing.findings) for verdict in Verdict}
    if thing.clear:
        said, look = f"✓ Clear: {counts[Verdict.PASS]} readings pass", "pass"
    else:
        stops = [
            f"{counts[verdict]} {words}"
            for verdict, words in ((Verdict.FAIL, "fail"), (Verdict.UNSURE, "unsure"))
            if counts[verdict]
        ]
        said, look = f"✕ Stopped: {', '.join(stops) or thing.cause}", "fail"
    if counts[Verdict.ALLOWED]:
        said += f", {counts[Verdict.ALLOWED]} allowed"
    trap = joined(" on ", name(shown.trap.name)) if shown.trap is not None else ""
    played = "" if thing.duration_s is None else f"; {amount(thing.duration_s, 's')} played"
    return tag(
        "header",
        tag("h1", tag("bdi", cut(_title(shown), 120))),
        tag("p", tag("span", said, class_=f"verdict {look}"), trap, played, "."),
        tag("p", standing, class_="standing") if standing else "",
        _menu(shown),
    )


def _menu(shown: View) -> Markup:
    places = [("findings", "Findings"), ("sources", "Text")]
    if shown.drawn:
        names = ("Instant", "Score", "Signals", "Findings", "Dangers", "Clouds", "Steps")
        places = [*((one.lower(), one) for one in names), ("sources", "Text")]
    links = [tag("li", tag("a", words, href=f"#{place}")) for place, words in places]
    return tag("nav", tag("ul", links), aria_label="Parts of this page")


def _sections(shown: View) -> Iterator[Markup]:
    axis, stage = shown.axis, shown.stage
    if axis is not None and stage is not None:
        yield tag(
            "div",
            instant(shown, axis, stage),
            the_score(shown, axis, stage),
            the_signals(shown, axis),
        )
        yield album(shown, axis, stage)
    else:
        yield tag("section", sources(shown), id="sources", class_="plain")
    yield section(
        "findings",
        "Findings",
        tables.findings(shown),
        *tables.not_run(shown),
        folded("Readings that pass", tables.margins(shown)),
    )
    if axis is None or stage is None:
        return
    yield section(
        "dangers",
        "Dangers",
        tables.dangers(shown),
        folded("Interlock rules and what came of each", tables.rules(shown)),
    )
    yield section(
        "clouds",
        "Clouds",
        _forecast(shown),
        tables.stated(shown),
        *(
            folded(f"Depths of {cut(track.name)}", tables.depths(shown, track))
            for track in shown.tracks
        ),
    )
    yield section("steps", "Steps", tables.steps(shown))


def _forecast(shown: View) -> Markup:
    if not shown.tracks:
        return tag("p", "No cloud is declared.", class_="none")
    if shown.told:
        return folded("Forecast of every cloud at the end of every step", tables.forecast(shown))
    return tag(
        "p",
        "No forecast was made: what the table below does not give of a cloud is not known, and "
        "depths are vacuum depths.",
        class_="absent",
    )


def _footer(shown: View) -> str:
    return (
        f"Made by wellseq {__version__}. This page is for looking: only a published folder that "
        "verify accepts is to be played, and it is no safety interlock."
    )
