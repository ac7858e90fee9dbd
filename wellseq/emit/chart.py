"""A chart of what is live when → an SVG drawing for an HTML page, in the page's own colours.

Blocks and waits stand side by side, each drawn to its own scale: their widths follow the square
root of their lengths, so that a second beside an hour can still be seen.  The table beside the
chart says the same in figures.
"""

from __future__ import annotations

import math
from html import escape

from wellseq.base.names import printable
from wellseq.checks.numbers import amount
from wellseq.emit.page import Bar, Chart, ChartRow

WIDTH, LABEL, ROW, HEAD = 720.0, 116.0, 8.2, 17.0
LEAST = 30.0
"""Least width of a stretch, in units of the drawing."""
THINNEST = 1.2
KINDS = {
    "high": "above 120 V",
    "live": "above 60 V",
    "drive": "radio-frequency drive",
    "line": "line not in its safe state",
}


def drawn(chart: Chart) -> str:
    """The chart as an element of HTML; empty when there is nothing to show."""
    if not chart.rows:
        return ""
    edges = _edges(chart)
    height = HEAD + ROW * len(chart.rows) + 3
    rows = [_row(chart, row, edges, HEAD + ROW * number) for number, row in enumerate(chart.rows)]
    legend = "".join(
        f'<li class="{kind}">{words}</li>'
        for kind, words in KINDS.items()
        if any(row.kind == kind for row in chart.rows)
    )
    if any(waits for _, _, waits in chart.stretches):
        legend += '<li class="wait">waiting for a trigger, at the longest</li>'
    return (
        '<figure>\n<svg role="img" aria-label="What is live when; the table gives the times" '
        f'viewBox="0 0 {WIDTH:g} {height:g}">\n{_columns(chart, edges, height)}\n'
        + "\n".join(rows)
        + f'\n</svg>\n<figcaption><ul class="legend">{legend}</ul></figcaption>\n</figure>'
    )


def _edges(chart: Chart) -> list[float]:
    """Where each stretch begins across the page, and where the last one ends."""
    shares = [math.sqrt(max(length, 0.0)) for _, length, _ in chart.stretches]
    room = WIDTH - LABEL - LEAST * len(shares)
    whole = sum(shares) or 1.0
    edges = [LABEL]
    for share in shares:
        edges.append(edges[-1] + LEAST + room * share / whole)
    return edges


def _columns(chart: Chart, edges: list[float], height: float) -> str:
    """The stretches as columns, with their names above."""
    found = []
    for number, (name, length, waits) in enumerate(chart.stretches):
        left, right = edges[number], edges[number + 1]
        kind = "wait" if waits else "block"
        found.append(
            f'<rect class="{kind}" x="{left:.1f}" y="{HEAD:g}" width="{right - left:.1f}" '
            f'height="{height - HEAD:g}"/>'
        )
        room = max(int((right - left) / 3.6), 3)
        shown = printable(name)
        shown = shown if len(shown) <= room else shown[: room - 1] + "…"
        middle = (left + right) / 2
        words = (("wait" if waits else shown), amount(length, "s"))
        for line, word in enumerate(words):
            found.append(
                f'<text class="name" x="{middle:.1f}" y="{6.5 + 7 * line:g}">{escape(word)}</text>'
            )
    return "\n".join(found)


def _row(chart: Chart, row: ChartRow, edges: list[float], top: float) -> str:
    label = f'<text class="label" x="{LABEL - 4:g}" y="{top + 6.4:g}">{_label(row)}</text>'
    return label + "".join(_bar(chart, row, bar, edges, top) for bar in row.bars)


def _label(row: ChartRow) -> str:
    shown = printable(row.label)
    return escape(shown if len(shown) <= 28 else shown[:27] + "…")


def _bar(chart: Chart, row: ChartRow, bar: Bar, edges: list[float], top: float) -> str:
    left, right = edges[bar.stretch], edges[bar.stretch + 1]
    length = chart.stretches[bar.stretch][1] or 1.0
    start = left + (right - left) * min(bar.start_s / length, 1.0)
    width = max((right - left) * (bar.end_s - bar.start_s) / length, THINNEST)
    start = min(start, right - width)
    return (
        f'<rect class="{row.kind}" x="{start:.1f}" y="{top + 1.3:g}" width="{width:.1f}" '
        f'height="{ROW - 2.6:g}"/>'
    )
