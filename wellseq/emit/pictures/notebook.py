"""Cases and traps that show themselves in a notebook: `_repr_html_` and `_repr_svg_`.

The drawings are those of the page, standing still; nothing in them runs or is fetched.  They are
made when a notebook asks, so nothing of this is loaded for a command.
"""

from __future__ import annotations

from functools import cache
from pathlib import Path

from wellseq.checks.case import Case
from wellseq.model.trap import Trap

WIDE, TALL = 900, 520
FINDINGS_MOST = 20


def show_themselves() -> None:
    """Give cases and traps the methods that notebooks look for."""
    for thing, methods in (
        (Case, {"_repr_html_": case_html, "_repr_svg_": case_svg}),
        (Trap, {"_repr_html_": trap_html, "_repr_svg_": trap_svg}),
    ):
        for name, method in methods.items():
            setattr(thing, name, method)


def case_svg(case: Case) -> str | None:
    """Voltages under their electrodes and the tracks of clouds; None without a time axis."""
    from wellseq.emit.pictures import bore, panels
    from wellseq.emit.pictures.view import view

    shown = view(case)
    if shown.axis is None or shown.stage is None:
        return None
    strips = panels.strips(shown, shown.stage, shown.axis)
    return _drawing([(bore.names(shown.stage), 28), (strips, TALL)])


def case_html(case: Case) -> str:
    """Verdict in a sentence, the drawing, and what stands in the way."""
    from wellseq.base.finding import Verdict
    from wellseq.emit.pictures.markup import Markup, cut, joined, tag
    from wellseq.emit.pictures.rows import SIGNS

    blocking = case.blocked
    passed = sum(one.verdict is Verdict.PASS for one in case.findings)
    said = f"✕ stopped by {len(blocking)} findings" if blocking else f"✓ {passed} readings pass"
    title = case.sequence.name if case.sequence is not None else case.shown
    rows = [
        tag(
            "tr",
            tag("td", SIGNS[one.verdict]),
            tag("td", one.name),
            tag("td", f"line {one.place.line}"),
            tag("td", tag("bdi", one.message)),
        )
        for one in blocking[:FINDINGS_MOST]
    ]
    more = len(blocking) - len(rows)
    return joined(
        tag("p", tag("strong", tag("bdi", cut(title, 80))), ": ", said),
        Markup(case_svg(case) or ""),
        tag("table", rows) if rows else "",
        tag("p", f"{more} more findings") if more > 0 else "",
    )


def trap_svg(trap: Trap) -> str:
    """The stack in section, to scale, with the electrodes' names."""
    from wellseq.emit.pictures import bore
    from wellseq.emit.pictures.stage import stage

    shown = stage(trap)
    radius = max(one.radius_m for one in trap.electrodes)
    high = WIDE * 2 * radius * (1 + 2 * bore.WALL_SHARE) / (shown.high_m - shown.low_m)
    return _drawing([(bore.names(shown), 28), (bore.section(shown), round(high))])


def trap_html(trap: Trap) -> str:
    """The stack's name and drawing, and what it is in a sentence."""
    from wellseq.emit.pictures import bore
    from wellseq.emit.pictures.markup import Markup, cut, joined, tag
    from wellseq.emit.pictures.stage import stage

    return joined(
        tag("p", tag("strong", tag("bdi", cut(trap.name, 80))), ": ", bore.describe(stage(trap))),
        Markup(trap_svg(trap)),
    )


def _drawing(parts: list[tuple[str, int]]) -> str:
    """Drawings (each with its height in px) one below the other in one SVG with its own style."""
    from wellseq.emit.pictures.markup import Markup, tag

    inside, top = [], 4
    for part, high in parts:
        inside.append(tag("svg", Markup(part), x=0, y=top, width=WIDE, height=high))
        top += high
    return tag(
        "svg",
        Markup(f"<style>{_style()}</style>"),
        inside,
        xmlns="http://www.w3.org/2000/svg",
        width=WIDE,
        height=top + 4,
        viewBox=f"0 0 {WIDE} {top + 4}",
        class_="wellseq-drawing",
    )


@cache
def _style() -> str:
    """The page's rules for drawings, held to this drawing, in light colours on paper."""
    from wellseq.emit.pictures.palette import LIGHT

    lines = (Path(__file__).parent / "drawing.css").read_text("utf-8").splitlines()
    rules = [
        ",".join(f".wellseq-drawing {one.strip()}" for one in line.split("{")[0].split(","))
        + "{"
        + line.split("{", 1)[1]
        for line in lines
        if "{" in line and not line.startswith("/*")
    ]
    colours = "".join(f"--{name}:{colour};" for name, colour in LIGHT.items())
    return f".wellseq-drawing{{{colours}background:var(--paper)}}\n" + "\n".join(rules)
